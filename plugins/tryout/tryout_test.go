package tryout_test

import (
	"context"
	"math"
	"strings"
	"testing"

	"github.com/tautspan/tautspan/plugins/author"
	"github.com/tautspan/tautspan/plugins/characteristic"
	"github.com/tautspan/tautspan/plugins/tryout"
)

// A built-in solver holds everything.
func TestBuiltIn(t *testing.T) {
	for _, c := range tryout.Solver(context.Background(), characteristic.New()) {
		t.Log(c)
		if c.Failed() {
			t.Error(c)
		}
	}
}

// A solver that answers zeros is found out, and so are loads and laws that break
// their promises.
func TestFoundOut(t *testing.T) {
	failed := func(what string, checks []tryout.Check, want string) {
		t.Helper()
		for _, c := range checks {
			if c.Failed() && strings.Contains(c.String(), want) {
				return
			}
		}
		t.Errorf("%s: nothing fails with %q in %v", what, want, checks)
	}
	failed("zeros", tryout.Run(context.Background(), zeros{}), "one vibration of a held line: errors")
	failed("a load that never repeats itself", tryout.Run(context.Background(), &restless{}), "and then")
	failed("a law that drives", tryout.Run(context.Background(), drive{}), "take -")
	failed("no plugin", tryout.Run(context.Background(), 3), "a plugin is")
}

type zeros struct{}

func (zeros) About() author.About                { return author.About{Name: "zeros", Version: "1"} }
func (zeros) Refuses(p *author.Problem) []string { return p.Beyond() }
func (zeros) Plan(*author.Problem, author.Want) (author.Plan, error) {
	return author.Plan{Cells: 1, Steps: 1, Work: 1, Bytes: 1}, nil
}
func (zeros) Solve(context.Context, *author.Problem, author.Want, *author.Records, func(float64)) (author.Outcome, error) {
	return author.Outcome{Order: 2, Ratio: 2, Energy: author.Energy{Most: 1}}, nil
}

type restless struct{ n float64 }

func (*restless) About() author.About                               { return author.About{Name: "restless", Version: "1"} }
func (*restless) Prepare(author.LoadWant) (float64, float64, error) { return 0.1, 1, nil }
func (r *restless) Evaluate(_ context.Context, _ author.LoadWant, _ []float64, f [][]float64) error {
	for k := range f {
		for i := range f[k] {
			r.n++
			f[k][i] = math.Sin(r.n)
		}
	}
	return nil
}

type drive struct{}

func (drive) About() author.About {
	return author.About{Name: "drive", Version: "1", Dissipates: true}
}
func (drive) Written(map[string]float64) (string, error)         { return "", nil }
func (drive) Follow(map[string]float64) (author.Follower, error) { return drive{}, nil }
func (drive) Force(_, _, v float64, _ bool) (float64, error)     { return 5 * v, nil }
