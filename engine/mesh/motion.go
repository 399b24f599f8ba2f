package mesh

import (
	"math"
	"sort"

	"github.com/tautspan/tautspan/engine/scenario"
)

// newMotion makes a prescribed motion up to time end. A displacement is taken
// as it is and its rate by central differences of fourth order that do not
// reach across a break; a velocity is integrated once, an acceleration twice,
// from rest in place.
func newMotion(mv scenario.MoveOf[float64], end float64) *Motion {
	given := func(t float64) float64 { return mv.Motion.At(t, 0) }
	breaks := append([]float64{0}, mv.Motion.Breaks...)
	sort.Float64s(breaks)
	switch mv.Kind {
	case scenario.MotionVelocity:
		once := integrate(given, breaks, end)
		return &Motion{Displacement: once.at, Velocity: given, Breaks: breaks}
	case scenario.MotionAcceleration:
		once := integrate(given, breaks, end)
		twice := integrate(once.at, breaks, end)
		return &Motion{Displacement: twice.at, Velocity: once.at, Breaks: breaks}
	}
	return &Motion{Displacement: given, Velocity: rate(given, breaks, end), Breaks: breaks}
}

// rate is the derivative of f by differences of fourth order, with a step that
// balances rounding against curvature for motions that change over end/1e5 or
// longer.
func rate(f func(float64) float64, breaks []float64, end float64) func(float64) float64 {
	return func(t float64) float64 {
		if t < 0 {
			return 0
		}
		h := end * 1e-6
		lo, hi := math.Inf(-1), math.Inf(1)
		for _, b := range breaks {
			if b <= t {
				lo = b
			} else {
				hi = b
				break
			}
		}
		at := t
		if at-2*h < lo {
			at = lo + 2.0001*h
		}
		if at+2*h > hi {
			at = hi - 2.0001*h
		}
		return (8*(f(at+h)-f(at-h)) - (f(at+2*h) - f(at-2*h))) / (12 * h)
	}
}

// integral is the running integral of a function from 0.
type integral struct {
	f      func(float64) float64
	t, sum []float64 // grid and integral up to it
}

// integralCells is the number of cells of a running integral. Five Gauss points
// a cell integrate a sine of up to 1000 periods over the span to rounding.
const integralCells = 4096

// gauss holds the five-point Gauss-Legendre rule on [-1, 1] (Abramowitz and
// Stegun, table 25.4).
var gauss = [5][2]float64{
	{0, 0.5688888888888889},
	{-0.5384693101056831, 0.47862867049936647}, {0.5384693101056831, 0.47862867049936647},
	{-0.9061798459386640, 0.23692688505618908}, {0.9061798459386640, 0.23692688505618908},
}

func integrate(f func(float64) float64, breaks []float64, end float64) *integral {
	in := &integral{f: f}
	for i := 0; i <= integralCells; i++ {
		in.t = append(in.t, end*float64(i)/integralCells)
	}
	for _, b := range breaks {
		if b > 0 && b < end {
			in.t = append(in.t, b)
		}
	}
	sort.Float64s(in.t)
	in.sum = make([]float64, len(in.t))
	for i := 1; i < len(in.t); i++ {
		in.sum[i] = in.sum[i-1] + in.cell(in.t[i-1], in.t[i])
	}
	return in
}

func (in *integral) cell(from, to float64) float64 {
	mid, half := (from+to)/2, (to-from)/2
	s := 0.0
	for _, g := range gauss {
		s += g[1] * in.f(mid+half*g[0])
	}
	return s * half
}

func (in *integral) at(t float64) float64 {
	if t <= 0 {
		return 0
	}
	i := sort.SearchFloat64s(in.t, t)
	if i == len(in.t) {
		i--
	}
	if in.t[i] > t {
		i--
	}
	return in.sum[i] + in.cell(in.t[i], t)
}
