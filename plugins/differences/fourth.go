package differences

import (
	"context"
	"fmt"
	"math"

	"github.com/tautspan/tautspan/engine/mesh"
	"github.com/tautspan/tautspan/engine/solver"
)

// The operator of order 4 of Mattsson and Nordstroem (J. Comput. Phys. 199, 2004,
// 503-540; figures from memory, checked by their row sums, by the order seen and
// by the least eigenvalue): the mass of a point is that of a cell times the end
// weight, the stiffness of a piece is T/h times the rows, mirrored at the far end,
// and 1/12, -4/3, 5/2, -4/3, 1/12 inside. Boundary terms are left out of the
// stiffness, so that pieces are joined by adding rows, as cells are.
var (
	endWeights = [4]float64{17.0 / 48, 59.0 / 48, 43.0 / 48, 49.0 / 48}
	endRows    = [4][6]float64{
		{9.0 / 8, -59.0 / 48, 1.0 / 12, 1.0 / 48},
		{-59.0 / 48, 59.0 / 24, -59.0 / 48},
		{1.0 / 12, -59.0 / 48, 55.0 / 24, -59.0 / 48, 1.0 / 12},
		{1.0 / 48, 0, -59.0 / 48, 59.0 / 24, -4.0 / 3, 1.0 / 12},
	}
)

const (
	cellsFourth  = 8    // least cells in a piece
	smoothEnough = 3    // least order of derivative that may jump
	fourthShare  = 0.8  // of the step at which waves take a step for a cell
	topCells     = 5.34 // largest eigenvalue of the operator times h^2
	topReal      = 2.4  // step times rate of decay, of at most 2.78 on the real axis
	topImaginary = 2.7  // step times circular frequency, of at most 2.83 on the imaginary axis
)

// unfit says in the user's terms why order 4 is of no use for a mesh; "" if it is.
func unfit(m *mesh.Mesh) string {
	switch {
	case m.Jump < smoothEnough:
		return "the data are not smooth"
	case len(m.Pieces) == 0:
		return "there is no line"
	case exact(m):
		return "the line is uniform and free of loss, where order 2 at Courant number 1 is d'Alembert's solution"
	case len(m.Rolls) > 0:
		return "a load rolls along the line"
	}
	for i := range m.Nodes {
		if m.Nodes[i].Motion != nil {
			return "a support moves as told"
		}
	}
	for _, p := range m.Pushes {
		if p.At.Node < 0 {
			return "a point force acts inside a segment"
		}
	}
	for _, p := range m.Presses {
		for _, part := range p.Parts {
			if l := m.Pieces[part.Piece].Length; part.From > 1e-9*l || part.To < l*(1-1e-9) {
				return "a force per length ends inside a piece of line"
			}
		}
	}
	return ""
}

// exact tells whether the scheme of order 2 has no error at the points: one
// lossless piece a line, with fixed, free or absorbing ends.
func exact(m *mesh.Mesh) bool {
	if len(m.Links) > 0 || len(m.Pieces) != 1 || m.Pieces[0].Viscous > 0 || len(m.Presses) > 0 {
		return false
	}
	for i := range m.Nodes {
		n := &m.Nodes[i]
		if !n.Fixed && (n.Mass > 0 || n.Spring > 0 || len(n.Brackets) > 0) {
			return false
		}
	}
	return true
}

// unstable says what on the line is too stiff for the step of order 4; "" if
// nothing is. The bounds hold for each cell and node alone and are added up.
func (l *Layout) unstable(m *mesh.Mesh) string {
	cells := 0.0
	for i := range m.Pieces {
		nu := l.Step * float64(l.Cells[i]) / m.Pieces[i].TravelTime()
		cells = math.Max(cells, topCells*nu*nu)
		if l.Implicit[i] || l.Cells[i] < cellsFourth {
			return "a piece of line is too short for it"
		}
	}
	w := newNetwork(m, l, 0)
	stiff, rate := append([]float64(nil), w.spring...), append([]float64(nil), w.loss...)
	for _, mt := range w.mounts {
		if l.Step*mt.spring/mt.loss > topReal {
			return m.Nodes[mt.node].Name + " has a bracket that is too stiff for it"
		}
		stiff[mt.node] += mt.spring
	}
	for _, k := range w.links {
		for _, end := range [2]int{k.A, k.B} {
			stiff[end] += 2 * k.Spring
			rate[end] += 2 * k.Dashpot
		}
	}
	for i := range stiff {
		if w.held[i] {
			continue
		}
		if cells+l.Step*l.Step*stiff[i]/w.mass[i] > topImaginary*topImaginary {
			return m.Nodes[i].Name + " carries a spring that is too stiff for it"
		}
		if l.Step*rate[i]/w.mass[i] > topReal {
			return m.Nodes[i].Name + " carries a dashpot that is too strong for it"
		}
	}
	return ""
}

// fourthRun is one solution by the scheme of order 4 under way: the operator
// above in space and the classical Runge-Kutta method in time,
//
//	u' = v,   M v' = f - K u - C v,   loss q' = spring (u - q) at brackets.
type fourthRun struct {
	w      *network
	u, v   []float64 // m, m/s: state at t_n
	su, sv []float64 // state at a stage
	tu, tv []float64 // state at the next stage
	du, dv []float64 // state at t_n+1 as it is summed up
	a      []float64 // m/s^2, of the nodes at a stage; N until divided by the mass
	q      []float64 // m, brackets at t_n, at a stage, at the next, at t_n+1
	sq, tq []float64
	dq     []float64
	loads  []fourthLoad
	tapes  []*tape
	energy solver.Energy
	onEnd  []float64 // N, load on the ends' shares of the strands
}

// fourthLoad is a load with its points; forces act by the weights of the operator.
type fourthLoad struct {
	load  *load
	force [3][]float64 // N at each tap, or one for all, at the start, middle and end of a step
}

func newFourthRun(w *network, series [][][]float64) *fourthRun {
	arena := make([]float64, 8*w.size)
	r := &fourthRun{w: w, onEnd: make([]float64, 2*len(w.strands))}
	for i, p := range []*[]float64{&r.u, &r.v, &r.su, &r.sv, &r.tu, &r.tv, &r.du, &r.dv} {
		*p = arena[i*w.size : (i+1)*w.size : (i+1)*w.size]
	}
	n := len(w.mounts)
	brackets := make([]float64, 4*n)
	r.q, r.sq, r.tq, r.dq = brackets[:n], brackets[n:2*n], brackets[2*n:3*n], brackets[3*n:]
	r.a = make([]float64, w.nodes)
	for i := range w.mounts {
		r.q[i] = w.mounts[i].q
	}
	w.shape(r.u)
	r.startRates()
	l := newLoads(w)
	for i := range l.each {
		r.addLoad(&l.each[i])
	}
	r.tapes = newTapes(w, series, r.v, maxPoints)
	r.energy.Start = r.stored()
	r.energy.Most = r.energy.Start
	return r
}

// startRates sets v to the velocity at t = 0, point by point.
func (r *fourthRun) startRates() {
	w := r.w
	for i := range w.m.Nodes {
		if !w.held[i] {
			r.v[i] = w.m.Nodes[i].StartRate
		}
	}
	for i := range w.strands {
		s := &w.strands[i]
		if start := w.m.Pieces[s.piece].StartRate; start != nil {
			for k := 1; k < s.n; k++ {
				r.v[s.at+k] = start(s.h * float64(k))
			}
		}
	}
	w.tell(r.v)
}

// addLoad takes a load over, with the weights of the operator for those along a
// piece.
func (r *fourthRun) addLoad(ld *load) {
	f := fourthLoad{load: ld}
	for k := range ld.taps {
		t := &ld.taps[k]
		if t.end < 0 && t.node {
			continue // a push at a node
		}
		s, point := r.strandOf(t)
		t.weight = s.h * endWeight(point, s.n)
		t.gain = 1 / (s.mass * endWeight(point, s.n))
		if t.end >= 0 {
			t.x = originOf(ld.taps, k, s)
		}
	}
	n := 1
	if ld.placed {
		n = len(ld.taps)
	}
	for i := range f.force {
		f.force[i] = make([]float64, n)
	}
	f.read(0, 0)
	r.loads = append(r.loads, f)
}

// originOf is where the end point of a piece lies on the load's own x axis: the
// taps were read at centroids, half cells at a third of the cell from the end.
func originOf(taps []tap, k int, s *strand) float64 {
	if taps[k].end%2 == 0 {
		return taps[k].x - s.h/3
	}
	return taps[k].x + s.h/3
}

func (r *fourthRun) strandOf(t *tap) (*strand, int) {
	if t.end >= 0 {
		s := &r.w.strands[t.end/2]
		return s, (t.end % 2) * s.n
	}
	for i := range r.w.strands {
		if s := &r.w.strands[i]; t.at > s.at && t.at < s.at+s.n {
			return s, t.at - s.at
		}
	}
	panic("differences: a load on no strand")
}

func endWeight(k, n int) float64 {
	if k = min(k, n-k); k < len(endWeights) {
		return endWeights[k]
	}
	return 1
}

// read takes the forces at time t into place i.
func (f *fourthLoad) read(i int, t float64) {
	for k := range f.force[i] {
		x := 0.0
		if f.load.placed {
			x = f.load.taps[k].x
		}
		f.force[i][k] = f.load.history.At(t, x)
	}
}

// stage is one of the four of a step: the state x, y, q at time i (0 start, 1
// middle, 2 end of the step) gives rates; share of them goes to the new state and
// ahead of them from the old state make the next stage.
type stage struct {
	i            int
	share, ahead float64 // s
}

// pass computes a stage from the state given into r.tu, r.tv, r.tq.
func (r *fourthRun) pass(x, y, q []float64, st stage) {
	w := r.w
	clear(r.a)
	clear(r.onEnd)
	work, lost := 0.0, 0.0
	for k := range w.strands {
		s := &w.strands[k]
		left, right, squares := r.along(s, x, y, st)
		r.a[s.from] += left
		r.a[s.to] += right
		lost += s.loss * squares
	}
	for k := range r.loads {
		work += r.push(&r.loads[k], y, st)
	}
	for k := range w.links {
		l := &w.links[k]
		rate := y[l.A] - y[l.B]
		f := l.Spring*(x[l.A]-x[l.B]) + l.Dashpot*rate
		r.a[l.A] -= f
		r.a[l.B] += f
		lost += l.Dashpot * rate * rate
	}
	for k := range w.mounts {
		mt := &w.mounts[k]
		f := mt.spring * (x[mt.node] - q[k])
		r.a[mt.node] -= f
		lost += f * f / mt.loss
		r.dq[k] += st.share * f / mt.loss
		r.tq[k] = r.q[k] + st.ahead*f/mt.loss
	}
	for k := 0; k < w.nodes; k++ {
		if w.held[k] {
			r.a[k] = 0
		} else {
			lost += w.loss[k] * y[k] * y[k]
			r.a[k] = (r.a[k] - w.spring[k]*x[k] - w.loss[k]*y[k]) / w.mass[k]
		}
		r.du[k] += st.share * y[k]
		r.dv[k] += st.share * r.a[k]
		r.tu[k] = r.u[k] + st.ahead*y[k]
		r.tv[k] = r.v[k] + st.ahead*r.a[k]
	}
	w.tell(r.tu)
	w.tell(r.tv)
	r.energy.Work += st.share * work
	r.energy.Lost += st.share * lost
}

// along does the inner points of a strand in one sweep and returns its forces on
// the nodes and the sum of weight times velocity squared.
func (r *fourthRun) along(s *strand, stateX, stateY []float64, st stage) (left, right, squares float64) {
	n, from, to := s.n, s.at, s.at+s.n+1
	x, y := stateX[from:to], stateY[from:to]
	u, v, du, dv, tu, tv := r.u[from:to], r.v[from:to], r.du[from:to], r.dv[from:to], r.tu[from:to], r.tv[from:to]
	c, g := s.stiff/s.mass, s.loss/s.mass
	for k, e := range endRows[0] {
		left -= s.stiff * e * x[k]
		right -= s.stiff * e * x[n-k]
	}
	for j := 1; j < len(endRows); j++ {
		for _, p := range [2]int{j, n - j} {
			bend := 0.0
			for k, e := range endRows[j] {
				if p == j {
					bend += e * x[k]
				} else {
					bend += e * x[n-k]
				}
			}
			a := -c/endWeights[j]*bend - g*y[p]
			squares += endWeights[j] * y[p] * y[p]
			du[p] += st.share * y[p]
			dv[p] += st.share * a
			tu[p] = u[p] + st.ahead*y[p]
			tv[p] = v[p] + st.ahead*a
		}
	}
	near, far, mid := c*4/3, c/12, c*5/2
	x0, x1, x2, x3 := x[2], x[3], x[4], x[5]
	last := x[6 : n-1]
	count := len(last)
	y, u, v, du, dv, tu, tv = y[4:][:count], u[4:][:count], v[4:][:count], du[4:][:count], dv[4:][:count], tu[4:][:count], tv[4:][:count]
	for j, x4 := range last {
		rate := y[j]
		a := near*(x1+x3) - far*(x0+x4) - mid*x2 - g*rate
		squares += rate * rate
		du[j] += st.share * rate
		dv[j] += st.share * a
		tu[j] = u[j] + st.ahead*rate
		tv[j] = v[j] + st.ahead*a
		x0, x1, x2, x3 = x1, x2, x3, x4
	}
	return left, right, squares
}

// push adds a load to a stage and returns its power, W.
func (r *fourthRun) push(f *fourthLoad, y []float64, st stage) float64 {
	power := 0.0
	for j := range f.load.taps {
		t := &f.load.taps[j]
		force := f.force[st.i][0]
		if f.load.placed {
			force = f.force[st.i][j]
		}
		force *= t.weight
		power += force * y[t.at]
		if t.node {
			r.a[t.at] += force
			if t.end >= 0 {
				r.onEnd[t.end] += force
			}
			continue
		}
		r.dv[t.at] += st.share * force * t.gain
		r.tv[t.at] += st.ahead * force * t.gain
	}
	return power
}

// bend sets a[1:n] to the accelerations of the inner points of a strand, and a[0]
// and a[n] to its forces on the nodes, without loss.
func (s *strand) bend(a, x []float64) {
	n := s.n
	c := s.stiff / s.mass
	for j := 4; j <= n-4; j++ {
		near, far := x[j-1]+x[j+1], x[j-2]+x[j+2]
		a[j] = c * (4.0/3*near - 1.0/12*far - 2.5*x[j])
	}
	for j := range endRows {
		left, right := 0.0, 0.0
		for k, v := range endRows[j] {
			left += v * x[k]
			right += v * x[n-k]
		}
		if j == 0 {
			a[0], a[n] = -s.stiff*left, -s.stiff*right
			continue
		}
		a[j], a[n-j] = -c/endWeights[j]*left, -c/endWeights[j]*right
	}
}

// fourthForce is the force of a strand on the node at its end, N, less the inertia
// and the loss of the end's share and with the load on it: what balances the node
// in the scheme. One-sided differences of the points give order 3 here, this 4.
func (w *network) fourthForce(end int, at *moment) float64 {
	s := &w.strands[end/2]
	node, sum := s.from, 0.0
	x := at.u[s.at : s.at+s.n+1]
	if end%2 == 0 {
		for k, v := range endRows[0] {
			sum += v * x[k]
		}
	} else {
		node = s.to
		for k, v := range endRows[0] {
			sum += v * x[s.n-k]
		}
	}
	return at.onEnd[end] - s.stiff*sum - endWeights[0]*(s.mass*at.a[node]+s.loss*at.v[node])
}

// stored is the energy of the state, J.
func (r *fourthRun) stored() float64 {
	w := r.w
	e := 0.0
	for i := 0; i < w.nodes; i++ {
		e += w.mass[i]*r.v[i]*r.v[i]/2 + w.spring[i]*r.u[i]*r.u[i]/2
	}
	for _, l := range w.links {
		x := r.u[l.A] - r.u[l.B]
		e += l.Spring * x * x / 2
	}
	for i, mt := range w.mounts {
		x := r.u[mt.node] - r.q[i]
		e += mt.spring * x * x / 2
	}
	for i := range w.strands {
		s := &w.strands[i]
		x, y, a := r.u[s.at:s.at+s.n+1], r.v[s.at:s.at+s.n+1], r.su[s.at:s.at+s.n+1]
		for k := range y {
			if k > 0 && k < s.n {
				e += s.mass * endWeight(k, s.n) * y[k] * y[k] / 2
			}
			a[k] = 0
		}
		s.bend(a, x)
		e -= (a[0]*x[0] + a[s.n]*x[s.n]) / 2
		for k := 1; k < s.n; k++ {
			e -= s.mass * endWeight(k, s.n) * a[k] * x[k] / 2
		}
	}
	return e
}

// step advances from t_n to t_n+1.
func (r *fourthRun) step(n int) {
	dt := r.w.dt
	t := float64(n) * dt
	for k := range r.loads {
		f := &r.loads[k]
		if n > 0 {
			f.force[0], f.force[2] = f.force[2], f.force[0]
		}
		f.read(1, t+dt/2)
		f.read(2, t+dt)
	}
	copy(r.du, r.u)
	copy(r.dv, r.v)
	copy(r.dq, r.q)
	r.pass(r.u, r.v, r.q, stage{0, dt / 6, dt / 2})
	at := moment{n: n, u: r.u, v: r.v, a: r.a, onEnd: r.onEnd}
	for _, tape := range r.tapes {
		tape.take(&at)
	}
	for _, st := range [3]stage{{1, dt / 3, dt / 2}, {1, dt / 3, dt}, {2, dt / 6, 0}} {
		r.su, r.tu = r.tu, r.su
		r.sv, r.tv = r.tv, r.sv
		r.sq, r.tq = r.tq, r.sq
		r.pass(r.su, r.sv, r.sq, st)
	}
	w := r.w
	w.tell(r.du)
	w.tell(r.dv)
	r.u, r.du = r.du, r.u
	r.v, r.dv = r.dv, r.v
	r.q, r.dq = r.dq, r.q
	if n%flushFourth == 0 {
		flush(r.u)
		flush(r.v)
	}
}

// all makes steps 0 .. steps-1.
func (r *fourthRun) all(ctx context.Context, steps int, progress func(float64)) error {
	pause := max(1, int(pauseCells/10/float64(r.w.size)))
	look := max(1, steps/energyLooks)
	for n := 0; n < steps; n++ {
		r.step(n)
		if n%look == 0 || n == steps-1 {
			e := r.stored()
			if math.IsNaN(e) || math.IsInf(e, 0) {
				return &solver.FaultError{Solver: name, What: "the motion is not finite"}
			}
			r.energy.Most = math.Max(r.energy.Most, e)
			r.energy.End = e
		}
		if n%pause == 0 {
			if err := ctx.Err(); err != nil {
				return err
			}
			if progress != nil {
				progress(float64(n) / float64(steps))
			}
		}
	}
	return ctx.Err()
}

// account checks the energy of a run at its end.
func account(e *solver.Energy, limit float64) error {
	through := e.Most + math.Abs(e.Start) + math.Abs(e.Work) + math.Abs(e.Lost)
	if gap := math.Abs(e.Unaccounted()); !(gap <= limit*through) {
		return &solver.FaultError{Solver: name, What: fmt.Sprintf("%.2g J of energy are not accounted for", gap)}
	}
	return nil
}
