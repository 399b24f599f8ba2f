package app

import (
	"context"
	"errors"
	"fmt"
	"io"
	"path/filepath"
	"slices"
	"time"

	"github.com/tautspan/tautspan/cmd/tautspan/internal/store"
	"github.com/tautspan/tautspan/dsl/diag"
	"github.com/tautspan/tautspan/engine/compare"
	"github.com/tautspan/tautspan/engine/measure"
	"github.com/tautspan/tautspan/engine/scenario"
)

// SweepWant is what a sweep is asked beside the scenario.
type SweepWant struct {
	Out      string // folder; "": <file>.sweep beside the scenario; "none": no folder
	Force    bool
	Workers  int // cases at once; 0: one for each processor
	Solvers  []string
	Apart    bool
	Log      io.Writer
	Progress func(done, cases int)
}

// sweeper carries a sweep from use case to folder.
type sweeper struct {
	*loaded
	want    SweepWant
	loads   forceSet
	solvers *solverSet
	doc     *SweepDoc
	table   store.Table
	started time.Time
}

// Sweep answers best and meet, and works out every case of what is varied.
func (a *App) Sweep(ctx context.Context, in Input, want SweepWant) (*SweepDoc, Status, error) {
	l, err := a.load("sweep", in)
	if err != nil {
		return nil, Outside, err
	}
	l.bind()
	l.needLine()
	s := &sweeper{loaded: l, want: want, doc: emptySweep(), started: now()}
	s.loads.log = want.Log
	defer s.loads.close()
	if want.Workers <= 0 {
		s.want.Workers = workers()
	}
	dir := ""
	if want.Out != noFolder && !l.failed() {
		if dir = want.Out; dir == "" {
			dir = l.head.Scenario.File + ".sweep"
		}
		if err := permitted(dir, l.head.Scenario.File, want.Force); err != nil {
			return nil, Outside, err
		}
	}
	if !l.failed() {
		s.nothingAsked()
		w := solverWant{apart: want.Apart, log: want.Log, builtin: l.net.Run.Solvers, foreign: l.net.Run.Foreign}
		if len(want.Solvers) > 0 {
			w.builtin, w.foreign = nil, nil
			if err := w.named(want.Solvers); err != nil {
				l.note(diag.List{{Code: "unknown-solver", Span: diag.Span{File: diag.NewFile("command line", "")}, Summary: err.Error()}})
			}
		}
		s.solvers = chosen(ctx, w)
		defer s.solvers.close()
	}
	if !l.failed() {
		s.answer(ctx)
	}
	s.doc.Head = l.head
	if l.failed() {
		return s.doc, BadInput, nil
	}
	s.doc.Cut = s.doc.Cut || ctx.Err() != nil
	if dir != "" {
		s.doc.ResultDir = dir
		if err := s.write(dir); err != nil {
			return nil, Outside, err
		}
	}
	switch {
	case ctx.Err() != nil:
		return s.doc, Interrupted, nil
	case s.doc.Verdict != "done" && s.doc.Verdict != "met" || s.doc.Failed > 0:
		return s.doc, NotAsAsked, nil
	}
	return s.doc, Done, nil
}

// nothingAsked refuses a scenario that a sweep has no work in.
func (s *sweeper) nothingAsked() {
	t := s.compiled.Template
	if len(t.Bests)+len(t.Meets)+len(t.Varies) == 0 && t.Sample == nil {
		s.refuseWhole("nothing-to-sweep", "this scenario says no best, meet, vary or sample")
	}
}

// answer fills the document. Errors of the scenario become diagnostics.
func (s *sweeper) answer(ctx context.Context) {
	s.doc.Cautions = append(s.doc.Cautions, cautions(s.net, formatEnergy)...)
	var verdicts []string
	for _, step := range []func(context.Context) error{s.nominal, s.meets, s.bests, s.cases} {
		if err := step(ctx); err != nil {
			if ctx.Err() != nil {
				break
			}
			s.passed(err)
			return
		}
	}
	for i := range s.doc.Requirements {
		verdicts = append(verdicts, s.doc.Requirements[i].Verdict)
	}
	for _, v := range s.doc.Summary.Verdicts {
		if s.drawn() {
			break // single draws are no verdict: their counts tell how likely each is
		}
		for _, c := range []struct {
			word  string
			count int
		}{{"met", v.Met}, {"undecided", v.Undecided}, {"not met", v.NotMet}} {
			if c.count > 0 {
				verdicts = append(verdicts, c.word)
			}
		}
	}
	if len(verdicts) > 0 {
		s.doc.Verdict = worstVerdict(verdicts)
	}
}

// drawn tells whether cases are drawn at random.
func (s *sweeper) drawn() bool {
	t := s.compiled.Template
	return t.Sample != nil || slices.ContainsFunc(t.Varies, func(v scenario.Vary) bool { return v.Draw != scenario.Grid })
}

// passed turns what cannot be answered into a diagnostic.
func (s *sweeper) passed(err error) {
	var path *scenario.PathError
	var absent *compare.AllAbsentError
	switch {
	case errors.As(err, &path):
		s.refuse(err)
	case errors.As(err, &absent):
		s.refuseWhole("no-solver", err.Error())
	default:
		s.refuseWhole("no-answer", err.Error())
	}
}

// options are those of a session at a case or a place of a search.
func (s *sweeper) options(ctx context.Context, atOnce int) measure.Options {
	o := s.measuring()
	o.Workers, o.WorkOut = atOnce, s.loads.workOut(ctx)
	return o
}

// nominal judges what needs no run at the lets as they stand.
func (s *sweeper) nominal(ctx context.Context) error {
	session, err := measure.New(s.compiled.Template, nil, s.options(ctx, s.want.Workers))
	if err != nil {
		return err
	}
	answers, err := session.Answer(ctx, nil)
	if err != nil {
		return err
	}
	for i := range answers.Requirements {
		s.doc.Requirements = append(s.doc.Requirements, requirementRow(&answers.Requirements[i]))
	}
	s.doc.Collected = collectedRows(answers.Collected)
	for _, w := range answers.Waiting {
		s.doc.Notes = append(s.doc.Notes, w+" waits for a run")
	}
	return nil
}

// outcome runs the solvers where a session needs a run; nil where it does not.
func (s *sweeper) outcome(ctx context.Context, session *measure.Session, atOnce int) (*compare.Outcome, error) {
	if !session.NeedsRun() {
		return nil, nil
	}
	run := &session.Centre().Network.Run
	asked, energyLeft := session.Asked()
	return compare.Run(ctx, session.Centre().Mesh, s.solvers.list, compare.Options{
		Agree: run.Agree, Effort: run.Effort, LimitWork: int64(run.LimitWork), LimitMemory: int64(run.LimitMemory),
		Workers: atOnce, Asked: asked, EnergyLeft: energyLeft,
	})
}

// write puts the folder in its place.
func (s *sweeper) write(dir string) error {
	if len(s.table.Columns) > 0 {
		s.doc.Files = []string{"cases.csv", "cases.parquet"}
	}
	doc := *s.doc
	doc.ResultDir = "."
	doc.Scenario.File = filepath.Base(doc.Scenario.File)
	result, err := encode(&doc)
	if err != nil {
		return err
	}
	timing, err := encode(map[string]any{"started": s.started.UTC().Format(time.RFC3339Nano), "total_s": now().Sub(s.started).Seconds(), "workers": s.want.Workers})
	if err != nil {
		return err
	}
	var log logBook
	log.event("scenario", map[string]any{"file": filepath.Base(s.head.Scenario.File), "sha256": s.head.Scenario.SHA256, "tautspan": Version})
	for _, f := range s.doc.Failures {
		log.event("case failed", map[string]any{"case": f.Case, "reason": f.Reason})
	}
	log.event("done", map[string]any{"cases": s.doc.Cases, "done": s.doc.Done, "failed": s.doc.Failed, "verdict": s.doc.Verdict})
	folder := &store.Folder{Result: result, Timing: timing, Scenario: []byte(s.compiled.Fold()), Log: log.buf.Bytes(), Series: s.table, SeriesName: "cases"}
	if err := store.Write(dir, s.head.Scenario.File, folder, s.want.Force); err != nil {
		return fmt.Errorf("the sweep's folder: %w", err)
	}
	return nil
}
