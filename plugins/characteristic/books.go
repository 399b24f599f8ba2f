package characteristic

import (
	"math"
	"slices"

	"github.com/tautspan/tautspan/engine/solver"
)

// stored is the energy by account: what was there, came and went.
func (r *run) stored() float64 {
	e := r.account()
	return r.start + e.work - e.lost
}

func (r *run) account() energy {
	e := energy{work: r.rolled}
	for _, c := range r.clusters {
		e.work += c.account.work
		e.lost += c.account.lost
	}
	for _, s := range r.sources {
		e.work += s.work
	}
	for _, l := range r.lattices {
		e.work += l.account.work
		e.lost += l.account.lost
	}
	return e
}

// close takes the stored energy at the end of the run from the waves.
func (r *run) close(now float64) {
	r.closing = r.account()
	for _, l := range r.lattices {
		// The lattice has not quite got there: the rates of its last two steps run
		// straight on.
		rest := now/l.ds - float64(l.step)
		on := rest * (1 + rest) / 2
		r.closing.work += rest*l.latest.work + on*(l.latest.work-l.earlier.work)
		r.closing.lost += rest*l.latest.lost + on*(l.latest.lost-l.earlier.lost)
	}
	r.end = r.energyAt(now)
}

func (r *run) books() solver.Energy {
	return solver.Energy{Start: r.start, End: r.end, Work: r.closing.work, Lost: r.closing.lost,
		Most: math.Max(r.most, r.end)}
}

// energyAt is the stored energy at a time that all nodes have just reached: of
// a piece, with p = (u_t - c u_x)/2 and q = (u_t + c u_x)/2,
//
//	m integral of (p^2 + q^2) dx,  p = f_t + gamma (f-g)/2,  q = g_t - gamma (f-g)/2,
//
// and of nodes, brackets and links.
func (r *run) energyAt(t float64) float64 {
	e := 0.0
	for _, w := range r.lines {
		e += w.energy(t, r.tol)
	}
	for _, c := range r.clusters {
		e += c.stored(r, t)
	}
	for _, g := range r.sags {
		e += 0.5 * g.last[0] * g.last[0] / g.g
	}
	return e
}

// energy integrates by Gauss's three points on panels of a sample each, cut at
// every break of the waves.
func (w *line) energy(t, tol float64) float64 {
	cuts := []float64{0, w.length}
	add := func(x float64) {
		if x > 0 && x < w.length {
			cuts = append(cuts, x)
		}
	}
	for _, b := range w.sent[0].breaks {
		add(w.c * (t - b.t))
	}
	for _, b := range w.sent[1].breaks {
		add(w.length - w.c*(t-b.t))
	}
	for _, s := range w.sources {
		add(s.x)
		for _, b := range s.h.breaks {
			add(s.x + w.c*(t-b.t))
			add(s.x - w.c*(t-b.t))
		}
	}
	for i := range w.rolls {
		q := &w.rolls[i]
		add(q.s0 + q.v*(t-q.tin))
		add(q.s0 + w.c*(t-q.tin))
		add(q.s0 - w.c*(t-q.tin))
	}
	slices.Sort(cuts)
	step := w.c * math.Max(w.sent[0].delta, w.sent[1].delta)
	if w.lattice != nil {
		step = w.length / float64(w.lattice.n)
	}
	places, weights := gauss()
	fields := w.fields(t)
	sum := 0.0
	for i := 1; i < len(cuts); i++ {
		a, b := cuts[i-1], cuts[i]
		if b-a <= 4*w.c*tol {
			continue
		}
		n := math.Ceil((b - a) / step)
		h := (b - a) / n
		for k := 0.0; k < n; k++ {
			for j, x := range places {
				p, q := w.rates(a+(k+x)*h, t, fields)
				sum += weights[j] * h * (p*p + q*q)
			}
		}
	}
	return w.mass * sum
}

// field is what a lattice adds to the waves at one time.
type field struct{ phi, psi, r []float64 }

// fields are the lattices' shares at time t, which their own steps need not
// hit: cubic in time for the wind, which has been ahead, and carried on along
// characteristics for the loss.
func (w *line) fields(t float64) []field {
	var out []field
	if t <= 0 {
		return out
	}
	if w.wind != nil {
		out = append(out, w.wind.at(t))
	}
	if w.lattice != nil && w.gamma > 0 {
		out = append(out, w.lattice.at(t))
	}
	return out
}

// at interpolates the wind's last shapes.
func (w *wind) at(t float64) field {
	n := w.n + 1
	out := field{make([]float64, n), make([]float64, n), make([]float64, n)}
	pos := t / w.ds
	start := max(int(math.Floor(pos))-1, 0, w.step-windRing+1)
	start = min(start, w.step-narrow+1)
	for i := 0; i < narrow; i++ {
		weight := 1.0
		for k := 0; k < narrow; k++ {
			if k != i {
				weight *= (pos - float64(start+k)) / float64(i-k)
			}
		}
		s := &w.shapes[(start+i)%windRing]
		for j := range out.phi {
			out.phi[j] += weight * s.phi[j]
			out.psi[j] += weight * s.psi[j]
			out.r[j] += weight * s.r[j]
		}
	}
	return out
}

// at carries the lattice's waves on to time t, less than a lattice step ahead.
func (l *lattice) at(t float64) field {
	n := l.n + 1
	out := field{make([]float64, n), make([]float64, n), l.r}
	d := math.Max(0, t-float64(l.step)*l.ds)
	for j := range out.phi {
		share := float64(j) / float64(l.n)
		own := math.Min(d, share*l.p.tau)
		out.phi[j] = l.p.decay(own)*between(l.phi, share-own/l.p.tau) + own*between(l.r, share-0.5*own/l.p.tau)
		own = math.Min(d, (1-share)*l.p.tau)
		out.psi[j] = l.p.decay(own)*between(l.psi, share+own/l.p.tau) + own*between(l.r, share+0.5*own/l.p.tau)
	}
	return out
}

// rates are p and q of energyAt. What the lattices add to the waves is smooth;
// its rate follows from its own equation, phi_t = r - gamma phi - c phi_x.
func (w *line) rates(x, t float64, fields []field) (p, q float64) {
	f, g := w.carried(x, t, 1, 0)
	p, q = w.carried(x, t, 1, 1)
	share := x / w.length
	for i := range fields {
		v := &fields[i]
		a, b, source := between(v.phi, share), between(v.psi, share), between(v.r, share)
		per := w.c * float64(len(v.phi)-1) / w.length
		f += a
		g += b
		p += source - w.gamma*a - per*tilt(v.phi, share)
		q += source - w.gamma*b + per*tilt(v.psi, share)
	}
	d := 0.5 * w.gamma * (f - g)
	drift := 0.5 * w.sway.drift()
	return p + d + drift, q - d + drift
}

// tilt is the derivative by the point number of a lattice field.
func tilt(v []float64, share float64) float64 {
	n := len(v) - 1
	pos := share * float64(n)
	start := max(0, min(int(math.Floor(pos))-1, n-narrow+1))
	count := min(narrow, n+1-start)
	var xs, vs [wide]float64
	for j := 0; j < count; j++ {
		xs[j], vs[j] = float64(start+j)-pos, v[start+j]
	}
	return newton(&xs, &vs, count, 1, 1)
}

// stored is what a cluster's masses and springs hold.
func (c *cluster) stored(r *run, t float64) float64 {
	e := 0.0
	n, nm := len(c.joints), len(c.massive)
	for i := range c.joints {
		j := &c.joints[i]
		if j.kind == fixed || j.kind == moved {
			continue
		}
		e += 0.5 * j.spring * j.u * j.u
	}
	if c.simple {
		return e
	}
	e += c.springs()
	c.waves(c.in[0])
	for s, i := range c.massive {
		v := 0.0
		for k, a := range c.x {
			v += c.a.at(s, k) * a
		}
		for k := 0; k < n; k++ {
			v += c.b.at(s, k) * c.in[0][k]
		}
		e += 0.5 * c.joints[i].mass * v * v
	}
	for s, q := range c.brackets {
		d := c.joints[q.joint].u - c.x[nm+n+s]
		e += 0.5 * q.k * d * d
	}
	for _, l := range c.ties {
		d := c.joints[l.a].u
		if l.b >= 0 {
			d -= c.joints[l.b].u
		} else {
			d -= l.other.u
		}
		e += 0.5 * l.k * d * d
	}
	return e
}
