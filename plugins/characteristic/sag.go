package characteristic

import (
	"github.com/tautspan/tautspan/engine/formula"
	"github.com/tautspan/tautspan/engine/mesh"
)

// sagging is the extra tension h of one line. It pulls alike all along a piece,
// so that u = f + g + s(t) there, with f and g as ever and
//
//	m s'' + viscous s' = -w h,  h = G (sum w (carried + drifted + L s) + sum w_j u_j).
//
// A node feels Z (2a + s - u)' of each piece, and sends b = u - a - s. The
// integrals of the waves need no mesh: what the ends have sent and has not left
// yet, and of the lattices' share (r of the package's comment, in all R)
//
//	R' + gamma R = gamma^2/2 integral of (f+g) + Q/(2m),  drifted' + gamma drifted = 2R - c (phi_L + psi_0).
//
// h runs ahead of a step as the cubic through its last values and is put right
// after it.
type sagging struct {
	g     float64 // G, N/m
	dt    float64 // s
	step  int
	parts []*sway
	nodes []hanging
	last  [4]float64 // N, h at the last times, newest first
	known int        // of them
	poly  [4]float64 // N, h over the present step by powers of the share done
}

// hanging is a node with a mass that makes sag.
type hanging struct {
	j *joint
	w float64
}

// sway is one piece of a sagging line.
type sway struct {
	sag     *sagging
	p       *line
	w       float64 // 1/m
	flows   []flow
	r       float64 // m^2/s, R
	rate    float64 // m^2/s^2, dR/dt
	drifted float64 // m^2
	press   func(t float64) (q float64)
	course  [8]float64 // m, s over the present step by powers of the share done
	past    *history   // s
}

// flow is the integral over place of a wave that leaves an end or a source.
type flow struct {
	h    *history
	span float64 // s on its way
	sum  float64 // m^2
}

// makeSags gives sagging lines their extra tension.
func (r *run) makeSags(lag float64) {
	m := r.m
	for i := range m.Lines {
		sag := m.Lines[i].Sag
		if sag == nil || sag.Stiffness == 0 {
			continue
		}
		g := &sagging{g: sag.Stiffness, dt: r.step}
		for k, pi := range m.Lines[i].Pieces {
			p := r.lines[pi]
			s := &sway{sag: g, p: p, w: sag.Pieces[k], past: newHistory(r.step, 2*lag+12*r.step+2*r.coarsest, 4, r.tol)}
			s.past.mark(breakpoint{weight: 1, order: 2})
			s.flows = append(s.flows, flow{h: p.sent[0], span: p.tau}, flow{h: p.sent[1], span: p.tau})
			for _, src := range p.sources {
				s.flows = append(s.flows, flow{h: src.h, span: (p.length - src.x) / p.c}, flow{h: src.h, span: src.x / p.c})
			}
			for k := range s.flows {
				f := &s.flows[k]
				sum, _ := f.h.leaky(p.gamma, -f.span, 0)
				f.sum = p.c * sum
			}
			if p.wind != nil {
				s.press = pressOf(m, pi)
				s.rate = s.press(0) / (2 * p.mass)
			}
			p.sway = s
			g.parts = append(g.parts, s)
		}
		for n, w := range sag.Nodes {
			if j := r.joints[n]; j.kind == dynamic {
				j.pulled, j.weighs = g, w
				g.nodes = append(g.nodes, hanging{j, w})
			}
		}
		g.keep(g.tension())
		g.predict()
		r.sags = append(r.sags, g)
	}
}

// pressOf is the force per length of a piece, integrated over it by Gauss's three
// points on 16 panels of each press.
func pressOf(m *mesh.Mesh, piece int) func(t float64) float64 {
	places, weights := gauss()
	return func(t float64) float64 {
		sum := 0.0
		for i := range m.Presses {
			q := &m.Presses[i]
			for _, part := range q.Parts {
				if part.Piece != piece || t < 0 {
					continue
				}
				if !q.Force.Value.UsesArg(formula.ArgX) {
					sum += (part.To - part.From) * q.Force.Value.At(t, 0)
					continue
				}
				const panels = 16
				h := (part.To - part.From) / panels
				for k := range panels {
					for g, x := range places {
						sum += weights[g] * h * q.Force.Value.At(t, part.Origin+part.From+(float64(k)+x)*h)
					}
				}
			}
		}
		return sum
	}
}

// integral is that of f and g over the piece.
func (s *sway) integral() float64 {
	sum := s.drifted
	for i := range s.flows {
		sum += s.flows[i].sum
	}
	return sum
}

// tension is h where the integrals and the courses' ends stand.
func (g *sagging) tension() float64 {
	h := 0.0
	for _, s := range g.parts {
		h += s.w * (s.integral() + s.p.length*s.course[0])
	}
	for _, n := range g.nodes {
		h += n.w * n.j.u
	}
	return g.g * h
}

func (g *sagging) keep(h float64) {
	copy(g.last[1:], g.last[:3])
	g.last[0] = h
	g.known = min(g.known+1, len(g.last))
}

// powers are the coefficients of the polynomial through the known values, by
// powers of steps after the newest.
func (g *sagging) powers() (c [4]float64) {
	v := g.last
	for j := 1; j < len(v); j++ {
		for i := len(v) - 1; i >= j; i-- {
			v[i] = v[i-1] - v[i]
		}
	}
	for i := g.known; i < len(v); i++ {
		v[i] = 0
	}
	return [4]float64{v[0], v[1] + v[2]/2 + v[3]/3, v[2]/2 + v[3]/2, v[3] / 6}
}

// predict extrapolates h over the next step and lets the pieces follow.
func (g *sagging) predict() {
	g.poly = g.powers()
	for _, s := range g.parts {
		s.follow()
	}
}

// follow fills the course from its first two coefficients, by its equation's
// power series.
func (s *sway) follow() {
	dt := s.sag.dt
	for n := 0; n+2 < len(s.course); n++ {
		h := 0.0
		if n < len(s.sag.poly) {
			h = s.sag.poly[n]
		}
		v := -s.w/s.p.mass*dt*dt*h - 2*s.p.gamma*dt*float64(n+1)*s.course[n+1]
		s.course[n+2] = v / float64((n+1)*(n+2))
	}
}

// correct ends a step that all nodes have done: h from what the waves now are, s
// by the cubic that ends in it.
func (g *sagging) correct() {
	g.step++
	t := float64(g.step) * g.dt
	for _, s := range g.parts {
		s.gather(t)
	}
	g.keep(0)
	for range 2 {
		h := 0.0
		for _, s := range g.parts {
			h += s.w * (s.integral() + s.p.length*s.ending(1, 0))
		}
		for _, n := range g.nodes {
			h += n.w * n.j.u
		}
		g.last[0] = g.g * h
		c := g.powers()
		// From powers of x-1 to powers of x.
		g.poly = [4]float64{c[0] - c[1] + c[2] - c[3], c[1] - 2*c[2] + 3*c[3], c[2] - 3*c[3], c[3]}
		for _, s := range g.parts {
			s.follow()
		}
	}
	for _, s := range g.parts {
		u, v := s.ending(1, 0), s.ending(1, 1)
		s.course[0], s.course[1] = u, v*g.dt
		s.past.push(u)
	}
	g.predict()
}

// gather brings the integrals of the waves to time t.
func (s *sway) gather(t float64) {
	p, dt := s.p, s.sag.dt
	was := s.integral()
	for i := range s.flows {
		f := &s.flows[i]
		in, _ := f.h.leaky(p.gamma, t-dt, t)
		out, _ := f.h.leaky(p.gamma, t-dt-f.span, t-f.span)
		f.sum = p.decay(dt)*f.sum + p.c*(in-p.decay(f.span)*out)
	}
	if p.lattice == nil && p.wind == nil {
		return
	}
	e, half := p.decay(dt), p.decay(dt/2)
	feed := 0.5 * p.gamma * p.gamma
	push := func(t float64) float64 {
		if s.press == nil {
			return 0
		}
		return s.press(t) / (2 * p.mass)
	}
	now := s.integral()
	r0, rate0 := s.r, s.rate
	s.r = e*r0 + dt/6*(e*(push(t-dt)+feed*was)+4*half*(push(t-dt/2)+feed*0.5*(was+now))+push(t)+feed*now)
	s.rate = push(t) + feed*now - p.gamma*s.r
	middle := 0.5*(r0+s.r) + dt/8*(rate0-s.rate)
	s.drifted = e*s.drifted + dt/6*(e*(2*r0-p.c*s.leaving(t-dt))+4*half*(2*middle-p.c*s.leaving(t-dt/2))+2*s.r-p.c*s.leaving(t))
}

// leaving is what the lattices' shares are where they leave the piece.
func (s *sway) leaving(t float64) float64 {
	sum := 0.0
	if w := s.p.wind; w != nil {
		sum += w.ends[0].at(t, -1, 0) + w.ends[1].at(t, -1, 0)
	}
	if l := s.p.lattice; l != nil && s.p.gamma > 0 {
		sum += l.ends[0].at(t, -1, 0) + l.ends[1].at(t, -1, 0)
	}
	return sum
}

// ending is s (d = 0) or its rate (d = 1) at a share of the present step.
func (s *sway) ending(share float64, d int) float64 {
	v := 0.0
	for n := len(s.course) - 1; n >= d; n-- {
		c := s.course[n]
		if d == 1 {
			c *= float64(n) / s.sag.dt
		}
		v = v*share + c
	}
	return v
}

// at is s at a time of the present step; 0 without sag.
func (s *sway) at(t float64) float64 {
	if s == nil {
		return 0
	}
	return s.ending(t/s.sag.dt-float64(s.sag.step), 0)
}

// was is s or its rate at an earlier time; 0 without sag.
func (s *sway) was(t float64, d int) float64 {
	if s == nil {
		return 0
	}
	return s.past.at(t, 1, d)
}

// drift is the rate of s where the present step begins; 0 without sag.
func (s *sway) drift() float64 {
	if s == nil {
		return 0
	}
	return s.ending(0, 1)
}

// at is h at a time of the present step.
func (g *sagging) at(t float64) float64 {
	x := t/g.dt - float64(g.step)
	return g.poly[0] + x*(g.poly[1]+x*(g.poly[2]+x*g.poly[3]))
}
