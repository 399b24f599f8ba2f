package cli

import (
	"errors"
	"fmt"

	"github.com/vbauerster/mpb/v8"
	"github.com/vbauerster/mpb/v8/decor"

	"github.com/tautspan/tautspan/cmd/tautspan/internal/app"
)

// sweepCmd answers best, meet, vary and sample.
type sweepCmd struct {
	File    string   `arg:"" help:"Scenario file; - for standard input."`
	Out     string   `placeholder:"DIR" help:"Result folder; <file>.sweep beside the scenario by default, 'none' for no folder."`
	Force   bool     `help:"Replace whatever stands at the result folder's place."`
	Solver  []string `placeholder:"NAME" help:"Only this solver, where cases need a run; repeatable."`
	Workers int      `placeholder:"N" help:"Cases at once; one for each processor by default. The answers are the same."`
	Via     string   `placeholder:"URL" help:"Spread the cases over a cluster (not built yet)."`
	Part    string   `placeholder:"I/N" help:"Only one part of many (not built yet)."`
	Join    []string `placeholder:"DIR" help:"Put parts together (not built yet)."`
}

// errUnbuilt is what flags of several machines end in.
var errUnbuilt = errors.New("is not built in this version: a sweep runs on one machine")

// Run sweeps.
func (c *sweepCmd) Run(s *session) error {
	switch {
	case c.Via != "":
		return s.badFlag("sweep", "--via", errUnbuilt)
	case c.Part != "":
		return s.badFlag("sweep", "--part", errUnbuilt)
	case len(c.Join) > 0:
		return s.badFlag("sweep", "--join", errUnbuilt)
	case c.Workers < 0 || c.Workers > 1024:
		return s.badFlag("sweep", "--workers", fmt.Errorf("must lie between 1 and 1024, and is %d", c.Workers))
	}
	log := s.logger()
	bar := newCaseBar(s)
	doc, status, err := s.app.Sweep(s.ctx, s.input(c.File), app.SweepWant{
		Out: c.Out, Force: c.Force, Workers: c.Workers, Solvers: c.Solver, Apart: s.Apart, Log: pluginLog{log}, Progress: bar.tell,
	})
	bar.done()
	if err != nil {
		return s.failed("sweep", status, err)
	}
	if status == app.Interrupted {
		fmt.Fprintf(s.Err, "tautspan: stopped; %d of %d cases are done and kept\n", doc.Done, doc.Cases)
	}
	return s.deliver(&doc.Head, doc, int(status), func(p *printer) { p.saySweep(doc, !s.Quiet) })
}

// workerCmd would lend this machine to sweeps.
type workerCmd struct {
	Via string `placeholder:"URL" help:"Where the sweeps are."`
}

// Run says that it cannot.
func (c *workerCmd) Run(s *session) error { return s.badFlag("worker", "worker", errUnbuilt) }

// caseBar shows how many cases are done, on a terminal only.
type caseBar struct {
	progress *mpb.Progress
	bar      *mpb.Bar
}

func newCaseBar(s *session) *caseBar {
	if !s.terminal || s.Quiet || s.JSON {
		return &caseBar{}
	}
	p := mpb.New(mpb.WithOutput(s.Err), mpb.WithWidth(40))
	return &caseBar{p, p.AddBar(1, mpb.BarRemoveOnComplete(), mpb.PrependDecorators(decor.Name("cases "), decor.CountersNoUnit("%d of %d")))}
}

// tell may be called from several goroutines.
func (b *caseBar) tell(done, cases int) {
	if b.bar == nil {
		return
	}
	b.bar.SetTotal(int64(cases), false)
	b.bar.SetCurrent(int64(done))
}

func (b *caseBar) done() {
	if b.bar != nil {
		b.bar.Abort(true)
		b.progress.Wait()
	}
}
