package measure

import (
	"context"
	"errors"
	"fmt"
	"math"

	"github.com/tautspan/tautspan/engine/compare"
	"github.com/tautspan/tautspan/engine/mesh"
	"github.com/tautspan/tautspan/engine/scenario"
	"github.com/tautspan/tautspan/engine/solver"
)

// frozen is the settled solver that shows how the answers of a run change with
// the lets: always the same solver, level and discretisation.
type frozen struct {
	voice  *compare.Voice
	level  int
	effort int
	layout any
	loose  bool // the solver could not keep its discretisation at a moved point
}

// runFigures are the figures of all leaves of a run at one point, by the index
// of the leaf, from the frozen solver.
type runFigures struct {
	figures []figure
}

// changeShare is the share of the change sought within which the frozen
// solver's own answer must match the comparison's; else a finer level is used.
const changeShare = 0.1

// choose picks the solver that shows changes: one that stands in no difference,
// the one with the highest theory order, where 0 is beyond any order: a solver
// at its limit of stability cannot keep its steps when a let moves.
func (s *Session) choose(out *compare.Outcome) *frozen {
	odd := map[string]bool{}
	for i := range out.Channels {
		odd[out.Channels[i].OddOneOut] = true
	}
	var best *compare.Voice
	rank := func(v *compare.Voice) float64 {
		if v.Order == 0 {
			return math.Inf(1)
		}
		return v.Order
	}
	for i := range out.Voices {
		v := &out.Voices[i]
		if v.Usable() && !odd[v.Name] && (best == nil || rank(v) > rank(best)) {
			best = v
		}
	}
	if best == nil {
		return nil
	}
	return &frozen{voice: best, level: best.Levels[0], effort: out.Effort}
}

// runFigure is the figure of a leaf of a run at a point, by the frozen solver.
func (s *Session) runFigure(ctx context.Context, p *Point, l *leaf) (figure, error) {
	p.lock.Lock()
	defer p.lock.Unlock()
	if p.runs == nil {
		runs, err := s.solve(ctx, p)
		if err != nil {
			return figure{}, err
		}
		p.runs = runs
	}
	return p.runs.figures[l.index], nil
}

func (s *Session) solve(ctx context.Context, p *Point) (*runFigures, error) {
	f := s.frozen
	if f == nil {
		return nil, errors.New("measure: no solver to show how the answers change")
	}
	req := solver.Request{Level: f.level, Effort: f.effort}
	if p != s.centre {
		req.Freeze = f.layout
	}
	m, position := s.narrowed(p)
	r, err := f.voice.Solver.Solve(ctx, m, req, nil)
	if err != nil {
		return nil, err
	}
	if len(r.Series) != len(m.Channels) {
		return nil, fmt.Errorf("measure: solver %s gave a wrong number of records", f.voice.Name)
	}
	if p == s.centre {
		f.layout = r.Layout
	} else if !r.Frozen {
		s.lock.Lock()
		f.loose = true
		s.lock.Unlock()
	}
	out := &runFigures{figures: make([]figure, len(s.leaves))}
	for i, l := range s.leaves {
		if l.moves() {
			if out.figures[i], err = s.read(p, l, r, position); err != nil {
				return nil, err
			}
		}
	}
	return out, nil
}

// narrowed is a point's mesh with only the channels that leaves are read from,
// and where each channel went: pictures over x and t take longer to record than
// the rest takes to solve.
func (s *Session) narrowed(p *Point) (*mesh.Mesh, map[int]int) {
	m := *p.Mesh
	m.Channels = nil
	position := map[int]int{}
	for _, l := range s.leaves {
		if _, seen := position[l.channel]; l.moves() && l.channel >= 0 && !seen {
			position[l.channel] = len(m.Channels)
			m.Channels = append(m.Channels, p.Mesh.Channels[l.channel])
		}
	}
	return &m, position
}

// read takes a leaf's figure from a solution. The event of a peak, highest or
// lowest value is the swing in which it lies. A time to settle or to reach a
// level goes from swing to swing by its nature, and whether that matters shows
// in how straight it is in the inputs.
func (s *Session) read(p *Point, l *leaf, r *solver.Result, position map[int]int) (figure, error) {
	if l.of.Kind == scenario.EnergyLeft {
		if r.Energy.Most <= 0 {
			return figure{}, nil
		}
		return figure{value: r.Energy.End / r.Energy.Most}, nil
	}
	spots := r.Series[position[l.channel]]
	f := compare.FiguresOf(spots)
	every := p.Mesh.Timing.Every
	peak := func(v float64) figure {
		return figure{v, swings(spots[f.PeakSpot], 1, float64(f.PeakRow)) + f.PeakSpot<<32}
	}
	switch l.of.Kind {
	case scenario.Peak:
		return peak(f.Peak), nil
	case scenario.RMS:
		return figure{value: f.RMS}, nil
	case scenario.Final:
		return figure{value: f.Final}, nil
	case scenario.Highest:
		return figure{f.Highest, swings(spots[f.HighestSpot], 1, float64(f.HighestRow)) + f.HighestSpot<<32}, nil
	case scenario.Lowest:
		return figure{f.Lowest, swings(spots[f.LowestSpot], 1, float64(f.LowestRow)) + f.LowestSpot<<32}, nil
	}
	reader, err := s.reader(p, l)
	if err != nil {
		return figure{}, err
	}
	v := reader(compare.Reading{Every: every, Values: spots[0], Band: make([]float64, len(spots[0]))}).Value
	if l.of.Kind == scenario.TimeOfPeak {
		return figure{v, swings(spots[0], every, v)}, nil
	}
	return figure{value: v}, nil
}

// settleLevel makes the frozen solver fine enough: at its coarsest level its
// answers at the centre must match the comparison's within a tenth of the
// change that the lets make, wherever that change matters beside the bound;
// else its finest level is used.
func (s *Session) settleLevel(ctx context.Context, nominal []nominal) error {
	f := s.frozen
	if _, err := s.runFigures(ctx, s.centre); err != nil || s.centre.runs == nil {
		return err
	}
	finest := f.voice.Levels[len(f.voice.Levels)-1]
	if f.level == finest {
		return nil
	}
	fine := true
	centre := s.centre.runs.figures
	change := make([]float64, len(s.leaves))
	for i := range s.inputs {
		for _, sign := range []float64{1, -1} {
			p, err := s.shifted(i, sign)
			if err != nil {
				return err
			}
			at, err := s.runFigures(ctx, p)
			if err != nil {
				return err
			}
			for k := range change {
				change[k] = math.Max(change[k], math.Abs(at[k].value-centre[k].value))
			}
		}
	}
	for k, l := range s.leaves {
		if !l.moves() {
			continue
		}
		if math.IsNaN(centre[k].value) != math.IsNaN(nominal[k].value) {
			fine = false
			continue
		}
		bound := math.Max(nominal[k].high-nominal[k].value, nominal[k].value-nominal[k].low)
		if change[k] > bound && math.Abs(centre[k].value-nominal[k].value) > changeShare*change[k] {
			fine = false
		}
	}
	if fine {
		return nil
	}
	f.level, f.layout = finest, nil
	for _, p := range s.points {
		p.runs = nil
	}
	_, err := s.runFigures(ctx, s.centre)
	return err
}

func (s *Session) runFigures(ctx context.Context, p *Point) ([]figure, error) {
	for _, l := range s.leaves {
		if l.moves() {
			if _, err := s.runFigure(ctx, p, l); err != nil {
				return nil, err
			}
			return p.runs.figures, nil
		}
	}
	return make([]figure, len(s.leaves)), nil
}
