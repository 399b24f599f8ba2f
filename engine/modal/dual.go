package modal

import (
	"math"
	"math/cmplx"
)

// dual is a value with its derivative by s: arithmetic on it carries the product
// and chain rules along, so that stiffnesses of any length come with exact
// derivatives.
// Source: Clifford, Preliminary sketch of biquaternions, Proc. London Math. Soc.
// 4 (1873), for the numbers (from memory); forward differentiation by them is
// standard.
type dual struct{ v, d complex128 }

func constant(x float64) dual { return dual{complex(x, 0), 0} }

func (a dual) add(b dual) dual { return dual{a.v + b.v, a.d + b.d} }
func (a dual) sub(b dual) dual { return dual{a.v - b.v, a.d - b.d} }
func (a dual) mul(b dual) dual { return dual{a.v * b.v, a.v*b.d + a.d*b.v} }
func (a dual) neg() dual       { return dual{-a.v, -a.d} }

func (a dual) times(f float64) dual {
	return dual{complex(real(a.v)*f, imag(a.v)*f), complex(real(a.d)*f, imag(a.d)*f)}
}

func (a dual) div(b dual) dual {
	inv := 1 / b.v
	v := a.v * inv
	return dual{v, (a.d - v*b.d) * inv}
}

// root is the square root with real part >= 0.
func (a dual) root() dual {
	r := positiveRoot(a.v)
	return dual{r, a.d / (2 * r)}
}

// log is a logarithm.
func (a dual) log() dual { return dual{cmplx.Log(a.v), a.d / a.v} }

// hyperbolic gives cosh(r) and sinh(r)/r of r^2 = z, both entire in z, times
// e^{-scale}; scale holds Re r as far as overflow must be feared and 0 below 1.
func hyperbolic(z dual) (c, s dual, scale float64) {
	if size := math.Abs(real(z.v)) + math.Abs(imag(z.v)); size < 0.3 {
		// The first terms left out are z^8/16! and z^8/17!.
		v := z.v
		c.v = 1 + v/2*(1+v/12*(1+v/30*(1+v/56*(1+v/90*(1+v/132*(1+v/182))))))
		s.v = 1 + v/6*(1+v/20*(1+v/42*(1+v/72*(1+v/110*(1+v/156*(1+v/210))))))
		// dc/dz = s/2; ds/dz = (c - s)/(2z), by its own series.
		c.d = s.v / 2 * z.d
		s.d = (1.0/6 + v/60*(1+v/28*(1+v/54*(1+v/88*(1+v/130*(1+v/180)))))) * z.d
		return c, s, 0
	}
	r := positiveRoot(z.v)
	var sh, ch complex128
	if real(r) < 1 {
		sh, ch = sinhCosh(r)
	} else {
		scale = real(r)
		sin, cos := math.Sincos(imag(r))
		e := math.Exp(-2 * scale)
		ch = complex(0.5*(1+e)*cos, 0.5*(1-e)*sin)
		sh = complex(0.5*(1-e)*cos, 0.5*(1+e)*sin)
	}
	c.v, s.v = ch, sh/r
	c.d = s.v / 2 * z.d
	s.d = (c.v - s.v) / (2 * z.v) * z.d
	return c, s, scale
}
