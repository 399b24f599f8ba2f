package characteristic

import (
	"math"

	"github.com/tautspan/tautspan/engine/mesh"
)

// line is a piece at work: its constants, the histories of what leaves its two
// ends, what is fed in between, and its lattice, if any.
type line struct {
	length, c, z, tau float64
	tension           float64
	mass              float64 // kg/m
	gamma             float64 // 1/s, viscous/(2 mass)
	from, to          int
	sent              [2]*history // b at the start (travels as f) and at the end (as g)
	sources           []*source
	rolls             []rolling
	wind              *wind
	lattice           *lattice
	stub              bool
	sway              *sway // of a sagging line
}

// decay is what the loss leaves of a wave after time s.
func (p *line) decay(s float64) float64 {
	if p.gamma == 0 {
		return 1
	}
	return math.Exp(-p.gamma * s)
}

// carried is the d-th time derivative at place x and time t of the two waves
// without the lattice's share.
func (p *line) carried(x, t float64, side, d int) (f, g float64) {
	s := x / p.c
	f = p.decay(s) * p.sent[0].at(t-s, side, d)
	s = (p.length - x) / p.c
	g = p.decay(s) * p.sent[1].at(t-s, side, d)
	for _, src := range p.sources {
		if lag := (x - src.x) / p.c; lag >= 0 { // at the source itself: the side after it
			f += p.decay(lag) * src.h.at(t-lag, side, d)
		} else {
			g += p.decay(-lag) * src.h.at(t+lag, side, d)
		}
	}
	for i := range p.rolls {
		df, dg := p.rolls[i].waves(x, t, d)
		f += df
		g += dg
	}
	return f, g
}

// source is a point force inside a piece. It sends phi both ways,
//
//	phi' = F/(2Z) - gamma phi,
//
// and scatters nothing. It runs ahead of the nodes, since it waits for none.
type source struct {
	x      float64 // m from the piece's start
	half   float64 // 1/(2Z)
	gamma  float64
	load   *load
	h      *history
	breaks int // next of load.breaks
	per    int // samples in one step of the network
	p      *line
	taps   [2]*tap
	upto   float64 // s, work is booked to here
	u      float64 // m, there
	rate   float64 // m/s, mean of the last part
	next   int     // next of load.breaks for the books
	work   float64 // J
	// Mean and slope (Legendre) of the load over the steps that end at sample k,
	// at [k % len]; NaN for a step with a break inside.
	moments [4 * ahead][2]float64
}

// ahead is the number of steps that sources lead: a stencil's reach and one.
const ahead = 5

// advance appends the next sample, integrating between breaks of the load with
// three Gauss points (order 6).
func (s *source) advance() {
	h := s.h
	t0, phi := float64(h.newest)*h.delta, h.get(h.newest)
	end := float64(h.newest+1) * h.delta
	kept := &s.moments[(h.newest+1)%len(s.moments)]
	kept[0] = math.NaN()
	for whole := true; t0 < end; whole = false {
		t1 := end
		mark := false
		if s.breaks < len(s.load.breaks) && s.load.breaks[s.breaks] < end+h.tol {
			mark = true
			t1 = math.Max(t0, math.Min(end, s.load.breaks[s.breaks]))
			s.breaks++
		}
		if t1 > t0 {
			dt := t1 - t0
			mean, slope, sum := s.weigh(t0, dt)
			phi = phi*math.Exp(-s.gamma*dt) + s.half*dt*sum
			if whole && !mark {
				*kept = [2]float64{mean, slope}
			}
		}
		if mark {
			if o := s.load.order(t1, h.delta); o <= rounded {
				h.mark(breakpoint{t: t1, left: phi, right: phi, weight: 1, order: o})
			}
		}
		t0 = t1
	}
	h.push(phi)
}

// weigh is the load's mean and slope over t .. t+dt, and its mean with weight
// exp(-gamma (t+dt-s)).
func (s *source) weigh(t, dt float64) (mean, slope, sum float64) {
	places, weights := gauss()
	for i, x := range places {
		q := weights[i] * s.load.at(t+x*dt)
		mean += q
		slope += 3 * q * (2*x - 1)
		if s.gamma > 0 {
			q *= math.Exp(-s.gamma * dt * (1 - x))
		}
		sum += q
	}
	return mean, slope, sum
}

// book adds the work of the force up to time t, which the nodes have reached:
// by parts between breaks of the load, with the rate of the displacement taken
// as straight within a part (third order).
func (s *source) book(t float64) {
	for s.next < len(s.load.breaks) && s.load.breaks[s.next] <= t {
		s.part(s.load.breaks[s.next])
		s.rate = math.NaN()
		s.next++
	}
	s.part(t)
}

// loaded is the load's mean and slope from upto to t, a step's if it is one.
func (s *source) loaded(t, h float64) (mean, slope float64) {
	k := int(math.Round(t * s.h.inv))
	kept := &s.moments[k%len(s.moments)]
	if !math.IsNaN(kept[0]) && math.Abs(h-s.h.delta) < s.h.tol && math.Abs(float64(k)*s.h.delta-t) < s.h.tol {
		return kept[0], kept[1]
	}
	mean, slope, _ = s.weigh(s.upto, h)
	return mean, slope
}

func (s *source) part(t float64) {
	h := t - s.upto
	if h <= s.h.tol {
		return
	}
	f, g := s.p.waves(s.x, t, &s.taps, 0, -1)
	f += s.p.sway.was(t, 0)
	v := (f + g - s.u) / h
	force, slope := s.loaded(t, h)
	s.work += h * force * v
	if dv := v - s.rate; !math.IsNaN(dv) {
		s.work += h * slope * dv / 6
	}
	s.upto, s.u, s.rate = t, f+g, v
}

// gauss is Gauss's rule of three points on [0, 1]: places and weights.
func gauss() (x, w [3]float64) {
	const half = 0.3872983346207417 // sqrt(0.15)
	return [3]float64{0.5 - half, 0.5, 0.5 + half}, [3]float64{5.0 / 18, 8.0 / 18, 5.0 / 18}
}

// load is a force with its breaks in order; it is 0 before t = 0.
type load struct {
	value  func(t float64) float64
	breaks []float64
	size   float64 // its largest magnitude, as far as known
}

func (l *load) at(t float64) float64 {
	if t < 0 {
		return 0
	}
	return l.value(t)
}

// order is the lowest derivative of a massless place's displacement that jumps
// with the load at t: one more than of the load.
func (l *load) order(t, delta float64) int {
	if l.size == 0 {
		l.size = largest(l.at, l.breaks)
	}
	return 1 + jumps(l.at, t, delta, l.size)
}

// largest is the largest magnitude of a function at eight points between every
// two of its breaks and one last unit of time.
func largest(at func(t float64) float64, breaks []float64) float64 {
	most := 0.0
	for i, a := range breaks {
		b := a + 1
		if i+1 < len(breaks) {
			b = breaks[i+1]
		}
		for k := range 8 {
			if v := math.Abs(at(a + (b-a)*(float64(k)+0.5)/8)); v > most {
				most = v
			}
		}
	}
	return most
}

// jumps is the lowest derivative (0 .. 2) of a function that jumps at t by more
// than a millionth of its size in terms of one step, or 3: from the parabolas
// through three points on either side, a 64th of a step apart.
func jumps(at func(t float64) float64, t, delta, size float64) int {
	e := delta / 64
	var side [2][3]float64 // value, slope times delta, curvature times delta^2
	for s, dir := range [2]float64{-e, e} {
		f1, f2, f3 := at(t+dir), at(t+2*dir), at(t+3*dir)
		steps := delta / dir
		second := f1 - 2*f2 + f3
		side[s] = [3]float64{3*f1 - 3*f2 + f3, (-2.5*f1 + 4*f2 - 1.5*f3) * steps, second * steps * steps}
	}
	for k := range 3 {
		if !(math.Abs(side[1][k]-side[0][k]) <= 1e-6*size) {
			return k
		}
	}
	return 3
}

// rolling is a constant force on its way over one piece: at time tin it is at
// s0 and it leaves the piece at tout. A place x hears, of all moments t' of its
// passage, those with t' + |x - s0 - V(t'-tin)|/c <= t and the load on the right
// side of x, each with F/(2Z) exp(-gamma (t-t')) dt'.
type rolling struct {
	k, v, c, gamma float64 // k = F/(2Z), m/s
	s0, tin, tout  float64
}

func (r *rolling) waves(x, t float64, d int) (f, g float64) {
	pass := math.Inf(1) // when the load is at x
	if r.v > 0 {
		pass = r.tin + (x-r.s0)/r.v
	} else if x < r.s0 {
		pass = math.Inf(-1)
	}
	off := (x - r.s0) / r.c
	slip := r.v / r.c
	f = r.heard(t, r.tin, math.Min(r.tout, pass), (t-off-slip*r.tin)/(1-slip), 1/(1-slip), d)
	g = r.heard(t, math.Max(r.tin, pass), r.tout, (t+off+slip*r.tin)/(1+slip), 1/(1+slip), d)
	return f, g
}

// heard is the d-th derivative of k integral of exp(-gamma (t-t')) over t' from
// from to min(until, last), where last moves at the given rate with t.
func (r *rolling) heard(t, from, until, last, rate float64, d int) float64 {
	if last > until {
		last, rate = until, 0
	}
	if last <= from {
		return 0
	}
	if r.gamma == 0 {
		switch d {
		case 0:
			return r.k * (last - from)
		case 1:
			return r.k * rate
		}
		return 0
	}
	e := math.Exp(-r.gamma * (t - last))
	v := r.k / r.gamma * e * -math.Expm1(-r.gamma*(last-from))
	if d == 0 {
		return v
	}
	dv := -r.gamma*v + r.k*e*rate
	if d == 1 {
		return dv
	}
	return -r.gamma*dv + r.k*e*rate*r.gamma*(rate-1)
}

// work is what the load gives the line from t0 to t1, piece by piece between the
// fronts that pass the load.
func (r *rolling) work(p *line, t0, t1 float64) float64 {
	t0, t1 = math.Max(t0, r.tin), math.Min(t1, r.tout)
	if t1 <= t0 {
		return 0
	}
	sum := 0.0
	for t0 < t1 {
		until := r.front(p, t0+p.sent[0].tol, t1)
		sum += r.given(p, t0, until)
		t0 = until
	}
	return sum
}

// front is the first time after t at which a front of the piece passes the load,
// or end.
func (r *rolling) front(p *line, t, end float64) float64 {
	here := r.s0 - r.v*r.tin // the load is at here + v t
	meet := func(x, from, dir float64) {
		// x + dir c (s - from) = here + v s
		if s := (here - x + dir*r.c*from) / (dir*r.c - r.v); s > t && s < end && s > from {
			end = s
		}
	}
	sent := func(h *history, x, dir float64) {
		for i := h.after(t-p.tau, -1); i < len(h.breaks); i++ {
			meet(x, h.breaks[i].t, dir)
		}
	}
	sent(p.sent[0], 0, 1)
	sent(p.sent[1], p.length, -1)
	for _, s := range p.sources {
		sent(s.h, s.x, 1)
		sent(s.h, s.x, -1)
	}
	for i := range p.rolls {
		if q := &p.rolls[i]; q != r {
			meet(q.s0, q.tin, 1)
			meet(q.s0, q.tin, -1)
		}
	}
	return end
}

// given is work without a front: F times u_t, the mean of the rates on both sides
// of the load, which for its own waves is k/(1 - slip^2) less gamma times them.
func (r *rolling) given(p *line, t0, t1 float64) float64 {
	slip := r.v / r.c
	rate := r.k / (1 - slip*slip)
	places, weights := gauss()
	for i, s := range places {
		t := t0 + s*(t1-t0)
		x := math.Max(0, math.Min(p.length, r.s0+r.v*(t-r.tin)))
		f, g := p.carried(x, t, -1, 1)
		df, dg := r.waves(x, t, 1)
		v := f + g - df - dg
		if r.gamma > 0 {
			f, g = r.waves(x, t, 0)
			v -= r.gamma * (f + g)
		}
		if p.wind != nil {
			s := &p.wind.shapes[p.wind.step%windRing]
			v += p.drifting(s, x)
		}
		if l := p.lattice; l != nil {
			v += p.drifting(&field{l.phi, l.psi, l.r}, x)
		}
		rate += weights[i] * v
	}
	return 2 * p.z * r.k * rate * (t1 - t0)
}

// drifting is the rate of u that a lattice adds at place x.
func (p *line) drifting(s *field, x float64) float64 {
	share := x / p.length
	per := p.c * float64(len(s.phi)-1) / p.length
	return 2*between(s.r, share) - p.gamma*(between(s.phi, share)+between(s.psi, share)) +
		per*(tilt(s.psi, share)-tilt(s.phi, share))
}

// rollsOn is the passage of a roll over a piece, or none.
func rollsOn(m *mesh.Mesh, roll *mesh.Roll, p *mesh.Piece, w *line) (rolling, bool) {
	if p.Line != roll.Line || roll.Force == 0 {
		return rolling{}, false
	}
	r := rolling{k: roll.Force / (2 * w.z), v: roll.Speed, c: w.c, gamma: w.gamma, tin: roll.Starting}
	from := roll.From
	if r.tin < 0 {
		from, r.tin = from-roll.Speed*r.tin, 0
	}
	r.s0 = from - p.X0
	if r.s0 >= p.Length {
		return r, false
	}
	r.tout = math.Inf(1)
	if r.v > 0 {
		if r.s0 < 0 {
			r.tin -= r.s0 / r.v
			r.s0 = 0
		}
		r.tout = r.tin + (p.Length-r.s0)/r.v
	}
	return r, r.s0 >= 0
}

// arrivals are the times at which the corners of a roll's wave reach an end.
func (r *rolling) arrivals(p *line, end bool) [2]float64 {
	if end {
		return [2]float64{r.tin + (p.length-r.s0)/p.c, r.tout}
	}
	return [2]float64{r.tin + r.s0/p.c, r.tout + p.length/p.c}
}

// port is where a piece meets a node: what comes in, and whom to tell what
// leaves.
type port struct {
	p       *line
	end     bool
	z       float64
	far     reader
	sources []reader
	out     *history
	a       float64 // m, incoming now, and half the piece's sway with it
	half    float64 // m, half of the piece's sway now
	bring   float64 // strength of the break that comes in now
	level   int     // its order
	before  float64 // m, a where the part step began
	rate    float64 // m/s, mean of a' over the last part step
}

// incoming is the wave at time t, which ends the node's step k if regular.
func (q *port) incoming(k int, t float64, regular bool, which, side int) float64 {
	var a float64
	if regular {
		a = q.far.step(k, t, which)
		for i := range q.sources {
			a += q.sources[i].step(k, t, which)
		}
	} else {
		a = q.far.at(t, side, 0)
		for i := range q.sources {
			a += q.sources[i].at(t, side, 0)
		}
	}
	for i := range q.p.rolls {
		x := 0.0
		if q.end {
			x = q.p.length
		}
		f, g := q.p.rolls[i].waves(x, t, 0)
		if q.end {
			a += f
		} else {
			a += g
		}
	}
	e := 0
	if q.end {
		e = 1
	}
	if q.p.wind != nil {
		a += q.p.wind.ends[e].at(t, -1, 0)
	}
	if q.p.lattice != nil && q.p.gamma > 0 {
		a += q.p.lattice.ends[e].at(t, -1, 0)
	}
	return a
}
