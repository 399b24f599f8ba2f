package spectral

import (
	"math"

	"gonum.org/v1/gonum/mat"
)

// modal propagates a proportionally damped network by its real modes,
//
//	q'' + g q' + omega^2 q = f(t),
//
// in closed form. With the impulse response b(t) (b(0) = 0, b'(0) = 1) and its
// repeated integrals b_0 = int b, b_1 = int b_0, ...
//
//	q(h)     = q0 (b' + g b) + v0 b + sum_j f_j b_j
//	int q    = q0 (b + g b_0) + v0 b_0 + sum_j f_j b_(j+1)
//
// and so on, for a load sum_j f_j t^j/j!.
type modal struct {
	rate   float64   // g, 1/s
	omega2 []float64 // 1/s^2
	phi    []float64 // phi[k*n+i]: arrow coordinate i of mode k, unit mass
	mass   []float64 // of the arrow coordinates, kg or 1
	frame  *system   // whose coordinates share mass; nil: they do not
	plans  []*modalPlan
}

// modalPlan holds for one step length the repeated integrals of the impulse
// response: b[j][k] for j = 0 .. 1+loadDegree+3 is b', b, b_0, b_1, ... of mode k.
type modalPlan struct {
	h float64
	b [modalOrders][]float64
}

// Indices into modalPlan.b: derivative, response, and its repeated integrals.
const (
	orderRate   = 0
	orderPulse  = 1
	orderFirst  = 2 // b_0
	modalOrders = orderFirst + loadDegree + 3
)

// newModal diagonalises the whole network. It reports false when that fails.
func newModal(s *system, rate float64) (*modal, bool) {
	n := s.size()
	m := &modal{rate: rate, mass: make([]float64, n)}
	for i := range m.mass {
		m.mass[i] = 1
		if i >= s.inner {
			m.mass[i] = s.mass[i-s.inner]
		}
	}
	if s.frame {
		return m, m.framed(s)
	}
	k := mat.NewSymDense(n, nil)
	for e := range s.elements {
		el := &s.elements[e]
		for _, half := range el.halves() {
			for i := half.lo; i < half.hi; i++ {
				k.SetSym(i, i, s.omega2[i])
				for a, sign := range [2]float64{1, half.sign} {
					if c := el.end[a]; c >= 0 {
						k.SetSym(i, s.inner+c, sign*s.kappa[i]/math.Sqrt(s.mass[c]))
					}
				}
			}
		}
	}
	for i := range s.rows {
		for _, t := range s.rows[i] {
			k.SetSym(s.inner+i, s.inner+t.col, t.k/math.Sqrt(s.mass[i]*s.mass[t.col]))
		}
	}
	if n == 0 {
		return m, true
	}
	var eig mat.EigenSym
	if !eig.Factorize(k, true) {
		return nil, false
	}
	m.omega2 = eig.Values(nil)
	var vec mat.Dense
	eig.VectorsTo(&vec)
	m.phi = make([]float64, n*n)
	for j := 0; j < n; j++ {
		m.omega2[j] = math.Max(0, m.omega2[j]) // a free line's rigid motion, up to rounding
		for i := 0; i < n; i++ {
			m.phi[j*n+i] = vec.At(i, j) / math.Sqrt(m.mass[i])
		}
	}
	return m, true
}

func (m *modal) size() int { return len(m.mass) }

// planFor prepares a step length, or finds it prepared.
func (m *modal) planFor(h float64) *modalPlan {
	for i, p := range m.plans {
		if p.h == h {
			copy(m.plans[1:i+1], m.plans[:i])
			m.plans[0] = p
			return p
		}
	}
	var p *modalPlan
	if len(m.plans) < keptPlans {
		p = &modalPlan{}
		for j := range p.b {
			p.b[j] = make([]float64, m.size())
		}
		m.plans = append(m.plans, nil)
	} else {
		p = m.plans[keptPlans-1]
	}
	copy(m.plans[1:], m.plans)
	m.plans[0] = p
	p.h = h
	var b [modalOrders]float64
	for k, w2 := range m.omega2 {
		pulse(&b, w2, m.rate, h)
		for j := range b {
			p.b[j][k] = b[j]
		}
	}
	return p
}

// pulse fills b', b, b_0, b_1, ... of the oscillator x” + g x' + w2 x at time h.
// They obey
//
//	w2 b_j + g b_(j-1) + b_(j-2) = h^j/j!,
//
// upwards from the closed form where omega h >= 2, so that the division by w2
// loses nothing, and downwards from power series below. Valid for g h < 2,
// which the choice of substeps sees to.
func pulse(b *[modalOrders]float64, w2, g, h float64) {
	if w2*h*h < 4 {
		pulseSeries(b, w2, g, h)
		return
	}
	half := g / 2
	w := math.Sqrt(w2 - half*half)
	s, c := math.Sincos(w * h)
	decay := math.Exp(-half * h)
	b[orderPulse] = decay * s / w
	b[orderRate] = decay * (c - half*s/w)
	power := 1.0
	for j := orderFirst; j < modalOrders; j++ {
		b[j] = (power - g*b[j-1] - b[j-2]) / w2
		power *= h / float64(j-orderFirst+1)
	}
}

// pulseSeries sums b' = sum a_k h^k/k! with a_0 = 1, a_1 = -g,
// a_(k+1) = -g a_k - w2 a_(k-1) and its integrals; for omega h < 2, g h < 2.
func pulseSeries(b *[modalOrders]float64, w2, g, h float64) {
	const top = modalOrders - 1
	var sum [2]float64
	prev, a := 0.0, 1.0 // a_(k-1) h^(k-1), a_k h^k
	inv := monomial(h, top)
	for k := 0; k < 80; k++ {
		sum[0] += a * inv
		sum[1] += a * inv * float64(k+top) / h
		prev, a = a, -g*h*a-w2*h*h*prev
		inv /= float64(k + 1 + top)
		if (math.Abs(a)+math.Abs(prev))*inv < 1e-20*math.Abs(sum[0]) {
			break
		}
	}
	b[top], b[top-1] = sum[0], sum[1]
	for j := top - 2; j >= 0; j-- {
		b[j] = monomial(h, j) - g*b[j+1] - w2*b[j+2]
	}
}

// monomial is h^n/n!.
func monomial(h float64, n int) float64 {
	p := 1.0
	for i := 1; i <= n; i++ {
		p *= h / float64(i)
	}
	return p
}

// step advances all modes.
func (m *modal) step(st *state, h float64, ld *load) {
	p := m.planFor(h)
	rate, b, b0, b1 := p.b[orderRate], p.b[orderPulse], p.b[orderFirst], p.b[orderFirst+1]
	g := m.rate
	if st.z != nil {
		for k := range st.z {
			x, v := st.x[k], st.v[k]
			st.y[k] += h*st.z[k] + x*(b0[k]+g*b1[k]) + v*b1[k]
			st.z[k] += x*(b[k]+g*b0[k]) + v*b0[k]
		}
	}
	w2 := m.omega2
	for k, x := range st.x {
		v := st.v[k]
		st.x[k] = x*(rate[k]+g*b[k]) + v*b[k]
		st.v[k] = v*rate[k] - x*w2[k]*b[k]
	}
	if ld == nil || !ld.active {
		return
	}
	scale := 1.0
	for j := range ld.at {
		f := ld.at[j]
		for k := range st.x {
			c := f[k] * scale
			st.x[k] += c * p.b[orderFirst+j][k]
			st.v[k] += c * p.b[orderFirst+j-1][k]
			if st.z != nil {
				st.z[k] += c * p.b[orderFirst+j+1][k]
				st.y[k] += c * p.b[orderFirst+j+2][k]
			}
		}
		scale /= h // from d/dtau to d/dt
	}
}

func (m *modal) accel(dst, x, v, _, f []float64) {
	for k, w2 := range m.omega2 {
		dst[k] = -w2*x[k] - m.rate*v[k]
		if f != nil {
			dst[k] += f[k]
		}
	}
}

func (m *modal) lossForce(dst, v []float64) {
	for k := range m.omega2 {
		dst[k] = m.rate * v[k]
	}
}

func (m *modal) stored(x, v, _ []float64) float64 {
	sum := 0.0
	for k, w2 := range m.omega2 {
		sum += v[k]*v[k] + w2*x[k]*x[k]
	}
	return sum / 2
}

// row is phi' g; what follows the coordinates is kept.
func (m *modal) row(arrow []float64) []float64 {
	n := m.size()
	out := make([]float64, len(arrow))
	copy(out[n:], arrow[n:])
	for k := 0; k < n; k++ {
		s := 0.0
		for i, f := range m.phi[k*n : (k+1)*n] {
			s += f * arrow[i]
		}
		out[k] = s
	}
	return out
}

// enter is phi' M x.
func (m *modal) enter(arrow []float64) []float64 {
	w := make([]float64, len(arrow))
	if m.frame != nil {
		m.frame.inertia(w, arrow)
		return m.row(w)
	}
	for i := range w {
		w[i] = m.mass[i] * arrow[i]
	}
	return m.row(w)
}
