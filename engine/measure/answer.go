package measure

import (
	"context"
	"fmt"
	"math"
	"strings"

	"github.com/tautspan/tautspan/engine/compare"
	"github.com/tautspan/tautspan/engine/doubt"
	"github.com/tautspan/tautspan/engine/scenario"
)

// Requirement is a requirement judged.
type Requirement struct {
	Of           *scenario.Require
	Value        doubt.Number
	Limit, Upper doubt.Number // Upper of within and outside
	Margin       doubt.Number // of the limit that is nearest
	doubt.Judgement
	Note string // why first order was not enough, which mode, ...; ""
}

// Collected is a value asked for without a verdict.
type Collected struct {
	Of    *scenario.Collect
	Value doubt.Number
	Note  string
}

// Answers are the answers to a scenario's questions.
type Answers struct {
	Requirements []Requirement
	Collected    []Collected
	// Waiting are statements, as written, that need a run and were asked without one.
	Waiting []string
	// Changes names the solver, level and keeping of its discretisation by which
	// the doubt of lets was carried to answers of the run; "" where none was.
	Changes string
}

// nominal is a leaf's value at the centre with its numerical interval.
type nominal struct{ value, low, high float64 }

// Answer answers the questions. outcome is that of a comparison with Asked's
// options on the centre's mesh, or nil: then only exact measures are answered.
func (s *Session) Answer(ctx context.Context, outcome *compare.Outcome) (*Answers, error) {
	values, err := s.nominals(ctx, outcome)
	if err != nil {
		return nil, err
	}
	out := &Answers{}
	if outcome != nil && len(s.inputs) > 0 && s.NeedsRun() {
		if s.frozen = s.choose(outcome); s.frozen == nil {
			return nil, fmt.Errorf("measure: no solver stands undisputed to show how the answers change with the lets")
		}
		if err := s.settleLevel(ctx, values); err != nil {
			return nil, err
		}
	}
	for i, e := range s.requires {
		q := &s.template.Requires[i]
		if outcome == nil && s.ofRun(e) {
			out.Waiting = append(out.Waiting, q.Source)
			continue
		}
		numbers, note, err := s.numbers(ctx, e, values)
		if err != nil {
			return nil, err
		}
		out.Requirements = append(out.Requirements, judge(q, numbers, note))
	}
	for i, e := range s.collects {
		c := &s.template.Collects[i]
		if outcome == nil && s.ofRun(e) {
			out.Waiting = append(out.Waiting, c.Source)
			continue
		}
		numbers, note, err := s.numbers(ctx, e, values)
		if err != nil {
			return nil, err
		}
		out.Collected = append(out.Collected, Collected{Of: c, Value: numbers[atValue], Note: note})
	}
	if f := s.frozen; f != nil {
		out.Changes = fmt.Sprintf("%s, level %d, discretisation frozen", f.voice.Name, f.level)
		if f.loose {
			out.Changes = fmt.Sprintf("%s, level %d, discretisation not frozen", f.voice.Name, f.level)
		}
	}
	return out, nil
}

func judge(q *scenario.Require, n []doubt.Number, note string) Requirement {
	r := Requirement{Of: q, Value: n[atValue], Limit: n[atLimit], Upper: n[atUpper], Margin: n[atMargin], Note: note}
	switch q.Relation {
	case scenario.Within:
		r.Judgement = doubt.JudgeWithin(n[atMargin], n[atMargin2])
		if n[atMargin2].Value < n[atMargin].Value {
			r.Margin = n[atMargin2]
		}
	case scenario.Outside:
		r.Judgement = doubt.JudgeOutside(n[atMargin], n[atMargin2])
		if n[atMargin2].Value > n[atMargin].Value {
			r.Margin = n[atMargin2]
		}
	default:
		r.Judgement = doubt.JudgeAbove(n[atMargin], q.Relation == scenario.Less || q.Relation == scenario.Greater)
	}
	return r
}

// nominals are the leaves' values at the centre: of a run from the comparison,
// with its bounds; others exact.
func (s *Session) nominals(ctx context.Context, out *compare.Outcome) ([]nominal, error) {
	values := make([]nominal, len(s.leaves))
	if out != nil && (len(out.Channels) != len(s.centre.Mesh.Channels) || len(out.Asked) != len(s.asked)) {
		return nil, fmt.Errorf("measure: the outcome is not that of this scenario's questions")
	}
	for i, l := range s.leaves {
		switch {
		case l.ofRun() && out == nil:
			values[i] = nominal{math.NaN(), math.Inf(-1), math.Inf(1)}
		case l.ofRun():
			values[i] = s.outcomeOf(out, l)
		default:
			f, err := s.exactFigure(s.centre, l)
			if err != nil {
				return nil, err
			}
			values[i] = nominal{f.value, f.value, f.value}
		}
	}
	return values, ctx.Err()
}

func (s *Session) outcomeOf(out *compare.Outcome, l *leaf) nominal {
	kind := compare.Record
	switch l.of.Kind {
	case scenario.EnergyLeft:
		o := &out.EnergyLeft
		return nominal{o.Value, o.Value - o.Numerical, o.Value + o.Numerical}
	case scenario.SolverDifference:
		d := out.Channels[l.channel].Difference
		return nominal{d, d, d}
	case scenario.Peak:
		kind = compare.Peak
	case scenario.RMS:
		kind = compare.RMS
	case scenario.Final:
		kind = compare.Final
	case scenario.Highest:
		kind = compare.Highest
	case scenario.Lowest:
		kind = compare.Lowest
	default:
		a := out.Asked[l.asked]
		return nominal{a.Value, a.Low, a.High}
	}
	o := &out.Channels[l.channel].Observables[kind]
	return nominal{o.Value, o.Value - o.Numerical, o.Value + o.Numerical}
}

// numbers evaluates an expression's programs with their doubt.
func (s *Session) numbers(ctx context.Context, e *expression, values []nominal) ([]doubt.Number, string, error) {
	args := make([]nominal, len(e.terms))
	for i, t := range e.terms {
		if t.inner == nil {
			args[i] = values[t.leaf]
			continue
		}
		inner, _, err := s.numbers(ctx, t.inner, values)
		if err != nil {
			return nil, "", err
		}
		end := inner[atValue].LowEnd
		if t.high {
			end = inner[atValue].HighEnd
		}
		args[i] = nominal{end, end, end}
	}
	exact := s.exactNames(e)
	out := make([]doubt.Number, len(e.programs))
	bounds := make([]float64, len(e.programs))
	spans := make([]nominal, len(e.programs))
	for i, p := range e.programs {
		spans[i] = span(func(a []float64) float64 { return p.Eval(s.centre.Values, a) }, args)
		bounds[i] = math.Max(spans[i].high-spans[i].value, spans[i].value-spans[i].low)
	}
	moved, err := s.propagate(ctx, e, args, bounds)
	if err != nil {
		return nil, "", err
	}
	note := ""
	for _, l := range s.own(e) {
		if l.of.Kind == scenario.Scruton {
			note = scrutonFormula
		}
	}
	for i := range out {
		switch {
		case math.IsNaN(spans[i].value):
			out[i] = doubt.Missing(e.unit, exact...)
			if s.openThroughout(ctx, e) {
				out[i] = doubt.Between(spans[i].low, spans[i].high, e.unit, exact...)
			}
		case moved == nil:
			out[i] = doubt.Bounded(spans[i].value, e.unit, bounds[i], exact...)
		default:
			out[i] = moved[i].Number(e.unit, bounds[i], exact...)
			if moved[i].NotFirstOrder != "" {
				bent := "not first order: " + moved[i].NotFirstOrder
				if moved[i].Samples != nil {
					bent += "; sampled"
				}
				note = joinNotes(note, bent)
			}
		}
	}
	return out, note, nil
}

// joinNotes puts two remarks together; the same one stands once.
func joinNotes(a, b string) string {
	switch {
	case a == "" || a == b:
		return b
	case b == "" || strings.Contains(a, b):
		return a
	}
	return a + "; " + b
}

// span is the value of f and the ends of its values over the intervals of its
// arguments, from all corners (arguments without width left out), or for many
// arguments the sum of the changes that each makes alone.
func span(f func(args []float64) float64, args []nominal) nominal {
	at := make([]float64, len(args))
	var wide []int
	for i, a := range args {
		at[i] = a.value
		if !(a.low == a.value && a.high == a.value) {
			wide = append(wide, i)
		}
	}
	v := f(at)
	out := nominal{v, v, v}
	if math.IsNaN(v) {
		out.low, out.high = math.Inf(1), math.Inf(-1)
	}
	note := func(v float64) {
		if math.IsNaN(v) {
			out.low, out.high = math.Inf(-1), math.Inf(1)
			return
		}
		out.low, out.high = math.Min(out.low, v), math.Max(out.high, v)
	}
	end := func(i int, high bool) float64 {
		if high {
			return args[i].high
		}
		return args[i].low
	}
	if len(wide) <= cornersMost {
		for corner := range 1 << len(wide) {
			for k, i := range wide {
				at[i] = end(i, corner>>k&1 == 1)
			}
			note(f(at))
		}
		return out
	}
	below, above := 0.0, 0.0
	for _, i := range wide {
		a, b := 0.0, 0.0
		for _, high := range []bool{false, true} {
			at[i] = end(i, high)
			change := f(at) - v
			a, b = math.Max(a, -change), math.Max(b, change)
		}
		at[i] = args[i].value
		below, above = below+a, above+b
	}
	note(v - below)
	note(v + above)
	return out
}

// cornersMost is the largest number of arguments of which all corners are tried.
const cornersMost = 8

// propagate carries the doubt of the lets through the whole expression; nil
// where no let is doubtful.
func (s *Session) propagate(ctx context.Context, e *expression, args []nominal, bounds []float64) ([]doubt.Propagated, error) {
	if len(s.inputs) == 0 {
		return nil, nil
	}
	leaves := s.own(e)
	centre, err := s.figures(ctx, s.centre, leaves)
	if err != nil {
		return nil, err
	}
	f := func(ctx context.Context, values []float64) ([]float64, error) {
		p, err := s.at(values)
		if err != nil {
			return nil, err
		}
		at, err := s.figures(ctx, p, leaves)
		if err != nil {
			return nil, err
		}
		in := make([]float64, len(args))
		k := 0
		for i := range args {
			in[i] = args[i].value
			if e.terms[i].inner == nil {
				in[i] += at[k].value - centre[k].value
				k++
			}
		}
		out := make([]float64, len(e.programs))
		for i, program := range e.programs {
			out[i] = program.Eval(p.Values, in)
		}
		return out, nil
	}
	o := doubt.Options{Workers: s.options.Workers, Samples: s.options.ExactSamples, Seed: s.options.Seed, Always: s.options.Sample, Numerical: bounds}
	for _, l := range leaves {
		if l.ofRun() {
			o.Samples = s.options.RunSamples
		}
	}
	o.Jumped = func(_, input int) bool { return s.jumped(ctx, input, leaves, centre) }
	return doubt.Propagate(ctx, s.inputs, f, o)
}

// jumped tells whether a leaf tells of another event at one standard
// uncertainty of an input. The points have been worked out before.
func (s *Session) jumped(ctx context.Context, input int, leaves []*leaf, centre []figure) bool {
	for _, sign := range []float64{1, -1} {
		p, err := s.shifted(input, sign)
		if err != nil {
			return false
		}
		at, err := s.figures(ctx, p, leaves)
		if err != nil {
			return false
		}
		for k := range leaves {
			if at[k].event != centre[k].event {
				return true
			}
		}
	}
	return false
}

// shifted is the point at plus or minus one standard uncertainty of one input.
func (s *Session) shifted(input int, sign float64) (*Point, error) {
	values := make([]float64, len(s.inputs))
	for i, in := range s.inputs {
		values[i] = in.Value
	}
	values[input] += sign * s.inputs[input].U
	return s.at(values)
}

// openThroughout tells whether a leaf without a value has none at one standard
// uncertainty of every input either, so that its interval stands.
func (s *Session) openThroughout(ctx context.Context, e *expression) bool {
	leaves := s.own(e)
	for input := range s.inputs {
		for _, sign := range []float64{1, -1} {
			p, err := s.shifted(input, sign)
			if err != nil {
				return false
			}
			at, err := s.figures(ctx, p, leaves)
			if err != nil {
				return false
			}
			centre, err := s.figures(ctx, s.centre, leaves)
			if err != nil {
				return false
			}
			for k := range leaves {
				if math.IsNaN(at[k].value) != math.IsNaN(centre[k].value) {
					return false
				}
			}
		}
	}
	return true
}
