package conform_test

import (
	"context"
	"math"
	"testing"

	"github.com/tautspan/tautspan/engine/formula"
	"github.com/tautspan/tautspan/engine/mesh"
	"github.com/tautspan/tautspan/engine/scenario"
	"github.com/tautspan/tautspan/engine/solver"
)

// At a point force the slope jumps by F/T, and the contract asks for the side
// after it. A heavily damped line at rest under F at a has
// T u' = -F a/L there (statics), and +F (L-a)/L on the other side.
func TestSlopeAtPointForceIsTheSideAfter(t *testing.T) {
	const L, a, T, F = 20.0, 7.3, 10000.0, 100.0
	c := formula.Const
	net := &scenario.Network{}
	net.Lines = []scenario.Line{{
		Name:     "l",
		Nodes:    []scenario.Node{{Name: "a", Fixed: true}, {Name: "b", Fixed: true}},
		Segments: []scenario.Segment{{Name: "s", Length: L, MassPerLength: 1, Tension: T, Viscous: 40}},
	}}
	at := scenario.Place{Node: -1, Offset: a}
	ramp := formula.Apply(formula.OpRamp, formula.Arg(formula.ArgT), c(F), c(0), c(0.2))
	net.Pushes = []scenario.PushOf[float64]{{Name: "p", At: at, Force: scenario.History{Value: ramp, Breaks: []float64{0, 0.2}}}}
	net.Watches = []scenario.Watch{{Name: "w", At: at, Quantities: []scenario.Quantity{scenario.Slope, scenario.Force}}}
	net.Run = scenario.RunOf[float64]{For: 2, Every: 0.01}
	m, err := mesh.Build(net)
	if err != nil {
		t.Fatal(err)
	}
	for _, s := range solvers() {
		r, err := s.Solve(context.Background(), m, solver.Request{Level: 2, Effort: 1}, nil)
		if err != nil {
			t.Fatal(err)
		}
		// After 2 s the motion has decayed by e^-40; 1e-5 of F is left for the solvers.
		want := -F * a / L
		if got := r.Series[1][0][200]; math.Abs(got-want) > 1e-5*F {
			t.Errorf("%s: force %g N, want %g N", s.Name(), got, want)
		}
		if got := r.Series[0][0][200]; math.Abs(got-want/T) > 1e-5*F/T {
			t.Errorf("%s: slope %g, want %g", s.Name(), got, want/T)
		}
	}
}
