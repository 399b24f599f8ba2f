package differences

import (
	"errors"
	"math"
)

// joints advances the nodes. With x = u+ - u and y = u - u- the scheme at a node
// reads
//
//	(M/dt^2 + C/(2dt) + K/4) x = (M/dt^2 - C/(2dt) + K/4) y - K u + f,
//
// K and C with the links coupling nodes. Nodes without links are divided out;
// the others are solved together by a factor kept in profile form.
type joints struct {
	w        *network
	ahead    []float64 // N/m: M/dt^2 + C/(2dt) + K/4 of each node
	back     []float64 // N/m: M/dt^2 - C/(2dt) + K/4 of each node
	still    []float64 // N/m: M/dt^2 + K/4, springs to ground alone
	coupled  []int     // nodes of the profile matrix, in its order
	factor   profile
	x, y     []float64 // m, u+ - u and u - u- of each node
	rhs      []float64
	solution []float64
}

var errLoose = errors.New("a node has nothing that gives it inertia")

func newJoints(w *network) (*joints, error) {
	j := &joints{w: w}
	n := w.nodes
	flat := make([]float64, 6*n)
	for i, p := range []*[]float64{&j.ahead, &j.back, &j.still, &j.x, &j.y, &j.rhs} {
		*p = flat[i*n : (i+1)*n : (i+1)*n]
	}
	dt := w.dt
	for i := range w.mass {
		k := w.spring[i] / 4
		j.still[i] = w.mass[i]/(dt*dt) + k
		j.ahead[i] = w.mass[i]/(dt*dt) + w.loss[i]/(2*dt) + k
		j.back[i] = w.mass[i]/(dt*dt) - w.loss[i]/(2*dt) + k
	}
	for i := range w.mounts {
		mt := &w.mounts[i]
		j.ahead[mt.node] += mt.soft / 4
		j.back[mt.node] += mt.soft / 4
	}
	if err := j.couple(); err != nil {
		return nil, err
	}
	for i := range w.mass {
		if !w.held[i] && !positive(j.ahead[i]) {
			return nil, errLoose
		}
	}
	return j, nil
}

// couple orders the nodes that links join breadth first and factors their matrix.
func (j *joints) couple() error {
	w := j.w
	next := make(map[int][]int)
	for _, l := range w.links {
		if !w.held[l.A] && !w.held[l.B] {
			next[l.A] = append(next[l.A], l.B)
			next[l.B] = append(next[l.B], l.A)
		}
	}
	at := make(map[int]int)
	for i := 0; i < w.nodes; i++ {
		if _, seen := at[i]; seen || len(next[i]) == 0 {
			continue
		}
		head := len(j.coupled)
		at[i] = head
		j.coupled = append(j.coupled, i)
		for ; head < len(j.coupled); head++ {
			for _, k := range next[j.coupled[head]] {
				if _, seen := at[k]; !seen {
					at[k] = len(j.coupled)
					j.coupled = append(j.coupled, k)
				}
			}
		}
	}
	first := make([]int, len(j.coupled))
	for i, node := range j.coupled {
		first[i] = i
		for _, k := range next[node] {
			first[i] = min(first[i], at[k])
		}
	}
	var err error
	if j.factor, err = newProfile(first); err != nil {
		return err
	}
	for i, node := range j.coupled {
		j.factor.add(i, i, j.ahead[node])
	}
	for _, l := range w.links {
		k := l.Spring/4 + l.Dashpot/(2*w.dt)
		a, inA := at[l.A]
		b, inB := at[l.B]
		if inA {
			j.factor.add(a, a, k)
		} else {
			j.ahead[l.A] += k // alone, or held and not asked for
		}
		if inB {
			j.factor.add(b, b, k)
		} else {
			j.ahead[l.B] += k
		}
		if inA && inB {
			j.factor.add(max(a, b), min(a, b), -k)
		}
	}
	j.solution = make([]float64, len(j.coupled))
	return j.factor.decompose()
}

// begin is the step from t = 0, where u- = u+ - 2 dt v0 in the inertia and the
// springs, and the dashpots feel the velocity (u+ - u)/dt with which the motion
// begins. So a node without mass that starts out of balance moves off at once
// with force/(C + sum Z), as it does in truth.
//
// u and v are the state at t = 0, force the explicit forces, given the increments
// of the held nodes in x.
func (j *joints) begin(u, v, force []float64) {
	w, dt := j.w, j.w.dt
	for i := 0; i < w.nodes; i++ {
		j.rhs[i] = j.still[i]*v[i]*dt + (force[i]-w.spring[i]*u[i])/2
	}
	for i := range w.mounts {
		mt := &w.mounts[i]
		j.rhs[mt.node] -= mt.soft * (u[mt.node] - mt.q) / 2
	}
	for k := range w.links {
		l := &w.links[k]
		f := l.Spring/4*(v[l.A]-v[l.B])*dt - l.Spring*(u[l.A]-u[l.B])/2
		j.rhs[l.A] += f
		j.rhs[l.B] -= f
	}
	j.solve()
	for i := range j.y {
		j.y[i] = 2*dt*v[i] - j.x[i]
	}
	for i := range w.mounts {
		mt := &w.mounts[i]
		mt.q = (mt.q + mt.r*(u[mt.node]+j.x[mt.node]/2)) / (1 + mt.r)
	}
}

// step finds x for the explicit forces given; y holds the last increments.
func (j *joints) step(u, force []float64) {
	w := j.w
	for i := 0; i < w.nodes; i++ {
		j.rhs[i] = j.back[i]*j.y[i] - w.spring[i]*u[i] + force[i]
	}
	for i := range w.mounts {
		mt := &w.mounts[i]
		j.rhs[mt.node] -= mt.soft * (u[mt.node] - mt.q)
	}
	for k := range w.links {
		l := &w.links[k]
		f := (l.Spring/4-l.Dashpot/(2*w.dt))*(j.y[l.A]-j.y[l.B]) - l.Spring*(u[l.A]-u[l.B])
		j.rhs[l.A] += f
		j.rhs[l.B] -= f
	}
	j.solve()
	for i := range w.mounts {
		mt := &w.mounts[i]
		k := mt.node
		mt.q = ((1-mt.r)*mt.q + mt.r*(2*u[k]+(j.x[k]-j.y[k])/2)) / (1 + mt.r)
	}
}

// solve turns rhs into x at all nodes that are not held.
func (j *joints) solve() {
	w := j.w
	for k := range w.links {
		l := &w.links[k]
		c := l.Spring/4 + l.Dashpot/(2*w.dt)
		if w.held[l.A] {
			j.rhs[l.B] += c * j.x[l.A]
		}
		if w.held[l.B] {
			j.rhs[l.A] += c * j.x[l.B]
		}
	}
	for i, held := range w.held {
		if !held {
			j.x[i] = j.rhs[i] / j.ahead[i]
		}
	}
	if len(j.coupled) > 0 {
		for i, node := range j.coupled {
			j.solution[i] = j.rhs[node]
		}
		j.factor.solve(j.solution)
		for i, node := range j.coupled {
			j.x[node] = j.solution[i]
		}
	}
	for k := range w.links {
		l := &w.links[k]
		c := l.Spring/4 + l.Dashpot/(2*w.dt)
		if w.held[l.A] && !w.held[l.B] {
			j.rhs[l.A] += c * j.x[l.B]
		}
		if w.held[l.B] && !w.held[l.A] {
			j.rhs[l.B] += c * j.x[l.A]
		}
	}
}

// reaction is the force that keeps a held node on its course in the step just
// solved, N; of the first step half of it.
func (j *joints) reaction(node int) float64 { return j.ahead[node]*j.x[node] - j.rhs[node] }

// profile is a symmetric positive definite matrix in profile form, factored as
// L D L^T in place. Row i holds the columns first[i] .. i.
type profile struct {
	first []int
	start []int // of each row in value, so that value[start[i]+k] is (i, k)
	value []float64
}

// maxProfile is the largest profile that is factored, numbers.
const maxProfile = 1 << 26

func newProfile(first []int) (profile, error) {
	p := profile{first: first, start: make([]int, len(first))}
	total := 0
	for i, f := range first {
		p.start[i] = total - f
		total += i - f + 1
		if total > maxProfile {
			return p, errBig
		}
	}
	p.value = make([]float64, total)
	return p, nil
}

var errBig = errors.New("links couple too many nodes")

func (p *profile) add(row, col int, v float64) { p.value[p.start[row]+col] += v }

func (p *profile) decompose() error {
	for i := range p.first {
		row := p.value[p.start[i]+p.first[i] : p.start[i]+i+1]
		f := p.first[i]
		for k := f; k < i; k++ {
			g := max(f, p.first[k])
			other := p.value[p.start[k]+g : p.start[k]+k]
			mine := row[g-f : k-f]
			sum := row[k-f]
			for q, v := range other {
				sum -= v * mine[q]
			}
			row[k-f] = sum
		}
		d := row[i-f]
		for k := f; k < i; k++ {
			v := row[k-f]
			l := v / p.value[p.start[k]+k]
			d -= v * l
			row[k-f] = l
		}
		if !(d > 0) || math.IsInf(d, 0) {
			return errLoose
		}
		row[i-f] = d
	}
	return nil
}

// solve replaces b by the solution.
func (p *profile) solve(b []float64) {
	for i := range p.first {
		f := p.first[i]
		sum := b[i]
		for k, v := range p.value[p.start[i]+f : p.start[i]+i] {
			sum -= v * b[f+k]
		}
		b[i] = sum
	}
	for i := range p.first {
		b[i] /= p.value[p.start[i]+i]
	}
	for i := len(p.first) - 1; i >= 0; i-- {
		f := p.first[i]
		for k, v := range p.value[p.start[i]+f : p.start[i]+i] {
			b[f+k] -= v * b[i]
		}
	}
}
