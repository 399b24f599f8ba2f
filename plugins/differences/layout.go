package differences

import (
	"fmt"
	"math"
	"sort"

	"github.com/tautspan/tautspan/engine/mesh"
	"github.com/tautspan/tautspan/engine/scenario"
)

// Layout is the discretisation of a network at level 0. A level l runs at
// Step/2^l with Cells*2^l cells.
type Layout struct {
	Step     float64 // s
	Cells    []int   // of each piece
	Implicit []bool  // of each piece: shorter than a step takes a wave, so advanced with the nodes
	Order    int     // 2 or 4
}

// Shares of the resolution; all chosen, common practice, no source.
const (
	cellsPerWave  = 10  // at the band's upper end, so also steps per period
	cellsInPiece  = 6   // of the shortest piece that is not short
	cellsKinked   = 200 // in the longest line, for data with kinks
	cellsSmooth   = 100 // in the longest line, otherwise
	shortShare    = 10  // a piece is short if it would ask for a step so many times finer
	stretch       = 1.35
	roundUp       = 1e-9    // cells that a travel time may lack to hold one more
	maxCandidates = 2000000 // candidate steps times pieces
)

// newLayout chooses the step and the cells of a mesh.
//
// The leading error of a piece over the run is in proportion to its travel time
// tau times 1-nu^2, nu the Courant number. So the step is, of all tau_i/n between
// dt*/1.35 and dt*, the one with the least sum of tau_i (1-nu_i^2), where dt* is
// what the resolution asks for.
//
// Order 4 is taken where the data and the line allow it.
func newLayout(m *mesh.Mesh, effort int) (*Layout, []string) {
	why := unfit(m)
	if why == "" {
		l, notes := layoutOf(m, effort, 4)
		l.Step *= fourthShare
		if why = l.unstable(m); why == "" {
			notes = append(notes, "Order 4 is used: the data are smooth and nothing on the line is too stiff for it.")
			for i := range m.Channels {
				if m.Channels[i].Quantity == scenario.Acceleration {
					return l, append(notes, "Accelerations near joints converge with order 2 all the same.")
				}
			}
			return l, notes
		}
	}
	l, notes := layoutOf(m, effort, 2)
	if m.Jump >= smoothEnough {
		notes = append(notes, "Order 4 is not used, because "+why+".")
	}
	return l, notes
}

func layoutOf(m *mesh.Mesh, effort, order int) (*Layout, []string) {
	l := &Layout{Cells: make([]int, len(m.Pieces)), Implicit: make([]bool, len(m.Pieces)), Order: order}
	finer := 1.0
	switch {
	case effort <= 0:
		finer = 0.7
	case effort >= 2:
		finer = 1.4
	}
	want := wanted(m, finer)
	inPiece := cellsInPiece * finer
	if order == 4 {
		inPiece = max(inPiece, cellsFourth)
	}
	if len(m.Pieces) == 0 {
		l.Step = want
		return l, nil
	}
	tau := make([]float64, len(m.Pieces))
	var ordinary []float64
	base := want
	for i := range m.Pieces {
		tau[i] = m.Pieces[i].TravelTime()
		if t := tau[i] / inPiece; t*shortShare >= base {
			ordinary = append(ordinary, tau[i])
			want = math.Min(want, t)
		}
	}
	l.Step = bestStep(ordinary, want)
	return l, l.fill(m, tau)
}

// wanted is the step that the excitations ask for, s.
func wanted(m *mesh.Mesh, finer float64) float64 {
	want := math.Inf(1)
	if m.Band > 0 && !math.IsInf(m.Band, 0) {
		want = 1 / (cellsPerWave * finer * m.Band)
	}
	cells := float64(cellsSmooth)
	if m.Jump <= 1 {
		cells = cellsKinked
	}
	longest := 0.0
	for i := range m.Lines {
		t := 0.0
		for _, k := range m.Lines[i].Pieces {
			t += m.Pieces[k].TravelTime()
		}
		longest = math.Max(longest, t)
	}
	for i := range m.Pieces {
		longest = math.Max(longest, m.Pieces[i].TravelTime())
	}
	if longest > 0 {
		want = math.Min(want, longest/(cells*finer))
	}
	if math.IsInf(want, 1) {
		want = m.Timing.Every / 4
	}
	return want
}

// bestStep picks the step for the travel times given, none longer than want.
func bestStep(tau []float64, want float64) float64 {
	if len(tau) == 0 {
		return want
	}
	by := append([]float64(nil), tau...)
	sort.Sort(sort.Reverse(sort.Float64Slice(by)))
	best, least := 0.0, math.Inf(1)
	work := 0
	for i, t := range by {
		if i > 0 && t == by[i-1] {
			continue
		}
		for n := math.Ceil(t/want - roundUp); n <= stretch*t/want+roundUp && work < maxCandidates; n++ {
			work += len(tau)
			dt := t / n
			cost := 0.0
			for _, tj := range tau {
				nu := dt * math.Floor(tj/dt+roundUp) / tj
				cost += tj * (1 - nu*nu)
			}
			if cost < least-1e-12*want || cost < least+1e-12*want && dt > best {
				best, least = dt, math.Min(cost, least)
			}
		}
	}
	if best == 0 {
		return want
	}
	return best
}

// fill sets the cells of every piece for the step chosen.
func (l *Layout) fill(m *mesh.Mesh, tau []float64) (notes []string) {
	short, low, where := 0, 1.0, 0
	for i, t := range tau {
		n := math.Floor(t/l.Step + roundUp)
		if n < 1 {
			l.Cells[i], l.Implicit[i] = 1, true
			short++
			continue
		}
		l.Cells[i] = int(math.Min(n, 1<<40))
		if nu := l.Step * n / t; nu < low {
			low, where = nu, i
		}
	}
	if short > 0 {
		notes = append(notes, fmt.Sprintf("%d very short piece(s) of line are advanced implicitly in one cell at level 0 so that they do not rule the step.", short))
	}
	if low < 0.9 {
		notes = append(notes, fmt.Sprintf("The piece of line after %s runs at Courant number %.2f, so waves in it disperse more than elsewhere.", m.Nodes[m.Pieces[where].From].Name, low))
	}
	return notes
}

// frozen takes an earlier layout for a mesh. Where a wave has become faster than
// the old step allows, the step is shortened, and the layout no longer counts as
// frozen.
func frozen(old *Layout, m *mesh.Mesh) (l *Layout, same bool, note string) {
	l = &Layout{Step: old.Step, Cells: append([]int(nil), old.Cells...), Implicit: append([]bool(nil), old.Implicit...), Order: old.Order}
	limit := 1.0
	for i := range m.Pieces {
		if !l.Implicit[i] {
			limit = math.Max(limit, l.Step*float64(l.Cells[i])/m.Pieces[i].TravelTime())
		}
	}
	if limit > 1+roundUp {
		l.Step /= limit
		return l, false, fmt.Sprintf("The frozen step was shortened by %.2g to keep Courant numbers at 1 or below.", limit-1)
	}
	return l, true, ""
}

// thaw reads a Request's Freeze; nil if it is of no use for the mesh.
//
// A layout of order 4 is of use only where order 4 still is.
func thaw(freeze any, m *mesh.Mesh) *Layout {
	var old *Layout
	switch f := freeze.(type) {
	case *Layout:
		old = f
	case Layout:
		old = &f
	}
	if old == nil || !positive(old.Step) || len(old.Cells) != len(m.Pieces) || len(old.Implicit) != len(m.Pieces) {
		return nil
	}
	for _, n := range old.Cells {
		if n < 1 {
			return nil
		}
	}
	if old.Order == 4 && unfit(m)+old.unstable(m) != "" || old.Order != 4 && old.Order != 2 {
		return nil
	}
	return old
}
