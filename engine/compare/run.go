package compare

import (
	"context"
	"fmt"
	"math"
	"runtime"
	"sort"

	"github.com/tautspan/tautspan/engine/mesh"
	"github.com/tautspan/tautspan/engine/scenario"
	"github.com/tautspan/tautspan/engine/solver"
)

// Options say how hard a comparison tries.
type Options struct {
	Agree       float64 // share within which answers must agree; 0: 0.01
	Effort      scenario.Effort
	LimitWork   int64 // cell-steps in all; 0: by effort
	LimitMemory int64 // bytes held at once; 0: 1 GiB
	Workers     int   // solutions at once; 0: GOMAXPROCS
	Asked       []Asked
	EnergyLeft  bool           // agree governs the energy left
	Progress    func(Progress) // may be nil; one call at a time
}

// Limits where the scenario sets none. A cell-step takes about 1 ns to 2 ns on
// one core, so these are about a second, ten seconds and two minutes.
const (
	workQuick     = 1_000_000_000
	workNormal    = 10_000_000_000
	workThorough  = 100_000_000_000
	memoryDefault = 1 << 30

	levelMost  = 14 // finer than this no solver is asked, whatever the limits
	roundsMost = 40 // of refinement; the levels end it long before
)

type askedKind struct {
	channel int
	kind    Kind
}

type runner struct {
	mesh     *mesh.Mesh
	options  Options
	effort   int // of solver.Request
	workers  int
	voices   []*voice
	asked    map[askedKind]bool
	progress *teller
	spent    int64
	notes    []string
}

// Run compares the solvers on a mesh. It returns an *AllAbsentError together
// with the outcome where none can answer. When ctx ends it returns within a
// fraction of a second with ctx's error and, if at least one solver had solved
// three levels, with what was complete, marked Cut.
func Run(ctx context.Context, m *mesh.Mesh, solvers []solver.Solver, options Options) (*Outcome, error) {
	r := newRunner(m, solvers, options)
	r.first(ctx)
	for round := 0; ctx.Err() == nil && round < roundsMost; round++ {
		wants := r.wants()
		if len(wants) == 0 || !r.refine(ctx, wants) {
			break
		}
	}
	out, err := r.outcome()
	if ctx.Err() != nil {
		if err != nil {
			return nil, ctx.Err()
		}
		out.Cut = true
		return out, ctx.Err()
	}
	return out, err
}

func newRunner(m *mesh.Mesh, solvers []solver.Solver, options Options) *runner {
	if options.Agree <= 0 {
		options.Agree = 0.01
	}
	r := &runner{mesh: m, options: options, workers: options.Workers, asked: map[askedKind]bool{}}
	if r.workers < 1 {
		r.workers = runtime.GOMAXPROCS(0)
	}
	work := int64(workNormal)
	r.effort = 1
	switch options.Effort {
	case scenario.Quick:
		r.effort, work = 0, workQuick
	case scenario.Thorough:
		r.effort, work = 2, workThorough
	}
	if r.options.LimitWork <= 0 {
		r.options.LimitWork = work
	}
	if r.options.LimitMemory <= 0 {
		r.options.LimitMemory = memoryDefault
	}
	if options.Progress != nil {
		r.progress = &teller{to: options.Progress}
	}
	for _, a := range options.Asked {
		if a.Reading == nil {
			r.asked[askedKind{a.Channel, a.Kind}] = true
		}
	}
	for _, s := range solvers {
		v := &voice{solver: s}
		for i, reason := range s.Refuses(m) {
			if i > 0 {
				v.absent += "; "
			}
			v.absent += reason
		}
		r.voices = append(r.voices, v)
	}
	return r
}

// memoryLeft is what is left for solving beside the records that are kept.
func (r *runner) memoryLeft() int64 {
	kept := int64(0)
	for _, v := range r.voices {
		kept += int64(min(len(v.runs), levels))
	}
	return r.options.LimitMemory - kept*seriesBytes(r.mesh)
}

// first solves levels 0, 1 and 2 of every solver, the cheapest solvers first in
// line for the limits.
func (r *runner) first(ctx context.Context) {
	type cost struct {
		voice int
		work  int64
		tasks []task
	}
	var costs []cost
	memory := r.memoryLeft()
	for i, v := range r.voices {
		if v.absent != "" {
			continue
		}
		c := cost{voice: i}
		for level := range levels {
			p, ok := v.plan(r.mesh, level, r.effort)
			if !ok {
				break
			}
			if p.Bytes > memory {
				v.absent = fmt.Sprintf("needs %s for its first three levels, and the limit on memory is %s", size(p.Bytes), size(r.options.LimitMemory))
			}
			c.work += p.Work
			c.tasks = append(c.tasks, task{voice: i, level: level, plan: p})
		}
		if len(c.tasks) < levels && v.fault == "" {
			v.absent = v.exhausted
		}
		if v.absent == "" && v.fault == "" {
			costs = append(costs, c)
		}
	}
	sort.SliceStable(costs, func(a, b int) bool { return costs[a].work < costs[b].work })
	var tasks []task
	for _, c := range costs {
		if r.spent+c.work > r.options.LimitWork {
			r.voices[c.voice].absent = fmt.Sprintf("needs %.2g cell-steps for its first three levels, and the limit on work leaves %.2g", float64(c.work), float64(r.options.LimitWork-r.spent))
			continue
		}
		r.spent += c.work
		tasks = append(tasks, c.tasks...)
	}
	r.do(ctx, tasks, memory)
}

// do solves the tasks and hands the levels to their voices in order.
func (r *runner) do(ctx context.Context, tasks []task, memory int64) {
	r.solveAll(ctx, tasks, memory)
	sort.SliceStable(tasks, func(a, b int) bool { return tasks[a].level < tasks[b].level })
	for i := range tasks {
		t := &tasks[i]
		v := r.voices[t.voice]
		next := t.level == 0 && len(v.runs) == 0 || len(v.runs) > 0 && v.top().level == t.level-1
		if !t.done || v.fault != "" || !next || ctx.Err() != nil && t.err != nil {
			continue
		}
		v.take(r.mesh, t.level, t.result, t.err)
		t.result = nil
	}
}

// refine adds levels to voices, wants[i] to voice i, as far as the limits let
// it. It tells whether anything was added.
func (r *runner) refine(ctx context.Context, wants map[int]int) bool {
	memory := r.memoryLeft()
	var tasks []task
	for i, v := range r.voices {
		for step := 1; step <= wants[i]; step++ {
			level := v.top().level + step
			if level > levelMost {
				v.exhausted = "the finest level is reached"
				break
			}
			p, ok := v.plan(r.mesh, level, r.effort)
			if !ok {
				break
			}
			if p.Bytes > memory {
				v.exhausted = fmt.Sprintf("the next level needs %s, and the limit on memory is %s", size(p.Bytes), size(r.options.LimitMemory))
				break
			}
			if r.spent+p.Work > r.options.LimitWork {
				v.exhausted = fmt.Sprintf("the next level needs %.2g cell-steps, and the limit on work leaves %.2g", float64(p.Work), float64(r.options.LimitWork-r.spent))
				break
			}
			r.spent += p.Work
			tasks = append(tasks, task{voice: i, level: level, plan: p})
		}
	}
	if len(tasks) == 0 {
		return len(wants) > 0 // voices may have become exhausted: look again
	}
	r.do(ctx, tasks, memory)
	return true
}

// stepsMost is how many levels are added before looking again: predictions from
// three levels are not good for more.
const stepsMost = 2

// wants says how many levels each voice should add. An empty answer ends the
// comparison.
func (r *runner) wants() map[int]int {
	answered := false
	for _, v := range r.voices {
		answered = answered || v.usable()
	}
	if !answered {
		return nil
	}
	judged := r.judge()
	wants, doubtful := map[int]int{}, map[int]bool{}
	for c := range judged {
		for k := range judged[c] {
			o := &judged[c][k]
			r.confirm(o, judged[c][Record].Pairs, doubtful)
			if o.Governed && o.Verdict == Unsettled {
				r.narrow(o, wants)
			}
		}
	}
	for i := range doubtful {
		if v := r.voices[i]; v.confirmed < confirmMost {
			v.confirmed++
			wants[i] = max(wants[i], 1)
		}
	}
	if r.options.EnergyLeft {
		if o := r.energyLeft(); o.Verdict == Unsettled {
			r.narrow(&o, wants)
		}
	}
	if len(wants) == 0 {
		r.narrowReadings(judged, wants)
	}
	for i := range wants {
		if wants[i] > stepsMost {
			wants[i] = stepsMost
		}
	}
	for i := range r.voices {
		if wants[i] > 0 {
			continue
		}
		delete(wants, i)
	}
	return wants
}

// confirmMost is how often a voice is refined on account of a difference before
// the difference stands: once for every difference, and once more.
const confirmMost = 2

// plainDifference is the ratio of a difference of records to their bars beyond
// which no bar was so wrong in any trial that refinement could mend it; such a
// difference stands at once. Chosen: five times what counts as a difference.
const plainDifference = 5 * ratioDiffer

// confirm marks both voices of a pair that does not agree: they are refined once
// more before anything is said about them.
func (r *runner) confirm(o *Observable, records []Pair, doubtful map[int]bool) {
	if !o.Governed && o.Kind != Record {
		return
	}
	for k, p := range o.Pairs {
		if p.Ratio <= ratioAgree || p.Immaterial || records[k].Ratio > plainDifference {
			continue
		}
		for _, i := range []int{p.A, p.B} {
			if v := r.voices[i]; v.exhausted == "" {
				doubtful[i] = true
			}
		}
	}
}

// narrow asks for finer levels of the voices that reach half the share asked
// for with the least work, until two do.
func (r *runner) narrow(o *Observable, wants map[int]int) {
	target := r.options.Agree / 2 * o.Scale
	need := 2
	type candidate struct {
		voice, steps int
		work         float64
	}
	var candidates []candidate
	usable := 0
	for i, v := range r.voices {
		if !v.usable() {
			continue
		}
		usable++
		if o.Bars[i] <= target {
			need--
			continue
		}
		if v.exhausted != "" || v.dull(r.options.Agree/2) {
			continue
		}
		order, ratio := v.theory()
		b := Bar{Order: o.Orders[i], Bound: o.Bars[i]}
		steps := b.refinements(target, ratio, order)
		candidates = append(candidates, candidate{i, steps, r.predicted(v, steps)})
	}
	if usable == 1 {
		need--
	}
	sort.SliceStable(candidates, func(a, b int) bool { return candidates[a].work < candidates[b].work })
	for i := 0; i < len(candidates) && i < need; i++ {
		wants[candidates[i].voice] = max(wants[candidates[i].voice], candidates[i].steps)
	}
}

// predicted is the work of so many further levels, from how work grew so far.
func (r *runner) predicted(v *voice, steps int) float64 {
	n := len(v.runs)
	last, before := float64(v.runs[n-1].result.Plan.Work), float64(v.runs[n-2].result.Plan.Work)
	growth := 4.0
	if before > 0 && last > before {
		growth = last / before
	}
	work := 0.0
	for range steps {
		last = math.Max(last, 1) * growth
		work += last
	}
	return work
}

// narrowReadings refines the voices behind a reading that is not known closely
// enough: the two with the smallest bars of its record.
func (r *runner) narrowReadings(judged [][]Observable, wants map[int]int) {
	for i := range r.options.Asked {
		a := &r.options.Asked[i]
		if a.Reading == nil {
			continue
		}
		o := &judged[a.Channel][Record]
		if o.Best < 0 || o.Verdict == Differ {
			continue
		}
		series := r.voices[o.Best].series(a.Channel)
		got := a.Reading(Reading{Every: r.mesh.Timing.Every, Values: series[0], Band: r.band(a.Channel, o)[0]})
		if r.readingSettled(got) {
			continue
		}
		order := make([]int, 0, len(r.voices))
		for i, v := range r.voices {
			if v.usable() && i != o.OddOneOut {
				order = append(order, i)
			}
		}
		sort.SliceStable(order, func(x, y int) bool { return o.Bars[order[x]] < o.Bars[order[y]] })
		for _, i := range order[:min(2, len(order))] {
			if r.voices[i].exhausted == "" {
				wants[i] = max(wants[i], 1)
			}
		}
	}
}

// readingSettled tells whether a reading is known within the share asked for,
// or within one row where that is more (rows cannot tell less).
func (r *runner) readingSettled(v Interval) bool {
	if math.IsNaN(v.Value) {
		return math.IsNaN(v.Low) == math.IsNaN(v.High)
	}
	return math.Max(v.High-v.Value, v.Value-v.Low) <= math.Max(r.options.Agree*math.Abs(v.Value), r.mesh.Timing.Every)
}

func size(bytes int64) string {
	switch {
	case bytes >= 1<<30:
		return fmt.Sprintf("%.2g GB", float64(bytes)/(1<<30))
	case bytes >= 1<<20:
		return fmt.Sprintf("%.3g MB", float64(bytes)/(1<<20))
	}
	return fmt.Sprintf("%d B", bytes)
}
