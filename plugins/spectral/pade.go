package spectral

import (
	"math"
	"math/big"
	"math/cmplx"
	"sort"
)

// factor is one factor of the approximant of exp z: for a pair of poles
//
//	nu + res/(z-pole) + conj(res)/(z-conj(pole)),
//
// for the single real pole res/(z-pole) alone, with nu = 0.
type factor struct {
	pole, res complex128
	nu        float64
	single    bool
}

// padeMax is the largest degree used; a longer step is split. Beyond it the start
// values of the root finding lose too many digits in double precision.
const padeMax = 29

// padeTol is the error that one step may leave on the imaginary axis.
const padeTol = 1e-13

// Degrees are odd, so that the numerator has even degree and conjugate
// pairs of roots only, and the denominator one real root besides pairs.
const padeMin = 5

// padeReach is the largest x = |z| at which the (m-1, m) approximant of exp z on
// the imaginary axis errs by no more than about tol, from the leading term
//
//	|exp z - r(z)| ~ (m-1)! m! / ((2m-1)! (2m)!) |z|^(2m).
func padeReach(m int, tol float64) float64 {
	lg := func(n int) float64 { v, _ := math.Lgamma(float64(n) + 1); return v }
	c := lg(m-1) + lg(m) - lg(2*m-1) - lg(2*m)
	return math.Exp((math.Log(tol) - c) / float64(2*m))
}

// padeDegree is the least degree that reaches z, or the largest one.
func padeDegree(z float64) int {
	for m := padeMin; m < padeMax; m += 2 {
		if padeReach(m, padeTol) >= z {
			return m
		}
	}
	return padeMax
}

// pade returns the factors of the (m-1, m) Padé approximant of exp, m odd:
//
//	num = sum_j C(m-1,j) (2m-1-j)!/(2m-1)! z^j,  den = sum_j C(m,j) (2m-1-j)!/(2m-1)! (-z)^j.
//
// A-stable and zero at infinity. Source: Hairer and Wanner, Solving Ordinary
// Differential Equations II, IV.3 (from memory).
func pade(m int) []factor {
	zeros := upper(roots(padeCoefficients(m, m-1, 1)))
	poles := upper(roots(padeCoefficients(m, m, -1)))
	var out []factor
	z := 0
	for _, p := range poles {
		if imag(p) == 0 {
			out = append(out, factor{pole: p, res: -p, single: true})
			continue
		}
		q := zeros[z]
		z++
		nu := sqAbs(p) / sqAbs(q)
		res := complex(nu, 0) * (p - q) * (p - cmplx.Conj(q)) / (p - cmplx.Conj(p))
		out = append(out, factor{pole: p, res: res, nu: nu})
	}
	return out
}

func sqAbs(z complex128) float64 { return real(z)*real(z) + imag(z)*imag(z) }

// upper keeps the roots with positive imaginary part, and the real one, sorted
// by imaginary part.
func upper(z []complex128) []complex128 {
	var out []complex128
	for _, r := range z {
		if math.Abs(imag(r)) < 1e-6*cmplx.Abs(r) {
			out = append(out, complex(real(r), 0))
		} else if imag(r) > 0 {
			out = append(out, r)
		}
	}
	sort.Slice(out, func(i, j int) bool { return imag(out[i]) < imag(out[j]) })
	return out
}

// padeBits is the precision of the root finding, bits. The roots of these
// polynomials lose about m/2.5 digits when computed from coefficients; 256 bits
// leave more than 50 digits at m = 29.
const padeBits = 256

// padeCoefficients are C(n, j) (2m-1-j)!/(2m-1)! (sign z)^j for j = 0 .. n.
func padeCoefficients(m, n int, sign int64) []*big.Float {
	out := make([]*big.Float, n+1)
	c := big.NewRat(1, 1)
	for j := 0; j <= n; j++ {
		out[j] = new(big.Float).SetPrec(padeBits).SetRat(c)
		if j < n {
			c = new(big.Rat).Mul(c, big.NewRat(sign*int64(n-j), int64(j+1)*int64(2*m-1-j)))
		}
	}
	return out
}

// roots are all zeros of sum a_j z^j: Aberth's simultaneous iteration in double
// precision, then Newton's in long arithmetic on each.
// Source: Aberth 1973, Math. Comp. 27.
func roots(a []*big.Float) []complex128 {
	n := len(a) - 1
	c := make([]float64, n+1)
	for j := range c {
		c[j], _ = a[j].Float64()
	}
	z := make([]complex128, n)
	radius := math.Exp((math.Log(math.Abs(c[0])) - math.Log(math.Abs(c[n]))) / float64(n))
	for k := range z {
		z[k] = cmplx.Rect(radius, 2*math.Pi*(float64(k)+0.35)/float64(n))
	}
	for it := 0; it < 60; it++ {
		worst := 0.0
		for k := range z {
			p, dp := complex(c[n], 0), complex128(0)
			for j := n - 1; j >= 0; j-- {
				dp = dp*z[k] + p
				p = p*z[k] + complex(c[j], 0)
			}
			if p == 0 {
				continue
			}
			ratio := p / dp
			var sum complex128
			for l := range z {
				if l != k {
					sum += 1 / (z[k] - z[l])
				}
			}
			step := ratio / (1 - ratio*sum)
			z[k] -= step
			worst = math.Max(worst, cmplx.Abs(step)/cmplx.Abs(z[k]))
		}
		if worst < 1e-13 {
			break
		}
	}
	for k := range z {
		if imag(z[k]) >= -1e-6*cmplx.Abs(z[k]) {
			z[k] = polish(a, z[k])
		}
	}
	return z
}

// polish repeats Newton's step in long arithmetic until it no longer moves the
// root in double precision.
func polish(a []*big.Float, z complex128) complex128 {
	f := func(x float64) *big.Float { return new(big.Float).SetPrec(padeBits).SetFloat64(x) }
	x, y := f(real(z)), f(imag(z))
	t1, t2 := f(0), f(0)
	// mulAdd sets (r, i) = (r, i)*(x, y) + (ar, ai).
	mulAdd := func(r, i, ar, ai *big.Float) {
		t1.Sub(f(0).Mul(r, x), f(0).Mul(i, y))
		t2.Add(f(0).Mul(r, y), f(0).Mul(i, x))
		r.Add(t1, ar)
		i.Add(t2, ai)
	}
	zero := f(0)
	for it := 0; it < 40; it++ {
		pr, pi, dr, di := f(0), f(0), f(0), f(0)
		pr.Set(a[len(a)-1])
		for j := len(a) - 2; j >= 0; j-- {
			mulAdd(dr, di, pr, pi)
			mulAdd(pr, pi, a[j], zero)
		}
		// Scale by the derivative's size, which leaves the double range for no m here.
		den := f(0).Add(f(0).Mul(dr, dr), f(0).Mul(di, di))
		if den.Sign() == 0 {
			break
		}
		sr := f(0).Quo(f(0).Add(f(0).Mul(pr, dr), f(0).Mul(pi, di)), den)
		si := f(0).Quo(f(0).Sub(f(0).Mul(pi, dr), f(0).Mul(pr, di)), den)
		x.Sub(x, sr)
		y.Sub(y, si)
		fr, _ := sr.Float64()
		fi, _ := si.Float64()
		if math.Hypot(fr, fi) < 1e-22*cmplx.Abs(z) {
			break
		}
	}
	re, _ := x.Float64()
	im, _ := y.Float64()
	return complex(re, im)
}
