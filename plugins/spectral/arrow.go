package spectral

import (
	"math/cmplx"
)

// arrow propagates the network in arrow form by Padé factors. Every factor is 1 at
// the origin, and is applied as an increment,
//
//	y + 2 Re c w,   w = A (A - s)^-1 y,
//
// because nu y + 2 Re c (A - s)^-1 y would lose the slow modes' velocities in the
// rounding of the shift, which is as large as the highest frequency. The first half
// of w solves
//
//	(K + s C + s^2 M) w = K x - s M v + s f_s,
//
// where f_s is the load seen through the same factor; the second half is v + s w. An
// inner coordinate is (rhs - kappa (w_a + or - w_b))/d with d = omega^2 + g s + s^2,
// which leaves a small symmetric system for the end points. One factor costs about 35
// operations for each coordinate.
type arrow struct {
	*system
	factors map[int][]factor // by degree m
	plans   []*plan          // most recent first
	hot     float64          // rad/s, highest frequency that the approximant must follow
	tr, ti  []float64
	us, rh  []complex128 // [ends]
	fr, fi  []float64
	qs      []complex128 // [brackets]
}

// plan is everything about one step length.
type plan struct {
	h     float64
	m     int
	poles []shifted
}

// shifted is one factor at one step length.
type shifted struct {
	s, c   complex128   // shift, weight of the solution
	ir, ii []float64    // [inner] 1/d
	inv    []complex128 // [ends*ends] inverse of the end points' system
	w      [loadDegree + 1]complex128
	// w[j] is s times the solution for the load's power j.
}

// keptPlans is how many step lengths are remembered.
const keptPlans = 3

func newArrow(s *system, hot float64) *arrow {
	n := s.size()
	return &arrow{system: s, hot: hot, factors: map[int][]factor{}, tr: make([]float64, s.inner), ti: make([]float64, s.inner),
		us: make([]complex128, s.ends), rh: make([]complex128, s.ends),
		fr: make([]float64, n), fi: make([]float64, n), qs: make([]complex128, len(s.brackets))}
}

// planFor prepares a step length, or finds it prepared.
func (a *arrow) planFor(h float64) *plan {
	for i, p := range a.plans {
		if p.h == h {
			copy(a.plans[1:i+1], a.plans[:i])
			a.plans[0] = p
			return p
		}
	}
	m := padeDegree(a.hot * h)
	fs := a.factors[m]
	if fs == nil {
		fs = pade(m)
		a.factors[m] = fs
	}
	var p *plan
	if len(a.plans) < keptPlans {
		p = &plan{}
		a.plans = append(a.plans, nil)
	} else {
		p = a.plans[keptPlans-1]
	}
	for len(p.poles) < len(fs) {
		p.poles = append(p.poles, shifted{ir: make([]float64, a.inner), ii: make([]float64, a.inner),
			inv: make([]complex128, a.ends*a.ends)})
	}
	p.poles = p.poles[:len(fs)]
	copy(a.plans[1:], a.plans)
	a.plans[0] = p
	p.h, p.m = h, m
	var w [loadDegree + 1]float64
	w[0] = 1
	for i := range p.poles {
		a.shift(&p.poles[i], fs[i], h, &w)
	}
	return p
}

// shift prepares one factor: 1/d, the end points' inverse, and the load's own
// powers of time, which run through the factors like states of their own,
// w_j' = w_(j-1)/h.
func (a *arrow) shift(p *shifted, f factor, h float64, w *[loadDegree + 1]float64) {
	ih := complex(1/h, 0)
	p.s, p.c = f.pole*ih, 2*f.res/f.pole
	if f.single {
		p.c /= 2
	}
	// With (J - s) v = w: v_j = (v_(j-1)/h - w_j)/s, and w + s v = v_(j-1)/h.
	var before complex128
	for j := range w {
		p.w[j] = before*ih - complex(w[j], 0)
		w[j] += real(p.c * before * ih)
		before = p.w[j] / p.s
	}
	n := a.ends
	clear(p.inv)
	for i := range a.rows {
		p.inv[i*n+i] += p.s * p.s * complex(a.mass[i], 0)
		for _, t := range a.rows[i] {
			p.inv[i*n+t.col] += complex(t.k, 0) + p.s*complex(t.c, 0)
		}
	}
	for _, b := range a.brackets {
		z := complex(b.k, 0) * p.s / (p.s + complex(b.k/b.c, 0))
		p.inv[b.end*n+b.end] += z
		if b.other >= 0 {
			p.inv[b.other*n+b.other] += z
			p.inv[b.end*n+b.other] -= z
			p.inv[b.other*n+b.end] -= z
		}
	}
	for e := range a.elements {
		el := &a.elements[e]
		base := p.s*complex(el.rate, 0) + p.s*p.s
		var saa, sab complex128
		for _, half := range el.halves() {
			var sum complex128
			for k := half.lo; k < half.hi; k++ {
				id := 1 / (complex(a.omega2[k], 0) + base)
				p.ir[k], p.ii[k] = real(id), imag(id)
				sum += complex(a.kappa[k]*a.kappa[k], 0) * id
			}
			saa += sum
			sab += complex(half.sign, 0) * sum
		}
		ea, eb := el.end[0], el.end[1]
		if ea >= 0 {
			p.inv[ea*n+ea] -= saa
		}
		if eb >= 0 {
			p.inv[eb*n+eb] -= saa
		}
		if ea >= 0 && eb >= 0 {
			p.inv[ea*n+eb] -= sab
			p.inv[eb*n+ea] -= sab
		}
	}
	invert(p.inv, n)
}

// invert replaces a complex n x n matrix by its inverse, by Gauss-Jordan
// elimination with row exchange.
func invert(a []complex128, n int) {
	swaps := make([]int, n)
	for c := 0; c < n; c++ {
		best := c
		for r := c + 1; r < n; r++ {
			if cmplx.Abs(a[r*n+c]) > cmplx.Abs(a[best*n+c]) {
				best = r
			}
		}
		swaps[c] = best
		if best != c {
			for k := 0; k < n; k++ {
				a[c*n+k], a[best*n+k] = a[best*n+k], a[c*n+k]
			}
		}
		piv := 1 / a[c*n+c]
		a[c*n+c] = 1
		row := a[c*n : c*n+n]
		for k := range row {
			row[k] *= piv
		}
		for r := 0; r < n; r++ {
			if r == c {
				continue
			}
			f := a[r*n+c]
			if f == 0 {
				continue
			}
			a[r*n+c] = 0
			dst := a[r*n : r*n+n]
			for k, v := range row {
				dst[k] -= f * v
			}
		}
	}
	for c := n - 1; c >= 0; c-- {
		if b := swaps[c]; b != c {
			for r := 0; r < n; r++ {
				a[r*n+c], a[r*n+b] = a[r*n+b], a[r*n+c]
			}
		}
	}
}

// step runs the state through all factors of the step length.
func (a *arrow) step(st *state, h float64, ld *load) {
	p := a.planFor(h)
	for i := range p.poles {
		a.apply(&p.poles[i], st, ld)
	}
}

// loadAt writes sum_j f_j w_j into fr, fi.
func (a *arrow) loadAt(p *shifted, ld *load) {
	n := a.size()
	clear(a.fr)
	clear(a.fi)
	for j := range ld.at {
		wr, wi := real(p.w[j]), imag(p.w[j])
		fr, fi := a.fr[ld.lo:n], a.fi[ld.lo:n]
		for k, f := range ld.at[j][ld.lo:n] {
			fr[k] += wr * f
			fi[k] += wi * f
		}
	}
}

// apply replaces the state y by y + Re c A (A - s)^-1 y; c holds the 2 of a pair.
func (a *arrow) apply(p *shifted, st *state, ld *load) {
	loaded := ld != nil && ld.active
	if loaded {
		a.loadAt(p, ld)
	}
	innerLoad := loaded && ld.lo < a.inner
	a.endRight(p, st, loaded)
	for e := range a.elements {
		el := &a.elements[e]
		ua, ub := a.endValue(st.x, el.end[0]), a.endValue(st.x, el.end[1])
		for _, half := range el.halves() {
			lo, hi := half.lo, half.hi
			var fr, fi []float64
			if innerLoad {
				fr, fi = a.fr[lo:hi:hi], a.fi[lo:hi:hi]
			}
			pull := solveInner(a.tr[lo:hi:hi], a.ti[lo:hi:hi], st.x[lo:hi:hi], st.v[lo:hi:hi],
				p.ir[lo:hi:hi], p.ii[lo:hi:hi], a.kappa[lo:hi:hi], a.omega2[lo:hi:hi], fr, fi, ua+half.sign*ub, p.s)
			if el.end[0] >= 0 {
				a.rh[el.end[0]] += pull
			}
			if el.end[1] >= 0 {
				a.rh[el.end[1]] += complex(half.sign, 0) * pull
			}
		}
	}
	for i := 0; i < a.ends; i++ {
		var sum complex128
		for k, v := range p.inv[i*a.ends : (i+1)*a.ends] {
			sum += v * a.rh[k]
		}
		a.us[i] = sum
	}
	a.update(p, st)
}

// solveInner writes t = (omega^2 x + kappa u - s v + f)/d into tr, ti and returns
// the pull of x - t on the element's first end. fr, fi may be nil.
func solveInner(tr, ti, x, v, ir, ii, ka, w2, fr, fi []float64, u float64, s complex128) complex128 {
	var ar, ai float64
	n := len(tr)
	sr, si := real(s), imag(s)
	ti, x, v, ir, ii, ka, w2 = ti[:n], x[:n], v[:n], ir[:n], ii[:n], ka[:n], w2[:n]
	if fr == nil {
		for k := range tr {
			xk, vk, c, a, b := x[k], v[k], ka[k], ir[k], ii[k]
			r, i := w2[k]*xk+c*u-sr*vk, -si*vk
			t, q := r*a-i*b, r*b+i*a
			tr[k], ti[k] = t, q
			ar, ai = ar+c*(xk-t), ai-c*q
		}
		return complex(ar, ai)
	}
	fr, fi = fr[:n], fi[:n]
	for k := range tr {
		c := ka[k]
		r, i := w2[k]*x[k]+c*u-sr*v[k]+fr[k], fi[k]-si*v[k]
		t, q := r*ir[k]-i*ii[k], r*ii[k]+i*ir[k]
		tr[k], ti[k] = t, q
		ar, ai = ar+c*(x[k]-t), ai-c*q
	}
	return complex(ar, ai)
}

// endRight sets the right-hand sides of the end points' system, without the
// inner coordinates' share.
func (a *arrow) endRight(p *shifted, st *state, loaded bool) {
	n := a.inner
	for i := range a.rows {
		r := -p.s * complex(a.mass[i]*st.v[n+i], 0)
		for _, t := range a.rows[i] {
			r += complex(t.k*st.x[n+t.col], 0)
		}
		if loaded {
			r += complex(a.fr[n+i], a.fi[n+i])
		}
		a.rh[i] = r
	}
	for b := range a.brackets {
		k := &a.brackets[b]
		pull := complex(k.k*(k.across(st.x, n)-st.r[b]), 0) * p.s / (complex(k.k/k.c, 0) + p.s)
		a.rh[k.end] += pull
		if k.other >= 0 {
			a.rh[k.other] -= pull
		}
	}
}

// update adds the increment to the state: first brackets and end points, then the
// inner coordinates.
func (a *arrow) update(p *shifted, st *state) {
	n := a.inner
	for b := range a.brackets {
		k := &a.brackets[b]
		rho := complex(k.k/k.c, 0)
		u := a.us[k.end]
		if k.other >= 0 {
			u -= a.us[k.other]
		}
		q := rho * (u - complex(k.across(st.x, n)-st.r[b], 0)) / (rho + p.s)
		st.r[b] += real(p.c * q)
	}
	for i, u := range a.us {
		x, v := st.x[n+i], st.v[n+i]
		if st.z != nil {
			// Of z = int x it is (w - x)/s, of y = int z ((w - x)/s - z)/s.
			q := (u - complex(x, 0)) / p.s
			st.y[n+i] += real(p.c * (q - complex(st.z[n+i], 0)) / p.s)
			st.z[n+i] += real(p.c * q)
		}
		st.x[n+i] = x + real(p.c*u)
		st.v[n+i] = v + real(p.c*(complex(v, 0)+p.s*u))
	}
	for e := range a.elements {
		el := &a.elements[e]
		var ua, ub complex128
		if el.end[0] >= 0 {
			ua = a.us[el.end[0]]
		}
		if el.end[1] >= 0 {
			ub = a.us[el.end[1]]
		}
		for _, half := range el.halves() {
			lo, hi := half.lo, half.hi
			u := ua + complex(half.sign, 0)*ub
			if st.z != nil {
				addIntegrals(st.z[lo:hi:hi], st.y[lo:hi:hi], st.x[lo:hi:hi], a.tr[lo:hi:hi], a.ti[lo:hi:hi],
					p.ir[lo:hi:hi], p.ii[lo:hi:hi], a.kappa[lo:hi:hi], u, p.c, p.s)
			}
			addInner(st.x[lo:hi:hi], st.v[lo:hi:hi], a.tr[lo:hi:hi], a.ti[lo:hi:hi],
				p.ir[lo:hi:hi], p.ii[lo:hi:hi], a.kappa[lo:hi:hi], u, p.c, p.c*p.s)
		}
	}
}

// addInner takes the ends' pull off the inner solution, w = t - kappa u/d, and adds
// Re c w to x and Re c (v + s w) to v.
func addInner(x, v, tr, ti, ir, ii, ka []float64, u, c, cs complex128) {
	ur, ui, cr, ci, dr, di := real(u), imag(u), real(c), imag(c), real(cs), imag(cs)
	n := len(x)
	v, tr, ti, ir, ii, ka = v[:n], tr[:n], ti[:n], ir[:n], ii[:n], ka[:n]
	keep := 1 + cr
	for k := range x {
		p, a, b := ka[k], ir[k], ii[k]
		wr := tr[k] - p*(ur*a-ui*b)
		wi := ti[k] - p*(ur*b+ui*a)
		x[k] += cr*wr - ci*wi
		v[k] = keep*v[k] + dr*wr - di*wi
	}
}

// addIntegrals updates z = int x by Re c (w - x)/s and y = int z by
// Re c ((w - x)/s - z)/s, before x moves on.
func addIntegrals(z, y, x, tr, ti, ir, ii, ka []float64, u, c, s complex128) {
	c1, c2 := c/s, c/(s*s)
	ur, ui := real(u), imag(u)
	n := len(z)
	y, x, tr, ti, ir, ii, ka = y[:n], x[:n], tr[:n], ti[:n], ir[:n], ii[:n], ka[:n]
	for k := range z {
		p, a, b := ka[k], ir[k], ii[k]
		wr := tr[k] - p*(ur*a-ui*b) - x[k]
		wi := ti[k] - p*(ur*b+ui*a)
		y[k] += real(c2)*wr - imag(c2)*wi - real(c1)*z[k]
		z[k] += real(c1)*wr - imag(c1)*wi
	}
}

// accel is M^-1 (f - C v - K x - K_b (u - q)).
func (a *arrow) accel(dst, x, v, r, f []float64) {
	n := a.inner
	for i := range a.rows {
		s := 0.0
		for _, t := range a.rows[i] {
			s -= t.k*x[n+t.col] + t.c*v[n+t.col]
		}
		dst[n+i] = s
	}
	for b := range a.brackets {
		k := &a.brackets[b]
		pull := k.k * (k.across(x, n) - r[b])
		dst[n+k.end] -= pull
		if k.other >= 0 {
			dst[n+k.other] += pull
		}
	}
	for e := range a.elements {
		el := &a.elements[e]
		ua, ub := a.endValue(x, el.end[0]), a.endValue(x, el.end[1])
		for _, half := range el.halves() {
			lo, hi := half.lo, half.hi
			u, pull := ua+half.sign*ub, 0.0
			ka, w2, xe, ve, de := a.kappa[lo:hi:hi], a.omega2[lo:hi:hi], x[lo:hi:hi], v[lo:hi:hi], dst[lo:hi:hi]
			for k := range ka {
				pull += ka[k] * xe[k]
				de[k] = -w2[k]*xe[k] - el.rate*ve[k] - ka[k]*u
			}
			if el.end[0] >= 0 {
				dst[n+el.end[0]] -= pull
			}
			if el.end[1] >= 0 {
				dst[n+el.end[1]] -= half.sign * pull
			}
		}
	}
	if f != nil {
		for k := range dst[:a.size()] {
			dst[k] += f[k]
		}
	}
	for i, m := range a.mass {
		dst[n+i] /= m
	}
}

func (a *arrow) endValue(x []float64, end int) float64 {
	if end < 0 {
		return 0
	}
	return x[a.inner+end]
}

// lossForce is C v.
func (a *arrow) lossForce(dst, v []float64) {
	n := a.inner
	for e := range a.elements {
		el := &a.elements[e]
		for k := el.first; k < el.first+el.ref.p-1; k++ {
			dst[k] = el.rate * v[k]
		}
	}
	for i := range a.rows {
		s := 0.0
		for _, t := range a.rows[i] {
			s += t.c * v[n+t.col]
		}
		dst[n+i] = s
	}
}

// stored is the kinetic energy and that in line, springs, links and brackets.
func (a *arrow) stored(x, v, r []float64) float64 {
	n, sum := a.inner, 0.0
	for e := range a.elements {
		el := &a.elements[e]
		ua, ub := a.endValue(x, el.end[0]), a.endValue(x, el.end[1])
		for _, half := range el.halves() {
			u := 2 * (ua + half.sign*ub)
			for k := half.lo; k < half.hi; k++ {
				sum += v[k]*v[k] + x[k]*(a.omega2[k]*x[k]+a.kappa[k]*u)
			}
		}
	}
	for i := range a.rows {
		s := 0.0
		for _, t := range a.rows[i] {
			s += t.k * x[n+t.col]
		}
		sum += a.mass[i]*v[n+i]*v[n+i] + x[n+i]*s
	}
	for b := range a.brackets {
		k := &a.brackets[b]
		d := k.across(x, n) - r[b]
		sum += k.k * d * d
	}
	return sum / 2
}

func (a *arrow) row(arrow []float64) []float64   { return arrow }
func (a *arrow) enter(arrow []float64) []float64 { return arrow }
