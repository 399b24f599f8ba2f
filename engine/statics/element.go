package statics

import "math"

// element is a stretch of line between two places of the static grid, a string or
// a beam whose tension may rise along it:
//
//	EI u'''' - (T u')' = w,    T = tension + rise s,    k = sqrt(T/EI).
//
// Units: m, N, N/m (rise, w), N m^2. All formulas are exact for a load w that
// does not change along the element.
//
// Source: the beam under tension as in Timoshenko, Gere, Theory of Elastic
// Stability (1961), ch. 1, with the sign of the axial force turned (from memory).
type element struct {
	x0, length float64 // m along the line
	tension    float64 // N, at the start
	rise       float64 // N/m
	bending    float64 // N m^2; 0: a string
	weight     float64 // of the distributed load that stands for the line's sag, 1/m
	whole      *terms  // terms at the end, where tension rises along a beam; else nil
	at         [4]int  // unknowns: u and slope at the start, u and slope at the end; slope -1 for a string
}

func (e *element) beam() bool { return e.bending > 0 }

// smallXi is the product k L below which a beam's formulas are summed as power
// series, so that nothing cancels; above it the exponentials lose less than
// three digits. Chosen.
const smallXi = 1.5

func (e *element) k() float64 { return math.Sqrt(e.tension / e.bending) }

// series sums c(n) z^n for n = 0, 1, ... until the terms no longer count.
func series(z float64, c func(n int) float64) float64 {
	sum, power := 0.0, 1.0
	for n := 0; n < 60; n++ {
		term := c(n) * power
		sum += term
		if n > 2 && math.Abs(term) <= 1e-18*math.Abs(sum) {
			break
		}
		power *= z
	}
	return sum
}

// factorials are n! for n below 171.
var factorials = func() (f [171]float64) {
	f[0] = 1
	for n := 1; n < len(f); n++ {
		f[n] = f[n-1] * float64(n)
	}
	return f
}()

// stiffness are the terms of a beam: force from displacement, force from the
// slopes, moment from the slope of the same end and of the other. A shift of both
// ends makes no force.
type stiffness struct {
	uu, tf float64
	ut, tt [2]float64
}

func (e *element) stiffness() stiffness {
	if e.rise != 0 {
		return e.risingStiffness()
	}
	l, ei := e.length, e.bending
	xi := e.k() * l
	z := xi * xi
	var d, sinh, cosh1, near, far float64 // over xi^4, xi, xi^2, xi^3, xi^3
	if xi < smallXi {
		d = series(z, func(n int) float64 { return float64(2*n+2) / factorials[2*n+4] })
		sinh = series(z, func(n int) float64 { return 1 / factorials[2*n+1] })
		cosh1 = series(z, func(n int) float64 { return 1 / factorials[2*n+2] })
		near = series(z, func(n int) float64 { return float64(2*n+2) / factorials[2*n+3] })
		far = series(z, func(n int) float64 { return 1 / factorials[2*n+3] })
	} else { // everything times 2 e^{-xi}
		g := math.Exp(-xi)
		d = (4*g - 2 - 2*g*g + xi*(1-g*g)) / (z * z)
		sinh = (1 - g*g) / xi
		cosh1 = (1 - g) * (1 - g) / z
		near = (xi*(1+g*g) - (1 - g*g)) / (xi * z)
		far = (1 - g*g - 2*xi*g) / (xi * z)
	}
	ut, tt := ei/(l*l)*cosh1/d, ei/l*near/d
	return stiffness{uu: ei / (l * l * l) * sinh / d, tf: ei / l * far / d, ut: [2]float64{ut, ut}, tt: [2]float64{tt, tt}}
}

// fixedEnd is the moment at the ends of a clamped beam under a unit load per
// length: (L/k^2)(xi/2 coth(xi/2) - 1)/L ... = L^2/12 for xi -> 0.
func (e *element) fixedEnd() float64 {
	xi := e.k() * e.length
	x := xi / 2
	var c float64 // (x coth x - 1)/x^2
	if xi < smallXi {
		z := x * x
		c = series(z, func(n int) float64 { return float64(2*n+2) / factorials[2*n+3] }) /
			series(z, func(n int) float64 { return 1 / factorials[2*n+1] })
	} else {
		c = (x/math.Tanh(x) - 1) / (x * x)
	}
	return c * e.length * e.length / 4
}

// ends are the values at the ends of an element, and the load per length on it.
type ends struct{ u0, t0, u1, t1, w float64 }

// displacement is the shape at s metres from the element's start, m.
func (e *element) displacement(v ends, s float64) float64 {
	if !e.beam() {
		y, yl := e.climb(s), e.climb(e.length)
		switch {
		case e.tension == 0: // no force comes through: straight on from where there is tension
			return v.u1
		case math.IsInf(yl, 0):
			return v.u0
		}
		u := v.u0 + (v.u1-v.u0)*y/yl
		if v.w != 0 {
			u += v.w * (e.centroid(e.length)/yl*y - e.centroid(s))
		}
		return u
	}
	if e.rise != 0 || e.k()*e.length < smallXi {
		return e.inSeries(v, s)
	}
	k, l := e.k(), e.length
	p := e.exponentials(v)
	return p.a + p.b*s - v.w*s*s/(2*e.tension) + p.c*math.Exp(-k*s) + p.d*math.Exp(-k*(l-s))
}

// slopeAt is du/dx at s metres from the element's start.
func (e *element) slopeAt(v ends, s float64) float64 {
	if !e.beam() {
		yl := e.climb(e.length)
		flow := (v.u1 - v.u0) / yl // T u' at the start but for the load
		return (flow + v.w*(e.centroid(e.length)/yl-s)) / (e.tension + e.rise*s)
	}
	if e.rise != 0 || e.k()*e.length < smallXi {
		if s == 0 {
			return v.t0
		}
		i, t := e.initial(v), e.termsAt(s)
		return v.t0*t[0][1] + i.second*t[1][1] + i.third*t[2][1] + v.w*t[3][1]
	}
	k, l := e.k(), e.length
	p := e.exponentials(v)
	return p.b - v.w*s/e.tension - k*p.c*math.Exp(-k*s) + k*p.d*math.Exp(-k*(l-s))
}

// exponentials are the coefficients of a + b s - w s^2/(2T) + c e^{-ks} + d e^{-k(L-s)}.
type exponentials struct{ a, b, c, d float64 }

func (e *element) exponentials(v ends) exponentials {
	k, l := e.k(), e.length
	v.u1 += v.w * l * l / (2 * e.tension)
	v.t1 += v.w * l / e.tension
	g := math.Exp(-k * l)
	sum := (v.t1 - v.t0) / (k * (1 - g))                              // c + d
	diff := (v.u1 - v.u0 - l*(v.t0+v.t1)/2) / (k*l*(1+g)/2 - (1 - g)) // c - d
	b := (v.t0 + v.t1 + k*diff*(1+g)) / 2
	c, d := (sum+diff)/2, (sum-diff)/2
	return exponentials{v.u0 - c - d*g, b, c, d}
}

// climb is the integral of 1/T from the start to s, m/N.
func (e *element) climb(s float64) float64 {
	r := e.rise * s / e.tension
	if math.Abs(r) < 1e-3 {
		return s / e.tension * series(-r, func(n int) float64 { return 1 / float64(n+1) })
	}
	return math.Log1p(r) / e.rise
}

// centroid is the integral of s/T from the start to s, m^2/N.
func (e *element) centroid(s float64) float64 {
	r := e.rise * s / e.tension
	if math.Abs(r) < 1e-2 {
		return s * s / e.tension * series(-r, func(n int) float64 { return 1 / float64(n+2) })
	}
	return (s - e.tension*e.climb(s)) / e.rise
}

// load gives the forces and moments at the ends that stand for a unit load per
// length: what holds the ends still, turned round.
func (e *element) load() (f0, m0, f1, m1 float64) {
	if e.beam() && e.rise != 0 {
		i := e.initial(ends{w: 1})
		f1, m1 := e.farEnd(ends{w: 1}, i)
		return -e.bending * i.third, e.bending * i.second, -f1, -m1
	}
	if e.beam() {
		m := e.fixedEnd()
		return e.length / 2, m, e.length / 2, -m
	}
	share := e.centroid(e.length) / e.climb(e.length)
	return share, 0, e.length - share, 0
}

// bulge is the integral over the element of the shape that a unit load per
// length makes with both ends held, m^3/N.
func (e *element) bulge() float64 {
	v := ends{w: 1}
	if e.beam() && e.rise == 0 && e.k()*e.length >= smallXi {
		p, k, l := e.exponentials(v), e.k(), e.length
		return p.a*l + p.b*l*l/2 - l*l*l/(6*e.tension) + (p.c+p.d)*(1-math.Exp(-k*l))/k
	}
	sum := 0.0
	for i, x := range gaussAt {
		for _, s := range []float64{(1 - x) / 2, (1 + x) / 2} {
			sum += gaussWeight[i] / 2 * e.displacement(v, s*e.length)
		}
	}
	return sum * e.length
}

// The Gauss-Legendre rule of eight points on [-1, 1], its positive half
// (Abramowitz, Stegun, table 25.4).
var (
	gaussAt     = [4]float64{0.1834346424956498, 0.5255324099163290, 0.7966664774136267, 0.9602898564975363}
	gaussWeight = [4]float64{0.3626837833783620, 0.3137066458778873, 0.2223810344533745, 0.1012285362903763}
)
