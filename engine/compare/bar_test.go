package compare

import (
	"math"
	"testing"

	"pgregory.net/rapid"
)

// Published worked examples of grid convergence.
//
//   - Roache, J. Fluids Eng. 116 (1994) 405-413, as in the NPARC Alliance tutorial
//     "Examining Spatial (Grid) Convergence" (figures from memory): 0.97050,
//     0.96854, 0.96178 at ratio 2; order 1.786170, GCI 0.103083 % and 0.356249 %.
//   - Celik, Ghia, Roache, Freitas, J. Fluids Eng. 130 (2008) 078001, table 1
//     (from memory): 6.063, 5.972, 5.863; order 1.53, ratio 1.5 between the finer
//     two, GCI 2.2 %. Its ratios differ, which NewBar does not take, so the change
//     of the coarser level is put in as the one that gives the printed order.
func TestPublishedGridConvergence(t *testing.T) {
	fine, middle, coarse := 0.97050, 0.96854, 0.96178
	b := NewBar(middle-coarse, fine-middle, 2, 2)
	// Half a unit of the last printed figure.
	near(t, "order", b.Order, 1.786170, 5e-7)
	near(t, "fine index", b.Bound/fine, 0.00103083, 5e-9)
	near(t, "asymptotic range", b.Bound/fine*math.Pow(2, b.Order)/0.00356249, 0.997980, 5e-6)

	fine, middle = 6.063, 5.972
	order := 1.53396902062817 // of the same inputs with r32 = 4/3, recomputed; printed 1.53
	e2 := fine - middle
	b = NewBar(e2*math.Pow(1.5, order), e2, 1.5, 2)
	near(t, "order", b.Order, order, 1e-12)
	near(t, "fine index", b.Bound/fine, 0.022, 5e-4)
}

func near(t *testing.T, what string, got, want, tolerance float64) {
	t.Helper()
	if !(math.Abs(got-want) <= tolerance) {
		t.Errorf("%s: %.9g, want %.9g within %.2g", what, got, want, tolerance)
	}
}

func TestBarRules(t *testing.T) {
	for _, c := range []struct {
		name                  string
		e1, e2, ratio, theory float64
		order, bound          float64
		stuck                 bool
	}{
		// By hand from the rules in the comment of NewBar.
		{"order of theory", 4, 1, 2, 2, 2, 1.25 / 3, false},
		{"a little faster than theory", 5, 1, 2, 2, 2, 1.25 * 5 / 4 / 3, false},
		{"much faster than theory is not believed", 16, 1, 2, 2, 2, 3 * 4.0 / 3, false},
		{"a little below", 3, 1, 2, 2, math.Log2(3), 1.25 / 2, false},
		{"far below", 2, 1, 2, 2, 1, 3, false},
		{"not converging", 1.2, 1, 2, 2, 0.5, 3.6, true},
		{"growing", 1, 2, 2, 2, 0.5, 6, true},
		{"from nothing to something", 0, 2, 2, 2, 0.5, 6, true},
		{"spectral", 10, 1, 1.5, 0, math.NaN(), 1, false},
		{"spectral slow", 1.5, 1, 1.5, 0, math.NaN(), 3, false},
		{"spectral growing", 1, 2, 1.5, 0, math.NaN(), 6, true},
		{"exact", 0, 0, 2, 2, math.NaN(), 0, false},
		{"no last change is not believed", 1, 0, 2, 2, 2, 3 * 0.25 / 3, false},
	} {
		b := NewBar(c.e1, c.e2, c.ratio, c.theory)
		if !(b.Order == c.order || math.IsNaN(b.Order) && math.IsNaN(c.order) || math.Abs(b.Order-c.order) < 1e-14) ||
			math.Abs(b.Bound-c.bound) > 1e-14*math.Max(1, c.bound) || b.NotConverging != c.stuck {
			t.Errorf("%s: %+v, want order %g bound %g stuck %v", c.name, b, c.order, c.bound, c.stuck)
		}
	}
}

func TestBarGrowsWithTheChange(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		e2 := rapid.Float64Range(1e-9, 1).Draw(t, "e2")
		fall := rapid.Float64Range(0.1, 40).Draw(t, "fall")
		scale := rapid.Float64Range(1e-6, 1e6).Draw(t, "scale")
		theory := rapid.SampledFrom([]float64{0, 1, 2, 4}).Draw(t, "theory")
		b := NewBar(fall*e2, e2, 2, theory)
		s := NewBar(fall*e2*scale, e2*scale, 2, theory)
		if math.Abs(s.Bound-b.Bound*scale) > 1e-9*s.Bound {
			t.Fatalf("in other units %g, not %g", s.Bound, b.Bound*scale)
		}
		// The least bar at these orders: F/(2^4 - 1) of the last change.
		if b.Bound < e2*1.25/15 {
			t.Fatalf("bar %g for a change of %g", b.Bound, e2)
		}
	})
}
