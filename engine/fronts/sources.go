package fronts

import (
	"math"

	"github.com/tautspan/tautspan/engine/mesh"
)

// sources are all launches of the mesh's excitations.
type sources struct {
	net          *network
	end          float64
	accounts     []Account
	orders       []int
	launches     []launch
	byKind       map[kind]int
	outs, most   int     // waves collected, and how many may be
	cut          float64 // s, earliest launch that was not collected
	longestKnock float64 // s
	balanced     []bool  // of each push: its force at t = 0 holds the start shape
	startName    string
}

type kind struct{ list, index, order int }

// The lists of excitations, for telling accounts apart.
const (
	startList = iota
	pushList
	pressList
	moveList
	rollList
)

// mostOut limits the waves that are collected before a trace begins, per meeting
// allowed.
const mostOut = 8

func collect(net *network, opt Options) *sources {
	s := &sources{
		net: net, end: opt.End, byKind: map[kind]int{}, most: mostOut*opt.Most + 1000, cut: math.Inf(1),
		balanced: make([]bool, len(net.m.Pushes)), startName: opt.StartName,
	}
	s.start()
	for i := range net.m.Pushes {
		s.push(i)
	}
	for i := range net.m.Presses {
		s.press(i)
	}
	for i := range net.m.Nodes {
		if net.m.Nodes[i].Motion != nil {
			s.move(i)
		}
	}
	for i := range net.m.Rolls {
		s.roll(i)
	}
	return s
}

// short is the longest time that counts as a knock.
func (s *sources) short() float64 { return math.Max(s.net.short, 0.1*s.net.long) }

// account finds or makes the account of an excitation's fronts of one order.
func (s *sources) account(list, index, order int, name string) int {
	k := kind{list, index, order}
	a, ok := s.byKind[k]
	if !ok {
		a = len(s.accounts)
		s.byKind[k] = a
		s.accounts = append(s.accounts, Account{Excite: name, Quantity: frontNames[order][0], Unit: frontNames[order][1]})
		s.orders = append(s.orders, order)
	}
	return a
}

func (s *sources) add(l launch) {
	if !(l.time <= s.end) {
		return
	}
	for _, o := range l.out {
		if top := largest(o.wave); math.IsNaN(top) || math.IsInf(top, 0) {
			s.net.note("%s has no finite value at %.6g s: no front of it is listed there", l.word, l.time)
			return
		}
	}
	if s.outs += len(l.out); s.outs > s.most {
		s.cut = math.Min(s.cut, l.time)
		return
	}
	s.launches = append(s.launches, l)
}

// inside launches one wave each way from a place inside a piece. A watch at that
// very place sees it where both are alike (a place at which the quantity itself
// jumps in space has no value).
func (s *sources) inside(account int, time float64, piece int, at, back, ahead float64, word string) {
	l := launch{account: account, time: time, word: word, out: []outgoing{
		{piece: piece, s: at, wave: []float64{back}},
		{piece: piece, s: at, forward: true, wave: []float64{ahead}},
	}}
	for _, w := range s.net.pieces[piece].watched {
		if s.net.watches[w].spot.At == at && back == ahead {
			l.own = append(l.own, passage{watch: w, wave: l.out[0].wave})
		}
	}
	s.add(l)
}

// atJoint launches from a joint: node k is acted on by a step force[k] of the
// order's kind, and the wave of port p is the joint's answer at its node plus
// base[p] (nil: none).
func (s *sources) atJoint(account int, time float64, ji int, force, base []float64, word string) {
	j := &s.net.joints[ji]
	waves := make([][]float64, len(j.nodes))
	for k, f := range force {
		if f != 0 {
			waves[k] = []float64{f}
		}
	}
	v := j.answer(waves)
	l := launch{account: account, time: time, word: word}
	loud := largest(base)
	for _, w := range v {
		loud = math.Max(loud, largest(w))
	}
	for p := range j.ports {
		var out []float64
		if base != nil && base[p] != 0 {
			out = []float64{base[p]}
		}
		if w := v[j.ports[p].node]; w != nil {
			out = plus(out, w, 1)
		}
		if largest(out) <= dust*loud {
			continue
		}
		piece := j.ports[p].piece
		o := outgoing{piece: piece, forward: j.ports[p].end == 0, wave: out}
		if !o.forward {
			o.s = s.net.pieces[piece].Length
		}
		l.out = append(l.out, o)
	}
	for k, node := range j.nodes {
		if v[k] != nil {
			for _, w := range s.net.atNode[node] {
				l.own = append(l.own, passage{watch: w, wave: v[k]})
			}
		}
	}
	if len(l.out) > 0 {
		s.add(l)
	}
}

// place resolves a spot: inside (piece, at) or a joint and the node's index in it.
func (s *sources) place(spot mesh.Spot) (piece int, at float64, joint, node int) {
	n := spot.Node
	if n < 0 {
		p := &s.net.pieces[spot.Piece]
		switch {
		case spot.At <= 0:
			n = p.From
		case spot.At >= p.Length:
			n = p.To
		default:
			return spot.Piece, spot.At, -1, -1
		}
	}
	joint = s.net.jointOf[n]
	for k, i := range s.net.joints[joint].nodes {
		if i == n {
			node = k
		}
	}
	return -1, 0, joint, node
}

// push launches from a point force: F/(sum Z + C) at a value jump, the same of
// its slope at a slope jump, J/(sum Z + C) for a knock.
func (s *sources) push(i int) {
	p := &s.net.m.Pushes[i]
	_, _, ji, _ := s.place(p.At)
	if ji >= 0 && s.net.joints[ji].held {
		s.net.note("%s acts on a held place: it starts no front", p.Name)
		return
	}
	f := func(t float64) float64 { return p.Force.At(t, 0) }
	point := func(order int, time, amount float64) {
		account := s.account(pushList, i, order, p.Name)
		piece, at, ji, k := s.place(p.At)
		if piece >= 0 {
			a := amount / (2 * s.net.pieces[piece].z)
			s.inside(account, time, piece, at, a, a, p.Name)
			return
		}
		force := make([]float64, len(s.net.joints[ji].nodes))
		force[k] = amount
		s.atJoint(account, time, ji, force, nil, p.Name)
	}
	if ks, ok := knocksOf(f, p.Force.Breaks, s.end, s.short()); ok && !s.balanced[i] {
		for _, k := range ks {
			s.longestKnock = math.Max(s.longestKnock, k.to-k.from)
			point(ofDisplacement, k.from, k.impulse)
		}
		s.net.note("%s is a knock of %.4g s: its fronts are the displacement steps of its impulse, %.4g N s", p.Name, ks[0].to-ks[0].from, ks[0].impulse)
		return
	}
	listed := false
	for _, j := range jumpsOf(f, p.Force.Breaks, s.end, 0) {
		switch {
		case j.order == 0 && (j.time > 0 || !s.balanced[i]):
			point(ofVelocity, j.time, j.value)
		case j.order == 1:
			point(ofAcceleration, j.time, j.slope)
		default:
			continue
		}
		listed = true
	}
	if !listed {
		s.net.note("%s has no jump that starts a front of displacement, velocity or acceleration: none is listed", p.Name)
	}
}

// press launches from a force per length p that jumps by dp at one time: each
// piece is accelerated by P = dp/m at once (a short press: given the velocity
// P = J/m), which nodes and the edges of the stretch answer by waves. At an edge
// these are -+[P]/2; at a node the answer to 2 sum Z (P/2), less P in each piece
// (superposition of a uniform motion and waves; derived). Whether it is short,
// and when it jumps, is judged at the ends and the middle of the stretch.
func (s *sources) press(i int) {
	p := &s.net.m.Presses[i]
	if len(p.Parts) == 0 {
		return
	}
	first, last := p.Parts[0], p.Parts[len(p.Parts)-1]
	from, to := first.Origin+first.From, last.Origin+last.To
	probes := [3]float64{from, (from + to) / 2, to}
	order, times := ofVelocity, map[float64]bool{}
	for _, x := range probes {
		if ks, ok := s.knocksAt(p, x); ok {
			for _, k := range ks {
				times[k.from] = true
				s.longestKnock = math.Max(s.longestKnock, k.to-k.from)
			}
		} else if len(s.jumpsAt(p, x)) > 0 {
			order = ofAcceleration
		}
	}
	if order == ofAcceleration {
		times = map[float64]bool{}
		for _, x := range probes {
			for t := range s.jumpsAt(p, x) {
				times[t] = true
			}
		}
	}
	if len(times) == 0 {
		s.net.note("%s has no jump that starts a front of displacement, velocity or acceleration: none is listed", p.Name)
		return
	}
	if order == ofVelocity {
		s.net.note("%s is a short press: its fronts are the velocity steps of its impulse", p.Name)
	}
	known := map[float64]map[float64]float64{} // place -> time -> amount
	amount := func(x, t float64) float64 {
		if known[x] == nil {
			known[x] = map[float64]float64{}
			if order == ofAcceleration {
				known[x] = s.jumpsAt(p, x)
			} else if ks, ok := s.knocksAt(p, x); ok {
				for _, k := range ks {
					known[x][k.from] = k.impulse
				}
			}
		}
		return known[x][t]
	}
	account := s.account(pressList, i, order, p.Name)
	for _, t := range sortedBreaks(p.Force.Breaks, s.end) {
		if times[t] {
			s.field(account, t, p.Name, p.Parts, func(x float64) float64 { return amount(x, t) })
		}
	}
}

// knocksAt is knocksOf of a press at one place.
func (s *sources) knocksAt(p *mesh.Press, x float64) ([]knock, bool) {
	return knocksOf(func(t float64) float64 { return p.Force.At(t, x) }, p.Force.Breaks, s.end, s.short())
}

// jumpsAt are the value jumps of a press at one place, by time.
func (s *sources) jumpsAt(p *mesh.Press, x float64) map[float64]float64 {
	out := map[float64]float64{}
	for _, j := range jumpsOf(func(t float64) float64 { return p.Force.At(t, x) }, p.Force.Breaks, s.end, 0) {
		if j.order == 0 {
			out[j.time] = j.value
		}
	}
	return out
}

// field launches what a uniform motion amount(x)/m of parts of pieces, begun at
// one instant, calls forth at its edges and at the nodes it reaches.
func (s *sources) field(account int, time float64, word string, parts []mesh.Part, amount func(x float64) float64) {
	type load struct{ force, base []float64 }
	joints := map[int]*load{}
	var order []int
	for _, part := range parts {
		p := &s.net.pieces[part.Piece]
		for e, at := range [2]float64{part.From, part.To} {
			motion := amount(part.Origin+at) / p.MassPerLength
			if motion == 0 {
				continue
			}
			atEnd := (e == 0 && at <= 1e-12*p.Length) || (e == 1 && at >= p.Length*(1-1e-12))
			if !atEnd {
				jump := motion // rises at the stretch's start, falls at its end
				if e == 1 {
					jump = -motion
				}
				s.inside(account, time, part.Piece, at, jump/2, -jump/2, word)
				continue
			}
			en := p.ends[e]
			j := &s.net.joints[en.joint]
			if joints[en.joint] == nil {
				joints[en.joint] = &load{make([]float64, len(j.nodes)), make([]float64, len(j.ports))}
				order = append(order, en.joint)
			}
			joints[en.joint].force[j.ports[en.port].node] += p.z * motion
			joints[en.joint].base[en.port] -= motion
		}
	}
	for _, ji := range order {
		s.atJoint(account, time, ji, joints[ji].force, joints[ji].base, word)
	}
}

// move launches from a support that moves as told: every piece there takes over
// the jump of its displacement, velocity or acceleration.
func (s *sources) move(node int) {
	nd := &s.net.m.Nodes[node]
	ji := s.net.jointOf[node]
	j := &s.net.joints[ji]
	name := s.net.namesOf(j, nil)[0]
	send := func(order int, time float64, amount func(p port) float64) {
		base := make([]float64, len(j.ports))
		for i, p := range j.ports {
			base[i] = amount(p)
		}
		s.atJoint(s.account(moveList, node, order, name), time, ji, nil, base, name)
	}
	// The mesh takes the velocity of a given displacement by differences with
	// steps of a millionth of the time grid, which no slope may look into.
	floor := 1e-5 * (s.net.m.Timing.End() + s.net.m.Timing.Every)
	us := jumpsOf(nd.Motion.Displacement, nd.Motion.Breaks, s.end, 0)
	vs := jumpsOf(nd.Motion.Velocity, nd.Motion.Breaks, s.end, floor)
	listed := false
	for i, u := range us {
		// Before t = 0 the support stands as its pieces start.
		before := func(p port, rate bool) float64 {
			if u.time > 0 {
				return 0
			}
			return s.net.pieces[p.piece].startAt(p.end, rate)
		}
		switch v := vs[i]; {
		case u.order == 0 && math.Abs(u.value-before(j.ports[0], false)) > valueNoise*math.Abs(u.value):
			send(ofDisplacement, u.time, func(p port) float64 { return u.value - before(p, false) })
		case v.order == 0 && math.Abs(v.value-before(j.ports[0], true)) > valueNoise*math.Abs(v.value):
			send(ofVelocity, u.time, func(p port) float64 { return v.value - before(p, true) })
		case v.order == 1:
			send(ofAcceleration, u.time, func(port) float64 { return v.slope })
		default:
			continue
		}
		listed = true
	}
	if !listed {
		s.net.note("the motion of %s has no jump that starts a front of displacement, velocity or acceleration: none is listed", name)
	}
}

// rollMost is the share of the wave speed up to which a rolling load is taken: towards 1 the wave ahead grows without bound. Common practice, no source.
const rollMost = 0.95

// roll launches where a travelling load enters, changes piece and leaves: on a
// piece it sends F/(2Z(1-V/c)) ahead and F/(2Z(1+V/c)) behind (Doppler form of
// F/2Z; derived from the jump of T du/dx at a moving point, compare Fryba,
// Vibration of Solids and Structures under Moving Loads, from memory).
func (s *sources) roll(i int) {
	r := &s.net.m.Rolls[i]
	for _, pi := range s.net.m.Lines[r.Line].Pieces {
		if c := s.net.pieces[pi].c; r.Speed >= rollMost*c {
			s.net.note("%s travels at %.4g m/s, more than %g of the wave speed %.4g m/s: its fronts are not listed", r.Name, r.Speed, rollMost, c)
			return
		}
	}
	if !(r.Speed > 0) {
		s.net.note("%s does not travel: its fronts are not listed", r.Name)
		return
	}
	account := s.account(rollList, i, ofVelocity, r.Name)
	for _, pi := range s.net.m.Lines[r.Line].Pieces {
		p := &s.net.pieces[pi]
		if r.From >= p.X0+p.Length {
			continue
		}
		enter := math.Max(r.From, p.X0)
		behind, ahead := r.Force/(2*p.z*(1+r.Speed/p.c)), r.Force/(2*p.z*(1-r.Speed/p.c))
		time := r.Starting + (enter-r.From)/r.Speed
		if at := enter - p.X0; at > 0 {
			s.inside(account, time, pi, at, behind, ahead, r.Name)
		} else {
			s.rollAtEnd(account, time, pi, 0, behind, ahead, r.Name)
		}
		s.rollAtEnd(account, r.Starting+(p.X0+p.Length-r.From)/r.Speed, pi, 1, -behind, -ahead, r.Name)
	}
}

// rollAtEnd lets a load enter a piece at its start (end 0) or leave it at its
// end (1): the wave towards the node is scattered there, the other sets out.
// With the load leaving, behind and ahead are negative.
func (s *sources) rollAtEnd(account int, time float64, piece, e int, behind, ahead float64, word string) {
	in, out := behind, ahead
	if e == 1 {
		in, out = ahead, behind
	}
	en := s.net.pieces[piece].ends[e]
	j := &s.net.joints[en.joint]
	force, base := make([]float64, len(j.nodes)), make([]float64, len(j.ports))
	force[j.ports[en.port].node] = 2 * s.net.pieces[piece].z * in
	base[en.port] = out - in
	s.atJoint(account, time, en.joint, force, base, word)
}
