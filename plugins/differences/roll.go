package differences

import (
	"math"

	"github.com/tautspan/tautspan/engine/mesh"
)

// roll is a constant force that travels along a line. Point j feels at step n
//
//	force * (time for which |x(t) - x_j|/h < 1 - |t - t_n|/dt) / dt / 2,
//
// that is while the load is in the region of space and time from which a signal
// reaches the point's next value and no other. At Courant number 1 that is
// d'Alembert's solution, joints included; summed over points and steps it is the
// whole force at any Courant number. The plain split over two points leaves an
// error of order 1.
type roll struct {
	w      *network
	r      *mesh.Roll
	taps   []tap     // at most cap, refilled every step
	force  []float64 // N at each tap
	old    []float64 // m, at each tap before the kernel
	before float64   // J
}

func newRoll(w *network, r *mesh.Roll) roll {
	widest := 0.0
	for _, k := range w.m.Lines[r.Line].Pieces {
		widest = math.Max(widest, 1/w.strands[k].h)
	}
	// A point feels the load within one cell and one step of travel on each
	// side; every piece that the load meets in a step adds its ends.
	n := int(math.Min(2*math.Abs(r.Speed)*w.dt*widest, 1e6)) + 4
	n = min(n*len(w.m.Lines[r.Line].Pieces), n+4*len(w.m.Lines[r.Line].Pieces)+8)
	return roll{w: w, r: r, taps: make([]tap, 0, n), force: make([]float64, 0, n), old: make([]float64, 0, n)}
}

// set finds taps and forces at step n.
func (r *roll) set(n int) {
	w := r.w
	r.taps, r.force, r.old = r.taps[:0], r.force[:0], r.old[:0]
	t := float64(n) * w.dt
	first, last := math.Max(t-w.dt, math.Max(0, r.r.Starting)), t+w.dt
	share := r.r.Force / (2 * w.dt)
	if n == 0 {
		share *= 2
	}
	if first >= last {
		return
	}
	for _, k := range w.m.Lines[r.r.Line].Pieces {
		s := &w.strands[k]
		p := &w.m.Pieces[k]
		// Place in cells from the piece's start: x0 + v (time - t).
		x0 := (r.r.From + r.r.Speed*(t-r.r.Starting) - p.X0) / s.h
		v := r.r.Speed / s.h
		lo, hi := within(first-t, last-t, x0, v, 0, float64(s.n))
		if !(lo < hi) {
			continue
		}
		a, b := x0+v*lo, x0+v*hi
		if a > b {
			a, b = b, a
		}
		for j := max(int(a)-1, 0); j <= min(int(b)+2, s.n); j++ {
			d := x0 - float64(j)
			// Before t_n the region opens, after it closes.
			early, late := within(lo, math.Min(hi, 0), d+1, v+1/w.dt, 0, math.Inf(1))
			early, late = within(early, late, d-1, v-1/w.dt, math.Inf(-1), 0)
			stay := math.Max(late-early, 0)
			early, late = within(math.Max(lo, 0), hi, d+1, v-1/w.dt, 0, math.Inf(1))
			early, late = within(early, late, d-1, v+1/w.dt, math.Inf(-1), 0)
			stay += math.Max(late-early, 0)
			if stay > 0 {
				r.taps = append(r.taps, w.tapAt(k, j, 1, 0))
				r.force = append(r.force, share*stay)
				r.old = append(r.old, 0)
			}
		}
	}
}

// within narrows [lo, hi] to where from <= a + b s <= to.
func within(lo, hi, a, b, from, to float64) (float64, float64) {
	if b == 0 {
		if a < from || a > to {
			return lo, lo
		}
		return lo, hi
	}
	p, q := (from-a)/b, (to-a)/b
	if p > q {
		p, q = q, p
	}
	return math.Max(lo, p), math.Min(hi, q)
}
