package spectral

import (
	"context"
	"math"

	"github.com/tautspan/tautspan/engine/solver"
)

// walk is one run in time.
type walk struct {
	*job
	op       operator
	ex       *excitation
	meter    *meter
	rec      recorder
	st       *state
	from, to *snapshot
	b        basis
	accel    bool // records read accelerations at the rows
	next     int  // next break
	last     float64
	tau      float64 // of the present load polynomial at the present instant
}

func newWalk(j *job, op operator, series [][][]float64) *walk {
	w := &walk{job: j, op: op, ex: newExcitation(j.sys, op)}
	w.meter = newMeter(j.sys, op, w.ex)
	w.rec = recorder{taps: newTaps(j.sys, op, series), sub: j.sub, every: j.m.Timing.Every}
	_, integrals, accel := w.rec.needs()
	w.accel = accel
	w.st = newState(op.size(), len(j.sys.brackets), integrals)
	moved, watched := len(j.sys.moved), len(j.sys.watched)
	w.from, w.to = newSnapshot(op.size(), moved, watched), newSnapshot(op.size(), moved, watched)
	w.b = basis{h: j.base(), z: w.st.z, y: w.st.y, up0: make([]float64, moved), up1: make([]float64, moved),
		share0: make([]float64, watched), shr1: make([]float64, watched)}
	w.begin()
	return w
}

// begin sets the motion at t = 0.
func (w *walk) begin() {
	s := w.sys
	x, v := make([]float64, s.size()), make([]float64, s.size())
	momentum := make([]float64, s.ends)
	for i := range s.m.Nodes {
		if end := s.nodeEnd[i]; end >= 0 {
			x[s.inner+end] = s.m.Nodes[i].Start
			momentum[end] = s.m.Nodes[i].Mass * s.m.Nodes[i].StartRate
		}
	}
	for i := range s.elements {
		s.startElement(&s.elements[i], x, v, momentum)
	}
	for i, p := range momentum {
		v[s.inner+i] = p / s.mass[i]
	}
	copy(w.st.x, w.op.enter(x))
	copy(w.st.v, w.op.enter(v))
	for i, b := range s.brackets {
		w.st.r[i] = b.start
	}
}

// startElement projects the start displacement by interpolation and the start
// velocity by quadrature, so that an end point between two different velocities
// takes their mean by mass, which keeps the momentum.
func (s *system) startElement(e *element, x, v, momentum []float64) {
	pc, r := &s.m.Pieces[e.piece], e.ref
	p := r.p
	root := math.Sqrt(e.mass)
	at := func(i int) float64 { return e.s0 + e.h*(r.x[i]+1)/2 }
	project := func(dst []float64, f func(float64) float64) {
		out := dst[e.first : e.first+p-1]
		for i := 1; i < p; i++ {
			c := root * r.w[i] * f(at(i))
			for k, q := range r.v[(i-1)*(p-1) : i*(p-1)] {
				out[k] += c * q
			}
		}
	}
	list := s.byPiece[e.piece]
	if pc.Start != nil {
		project(x, pc.Start)
		if e != &s.elements[list[0]] {
			x[s.inner+e.end[0]] = pc.Start(e.s0)
		}
	}
	if pc.StartRate != nil {
		project(v, pc.StartRate)
		const inside = 1e-9 // of the element's length: the side that counts at a jump
		for a, i := range [2]int{0, p} {
			if e.end[a] >= 0 {
				momentum[e.end[a]] += e.mass * r.w[i] * pc.StartRate(at(i)+e.h*inside*float64(1-2*a))
			}
		}
	}
}

// march runs all base steps.
func (w *walk) march(ctx context.Context, progress func(float64)) error {
	h := w.base()
	first := h
	if w.steps == 0 {
		first = 1e-6
	}
	w.ex.over(0, math.Min(first, math.Min(w.lay.loaded, w.firstBreak())))
	w.look(w.from, 0, math.Min(first, w.lay.loaded))
	w.meter.acct.Start = w.meter.stored(w.st, w.from)
	w.meter.acct.Most = w.meter.acct.Start
	w.meter.acct.End = w.meter.acct.Start
	w.motionWork(w.from, -1)
	w.rec.start(w.from)
	frozen := (w.m.Timing.Rows - 1) * w.sub
	acct := w.meter.acct
	if frozen == 0 {
		w.motionWork(w.from, 1)
		acct = w.meter.acct
	}
	for k := 0; k < w.steps; k++ {
		if k%16 == 0 {
			if err := ctx.Err(); err != nil {
				return err
			}
			if progress != nil && k%256 == 0 {
				progress(float64(k) / float64(w.steps))
			}
		}
		if err := w.baseStep(k, h); err != nil {
			return err
		}
		w.rec.step(k, &w.b, w.from, w.to)
		w.from, w.to = w.to, w.from
		stored := w.meter.stored(w.st, w.from)
		w.meter.acct.End = stored
		w.meter.acct.Most = math.Max(w.meter.acct.Most, stored)
		if math.IsNaN(stored) || math.IsInf(stored, 0) {
			return fault("the motion is no longer finite after %g s", h*float64(k+1))
		}
		if k+1 == frozen {
			w.motionWork(w.from, 1)
			acct = w.meter.acct
		}
	}
	w.meter.acct = acct
	if progress != nil {
		progress(1)
	}
	return nil
}

// firstBreak is the first break after t = 0.
func (w *walk) firstBreak() float64 {
	for _, b := range w.ex.breaks {
		if b > 0 {
			return b
		}
	}
	return math.Inf(1)
}

// motionWork books the kinetic energy of prescribed nodes, which is work of
// their supports.
func (w *walk) motionWork(s *snapshot, sign float64) {
	for i, m := range w.sys.movedM {
		w.meter.acct.Work += sign * m * s.vp[i] * s.vp[i] / 2
	}
}

// baseStep runs one base step: from break to break, in equal substeps.
func (w *walk) baseStep(k int, h float64) error {
	clearAll(w.st.z, w.st.y, w.b.up0, w.b.up1, w.b.share0, w.b.shr1)
	t0, t1 := float64(k)*h, float64(k+1)*h
	t := t0
	tiny := 1e-9 * h
	for t < t1-tiny {
		for w.next < len(w.ex.breaks) && w.ex.breaks[w.next] <= t+tiny {
			w.next++
		}
		end := t1
		if w.next < len(w.ex.breaks) && w.ex.breaks[w.next] < t1-tiny {
			end = w.ex.breaks[w.next]
		}
		length := end - t
		if t == t0 && end == t1 {
			length = h // the same number every time
		}
		w.stretch(t, t0, length)
		t = end
	}
	w.look(w.to, 1, w.last)
	if k%32 == 0 {
		flush(w.st)
	}
	return nil
}

// stretch runs a time without breaks.
func (w *walk) stretch(t, t0, length float64) {
	limit := w.lay.loaded
	w.ex.over(t, length)
	if !w.ex.total.active {
		limit = w.lay.quiet
	}
	n := math.Max(1, math.Ceil(length/limit-1e-9))
	d := length / n
	for i := 0.0; i < n; i++ {
		at := t + i*d
		if n > 1 {
			w.ex.over(at, d)
		}
		w.meter.step(w.st, d)
		w.last = d
		w.gather(at-t0, d)
	}
}

// gather adds a substep's share to the integrals of prescribed displacements and
// of the watched nodes' own loads; offset is its start within the base step.
func (w *walk) gather(offset, d float64) {
	moments := func(p func(j int) float64) (i0, i1 float64) {
		fact := 1.0
		for j := 0; j <= loadDegree; j++ {
			if j > 0 {
				fact *= float64(j)
			}
			c := p(j) / fact
			i0 += c * d / float64(j+1)
			i1 += c * d * d / float64(j+2)
		}
		return i0, i1 + offset*i0
	}
	for i := range w.b.up0 {
		a, b := moments(func(j int) float64 { return w.ex.up[i][j] })
		w.b.up0[i], w.b.up1[i] = w.b.up0[i]+a, w.b.up1[i]+b
	}
	if !w.ex.total.active {
		return
	}
	n := w.op.size()
	for i := range w.b.share0 {
		a, b := moments(func(j int) float64 { return w.ex.total.at[j][n+i] })
		w.b.share0[i], w.b.shr1[i] = w.b.share0[i]+a, w.b.shr1[i]+b
	}
}

// look takes a snapshot at tau of the present substep of length d.
func (w *walk) look(s *snapshot, tau, d float64) {
	copy(s.x, w.st.x)
	copy(s.v, w.st.v)
	if w.accel {
		w.meter.acceleration(w.st, tau, d)
		copy(s.a, w.meter.a)
	}
	for i := range s.up {
		s.up[i] = polyAt(&w.ex.up[i], tau, d, 0)
		s.vp[i] = polyAt(&w.ex.vp[i], tau, d, 0)
		s.ap[i] = polyAt(&w.ex.vp[i], tau, d, 1)
	}
	n := w.op.size()
	for i := range s.share {
		s.share[i] = 0
		if w.ex.total.active {
			c := [loadDegree + 1]float64{}
			for j := range c {
				c[j] = w.ex.total.at[j][n+i]
			}
			s.share[i] = polyAt(&c, tau, d, 0)
		}
	}
}

func clearAll(vs ...[]float64) {
	for _, v := range vs {
		clear(v)
	}
}

// flush zeroes what has decayed to nothing, before it becomes denormal and slow.
func flush(st *state) {
	const nothing = 1e-250
	for _, v := range [][]float64{st.x, st.v, st.r} {
		for i, x := range v {
			if x != 0 && math.Abs(x) < nothing {
				v[i] = 0
			}
		}
	}
}

var _ solver.Solver = Solver{}
