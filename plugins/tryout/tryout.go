package tryout

import (
	"context"
	"fmt"

	"github.com/tautspan/tautspan/engine/solver"
	"github.com/tautspan/tautspan/plugins/author"
	"github.com/tautspan/tautspan/plugins/host"
)

// Outcome is how a check ended.
type Outcome string

// A plugin may refuse a case that is beyond it; that is no failure.
const (
	Holds   Outcome = "holds"
	Refused Outcome = "refused"
	Fails   Outcome = "fails"
)

// Check is one thing that a plugin must do, and how it did.
type Check struct {
	Name    string  `json:"name"`
	Outcome Outcome `json:"outcome"`
	Detail  string  `json:"detail"`
}

// Failed tells whether the check failed.
func (c Check) Failed() bool { return c.Outcome == Fails }

// String is a line for a log.
func (c Check) String() string { return fmt.Sprintf("%-7s %s: %s", c.Outcome, c.Name, c.Detail) }

// Run tries an author.Solver, Load or Law in this process.
func Run(ctx context.Context, served any) []Check {
	switch s := served.(type) {
	case author.Solver:
		return Solver(ctx, host.InProcess(s))
	case author.Load:
		return Load(ctx, s)
	case author.Law:
		return Law(ctx, s)
	}
	return []Check{{"kind", Fails, fmt.Sprintf("a plugin is a Solver, a Load or a Law, and this is a %T", served)}}
}

// book collects checks.
type book struct{ checks []Check }

func (b *book) note(name string, ok bool, detail string, args ...any) {
	c := Check{Name: name, Outcome: Holds, Detail: fmt.Sprintf(detail, args...)}
	if !ok {
		c.Outcome = Fails
	}
	b.checks = append(b.checks, c)
}

func (b *book) refused(name, why string) {
	b.checks = append(b.checks, Check{name, Refused, why})
}

var _ solver.Solver = (*host.Solver)(nil)
