package mesh

import (
	"math"
	"sort"

	"github.com/tautspan/tautspan/engine/formula"
	"github.com/tautspan/tautspan/engine/scenario"
)

// smoothness is the least power of time by which the excitations make the
// displacement grow anew somewhere, so that its derivative of that order, and no
// lower one, jumps. A point force whose own derivative of order k jumps gives
// k+1 on a string and k+3/2 on a stiff line (its wave spreads: u = t^(3/2) f(x/sqrt t)
// after a step), a distributed one k+2, a support's displacement k. A pluck is a
// force that is taken away. Where a start shape's derivative of order k jumps,
// that of time does on a string, half of it on a stiff line.
//
// Source for the stiff line: Graff, Wave Motion in Elastic Solids (1975), sec.
// 3.2, the beam under a point force (from memory).
func (b *builder) smoothness() float64 {
	least := float64(SmoothJump)
	note := func(order float64) { least = math.Min(least, order) }
	point := func(at Spot) float64 {
		if b.stiffAt(at) {
			return 1.5
		}
		return 1
	}
	for _, p := range b.net.Plucks {
		if p.Until <= 0 {
			note(point(b.spot(p.At)))
		}
	}
	for _, p := range b.m.Pushes {
		note(point(p.At) + float64(b.historyJump(p.Force)))
	}
	for _, p := range b.m.Presses {
		note(2 + float64(b.historyJump(p.Force)))
	}
	for range b.m.Rolls {
		note(1)
	}
	for _, mv := range b.net.Moves {
		note(float64(int(mv.Kind) + b.historyJump(mv.Motion)))
	}
	for _, s := range b.net.Starts {
		order := float64(b.startJump(s))
		if b.stiffAlong(s.Along) && order < SmoothJump {
			order /= 2
		}
		note(order)
	}
	return least
}

// stiffAt tells whether a point force there acts on bending stiffness: at a node
// one piece with it is enough.
func (b *builder) stiffAt(at Spot) bool {
	if at.Node < 0 {
		return b.m.Pieces[at.Piece].Bending > 0
	}
	for i := range b.m.Pieces {
		if p := &b.m.Pieces[i]; p.Bending > 0 && (p.From == at.Node || p.To == at.Node) {
			return true
		}
	}
	return false
}

func (b *builder) stiffAlong(s scenario.SpanOf) bool {
	for _, part := range b.along(s) {
		if b.m.Pieces[part.Piece].Bending > 0 {
			return true
		}
	}
	return false
}

// historyJump is 0 where the history's value jumps at a break or at t = 0, 1
// where its slope does, else 2 when it has breaks, and SmoothJump when it has
// none and starts at rest.
func (b *builder) historyJump(h scenario.History) int {
	end := b.m.Timing.End()
	seen := sample(func(t float64) float64 { return h.At(t, 0) }, end, b.m.Timing.Every)
	scale, slope := seen.most, seen.slope
	for _, at := range h.Breaks {
		scale = math.Max(scale, math.Max(math.Abs(h.At(at, 0)), math.Abs(h.At(at*(1-1e-9), 0))))
	}
	order := 2
	if h.Value.Smooth() {
		order = SmoothJump
	}
	eps := math.Min(end*1e-9, b.m.Timing.Every*1e-6)
	for _, at := range append([]float64{0}, h.Breaks...) {
		if at > end {
			continue
		}
		if math.Abs(h.At(at+eps, 0)-h.At(at-eps, 0)) > 1e-6*scale+4*eps*slope {
			return 0
		}
		step := math.Min(end*1e-7, b.m.Timing.Every*1e-4)
		after, before := h.At(at+2*step, 0)-h.At(at+step, 0), h.At(at-step, 0)-h.At(at-2*step, 0)
		if math.Abs(after-before)/step > 1e-3*slope {
			order = min(order, 1)
		}
	}
	return order
}

// startJump classes a start shape by its ends and its operations; where its
// stretch ends within the line, by how it goes over into what lies beyond. A
// velocity ranks one order above the displacement.
func (b *builder) startJump(s scenario.StartOf[float64]) int {
	order, base := SmoothJump, 0
	if s.Velocity {
		base = 1
	}
	if !s.Shape.Smooth() {
		order = 1
	}
	line := &b.net.Lines[s.Along.Line]
	parts := b.along(s.Along)
	first, last := parts[0], parts[len(parts)-1]
	length := last.Origin + b.m.Pieces[last.Piece].Length - first.Origin
	at := func(x float64) float64 { return s.Shape.At(0, first.Origin+x) }
	scale := 0.0
	for i := 0; i <= 1000; i++ {
		scale = math.Max(scale, math.Abs(at(length*float64(i)/1000)))
	}
	if scale == 0 {
		return order
	}
	const still = 1e-6 // share of the largest value that counts as none; chosen
	h := length * 1e-4
	for side, x := range []float64{0, length} {
		in, piece, node := h, first.Piece, b.m.Pieces[first.Piece].From
		if side == 1 {
			in, piece, node = -h, last.Piece, b.m.Pieces[last.Piece].To
		}
		fixed := b.m.Nodes[node].Fixed
		v, v1, v2 := at(x), at(x+in), at(x+2*in)
		slope, bend := v1-v, v-2*v1+v2
		if next := b.beyond(piece, node); next >= 0 {
			other := b.begun(next, node, s.Velocity)
			mine := b.begun(piece, node, s.Velocity)
			v, v1, v2 = mine(0), mine(h), mine(2*h)
			w, w1, w2 := other(0), other(h), other(2*h)
			slope, bend = v1-v+w1-w, (v-2*v1+v2)-(w-2*w1+w2)
			if v -= w; fixed {
				v, slope = math.Max(math.Abs(mine(0)), math.Abs(w)), 0
			}
		}
		switch {
		case math.Abs(v) > still*scale:
			order = min(order, base)
		case !fixed && math.Abs(slope)/scale*1e4 > still:
			order = min(order, base+1)
		case math.Abs(bend)/scale*1e4 > still*1e2:
			order = min(order, base+2)
		}
	}
	if s.Along.Segment < 0 || len(line.Segments) > 1 {
		order = min(order, b.startAtNodes(parts, at, first.Origin, scale, base))
	}
	return order
}

// beyond is the piece of the same line on the other side of a node, -1 at an end.
func (b *builder) beyond(piece, node int) int {
	for _, k := range b.m.Lines[b.m.Pieces[piece].Line].Pieces {
		if p := &b.m.Pieces[k]; k != piece && (p.From == node || p.To == node) {
			return k
		}
	}
	return -1
}

// begun is the sum of all start shapes of a piece as a function of the distance
// from one of its nodes; no further than the piece.
func (b *builder) begun(piece, node int, velocity bool) func(float64) float64 {
	p := &b.m.Pieces[piece]
	return func(s float64) float64 {
		s = min(s, p.Length)
		if p.To == node {
			s = p.Length - s
		}
		sum := 0.0
		for _, st := range b.net.Starts {
			switch {
			case st.Velocity != velocity || st.Along.Line != p.Line:
			case st.Along.Segment < 0:
				sum += st.Shape.At(0, p.X0+s)
			case st.Along.Segment == p.Segment:
				sum += st.Shape.At(0, p.S0+s)
			}
		}
		return sum
	}
}

// startAtNodes looks at what stands inside a start shape: a spring or dashpot
// that is out of balance at once makes velocity jump, a mass acceleration.
func (b *builder) startAtNodes(parts []Part, at func(float64) float64, origin, scale float64, base int) int {
	order := SmoothJump
	for _, part := range parts[1:] {
		n := &b.m.Nodes[b.m.Pieces[part.Piece].From]
		if !n.Fitting || math.Abs(at(part.Origin-origin)) < 1e-6*scale {
			continue
		}
		switch {
		case n.Fixed:
			order = min(order, base)
		case n.Mass > 0:
			order = min(order, 2)
		default:
			order = min(order, 1)
		}
	}
	return order
}

// bandFactor is the band over the root-mean-square frequency.
const bandFactor = 3

// band estimates the highest frequency of note that the excitations feed in, Hz:
// three times the root-mean-square frequency of each history, and of each start
// shape by its root-mean-square wave number. Jumps have no highest frequency and
// are left out: Mesh.Jump tells of them.
func (b *builder) band() float64 {
	const times = bandFactor
	f := 0.0
	for _, p := range b.m.Pushes {
		f = math.Max(f, times*b.historyFrequency(p.Force, 0))
	}
	for _, p := range b.m.Presses {
		f = math.Max(f, times*b.pressFrequency(&p))
	}
	for _, mv := range b.net.Moves {
		f = math.Max(f, times*b.historyFrequency(mv.Motion, 0))
	}
	for _, s := range b.net.Starts {
		parts := b.along(s.Along)
		for _, part := range parts {
			p := &b.m.Pieces[part.Piece]
			k := waveNumber(func(x float64) float64 { return s.Shape.At(0, part.Origin+x) }, p.Length)
			f = math.Max(f, times*k*p.WaveSpeed()/(2*math.Pi))
		}
	}
	travel := 0.0
	for i := range b.m.Lines {
		t := 0.0
		for _, k := range b.m.Lines[i].Pieces {
			t += b.m.Pieces[k].TravelTime()
		}
		travel = math.Max(travel, t)
	}
	b.m.BandCut = f > maxWaves/travel
	return math.Min(f, maxWaves/travel)
}

// maxWaves is the largest number of wavelengths on a line that a band may ask
// level 0 to resolve; what is shorter is left to refinement to find out.
const maxWaves = 1500

// historyFrequency is the root-mean-square frequency of a history at place x,
// Hz, taken piece by piece between its breaks.
func (b *builder) historyFrequency(h scenario.History, x float64) float64 {
	end := b.m.Timing.End()
	edges := []float64{0}
	for _, at := range h.Breaks {
		if at > 0 && at < end {
			edges = append(edges, at)
		}
	}
	edges = append(edges, end)
	if len(edges) > 60 {
		edges = []float64{0, end} // a table: its rows are not breaks of note
	}
	sort.Float64s(edges)
	value, change := 0.0, 0.0
	for i := 1; i < len(edges); i++ {
		a, w := edges[i-1], edges[i]-edges[i-1]
		if w <= end*1e-12 {
			continue
		}
		seen := sample(func(t float64) float64 { return h.At(a+t, x) }, w, b.m.Timing.Every)
		value += seen.value
		change += seen.change
	}
	if value == 0 {
		return 0
	}
	return math.Sqrt(change/value) / (2 * math.Pi)
}

func (b *builder) pressFrequency(p *Press) float64 {
	f := 0.0
	end := b.m.Timing.End()
	for _, part := range p.Parts {
		piece := &b.m.Pieces[part.Piece]
		for _, share := range []float64{0.17, 0.5, 0.83} {
			f = math.Max(f, b.historyFrequency(p.Force, part.Origin+share*piece.Length))
			if p.Force.Value.UsesArg(formula.ArgX) {
				t := share * end
				k := waveNumber(func(x float64) float64 { return p.Force.At(t, part.Origin+x) }, piece.Length)
				f = math.Max(f, k*piece.WaveSpeed()/(2*math.Pi))
			}
		}
	}
	return f
}

// waveNumber is the root-mean-square wave number of a shape on [0, length], rad/m.
func waveNumber(shape func(float64) float64, length float64) float64 {
	seen := sample(shape, length, 0)
	if seen.value == 0 {
		return 0
	}
	return math.Sqrt(seen.change / seen.value)
}
