package characteristic

import (
	"fmt"
	"math"

	"github.com/tautspan/tautspan/engine/mesh"
	"github.com/tautspan/tautspan/engine/scenario"
	"github.com/tautspan/tautspan/engine/solver"
)

// Layout is the discretisation of one run. All numbers of a mesh of the same
// topology may change under it.
type Layout struct {
	Step     float64 // s, of all nodes that no short piece meets
	Substeps []int   // of each node, in one Step
	Cells    []int   // of each piece's lattice; 0: none is needed
	Stub     []bool  // of each piece: shorter than three Steps
}

// Numbers that size a run; chosen.
const (
	// courantGap keeps the step off the travel time's divisors, so that delays
	// are truly interpolated.
	courantGap = 0.97
	// reach is the least number of steps in a travel time: a centred stencil of
	// six then never waits for a sample that is still to come.
	reach = 3.05
	// spare: pieces that would need a step less than wanted/spare get substeps
	// of their own instead.
	spare = 4
	// thin: the loss's source is left out of pieces where (gamma tau)^2, its
	// share of the wave, is below this.
	thin = 1e-14
	// strong is the number of lattice points to the time 1/gamma.
	strong = 50
	// most bytes a run may hold.
	mostBytes = 2e9
	mostSteps = 1e12
	// fieldRows is the most rows that a picture over x and t has.
	fieldRows = 1200
)

// wanted is the step at level 0 before it is fitted to the travel times.
func wanted(m *mesh.Mesh, effort int) float64 {
	perPeriod, perPiece := 10.0, 40.0
	switch {
	case effort <= 0:
		perPeriod = 8
	case effort > 1:
		perPeriod, perPiece = 14, 60
	}
	longest := 0.0
	for i := range m.Pieces {
		longest = math.Max(longest, m.Pieces[i].TravelTime())
	}
	want := math.Inf(1)
	if m.Band > 0 {
		want = 1 / (perPeriod * m.Band)
	}
	if longest > 0 && (m.Band <= 0 || m.Jump <= 1) {
		want = math.Min(want, longest/perPiece)
	}
	if longest > 0 {
		want = math.Min(want, longest/4)
	}
	for i := range m.Pieces {
		// A strong loss wants its lattice fine, and no lattice is finer than the step.
		p := &m.Pieces[i]
		if gamma := p.Viscous / (2 * p.MassPerLength); gamma*p.TravelTime() > lossy {
			want = math.Min(want, 1/(strong*gamma))
		}
	}
	want = math.Min(want, swing(m))
	if math.IsInf(want, 1) {
		want = m.Timing.Every
	}
	return want
}

// swing is the longest step that follows a line's sag as it is: a twelfth of the
// period with which its pieces would swing as bodies on it.
func swing(m *mesh.Mesh) float64 {
	step := math.Inf(1)
	for i := range m.Lines {
		sag := m.Lines[i].Sag
		if sag == nil {
			continue
		}
		square := 0.0
		for k, w := range sag.Pieces {
			p := &m.Pieces[m.Lines[i].Pieces[k]]
			square += sag.Stiffness * w * w * p.Length / p.MassPerLength
		}
		if square > 0 {
			step = math.Min(step, 2*math.Pi/math.Sqrt(square)/12)
		}
	}
	return step
}

// plan chooses the layout of a level, or checks a frozen one.
func plan(m *mesh.Mesh, req solver.Request) (Layout, bool) {
	if old, ok := req.Freeze.(Layout); ok && fits(m, &old) {
		return old, true
	}
	want := wanted(m, req.Effort)
	shortest, stub := math.Inf(1), make([]bool, len(m.Pieces))
	for i := range m.Pieces {
		tau := m.Pieces[i].TravelTime()
		stub[i] = tau < reach/courantGap*want/spare
		if !stub[i] {
			shortest = math.Min(shortest, tau)
		}
	}
	lay := Layout{Step: want, Stub: stub}
	if !math.IsInf(shortest, 1) {
		n := math.Max(math.Ceil(courantGap*shortest/want), 3)
		lay.Step = courantGap * shortest / n
	}
	// Level 40 fits no machine; beyond it counts would not fit their types.
	level := min(max(req.Level, 0), 40)
	lay.Step = math.Ldexp(lay.Step, -level)
	lay.substeps(m)
	lay.Cells = make([]int, len(m.Pieces))
	pressed := pressedPieces(m)
	for i := range m.Pieces {
		p := &m.Pieces[i]
		tau := p.TravelTime()
		loss := p.Viscous / (2 * p.MassPerLength) * tau
		switch {
		case stub[i]:
		case pressed[i]:
			lay.Cells[i] = max(3, int(tau/lay.Step))
		case loss*loss > thin:
			lay.Cells[i] = cellsOf(tau, loss, lay.Step, m.Jump, level)
		}
	}
	return lay, false
}

// cellsOf sizes the lattice of a piece that loses loss = gamma tau: its error is
// of the order of (gamma ds)^2 of a wave, so that a weak loss needs no more than
// to see the band (two and a half points to its period), a strong one fifty
// points to a decay. A faint one's error is far below the rest of the solution;
// its lattice is refined by the root of two a level, since it costs the square.
// No lattice step is shorter than the nodes'. Shares chosen.
func cellsOf(tau, loss, step float64, jump, level int) int {
	const faint = 0.02
	per := 4.0
	if jump <= 2 {
		per = 2 // what the loss takes of a kinked wave is summed up on these points
	}
	n := tau / (per * step)
	if loss < faint {
		n *= math.Pow(2, -0.5*float64(level))
	}
	n = math.Max(n, math.Ldexp(strong*loss, level))
	return max(3, int(math.Min(n, tau/step)))
}

func pressedPieces(m *mesh.Mesh) []bool {
	out := make([]bool, len(m.Pieces))
	for i := range m.Presses {
		for _, part := range m.Presses[i].Parts {
			out[part.Piece] = true
		}
	}
	return out
}

// substeps gives all nodes that short pieces join the same number of steps in
// one Step, so that the shortest of these pieces lasts three of them. Linked
// nodes go together too.
func (lay *Layout) substeps(m *mesh.Mesh) {
	group := lay.groups(m)
	most := make(map[int]int)
	for i := range m.Pieces {
		if lay.Stub[i] {
			g := group[m.Pieces[i].From]
			n := math.Ceil(reach * lay.Step / m.Pieces[i].TravelTime())
			most[g] = max(most[g], int(math.Min(n, math.MaxInt32)))
		}
	}
	lay.Substeps = make([]int, len(m.Nodes))
	for i := range lay.Substeps {
		lay.Substeps[i] = max(1, most[group[i]])
	}
}

// groups numbers the sets of nodes that links and short pieces join.
func (lay *Layout) groups(m *mesh.Mesh) []int {
	g := make([]int, len(m.Nodes))
	for i := range g {
		g[i] = i
	}
	for changed := true; changed; {
		changed = false
		join := func(a, b int) {
			if g[a] != g[b] {
				low := min(g[a], g[b])
				g[a], g[b] = low, low
				changed = true
			}
		}
		for i := range m.Pieces {
			if lay.Stub[i] {
				join(m.Pieces[i].From, m.Pieces[i].To)
			}
		}
		for i := range m.Links {
			join(m.Links[i].A, m.Links[i].B)
		}
	}
	return g
}

// fits tells whether a frozen layout can carry a mesh.
func fits(m *mesh.Mesh, lay *Layout) bool {
	if len(lay.Substeps) != len(m.Nodes) || len(lay.Cells) != len(m.Pieces) || len(lay.Stub) != len(m.Pieces) {
		return false
	}
	pressed := pressedPieces(m)
	for i := range m.Pieces {
		p := &m.Pieces[i]
		step := lay.Step
		if lay.Stub[i] {
			step /= float64(lay.Substeps[p.From])
		}
		tau := p.TravelTime()
		loss := p.Viscous / (2 * p.MassPerLength) * tau
		switch {
		case tau < 3.001*step:
			return false
		case lay.Cells[i] == 0 && !lay.Stub[i] && (pressed[i] || loss*loss > thin):
			return false
		case lay.Cells[i] > 0 && tau/float64(lay.Cells[i]) < lay.Step:
			return false
		}
	}
	return true
}

// coarsest is the longest lattice step, s; records wait for it.
func (lay *Layout) coarsest(m *mesh.Mesh) float64 {
	most := 0.0
	for i, n := range lay.Cells {
		if n > 0 {
			most = math.Max(most, m.Pieces[i].TravelTime()/float64(n))
		}
	}
	return most
}

// size is what a run costs.
func size(m *mesh.Mesh, lay *Layout) solver.Plan {
	lag, more := window(m), 10*lay.Step+lay.coarsest(m)
	steps := math.Ceil((m.Timing.End()+lag)/lay.Step) + ahead
	var bytes, work, cells float64
	ring := func(delta, span float64) float64 { return 2 * (span/delta + 2*wide + 8) }
	for i := range m.Pieces {
		p := &m.Pieces[i]
		for _, node := range [2]int{p.From, p.To} {
			n := ring(lay.Step/float64(lay.Substeps[node]), p.TravelTime()+2*lag+more)
			cells += n / 2
			bytes += n * 8 * 1.6
			work += 12 * float64(lay.Substeps[node])
		}
		if n := float64(lay.Cells[i]); n > 0 {
			cells += n
			bytes += 8 * n * 58
			work += 6 * n * lay.Step * n / p.TravelTime()
		}
	}
	for i := range m.Pushes {
		if s := m.Pushes[i].At; s.Node < 0 {
			bytes += 13 * ring(lay.Step, m.Pieces[s.Piece].TravelTime()+2*lag+more)
			work += 30
		}
	}
	work += 20 * float64(len(m.Nodes))
	reads := 0.0
	for i := range m.Channels {
		ch := &m.Channels[i]
		n := float64(m.Timing.Rows)
		if ch.Along {
			n = math.Min(n, fieldRows)
		}
		bytes += 8 * n * float64(len(ch.Spots))
		each := 60.0
		if ch.Means > 1 || ch.Means == 1 && ch.Quantity == scenario.Displacement {
			each *= 1 + 6*m.Timing.Every/lay.Step
		}
		reads += each * n * float64(len(ch.Spots))
		for _, s := range ch.Spots {
			if s.Node < 0 && lay.Cells[s.Piece] > 0 {
				ds := m.Pieces[s.Piece].TravelTime() / float64(lay.Cells[s.Piece])
				bytes += 32 * ring(ds, 2*lag+more)
			}
		}
	}
	clip := func(v float64) float64 { return math.Min(v, 9e18) }
	return solver.Plan{Cells: int(clip(cells)), Steps: int(clip(steps)),
		Work: int64(clip(work*steps + reads)), Bytes: int64(clip(bytes + 1e4))}
}

// within returns an error where a run does not fit.
func within(p solver.Plan) error {
	if float64(p.Bytes) > mostBytes {
		return fmt.Errorf("solver %s would hold %.3g bytes, more than %.3g: %w", name, float64(p.Bytes), mostBytes, solver.ErrBudget)
	}
	if float64(p.Steps) > mostSteps || float64(p.Work) > 1e15 {
		return fmt.Errorf("solver %s would take %.3g steps: %w", name, float64(p.Steps), solver.ErrBudget)
	}
	return nil
}

// window is how far around a row its means reach, s.
func window(m *mesh.Mesh) float64 {
	w := 0.0
	for i := range m.Channels {
		w = math.Max(w, 0.5*float64(m.Channels[i].Means)*m.Timing.Every)
	}
	return w
}
