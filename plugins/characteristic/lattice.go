package characteristic

import "math"

// lattice carries what the loss's source r adds to the waves of a piece: phi
// along f and psi along g, on n cells that a wave crosses in one lattice step,
//
//	phi_j(s+ds) = E (phi_(j-1)(s) + ds/2 r_(j-1)(s)) + ds/2 r_j(s+ds),  E = exp(-gamma ds),
//	r_j(s+ds) = E r_j(s) + gamma^2 ds/4 (E u_j(s) + u_j(s+ds)),
//
// second order in ds, with a factor gamma^2. It keeps the piece's shape u at its
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
	r, u     []float64
	slot     []int      // of each source, the point at its right
	before   [2]float64 // u at the ends one step earlier
	taps     []tap
	ends     [2]*history // psi at x = 0, phi at x = L
	viscous  float64     // N s/m^2
	account  energy
	latest   energy // of the last step
}

func newLattice(p *line, cells int, span, tol float64, places []float64) *lattice {
	l := &lattice{p: p, n: cells, ds: p.tau / float64(cells), viscous: 2 * p.mass * p.gamma}
	l.e = p.decay(l.ds)
	for _, s := range []*[]float64{&l.f, &l.g, &l.phi, &l.psi, &l.r, &l.u} {
		*s = make([]float64, cells+1)
	}
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
	l.before = [2]float64{l.u[0] - l.ds*v(0), l.u[l.n] - l.ds*v(l.p.length)}
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
		l.f[j] = l.e * l.f[j-1]
		l.phi[j] = l.e * (l.phi[j-1] + half*l.r[j-1])
	}
	for j := 0; j < n; j++ {
		l.g[j] = l.e * l.g[j+1]
		l.psi[j] = l.e * (l.psi[j+1] + half*l.r[j+1])
	}
	l.f[0], l.phi[0] = p.sent[0].at(t1, 1, 0), 0
	l.g[n], l.psi[n] = p.sent[1].at(t1, 1, 0), 0
	h := p.length / float64(n)
	for i, src := range p.sources {
		j := l.slot[i]
		lag := (float64(j)*h - src.x) / p.c
		l.f[j] += p.decay(lag) * src.h.at(t1-lag, 1, 0)
		lag = (src.x - float64(j-1)*h) / p.c
		l.g[j-1] += p.decay(lag) * src.h.at(t1-lag, 1, 0)
	}
	l.settle(t1)
	l.step++
	l.record()
}

// settle finds r and u at the new time: u_j holds r_j with a weight of at most
// (gamma ds)^2/4, which is solved for. It books losses and work by differences.
func (l *lattice) settle(t1 float64) {
	p, n := l.p, l.n
	h := p.length / float64(n)
	w := 0.25 * p.gamma * p.gamma * l.ds
	half := 0.5 * l.ds
	l.before = [2]float64{l.u[0], l.u[n]}
	var blown, impulse []float64
	l.latest = energy{}
	if p.wind != nil {
		blown, impulse = p.wind.u[(l.step+1)%windRing], p.wind.impulse[(l.step+1)%windRing]
	}
	for j := 0; j <= n; j++ {
		free := l.f[j] + l.g[j] + l.phi[j] + l.psi[j]
		for i := range p.rolls {
			f, g := p.rolls[i].waves(float64(j)*h, t1, 0)
			free += f + g
		}
		if blown != nil {
			free += blown[j]
		}
		known := l.e * (l.r[j] + w*l.u[j])
		share, own := l.ds, h // what r adds to u; the length that is the point's own
		if j == 0 || j == n {
			share, own = half, 0.5*h
		}
		u := (free + share*known) / (1 - share*w)
		l.r[j] = known + w*u
		if j > 0 {
			l.phi[j] += half * l.r[j]
		}
		if j < n {
			l.psi[j] += half * l.r[j]
		}
		du := u - l.u[j]
		l.latest.lost += own * l.viscous * du * du / l.ds
		if impulse != nil {
			l.latest.work += own * 2 * p.mass * impulse[j] * du / l.ds
		}
		l.u[j] = u
	}
	l.account.lost += l.latest.lost
	l.account.work += l.latest.work
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
	for i, j := range [2]int{0, n} {
		r := l.e*(l.r[j]+w*l.u[j]) + w*(2*l.u[j]-l.before[i])
		inner := l.psi[1] + half*l.r[1]
		if i == 1 {
			inner = l.phi[n-1] + half*l.r[n-1]
		}
		l.ends[i].put(l.step+1, l.e*inner+half*r)
	}
}
