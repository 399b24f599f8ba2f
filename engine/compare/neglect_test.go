package compare

import (
	"math"
	"sync"
	"testing"

	"github.com/tautspan/tautspan/engine/scenario"
	"github.com/tautspan/tautspan/engine/solver"
)

// A voice that leaves something out carries that in its bars, agrees with the
// others in spite of it, and is not refined for what refinement cannot give.
func TestNeglectIsInTheBars(t *testing.T) {
	const share = 0.1
	m := plain(400, scenario.Displacement)
	for _, admits := range []bool{true, false} {
		fakes := three()
		truth := fakes[0].truth
		fakes[0].truth = func(c int, s float64) float64 { return (1 + 0.6*share) * truth(c, s) }
		fakes[0].work = 1   // the cheapest
		var lock sync.Mutex // levels are solved at once
		finest := 0
		fakes[0].after = func(level int, r *solver.Result) {
			lock.Lock()
			finest = max(finest, level)
			lock.Unlock()
			if admits {
				r.Neglect = share
			}
		}
		out := run(t, m, fakes, Options{Agree: 0.001})
		record := out.Channels[0].Observables[0]
		if record.Kind != Record {
			t.Fatalf("the first observable is %v", record.Kind)
		}
		if !admits {
			if out.Verdict != Differ {
				t.Errorf("a silent neglect: %v", out.Verdict)
			}
			continue
		}
		if out.Verdict != Agree || record.Best == 0 {
			t.Errorf("verdict %v, best %d", out.Verdict, record.Best)
		}
		if bar := record.Bars[0] / record.Scale; math.Abs(bar/share-1) > 0.1 {
			t.Errorf("bar %g of the record, neglect %g", bar, share)
		}
		if finest > levels-1 {
			t.Errorf("refined to level %d", finest)
		}
	}
}
