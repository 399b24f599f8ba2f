package characteristic

import (
	"math"
	"slices"

	"github.com/tautspan/tautspan/engine/mesh"
)

func startShape(p *mesh.Piece, s float64) float64 {
	if p.Start == nil {
		return 0
	}
	return p.Start(math.Max(0, math.Min(p.Length, s)))
}

func startRate(p *mesh.Piece, s float64) float64 {
	if p.StartRate == nil {
		return 0
	}
	return p.StartRate(math.Max(0, math.Min(p.Length, s)))
}

// launch fills the histories of a piece before t = 0, so that they make its
// start: with v the start velocity and u the start shape,
//
//	f - g = -(1/c) integral of (v + gamma u) dx from the piece's start,  f + g = u,
//
// and what is at x at t = 0 has left its end at -x/c, less the loss. The marks
// where shapes may have kinks become breaks; so do the far ends, since nothing
// is known of earlier times.
func (r *run) launch(w *line, p *mesh.Piece) {
	if p.Start == nil && p.StartRate == nil {
		return
	}
	cuts := []float64{0}
	for _, k := range p.Marks {
		if k.Kind != mesh.MarkWatch && k.At > 0 && k.At < p.Length {
			cuts = append(cuts, k.At)
		}
	}
	cuts = append(cuts, p.Length)
	slices.Sort(cuts)
	cuts = slices.Compact(cuts)
	speed := func(x float64) float64 {
		if w.gamma == 0 {
			return startRate(p, x)
		}
		return startRate(p, x) + w.gamma*startShape(p, x)
	}
	// Every call's error stays below a rounding of the integral of the largest speed.
	small := 0.0
	if p.StartRate != nil || w.gamma > 0 {
		for k := 0; k <= 256; k++ {
			small = math.Max(small, 1e-16*w.length*math.Abs(speed(w.length*float64(k)/256)))
		}
	}
	for end, h := range w.sent {
		place := func(back float64) float64 { // where what left at -back is at t = 0
			if end == 0 {
				return w.c * back
			}
			return w.length - w.c*back
		}
		grow := func(back float64) float64 { return 1 / w.decay(back) }
		// The integral to a place, walked through in the order of samples.
		at, sum := 0.0, 0.0
		if end == 1 {
			at, sum = w.length, integral(speed, cuts, 0, w.length, small)
		}
		wave := func(x float64) float64 {
			sum += integral(speed, cuts, at, x, small)
			at = x
			half := 0.5 * startShape(p, x)
			if end == 0 {
				return half - sum/(2*w.c)
			}
			return half + sum/(2*w.c)
		}
		n := int(math.Min(math.Ceil(w.tau*h.inv), float64(len(h.buf)-1)))
		value := wave(place(0))
		h.buf[0] = value
		var marks []breakpoint
		for k := 1; k <= n; k++ {
			back := math.Min(float64(k)*h.delta, w.tau)
			from, to := place(float64(k-1)*h.delta), place(back)
			for _, x := range passed(cuts, from, to) {
				age := math.Abs(x-place(0)) / w.c
				v := wave(x) * grow(age)
				marks = append(marks, breakpoint{t: -age, left: v, right: v, weight: 1, order: 1})
			}
			h.buf[-k&h.mask] = wave(to) * grow(back)
		}
		slices.Reverse(marks)
		last := wave(place(w.tau)) * grow(w.tau)
		h.mark(breakpoint{t: -w.tau, left: last, right: last, weight: 1, order: 1})
		for _, b := range marks {
			h.mark(b)
		}
	}
}

// passed is the inner cuts from a (not counted) to b (counted), in the order
// in which one meets them.
func passed(cuts []float64, a, b float64) []float64 {
	var out []float64
	for _, x := range cuts[1 : len(cuts)-1] {
		if a < b && x > a && x <= b || a > b && x < a && x >= b {
			out = append(out, x)
		}
	}
	if a > b {
		slices.Reverse(out)
	}
	return out
}

// integral of v from a to b, piecewise between cuts, by Gauss's three points
// with halving until two halves agree with the whole to within small.
func integral(v func(float64) float64, cuts []float64, a, b, small float64) float64 {
	if a == b {
		return 0
	}
	if a > b {
		return -integral(v, cuts, b, a, small)
	}
	sum, lo := 0.0, a
	for _, x := range cuts {
		if x > lo && x < b {
			sum += halving(v, lo, x, rule3(v, lo, x), small, 24)
			lo = x
		}
	}
	return sum + halving(v, lo, b, rule3(v, lo, b), small, 24)
}

func rule3(v func(float64) float64, a, b float64) float64 {
	x, w := gauss()
	s := 0.0
	for i := range x {
		s += w[i] * v(a+(b-a)*x[i])
	}
	return s * (b - a)
}

func halving(v func(float64) float64, a, b, whole, small float64, depth int) float64 {
	m := 0.5 * (a + b)
	left, right := rule3(v, a, m), rule3(v, m, b)
	if depth == 0 || !(math.Abs(left+right-whole) > small) {
		return left + right
	}
	return halving(v, a, m, left, small, depth-1) + halving(v, m, b, right, small, depth-1)
}
