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
		{"two agree", 2, []Pair{{A: 0, B: 1, Difference: 1, Ratio: 0.5, Resolving: 0.008}}, 0.01, inf, Agree, -1, 0.008},
		{"two agree but prove little", 2, []Pair{{A: 0, B: 1, Difference: 1, Ratio: 0.5, Resolving: 0.08}}, 0.01, inf, Unsettled, -1, 0.08},
		{"two between", 2, []Pair{{A: 0, B: 1, Difference: 1, Ratio: 1.5, Resolving: 0.008}}, 0.01, inf, Unsettled, -1, 0.008},
		{"two between, far within what is asked", 2, []Pair{{A: 0, B: 1, Difference: 1, Ratio: 1.5, Resolving: 0.002}}, 0.01, inf, Agree, -1, 0.005},
		{"two differ", 2, []Pair{{A: 0, B: 1, Difference: 1, Ratio: 2.1, Resolving: 0.008}}, 0.01, inf, Differ, -1, 0.008},
		{"a figure apart while the records agree", 2, []Pair{{A: 0, B: 1, Ratio: 9, Resolving: 0.008, Unbacked: true}}, 0.01, inf, Unsettled, -1, 0.008},
		{"the same, far within what is asked", 2, []Pair{{A: 0, B: 1, Ratio: 9, Resolving: 0.0008, Unbacked: true}}, 0.01, inf, Agree, -1, 0.008},
		{"apart by next to nothing", 2, []Pair{{A: 0, B: 1, Ratio: 9, Resolving: 0.0001, Immaterial: true}}, 0.01, inf, Agree, -1, 0.001},
		{"at the limits", 2, []Pair{{A: 0, B: 1, Difference: 1, Ratio: 1, Resolving: 0.01}}, 0.01, inf, Agree, -1, 0.01},
		{"third odd", 3, []Pair{{A: 0, B: 1, Difference: 1, Ratio: 0.5, Resolving: 0.008}, {A: 0, B: 2, Difference: 1, Ratio: 4, Resolving: 0.009}, {A: 1, B: 2, Difference: 1, Ratio: 3, Resolving: 0.009}}, 0.01, inf, Differ, 2, 0.008},
		{"one differing pair of three: either end may be odd", 3, []Pair{{A: 0, B: 1, Difference: 1, Ratio: 0.5, Resolving: 0.008}, {A: 0, B: 2, Difference: 1, Ratio: 4, Resolving: 0.009}, {A: 1, B: 2, Difference: 1, Ratio: 0.9, Resolving: 0.02}}, 0.01, inf, Differ, -1, 0.008},
		{"one differing pair, one end closer to the rest", 3, []Pair{{A: 0, B: 1, Difference: 1, Ratio: 0.5, Resolving: 0.008}, {A: 0, B: 2, Difference: 1, Ratio: 4, Resolving: 0.009}, {A: 1, B: 2, Difference: 1, Ratio: 1.5, Resolving: 0.009}}, 0.01, inf, Differ, 2, 0.008},
		{"third odd, but the others are too blunt to tell", 3, []Pair{{A: 0, B: 1, Difference: 1, Ratio: 0.5, Resolving: 0.05}, {A: 0, B: 2, Difference: 1, Ratio: 4, Resolving: 0.009}, {A: 1, B: 2, Difference: 1, Ratio: 3, Resolving: 0.04}}, 0.01, inf, Differ, -1, 0.05},
		{"third odd, others between", 3, []Pair{{A: 0, B: 1, Difference: 1, Ratio: 1.5, Resolving: 0.008}, {A: 0, B: 2, Difference: 1, Ratio: 4, Resolving: 0.009}, {A: 1, B: 2, Difference: 1, Ratio: 3, Resolving: 0.009}}, 0.01, inf, Differ, -1, 0.008},
		{"all differ", 3, []Pair{{A: 0, B: 1, Difference: 1, Ratio: 3, Resolving: 0.008}, {A: 0, B: 2, Difference: 1, Ratio: 4, Resolving: 0.009}, {A: 1, B: 2, Difference: 1, Ratio: 3, Resolving: 0.009}}, 0.01, inf, Differ, -1, 0.008},
		{"wide third agrees with all", 3, []Pair{{A: 0, B: 1, Difference: 1, Ratio: 0.5, Resolving: 0.008}, {A: 0, B: 2, Difference: 1, Ratio: 0.1, Resolving: 0.3}, {A: 1, B: 2, Difference: 1, Ratio: 0.1, Resolving: 0.3}}, 0.01, inf, Agree, -1, 0.008},
		{"four, one odd", 4, []Pair{{A: 0, B: 1, Difference: 1, Ratio: 5, Resolving: 0.008}, {A: 0, B: 2, Difference: 1, Ratio: 0.1, Resolving: 0.007}, {A: 0, B: 3, Difference: 1, Ratio: 0.1, Resolving: 0.009}, {A: 1, B: 2, Difference: 1, Ratio: 5, Resolving: 0.008}, {A: 1, B: 3, Difference: 1, Ratio: 5, Resolving: 0.008}, {A: 2, B: 3, Difference: 1, Ratio: 0, Resolving: 0.02}}, 0.01, inf, Differ, 1, 0.007},
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
