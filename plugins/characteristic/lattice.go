package characteristic

import "math"

// lattice carries what the loss's source r adds to the waves of a piece: phi
// along f and psi along g, on n cells that a wave crosses in one lattice step,
//
//	phi_j(s+ds) = E (phi_(j-1)(s) + ds/2 r_(j-1)(s)) + ds/2 r_j(s+ds),  E = exp(-gamma ds),
//	r_j(s+ds) = E r_j(s) + gamma^2/2 (J_j + ds/2 (E v_j(s) + v_j(s+ds))),
//
// second order in ds, with a factor gamma^2. u = f + g + v: f and g are what the
// ends sent, and J is the integral of exp(-gamma (s+ds-t)) (f + g) over the step,
// which travels along with them and is taken once, at the end that sends, with
// its breaks; so a jump that runs along the line costs no order. It keeps the piece's shape u at its
// points, and therefore the books of what the loss takes and a force per length
// gives. What arrives at the ends is needed one step ahead; u there is then
// extrapolated, which enters with gamma^2 ds^2/8 only.
type lattice struct {
	p        *line
	n        int // cells
	ds, e    float64
	step     int // lattice steps done
	f, g     []float64
	phi, psi []float64
	r, u, dv []float64
	v        []float64  // u - f - g
	jf, jg   []float64  // J's two parts, over the last step
	df, dg   []float64  // what f and g gained over the last step
	squares  [2]strips  // of f_t and g_t
	shift    float64    // m, what a sagging piece moved as a whole in the last step
	apart    float64    // m^2, products of sources' waves about cells that only one of them is in
	jlast    [2]float64 // jf at the start and jg at the end, one step earlier
	slot     []int      // of each source, the point at its right
	before   [2]float64 // v at the ends one step earlier
	taps     []tap
	ends     [2]*history // psi at x = 0, phi at x = L
	viscous  float64     // N s/m^2
	account  energy
	latest   energy // of the last step
	earlier  energy // of the one before
}

func newLattice(p *line, cells int, span, tol float64, places []float64) *lattice {
	l := &lattice{p: p, n: cells, ds: p.tau / float64(cells), viscous: 2 * p.mass * p.gamma}
	l.e = p.decay(l.ds)
	for _, s := range []*[]float64{&l.f, &l.g, &l.phi, &l.psi, &l.r, &l.u, &l.dv, &l.v, &l.jf, &l.jg, &l.df, &l.dg} {
		*s = make([]float64, cells+1)
	}
	l.squares = [2]strips{newStrips(cells, l.e), newStrips(cells, l.e)}
	l.ends = [2]*history{newHistory(l.ds, span, 0, tol), newHistory(l.ds, span, 0, tol)}
	for _, x := range places {
		l.taps = append(l.taps, tap{x, newHistory(l.ds, span, 0, tol), newHistory(l.ds, span, 0, tol)})
	}
	for _, src := range p.sources {
		l.slot = append(l.slot, max(1, min(cells, int(math.Ceil(src.x/p.length*float64(cells))))))
	}
	return l
}

// begin takes the shape and the velocities at t = 0.
func (l *lattice) begin(f, g, v func(x float64) float64) {
	h := l.p.length / float64(l.n)
	for j := range l.f {
		x := float64(j) * h
		l.f[j], l.g[j] = f(x), g(x)
		l.u[j] = l.f[j] + l.g[j]
	}
	// What the first step needs was sent before t = 0.
	p := l.p
	for j := 0; j < l.n; j++ {
		lag := float64(j) * l.ds
		f, _ := p.sent[0].leaky(p.gamma, -lag-l.ds, -lag)
		g, _ := p.sent[1].leaky(p.gamma, -lag-l.ds, -lag)
		l.jf[j], l.jg[l.n-j] = p.decay(lag)*f, p.decay(lag)*g
	}
	for end := range l.squares {
		for j := l.n; j >= 0; j-- {
			t := -float64(j) * l.ds
			_, square := p.sent[end].leaky(p.gamma, t-l.ds, t)
			l.squares[end].depart(square)
		}
	}
	l.jlast = [2]float64{l.jf[0], l.jg[l.n]}
	l.predict()
}

// due tells whether the next lattice step lies within what the nodes have done.
func (l *lattice) due(now float64) bool { return float64(l.step+1)*l.ds <= now }

// advance does one lattice step; both ends' histories reach to its end.
func (l *lattice) advance() {
	p, n := l.p, l.n
	t1 := float64(l.step+1) * l.ds
	half := 0.5 * l.ds
	for j := n; j > 0; j-- {
		f := l.e * l.f[j-1]
		l.f[j], l.df[j] = f, f-l.f[j]
		l.jf[j] = l.e * l.jf[j-1]
		l.phi[j] = l.e * (l.phi[j-1] + half*l.r[j-1])
	}
	for j := 0; j < n; j++ {
		g := l.e * l.g[j+1]
		l.g[j], l.dg[j] = g, g-l.g[j]
		l.jg[j] = l.e * l.jg[j+1]
		l.psi[j] = l.e * (l.psi[j+1] + half*l.r[j+1])
	}
	l.jlast = [2]float64{l.jf[0], l.jg[n]}
	for end, first := range [2]*float64{&l.jf[0], &l.jg[n]} {
		part, square := p.sent[end].leaky(p.gamma, t1-l.ds, t1)
		*first = part
		l.squares[end].depart(square)
	}
	f, g := p.sent[0].at(t1, 1, 0), p.sent[1].at(t1, 1, 0)
	l.f[0], l.df[0], l.phi[0] = f, f-l.f[0], 0
	l.g[n], l.dg[n], l.psi[n] = g, g-l.g[n], 0
	l.apart = 0
	h := p.length / float64(n)
	for i, src := range p.sources {
		j := l.slot[i]
		lag := (float64(j)*h - src.x) / p.c
		a := l.join(0, j, src, t1-lag, p.decay(lag), &l.f[j], &l.df[j], &l.jf[j])
		lag = (src.x - float64(j-1)*h) / p.c
		b := l.join(1, j-1, src, t1-lag, p.decay(lag), &l.g[j-1], &l.dg[j-1], &l.jg[j-1])
		l.apart += 0.5 * a * b
	}
	l.settle(t1)
	l.step++
	l.record()
}

// join adds a source's wave, which left it a step before time t and faded since,
// to a wave at point j; it returns the source's own gain over the step.
func (l *lattice) join(end, j int, src *source, t, fade float64, wave, gained, part *float64) float64 {
	p := l.p
	now, last := fade*src.h.at(t, 1, 0), fade*src.h.at(t-l.ds, 1, 0)
	gain, before := now-last, *gained+last // what the wave gained by itself
	*wave += now
	*gained += now
	own, square := src.h.leaky(p.gamma, t-l.ds, t)
	*part += fade * own
	square *= fade * fade
	const even = 1e-4 // chosen
	if square*l.ds-gain*gain <= even*square*l.ds {
		square += 2 * gain * before / l.ds // the source is as good as steady
	} else {
		square += 2 * fade * fade * l.meeting(end, src, t)
	}
	if end == 1 {
		j = l.n - j
	}
	l.squares[end].add(j, square)
	return gain
}

// meeting is the integral over the step to t of a source's rate times that of the
// wave that it meets.
func (l *lattice) meeting(end int, src *source, t float64) float64 {
	p := l.p
	away := src.x / p.c
	if end == 1 {
		away = (p.length - src.x) / p.c
	}
	sum := p.decay(away) * together(src.h, p.sent[end], away, t-l.ds, t)
	for _, o := range p.sources {
		if between := (src.x - o.x) / p.c * float64(1-2*end); between > 0 {
			sum += p.decay(between) * together(src.h, o.h, between, t-l.ds, t)
		}
	}
	return sum
}

// settle finds r and u at the new time: v_j holds r_j with a weight of at most
// (gamma ds)^2/4, which is solved for. It books work by differences.
//
// Losses are viscous times the integral of u_t^2. f_t and g_t may jump; what
// their squares give travels with them and is exact, and so is their product over
// a diamond between two characteristics of either kind, the product of both gains.
// Half of the plane's diamonds are about points in mid-step, half about the
// middles between neighbours, where a step begins and where it ends. v_t is taken as straight within a step.
func (l *lattice) settle(t1 float64) {
	n := l.n
	l.before = [2]float64{l.v[0], l.v[n]}
	l.earlier, l.latest = l.latest, energy{}
	l.shift = l.p.sway.was(t1, 0) - l.p.sway.was(t1-l.ds, 0)
	lost := 0.5 * (l.point(0, 0.5*l.ds, t1) + l.point(n, 0.5*l.ds, t1))
	if l.p.wind == nil && len(l.p.rolls) == 0 {
		lost += l.points()
	} else {
		for j := 1; j < n; j++ {
			lost += l.point(j, l.ds, t1) + 0.5*(l.df[j]*l.dg[j+1]+l.df[j+1]*l.dg[j])
		}
	}
	lost += 0.5*(l.df[0]*l.dg[1]+l.df[1]*l.dg[0]) - l.apart
	lost += l.ds * (l.squares[0].sum() + l.squares[1].sum())
	l.latest.lost = lost * l.p.length / float64(n) * l.viscous / l.ds
	l.account.lost += l.latest.lost
	l.account.work += l.latest.work
}

// points is point for all inner points of a piece without wind and rolls.
func (l *lattice) points() (lost float64) {
	p := l.p
	w := 0.25 * p.gamma * p.gamma * l.ds
	half, e := 0.5*l.ds, l.e
	scale := 1 / (1 - l.ds*w)
	size := l.n
	feed := 0.5 * p.gamma * p.gamma
	f, g, phi, psi, r, u, dv := l.f[:size], l.g[:size], l.phi[:size], l.psi[:size], l.r[:size], l.u[:size], l.dv[:size]
	v, jf, jg := l.v[:size], l.jf[:size], l.jg[:size]
	df, dg := l.df[:size+1], l.dg[:size+1]
	for j := 1; j < size; j++ {
		known := e*(r[j]+w*v[j]) + feed*(jf[j]+jg[j])
		was := v[j]
		v[j] = (phi[j] + psi[j] + l.ds*known) * scale
		r[j] = known + w*v[j]
		phi[j] += half * r[j]
		psi[j] += half * r[j]
		u[j] = f[j] + g[j] + v[j]
		d := v[j] - was + l.shift
		bend := d - dv[j]
		dv[j] = d
		a, b := df[j], dg[j]
		lost += a*b + 0.5*(a*dg[j+1]+df[j+1]*b) + d*(d+2*(a+b)) + bend*bend*(1.0/12)
	}
	return lost
}

// point settles one point, to whose u the waves' sources add share times r; it
// returns its share of the square mean of u_t ds beyond those of f and g alone.
func (l *lattice) point(j int, share, t1 float64) (lost float64) {
	p, n := l.p, l.n
	h := p.length / float64(n)
	w := 0.25 * p.gamma * p.gamma * l.ds
	free := l.phi[j] + l.psi[j]
	for i := range p.rolls {
		f, g := p.rolls[i].waves(float64(j)*h, t1, 0)
		free += f + g
	}
	impulse := 0.0
	if p.wind != nil {
		free += p.wind.u[(l.step+1)%windRing][j]
		impulse = p.wind.impulse[(l.step+1)%windRing][j]
	}
	known := l.e*(l.r[j]+w*l.v[j]) + 0.5*p.gamma*p.gamma*(l.jf[j]+l.jg[j])
	was := l.v[j]
	l.v[j] = (free + share*known) / (1 - share*w)
	l.r[j] = known + w*l.v[j]
	now := l.f[j] + l.g[j] + l.v[j]
	own := h
	if j > 0 {
		l.phi[j] += 0.5 * l.ds * l.r[j]
	} else {
		own = 0.5 * h
	}
	if j < n {
		l.psi[j] += 0.5 * l.ds * l.r[j]
	} else {
		own = 0.5 * h
	}
	l.latest.work += own * 2 * p.mass * impulse * (now - l.u[j] + l.shift) / l.ds
	d := l.v[j] - was + l.shift
	bend := d - l.dv[j]
	l.u[j], l.dv[j] = now, d
	return l.df[j]*l.dg[j] + d*(d+2*(l.df[j]+l.dg[j])) + bend*bend/12
}

// record puts the ends right and appends the taps.
func (l *lattice) record() {
	l.ends[0].put(l.step, l.psi[0])
	l.ends[1].put(l.step, l.phi[l.n])
	for i := range l.taps {
		t := &l.taps[i]
		t.phi.push(between(l.phi, t.x/l.p.length))
		t.psi.push(between(l.psi, t.x/l.p.length))
	}
	l.predict()
}

// predict appends what arrives at both ends at the end of the next step, as far
// as it can be known now.
func (l *lattice) predict() {
	n := l.n
	w := 0.25 * l.p.gamma * l.p.gamma * l.ds
	half := 0.5 * l.ds
	// J of the end that has yet to send runs straight on.
	sent := [2]float64{2*l.jf[0] - l.jlast[0] + l.e*l.jg[1], 2*l.jg[n] - l.jlast[1] + l.e*l.jf[n-1]}
	for i, j := range [2]int{0, n} {
		r := l.e*(l.r[j]+w*l.v[j]) + w*(2*l.v[j]-l.before[i]) + 0.5*l.p.gamma*l.p.gamma*sent[i]
		inner := l.psi[1] + half*l.r[1]
		if i == 1 {
			inner = l.phi[n-1] + half*l.r[n-1]
		}
		l.ends[i].put(l.step+1, l.e*inner+half*r)
	}
}
