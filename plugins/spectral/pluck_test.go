package spectral

import (
	"math"
	"testing"

	"github.com/tautspan/tautspan/engine/mesh"
	"github.com/tautspan/tautspan/engine/scenario"
)

// A pinned stiff line held at 0.3 L and let go: its static shape, whose third derivative
// jumps there, against the closed sum over its sine modes,
//
//	u = F sum 2 sin(n pi a/L) sin(n pi x/L) cos(w_n t)/(m L w_n^2),
//	m w_n^2 = k^2 (T + EI k^2), k = n pi/L.
func TestPluckedStiffLine(t *testing.T) {
	const length, tension, mass, ei, at = 10.0, 5000.0, 1.2, 40.0, 3.0
	net := &scenario.Network{}
	end := scenario.Node{Kind: scenario.Support, Fixed: true}
	near, far := end, end
	near.Name, far.Name = "a", "b"
	net.Lines = []scenario.Line{{Name: "l", Nodes: []scenario.Node{near, far},
		Segments: []scenario.Segment{{Name: "s", Length: length, MassPerLength: mass, Tension: tension, Bending: ei}}}}
	net.Plucks = []scenario.PluckOf[float64]{{At: scenario.Place{Node: -1, Offset: at}, ByLength: true, Length: 0.01}}
	net.Watches = []scenario.Watch{{Name: "w", At: scenario.Place{Node: -1, Offset: 7}, Quantities: []scenario.Quantity{scenario.Displacement}}}
	net.Run = scenario.RunOf[float64]{For: 2, Every: 0.002}
	m, err := mesh.Build(net)
	if err != nil {
		t.Fatal(err)
	}
	want := make([]float64, m.Timing.Rows)
	give := 0.0
	for n := 1; n <= 3000; n++ {
		k := float64(n) * math.Pi / length
		w2 := k * k * (tension + ei*k*k) / mass
		c := 2 * math.Sin(k*at) / (mass * length * w2)
		give += c * math.Sin(k*at)
		w := math.Sqrt(w2)
		for row := range want {
			want[row] += c * math.Sin(k*7) * math.Cos(w*float64(row)*m.Timing.Every)
		}
	}
	for row := range want {
		want[row] *= 0.01 / give
	}
	before := 1.0
	for level := 0; level < 3; level++ {
		r := solve(t, m, level)
		d := apart(r.Series[0][0], want)
		t.Logf("level %d: %d unknowns, jump %d, error %.1e, order %.1f, energy gap %.1e of %g J", level, r.Plan.Cells, m.Jump, d, math.Log(before/d)/math.Log(ratio), gapOf(r.Energy, r.Energy.Most), r.Energy.Most)
		if limit := [3]float64{4e-3, 9e-4, 2.5e-4}[level]; d > limit { // chosen, twice what is seen
			t.Errorf("level %d: error %.1e", level, d)
		}
		if want := 0.01 * 0.01 / give / 2; math.Abs(r.Energy.Start/want-1) > 1e-4 { // half force times way; the sum above is cut off
			t.Errorf("level %d: starts with %g J, held with %g J", level, r.Energy.Start, want)
		}
		before = d
	}
}
