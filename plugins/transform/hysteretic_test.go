package transform

import (
	"context"
	"math"
	"testing"

	"github.com/tautspan/tautspan/engine/formula"
	"github.com/tautspan/tautspan/engine/mesh"
	"github.com/tautspan/tautspan/engine/scenario"
	"github.com/tautspan/tautspan/engine/solver"
)

// struckLossy is a held line with a loss factor in its tension, hit at once.
func struckLossy(t *testing.T, eta float64) *mesh.Mesh {
	t.Helper()
	const L, m, T = 10.0, 1.0, 400.0
	net := &scenario.Network{}
	net.Lines = []scenario.Line{{Name: "l", Nodes: []scenario.Node{{Name: "a", Fixed: true}, {Name: "b", Fixed: true}},
		Segments: []scenario.Segment{{Name: "s", Length: L, MassPerLength: m, Tension: T}}}}
	force := formula.Apply(formula.OpHalfSine, formula.Arg(formula.ArgT), formula.Const(20), formula.Const(0.4))
	net.Pushes = []scenario.PushOf[float64]{{Name: "h", At: scenario.Place{Node: -1, Offset: 5}, Force: scenario.History{Value: force, Breaks: []float64{0, 0.4}}}}
	for _, x := range []float64{5, 9.5} {
		net.Watches = append(net.Watches, scenario.Watch{Name: "w", At: scenario.Place{Node: -1, Offset: x}, Quantities: []scenario.Quantity{scenario.Displacement}})
	}
	net.Run = scenario.RunOf[float64]{For: 20, Every: 0.01}
	built, err := mesh.Build(net)
	if err != nil {
		t.Fatal(err)
	}
	built.Pieces[0].TensionLoss = eta
	return built
}

// A loss factor eta takes a damping ratio of eta/2 from the first vibration, at
// the frequency at which the stiffness is the one stated, 1 Hz here: to the next
// order the root of s^2 = -w0^2 (1 + (2 eta/pi) ln(s/w0)) is
// i w0 - w0 eta/2/(1 - eta/pi). And nothing moves before it is struck.
func TestHystereticDecay(t *testing.T) {
	const eta = 0.04
	r, err := New().Solve(context.Background(), struckLossy(t, eta), solver.Request{Level: 2, Effort: 1}, nil)
	if err != nil {
		t.Fatal(err)
	}
	u := r.Series[0][0]
	most := 0.0
	for _, v := range u {
		most = math.Max(most, math.Abs(v))
	}
	for i := range 18 { // 4.5 m at 20 m/s take 0.225 s, a little less for what is high
		if v := r.Series[1][0][i]; math.Abs(v) > 1e-6*most {
			t.Errorf("%.2g m of %.2g m at %g s", v, most, 0.01*float64(i))
		}
	}
	// Peaks a period apart, far enough after the push for higher vibrations, which
	// die faster, to be gone.
	top := func(from float64) float64 {
		most := 0.0
		for i := int(from * 100); i < int(from*100)+110; i++ {
			most = math.Max(most, u[i])
		}
		return most
	}
	decay := math.Log(top(6)/top(18)) / 12
	if want := math.Pi * eta / (1 - eta/math.Pi); math.Abs(decay/want-1) > 0.003 { // w0 = 2 pi 1 Hz
		t.Errorf("falls by %.5f/s, want %.5f", decay, want)
	}
}

// The levels agree ever better: the answer has a limit.
func TestHystereticConverges(t *testing.T) {
	m := struckLossy(t, 0.3)
	var last []float64
	change := math.Inf(1)
	for level := range 4 {
		r, err := New().Solve(context.Background(), m, solver.Request{Level: level, Effort: 1}, nil)
		if err != nil {
			t.Fatal(err)
		}
		if last != nil {
			diff, norm := 0.0, 0.0
			for i, v := range r.Series[0][0] {
				diff += (v - last[i]) * (v - last[i])
				norm += v * v
			}
			next := math.Sqrt(diff / norm)
			if next > change/3 && next > 1e-9 {
				t.Errorf("level %d changes by %.1e after %.1e", level, next, change)
			}
			change = next
		}
		last = r.Series[0][0]
	}
	if change > 1e-6 {
		t.Errorf("levels 2 and 3 differ by %.1e", change)
	}
}
