package differences

import (
	"math"

	"github.com/tautspan/tautspan/engine/mesh"
	"github.com/tautspan/tautspan/engine/scenario"
)

// moment is what a record is read from: the state at step n and what the nodes
// are doing then.
type moment struct {
	n     int
	u     []float64 // m, state at t_n
	x, y  []float64 // order 2: m, increments of the nodes after and before t_n
	v, a  []float64 // order 4: m/s, m/s^2, velocities and accelerations of the nodes
	onEnd []float64 // N, load on the half cell of each strand's ends
}

// reader reads one quantity at one place: weighted sums of the state, and the
// forces of strand ends times their scales.
type reader struct {
	inside []stencil
	ends   []reading
}

type reading struct {
	end   int // 2*strand + (0 start, 1 end)
	scale float64
}

// ring is the number of steps that a tape remembers; at least maxPoints.
const ring = 8

// tape records one channel. Displacement, velocity and acceleration are read
// from displacements, differentiated in time by the interpolation; slope and
// force as they are. Averaging over an output interval takes differentiations
// back, so that a mean velocity is a difference of displacements; what is left
// over is integrated.
type tape struct {
	w       *network
	readers []reader
	out     [][]float64
	rows    int
	stride  int
	every   float64 // s
	means   int
	deriv   int // time derivatives of what is read, less the means; below 0: integrals
	points  int // of the interpolation in time

	past  [ring][]float64 // readings at step n in past[n%ring]
	first []float64       // at t = 0
	slow  []float64       // velocity at t = 0 of what is read
	event int             // next event, in half output intervals
	cell  int             // next step interval to integrate
}

// newTapes prepares the records of all channels; points is the number of points
// of interpolations, 4 or 6.
func newTapes(w *network, out [][][]float64, v []float64, points int) []*tape {
	var tapes []*tape
	rows, stride := w.m.FieldRows()
	for c := range w.m.Channels {
		ch := &w.m.Channels[c]
		if constant(w.m, ch, out[c]) {
			continue
		}
		t := &tape{w: w, out: out[c], rows: w.m.Timing.Rows, stride: 1, every: w.m.Timing.Every, means: min(max(ch.Means, 0), 2), points: points}
		if ch.Along {
			t.rows, t.stride = rows, stride
		}
		switch ch.Quantity {
		case scenario.Velocity:
			t.deriv = 1
		case scenario.Acceleration:
			t.deriv = 2
		}
		t.deriv -= t.means
		t.event = -t.means
		for _, s := range ch.Spots {
			t.readers = append(t.readers, w.newReader(ch, s, points))
		}
		n := len(t.readers)
		flat := make([]float64, (ring+2)*n)
		for i := range t.past {
			t.past[i] = flat[i*n : (i+1)*n]
		}
		t.first, t.slow = flat[ring*n:(ring+1)*n], flat[(ring+1)*n:]
		if ch.Quantity <= scenario.Acceleration {
			for k := range t.readers {
				for i := range t.readers[k].inside {
					t.slow[k] += t.readers[k].inside[i].read(v)
				}
			}
		}
		tapes = append(tapes, t)
	}
	return tapes
}

// constant fills the records that do not change: tension and, on a string, moment.
func constant(m *mesh.Mesh, ch *mesh.Channel, out [][]float64) bool {
	if ch.Quantity != scenario.Tension && ch.Quantity != scenario.Moment {
		return false
	}
	attached := m.Attached()
	for k, s := range ch.Spots {
		v := 0.0
		if ch.Quantity == scenario.Tension {
			p := s.Piece
			if s.Node >= 0 {
				p, _ = after(attached[s.Node])
			}
			if p >= 0 {
				v = m.Pieces[p].Tension
			}
		}
		for i := range out[k] {
			out[k][i] = v
		}
	}
	return true
}

// after is the piece after a node, at the end of a line the piece before it; -1
// where there is none.
func after(at []mesh.Attachment) (piece int, end bool) {
	for _, a := range at {
		if !a.End {
			return a.Piece, false
		}
	}
	if len(at) > 0 {
		return at[0].Piece, true
	}
	return -1, false
}

func (w *network) newReader(ch *mesh.Channel, at mesh.Spot, points int) reader {
	deriv := 0
	if ch.Quantity == scenario.Slope || ch.Quantity == scenario.Force {
		deriv = 1
	}
	if at.Node < 0 {
		s := &w.strands[at.Piece]
		in := w.inside(s, at.At/s.h, points, deriv)
		for i := range in {
			switch {
			case ch.Quantity == scenario.Force:
				in[i].times(s.stiff)
			case deriv == 1:
				in[i].times(1 / s.h)
			}
		}
		return reader{inside: in}
	}
	if deriv == 0 {
		return reader{inside: []stencil{newStencil(at.Node, 0, 0, 0, 1, 0)}}
	}
	n := &w.m.Nodes[at.Node]
	var r reader
	if ch.Quantity == scenario.Force && (n.Support || n.Fitting) {
		for _, a := range w.ends[at.Node] {
			r.ends = append(r.ends, reading{endIndex(a.Piece, a.End), 1})
		}
	} else if p, end := after(w.ends[at.Node]); p >= 0 {
		scale := 1.0
		if end {
			scale = -1
		}
		if ch.Quantity == scenario.Slope {
			scale /= w.m.Pieces[p].Tension
		}
		r.ends = []reading{{endIndex(p, end), scale}}
	}
	return r
}

// inside reads a place x cells into a strand without reaching across a point
// force, where the slope jumps: from the stretch between the forces around it,
// and at a force from both sides by halves, slopes from the stretch after it.
func (w *network) inside(s *strand, x float64, points, deriv int) []stencil {
	x = math.Min(math.Max(x, 0), float64(s.n))
	if r := math.Round(x); math.Abs(x-r) < 1e-9 {
		x = r
	}
	lo, hi, there := 0, s.n, false
	for _, mark := range w.m.Pieces[s.piece].Marks {
		if mark.Kind != mesh.MarkLoad {
			continue
		}
		switch at := mark.At / s.h; {
		case math.Abs(at-x) < 1e-9:
			there = true
		case at < x:
			lo = max(lo, int(math.Ceil(at-1e-9)))
		default:
			hi = min(hi, int(math.Floor(at+1e-9)))
		}
	}
	// Two points a side are the least; forces closer than that are read across.
	left, right := int(math.Floor(x)), int(math.Ceil(x))
	switch {
	case there && left > lo && hi > right:
		a := newStencil(s.at, lo, left, x, points, deriv)
		b := newStencil(s.at, right, hi, x, points, deriv)
		if deriv > 0 {
			return []stencil{b} // the slope of the stretch after it, as at a node
		}
		a.times(0.5)
		b.times(0.5)
		return []stencil{a, b}
	case there || hi <= lo:
		lo, hi = 0, s.n
	}
	return []stencil{newStencil(s.at, lo, hi, x, points, deriv)}
}

func endIndex(piece int, end bool) int {
	if end {
		return 2*piece + 1
	}
	return 2 * piece
}

// endForce is the force of a strand on the node at its end, N: that of the end
// cell less the inertia and the loss of its half at the node, and the load on
// it. It is the force that balances the node in the scheme, of order 2; n >= 1.
func (w *network) endForce(end int, at *moment) float64 {
	s := &w.strands[end/2]
	node, next := s.from, s.at+1
	if end%2 == 1 {
		node, next = s.to, s.at+s.n-1
	}
	if w.fourth {
		return w.fourthForce(end, at)
	}
	dt := w.dt
	bend, rate := at.x[node]-at.y[node], (at.x[node]+at.y[node])/2
	var f float64
	if s.implicit {
		k := s.point(1)
		if end%2 == 1 {
			k = s.point(s.n - 1)
		}
		f = s.stiff * (at.u[k] - at.u[node] + (at.x[k]-at.y[k]-bend)/4)
	} else {
		f = s.stiff * (at.u[next] - at.u[node])
	}
	return f - s.mass/2*bend/(dt*dt) - s.loss/2*rate/dt + at.onEnd[end]
}

// startForce is the force at t = 0 of a strand on the node at its end, N: that of
// the start shape, whatever sets in at t = 0.
func (w *network) startForce(end int, u []float64) float64 {
	s := &w.strands[end/2]
	x, sign := 0.0, 1.0
	if end%2 == 1 {
		x, sign = float64(s.n), -1
	}
	points := 4
	if w.fourth {
		points = maxPoints
	}
	in := newStencil(s.at, 0, s.n, x, points, 1)
	return sign * s.stiff * in.read(u)
}

// reach is the last step that the tapes of a mesh may need.
func reach(m *mesh.Mesh, dt float64) float64 {
	return math.Ceil((m.Timing.End()+m.Timing.Every)/dt) + maxPoints
}

// take notes the readings of a step and writes the rows that they complete.
func (t *tape) take(at *moment) {
	if t.event >= t.end() && t.deriv >= 0 {
		return
	}
	if t.deriv >= 0 && at.n < t.from(t.time(t.event)) && at.n > 0 {
		return
	}
	now := t.past[at.n%ring]
	for k := range t.readers {
		r := &t.readers[k]
		v := 0.0
		for i := range r.inside {
			v += r.inside[i].read(at.u)
		}
		for _, e := range r.ends {
			if at.n == 0 {
				v += e.scale * t.w.startForce(e.end, at.u)
			} else {
				v += e.scale * t.w.endForce(e.end, at)
			}
		}
		now[k] = v
	}
	if at.n == 0 {
		copy(t.first, now)
	}
	if t.deriv < 0 {
		t.integrate(at.n)
		return
	}
	for t.event < t.end() && at.n >= t.from(t.time(t.event))+t.points-1 {
		t.write(t.event)
		t.event += t.gap()
	}
}

// time is that of an event, s.
func (t *tape) time(event int) float64 { return float64(event) * t.every / 2 }

// gap is the distance of successive events: without means and with two of them
// only whole output intervals matter, with one only the halves between.
func (t *tape) gap() int {
	if t.means == 0 {
		return 2 * t.stride
	}
	return 2
}

// end is the first event past the last.
func (t *tape) end() int { return 2*(t.rows-1)*t.stride + t.means + 1 }

// from is the first step of the interpolation for a time.
func (t *tape) from(time float64) int {
	return max(int(math.Floor(time/t.w.dt))-t.points/2+1, 0)
}

// write adds what an event brings to the rows that need it.
func (t *tape) write(event int) {
	time := t.time(event)
	var w [maxPoints]float64
	first := t.from(time)
	scale := math.Pow(t.w.dt, -float64(t.deriv))
	if time >= 0 {
		lagrange(&w, t.points, time/t.w.dt-float64(first), t.deriv)
	}
	for k := range t.readers {
		v := 0.0
		switch {
		case time >= 0:
			for i := 0; i < t.points; i++ {
				v += w[i] * t.past[(first+i)%ring][k]
			}
			v *= scale
		case t.deriv == 0:
			v = t.first[k] + time*t.slow[k]
		case t.deriv == 1:
			v = t.slow[k]
		}
		switch t.means {
		case 0:
			t.put(k, event, v)
		case 1:
			t.put(k, event-1, v/t.every)
			t.put(k, event+1, -v/t.every)
		case 2:
			t.put(k, event-2, v/(t.every*t.every))
			t.put(k, event, -2*v/(t.every*t.every))
			t.put(k, event+2, v/(t.every*t.every))
		}
	}
}

// put adds to the row at an event, if there is one.
func (t *tape) put(k, event int, v float64) {
	row := event / (2 * t.stride)
	if event >= 0 && event == row*2*t.stride && row < t.rows {
		t.out[k][row] += v
	}
}

// integrate adds the step intervals that have become complete. Each is taken as
// the polynomial through its neighbours, cut at the half output intervals.
func (t *tape) integrate(n int) {
	dt := t.w.dt
	if t.cell == 0 && n == 0 {
		t.before()
	}
	for n >= t.from(float64(t.cell)*dt)+t.points-1 {
		a, stop := float64(t.cell)*dt, float64(t.cell+1)*dt
		for a < stop {
			half := int(math.Floor(a/(t.every/2) + 1e-9))
			b := math.Min(stop, t.time(half+1))
			if half > t.end() {
				break
			}
			if b > a {
				t.stretch(a, b, half)
			}
			a = b
		}
		t.cell++
	}
}

// before adds the time before t = 0, when what is read goes on as it starts.
func (t *tape) before() {
	for half := -t.means; half < 0; half++ {
		for _, g := range gauss3 {
			at := (float64(half) + g[0]) * t.every / 2
			for k := range t.readers {
				t.share(k, half, at, g[1]*t.every/2*(t.first[k]+at*t.slow[k]))
			}
		}
	}
}

// stretch adds [a, b], which lies in one step and one half output interval.
func (t *tape) stretch(a, b float64, half int) {
	var w [maxPoints]float64
	first := t.from(float64(t.cell) * t.w.dt)
	for _, g := range gauss3 {
		at := a + g[0]*(b-a)
		lagrange(&w, t.points, at/t.w.dt-float64(first), 0)
		for k := range t.readers {
			v := 0.0
			for i := 0; i < t.points; i++ {
				v += w[i] * t.past[(first+i)%ring][k]
			}
			t.share(k, half, at, g[1]*(b-a)*v)
		}
	}
}

// share gives an element of the integral at a time, in the half output interval
// half, to the rows around it with the weights of the mean.
func (t *tape) share(k, half int, at, element float64) {
	w := t.every
	switch {
	case t.means == 1: // over t_i - w/2 .. t_i + w/2
		t.put(k, half+half&1, element/w)
	case t.deriv == -1: // a difference of means of displacement
		left := half - half&1 // the whole output interval left .. left+2
		t.put(k, left, element/(w*w))
		t.put(k, left+2, -element/(w*w))
	default: // triangular
		left := half - half&1
		share := at/w - float64(left/2)
		t.put(k, left, (1-share)*element/w)
		t.put(k, left+2, share*element/w)
	}
}

// finite tells whether all records are numbers.
func finite(series [][][]float64) bool {
	for _, channel := range series {
		for _, record := range channel {
			for _, v := range record {
				if math.IsNaN(v) || math.IsInf(v, 0) {
					return false
				}
			}
		}
	}
	return true
}
