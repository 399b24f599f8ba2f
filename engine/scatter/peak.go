package scatter

import (
	"context"
	"math"
	"math/cmplx"
	"slices"
	"sort"
)

// Peak is a largest amplitude of a response between its neighbours. Value is NaN
// where nothing damps it.
type Peak struct {
	Frequency float64 // Hz
	Value     complex128
}

// Peaks seeks the peaks of a response that its own frequencies give away: a value
// larger than both its neighbours. Each is then found to within 1e-8 of its
// frequency by golden sections of the interval between the neighbours, the
// response being computed anew there. At most most of them are given, the largest
// on the grid, by frequency. Two peaks within one step are seen as one.
//
// A peak counts as undamped, and its amplitude as not existing, where it falls to
// half within a millionth of its frequency: damping ratios below some 1e-6 are
// not told from none.
func (n *Network) Peaks(ctx context.Context, r *Response, frequencies []float64, most int) ([]Peak, error) {
	values := r.Value
	size := func(v complex128) float64 {
		if cmplx.IsNaN(v) {
			return math.Inf(1)
		}
		return cmplx.Abs(v)
	}
	var at []int
	for k := 1; k+1 < len(values); k++ {
		if v := size(values[k]); v > size(values[k-1]) && v >= size(values[k+1]) && v > 0 {
			at = append(at, k)
		}
	}
	sort.SliceStable(at, func(i, j int) bool { return size(values[at[i]]) > size(values[at[j]]) })
	at = at[:min(len(at), most)]
	slices.Sort(at)
	value := func(f float64) complex128 {
		v, err := n.at(r.channel, r.drive, f)
		if err != nil {
			return cmplx.NaN()
		}
		return v
	}
	var out []Peak
	for _, k := range at {
		if ctx.Err() != nil {
			return out, ctx.Err()
		}
		f := summit(func(f float64) float64 { return size(value(f)) }, frequencies[k-1], frequencies[k+1])
		top := value(f)
		near := max(size(value(f*(1-1e-6))), size(value(f*(1+1e-6))))
		if !(near > size(top)/2) || math.IsInf(near, 1) {
			top = cmplx.NaN()
		}
		out = append(out, Peak{f, top})
	}
	return out, nil
}

// summit finds the largest value of a function with one maximum on [a, b] by
// golden sections, to within 1e-8 of b. Source: Kiefer, Proc. Am. Math. Soc. 4
// (1953) 502-506 (from memory).
func summit(f func(float64) float64, a, b float64) float64 {
	ratio := (math.Sqrt(5) - 1) / 2
	x, y := b-ratio*(b-a), a+ratio*(b-a)
	fx, fy := f(x), f(y)
	for tol := 1e-8 * b; b-a > tol; {
		if fx > fy {
			b, y, fy = y, x, fx
			x = b - ratio*(b-a)
			fx = f(x)
		} else {
			a, x, fx = x, y, fy
			y = a + ratio*(b-a)
			fy = f(y)
		}
	}
	if fx > fy {
		return x
	}
	return y
}
