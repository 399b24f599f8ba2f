package spectral

import (
	"math/cmplx"
)

// arrow propagates the network in arrow form by Padé factors. One factor costs
// about 30 operations for each coordinate: with a shift s, an inner coordinate is
//
//	xi = (rhs - kappa_a u_a - kappa_b u_b)/d,   d = omega^2 + g s + s^2,
//
// which leaves a small symmetric system for the end points.
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
	s, c   complex128 // shift, weight of the solution
	nu     float64
	ir, ii []float64    // [inner] 1/d
	inv    []complex128 // [ends*ends] inverse of the end points' system
	w      [loadDegree + 1]complex128
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
	p.s, p.c, p.nu = f.pole*ih, f.res*ih, f.nu
	if f.single {
		p.c /= 2 // 2 Re of it is then the whole
	}
	old := *w
	var before complex128
	for j := range w {
		p.w[j] = (before*ih - complex(old[j], 0)) / p.s
		before = p.w[j]
		w[j] = p.nu*old[j] + 2*real(p.c*p.w[j])
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
		p.inv[b.end*n+b.end] += complex(b.k, 0) * p.s / (p.s + complex(b.k/b.c, 0))
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

// apply replaces the state y by nu y + 2 Re c (A - s)^-1 y.
func (a *arrow) apply(p *shifted, st *state, ld *load) {
	loaded := ld != nil && ld.active
	if loaded {
		a.loadAt(p, ld)
	}
	innerLoad := loaded && ld.lo < a.inner
	a.endRight(p, st, loaded)
	sr, si := real(p.s), imag(p.s)
	for e := range a.elements {
		el := &a.elements[e]
		for _, half := range el.halves() {
			lo, hi := half.lo, half.hi
			var fr, fi []float64
			if innerLoad {
				fr, fi = a.fr[lo:hi:hi], a.fi[lo:hi:hi]
			}
			pull := solveInner(a.tr[lo:hi:hi], a.ti[lo:hi:hi], st.x[lo:hi:hi], st.v[lo:hi:hi],
				p.ir[lo:hi:hi], p.ii[lo:hi:hi], a.kappa[lo:hi:hi], fr, fi, el.rate+sr, si)
			if el.end[0] >= 0 {
				a.rh[el.end[0]] -= pull
			}
			if el.end[1] >= 0 {
				a.rh[el.end[1]] -= complex(half.sign, 0) * pull
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

// solveInner writes (f - v - (g+s) x)/d into tr, ti and returns its pull on the
// element's first end. fr, fi may be nil.
func solveInner(tr, ti, x, v, ir, ii, ka, fr, fi []float64, gr, si float64) complex128 {
	var ar, ai float64
	n := len(tr)
	ti, x, v, ir, ii, ka = ti[:n], x[:n], v[:n], ir[:n], ii[:n], ka[:n]
	if fr == nil {
		for k := range tr {
			xk, a, b := x[k], ir[k], ii[k]
			r, i := -v[k]-gr*xk, -si*xk
			t, u := r*a-i*b, r*b+i*a
			tr[k], ti[k] = t, u
			ar, ai = ar+ka[k]*t, ai+ka[k]*u
		}
		return complex(ar, ai)
	}
	fr, fi = fr[:n], fi[:n]
	for k := range tr {
		r, i := fr[k]-v[k]-gr*x[k], fi[k]-si*x[k]
		t, u := r*ir[k]-i*ii[k], r*ii[k]+i*ir[k]
		tr[k], ti[k] = t, u
		ar, ai = ar+ka[k]*t, ai+ka[k]*u
	}
	return complex(ar, ai)
}

// endRight sets the right-hand sides of the end points' system, without the
// inner coordinates' share.
func (a *arrow) endRight(p *shifted, st *state, loaded bool) {
	n := a.inner
	for i := range a.rows {
		r := -complex(a.mass[i], 0) * (complex(st.v[n+i], 0) + p.s*complex(st.x[n+i], 0))
		for _, t := range a.rows[i] {
			r -= complex(t.c*st.x[n+t.col], 0)
		}
		if loaded {
			r += complex(a.fr[n+i], a.fi[n+i])
		}
		a.rh[i] = r
	}
	for b := range a.brackets {
		k := &a.brackets[b]
		a.rh[k.end] -= complex(k.k*st.r[b], 0) / (complex(k.k/k.c, 0) + p.s)
	}
}

// update adds the solution to the state: first brackets and end points, then the
// inner coordinates.
func (a *arrow) update(p *shifted, st *state) {
	n, c2, nu := a.inner, 2*p.c, p.nu
	for b := range a.brackets {
		k := &a.brackets[b]
		rho := complex(k.k/k.c, 0)
		q := (rho*a.us[k.end] - complex(st.r[b], 0)) / (rho + p.s)
		st.r[b] = nu*st.r[b] + real(c2*q)
	}
	cr, ci := real(c2), imag(c2)
	cs := c2 * p.s
	dr, di := real(cs), imag(cs)
	is := 1 / p.s
	i1, i2 := c2*is, c2*is*is // integrals: z = (x - z0)/s, y = (z - y0)/s
	for i := 0; i < a.ends; i++ {
		ur, ui := real(a.us[i]), imag(a.us[i])
		x := st.x[n+i]
		if st.z != nil {
			z := st.z[n+i]
			st.y[n+i] = (nu-real(i1))*st.y[n+i] + real(i2*(a.us[i]-complex(z, 0)))
			st.z[n+i] = nu*z + real(i1*(a.us[i]-complex(z, 0)))
			// y uses z_sol = (x_sol - z0)/s, so y_sol = (z_sol - y0)/s.
		}
		st.x[n+i] = nu*x + cr*ur - ci*ui
		st.v[n+i] = nu*st.v[n+i] + cr*x + dr*ur - di*ui
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
			if st.z == nil {
				finishAdd(st.x[lo:hi:hi], st.v[lo:hi:hi], a.tr[lo:hi:hi], a.ti[lo:hi:hi], p.ir[lo:hi:hi], p.ii[lo:hi:hi],
					a.kappa[lo:hi:hi], u, c2, cs, nu)
				continue
			}
			finishInner(a.tr[lo:hi:hi], a.ti[lo:hi:hi], p.ir[lo:hi:hi], p.ii[lo:hi:hi], a.kappa[lo:hi:hi], real(u), imag(u))
			addIntegrals(st.z[lo:hi:hi], st.y[lo:hi:hi], a.tr[lo:hi:hi], a.ti[lo:hi:hi], i1, i2, nu)
			addInner(st.x[lo:hi:hi], st.v[lo:hi:hi], a.tr[lo:hi:hi], a.ti[lo:hi:hi], c2, cs, nu)
		}
	}
}

// finishInner takes the ends' pull off the inner solution: t -= kappa u/d.
func finishInner(tr, ti, ir, ii, ka []float64, ur, ui float64) {
	n := len(tr)
	ti, ir, ii, ka = ti[:n], ir[:n], ii[:n], ka[:n]
	for k := range tr {
		c, a, b := ka[k], ir[k], ii[k]
		tr[k] -= c * (ur*a - ui*b)
		ti[k] -= c * (ur*b + ui*a)
	}
}

// finishAdd is finishInner and addInner in one pass, for runs without integrals.
func finishAdd(x, v, tr, ti, ir, ii, ka []float64, u, c2, cs complex128, nu float64) {
	ur, ui, cr, ci, dr, di := real(u), imag(u), real(c2), imag(c2), real(cs), imag(cs)
	n := len(x)
	v, tr, ti, ir, ii, ka = v[:n], tr[:n], ti[:n], ir[:n], ii[:n], ka[:n]
	for k := range x {
		c, a, b, x0 := ka[k], ir[k], ii[k], x[k]
		sr := tr[k] - c*(ur*a-ui*b)
		si := ti[k] - c*(ur*b+ui*a)
		x[k] = nu*x0 + cr*sr - ci*si
		v[k] = nu*v[k] + cr*x0 + dr*sr - di*si
	}
}

// addIntegrals updates z = int x and y = int z: z_sol = (x_sol - z)/s,
// y_sol = (z_sol - y)/s.
func addIntegrals(z, y, tr, ti []float64, i1, i2 complex128, nu float64) {
	i1r, i1i, i2r, i2i := real(i1), imag(i1), real(i2), imag(i2)
	n := len(z)
	y, tr, ti = y[:n], tr[:n], ti[:n]
	for k := range z {
		sr, si := tr[k]-z[k], ti[k]
		y[k] = (nu-i1r)*y[k] + i2r*sr - i2i*si
		z[k] = nu*z[k] + i1r*sr - i1i*si
	}
}

// addInner updates x and v = x_old + s x_sol.
func addInner(x, v, tr, ti []float64, c2, cs complex128, nu float64) {
	cr, ci, dr, di := real(c2), imag(c2), real(cs), imag(cs)
	n := len(x)
	v, tr, ti = v[:n], tr[:n], ti[:n]
	for k := range x {
		x0, sr, si := x[k], tr[k], ti[k]
		x[k] = nu*x0 + cr*sr - ci*si
		v[k] = nu*v[k] + cr*x0 + dr*sr - di*si
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
		dst[n+k.end] -= k.k * (x[n+k.end] - r[b])
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
		d := x[n+k.end] - r[b]
		sum += k.k * d * d
	}
	return sum / 2
}

func (a *arrow) row(arrow []float64) []float64   { return arrow }
func (a *arrow) enter(arrow []float64) []float64 { return arrow }
