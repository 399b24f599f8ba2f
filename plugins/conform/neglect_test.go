package conform_test

import (
	"context"
	"fmt"
	"math"
	"strings"
	"testing"

	"github.com/tautspan/tautspan/engine/formula"
	"github.com/tautspan/tautspan/engine/mesh"
	"github.com/tautspan/tautspan/engine/scenario"
	"github.com/tautspan/tautspan/engine/solver"
	"github.com/tautspan/tautspan/plugins/characteristic"
	"github.com/tautspan/tautspan/plugins/spectral"
)

// bell is a line of 20 m with a bell of the given width for a start, or with a knock
// of half a sine where knock, its duration, is not 0.
func bell(bending, width, knock, seconds float64, clamped bool) *scenario.Network {
	end := scenario.Node{Fixed: true, Kind: scenario.Support, Clamped: clamped}
	a, b := end, end
	a.Name, b.Name = "a", "b"
	x := formula.Div(formula.Sub(formula.Arg(formula.ArgX), formula.Const(7)), formula.Const(width))
	shape := formula.Mul(formula.Const(0.01), formula.Apply(formula.OpExp, formula.Mul(formula.Const(-0.5), formula.Mul(x, x))))
	n := &scenario.Network{}
	n.Lines = []scenario.Line{{Name: "l", Nodes: []scenario.Node{a, b}, Segments: []scenario.Segment{
		{Name: "s", Length: 20, MassPerLength: 0.5, Tension: 5000, Bending: bending}}}}
	if knock > 0 {
		half := formula.Apply(formula.OpHalfSine, formula.Arg(formula.ArgT), formula.Const(50), formula.Const(knock))
		n.Pushes = []scenario.PushOf[float64]{{Name: "p", At: scenario.Place{Node: -1, Offset: 7}, Force: scenario.History{Value: half, Breaks: []float64{0, knock}}}}
	} else {
		n.Starts = []scenario.StartOf[float64]{{Along: scenario.SpanOf{Segment: -1}, Shape: shape}}
	}
	n.Run = scenario.RunOf[float64]{For: seconds, Every: seconds / 1000}
	quantity := scenario.Displacement
	if knock > 0 {
		quantity = scenario.Velocity // has the shape of the force; displacement is smoother
	}
	n.Watches = append(n.Watches, scenario.WatchOf[float64]{Name: "w", At: scenario.Place{Node: -1, Offset: 12}, Quantities: []scenario.Quantity{quantity}})
	return n
}

// What leaving out the stiffness does is 0.7 to 1.5 of phi; the solver that leaves it out says so, and refuses where it is much.
func TestNeglectOfBending(t *testing.T) {
	record := func(s solver.Solver, n *scenario.Network, level int) ([]float64, *solver.Result) {
		t.Helper()
		m, err := mesh.Build(n)
		if err != nil {
			t.Fatal(err)
		}
		r, err := s.Solve(context.Background(), m, solver.Request{Level: level, Effort: 1}, nil)
		if err != nil {
			t.Fatal(err)
		}
		return r.Series[0][0], r
	}
	for _, c := range []struct {
		bending, width, knock, seconds float64
		clamped                        bool
	}{
		// Pins, then clamps, then both shares alike, and one beyond what is allowed.
		{2, 0.6, 0, 1, false}, {5, 0.9, 0, 2, false}, {0.5, 0.5, 0, 2, false}, {0.02, 0.9, 0, 1, true}, {0.2, 1.2, 0, 0.6, true},
		{2, 0.8, 0, 0.8, true}, {20, 0.9, 0, 2, true},
		{0.5, 1, 0.02, 1, false}, {0.5, 1, 0.02, 1, true}, {0.05, 1, 0.01, 1, false},
	} {
		t.Run(fmt.Sprint(c), func(t *testing.T) {
			n := bell(c.bending, c.width, c.knock, c.seconds, c.clamped)
			m, err := mesh.Build(n)
			if err != nil {
				t.Fatal(err)
			}
			phi := m.Neglect()
			full, _ := record(spectral.New(), n, 2)
			bare, _ := record(spectral.New(), bell(0, c.width, c.knock, c.seconds, c.clamped), 2)
			diff, norm := 0.0, 0.0
			for i := range full {
				diff += (full[i] - bare[i]) * (full[i] - bare[i])
				norm += full[i] * full[i]
			}
			got := math.Sqrt(diff / norm)
			t.Logf("phi %.3g, error %.3g, ratio %.3g", phi, got, got/phi)
			no := characteristic.New().Refuses(m)
			if phi > mesh.NeglectMost { // no longer in proportion there
				if got < mesh.NeglectMost {
					t.Errorf("phi %.3g refuses an error of %.3g", phi, got)
				}
				if len(no) != 1 || !strings.Contains(no[0], "phi") {
					t.Errorf("refuses %q", no)
				}
				return
			}
			if got < 0.7*phi || got > 1.5*phi {
				t.Errorf("phi %.3g, error %.3g", phi, got)
			}
			_, r := record(characteristic.New(), n, 1)
			if r.Neglect != phi || (phi > mesh.NeglectSilent) != strings.Contains(strings.Join(r.Notes, " "), "phi") {
				t.Errorf("neglects %g, notes %q", r.Neglect, r.Notes)
			}
		})
	}
}
