package spectral

import (
	"context"
	"math"

	"github.com/tautspan/tautspan/engine/mesh"

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
	end      int  // base step at whose end the account closes
	win      window
	part     load // the window's load over the present substep
	pieces   [][loadDegree + 1]float64
	laws     *laws       // nil: everything is linear
	sagRows  [][]float64 // of each sagging line, in the operator's coordinates
	tight    bool        // some line's tension moves and is asked for
}

// window is a time over which the loads are one polynomial and the energy account is
// integrated in one piece: several base steps where they are short, one substep of
// many where they are long.
type window struct{ from, to float64 }

func (w window) length() float64       { return w.to - w.from }
func (w window) tau(t float64) float64 { return (t - w.from) / (w.to - w.from) }

func newWalk(j *job, op operator, series [][][]float64) *walk {
	w := &walk{job: j, op: op, ex: newExcitation(j.sys, op)}
	w.meter = newMeter(j.sys, op, w.ex)
	if !j.lay.modal && !j.sys.frame {
		w.meter.stiff = newStiff(j.sys, math.Max(j.lay.quiet, j.lay.loaded))
	}
	w.rec = recorder{taps: newTaps(j.sys, op, series), sub: j.sub, every: j.m.Timing.Every}
	integrals, accel := w.rec.needs()
	w.accel = accel
	w.st = newState(op.size(), len(j.sys.brackets), integrals)
	moved, watched := len(j.sys.moved), len(j.sys.watched)
	lines := len(j.m.Lines)
	w.from, w.to = newSnapshot(op.size(), moved, watched, lines), newSnapshot(op.size(), moved, watched, lines)
	w.b = basis{h: j.base(), z: w.st.z, y: w.st.y, up0: make([]float64, moved), up1: make([]float64, moved),
		share0: make([]float64, watched), shr1: make([]float64, watched)}
	w.end = (j.m.Timing.Rows - 1) * j.sub
	w.pieces = make([][loadDegree + 1]float64, moved)
	for q := range w.part.at {
		w.part.at[q] = make([]float64, op.size()+watched)
	}
	w.begin()
	for _, t := range w.rec.taps {
		w.tight = w.tight || t.line >= 0
	}
	for i := range j.sys.sags {
		w.sagRows = append(w.sagRows, op.row(j.sys.sags[i].w))
	}
	w.tight = w.tight || w.accel && j.m.Features()&mesh.Stretching != 0
	if w.laws = newLaws(j.sys, op, w.st); w.laws != nil {
		w.laws.begin(w.st)
		w.meter.laws = w.laws
	}
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
	if s.frame {
		s.startFrame(x, v)
	} else {
		for i := range s.elements {
			s.startElement(&s.elements[i], x, v, momentum)
		}
		for i, p := range momentum {
			v[s.inner+i] = p / s.mass[i]
		}
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
	first := math.Min(w.lay.loaded, w.firstBreak())
	if w.steps > 0 {
		first = math.Min(first, h)
	}
	w.win = window{0, math.Min(first, 1)}
	w.ex.over(0, w.win.length())
	w.look(w.from, 0)
	w.win = window{-1, -1}
	w.meter.acct.Start = w.meter.stored(w.st, w.from)
	w.meter.acct.Most = w.meter.acct.Start
	w.meter.acct.End = w.meter.acct.Start
	w.motionWork(w.from, -1)
	w.rec.start(w.from)
	acct := w.meter.acct
	if w.end == 0 {
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
		if k+1 == w.end {
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
		end, length := t1, t1-t
		if t == t0 {
			length = h // the same number every time
		}
		if w.next < len(w.ex.breaks) && w.ex.breaks[w.next] < t1-tiny {
			end = w.ex.breaks[w.next]
			length = end - t
		}
		if w.laws != nil {
			if err := w.lawful(t, t0, length); err != nil {
				return err
			}
			t = end
			continue
		}
		n := 1.0
		if w.win.to < end-tiny {
			n = w.openWindow(t, end, length, k, h)
		}
		d := length / n
		for i := 0.0; i < n; i++ {
			at := t + i*d
			if i > 0 {
				w.win = window{at, at + d}
				w.ex.over(at, d)
				w.meter.open(w.st, d)
			}
			w.substep(at, t0, d)
			if w.win.to <= at+d+tiny {
				w.meter.close(w.st, w.win.length())
			}
		}
		t = end
	}
	w.look(w.to, t1)
	if k%32 == 0 {
		flush(w.st)
	}
	return nil
}

// openWindow opens a window at t, in the time without breaks up to end, of base step
// k. It returns into how many substeps, each a window, that time is to be cut; a
// window longer than it reaches on over whole base steps.
func (w *walk) openWindow(t, end, length float64, k int, h float64) float64 {
	limits := []float64{w.lay.quiet, w.lay.loaded}
	if w.ex.total.active { // and so it will be, most likely: look at the loads once
		limits = limits[1:]
	}
	for _, limit := range limits {
		n := math.Max(1, math.Ceil(length/limit-1e-9))
		to := t + length/n
		if more := w.further(end, limit-length, k, h); n == 1 && more > 0 {
			to = float64(k+1+more) * h
		}
		w.win = window{t, to}
		w.ex.over(t, w.win.length())
		if !w.ex.total.active || limit == w.lay.loaded {
			w.meter.open(w.st, w.win.length())
			return n
		}
	}
	return 1 // not reached: the last limit always returns
}

// further is how many whole base steps a window that reaches the end of base step k
// may take in besides: within its limit, up to the next break and the end of the
// account.
func (w *walk) further(end, room float64, k int, h float64) int {
	if w.next < len(w.ex.breaks) {
		if w.ex.breaks[w.next] <= end {
			return 0
		}
		room = math.Min(room, w.ex.breaks[w.next]-end)
	}
	last := w.steps
	if k+1 <= w.end {
		last = w.end
	}
	return int(math.Max(0, math.Min(math.Floor(room/h+1e-9), float64(last-k-1))))
}

// substep advances the state by d from time at, within the window; t0 is the start
// of the base step.
func (w *walk) substep(at, t0, d float64) {
	ld := &w.ex.total
	copy(w.pieces, w.ex.up)
	if share := d / w.win.length(); share < 1-1e-9 {
		tau := w.win.tau(at)
		w.ex.total.cut(&w.part, tau, share)
		ld = &w.part
		for i := range w.pieces {
			w.pieces[i] = cutPoly(&w.ex.up[i], tau, share)
		}
	}
	w.op.step(w.st, d, ld)
	w.gather(ld, at-t0, d)
}

// gather adds a substep's share to the integrals of prescribed displacements and
// of the watched nodes' own loads; offset is its start within the base step.
func (w *walk) gather(ld *load, offset, d float64) {
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
		a, b := moments(func(j int) float64 { return w.pieces[i][j] })
		w.b.up0[i], w.b.up1[i] = w.b.up0[i]+a, w.b.up1[i]+b
	}
	if !ld.active {
		return
	}
	n := w.op.size()
	for i := range w.b.share0 {
		a, b := moments(func(j int) float64 { return ld.at[j][n+i] })
		w.b.share0[i], w.b.shr1[i] = w.b.share0[i]+a, w.b.shr1[i]+b
	}
}

// look takes a snapshot at a time of the present window.
func (w *walk) look(s *snapshot, t float64) {
	tau, d := w.win.tau(t), w.win.length()
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
	w.tensions(s)
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
