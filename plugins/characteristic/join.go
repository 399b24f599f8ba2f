package characteristic

import (
	"math"
	"sort"

	"github.com/tautspan/tautspan/engine/mesh"
	"github.com/tautspan/tautspan/engine/solver"
)

// makeClusters joins linked nodes, gives every node its ports and breaks and
// starts them.
func (r *run) makeClusters(lay *Layout, loads map[int][]*load) error {
	m := r.m
	free := func(i int) bool { return !m.Nodes[i].Fixed && m.Nodes[i].Motion == nil }
	set := make([]int, len(m.Nodes))
	for i := range set {
		set[i] = i
	}
	for changed := true; changed; {
		changed = false
		for i := range m.Links {
			a, b := m.Links[i].A, m.Links[i].B
			if free(a) && free(b) && set[a] != set[b] {
				set[a] = min(set[a], set[b])
				set[b] = set[a]
				changed = true
			}
		}
	}
	attached := m.Attached()
	groups := lay.groups(m)
	index := make(map[int]int) // group number to index into r.groups
	r.joints = make([]*joint, len(m.Nodes))
	for i := range m.Nodes {
		if set[i] != i {
			continue
		}
		c := &cluster{delta: lay.Step / float64(lay.Substeps[i]), tol: r.tol, hrel: r.hrel}
		for k := i; k < len(m.Nodes); k++ {
			if set[k] == i {
				c.joints = append(c.joints, r.newJoint(k, attached[k], loads[k], lay, c.delta))
			}
		}
		for k := range c.joints {
			r.joints[c.joints[k].node] = &c.joints[k]
		}
		g, ok := index[groups[i]]
		if !ok {
			g = len(r.groups)
			index[groups[i]] = g
			r.groups = append(r.groups, group{substeps: lay.Substeps[i]})
		}
		r.groups[g].clusters = append(r.groups[g].clusters, c)
		r.clusters = append(r.clusters, c)
	}
	for _, c := range r.clusters {
		r.addTies(c)
		r.makeLaws(c)
		j := &c.joints[0]
		light := len(c.joints) == 1 && len(c.ties) == 0 && len(c.brackets) == 0 && len(c.laws) == 0
		if j.kind != dynamic || light && j.mass == 0 && j.spring == 0 && j.r > 0 && lossless(j) {
			c.simple = true
			c.x = make([]float64, 1)
			if j.kind == dynamic {
				j.kind = instant
			}
		} else if !c.build() {
			return &solver.FaultError{Solver: name, What: "node " + m.Nodes[j.node].Name + " has nothing that tells how it moves"}
		}
		if lay.Substeps[j.node] > 1 {
			r.note("A short piece is followed with %d steps to one of the rest of the network.", lay.Substeps[j.node])
		}
	}
	r.begin()
	return nil
}

func lossless(j *joint) bool {
	for i := range j.ports {
		if j.ports[i].p.gamma > 0 {
			return false
		}
	}
	return true
}

func (r *run) newJoint(i int, at []mesh.Attachment, loads []*load, lay *Layout, delta float64) joint {
	n := &r.m.Nodes[i]
	j := joint{node: i, kind: dynamic, mass: n.Mass, spring: n.Spring, dashpot: n.Dashpot, loads: loads, motion: n.Motion, u: n.Start}
	switch {
	case n.Motion != nil:
		j.kind = moved
	case n.Fixed:
		j.kind = fixed
	}
	for _, b := range n.Brackets {
		if b.C > 0 && math.IsInf(b.K, 1) {
			j.dashpot += b.C
		}
	}
	j.r = j.dashpot
	for _, a := range at {
		w := r.lines[a.Piece]
		q := port{p: w, end: a.End, z: w.z, out: w.sent[0]}
		far := w.sent[1]
		if a.End {
			far, q.out = w.sent[0], w.sent[1]
		}
		q.far = reader{h: far, delay: w.tau, factor: w.decay(w.tau)}
		q.far.prepare(delta)
		for _, s := range w.sources {
			lag := s.x / w.c
			if a.End {
				lag = (w.length - s.x) / w.c
			}
			rd := reader{h: s.h, delay: lag, factor: w.decay(lag)}
			rd.prepare(delta)
			q.sources = append(q.sources, rd)
		}
		j.r += w.z
		j.ports = append(j.ports, q)
	}
	if r.watched(i) {
		j.own = newHistory(delta, 2*window(r.m)+12*lay.Step+r.coarsest, 64, r.tol)
	}
	r.addBreaks(&j)
	return j
}

func (r *run) watched(node int) bool {
	for i := range r.m.Channels {
		for _, s := range r.m.Channels[i].Spots {
			if s.Node == node {
				return true
			}
		}
	}
	return false
}

// addBreaks lists the times at which something new reaches a node that no
// history announces.
func (r *run) addBreaks(j *joint) {
	type moment struct {
		t     float64
		order int
	}
	var all []moment
	end := r.m.Timing.End() + window(r.m) + 100*r.step
	for _, l := range j.loads {
		for _, t := range l.breaks {
			all = append(all, moment{t, l.order(t, r.step)})
		}
	}
	if j.kind == moved {
		for _, t := range breaksOf(j.motion.Breaks, end, r.tol) {
			all = append(all, moment{t, r.jerk(j, t)})
		}
	}
	for p := range j.ports {
		q := &j.ports[p]
		for i := range q.p.rolls {
			for _, t := range q.p.rolls[i].arrivals(q.p, q.end) {
				if t <= end {
					all = append(all, moment{t, 1})
				}
			}
		}
	}
	n := &r.m.Nodes[j.node]
	if n.Start != 0 || n.StartRate != 0 {
		all = append(all, moment{0, 1})
	}
	sort.Slice(all, func(a, b int) bool { return all[a].t < all[b].t })
	for _, m := range all {
		if k := len(j.breaks); k > 0 && m.t <= j.breaks[k-1]+r.tol {
			j.orders[k-1] = min(j.orders[k-1], m.order)
			continue
		}
		j.breaks = append(j.breaks, m.t)
		j.orders = append(j.orders, m.order)
	}
}

// jerk is the lowest derivative of a prescribed motion that jumps at t.
func (r *run) jerk(j *joint, t float64) int {
	n := &r.m.Nodes[j.node]
	at := func(t float64) float64 {
		if t < 0 {
			return n.Start + t*n.StartRate
		}
		return j.motion.Displacement(t)
	}
	return jumps(at, t, r.step, largest(at, breaksOf(j.motion.Breaks, math.Inf(1), r.tol)))
}

// addTies gives a cluster its links and brackets.
func (r *run) addTies(c *cluster) {
	m := r.m
	where := make(map[int]int)
	for i := range c.joints {
		where[c.joints[i].node] = i
	}
	for i := range c.joints {
		j := &c.joints[i]
		if j.kind != dynamic {
			continue
		}
		for _, b := range m.Nodes[j.node].Brackets {
			if b.C > 0 && b.K > 0 && !math.IsInf(b.K, 1) {
				c.brackets = append(c.brackets, bracket{joint: i, k: b.K, c: b.C, q: b.Start})
			}
		}
	}
	for i := range m.Links {
		l := &m.Links[i]
		if l.A == l.B || l.Spring == 0 && l.Dashpot == 0 {
			continue
		}
		a, inA := where[l.A]
		b, inB := where[l.B]
		inA = inA && c.joints[a].kind == dynamic
		inB = inB && c.joints[b].kind == dynamic
		told := func(node int) *joint {
			n := &m.Nodes[node]
			j := &joint{node: node, kind: fixed, motion: n.Motion, u: n.Start}
			if n.Motion != nil {
				j.kind = moved
			}
			return j
		}
		switch {
		case l.Slack && inA && inB:
			c.slacken(l, a, b, nil, true)
		case l.Slack && inA:
			c.slacken(l, a, -1, told(l.B), true)
		case l.Slack && inB:
			c.slacken(l, b, -1, told(l.A), false)
		case inA && inB:
			c.ties = append(c.ties, tie{a: a, b: b, k: l.Spring, c: l.Dashpot})
			c.light = c.light || l.Dashpot > 0
		case inA:
			c.ties = append(c.ties, tie{a: a, b: -1, other: told(l.B), k: l.Spring, c: l.Dashpot})
		case inB:
			c.ties = append(c.ties, tie{a: b, b: -1, other: told(l.A), k: l.Spring, c: l.Dashpot})
		}
	}
	c.tellBreaks(r)
}

// tellBreaks makes the breaks of a moved node at the far side of a link known
// here.
func (c *cluster) tellBreaks(r *run) {
	for _, t := range c.ties {
		if t.other == nil || t.other.kind != moved {
			continue
		}
		r.addBreaks(t.other)
		a := &c.joints[t.a]
		for k, at := range t.other.breaks {
			i := sort.SearchFloat64s(a.breaks, at)
			a.breaks = append(a.breaks[:i], append([]float64{at}, a.breaks[i:]...)...)
			a.orders = append(a.orders[:i], append([]int{t.other.orders[k] + 1}, a.orders[i:]...)...)
		}
	}
}

// begin sets the waves that come in at t = 0 and the states that go with them.
func (r *run) begin() {
	for _, c := range r.clusters {
		for i := range c.joints {
			j := &c.joints[i]
			for p := range j.ports {
				q := &j.ports[p]
				q.a = q.far.at(0, -1, 0)
				sent := q.out.get(0)
				if b := j.u - q.a; math.Abs(b-sent) > 1e-9*(math.Abs(b)+math.Abs(sent)) {
					// The node does not stand where the piece ends.
					q.out.mark(breakpoint{t: 0, left: sent, right: b, weight: 1, order: 0})
				}
			}
			if j.own != nil {
				j.own.buf[0] = j.u
				for k := 1; k < len(j.own.buf)/2; k++ {
					j.own.buf[-k&j.own.mask] = j.u - float64(k)*j.own.delta*r.m.Nodes[j.node].StartRate
				}
				j.own.mark(breakpoint{t: 0, left: j.u, right: j.u, weight: 1, order: 1})
			}
		}
		c.start(r.m)
	}
}
