package differences

import (
	"math"
	"sort"

	"github.com/tautspan/tautspan/engine/formula"
	"github.com/tautspan/tautspan/engine/mesh"
	"github.com/tautspan/tautspan/engine/scenario"
)

// tap is one point of a state on which a load acts.
type tap struct {
	at     int     // index in a state
	node   bool    // at is a node
	end    int     // 2*strand + (0 start, 1 end) where the load lies on that half cell of a node; -1 otherwise
	weight float64 // share of the load; m for a force per length
	gain   float64 // m/N, of an inner point
	loss   float64 // N s/m, of an inner point
	x      float64 // m, where a load that depends on place is read
}

// load is a force history with the points on which it acts.
type load struct {
	history   scenario.History
	breaks    []float64 // sorted
	next      int       // first break that is not past
	placed    bool      // reads the place: one history for each tap
	taps      []tap
	last, now []float64 // N or N/m: means over the step before and after, one or one a tap
	force     []float64 // N at each tap in this step
	old       []float64 // m, at each tap before the kernel
	before    float64   // J
}

// loads are all that act on a network.
type loads struct {
	w      *network
	each   []load
	rolls  []roll
	onNode []float64 // N, at each node, in this step
	onEnd  []float64 // N, the part that lies on the half cell of each strand's ends
}

func newLoads(w *network) *loads {
	l := &loads{w: w, onNode: make([]float64, w.nodes), onEnd: make([]float64, 2*len(w.strands))}
	for i := range w.m.Pushes {
		p := &w.m.Pushes[i]
		l.include(p.Force, w.pointTaps(p.At), false)
	}
	for i := range w.m.Presses {
		p := &w.m.Presses[i]
		var taps []tap
		for _, part := range p.Parts {
			taps = append(taps, w.partTaps(part)...)
		}
		l.include(p.Force, taps, p.Force.Value.UsesArg(formula.ArgX))
	}
	for i := range w.m.Rolls {
		l.rolls = append(l.rolls, newRoll(w, &w.m.Rolls[i]))
	}
	return l
}

func (l *loads) include(h scenario.History, taps []tap, placed bool) {
	ld := load{history: h, placed: placed, taps: taps, force: make([]float64, len(taps)), old: make([]float64, len(taps))}
	ld.breaks = append(ld.breaks, h.Breaks...)
	sort.Float64s(ld.breaks)
	n := 1
	if placed {
		n = len(taps)
	}
	ld.last, ld.now = make([]float64, n), make([]float64, n)
	l.each = append(l.each, ld)
}

// tapAt is the tap of point k of a strand.
func (w *network) tapAt(strandIndex, k int, weight, x float64) tap {
	s := &w.strands[strandIndex]
	at, node := s.place(k)
	t := tap{at: at, node: node, end: -1, weight: weight, gain: s.gain, loss: s.loss, x: x}
	switch k {
	case 0:
		t.end = 2 * strandIndex
	case s.n:
		t.end = 2*strandIndex + 1
	}
	return t
}

// pointTaps splits a point force linearly over the two points beside it.
func (w *network) pointTaps(at mesh.Spot) []tap {
	if at.Node >= 0 {
		return []tap{{at: at.Node, node: true, end: -1, weight: 1}}
	}
	s := &w.strands[at.Piece]
	x := math.Min(math.Max(at.At/s.h, 0), float64(s.n))
	if r := math.Round(x); math.Abs(x-r) < 1e-9 {
		x = r
	}
	k := min(int(x), s.n-1)
	share := x - float64(k)
	taps := []tap{w.tapAt(at.Piece, k, 1-share, 0), w.tapAt(at.Piece, k+1, share, 0)}
	if share == 0 {
		return taps[:1]
	}
	return taps
}

// partTaps spreads a force per length over the points of a piece: each takes the
// integral of its hat function over the stretch, read at the centroid of that.
func (w *network) partTaps(part mesh.Part) []tap {
	s := &w.strands[part.Piece]
	from := math.Max(part.From, 0) / s.h
	to := math.Min(part.To/s.h, float64(s.n))
	if !(to > from) {
		return nil
	}
	var taps []tap
	for k := max(int(from), 0); k <= min(int(math.Ceil(to)), s.n); k++ {
		x := float64(k)
		var area, moment float64
		for side := -1.0; side <= 1; side += 2 {
			a, b := math.Max(from, math.Min(x, x+side)), math.Min(to, math.Max(x, x+side))
			if a = math.Max(a, 0); a < b {
				// Over [a, b] the hat falls from 1 at x: 1 - side (r - x).
				mid, width := (a+b)/2, b-a
				height := 1 - side*(mid-x)
				area += height * width
				moment += height*width*mid - side*width*width*width/12
			}
		}
		if area > 0 {
			taps = append(taps, w.tapAt(part.Piece, k, area*s.h, part.Origin+moment/area*s.h))
		}
	}
	return taps
}

// gauss2 holds the points of the two-point Gauss-Legendre rule on [0, 1], exact to
// degree 3 (Abramowitz and Stegun, table 25.4).
var gauss2 = [2]float64{0.2113248654051871, 0.7886751345948129}

// mean is the mean of the history over [from, to] at place x, cut at breaks.
func (ld *load) mean(from, to, x float64) float64 {
	sum, a := 0.0, from
	for i := ld.next; ; i++ {
		b := to
		if i < len(ld.breaks) && ld.breaks[i] < to {
			b = math.Max(ld.breaks[i], a)
		}
		if ld.placed {
			sum += (b - a) * ld.history.At(a+(b-a)/2, x)
		} else {
			for _, g := range gauss2 {
				sum += (b - a) / 2 * ld.history.At(a+g*(b-a), x)
			}
		}
		if b == to {
			return sum / (to - from)
		}
		a = b
	}
}

// set finds the forces of the step from t_n to t_n+1, n = 0, 1, ..., in order.
// A force acts with its mean over the two steps around t_n, at n = 0 over the
// first step alone: for a point force on a line at Courant number 1 that is
// exact, whatever the history.
func (l *loads) set(n int) {
	from, to := float64(n)*l.w.dt, float64(n+1)*l.w.dt
	clear(l.onNode)
	clear(l.onEnd)
	for i := range l.each {
		ld := &l.each[i]
		ld.last, ld.now = ld.now, ld.last
		for ld.next < len(ld.breaks) && ld.breaks[ld.next] <= from {
			ld.next++
		}
		for k := range ld.now {
			x := 0.0
			if ld.placed {
				x = ld.taps[k].x
			}
			ld.now[k] = ld.mean(from, to, x)
			if n == 0 {
				ld.last[k] = ld.now[k]
			}
		}
		for k := range ld.taps {
			j := 0
			if ld.placed {
				j = k
			}
			ld.force[k] = ld.taps[k].weight * (ld.last[j] + ld.now[j]) / 2
		}
		l.sum(ld.taps, ld.force)
	}
	for i := range l.rolls {
		r := &l.rolls[i]
		r.set(n)
		l.sum(r.taps, r.force)
	}
}

// sum adds what taps bring to nodes.
func (l *loads) sum(taps []tap, force []float64) {
	for k := range taps {
		t := &taps[k]
		if t.node {
			l.onNode[t.at] += force[k]
		}
		if t.end >= 0 {
			l.onEnd[t.end] += force[k]
		}
	}
}

// remember notes the state that the kernel is about to overwrite, for the work
// and the loss.
func (l *loads) remember(u []float64) {
	for i := range l.each {
		ld := &l.each[i]
		ld.before = note(ld.taps, ld.force, ld.old, u)
	}
	for i := range l.rolls {
		r := &l.rolls[i]
		r.before = note(r.taps, r.force, r.old, u)
	}
}

// act adds share times the forces' displacements to the inner points of u: 1 in a
// step, 1/2 in the first one. It returns what this changes in the sum of
// loss (u+ - u-)^2 that the kernel took without the loads, N s m.
func (l *loads) act(u []float64, share float64) float64 {
	sum := 0.0
	for i := range l.each {
		ld := &l.each[i]
		sum += move(ld.taps, ld.force, ld.old, u, share)
	}
	for i := range l.rolls {
		r := &l.rolls[i]
		sum += move(r.taps, r.force, r.old, u, share)
	}
	return sum
}

// work is half of the forces times the displacement from the state remembered to
// u, J.
func (l *loads) work(u []float64) float64 {
	sum := 0.0
	for i := range l.each {
		sum += pair(l.each[i].taps, l.each[i].force, u) - l.each[i].before
	}
	for i := range l.rolls {
		sum += pair(l.rolls[i].taps, l.rolls[i].force, u) - l.rolls[i].before
	}
	return sum / 2
}

func pair(taps []tap, force, u []float64) float64 {
	sum := 0.0
	for k := range taps {
		sum += force[k] * u[taps[k].at]
	}
	return sum
}

// note is pair, and keeps the values.
func note(taps []tap, force, old, u []float64) float64 {
	for k := range taps {
		old[k] = u[taps[k].at]
	}
	return pair(taps, force, u)
}

func move(taps []tap, force, old, u []float64, share float64) float64 {
	sum := 0.0
	for k := range taps {
		t := &taps[k]
		if t.node {
			continue
		}
		before := u[t.at] - old[k]
		u[t.at] += share * t.gain * force[k]
		after := u[t.at] - old[k]
		sum += t.loss * (after*after - before*before)
	}
	return sum
}
