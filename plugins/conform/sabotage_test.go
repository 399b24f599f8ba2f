package conform_test

import (
	"context"
	"strings"
	"testing"

	"github.com/tautspan/tautspan/engine/compare"
	"github.com/tautspan/tautspan/engine/compare/trial"
	"github.com/tautspan/tautspan/engine/scenario"
	"github.com/tautspan/tautspan/engine/solver"
	"github.com/tautspan/tautspan/plugins/characteristic"
	"github.com/tautspan/tautspan/plugins/differences"
	"github.com/tautspan/tautspan/plugins/spectral"
)

// The comparison of the built-in solvers raises no alarm on healthy lines, and
// never misses a mistake that can be seen with the naked eye. What it catches of
// small ones is reported; it depends on how sharp the bars are.
func TestSabotage(t *testing.T) {
	lines, passages := 60, 3.0
	if testing.Short() {
		lines = 8
	}
	solvers := []solver.Solver{differences.New(), spectral.New(), characteristic.New()}
	scores, err := trial.Study(context.Background(), solvers, lines, passages, 20, compare.Options{Agree: 0.005, Effort: scenario.Quick, LimitWork: 60_000_000})
	if err != nil {
		t.Fatal(err)
	}
	for i, s := range scores {
		t.Log(s)
		coarse := strings.Contains(s.Name, "sign") || strings.Contains(s.Name, "free") || strings.Contains(s.Name, "swapped")
		switch {
		case i == 0 && s.Raised > 0:
			t.Errorf("%d false alarms on %d healthy lines:\n%s", s.Raised, s.Trials, strings.Join(s.Alarms, "\n"))
		case coarse && s.Raised < s.Trials:
			t.Errorf("%s: %d of %d missed", s.Name, s.Trials-s.Raised, s.Trials)
		}
		if (i == 0 || coarse) && s.Misnamed > 0 {
			t.Errorf("%s: a healthy solver was named %d times", s.Name, s.Misnamed)
		}
	}
}
