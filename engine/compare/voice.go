package compare

import (
	"errors"
	"fmt"
	"math"

	"github.com/tautspan/tautspan/engine/mesh"
	"github.com/tautspan/tautspan/engine/solver"
)

// levelRun is one solution. Its series are dropped when three finer ones exist.
type levelRun struct {
	level   int
	result  *solver.Result
	figures []figures // of each channel
	energy  solver.Energy
	// change[c] is the root mean square of the difference from the level before;
	// nil for the first.
	change []float64
}

// voice is one solver with the successive levels that it has solved.
type voice struct {
	solver    solver.Solver
	absent    string // why it takes no part, in the user's terms
	fault     string // what went wrong
	exhausted string // why it is not refined further
	runs      []levelRun
	confirmed int // how often it has been refined on account of a difference
}

func (v *voice) usable() bool { return v.absent == "" && v.fault == "" && len(v.runs) >= levels }

func (v *voice) top() *levelRun { return &v.runs[len(v.runs)-1] }

func (v *voice) series(c int) [][]float64 { return v.top().result.Series[c] }

// levels is how many successive levels an error bar needs.
const levels = 3

// take keeps a new level, or the fault that it shows.
func (v *voice) take(m *mesh.Mesh, level int, r *solver.Result, err error) {
	var fault *solver.FaultError
	switch {
	case errors.As(err, &fault):
		v.fault = fault.What
		return
	case errors.Is(err, solver.ErrBudget):
		v.exhausted = err.Error()
		return
	case err != nil:
		v.fault = err.Error()
		return
	}
	if what := checkResult(m, r); what != "" {
		v.fault = what
		return
	}
	run := levelRun{level: level, result: r, energy: r.Energy, figures: make([]figures, len(m.Channels))}
	for c := range m.Channels {
		run.figures[c] = newFigures(r.Series[c])
	}
	if len(v.runs) > 0 {
		before := v.top()
		run.change = make([]float64, len(m.Channels))
		for c := range m.Channels {
			run.change[c] = distance(r.Series[c], before.result.Series[c])
		}
	}
	v.runs = append(v.runs, run)
	if n := len(v.runs); n > levels {
		v.runs[n-levels-1].result.Series = nil
	}
}

// theory is the order and step ratio that the solver claims.
func (v *voice) theory() (order, ratio float64) {
	r := v.top().result
	return r.Order, r.Ratio
}

// changes are the two last changes of an observable from level to level.
func (v *voice) changes(c int, k Kind) (e1, e2 float64) {
	n := len(v.runs)
	if k == Record {
		return v.runs[n-2].change[c], v.runs[n-1].change[c]
	}
	at := func(i int) float64 { return v.runs[i].figures[c].of[k] }
	return math.Abs(at(n-2) - at(n-3)), math.Abs(at(n-1) - at(n-2))
}

// roundOff is the share of an observable's scale below which no bar is claimed:
// a hundred-millionth. Chosen: dense eigenproblems of the sizes used here keep
// about nine figures.
const roundOff = 1e-8

// floorShare is the share of the record's relative bar below which no bar of a
// single figure (peak, root mean square, highest, lowest) is claimed: differences
// of one figure cross zero now and then and give bars that are small by chance.
// Source: a study on random three-segment lines, confirmed by the false-alarm
// test of plugins/conform.
const floorShare = 0.3

// bar is the error bar of an observable of channel c.
func (v *voice) bar(c int, k Kind, s scales, all []*voice) Bar {
	order, ratio := v.theory()
	e1, e2 := v.changes(c, k)
	b := NewBar(e1, e2, ratio, order)
	scale := s.of(c, k, all)
	if k != Record {
		e1, e2 := v.changes(c, Record)
		record := NewBar(e1, e2, ratio, order)
		floor := 0.0
		if own := s.of(c, Record, all); own > 0 {
			floor = floorShare * record.Bound / own * scale
		}
		switch k {
		case Final:
			floor = math.Max(floor, v.lastBand(c))
		case Peak, Highest, Lowest:
			floor = math.Max(floor, v.localBand(c, k))
		}
		b.Bound = math.Max(b.Bound, floor)
	}
	b.Bound = math.Max(b.Bound, roundOff*scale) + v.top().result.Neglect*scale
	return b
}

// local gives, for a spot of a channel, the change from level to level row by
// row: that to the finest level, or where it is more that to the level before,
// as much smaller as the record's changes fell. The latter keeps a row from
// looking exact by chance where a kink falls between cells, whose place in its
// cell differs from level to level.
func (v *voice) local(c, spot int) func(row int) float64 {
	n := len(v.runs)
	e1, e2 := v.changes(c, Record)
	fall := 1.0
	if e1 > 0 {
		fall = math.Min(1, e2/e1)
	}
	fine, middle, coarse := v.runs[n-1].result.Series[c][spot], v.runs[n-2].result.Series[c][spot], v.runs[n-3].result.Series[c][spot]
	return func(i int) float64 {
		return math.Max(math.Abs(fine[i]-middle[i]), fall*math.Abs(middle[i]-coarse[i]))
	}
}

// dull tells that no refinement brings the voice to a share of a record's size.
func (v *voice) dull(share float64) bool { return v.top().result.Neglect > share }

// localFactor turns a change from level to level into an error bar: as the
// record's bar is to the record's change.
func (v *voice) localFactor(c int) float64 {
	order, ratio := v.theory()
	e1, e2 := v.changes(c, Record)
	if e2 == 0 {
		return 0
	}
	return NewBar(e1, e2, ratio, order).Bound / e2
}

// band is the pointwise error band of spot k of channel c: the change from
// level to level, taken as large as it is anywhere within half a swing of the
// change itself, and scaled as the bar of the record.
func (v *voice) band(c, k int) []float64 {
	fine, middle := v.series(c)[k], v.runs[len(v.runs)-2].result.Series[c][k]
	change := v.local(c, k)
	d := make([]float64, len(fine))
	for i := range d {
		d[i] = change(i)
	}
	out := envelope(d, halfSwing(fine, middle), v.localFactor(c))
	if share := v.top().result.Neglect; share > 0 {
		for i := range out {
			out[i] += share * v.top().figures[c].of[Peak]
		}
	}
	return out
}

// lastBand is the band at the last row, for the final value, whose own changes
// cross zero.
func (v *voice) lastBand(c int) float64 {
	sum := 0.0
	middle := v.runs[len(v.runs)-2].result.Series[c]
	for k, fine := range v.series(c) {
		n := len(fine)
		reach := min(n, halfSwing(fine, middle[k])+1)
		change, most := v.local(c, k), 0.0
		for i := n - reach; i < n; i++ {
			most = math.Max(most, change(i))
		}
		sum += most * most
	}
	return v.localFactor(c) * math.Sqrt(sum/float64(len(middle)))
}

// localRows is how many rows on either side of a peak its own change is looked
// for: a peak at a kink is as wrong as the record is there, which is more than
// the record is on the whole.
const localRows = 2

// localBand is the change at and beside the row of a peak, highest or lowest
// value, scaled as the bar of the record.
func (v *voice) localBand(c int, k Kind) float64 {
	f := &v.top().figures[c]
	row := f.at[k]
	change, most := v.local(c, f.spot[k]), 0.0
	for i := max(0, row-localRows); i <= min(len(v.series(c)[f.spot[k]])-1, row+localRows); i++ {
		most = math.Max(most, change(i))
	}
	return v.localFactor(c) * most
}

// halfSwing is half the mean distance, in rows, between changes of sign of a-b,
// at least 1 and at most a twentieth of the record.
func halfSwing(a, b []float64) int {
	signs := 0
	for i := 1; i < len(a); i++ {
		if (a[i]-b[i] > 0) != (a[i-1]-b[i-1] > 0) {
			signs++
		}
	}
	return min(max(1, len(a)/(2*(signs+1))), max(1, len(a)/20))
}

// envelope is factor times the largest |d| within w rows on either side.
func envelope(d []float64, w int, factor float64) []float64 {
	n := len(d)
	out := make([]float64, n)
	queue := make([]int, 0, 2*w+2) // rows of falling |d| inside the window
	for i := 0; i < n+w; i++ {
		if i < n {
			a := math.Abs(d[i])
			for len(queue) > 0 && math.Abs(d[queue[len(queue)-1]]) <= a {
				queue = queue[:len(queue)-1]
			}
			queue = append(queue, i)
		}
		at := i - w
		if at < 0 {
			continue
		}
		if queue[0] < at-w {
			queue = queue[1:]
		}
		out[at] = factor * math.Abs(d[queue[0]])
	}
	return out
}

// plan is what a level costs; a fault or a limit of the solver's own ends the
// voice or its refinement.
func (v *voice) plan(m *mesh.Mesh, level, effort int) (p solver.Plan, ok bool) {
	defer func() {
		if r := recover(); r != nil {
			v.fault, ok = fmt.Sprintf("panic while planning: %v", r), false
		}
	}()
	p, err := v.solver.Plan(m, solver.Request{Level: level, Effort: effort})
	switch {
	case errors.Is(err, solver.ErrBudget):
		v.exhausted = err.Error()
		return p, false
	case err != nil:
		v.fault = err.Error()
		return p, false
	case p.Work < 0 || p.Bytes < 0:
		v.fault = "plans a negative cost"
		return p, false
	}
	return p, true
}
