package app

import (
	"context"
	"errors"
	"fmt"
	"io"
	"time"

	"github.com/tautspan/tautspan/dsl/diag"
	"github.com/tautspan/tautspan/engine/compare"
	"github.com/tautspan/tautspan/engine/doubt"
	"github.com/tautspan/tautspan/engine/formula"
	"github.com/tautspan/tautspan/engine/measure"
	"github.com/tautspan/tautspan/engine/scenario"
	"github.com/tautspan/tautspan/engine/solver"
)

// RunWant is what a run is asked beside the scenario.
type RunWant struct {
	Solvers  []string // names; none: as the scenario says, else all
	Apart    bool     // built-in solvers in processes of their own
	Out      string   // result folder; "": beside the scenario; "none": no folder
	Force    bool     // replace whatever stands there
	Progress func(Progress)
	Log      io.Writer // what plugins write; nil: dropped
}

// Progress tells how far one solution is.
type Progress struct {
	Solver string
	Level  int
	Share  float64
}

// History is one record for a picture.
type History struct {
	Name, Unit string
	Every      float64
	Values     []float64
}

// runner carries a run from use case to folder.
type runner struct {
	*loaded
	want      RunWant
	file      string
	solvers   *solverSet
	loads     forceSet
	session   *measure.Session
	outcome   *compare.Outcome
	answers   *measure.Answers
	asked     int // requirements and collects of the scenario itself
	log       logBook
	started   time.Time
	solved    time.Duration
	dir       string
	doc       *RunDoc
	histories []History
}

// Run is the main job: solve with every solver that can, hold them against one
// another, judge, and write the result folder.
func (a *App) Run(ctx context.Context, in Input, want RunWant) (*RunDoc, []History, Status, error) {
	l, err := a.load("run", in)
	if err != nil {
		return nil, nil, Outside, err
	}
	l.bind()
	l.needLine()
	r := &runner{loaded: l, want: want, file: l.head.Scenario.File, started: now(), doc: emptyRun()}
	wanted, err := r.solverWant()
	if err != nil {
		l.note(diag.List{{Code: "unknown-solver", Span: diag.Span{File: diag.NewFile("command line", "")}, Summary: err.Error()}})
	}
	defer r.loads.close()
	if !l.failed() {
		r.loads.log = want.Log
		if err := r.prepare(ctx); err != nil {
			return nil, nil, Outside, err
		}
	}
	if l.failed() {
		r.doc.Head = l.head
		return r.doc, nil, BadInput, nil
	}
	r.solvers = chosen(ctx, wanted)
	defer r.solvers.close()
	status, err := r.solve(ctx, r.solvers.list)
	if err != nil {
		return nil, nil, status, err
	}
	return r.doc, r.histories, status, nil
}

func emptyRun() *RunDoc {
	return &RunDoc{
		Watches: []WatchRow{}, Solvers: []SolverRow{}, Requirements: []RequirementRow{}, Collected: []Collected{}, Energy: []EnergyRow{},
		Cautions: []CautionNote{}, Plugins: []PluginUse{}, Plucks: []PluckFacts{}, Notes: []string{}, Verdict: "unsettled",
	}
}

// solverWant is which solvers run: those of the command line, else those of the
// scenario.
func (r *runner) solverWant() (solverWant, error) {
	w := solverWant{apart: r.want.Apart, log: r.want.Log}
	if len(r.want.Solvers) > 0 {
		return w, w.named(r.want.Solvers)
	}
	if r.net != nil {
		w.builtin, w.foreign = r.net.Run.Solvers, r.net.Run.Foreign
	}
	return w, nil
}

// prepare looks at the result folder's place and sets up the questions, before
// anything is computed.
func (r *runner) prepare(ctx context.Context) error {
	if r.want.Out != noFolder {
		r.dir = r.want.Out
		if r.dir == "" {
			r.dir = defaultDir(r.file)
		}
		if err := permitted(r.dir, r.file, r.want.Force); err != nil {
			return err
		}
	}
	t := *r.compiled.Template
	r.asked = len(t.Collects)
	t.Collects = append(append([]scenario.Collect(nil), t.Collects...), watchFigures(&t)...)
	var err error
	if r.still() {
		r.warn("nothing-happens", "nothing happens to the line, so every record is zero; say an excitation")
	}
	o := r.measuring()
	o.WorkOut = r.loads.workOut(ctx)
	r.session, err = measure.New(&t, nil, o)
	if err != nil {
		r.refuse(err)
	}
	return nil
}

// still tells whether records are asked for and nothing moves the line.
func (r *runner) still() bool {
	n := r.net
	return len(n.Watches) > 0 && len(n.Plucks)+len(n.Starts)+len(n.Pushes)+len(n.Presses)+len(n.Moves)+len(n.Rolls)+len(n.Loads) == 0
}

// noSamples keeps records from being drawn over the doubtful inputs: a run for
// each draw would take minutes, and the language carries doubt to first order
// unless it is told to sample. Where first order does not hold, the answer says so.
const noSamples = 1

// watchFigures asks for peak, rms and final value of every watched quantity, so
// that these carry the doubt of the inputs like any collected value.
func watchFigures(t *scenario.Template) []scenario.Collect {
	var out []scenario.Collect
	for i := range t.Model.Watches {
		w := &t.Model.Watches[i]
		if w.Along {
			continue
		}
		for _, q := range w.Quantities {
			for _, kind := range figureKinds {
				m := scenario.MeasureOf[formula.Program]{Kind: kind, Source: w.Name + "." + q.String(), Watch: i, Quantity: q, Line: -1, Segment: -1}
				out = append(out, scenario.Collect{Source: m.Source, Unit: q.Unit(), Value: formula.Arg(0), Measures: []scenario.MeasureOf[formula.Program]{m}})
			}
		}
	}
	return out
}

var figureKinds = [...]scenario.MeasureKind{scenario.Peak, scenario.RMS, scenario.Final}

// solve runs the comparison, answers the questions and writes the folder.
func (r *runner) solve(ctx context.Context, solvers []solver.Solver) (Status, error) {
	m := r.session.Centre().Mesh
	run := &r.net.Run
	if len(m.Channels) > 0 || r.session.NeedsRun() {
		asked, energyLeft := r.session.Asked()
		inner := ctx
		if run.LimitTime > 0 {
			var cancel context.CancelFunc
			inner, cancel = context.WithTimeout(ctx, time.Duration(run.LimitTime*float64(time.Second)))
			defer cancel()
		}
		var err error
		r.outcome, err = compare.Run(inner, m, solvers, compare.Options{
			Agree: run.Agree, Effort: run.Effort, LimitWork: int64(run.LimitWork), LimitMemory: int64(run.LimitMemory),
			Workers: workers(), Asked: asked, EnergyLeft: energyLeft, Progress: r.progress(),
		})
		r.solved = now().Sub(r.started)
		if status, stop, err := r.stopped(ctx, err); stop {
			return status, err
		}
	}
	if err := r.answer(ctx); err != nil {
		if ctx.Err() != nil {
			return Interrupted, errInterrupted
		}
		return Defect, err
	}
	r.document()
	if r.dir != "" {
		if err := r.write(); err != nil {
			return Outside, err
		}
	}
	return r.status(ctx), nil
}

// errInterrupted says that nothing was complete when the user stopped the run.
var errInterrupted = errors.New("stopped before any solver had finished three levels; nothing was written")

// stopped sorts out how a comparison ended.
func (r *runner) stopped(ctx context.Context, err error) (status Status, stop bool, out error) {
	var absent *compare.AllAbsentError
	switch {
	case err == nil:
		return Done, false, nil
	case errors.As(err, &absent):
		return Outside, true, err
	case r.outcome == nil && ctx.Err() != nil:
		return Interrupted, true, errInterrupted
	case r.outcome == nil:
		return Outside, true, fmt.Errorf("the limit on time ended the run before any solver had finished three levels")
	}
	return Done, false, nil // cut, but with something to show
}

func (r *runner) progress() func(compare.Progress) {
	if r.want.Progress == nil {
		return nil
	}
	return func(p compare.Progress) { r.want.Progress(Progress(p)) }
}

// answer answers requirements and collects. After an interruption only what
// needs no further solving is answered.
func (r *runner) answer(ctx context.Context) error {
	if r.outcome != nil && r.outcome.Cut {
		ctx = context.WithoutCancel(ctx)
	}
	var err error
	r.answers, err = r.session.Answer(ctx, r.outcome)
	return err
}

// status is the exit code that the document deserves.
func (r *runner) status(ctx context.Context) Status {
	switch {
	case ctx.Err() != nil:
		return Interrupted
	case r.doc.Verdict == "met" || r.doc.Verdict == "agree" || r.doc.Verdict == "alone":
		return Done
	}
	return NotAsAsked
}

// verdictOrder ranks verdicts from best to worst; a run's is its worst.
var verdictOrder = []string{"met", "agree", "alone", "undecided", "unsettled", "not met", "differ"}

func worstVerdict(all []string) string {
	worst := 0
	for _, v := range all {
		for i, known := range verdictOrder {
			if v == known {
				worst = max(worst, i)
			}
		}
	}
	return verdictOrder[worst]
}

// collected turns answers into rows; the scenario's own come first.
func collectedRows(list []measure.Collected) []Collected {
	out := []Collected{}
	for _, c := range list {
		out = append(out, Collected{Text: c.Of.Source, Value: c.Value, Note: c.Note})
	}
	return out
}

// figureOf finds the figure of a watch's quantity among the answers.
func (r *runner) figureOf(source string, kind scenario.MeasureKind) (doubt.Number, bool) {
	for _, c := range r.answers.Collected[min(r.asked, len(r.answers.Collected)):] {
		if c.Of.Source == source && c.Of.Measures[0].Kind == kind {
			return c.Value, true
		}
	}
	return doubt.Number{}, false
}
