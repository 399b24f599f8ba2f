package modal

import (
	"math"
	"math/cmplx"
)

// # The function Delta
//
// On a piece, u(x) e^{st} with w = (m s^2 + c s)/T = a^2 obeys u'' = w u. Its end
// displacements and the forces that are needed there obey
//
//	[fA]   Ta/sinh(aL) [ cosh(aL)   -1     ] [uA]
//	[fB] =             [  -1      cosh(aL) ] [uB] .
//
// Summed with masses, springs, dashpots and links this is the dynamic stiffness
// D(s); natural vibrations have D u = 0. D has poles where a piece vibrates with
// both ends held, and vibrations with still nodes hide there. Therefore such a
// piece keeps a hidden unknown as long as s is near one of its poles. With
// h = aL/2 and y measured from the middle of the piece,
//
//	u = p cosh(ay) + q sinh(ay)/a,   (uA+uB)/2 = p cosh(h),  (uB-uA)/2 = q sinh(h)/a.
//
// Near cosh(h) = 0 the unknown p is kept and q eliminated, near sinh(h) = 0 the
// other way round. Both give a symmetric matrix without poles:
//
//	p kept: ends +-(Ta coth(h)/2) [1 -1; -1 1], coupling Ta sinh(h) (1, 1),  diagonal -Ta sinh(2h)
//	q kept: ends  (Ta tanh(h)/2)  [1  1;  1 1], coupling T cosh(h) (-1, 1),  diagonal -T sinh(2h)/a
//
// Whichever is kept, det D times the product over the pieces of sinh(aL)/a is the
// same function Delta(s), entire and real for real s, whose zeros are exactly
// the natural vibrations with their multiplicities:
// det = -(Tw) * (share of Delta) with p kept, -T * (share) with q kept.
//
// Derived from the wave equation; the stiffness matrix is standard (Clough,
// Penzien, Dynamics of Structures, on the dynamic direct stiffness method, from
// memory).

// kept says which hidden unknown a piece keeps.
type kept uint8

const (
	keepNone kept = iota
	keepEven      // p: the part even about the middle
	keepOdd       // q
)

// A hidden unknown is kept while |cosh h| or |sinh h|, times e^{-Re h}, is below
// this. Chosen: anything from 0.05 to 0.4 gives the same digits; it bounds the
// growth of the matrix by about five.
const nearPole = 0.2

// block is an element's share of the matrix at one s, with derivatives by s.
type block struct {
	keep             kept
	a                complex128 // of this s, Re a >= 0
	diag, off        complex128 // of the two end unknowns
	b, d             complex128 // coupling of the hidden unknown (to A: -b where odd), its diagonal
	log              complex128 // what log det lacks to log Delta
	diag1, off1      complex128
	b1, d1, logSlope complex128
	scale            float64 // of the hidden unknown; q has another unit than u
}

// sinhCosh is accurate to rounding near zeros of either, for |Re z| < 300.
func sinhCosh(z complex128) (sh, ch complex128) {
	sin, cos := math.Sincos(imag(z))
	e := math.Expm1(real(z))
	s, c := 0.5*(e+e/(e+1)), 1+0.5*e*e/(e+1)
	return complex(s*cos, c*sin), complex(c*cos, s*sin)
}

// positiveRoot is the square root with real part >= 0.
func positiveRoot(w complex128) complex128 {
	a := cmplx.Sqrt(w)
	if real(a) < 0 {
		return -a
	}
	return a
}

// at evaluates the element at s.
func (el *element) at(s complex128) block {
	t, l := complex(el.t, 0), complex(el.len, 0)
	w := (complex(el.m, 0)*s + complex(el.c, 0)) * s / t
	w1 := (complex(2*el.m, 0)*s + complex(el.c, 0)) / t
	z2 := w * l * l
	if abs2 := real(z2)*real(z2) + imag(z2)*imag(z2); abs2 < 1e-6 {
		b := el.short(z2, w1*l*l)
		b.a = positiveRoot(w)
		return b
	}
	a := positiveRoot(w)
	h := a * l / 2
	ta := t * a
	// d/ds of any f(w) is f'(w) w1, and da/dw = 1/(2a).
	half := w1 / (2 * a)
	if real(h) < 1 {
		sh, ch := sinhCosh(h)
		shrink := math.Exp(-real(h))
		switch {
		case cmplx.Abs(ch)*shrink < nearPole:
			s2 := 2 * sh * ch
			c2 := ch*ch + sh*sh
			k := ta * ch / (2 * sh)
			k1 := half * t / 2 * (ch/sh - h/(sh*sh))
			return block{keep: keepEven, a: a, scale: 1, diag: k, off: -k, diag1: k1, off1: -k1,
				b: ta * sh, b1: half * t * (sh + h*ch),
				d: -ta * s2, d1: -half * t * (s2 + 2*h*c2),
				log: -cmplx.Log(-t * w), logSlope: -w1 / w}
		case cmplx.Abs(sh)*shrink < nearPole && cmplx.Abs(h) > 0.5:
			s2 := 2 * sh * ch
			c2 := ch*ch + sh*sh
			scale := cmplx.Abs(a)
			f := complex(scale, 0)
			k := ta * sh / (2 * ch)
			k1 := half * t / 2 * (sh/ch + h/(ch*ch))
			return block{keep: keepOdd, a: a, scale: scale, diag: k, off: k, diag1: k1, off1: k1,
				b: f * t * ch, b1: f * half * t * sh * l / 2,
				d: -f * f * t * s2 / a, d1: -f * f * half * t / w * (2*h*c2 - s2),
				log: complex(-math.Log(el.t)-2*math.Log(scale), math.Pi)}
		}
	}
	al := a * l
	if real(al) > 300 { // coth = 1 and 1/sinh = 0 to rounding
		return block{a: a, diag: ta, diag1: half * t, log: al - cmplx.Log(2*a), logSlope: half * (l - 1/a)}
	}
	sh, ch := sinhCosh(al)
	csch := 1 / sh
	coth := ch * csch
	return block{
		a: a, diag: ta * coth, diag1: half * t * (coth - al*csch*csch),
		off: -ta * csch, off1: -half * t * csch * (1 - al*coth),
		log: cmplx.Log(sh / a), logSlope: half * (l*coth - 1/a),
	}
}

// short evaluates an element by series in z2 = (aL)^2, |z2| < 1e-3; the first
// terms left out are below 1e-15 of the whole.
func (el *element) short(z2, slope complex128) block {
	k := complex(el.t/el.len, 0)
	diag := 1 + z2*(1.0/3+z2*(-1.0/45+z2*(2.0/945-z2/4725)))
	diag1 := 1.0/3 + z2*(-2.0/45+z2*(6.0/945-z2*4/4725))
	off := 1 + z2*(-1.0/6+z2*(7.0/360+z2*(-31.0/15120+z2*127/604800)))
	off1 := -1.0/6 + z2*(14.0/360+z2*(-93.0/15120+z2*508/604800))
	sinc := 1 + z2*(1.0/6+z2*(1.0/120+z2/5040))
	sinc1 := 1.0/6 + z2*(2.0/120+z2*3/5040)
	return block{diag: k * diag, diag1: k * diag1 * slope, off: -k * off, off1: -k * off1 * slope,
		log: cmplx.Log(sinc * complex(el.len, 0)), logSlope: sinc1 / sinc * slope}
}

// realBlock is the block at s = i omega without loss, by circular functions; the
// hidden unknown is the one of keep.
func (el *element) realBlock(omega float64, keep kept) (diag, off, b, d float64) {
	theta := omega * el.tau
	zw := el.z * omega
	switch keep {
	case keepEven:
		sin, cos := math.Sincos(theta / 2)
		k := zw * cos / (2 * sin)
		return k, -k, -zw * sin, zw * 2 * sin * cos
	case keepOdd:
		sin, cos := math.Sincos(theta / 2)
		k := -zw * sin / (2 * cos)
		return k, k, zw * cos, -zw * 2 * sin * cos
	}
	if theta < 0.03 {
		b := el.short(complex(-theta*theta, 0), 0)
		return real(b.diag), real(b.off), 0, 0
	}
	sin, cos := math.Sincos(theta)
	return zw * cos / sin, -zw / sin, 0, 0
}

// keepAt says what realBlock should keep at omega, and how many vibrations with
// both ends held lie below omega, less one where the hidden unknown counts it.
func (el *element) keepAt(omega float64) (kept, int) {
	theta := omega * el.tau
	sin, cos := math.Sincos(theta / 2)
	switch {
	case math.Abs(cos) < nearPole:
		return keepEven, int(math.Round(theta/math.Pi)) - 1
	case math.Abs(sin) < nearPole && theta > 1:
		return keepOdd, int(math.Round(theta/math.Pi)) - 1
	}
	return keepNone, int(math.Floor(theta / math.Pi))
}
