package transform

import (
	"math"
	"math/cmplx"
	"sort"

	"gonum.org/v1/gonum/dsp/fourier"

	"github.com/tautspan/tautspan/engine/formula"
)

const argX = formula.ArgX

// series is the transform of a function of time at the frequencies of a grid.
type series struct{ of []complex128 }

// finer is how much finer than the grid a function of time is sampled; even.
const finer = 2

// breaksMost bounds the breaks that are put right one by one.
const breaksMost = 64

// transform is the integral of f(t) e^{-st} over t > 0. f is taken as parabolas
// through three samples (Filon's rule, at complex frequencies); where it jumps or
// bends between two samples (a break) those three are taken as straight lines on
// either side. Beyond the time that is read f is let fade, which nothing that is
// read can feel.
// Source: Filon, Proc. R. Soc. Edinb. 49 (1928) 38-47, from memory.
func (g *grid) transform(f func(float64) float64, breaks []float64) *series {
	h := g.step / finer
	n := g.samples * finer
	end := float64(g.rows) * g.step
	fade := 0.05 * end
	faded := func(t float64) float64 {
		switch {
		case t < 0:
			return 0
		case t <= end:
			return f(t)
		case t < end+fade:
			return f(t) * 0.5 * (1 + math.Cos(math.Pi*(t-end)/fade))
		}
		return 0
	}
	values := make([]float64, n)
	last := min(n-1, int((end+fade)/h)+1)
	for j := 0; j <= last; j++ {
		values[j] = faded(float64(j) * h)
	}
	fixes := mend(values, faded, breaks, h, last)
	first := values[0]
	for j := range values[:last+1] {
		values[j] *= math.Exp(-g.sigma * h * float64(j))
	}
	c := fourier.NewFFT(n).Coefficients(nil, values)
	at := func(k int) complex128 {
		if k > n/2 {
			return cmplx.Conj(c[n-k])
		}
		return c[k]
	}
	out := &series{of: make([]complex128, g.samples/2+1)}
	for k := range out.of {
		s := g.at(k)
		z := s * complex(h, 0)
		// Sums over even and odd samples, from the spectrum and its alias.
		a, b := at(k), at(k+n/2)
		even, odd := (a+b)/2, (a-b)/2
		w0, w1, w2 := filon(z)
		e := cmplx.Exp(z)
		out.of[k] = complex(h, 0) * (w0*even + w1*e*odd + w2*e*e*(even-complex(first, 0)))
		for i := range fixes {
			out.of[k] += fixes[i].transform(s, w0, w1, w2)
		}
	}
	return out
}

// filon gives the weights of values at 0, 1, 2 in the integral over 0 .. 2 of
// their parabola times e^{-z xi}.
func filon(z complex128) (w0, w1, w2 complex128) {
	var m [3]complex128 // integrals of xi^k e^{-z xi}
	if cmplx.Abs(z) < 0.5 {
		term := complex(1, 0)
		for n := range 24 {
			if n > 0 {
				term *= -z / complex(float64(n), 0)
			}
			for k := range m {
				m[k] += term * complex(math.Pow(2, float64(n+k+1))/float64(n+k+1), 0)
			}
		}
	} else {
		e := cmplx.Exp(-2 * z)
		m[0] = (1 - e) / z
		m[1] = (m[0] - 2*e) / z
		m[2] = (2*m[1] - 4*e) / z
	}
	return m[0] - 1.5*m[1] + 0.5*m[2], 2*m[1] - m[2], 0.5 * (m[2] - m[1])
}

// hat gives the transform (e^-z - 1 + z)/z^2 of a falling line of unit length.
func hat(z complex128) complex128 {
	if cmplx.Abs(z) < 1e-3 {
		return 0.5 - z/6 + z*z/24
	}
	return (cmplx.Exp(-z) - 1 + z) / (z * z)
}

// fix replaces the parabola over two intervals by straight lines that respect a
// break.
type fix struct {
	at    float64 // s, of the first sample
	h     float64
	f     [3]float64
	lines []line
}

// line is a straight line between two times, 0 elsewhere.
type line struct{ a, b, fa, fb float64 }

// transform is what is to be added.
func (x *fix) transform(s, w0, w1, w2 complex128) complex128 {
	sum := complex128(0)
	for i := range x.lines {
		l := &x.lines[i]
		sum += ramp(s, l.a, l.b, l.fa, l.fb)
	}
	parabola := w0*complex(x.f[0], 0) + w1*complex(x.f[1], 0) + w2*complex(x.f[2], 0)
	return sum - cmplx.Exp(-s*complex(x.at, 0))*complex(x.h, 0)*parabola
}

// mend finds the parabolas that reach across a break. Smooth stretches between
// breaks are cut into eight lines, so that a parabola is not lost for nothing.
func mend(values []float64, f func(float64) float64, breaks []float64, h float64, last int) []fix {
	sorted := append([]float64(nil), breaks...)
	sort.Float64s(sorted)
	var out []fix
	for i := 0; i < len(sorted) && len(out) < breaksMost; i++ {
		j := int(math.Floor(sorted[i]/h+1e-7)) / 2 * 2
		at := float64(j) * h
		if sorted[i] <= 0 || j+2 > last {
			continue
		}
		eps := 1e-7 * h
		if on := math.Abs(sorted[i]-at) < eps; on && j >= 2 {
			// On the border of two parabolas: the one before ends in the left value,
			// the one after begins with the right one.
			left, right := f(sorted[i]-eps), f(sorted[i]+eps)
			out = append(out, fix{at: at - 2*h, h: h, f: [3]float64{0, 0, values[j] - left}}, fix{at: at, h: h, f: [3]float64{values[j] - right, 0, 0}})
			continue
		}
		x := fix{at: at, h: h, f: [3]float64{values[j], values[j+1], values[j+2]}}
		from := at
		for ; i < len(sorted) && sorted[i] < at+2*h-eps; i++ {
			x.lines = append(x.lines, smooth(f, from, sorted[i], eps)...)
			from = sorted[i]
		}
		i--
		x.lines = append(x.lines, smooth(f, from, at+2*h, eps)...)
		out = append(out, x)
	}
	return out
}

// smooth is f between two breaks as eight lines.
func smooth(f func(float64) float64, a, b, eps float64) []line {
	if b-a < 4*eps {
		return nil
	}
	const parts = 8
	var out []line
	before := f(a + eps)
	for i := 1; i <= parts; i++ {
		t := a + (b-a)*float64(i)/parts
		if i == parts {
			t = b - eps
		}
		v := f(t)
		out = append(out, line{a + (b-a)*float64(i-1)/parts, a + (b-a)*float64(i)/parts, before, v})
		before = v
	}
	return out
}

// ramp is the transform of a straight line from (a, fa) to (b, fb), 0 elsewhere.
func ramp(s complex128, a, b, fa, fb float64) complex128 {
	h := b - a
	if h <= 0 {
		return 0
	}
	z := s * complex(h, 0)
	right := hat(z) // of the falling half from a
	// The rising half to b: the integral of (t-a)/h e^{-s(t-a)}.
	var up complex128
	if cmplx.Abs(z) < 1e-3 {
		up = 0.5 - z/3 + z*z/8
	} else {
		e := cmplx.Exp(-z)
		up = (1 - e*(1+z)) / (z * z)
	}
	return cmplx.Exp(-s*complex(a, 0)) * complex(h, 0) * (complex(fa, 0)*right + complex(fb, 0)*up)
}
