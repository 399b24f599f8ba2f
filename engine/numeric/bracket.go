package numeric

import "math"

// Root finds a zero of a continuous function between lo and hi, where its
// values flo and fhi have different signs, by the method of Brent: inverse
// quadratic interpolation and the secant where they help, bisection otherwise.
//
// It stops when the zero is known to tol (in the unit of lo and hi) plus four
// rounding errors of its size, and after 200 steps at the latest. f is called
// inside [lo, hi] only. Superlinear (order about 1.6) at a simple zero; never
// much slower than bisection.
// Source: Brent, Algorithms for Minimization without Derivatives, Prentice-Hall
// 1973, chapter 4 (from memory).
func Root(f func(float64) float64, lo, hi, flo, fhi, tol float64) float64 {
	const eps = 0x1p-52
	a, b, fa, fb := lo, hi, flo, fhi
	c, fc := a, fa
	d := b - a
	e := d
	for step := 0; step < 200; step++ {
		if math.Abs(fc) < math.Abs(fb) {
			a, b, c = b, c, b
			fa, fb, fc = fb, fc, fb
		}
		limit := 2*eps*math.Abs(b) + 0.5*tol
		m := 0.5 * (c - b)
		if math.Abs(m) <= limit || fb == 0 {
			return b
		}
		if math.Abs(e) < limit || math.Abs(fa) <= math.Abs(fb) {
			d, e = m, m
		} else {
			p, q := interpolate(a, b, c, fa, fb, fc, m)
			if 2*p < math.Min(3*m*q-math.Abs(limit*q), math.Abs(e*q)) {
				d, e = p/q, d
			} else {
				d, e = m, m
			}
		}
		a, fa = b, fb
		if math.Abs(d) > limit {
			b += d
		} else {
			b += math.Copysign(limit, m)
		}
		fb = f(b)
		if (fb > 0) == (fc > 0) {
			c, fc = a, fa
			d = b - a
			e = d
		}
	}
	return b
}

// interpolate gives Brent's trial step p/q, with p >= 0.
func interpolate(a, b, c, fa, fb, fc, m float64) (p, q float64) {
	s := fb / fa
	if a == c {
		p, q = 2*m*s, 1-s
	} else {
		q, r := fa/fc, fb/fc
		p = s * (2*m*q*(q-r) - (b-a)*(r-1))
		return signed(p, (q-1)*(r-1)*(s-1))
	}
	return signed(p, q)
}

func signed(p, q float64) (float64, float64) {
	if p > 0 {
		return p, -q
	}
	return -p, q
}
