package cli

import (
	"errors"
	"fmt"
	"io"
	"sync"
	"sync/atomic"

	"github.com/rs/zerolog"
	"github.com/vbauerster/mpb/v8"
	"github.com/vbauerster/mpb/v8/decor"

	"github.com/tautspan/tautspan/cmd/tautspan/internal/app"
	"github.com/tautspan/tautspan/cmd/tautspan/internal/store"
)

// runCmd is the main job.
type runCmd struct {
	File   string   `arg:"" help:"Scenario file; - for standard input."`
	Out    string   `placeholder:"DIR" help:"Result folder; <file>.result beside the scenario by default, 'none' for no folder."`
	Force  bool     `help:"Replace whatever stands at the result folder's place."`
	Solver []string `placeholder:"NAME" help:"Only this solver; repeatable."`
}

// Run runs the scenario.
func (c *runCmd) Run(s *session) error {
	log := s.logger()
	bars := newBars(s)
	want := app.RunWant{Apart: s.Apart, Log: pluginLog{log}, Solvers: c.Solver, Out: c.Out, Force: c.Force, Progress: func(p app.Progress) {
		bars.tell(p)
		if p.Share >= 1 {
			log.Info().Str("solver", p.Solver).Int("level", p.Level).Msg("solved")
		}
	}}
	doc, histories, status, err := s.app.Run(s.ctx, s.input(c.File), want)
	bars.done()
	if err != nil {
		return s.failed("run", status, err)
	}
	if status == app.Interrupted {
		fmt.Fprintln(s.Err, "tautspan: stopped; what was complete is kept, and marked as cut short")
	}
	log.Info().Str("verdict", doc.Verdict).Str("folder", doc.ResultDir).Msg("done")
	return s.deliver(&doc.Head, doc, int(status), func(p *printer) {
		var records []record
		if !s.Quiet {
			for _, h := range histories {
				records = append(records, record{h.Name, h.Unit, h.Every, h.Values})
			}
		} else {
			doc.Cautions = nil
		}
		p.sayRun(doc, records)
	})
}

// failed reports a command without a document.
func (s *session) failed(command string, status app.Status, err error) error {
	if s.JSON {
		if werr := writeJSON(s.Out, app.FailedHead(command, err)); werr != nil {
			return werr
		}
	}
	word := ""
	if errors.Is(err, store.ErrForeign) {
		word = "  [folder-in-the-way]"
	}
	fmt.Fprintf(s.Err, "tautspan: %v%s\n", err, word)
	return exitError(status)
}

// logger writes the program's log to standard error.
func (s *session) logger() zerolog.Logger {
	level, err := zerolog.ParseLevel(s.LogLevel)
	if s.LogLevel == "off" || err != nil {
		level = zerolog.Disabled
	}
	var w io.Writer = s.Err
	if !s.LogJSON {
		w = zerolog.ConsoleWriter{Out: s.Err, NoColor: true, PartsExclude: []string{zerolog.TimestampFieldName}}
	}
	return zerolog.New(w).Level(level)
}

// bars shows progress, one bar a solver, on a terminal only.
type bars struct {
	mu       sync.Mutex
	progress *mpb.Progress
	bar      map[string]*mpb.Bar
	level    map[string]*atomic.Int64
}

// barSteps is how finely a bar moves.
const barSteps = 1000

func newBars(s *session) *bars {
	if !s.terminal || s.Quiet || s.JSON {
		return &bars{}
	}
	return &bars{progress: mpb.New(mpb.WithOutput(s.Err), mpb.WithWidth(40)), bar: map[string]*mpb.Bar{}, level: map[string]*atomic.Int64{}}
}

func (b *bars) tell(p app.Progress) {
	if b.progress == nil {
		return
	}
	b.mu.Lock()
	defer b.mu.Unlock()
	bar := b.bar[p.Solver]
	if bar == nil {
		level := new(atomic.Int64)
		b.level[p.Solver] = level
		bar = b.progress.AddBar(barSteps, mpb.BarRemoveOnComplete(), mpb.PrependDecorators(
			decor.Name(fmt.Sprintf("%-15s", p.Solver)),
			decor.Any(func(decor.Statistics) string {
				return fmt.Sprintf("level %d ", level.Load())
			}),
		))
		b.bar[p.Solver] = bar
	}
	b.level[p.Solver].Store(int64(p.Level))
	bar.SetCurrent(int64(p.Share * (barSteps - 1)))
}

// done takes the bars away.
func (b *bars) done() {
	if b.progress == nil {
		return
	}
	b.mu.Lock()
	for _, bar := range b.bar {
		bar.Abort(true)
	}
	b.mu.Unlock()
	b.progress.Wait()
}
