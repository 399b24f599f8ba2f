package conform_test

import (
	"context"
	"testing"

	"github.com/tautspan/tautspan/engine/compare"
	"github.com/tautspan/tautspan/engine/solver"
	"github.com/tautspan/tautspan/plugins/characteristic"
	"github.com/tautspan/tautspan/plugins/conform"
	"github.com/tautspan/tautspan/plugins/differences"
	"github.com/tautspan/tautspan/plugins/spectral"
	"github.com/tautspan/tautspan/plugins/transform"
)

func solvers() []solver.Solver {
	return []solver.Solver{differences.New(), spectral.New(), characteristic.New(), transform.New()}
}

// rounding is the relative error below which no order can be read any more. A
// solution that is exact but for rounding comes to 1e-12, an inverted transform,
// whose contour raises rounding, to 3e-10; no bar below 1e-8 is ever claimed by
// engine/compare.
const rounding = 1e-9

// Every solver meets every manufactured solution: the order it claims, and an
// error bar that holds the true error.
func TestManufactured(t *testing.T) {
	for i, c := range conform.Cases() {
		if testing.Short() && i%3 != 0 {
			continue // a third of the cases: all solvers, most features
		}
		for _, s := range solvers() {
			t.Run(c.Name+"/"+s.Name(), func(t *testing.T) {
				f, err := conform.Measure(context.Background(), s, c)
				if err != nil {
					t.Fatal(err)
				}
				if len(f.Refused) > 0 && c.Beyond {
					t.Skip(f.Refused)
				}
				if len(f.Refused) > 0 {
					t.Fatalf("refused: %v", f.Refused)
				}
				t.Log(f)
				if f.Neglect == 0 {
					checkOrder(t, &f)
				}
				bar := compare.NewBar(f.Difference[0], f.Difference[1], f.Ratio, f.Claimed)
				if last := f.Error[len(f.Error)-1]; last > bar.Bound+f.Neglect && last > rounding {
					t.Errorf("the error %.2e lies outside the bar %.2e", last, bar.Bound)
				}
			})
		}
	}
}

// checkOrder asks for the claimed order less 0.3, which leaves room for the
// coarsest level not being in the asymptotic range yet; a solver that claims to
// be faster than any order must gain a factor of ten a level.
func checkOrder(t *testing.T, f *conform.Finding) {
	t.Helper()
	last := f.Error[len(f.Error)-1]
	switch {
	case last < rounding:
	case f.Claimed == 0 && last > f.Error[len(f.Error)-2]/10:
		t.Errorf("claims to be faster than any order, and its errors fall as %.1e", f.Error)
	case f.Claimed > 0 && f.Observed < f.Claimed-0.3:
		t.Errorf("claims order %g and shows %.2f", f.Claimed, f.Observed)
	}
}
