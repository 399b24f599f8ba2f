package scenario

import (
	"fmt"
	"math"

	"github.com/tautspan/tautspan/engine/formula"
)

// LawOf is a force that the line feels from its own motion and that is not
// linear in it; one of the four is not nil. At a node it acts to ground; along a
// segment it is a force per length.
type LawOf[V any] struct {
	Name     string
	Friction *FrictionOf[V]
	Stop     *StopOf[V]
	Written  *WrittenOf[V]
	Followed *FollowedOf[V]
}

// FollowedOf is a law of a plugin that cannot be written and is asked step by
// step. Start is filled in where the plugin runs; without it the law can be looked
// at, not solved.
type FollowedOf[V any] struct {
	Plugin     string
	Parameters []ParameterOf[V]
	Start      func() (Follow, error) `json:"-"`
}

// Follow gives the force at time t, s, with displacement u, m, and velocity v,
// m/s: N, or N/m along a segment. settled tells that the step is taken and states
// move on; else it is a trial from the last settled step. NaN: it failed.
type Follow func(t, u, v float64, settled bool) float64

// FrictionOf is dry friction, perhaps behind a bracket that gives.
type FrictionOf[V any] struct {
	Force   V    // N
	Bracket bool // false: rigid
	Through V    // N/m, in series; only with Bracket
}

// StopOf is a spring behind a gap, above (Up), below (Down) or on both sides.
type StopOf[V any] struct {
	Gap      V // m
	Spring   V // N/m
	Up, Down bool
}

// WrittenOf is a law in formulas over displacement and velocity (formula.ArgU,
// formula.ArgV), time (formula.ArgT) and its states: state k is argument
// StateArg+k. Its parameters have been put in.
type WrittenOf[V any] struct {
	Force  formula.Program // N, or N/m along a segment: the force on the line
	Starts []V             // of the states, SI
	Rates  []formula.Program
}

// StateArg is the argument of a written law that is its first state.
const StateArg = formula.ArgV + 1

// EveryOf is a row of like joints inside a segment: at First, First+Spacing, ...
// from the segment's start, all short of its end.
type EveryOf[V any] struct {
	Spacing V // m
	First   V // m
	Joint   NodeOf[V]
}

// Bench is a damper as a bench measured it, force per velocity over frequency.
type Bench struct {
	Name      string
	Frequency []float64 // Hz, increasing
	Real      []float64 // N s/m
	Imag      []float64 // N s/m
}

// Row is one joint of a row, bound.
type Row struct {
	At    float64 // m from the segment's start
	Joint *Node
	Every int // which row of the segment
	Index int // from 0
}

// MostEvery is the largest number of joints that the rows of one scenario may
// make. Chosen: as many as there may be segments.
const MostEvery = 20_000

// Rows lists the joints of a bound segment's rows, row by row. A joint that falls
// on one of an earlier row, to rounding, stands exactly there.
func Rows(s *Segment) []Row {
	var out []Row
	for k := range s.Every {
		e := &s.Every[k]
		for i := range EveryCount(s.Length, e.First, e.Spacing) {
			out = append(out, Row{At: onRow(s, k, at(e, i)), Joint: &e.Joint, Every: k, Index: i})
		}
	}
	return out
}

// at is the place of a bound joint. The conversion keeps the product from being
// fused with the sum, so that a place worked out elsewhere is the same to the bit.
func at(e *EveryOf[float64], i int) float64 {
	return e.First + float64(float64(i)*e.Spacing)
}

// onRow moves a place onto the joint of one of the first rows where it is the
// same to rounding.
func onRow(s *Segment, rows int, place float64) float64 {
	for k := range rows {
		e := &s.Every[k]
		i := int(math.Round(math.Max(0, math.Min((place-e.First)/e.Spacing, MostEvery))))
		if x := at(e, i); i < EveryCount(s.Length, e.First, e.Spacing) && math.Abs(x-place) <= placeSlack*s.Length {
			return x
		}
	}
	return place
}

// EveryCount is how many joints a row has: those that stand inside the segment.
// One at its end, to rounding, is none. The count is capped just above MostEvery.
func EveryCount(length, first, spacing float64) int {
	if first <= 0 || spacing <= 0 || first >= length*(1-placeSlack) {
		return 0
	}
	n := math.Ceil((length*(1-placeSlack) - first) / spacing)
	return int(math.Min(math.Max(n, 1), MostEvery+1))
}

// laws binds the laws of a node or a segment.
func (b *binder) laws(list []LawOf[formula.Program], path string) []LawOf[float64] {
	var out []LawOf[float64]
	for i := range list {
		out = append(out, b.law(&list[i], path))
	}
	return out
}

func (b *binder) law(l *LawOf[formula.Program], path string) LawOf[float64] {
	out := LawOf[float64]{Name: l.Name}
	switch {
	case l.Friction != nil:
		f := &FrictionOf[float64]{Force: b.nonneg(l.Friction.Force, path+"friction"), Bracket: l.Friction.Bracket}
		if f.Bracket {
			f.Through = b.pos(l.Friction.Through, path+"friction")
		}
		out.Friction = f
	case l.Stop != nil:
		s := &StopOf[float64]{Gap: b.num(l.Stop.Gap, path+"stop"), Spring: b.pos(l.Stop.Spring, path+"stop"), Up: l.Stop.Up, Down: l.Stop.Down}
		if s.Gap <= 0 {
			b.fail(path+"stop", fmt.Sprintf("has a gap of %g m: the line would rest on it already", s.Gap))
		}
		out.Stop = s
	case l.Followed != nil:
		out.Followed = &FollowedOf[float64]{Plugin: l.Followed.Plugin}
		for _, p := range l.Followed.Parameters {
			out.Followed.Parameters = append(out.Followed.Parameters, ParameterOf[float64]{Name: p.Name, Value: b.num(p.Value, path+"law"), Factor: p.Factor})
		}
	case l.Written != nil:
		w := &WrittenOf[float64]{Force: l.Written.Force.Bind(b.values)}
		args := []float64{0, 0, 0, 0}
		for _, s := range l.Written.Starts {
			v := b.num(s, path+"law")
			w.Starts, args = append(w.Starts, v), append(args, v)
		}
		for _, r := range l.Written.Rates {
			w.Rates = append(w.Rates, r.Bind(b.values))
		}
		for _, p := range append([]formula.Program{w.Force}, w.Rates...) {
			if v := p.Eval(nil, args); math.IsNaN(v) || math.IsInf(v, 0) {
				b.fail(path+"law", fmt.Sprintf("%s has no finite value at rest", l.Name))
			}
		}
		out.Written = w
	}
	return out
}

// every binds the rows of a segment and counts their joints.
func (b *binder) every(s *SegmentOf[formula.Program], out *Segment, path string) {
	for i := range s.Every {
		e := &s.Every[i]
		bound := EveryOf[float64]{Spacing: b.pos(e.Spacing, path+"every"), First: b.pos(e.First, path+"every"), Joint: b.node(&e.Joint, path)}
		if b.err != nil {
			return
		}
		if b.rows += EveryCount(out.Length, bound.First, bound.Spacing); b.rows > MostEvery {
			b.fail(path+"every", fmt.Sprintf("makes more than %d joints", MostEvery))
			return
		}
		out.Every = append(out.Every, bound)
	}
}
