package fronts

import (
	"math"
	"sort"

	"gonum.org/v1/gonum/integrate/quad"
)

// Shares of the excitation's own size below which a jump counts as rounding or
// as the error of a difference quotient. Chosen: one-sided limits are good to
// about 1e-13 and slopes to about 1e-9 of the scale on smooth functions, so that
// each leaves three orders of margin.
const (
	valueNoise = 1e-9
	slopeNoise = 1e-6
	curveNoise = 1e-3
)

// rounding is the unit round-off of float64.
const rounding = 0x1p-53

// side is the one-sided limit of f at x from the direction dir (+1 or -1), and
// its one-sided slope and second derivative, from points at most reach away.
// Four-point formulas from x+h .. x+4h: value of order h^4, slope of order h^3,
// second derivative of order h^2 (Taylor). The scale of f is not known: each
// starts from the smallest step, where it is true but for rounding, and takes the
// larger ones as long as they agree with what stands to within its rounding.
func side(f func(float64) float64, x, dir, reach float64) (value, slope, curve float64) {
	return sideAbove(f, x, dir, reach, 0)
}

// sideSteps is the number of steps that side tries: from reach/8 down by factors
// of 4 to 2e-9 of reach.
const sideSteps = 14

// sideAbove is side with steps no smaller than floor, for functions that are
// difference quotients themselves.
func sideAbove(f func(float64) float64, x, dir, reach, floor float64) (value, slope, curve float64) {
	var all [sideSteps][3]float64
	var steps [sideSteps]float64
	size, n := 0.0, 0
	for h := reach / 8; n < sideSteps && (n < 2 || h >= floor); h /= 4 {
		f1, f2, f3, f4 := f(x+dir*h), f(x+2*dir*h), f(x+3*dir*h), f(x+4*dir*h)
		all[n] = [3]float64{
			4*f1 - 6*f2 + 4*f3 - f4,
			dir * (-26*f1 + 57*f2 - 42*f3 + 11*f4) / (6 * h),
			(3*f1 - 8*f2 + 7*f3 - 2*f4) / (h * h),
		}
		steps[n] = h
		size = math.Max(size, math.Max(math.Max(math.Abs(f1), math.Abs(f2)), math.Max(math.Abs(f3), math.Abs(f4))))
		n++
	}
	// Sums of the formulas' weights, times rounding, times 4 for f's own.
	weights := [3]float64{60, 92, 80}
	best := all[n-1]
	for i := range best {
		for k := n - 2; k >= 0; k-- {
			noise := weights[i] * rounding * size / math.Pow(steps[k+1], float64(i))
			if !(math.Abs(all[k][i]-best[i]) <= noise) {
				break
			}
			best[i] = all[k][i]
		}
	}
	return best[0], best[1], best[2]
}

// jump is what happens to a history at one of its breaks.
type jump struct {
	time         float64
	value, slope float64 // after less before; slope only where the value does not jump
	order        int     // 0 the value jumps, 1 the slope, 2 neither
}

// tableRows is the number of breaks beyond which a history counts as a record:
// the kinks between its rows are then no events, only its value jumps are.
// Common practice, no source.
const tableRows = 60

// jumpsOf finds the jumps of f, which is 0 (or rather before) for t < 0, at its
// breaks up to end; floor as in sideAbove. The list is in order of time.
func jumpsOf(f func(float64) float64, breaks []float64, end, floor float64) []jump {
	ts := sortedBreaks(breaks, end)
	scale := 0.0
	for i, t := range ts {
		next := gapAfter(ts, i, end)
		for _, w := range [...]float64{1e-9, 0.13, 0.29, 0.5, 0.71, 0.87} {
			scale = math.Max(scale, math.Abs(f(t+w*next)))
		}
	}
	var out []jump
	for i, t := range ts {
		after, before := gapAfter(ts, i, end), gapAfter(ts, i-1, end)
		if i == 0 {
			before = after
		}
		v1, s1, _ := sideAbove(f, t, 1, after, floor)
		var v0, s0 float64
		if t > 0 {
			v0, s0, _ = sideAbove(f, t, -1, math.Min(before, t), floor)
		}
		j := jump{time: t, value: v1 - v0, slope: s1 - s0, order: 2}
		slopes := math.Max(math.Max(math.Abs(s0), math.Abs(s1)), scale/math.Max(after, before))
		switch {
		case math.Abs(j.value) > valueNoise*scale:
			j.order, j.slope = 0, 0
		case len(ts) <= tableRows && math.Abs(j.slope) > slopeNoise*slopes:
			j.order, j.value = 1, 0
		}
		out = append(out, j)
	}
	return out
}

// sortedBreaks are the breaks in 0 .. end, with 0 itself, at which every history
// begins.
func sortedBreaks(breaks []float64, end float64) []float64 {
	ts := []float64{0}
	for _, t := range breaks {
		if t > 0 && t <= end {
			ts = append(ts, t)
		}
	}
	sort.Float64s(ts)
	n := 1
	for _, t := range ts[1:] {
		if t-ts[n-1] > 1e-12*end {
			ts[n] = t
			n++
		}
	}
	return ts[:n]
}

// gapAfter is the distance from break i to the next, or a like one after the last.
func gapAfter(ts []float64, i int, end float64) float64 {
	switch {
	case i < 0:
		return math.Inf(1)
	case i+1 < len(ts):
		return ts[i+1] - ts[i]
	case end > ts[i]:
		return end - ts[i]
	case i > 0:
		return ts[i] - ts[i-1]
	}
	return 1
}

// knock is a short stretch of a history between two zeros.
type knock struct {
	from, to float64 // s
	impulse  float64 // integral of the history
}

// knocksOf splits f into its stretches between breaks where it is not zero. ok
// tells whether there are any and each of them is short (at most most long),
// ends by the last break, and has an impulse.
func knocksOf(f func(float64) float64, breaks []float64, end, most float64) (ks []knock, ok bool) {
	far := end + 2*most
	ts := sortedBreaks(breaks, far)
	scale := 0.0
	sizes := make([]float64, len(ts))
	for i, t := range ts {
		gap := gapAfter(ts, i, far)
		const probes = 40
		for k := 1; k < probes; k++ {
			sizes[i] = math.Max(sizes[i], math.Abs(f(t+gap*float64(k)/probes)))
		}
		scale = math.Max(scale, sizes[i])
	}
	for i := 0; i < len(ts); i++ {
		if sizes[i] <= valueNoise*scale {
			continue
		}
		first := i
		for i < len(ts) && sizes[i] > valueNoise*scale {
			i++
		}
		if i == len(ts) || ts[i]-ts[first] > most {
			return nil, false
		}
		k, whole := knock{from: ts[first], to: ts[i]}, 0.0
		for n := first; n < i; n++ {
			net, size := impulse(f, ts[n], ts[n+1])
			k.impulse += net
			whole += size
		}
		if math.Abs(k.impulse) <= 1e-6*whole {
			return nil, false
		}
		ks = append(ks, k)
	}
	return ks, len(ks) > 0
}

// impulse integrates f and |f| between two breaks: four Gauss-Legendre rules of
// 24 points, exact to rounding for a period of a sine.
func impulse(f func(float64) float64, a, b float64) (net, size float64) {
	const parts, points = 4, 24
	d := (b - a) / parts
	for p := 0; p < parts; p++ {
		from := a + float64(p)*d
		net += quad.Fixed(f, from, from+d, points, quad.Legendre{}, 0)
		size += quad.Fixed(func(t float64) float64 { return math.Abs(f(t)) }, from, from+d, points, quad.Legendre{}, 0)
	}
	return net, size
}
