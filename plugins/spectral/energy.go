package spectral

import (
	"math"

	"github.com/tautspan/tautspan/engine/solver"
)

// rates holds a power and its first three time derivatives, W, W/s, W/s^2, W/s^3.
type rates [4]float64

// product adds the power of two quantities given with three derivatives each.
func (r *rates) product(a, b rates) {
	r[0] += a[0] * b[0]
	r[1] += a[1]*b[0] + a[0]*b[1]
	r[2] += a[2]*b[0] + 2*a[1]*b[1] + a[0]*b[2]
	r[3] += a[3]*b[0] + 3*a[2]*b[1] + 3*a[1]*b[2] + a[0]*b[3]
}

// hermite is the integral over h of a quantity known with three derivatives at
// both ends,
//
//	h/2 (g0+g1) + 3h^2/28 (g0'-g1') + h^3/84 (g0''+g1'') + h^4/1680 (g0'''-g1'''),
//
// of order 8, error h^9 g^(8)/25401600. Source: two-point Hermite interpolation,
// derived (the coefficients are those of the (4, 4) Padé approximant).
func hermite(a, b rates, h float64) float64 {
	return h/2*(a[0]+b[0]) + 3*h*h/28*(a[1]-b[1]) + h*h*h/84*(a[2]+b[2]) + h*h*h*h/1680*(a[3]-b[3])
}

// positive is hermite for a power that is nowhere negative. What the windows resolve
// stays well inside 0 and 4 times the larger end value (a wave of 1.2 rad a window at
// most 1.3 times); outside, derivatives of unresolved motion have taken over and the
// trapezoidal rule is the better account.
func positive(a, b rates, h float64) float64 {
	if v := hermite(a, b, h); v >= 0 && v <= 4*h*math.Max(a[0], b[0]) {
		return v
	}
	return h / 2 * (a[0] + b[0])
}

// meter keeps the energy account. Work and losses are integrated from powers, and
// independently of the stored energy, so that the account's gap means something.
type meter struct {
	sys     *system
	op      operator
	ex      *excitation
	lossy   bool
	stiff   *stiff // nil: no dashpot is too stiff for the quadrature
	acct    solver.Energy
	k, kc   []*source    // per prescribed node: minus its stiffness and loss columns
	km      []*source    // and its mass column; nil where there is none
	a, j    []float64    // acceleration and its derivative
	i       []float64    // second derivative of the acceleration
	c       [3][]float64 // loss force of velocity, acceleration and its derivative
	f       [4][]float64
	rd, rdd []float64
	held    bool // end rates of the last window serve as the next one's start
	lastL   rates
	w0, l0  rates // at the start of the present window
	laws    *laws // nil: everything is linear
}

func newMeter(s *system, op operator, ex *excitation) *meter {
	n := op.size()
	m := &meter{sys: s, op: op, ex: ex, a: make([]float64, n), j: make([]float64, n),
		i: make([]float64, n), rd: make([]float64, len(s.brackets)), rdd: make([]float64, len(s.brackets)),
		k: make([]*source, len(s.moved)), kc: make([]*source, len(s.moved)), km: make([]*source, len(s.moved))}
	for q := range m.f {
		m.f[q] = make([]float64, n)
	}
	for q := range m.c {
		m.c[q] = make([]float64, n)
	}
	m.lossy = len(s.brackets) > 0
	for i := range s.elements {
		m.lossy = m.lossy || s.elements[i].lossy()
	}
	for _, rows := range [][][]entry{s.rows, s.movedPF, s.movedPP} {
		for _, row := range rows {
			for _, t := range row {
				m.lossy = m.lossy || t.c != 0
			}
		}
	}
	for i := range ex.sources {
		if src := &ex.sources[i]; src.moved {
			switch {
			case src.velocity:
				m.kc[src.node] = src
			case src.accelerates:
				m.km[src.node] = src
			default:
				m.k[src.node] = src
			}
		}
	}
	return m
}

func dot(a, b []float64) float64 {
	s := 0.0
	for i, v := range a {
		s += v * b[i]
	}
	return s
}

// acceleration fills m.a for the present window at tau.
func (m *meter) acceleration(st *state, tau, h float64) {
	if !m.ex.total.active {
		m.op.accel(m.a, st.x, st.v, st.r, nil)
		return
	}
	m.ex.total.value(m.f[0], tau, h, 0)
	m.op.accel(m.a, st.x, st.v, st.r, m.f[0])
}

// powers is the work and loss power at tau of the present window.
func (m *meter) powers(st *state, tau, h float64) (work, loss rates) {
	m.acceleration(st, tau, h)
	active := m.ex.total.active
	var f1, f2 []float64
	if active {
		f1, f2 = m.f[1], m.f[2]
		m.ex.total.value(f1, tau, h, 1)
		m.ex.total.value(f2, tau, h, 2)
	}
	var f3 []float64
	if active && m.stiff != nil {
		f3 = m.f[3]
		m.ex.total.value(f3, tau, h, 3)
	}
	in := m.sys.inner
	for b := range m.sys.brackets {
		k := &m.sys.brackets[b]
		m.rd[b] = k.k / k.c * (k.across(st.x, in) - st.r[b])
		m.rdd[b] = k.k / k.c * (k.across(st.v, in) - m.rd[b])
	}
	if m.stiff != nil {
		m.stiff.settle(m.a, st.v, f1, h)
	}
	m.op.accel(m.j, st.v, m.a, m.rd, f1)
	if m.stiff != nil {
		m.stiff.settle(m.j, m.a, f2, h)
	}
	m.op.accel(m.i, m.a, m.j, m.rdd, f2)
	if m.stiff != nil {
		m.stiff.settle(m.i, m.j, f3, h)
		m.stiff.correct(m.j, m.i, h)
		m.stiff.correct(m.a, m.j, h)
	}
	if m.lossy {
		loss = m.losses(st, h)
	}
	if m.ex.forces.active {
		for q := range m.f {
			m.ex.forces.value(m.f[q], tau, h, q)
		}
		f, v, a, j, i := &m.f, st.v, m.a, m.j, m.i
		work[0] = dot(f[0], v)
		work[1] = dot(f[1], v) + dot(f[0], a)
		work[2] = dot(f[2], v) + 2*dot(f[1], a) + dot(f[0], j)
		work[3] = dot(f[3], v) + 3*dot(f[2], a) + 3*dot(f[1], j) + dot(f[0], i)
	}
	if len(m.ex.motions) > 0 {
		m.moving(st, tau, h, &work, &loss)
	}
	return work, loss
}

// losses is the power lost in line, dashpots and brackets. A bracket that follows at
// once is the dashpot behind it, F = C (v - F'/K) to second order.
func (m *meter) losses(st *state, h float64) rates {
	for q, v := range [3][]float64{st.v, m.a, m.j} {
		m.op.lossForce(m.c[q], v)
	}
	loss := rates{dot(st.v, m.c[0]), 2 * dot(m.a, m.c[0]), 2 * (dot(m.j, m.c[0]) + dot(m.a, m.c[1])),
		2*dot(m.i, m.c[0]) + 6*dot(m.j, m.c[1])}
	for b := range m.sys.brackets {
		k := &m.sys.brackets[b]
		in := m.sys.inner
		v, a, j, i := k.across(st.v, in), k.across(m.a, in), k.across(m.j, in), k.across(m.i, in)
		var f rates
		if k.k/k.c*h > stiffLimit {
			e := k.c / k.k
			f = rates{k.c * (v - e*(a-e*j)), k.c * (a - e*(j-e*i)), k.c * (j - e*i), k.c * i}
		} else {
			f[0] = k.k * (k.across(st.x, in) - st.r[b])
			f[1] = k.k * (v - m.rd[b])
			f[2] = k.k * (a - m.rdd[b])
			f[3] = k.k * (j - f[2]/k.c)
		}
		loss.product(f, rates{f[0] / k.c, f[1] / k.c, f[2] / k.c, f[3] / k.c})
	}
	return loss
}

// moving adds what the prescribed nodes do: the force that the network opposes to
// them, without their own inertia, times their velocity; and the loss in links to
// them.
func (m *meter) moving(st *state, tau, h float64, work, loss *rates) {
	n := len(m.ex.motions)
	u, v := make([]rates, n), make([]rates, n)
	for i := range u {
		for q := range u[i] {
			u[i][q] = polyAt(&m.ex.up[i], tau, h, q)
			v[i][q] = polyAt(&m.ex.vp[i], tau, h, q)
		}
	}
	for i := range u {
		var r, s rates
		if src := m.k[i]; src != nil {
			p := src.pattern[:m.op.size()]
			r = rates{-dot(p, st.x), -dot(p, st.v), -dot(p, m.a), -dot(p, m.j)}
		}
		if src := m.kc[i]; src != nil {
			p := src.pattern[:m.op.size()]
			d := rates{-dot(p, st.v), -dot(p, m.a), -dot(p, m.j), -dot(p, m.i)}
			for q := range r {
				r[q] += d[q]
				s[q] += 2 * d[q]
			}
		}
		if src := m.km[i]; src != nil {
			p := src.pattern[:m.op.size()]
			for q, d := range [3][]float64{m.a, m.j, m.i} {
				r[q] -= dot(p, d)
			}
		}
		for _, t := range m.sys.movedPP[i] {
			for q := range r {
				r[q] += t.k*u[t.col][q] + t.c*v[t.col][q]
				if t.m != 0 {
					r[q] += t.m * polyAt(&m.ex.vp[t.col], tau, h, q+1)
				}
				s[q] += t.c * v[t.col][q]
			}
		}
		work.product(v[i], r)
		loss.product(v[i], s)
	}
}

// polyAt is the q-th time derivative at tau of a polynomial given by its
// tau-derivatives at 0, over a window h.
func polyAt(p *[loadDegree + 1]float64, tau, h float64, q int) float64 {
	sum, c := 0.0, 1.0
	for j := q; j <= loadDegree; j++ {
		sum += c * p[j]
		c *= tau / float64(j-q+1)
	}
	for ; q > 0; q-- {
		sum /= h
	}
	return sum
}

// open books the powers at the start of a window, close those at its end.
func (m *meter) open(st *state, h float64) {
	if m.idle() {
		m.held = false
		return
	}
	if quiet := m.quiet(); !quiet || !m.held {
		m.w0, m.l0 = m.powers(st, 0, h)
	} else {
		m.w0, m.l0 = rates{}, m.lastL
	}
}

// quiet tells whether nothing acts in the present window, idle whether also nothing
// is lost.
func (m *meter) quiet() bool { return !m.ex.total.active && len(m.ex.motions) == 0 }
func (m *meter) idle() bool  { return m.quiet() && !m.lossy }

func (m *meter) close(st *state, h float64) {
	if m.idle() {
		return
	}
	w1, l1 := m.powers(st, 1, h)
	m.acct.Work += hermite(m.w0, w1, h)
	m.acct.Lost += positive(m.l0, l1, h)
	m.held, m.lastL = m.quiet(), l1
}

// stored is the energy held, prescribed nodes included.
func (m *meter) stored(st *state, s *snapshot) float64 {
	e := m.op.stored(st.x, st.v, st.r)
	if m.laws != nil {
		e += m.laws.stored(st)
	}
	for i, src := range m.k {
		e += m.sys.movedM[i] * s.vp[i] * s.vp[i] / 2
		if src != nil {
			e -= dot(src.pattern[:m.op.size()], st.x) * s.up[i]
		}
		if src := m.km[i]; src != nil {
			e -= dot(src.pattern[:m.op.size()], st.v) * s.vp[i]
		}
		for _, t := range m.sys.movedPP[i] {
			e += t.k*s.up[i]*s.up[t.col]/2 + t.m*s.vp[i]*s.vp[t.col]/2
		}
	}
	return e
}
