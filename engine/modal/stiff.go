package modal

import (
	"math"
	"math/cmplx"

	"github.com/tautspan/tautspan/engine/mesh"
)

// # Stiffness of a stretch
//
// A stretch of a piece with u(x) e^{st} obeys, with E = EI (1 + s tau) and
// b = m s^2 + c s,
//
//	E u'''' - (T u')' + b u = 0,
//
// and its end forces T u' - E u''' and moments E u'' (taken with a minus at the
// start) follow from end displacements and slopes by a symmetric matrix D(s).
// The product of det D of a network with the functions W(s) of its stretches is
// an entire function Delta(s) that vanishes at the natural vibrations and does
// not depend on where pieces are cut: W is det of end displacements and slopes of
// solutions normalised inside, over E^2 (for strings sinh(aL)/(aT)), which
// vanishes where the stretch vibrates with its ends held. Therefore a piece that
// is near such a vibration is cut at another place, and no matrix is ever
// evaluated near a pole.
//
// Source: Clough, Penzien, Dynamics of Structures, on the dynamic direct
// stiffness method (from memory); the factor by Wittrick and Williams (1971).

// stiff is the stiffness of a stretch. Rows and columns: displacement and slope
// at the start, displacement and slope at the end; strings use the first and the
// third.
type stiff struct {
	d     [4][4]dual
	w     dual // log W
	inner int  // vibrations with held ends below omega, at s = i omega without loss
	size  float64
	bends bool
	// open: the end without tension at the start (0) or the end (2) carries no
	// force; its displacement is tip times that of the other end. -1: none.
	open int
	tip  complex128
	// sag: force on the four unknowns from unit load per length, and the
	// integral of the displacement under it.
	load [4]dual
	fill dual
}

// wave holds what a piece is at one s.
type wave struct {
	p       *mesh.Piece
	s       complex128
	b, e    dual       // m s^2 + c s, N/m^2; EI (1 + s tau + i eta), N m^2
	f       complex128 // 1 + i eta of the tension
	omega   float64    // Im s
	bends   bool
	tapered bool
}

// newWave is a piece at s. Loss factors have the sign of Im s, and none at rest.
func newWave(p *mesh.Piece, s complex128) wave { return newWaveOf(p, s, sign(imag(s))) }

func newWaveOf(p *mesh.Piece, s complex128, loss float64) wave {
	m, c := complex(p.MassPerLength, 0), complex(p.Viscous, 0)
	v := wave{p: p, s: s, omega: imag(s), bends: p.Bending > 0, tapered: p.TensionRise != 0}
	v.b = dual{(m*s + c) * s, 2*m*s + c}
	v.f = complex(1, loss*p.TensionLoss)
	if v.bends {
		ei, tau := complex(p.Bending, 0), complex(p.Internal, 0)
		v.e = dual{ei * (1 + s*tau + complex(0, loss*p.BendingLoss)), ei * tau}
	}
	return v
}

// sign is -1, 0 or 1.
func sign(x float64) float64 {
	switch {
	case x > 0:
		return 1
	case x < 0:
		return -1
	}
	return 0
}

// bare is the piece with its equation divided by the tension's factor 1 + i eta,
// which makes the tension real.
func (v *wave) bare() wave {
	u := *v
	if v.f != 1 {
		inv := dual{1 / v.f, 0}
		u.b, u.e = v.b.mul(inv), v.e.mul(inv)
	}
	return u
}

// tension at x of the piece, N.
func (v *wave) tension(x float64) float64 { return v.p.Tension + v.p.TensionRise*x }

// between is the stiffness of the stretch x0 .. x1.
func (v *wave) between(x0, x1 float64, sag bool) stiff {
	var k stiff
	u := v.bare()
	switch {
	case v.tapered:
		k = u.taper(x0, x1)
	case v.bends:
		k = u.beam(x1 - x0)
	default:
		k = u.string(x1 - x0)
	}
	k.bends = v.bends
	k.grow(v.f)
	if sag {
		k.uniform(v.b, x1-x0)
	}
	return k
}

// grow multiplies the stiffness by a constant. W falls by it once for every
// displacement and slope of an end, so that cutting a piece leaves the product of
// det D and all W as it is.
func (k *stiff) grow(f complex128) {
	if f == 1 {
		return
	}
	for i := range k.d {
		for j := range k.d[i] {
			k.d[i][j].v *= f
			k.d[i][j].d *= f
		}
	}
	log := cmplx.Log(f)
	if k.bends {
		log *= 2
	}
	k.w.v -= log
}

// uniform adds what a load of one per length does. With N the shapes of unit end
// displacement, equilibrium of the stretch gives b * integral of N_i =
// D_1i + D_3i, and the displacement under the load is -(1 - N_1 - N_3)/b.
func (k *stiff) uniform(b dual, length float64) {
	for i := range k.load {
		k.load[i] = k.d[0][i].add(k.d[2][i]).div(b)
	}
	k.fill = k.load[0].add(k.load[2]).sub(constant(length)).div(b)
}

// string is the stiffness of a taut string of constant tension.
func (v *wave) string(length float64) stiff {
	t := v.p.Tension
	c, s, scale := hyperbolic(v.b.times(length * length / t))
	k := stiff{open: -1}
	one := constant(math.Exp(-scale)).div(s).times(t / length)
	own := c.div(s).times(t / length)
	k.d[0][0], k.d[2][2] = own, own
	k.d[0][2], k.d[2][0] = one.neg(), one.neg()
	k.w = s.log()
	k.w.v += complex(scale+math.Log(length/t), 0)
	theta := math.Abs(v.omega) * length * math.Sqrt(v.p.MassPerLength/t)
	k.inner = int(math.Floor(theta / math.Pi))
	k.size = cmplx.Abs(own.v) / (t/length + cmplx.Abs(cmplx.Sqrt(v.b.v))*math.Sqrt(t))
	return k
}

// half is the stiffness of the far half of a stretch in motions that are even or
// odd about its middle: force and moment from displacement and slope there.
type half [2][2]dual

// beam is the stiffness of a tensioned beam, from the solutions cosh(r y),
// sinh(r y)/r about the middle with the squares
//
//	r1^2 = (T + sqrt(T^2 - 4 E b))/(2E),   r2^2 = b/(E r1^2).
//
// Where the two squares nearly coincide (b > 0 only) the mean over a circle of b
// is taken, which for an analytic function is its value at the centre.
func (v *wave) beam(length float64) stiff {
	t := complex(v.p.Tension, 0)
	disc := t*t - 4*v.e.v*v.b.v
	if cmplx.Abs(disc) > 1e-4*(cmplx.Abs(t*t)+4*cmplx.Abs(v.e.v*v.b.v)) ||
		cmplx.Abs(v.b.v/v.e.v)*math.Pow(length/2, 4) < 4 && cmplx.Abs(t/v.e.v)*length*length/4 < 3 {
		return v.beamAt(length, v.b)
	}
	// 16 points at a hundredth of b: the error is 1e-32 of the function's size
	// times a power of its growth, which up to r L = 2000 leaves 1e-13.
	const points = 16
	var k stiff
	before := 0.0
	for i := 0; i < points; i++ {
		sin, cos := math.Sincos(2 * math.Pi * (float64(i) + 0.5) / points)
		f := 1 + 0.01*complex(cos, sin)
		one := v.beamAt(length, dual{v.b.v * f, v.b.d * f})
		if i == 0 {
			k = one
			k.d, k.w = [4][4]dual{}, dual{}
			before = imag(one.w.v)
		}
		// The logarithm must not jump on the way round.
		before += math.Remainder(imag(one.w.v)-before, 2*math.Pi)
		one.w.v = complex(real(one.w.v), before)
		for r := range k.d {
			for c := range k.d[r] {
				k.d[r][c] = k.d[r][c].add(one.d[r][c].times(1.0 / points))
			}
		}
		k.w = k.w.add(one.w.times(1.0 / points))
	}
	return k
}

func (v *wave) beamAt(length float64, b dual) stiff {
	h := length / 2
	t := constant(v.p.Tension)
	disc := t.mul(t).sub(v.e.mul(b).times(4)).root()
	alpha := t.add(disc).div(v.e).times(h * h / 2) // (r1 h)^2
	beta := b.div(v.e).times(h * h * h * h).div(alpha)
	even, odd, w := v.halves(h, alpha, beta)
	k := stiff{open: -1, w: w}
	k.join(even, odd)
	rotary := 0
	for _, m := range []dual{even[1][1], odd[1][1]} {
		if real(m.v) < 0 {
			rotary++
		}
	}
	wave := math.Sqrt(math.Max(-real(beta.v), 0)) * 2 // k2 L at s = i omega
	k.inner = int(math.Floor(wave/math.Pi)) - rotary
	// Sizes to which a stiffness far from poles compares.
	r1, r2 := cmplx.Abs(cmplx.Sqrt(alpha.v)), cmplx.Abs(cmplx.Sqrt(beta.v))
	force := r1*r2*(r1+r2) + 1.5 + cmplx.Abs(alpha.v)
	moment := r1 + r2 + 2
	e := cmplx.Abs(v.e.v)
	k.size = math.Max(
		math.Max(cmplx.Abs(even[0][0].v), cmplx.Abs(odd[0][0].v))/(e/(h*h*h)*force),
		math.Max(cmplx.Abs(even[1][1].v), cmplx.Abs(odd[1][1].v))/(e/h*moment))
	return k
}

// halves gives the two half stiffnesses and log W of a beam of half length h.
func (v *wave) halves(h float64, alpha, beta dual) (even, odd half, w dual) {
	e1, e3 := v.e.times(1/(h*h)), v.e.times(1/(h*h*h))
	var fe, fo [2][4]dual // displacement, h slope, force, moment of two solutions
	scale := 0.0
	wide := math.Max(cmplx.Abs(alpha.v), cmplx.Abs(beta.v)) >= 4
	cb, sb, shrink := hyperbolic(beta)
	if !wide && shrink > 0 { // the other solution is made of the same ones, unscaled
		cb, sb, shrink = cb.times(math.Exp(shrink)), sb.times(math.Exp(shrink)), 0
	}
	fe[0] = [4]dual{cb, beta.mul(sb), beta.mul(sb).mul(alpha).mul(e3), beta.mul(cb).mul(e1)}
	fo[0] = [4]dual{sb, cb, cb.mul(alpha).mul(e3), beta.mul(sb).mul(e1)}
	scale += 2 * shrink
	if wide {
		ca, sa, shrink := hyperbolic(alpha)
		fe[1] = [4]dual{ca, alpha.mul(sa), alpha.mul(sa).mul(beta).mul(e3), alpha.mul(ca).mul(e1)}
		fo[1] = [4]dual{sa, ca, ca.mul(beta).mul(e3), alpha.mul(sa).mul(e1)}
		scale += 2 * shrink
	} else {
		// Divided differences over the two squares, without subtraction.
		ddc, dds := differences(alpha, beta)
		ab := alpha.mul(beta)
		// alpha S(alpha) and alpha C(alpha): F[a,b] of z F is a F[a,b] + F(b).
		fe[1] = [4]dual{ddc, alpha.mul(dds).add(sb), ab.mul(dds).mul(e3), alpha.mul(ddc).add(cb).mul(e1)}
		fo[1] = [4]dual{dds, ddc, beta.mul(ddc).sub(cb).mul(e3), alpha.mul(dds).add(sb).mul(e1)}
	}
	even, we := solveHalf(fe, h)
	odd, wo := solveHalf(fo, h)
	w = we.mul(wo).log()
	if wide {
		gap := alpha.sub(beta).log()
		w = w.sub(gap).sub(gap)
	}
	le := v.e.log()
	w = w.sub(le).sub(le)
	w.v += complex(scale+math.Log(4)+4*math.Log(h), 0)
	return even, odd, w
}

// solveHalf finds force and moment from displacement and slope, and the
// determinant of the latter two over the solutions.
func solveHalf(f [2][4]dual, h float64) (k half, det dual) {
	p, q := &f[0], &f[1]
	det = p[0].mul(q[1]).sub(p[1].mul(q[0]))
	inv := constant(1).div(det)
	for i := 0; i < 2; i++ {
		k[i][0] = p[2+i].mul(q[1]).sub(q[2+i].mul(p[1])).mul(inv)
		k[i][1] = q[2+i].mul(p[0]).sub(p[2+i].mul(q[0])).mul(inv).times(h)
	}
	return k, det
}

// differences are the divided differences of cosh(sqrt z) and
// sinh(sqrt z)/sqrt z between two squares, |z| < 4: the first terms left out are
// below 1e-18.
func differences(a, b dual) (c, s dual) {
	sum, power := constant(1), constant(1) // sum of a^i b^(n-i); b^n
	fact := 1.0
	for k := 1; k <= 14; k++ {
		fact /= float64(2*k) * float64(2*k-1)
		c = c.add(sum.times(fact))
		s = s.add(sum.times(fact / float64(2*k+1)))
		power = power.mul(b)
		sum = sum.mul(a).add(power)
	}
	return c, s
}

// join makes the whole from its even and odd halves.
func (k *stiff) join(even, odd half) {
	put := func(i, j int, v dual) { k.d[i][j] = v.times(0.5) }
	cross := even[0][1].add(even[1][0]).times(0.5) // equal but for rounding
	crossOdd := odd[0][1].add(odd[1][0]).times(0.5)
	uu, uo := even[0][0], odd[0][0]
	tt, to := even[1][1], odd[1][1]
	put(0, 0, uu.add(uo))
	put(2, 2, uu.add(uo))
	put(0, 2, uu.sub(uo))
	put(2, 0, uu.sub(uo))
	put(1, 1, tt.add(to))
	put(3, 3, tt.add(to))
	put(1, 3, to.sub(tt))
	put(3, 1, to.sub(tt))
	near := cross.add(crossOdd)
	put(2, 3, near)
	put(3, 2, near)
	put(0, 1, near.neg())
	put(1, 0, near.neg())
	far := crossOdd.sub(cross) // force at the end by slope at the start
	put(2, 1, far)
	put(1, 2, far)
	put(0, 3, far.neg())
	put(3, 0, far.neg())
}

// endless is the stiffness of a line that goes on for ever from its start: only
// waves that leave and their near fields. Rows: force and moment.
//
//	E r1 r2 (r1+r2)   E r1 r2
//	E r1 r2           E (r1+r2)
func (v *wave) endless() [2][2]complex128 {
	t := complex(v.p.Tension, 0) * v.f
	r1sq := (t + positiveRoot(t*t-4*v.e.v*v.b.v)) / (2 * v.e.v)
	r1 := positiveRoot(r1sq)
	r2 := positiveRoot(v.b.v / (v.e.v * r1sq))
	// Without loss r2 is imaginary, and the wave that leaves has the sign of s.
	if math.Abs(real(r2)) < 1e-12*cmplx.Abs(r2) && imag(r2)*imag(v.s) < 0 {
		r2 = -r2
	}
	cross := v.e.v * r1 * r2
	return [2][2]complex128{{cross * (r1 + r2), cross}, {cross, v.e.v * (r1 + r2)}}
}
