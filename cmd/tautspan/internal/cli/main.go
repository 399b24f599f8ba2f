package cli

import (
	"context"
	"errors"
	"fmt"
	"io"
	"os"
	"os/signal"
	"runtime/debug"
	"slices"
	"strings"

	"github.com/alecthomas/kong"

	"github.com/tautspan/tautspan/cmd/tautspan/internal/app"
)

// Streams are the program's three streams.
type Streams struct {
	In  io.Reader
	Out io.Writer
	Err io.Writer
}

// Exit codes; a promise within version 1.
const (
	exitDone        = 0
	exitNotAsAsked  = 1
	exitInput       = 2
	exitOutside     = 3
	exitDefect      = 4
	exitInterrupted = 130
)

// grammar is every command with its flags.
type grammar struct {
	common `embed:""`

	Check     checkCmd     `cmd:"" help:"Read and judge scenarios without running: what is wrong, what is known at once, which solver can."`
	Tidy      tidyCmd      `cmd:"" help:"Print scenarios in their one canonical layout."`
	Modes     modesCmd     `cmd:"" help:"Natural vibrations: frequency, damping, decay, shape; exact and counted."`
	Respond   respondCmd   `cmd:"" help:"Steady vibration against frequency; shares of a wave reflected, passed, absorbed at joints and taken at ends."`
	Arrivals  arrivalsCmd  `cmd:"" help:"The pulse ledger: which front reaches which watch, when, by which path, how strong."`
	Run       runCmd       `cmd:"" help:"Solve with every solver that can, hold them against one another, judge the requirements."`
	Peaks     peaksCmd     `cmd:"" help:"What a site record holds: peaks with uncertainty, decays, the series they form."`
	Plan      planCmd      `cmd:"" help:"Before the climb: frequencies, sensor places off the nodes, record length, the intervals to expect."`
	Sweep     sweepCmd     `cmd:"" help:"Where a let is best, where two values meet, and every case of what is varied."`
	Worker    workerCmd    `cmd:"" hidden:"" help:"Lend this machine to sweeps (not built yet)."`
	Fit       fitCmd       `cmd:"" help:"Seek the lets that explain site readings: tension, stiffness, with intervals and verdicts."`
	Change    changeCmd    `cmd:"" help:"Hold two surveys against one another: differences with intervals, temperature taken out."`
	Stock     stockCmd     `cmd:"" help:"The built-in stock with its sources."`
	Why       whyCmd       `cmd:"" help:"Explain a diagnostic by its code; 'why scope' says what this program does not answer."`
	Plugins   pluginsCmd   `cmd:"" help:"Solvers, loads and laws of others: what is installed and trusted."`
	Serve     serveCmd     `cmd:"" name:"plugin-serve" hidden:"" help:"Serve a built-in solver to this program."`
	Scenarios scenariosCmd `cmd:"" help:"List the shipped scenarios, or write one out to start from."`
}

// common are the flags of all commands.
type common struct {
	JSON     bool              `name:"json" help:"One JSON document on standard output and nothing else."`
	Set      map[string]string `name:"set" mapsep:"none" placeholder:"NAME=QUANTITY" help:"Give a let another value; repeatable."`
	Units    string            `enum:"si,us" default:"si" help:"Units of what people read: si or us. JSON stays SI."`
	Apart    bool              `help:"Built-in solvers in processes of their own; the same answers."`
	Quiet    bool              `short:"q" help:"Only the answer: no progress, no pictures, no cautions."`
	LogLevel string            `enum:"debug,info,warn,error,off" default:"warn" help:"How much of the log goes to standard error."`
	LogJSON  bool              `name:"log-json" help:"The log as one JSON object a line."`
}

// session is what a command works with.
type session struct {
	ctx context.Context
	Streams
	common
	width    int
	terminal bool // standard error is one
	app      *app.App
}

// exitError carries an exit code through kong; what is to be said was said.
type exitError int

func (e exitError) Error() string { return fmt.Sprintf("exit %d", int(e)) }

// Main runs the program and returns its exit code. A defect in the program ends
// in code 4 with a report, never in a bare crash.
func Main(args []string, s Streams) (code int) {
	defer func() {
		if r := recover(); r != nil {
			fmt.Fprintf(s.Err, "tautspan: a defect in this program: %v\nPlease report it with the text below and the scenario, if you may.\ntautspan %s\n%s\n", r, app.Version, debug.Stack())
			code = exitDefect
		}
	}()
	ctx, stop := signal.NotifyContext(context.Background(), os.Interrupt)
	defer stop()
	return run(ctx, args, s)
}

func run(ctx context.Context, args []string, s Streams) int {
	var g grammar
	exited := -1
	parser, err := kong.New(&g,
		kong.Name("tautspan"),
		kong.Description("Answers for tensioned lines from one text file: stays, hangers, guys, conductors, contact wires, ropes, wires.\nResults are an aid: local codes and licensed practice govern. Start with 'tautspan scenarios'."),
		kong.Writers(s.Out, s.Err),
		kong.Exit(func(code int) { exited = code }),
		kong.UsageOnError(),
		kong.Vars{"version": app.Version},
	)
	if err != nil {
		fmt.Fprintf(s.Err, "tautspan: %v\n", err)
		return exitDefect
	}
	kctx, err := parser.Parse(args)
	if exited >= 0 {
		return exited
	}
	if err != nil {
		return usage(args, s, err)
	}
	session := &session{ctx: ctx, Streams: s, common: g.common, app: app.New()}
	session.width, session.terminal = terminal(s)
	err = kctx.Run(session)
	var code exitError
	switch {
	case err == nil:
		return exitDone
	case errors.As(err, &code):
		return int(code)
	}
	if session.JSON {
		command, _, _ := strings.Cut(kctx.Command(), " ")
		if werr := writeJSON(s.Out, app.FailedHead(command, err)); werr != nil {
			fmt.Fprintf(s.Err, "tautspan: %v\n", werr)
		}
	}
	fmt.Fprintf(s.Err, "tautspan: %v\n", err)
	return exitOutside
}

// usage reports a command line that cannot be read.
func usage(args []string, s Streams, err error) int {
	if slices.Contains(args, "--json") {
		command := ""
		if len(args) > 0 && !strings.HasPrefix(args[0], "-") {
			command = args[0]
		}
		if werr := writeJSON(s.Out, app.UsageHead(command, err.Error())); werr != nil {
			fmt.Fprintf(s.Err, "tautspan: %v\n", werr)
		}
	}
	fmt.Fprintf(s.Err, "tautspan: %v  [usage]\nSay 'tautspan --help' for the commands, 'tautspan COMMAND --help' for their flags.\n", err)
	return exitInput
}
