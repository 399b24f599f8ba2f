package compare

import (
	"math"
	"testing"
)

func TestRule(t *testing.T) {
	inf := math.Inf(1)
	for _, c := range []struct {
		name    string
		n       int
		pairs   []Pair
		agree   float64
		alone   float64
		verdict Verdict
		odd     int
		power   float64
	}{
		{"one, sharp", 1, nil, 0.01, 0.004, Alone, -1, 0.004},
		{"one, blunt", 1, nil, 0.01, 0.04, Unsettled, -1, 0.04},
		{"two agree", 2, []Pair{{0, 1, 1, 0.5, 0.008}}, 0.01, inf, Agree, -1, 0.008},
		{"two agree but prove little", 2, []Pair{{0, 1, 1, 0.5, 0.08}}, 0.01, inf, Unsettled, -1, 0.08},
		{"two between", 2, []Pair{{0, 1, 1, 1.5, 0.008}}, 0.01, inf, Unsettled, -1, 0.008},
		{"two between, far within what is asked", 2, []Pair{{0, 1, 1, 1.5, 0.002}}, 0.01, inf, Agree, -1, 0.005},
		{"two differ", 2, []Pair{{0, 1, 1, 2.1, 0.008}}, 0.01, inf, Differ, -1, 0.008},
		{"at the limits", 2, []Pair{{0, 1, 1, 1, 0.01}}, 0.01, inf, Agree, -1, 0.01},
		{"third odd", 3, []Pair{{0, 1, 1, 0.5, 0.008}, {0, 2, 1, 4, 0.009}, {1, 2, 1, 3, 0.009}}, 0.01, inf, Differ, 2, 0.008},
		{"one differing pair of three: either end may be odd", 3, []Pair{{0, 1, 1, 0.5, 0.008}, {0, 2, 1, 4, 0.009}, {1, 2, 1, 0.9, 0.02}}, 0.01, inf, Differ, -1, 0.008},
		{"one differing pair, one end closer to the rest", 3, []Pair{{0, 1, 1, 0.5, 0.008}, {0, 2, 1, 4, 0.009}, {1, 2, 1, 1.5, 0.009}}, 0.01, inf, Differ, 2, 0.008},
		{"third odd, others between", 3, []Pair{{0, 1, 1, 1.5, 0.008}, {0, 2, 1, 4, 0.009}, {1, 2, 1, 3, 0.009}}, 0.01, inf, Differ, -1, 0.008},
		{"all differ", 3, []Pair{{0, 1, 1, 3, 0.008}, {0, 2, 1, 4, 0.009}, {1, 2, 1, 3, 0.009}}, 0.01, inf, Differ, -1, 0.008},
		{"wide third agrees with all", 3, []Pair{{0, 1, 1, 0.5, 0.008}, {0, 2, 1, 0.1, 0.3}, {1, 2, 1, 0.1, 0.3}}, 0.01, inf, Agree, -1, 0.008},
		{"four, one odd", 4, []Pair{{0, 1, 1, 5, 0.008}, {0, 2, 1, 0.1, 0.007}, {0, 3, 1, 0.1, 0.009}, {1, 2, 1, 5, 0.008}, {1, 3, 1, 5, 0.008}, {2, 3, 1, 0, 0.02}}, 0.01, inf, Differ, 1, 0.007},
	} {
		got := rule(c.n, c.pairs, c.agree, c.alone)
		if got.verdict != c.verdict || got.odd != c.odd || math.Abs(got.resolving-c.power) > 1e-15 {
			t.Errorf("%s: %v odd %d power %g, want %v odd %d power %g", c.name, got.verdict, got.odd, got.resolving, c.verdict, c.odd, c.power)
		}
	}
}

func TestVerdictsGetWorse(t *testing.T) {
	if !(Agree < Alone && Alone < Unsettled && Unsettled < Differ) {
		t.Error("order of verdicts")
	}
}
