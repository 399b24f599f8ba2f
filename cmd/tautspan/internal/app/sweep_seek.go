package app

import (
	"context"
	"errors"
	"math"

	"github.com/tautspan/tautspan/engine/doubt"
	"github.com/tautspan/tautspan/engine/formula"
	"github.com/tautspan/tautspan/engine/measure"
	"github.com/tautspan/tautspan/engine/scenario"
	"github.com/tautspan/tautspan/engine/seek"
)

// Looks at a range: at exact answers, and where each look is a run. Chosen: the
// meetings of vibrations with lines are dozens at most; a run takes seconds.
const (
	meetSteps = 240
	bestSteps = 60
	runSteps  = 16
)

// search is the problem of expressions over one let, with that let's own doubt
// set aside.
type search struct {
	s        *sweeper
	template scenario.Template // with the let free of doubt
	name     string
	asked    []scenario.Collect
	needsRun bool
}

func (s *sweeper) search(ctx context.Context, over scenario.Over, asked []scenario.Collect) (*search, *seek.Problem, error) {
	q := &search{s: s, template: *s.compiled.Template, asked: asked}
	q.template.Requires, q.template.Collects = nil, asked
	q.template.Lets = append([]scenario.Let(nil), q.template.Lets...)
	let := &q.template.Lets[over.Let]
	let.Doubt = nil
	q.name = let.Name
	session, err := measure.New(&q.template, nil, s.options(ctx, 1))
	if err != nil {
		return nil, nil, err
	}
	q.needsRun = session.NeedsRun()
	p := &seek.Problem{From: over.From, To: over.To, Inputs: session.Doubtful(), Values: q.values, Workers: s.want.Workers}
	if q.needsRun {
		p.Inputs = nil
	}
	return q, p, nil
}

// values are the expressions numbered in which at one value of the let.
func (q *search) values(ctx context.Context, which []int, x float64, inputs []float64) ([]float64, error) {
	t := q.template
	t.Collects = make([]scenario.Collect, len(which))
	for i, w := range which {
		t.Collects[i] = q.asked[w]
	}
	override := map[string]float64{q.name: x}
	if inputs != nil {
		centre, err := measure.New(&t, override, q.s.options(ctx, 1))
		if err != nil {
			return nothing(which, err)
		}
		for i, in := range centre.Doubtful() {
			override[in.Name] = inputs[i]
		}
	}
	session, err := measure.New(&t, override, q.s.options(ctx, 1))
	if err != nil {
		return nothing(which, err)
	}
	outcome, err := q.s.outcome(ctx, session, 1)
	if err != nil {
		return nil, err
	}
	values, err := session.Nominal(ctx, outcome)
	if err != nil {
		return nothing(which, err)
	}
	return values, nil
}

// nothing stands where a scenario cannot be at a value of the let: a length below
// zero, a line without tension.
func nothing(which []int, err error) ([]float64, error) {
	var path *scenario.PathError
	if !errors.As(err, &path) {
		return nil, err
	}
	out := make([]float64, len(which))
	for i := range out {
		out[i] = math.NaN()
	}
	return out, nil
}

// meets finds the crossings; questions over the same range are looked at together.
func (s *sweeper) meets(ctx context.Context) error {
	list := s.compiled.Template.Meets
	for from := 0; from < len(list); {
		to := from + 1
		for to < len(list) && list[to].Over == list[from].Over {
			to++
		}
		if err := s.meetOver(ctx, list[from:to]); err != nil {
			return err
		}
		from = to
	}
	return nil
}

func (s *sweeper) meetOver(ctx context.Context, list []scenario.Meet) error {
	over := list[0].Over
	asked := make([]scenario.Collect, len(list))
	for i := range list {
		m := &list[i]
		asked[i] = scenario.Collect{Source: m.Source, Unit: m.Unit, Value: formula.Sub(m.Value, m.Other), Measures: m.Measures}
	}
	q, p, err := s.search(ctx, over, asked)
	if err != nil {
		return err
	}
	if p.Steps = meetSteps; q.needsRun {
		p.Steps = runSteps
	}
	found, err := seek.Meet(ctx, p, len(list))
	if err != nil {
		return err
	}
	unit := q.template.Lets[over.Let].Unit
	exact := q.exact(ctx)
	count := make([]int, len(list))
	for i := range found.List {
		c := &found.List[i]
		m := &list[c.Function]
		count[c.Function]++
		row := SweepCrossing{What: m.Source, With: m.With, Over: q.name, Unit: m.Unit, Touches: c.Touches, Shown: over.Shown, Step: found.Step, At: doubt.Exact(c.At, unit, exact...)}
		if !c.Touches && len(p.Inputs) > 0 && !endsOnly(m.Measures) {
			row.At = c.Doubt.Number(unit, 0, exact...)
		}
		row.Value = q.sideAt(ctx, m, c.At)
		s.doc.Crossings = append(s.doc.Crossings, row)
	}
	for i := range list {
		row := SweepSearch{What: list[i].Source, With: list[i].With, Over: q.name, From: over.From, To: over.To, Step: found.Step, Unit: unit, Shown: over.Shown, Found: count[i], Jumps: []float64{}, Gaps: [][2]float64{}}
		row.Jumps = append(row.Jumps, found.Jumps[i]...)
		row.Gaps = append(row.Gaps, found.Gaps[i]...)
		s.doc.Searches = append(s.doc.Searches, row)
	}
	return nil
}

// endsOnly tells whether all that is asked for are low and high ends: these hold
// the doubt of the inputs already, and are numbers to use.
func endsOnly(measures []scenario.MeasureOf[formula.Program]) bool {
	for i := range measures {
		if k := measures[i].Kind; k != scenario.LowEnd && k != scenario.HighEnd {
			return false
		}
	}
	return len(measures) > 0
}

// sideAt is the value at which two expressions meet.
func (q *search) sideAt(ctx context.Context, m *scenario.Meet, x float64) *float64 {
	one := *q
	one.asked = []scenario.Collect{{Source: m.Source, Unit: m.Unit, Value: m.Value, Measures: m.Measures}}
	v, err := one.values(ctx, []int{0}, x, nil)
	if err != nil {
		return nil
	}
	return finite(v[0])
}

// exact are the names of the lets taken as exact, without the one sought over.
func (q *search) exact(ctx context.Context) []string {
	session, err := measure.New(&q.template, nil, q.s.options(ctx, 1))
	if err != nil {
		return nil
	}
	var out []string
	for _, name := range session.Exact() {
		if name != q.name {
			out = append(out, name)
		}
	}
	return out
}

// bests finds the best place of each expression, and judges its value there.
func (s *sweeper) bests(ctx context.Context) error {
	for i := range s.compiled.Template.Bests {
		if err := s.best(ctx, &s.compiled.Template.Bests[i]); err != nil {
			return err
		}
	}
	return nil
}

func (s *sweeper) best(ctx context.Context, b *scenario.Best) error {
	asked := []scenario.Collect{{Source: b.Source, Unit: b.Unit, Value: b.Value, Measures: b.Measures}}
	q, p, err := s.search(ctx, b.Over, asked)
	if err != nil {
		return err
	}
	if p.Steps = bestSteps; q.needsRun {
		p.Steps = runSteps
	}
	found, err := seek.Best(ctx, p, b.Largest)
	if err != nil {
		return err
	}
	row := SweepBest{
		Measure: b.Source, Goal: goalWord(b.Largest), Over: q.name, OverUnit: q.template.Lets[b.Over.Let].Unit, Shown: b.Over.Shown, From: b.Over.From, To: b.Over.To,
		Value: doubt.Missing(b.Unit), Curve: SweepCurve{Over: []float64{}, Value: []*float64{}}, Drift: []SweepDrift{},
	}
	if found != nil {
		if err := s.fillBest(ctx, q, found, &row); err != nil {
			return err
		}
	}
	s.doc.Best = append(s.doc.Best, row)
	return nil
}

func goalWord(largest bool) string {
	if largest {
		return "largest"
	}
	return "smallest"
}

func (s *sweeper) fillBest(ctx context.Context, q *search, found *seek.Optimum, row *SweepBest) error {
	row.At, row.Inside, row.Step = &found.At, found.Inside, found.Step
	row.FlatFrom, row.FlatTo = &found.FlatFrom, &found.FlatTo
	row.Curve.Over, row.Curve.Value = found.X, finiteAll(found.Y)
	for _, d := range found.Drift {
		row.Drift = append(row.Drift, SweepDrift{Let: d.Input, Sign: d.Sign, Kept: finite(d.Kept), At: finite(d.At), Reached: finite(d.Reached)})
	}
	session, err := measure.New(&q.template, map[string]float64{q.name: found.At}, s.options(ctx, s.want.Workers))
	if err != nil {
		return err
	}
	outcome, err := s.outcome(ctx, session, s.want.Workers)
	if err != nil {
		return err
	}
	answers, err := session.Answer(ctx, outcome)
	if err != nil {
		return err
	}
	row.Value = answers.Collected[0].Value
	return nil
}
