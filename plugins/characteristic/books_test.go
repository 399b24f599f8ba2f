package characteristic

import (
	"math"
	"testing"

	"github.com/tautspan/tautspan/engine/mesh"
)

// A plucked line with losses: what is there at the start has a closed form, and
// the account closes to the square of the step, wherever the kink is.
func TestAccountOfKinkedLoss(t *testing.T) {
	const length, tension, height = 20.0, 8400.0, 0.05
	for _, c := range []struct{ viscous, at, gap float64 }{
		{0.02, 6, 3e-6}, {0.02, 7, 3e-6}, {0.2, 6, 3e-5}, {0.2, 11.3, 3e-5}, {2, 6, 1e-5}, {2, 7, 1e-5},
	} {
		m := span(1e-3, 201, stretch{7, tension, 0.35, c.viscous}, stretch{13, tension, 0.35, c.viscous})
		shape := hat(length, c.at, height)
		m.Pieces[0].Start = shape
		m.Pieces[1].Start = func(s float64) float64 { return shape(s + 7) }
		m.Nodes[1].Start = shape(7)
		m.Jump = 1
		switch {
		case c.at < 7:
			m.Pieces[0].Marks = []mesh.Mark{{Kind: mesh.MarkKink, At: c.at}}
		case c.at > 7:
			m.Pieces[1].Marks = []mesh.Mark{{Kind: mesh.MarkKink, At: c.at - 7}}
		}
		e := solve(t, m, 2).Energy
		if want := 0.5 * tension * height * height * (1/c.at + 1/(length-c.at)); math.Abs(e.Start/want-1) > 1e-9 {
			t.Errorf("viscous %g, kink at %g: %.10g J at the start, want %.10g", c.viscous, c.at, e.Start, want)
		}
		if gap := math.Abs(e.Unaccounted()) / e.Most; !(gap < c.gap) || e.Lost == 0 {
			t.Errorf("viscous %g, kink at %g: account off by %.2g of the most stored", c.viscous, c.at, gap)
		}
	}
}

// Rolling loads: the account closes to rounding where all fronts are exact, and
// to the order of the rest where a joint with mass or a loss smears them.
func TestAccountOfRollingLoads(t *testing.T) {
	one := func(v float64) *mesh.Mesh { return span(1e-3, 301, stretch{20, 8400, 0.35, v}) }
	two := func(v float64) *mesh.Mesh {
		m := span(1e-3, 301, stretch{7, 8400, 0.35, v}, stretch{13, 8400, 0.7, v})
		m.Nodes[1].Mass = 0.5
		return m
	}
	for _, c := range []struct {
		name string
		m    *mesh.Mesh
		gap  float64
	}{{"bare", one(0), 1e-12}, {"loss", one(0.2), 1e-4}, {"mass", two(0), 1e-5}, {"mass and loss", two(0.2), 1e-4}} {
		c.m.Jump = 1
		c.m.Rolls = []mesh.Roll{{Name: "r", Speed: 40, Force: 150, From: 5, Starting: 0.02}, {Name: "s", Speed: 20, Force: -50, From: 1, Starting: 0.05}}
		e := solve(t, c.m, 3).Energy
		if gap := math.Abs(e.Unaccounted()) / e.Most; !(gap < c.gap) || e.Work == 0 {
			t.Errorf("%s: account off by %.2g of the most stored", c.name, gap)
		}
	}
}
