package characteristic

import (
	"math"

	"github.com/tautspan/tautspan/engine/mesh"
)

// wind carries the waves that a force per length sets off in a piece,
//
//	phi_t + c phi_x + gamma phi = r,  psi_t - c psi_x + gamma psi = r,
//	r_t + gamma r = q/(2m),
//
// on n cells h = c ds that a wave crosses in one lattice step. r takes the
// exact impulse of each step (three Gauss points between breaks of the load),
// the waves take r by the trapezoidal rule along characteristics, and Euler's
// summation formula mends its ends: ds^2/12 times the derivative of r along the
// characteristic where it starts and where it is read. Fourth order in ds where
// q is smooth in time and does not end inside the piece, second order else.
//
// Nothing here depends on the line's motion, so it runs ahead of the nodes.
type wind struct {
	p        *line
	n        int
	ds, e    float64
	step     int
	phi, psi []float64
	r        []float64
	impulse  [windRing][]float64 // of the step that ends at number k, at [k % windRing], m/s
	u        [windRing][]float64 // phi + psi after step k, m
	shapes   [windRing]field     // after step k
	presses  []pressed
	ends     [2]*history // psi at x = 0, phi at x = L
	taps     []tap
}

// windRing: impulses and shapes are kept for as many lattice steps, more than
// windAhead, by which the wind leads what the nodes have done.
const (
	windRing  = 8
	windAhead = 5
)

// tap records phi and psi at one place.
type tap struct {
	x        float64
	phi, psi *history
}

// pressed is a force per length on part of the piece.
type pressed struct {
	value  func(t, x float64) float64
	alongX bool
	origin float64
	weight []float64 // share of each point's cell that is covered
	at     []float64 // m, middle of each point's covered part, in the piece
	breaks []float64
	next   int
}

func newWind(p *line, cells int, span, tol float64, places []float64) *wind {
	w := &wind{p: p, n: cells, ds: p.tau / float64(cells)}
	w.e = p.decay(w.ds)
	w.phi, w.psi, w.r = make([]float64, cells+1), make([]float64, cells+1), make([]float64, cells+1)
	for i := range w.u {
		w.u[i], w.impulse[i] = make([]float64, cells+1), make([]float64, cells+1)
		w.shapes[i] = field{make([]float64, cells+1), make([]float64, cells+1), make([]float64, cells+1)}
	}
	w.ends = [2]*history{newHistory(w.ds, span, 0, tol), newHistory(w.ds, span, 0, tol)}
	for _, x := range places {
		w.taps = append(w.taps, tap{x, newHistory(w.ds, span, 0, tol), newHistory(w.ds, span, 0, tol)})
	}
	return w
}

// press adds a force per length.
func (w *wind) press(m *mesh.Press, part mesh.Part, breaks []float64, alongX bool) {
	program := m.Force.Value
	q := pressed{origin: part.Origin, alongX: alongX, breaks: breaks, value: program.At}
	for j := 0; j <= w.n; j++ {
		share, x := cover(j, w.n, w.p.length, part.From, part.To)
		q.weight = append(q.weight, share)
		q.at = append(q.at, x)
	}
	w.presses = append(w.presses, q)
}

// cover is the share of point j's own cell (half a cell at the ends) that lies
// between from and to, and the middle of that part.
func cover(j, n int, length, from, to float64) (share, middle float64) {
	h := length / float64(n)
	lo, hi := math.Max(0, (float64(j)-0.5)*h), math.Min(length, (float64(j)+0.5)*h)
	a, b := math.Max(lo, from), math.Min(hi, to)
	if b <= a {
		return 0, 0
	}
	if a == lo && b == hi {
		return 1, float64(j) * h
	}
	return (b - a) / (hi - lo), (a + b) / 2
}

// begin works out the first impulses, so that the wind's state at t = 0 and
// what it has to know one step ahead are there.
func (w *wind) begin() { w.blow(1) }

// advance does one lattice step. impulse of the step after it is worked out
// too: the derivative of r at a step's end is the mean of its two neighbours.
func (w *wind) advance() {
	n := w.n
	imp := w.impulse[(w.step+1)%windRing]
	half := 0.5 * w.ds
	for j := n; j > 0; j-- {
		w.phi[j] = w.e * (w.phi[j-1] + half*w.r[j-1])
	}
	for j := 0; j < n; j++ {
		w.psi[j] = w.e * (w.psi[j+1] + half*w.r[j+1])
	}
	w.phi[0], w.psi[n] = 0, 0
	for j := range w.r {
		w.r[j] = w.e*w.r[j] + imp[j]
		if j > 0 {
			w.phi[j] += half * w.r[j]
		}
		if j < n {
			w.psi[j] += half * w.r[j]
		}
	}
	w.step++
	w.blow(w.step + 1)
	w.phi[0], w.psi[n] = w.drift(0, 1), w.drift(n, -1)
	u := w.u[w.step%windRing]
	s := &w.shapes[w.step%windRing]
	copy(s.r, w.r)
	for j := range u {
		s.phi[j], s.psi[j] = w.phi[j]-w.drift(j, 1), w.psi[j]-w.drift(j, -1)
		u[j] = s.phi[j] + s.psi[j]
	}
	w.ends[0].push(w.psi[0] - w.drift(0, -1))
	w.ends[1].push(w.phi[n] - w.drift(n, 1))
	for i := range w.taps {
		t := &w.taps[i]
		j := int(math.Round(t.x / w.p.length * float64(n)))
		t.phi.push(between(w.phi, t.x/w.p.length) - w.drift(j, 1))
		t.psi.push(between(w.psi, t.x/w.p.length) - w.drift(j, -1))
	}
}

// drift is ds^2/12 times the derivative of exp(gamma t) r exp(-gamma t) along
// f's characteristic (dir 1) or g's (dir -1) at point j: q/(2m) from the
// impulses before and after, and c r_x from neighbours.
func (w *wind) drift(j int, dir float64) float64 {
	if w.n < 3 {
		return 0
	}
	r := w.r
	var rx float64
	switch j {
	case 0:
		rx = -1.5*r[0] + 2*r[1] - 0.5*r[2]
	case w.n:
		rx = 1.5*r[j] - 2*r[j-1] + 0.5*r[j-2]
	default:
		rx = 0.5 * (r[j+1] - r[j-1])
	}
	q := 0.5 * (w.impulse[w.step%windRing][j] + w.impulse[(w.step+1)%windRing][j])
	return w.ds / 12 * (dir*rx + q)
}

// blow fills the impulse of the step that ends at number k.
func (w *wind) blow(k int) {
	imp := w.impulse[k%windRing]
	for j := range imp {
		imp[j] = 0
	}
	t1 := float64(k) * w.ds
	places, weights := gauss()
	for i := range w.presses {
		q := &w.presses[i]
		for a := float64(k-1) * w.ds; a < t1; {
			b := t1
			for q.next < len(q.breaks) && q.breaks[q.next] <= a {
				q.next++
			}
			if q.next < len(q.breaks) && q.breaks[q.next] < t1 {
				b = q.breaks[q.next]
			}
			for g, x := range places {
				if t := a + x*(b-a); t >= 0 {
					q.spread(imp, t, weights[g]*(b-a)*w.p.decay(t1-t)/(2*w.p.mass))
				}
			}
			a = b
		}
	}
}

// spread adds factor q(t, x) to every point's impulse.
func (q *pressed) spread(imp []float64, t, factor float64) {
	if !q.alongX {
		factor *= q.value(t, 0)
		for j, share := range q.weight {
			imp[j] += factor * share
		}
		return
	}
	for j, share := range q.weight {
		if share > 0 {
			imp[j] += factor * share * q.value(t, q.origin+q.at[j])
		}
	}
}

// between is a lattice field at the given share of the piece's length, by cubic
// interpolation.
func between(v []float64, share float64) float64 {
	n := len(v) - 1
	pos := share * float64(n)
	start := max(0, min(int(math.Floor(pos))-1, n-narrow+1))
	count := min(narrow, n+1-start)
	var xs, vs [wide]float64
	for j := 0; j < count; j++ {
		xs[j], vs[j] = float64(start+j)-pos, v[start+j]
	}
	return newton(&xs, &vs, count, 0, 1)
}
