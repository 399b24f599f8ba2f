package seek

import (
	"context"
	"math"
	"slices"

	"github.com/tautspan/tautspan/engine/doubt"
	"github.com/tautspan/tautspan/engine/numeric"
)

// Crossing is a zero of a function.
type Crossing struct {
	Function int
	At       float64
	// Touches: the function comes to zero there without changing its sign, within
	// rounding; it is a zero that a small change may take away.
	Touches bool
	Doubt   doubt.Propagated // of At, from the inputs; nothing of one that touches
}

// Crossings is what was found of all functions, each in order of place.
type Crossings struct {
	List []Crossing
	Step float64
	// Jumps are places at which a function changes its sign by a jump, and Gaps
	// stretches in which it has no value; by function.
	Jumps map[int][]float64
	Gaps  map[int][][2]float64
}

// touchShare is the share of a function's usual magnitude below which its
// least magnitude counts as zero. Chosen: some thousand roundings of a frequency.
const touchShare = 1e-11

// jumpShare is the share of the values at the two looks around a change of sign
// below which the function must come a billionth of a step from it, else it jumps;
// where it grows towards it from one of the looks, poleShare. Chosen: a straight
// function comes to 1e-9.
const (
	jumpShare = 1e-3
	poleShare = 1e-8
)

// Meet finds every zero of functions 0 to n-1. Between two looks a change of sign
// is followed by Brent's method to rounding. Where the magnitude falls towards a
// pair of looks from both sides without a change of sign, its least value between
// them is sought, which finds two zeros within a step, or one that only touches.
//
// What is missed: more than one pair of zeros within one step that the looks
// around it do not show.
func Meet(ctx context.Context, p *Problem, n int) (*Crossings, error) {
	which := make([]int, n)
	for i := range which {
		which[i] = i
	}
	looks, err := p.look(ctx, which)
	if err != nil {
		return nil, err
	}
	out := &Crossings{Step: p.step(), Jumps: map[int][]float64{}, Gaps: map[int][][2]float64{}}
	found := make([]scan, n)
	err = Each(ctx, n, p.Workers, func(i int) error {
		values := make([]float64, len(looks))
		for k := range looks {
			if values[k] = looks[k][i]; math.IsInf(values[k], 0) {
				values[k] = math.NaN()
			}
		}
		found[i] = scan{p: p, f: p.one(ctx, i, nil), values: values}
		return found[i].all(ctx, i)
	})
	if err != nil {
		return nil, err
	}
	for i := range found {
		out.List = append(out.List, found[i].zeros...)
		if len(found[i].jumps) > 0 {
			out.Jumps[i] = found[i].jumps
		}
		if len(found[i].gaps) > 0 {
			out.Gaps[i] = found[i].gaps
		}
	}
	return out, nil
}

// scan is the search of one function.
type scan struct {
	p      *Problem
	f      *one
	values []float64
	zeros  []Crossing
	jumps  []float64
	gaps   [][2]float64
}

func (s *scan) all(ctx context.Context, function int) error {
	var sizes []float64
	for _, v := range s.values {
		if !math.IsNaN(v) {
			sizes = append(sizes, math.Abs(v))
		}
	}
	slices.Sort(sizes)
	usual := 0.0
	if len(sizes) > 0 {
		usual = sizes[len(sizes)/2]
	}
	last := len(s.values) - 1
	var at []float64
	touch := map[float64]bool{}
	for k, v := range s.values {
		x := s.p.at(k)
		if math.IsNaN(v) {
			s.gap(k)
			continue
		}
		if v == 0 {
			at = append(at, x)
		}
		if k == last || math.IsNaN(s.values[k+1]) || v == 0 || s.values[k+1] == 0 {
			continue
		}
		if v*s.values[k+1] < 0 {
			if zero, ok := s.root(x, s.p.at(k+1), v, s.values[k+1]); ok {
				at = append(at, zero)
			}
			continue
		}
		if s.falls(k, -1) && s.falls(k+1, 1) {
			lower, touches := s.dip(x, s.p.at(k+1), v, s.values[k+1], touchShare*usual)
			at = append(at, lower...)
			if touches {
				touch[lower[0]] = true
			}
		}
	}
	slices.Sort(at)
	for i, x := range at {
		if i > 0 && x-at[i-1] < 1e-6*s.p.step() && touch[x] && touch[at[i-1]] {
			continue // seen from both sides of a look
		}
		c := Crossing{Function: function, At: x, Touches: touch[x]}
		if !c.Touches && s.f.err == nil {
			var err error
			if c.Doubt, err = s.doubt(ctx, function, x); err != nil {
				return err
			}
		}
		s.zeros = append(s.zeros, c)
	}
	return s.f.err
}

// falls tells whether the magnitude at look k is no larger than at its neighbour
// in a direction; at an end of what is known it counts as falling.
func (s *scan) falls(k, direction int) bool {
	next := k + direction
	if next < 0 || next >= len(s.values) || math.IsNaN(s.values[next]) {
		return true
	}
	return math.Abs(s.values[k]) <= math.Abs(s.values[next])
}

// gap notes that look k has no value.
func (s *scan) gap(k int) {
	x := s.p.at(k)
	if n := len(s.gaps); n > 0 && k > 0 && math.IsNaN(s.values[k-1]) {
		s.gaps[n-1][1] = x
		return
	}
	s.gaps = append(s.gaps, [2]float64{x, x})
}

// root follows a change of sign. A jump is noted instead.
func (s *scan) root(a, b, fa, fb float64) (float64, bool) {
	x := numeric.Root(s.f.value, a, b, fa, fb, 1e-13*math.Max(math.Abs(a), math.Abs(b)))
	near := 1e-9 * (b - a)
	low, high := s.f.value(math.Max(a, x-near)), s.f.value(math.Min(b, x+near))
	left := math.Max(math.Abs(low), math.Abs(high))
	less, more := math.Min(math.Abs(fa), math.Abs(fb)), math.Max(math.Abs(fa), math.Abs(fb))
	if left > jumpShare*more || left > less && left > poleShare*more {
		s.jumps = append(s.jumps, x)
		return 0, false
	}
	return x, true
}

// dip seeks the least magnitude of a function between two looks of one sign: two
// zeros where it goes beyond zero, one that touches where it only comes to it.
func (s *scan) dip(a, b, fa, fb, zero float64) (at []float64, touches bool) {
	sign := math.Copysign(1, fa)
	low, least := golden(func(x float64) float64 { return sign * s.f.value(x) }, a, b, func(v float64) bool { return v < -zero })
	switch {
	case least < -zero:
		for _, side := range [][3]float64{{a, low, fa}, {low, b, sign * least}} {
			far := sign * least
			if side[1] == b {
				far = fb
			}
			if x, ok := s.root(side[0], side[1], side[2], far); ok {
				at = append(at, x)
			}
		}
	case math.Abs(least) <= zero:
		return []float64{low}, true
	}
	return at, false
}

// golden finds the least value of a function with one minimum on [a, b] by golden
// sections, to 1e-9 of the range, and stops early at a value that is enough.
// Source: Kiefer, Proc. Am. Math. Soc. 4 (1953) 502-506 (from memory).
func golden(f func(float64) float64, a, b float64, enough func(float64) bool) (at, least float64) {
	ratio := (math.Sqrt(5) - 1) / 2
	x, y := b-ratio*(b-a), a+ratio*(b-a)
	fx, fy := f(x), f(y)
	for tol := 1e-9 * (b - a); b-a > tol; {
		if enough != nil && (enough(fx) || enough(fy)) || math.IsNaN(fx) || math.IsNaN(fy) {
			break
		}
		if fx < fy {
			b, y, fy = y, x, fx
			x = b - ratio*(b-a)
			fx = f(x)
		} else {
			a, x, fx = x, y, fy
			y = a + ratio*(b-a)
			fy = f(y)
		}
	}
	if fx < fy {
		return x, fx
	}
	return y, fy
}

// doubt is that of a zero: it is sought anew, from where it stood, at other values
// of the inputs.
func (s *scan) doubt(ctx context.Context, function int, x float64) (doubt.Propagated, error) {
	f := func(ctx context.Context, inputs []float64) ([]float64, error) {
		o := s.p.one(ctx, function, inputs)
		at := o.zeroNear(x, s.p.step())
		return []float64{at}, o.err
	}
	got, err := doubt.Propagate(ctx, s.p.Inputs, f, doubt.Options{Workers: 1})
	if err != nil {
		return doubt.Propagated{}, err
	}
	got[0].Value = x
	return got[0], nil
}

// zeroNear seeks a zero about x, by growing the stretch on both sides; NaN where
// there is none within 16 steps.
func (o *one) zeroNear(x, step float64) float64 {
	here := o.value(x)
	if here == 0 {
		return x
	}
	for width := step / 4; width <= 16*step; width *= 2 {
		for _, side := range []float64{x - width, x + width} {
			if there := o.value(side); here*there < 0 {
				return numeric.Root(o.value, x, side, here, there, 1e-13*math.Abs(x))
			}
		}
		if o.err != nil {
			return math.NaN()
		}
	}
	return math.NaN()
}
