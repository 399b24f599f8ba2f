package characteristic

import (
	"math"

	"github.com/tautspan/tautspan/engine/mesh"
	"github.com/tautspan/tautspan/engine/scenario"
)

// view is what one channel reads at one spot.
type view struct {
	p      *line    // nil at a hung mass
	x      float64  // m from the piece's start
	ports  []*port  // of a node whose force on the fitting is asked
	own    *history // of a node
	taps   [2]*tap  // of wind and lattice
	u0, v0 float64  // m, m/s at t = 0
	slope0 float64  // slope or force before t = 0, in the channel's unit
	scale  float64  // slope to quantity
	panel  float64  // s, longest panel of a quadrature
}

// watch is a channel at work.
type watch struct {
	quantity scenario.Quantity
	means    int
	along    bool
	views    []view
	constant []float64
}

func (r *run) makeWatches() {
	m := r.m
	attached := m.Attached()
	for i := range m.Channels {
		ch := &m.Channels[i]
		w := watch{quantity: ch.Quantity, means: ch.Means, along: ch.Along, constant: make([]float64, len(ch.Spots))}
		for k, s := range ch.Spots {
			v := r.viewOf(s, attached, ch.Quantity)
			if ch.Quantity == scenario.Tension && v.p != nil {
				w.constant[k] = v.p.tension
			}
			w.views = append(w.views, v)
		}
		r.watches = append(r.watches, w)
	}
}

func (r *run) viewOf(s mesh.Spot, attached [][]mesh.Attachment, q scenario.Quantity) view {
	m := r.m
	v := view{scale: 1, panel: r.step}
	if s.Node < 0 {
		v.p, v.x = r.lines[s.Piece], s.At
		v.taps = v.p.tapsAt(s.At)
		p := &m.Pieces[s.Piece]
		v.u0, v.v0 = startShape(p, s.At), startRate(p, s.At)
		v.slope0 = slopeAt(p, s.At)
	} else {
		n, j := &m.Nodes[s.Node], r.joints[s.Node]
		v.u0, v.v0 = n.Start, n.StartRate
		v.own = j.own
		at := attached[s.Node]
		if len(at) == 0 {
			return v
		}
		first := at[0]
		for _, a := range at {
			if !a.End {
				first = a
				break
			}
		}
		v.p = r.lines[first.Piece]
		p := &m.Pieces[first.Piece]
		if first.End {
			v.x = v.p.length
		}
		v.slope0 = slopeAt(p, v.x)
		if q == scenario.Force && (n.Support || n.Fitting) {
			v.slope0 = 0
			for k := range j.ports {
				v.ports = append(v.ports, &j.ports[k])
				p := &m.Pieces[at[k].Piece]
				if at[k].End {
					v.slope0 -= p.Tension * slopeAt(p, p.Length)
				} else {
					v.slope0 += p.Tension * slopeAt(p, 0)
				}
			}
			return v
		}
	}
	if q == scenario.Force {
		v.scale = v.p.tension
		v.slope0 *= v.scale
	}
	return v
}

// tapsAt finds the lattices' records of a place.
func (p *line) tapsAt(x float64) (found [2]*tap) {
	if p.wind != nil {
		for i := range p.wind.taps {
			if p.wind.taps[i].x == x {
				found[0] = &p.wind.taps[i]
			}
		}
	}
	if p.lattice != nil {
		for i := range p.lattice.taps {
			if p.lattice.taps[i].x == x {
				found[1] = &p.lattice.taps[i]
			}
		}
	}
	return found
}

// slopeAt is the slope of the start shape: central inside, one-sided at ends,
// over a millionth of the piece.
func slopeAt(p *mesh.Piece, x float64) float64 {
	if p.Start == nil {
		return 0
	}
	h := 1e-6 * p.Length
	lo, hi := math.Max(0, x-h), math.Min(p.Length, x+h)
	return (p.Start(hi) - p.Start(lo)) / (hi - lo)
}

// waves is the d-th derivative of f and g at place x of a piece (from the right
// of a break for side 1, from the left for -1), with the
// lattices' share where x is an end or has taps.
func (p *line) waves(x, t float64, taps *[2]*tap, d, side int) (f, g float64) {
	f, g = p.carried(x, t, side, d)
	if taps != nil && (taps[0] != nil || taps[1] != nil) {
		for _, k := range taps {
			if k != nil {
				f += k.phi.at(t, 1, d)
				g += k.psi.at(t, 1, d)
			}
		}
		return f, g
	}
	if p.wind != nil {
		f, g = ends(f, g, &p.wind.ends, x, p.length, t, d)
	}
	if p.lattice != nil {
		f, g = ends(f, g, &p.lattice.ends, x, p.length, t, d)
	}
	return f, g
}

func ends(f, g float64, e *[2]*history, x, length, t float64, d int) (float64, float64) {
	switch x {
	case 0:
		g += e[0].at(t, 1, d)
	case length:
		f += e[1].at(t, 1, d)
	}
	return f, g
}

// shift is the d-th derivative of the displacement at time t.
func (v *view) shift(t float64, d int) float64 {
	if t < 0 {
		switch d {
		case 0:
			return v.u0 + t*v.v0
		case 1:
			return v.v0
		}
		return 0
	}
	if v.own != nil {
		return v.own.at(t, 1, d)
	}
	f, g := v.p.waves(v.x, t, &v.taps, d, 1)
	return f + g + v.p.sway.was(t, d)
}

// steep is the slope, or a force by it, at time t:
//
//	c u_x = -(f-g)_t - gamma (f-g),   force on a node: Z (2a - u)_t + gamma Z (2a - u) of each piece.
func (v *view) steep(t float64) float64 {
	if t < 0 {
		return v.slope0
	}
	sum := v.stem(t, 1)
	if v.leaks() {
		sum += v.leak(t)
	}
	return sum
}

// stem is the d-th derivative of what the slope is the rate of, up to loss.
func (v *view) stem(t float64, d int) float64 {
	if v.ports != nil {
		s := 0.0
		for _, q := range v.ports {
			s += q.z * q.towards(t, d)
		}
		return s
	}
	if v.p == nil {
		return 0
	}
	f, g := v.p.waves(v.x, t, &v.taps, d, 1)
	return v.scale * (g - f) / v.p.c
}

// leak is the loss's part of the slope.
func (v *view) leak(t float64) float64 {
	if v.ports != nil {
		s := 0.0
		for _, q := range v.ports {
			s += q.z * q.p.gamma * q.towards(t, 0)
		}
		return s
	}
	return v.p.gamma * v.stem(t, 0)
}

func (v *view) leaks() bool {
	for _, q := range v.ports {
		if q.p.gamma > 0 {
			return true
		}
	}
	return v.ports == nil && v.p != nil && v.p.gamma > 0
}

// towards is the d-th derivative of 2a - u = a - b at the port's node.
func (q *port) towards(t float64, d int) float64 {
	if q.end {
		f, g := q.p.waves(q.p.length, t, nil, d, 1)
		return f - g
	}
	f, g := q.p.waves(0, t, nil, d, 1)
	return g - f
}

// mean is the mean of a function from a to b by Gauss's three points on panels
// no longer than v.panel.
func (v *view) mean(a, b float64, q func(v *view, t float64) float64) float64 {
	n := math.Max(1, math.Ceil((b-a)/v.panel))
	h := (b - a) / n
	places, weights := gauss()
	s := 0.0
	for k := 0.0; k < n; k++ {
		for i, x := range places {
			s += weights[i] * q(v, a+(k+x)*h)
		}
	}
	return s / n
}

// meanSteep is the mean of steep from a to b: a difference of waves, and a
// quadrature of the loss's part.
func (v *view) meanSteep(a, b float64) float64 {
	s := 0.0
	lo := math.Max(a, 0)
	if a < 0 {
		s = v.slope0 * (math.Min(b, 0) - a)
	}
	if b > lo {
		s += v.stem(b, 0) - v.stem(lo, 0)
		if v.leaks() {
			s += (b - lo) * v.mean(lo, b, (*view).leak)
		}
	}
	return s / (b - a)
}

func (v *view) displacement(t float64) float64 { return v.shift(t, 0) }

// record is a channel's value at time t with its means over w.
func (v *view) record(q scenario.Quantity, means int, t, w float64) float64 {
	switch means {
	case 0:
		switch q {
		case scenario.Displacement:
			return v.shift(t, 0)
		case scenario.Velocity:
			return v.shift(t, 1)
		case scenario.Acceleration:
			return v.shift(t, 2)
		}
		return v.steep(t)
	case 1:
		a, b := t-w/2, t+w/2
		switch q {
		case scenario.Displacement:
			return v.mean(a, b, (*view).displacement)
		case scenario.Velocity:
			return (v.shift(b, 0) - v.shift(a, 0)) / w
		case scenario.Acceleration:
			return (v.shift(b, 1) - v.shift(a, 1)) / w
		}
		return v.meanSteep(a, b)
	}
	return v.twice(q, t, w)
}

// triangle is the mean of a function with triangular weight over t-w .. t+w.
func (v *view) triangle(t, w float64, q func(v *view, t float64) float64) float64 {
	n := math.Max(1, math.Ceil(w/v.panel))
	h := w / n
	places, weights := gauss()
	s := 0.0
	for k := 0.0; k < n; k++ {
		for i, x := range places {
			d := (k + x) * h
			s += weights[i] * (1 - d/w) * (q(v, t-d) + q(v, t+d))
		}
	}
	return s / n
}

// twice is the record of means averaged once more.
func (v *view) twice(q scenario.Quantity, t, w float64) float64 {
	switch q {
	case scenario.Displacement:
		return v.triangle(t, w, (*view).displacement)
	case scenario.Velocity:
		after := v.mean(t, t+w, (*view).displacement)
		return (after - v.mean(t-w, t, (*view).displacement)) / w
	case scenario.Acceleration:
		return (v.shift(t+w, 0) - 2*v.shift(t, 0) + v.shift(t-w, 0)) / (w * w)
	}
	if t-w < 0 {
		return v.triangle(t, w, (*view).steep)
	}
	s := (v.mean(t, t+w, (*view).stemNow) - v.mean(t-w, t, (*view).stemNow)) / w
	if v.leaks() {
		s += v.triangle(t, w, (*view).leak)
	}
	return s
}

func (v *view) stemNow(t float64) float64 { return v.stem(t, 0) }

// output records every row that the histories reach around.
func (r *run) output(now float64) {
	lag := window(r.m) + 3*r.step + r.coarsest
	every := r.m.Timing.Every
	fieldRows, stride := r.m.FieldRows()
	for r.row < r.m.Timing.Rows && float64(r.row)*every+lag <= now {
		t := float64(r.row) * every
		picture := r.row%stride == 0 && r.row/stride < fieldRows
		for c := range r.watches {
			w := &r.watches[c]
			at := r.row
			if w.along {
				if !picture {
					continue
				}
				at = r.row / stride
			}
			for k := range w.views {
				r.series[c][k][at] = w.value(k, t, every)
			}
		}
		r.row++
	}
	if r.row == r.m.Timing.Rows && !r.closed && now >= r.m.Timing.End() {
		r.closed = true
		r.close(now)
	}
}

func (w *watch) value(k int, t, every float64) float64 {
	switch w.quantity {
	case scenario.Tension:
		return w.constant[k]
	case scenario.Moment:
		return 0
	}
	return w.views[k].record(w.quantity, w.means, t, every)
}

func (r *run) recorded() bool { return r.row == r.m.Timing.Rows && r.closed }
