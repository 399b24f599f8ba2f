package mesh

import (
	"math"
	"testing"

	"github.com/tautspan/tautspan/engine/formula"
	"github.com/tautspan/tautspan/engine/scenario"
)

// Everything that a line may carry arrives where it stands, with its feature.
func TestEveryFitting(t *testing.T) {
	net := twoSegments()
	clamp := &net.Lines[0].Nodes[1]
	clamp.Laws = []scenario.LawOf[float64]{
		{Name: "friction", Friction: &scenario.FrictionOf[float64]{Force: 3, Bracket: true, Through: 7e4}},
		{Name: "stop", Stop: &scenario.StopOf[float64]{Gap: 0.02, Spring: 1e6, Down: true}},
		{Name: "own", Written: &scenario.WrittenOf[float64]{Force: formula.Arg(formula.ArgU), Starts: []float64{0.5}, Rates: []formula.Program{formula.Arg(ArgState)}}},
	}
	clamp.Benches = []scenario.Bench{{Name: "b.csv", Frequency: []float64{1, 5}, Real: []float64{40, 50}, Imag: []float64{-3, 4}}}
	clamp.Hinge, clamp.Spring, clamp.SpringLoss = true, 1e3, 0.1
	clamp.Tuned = []scenario.TunedOf[float64]{{Mass: 2, Spring: 300, Loss: 0.3}}
	seg := &net.Lines[0].Segments[1]
	seg.TensionLoss, seg.BendingLoss, seg.Bending, seg.Axial = 0.01, 0.02, 5, 1e6
	seg.Law = &scenario.LawOf[float64]{Name: "drag", Written: &scenario.WrittenOf[float64]{Force: formula.Arg(formula.ArgV)}}
	seg.Every = []scenario.EveryOf[float64]{
		{Spacing: 8, First: 6, Joint: scenario.Node{Name: "every", Mass: 0.12}},
		{Spacing: 16, First: 6, Joint: scenario.Node{Name: "every", Spring: 400, SpringLoss: 0.2}},
	}
	net.Lines[0].Segments[0].Axial = 4e5
	net.Lines[0].Stretch = true
	net.Lines[0].Nodes[2].AxialGive = 2e5
	net.Ties = []scenario.TieOf[float64]{{Name: "d", From: inside(0, 6), To: inside(1, 15), Spring: 5, SpringLoss: 0.4, Dashpot: 3, Bracket: true, Through: 8e3, Slack: true}}
	m := build(t, net)

	n := &m.Nodes[2] // a, tie at 6 m, clamp
	if n.Name != "line.l.clamp" || len(n.Laws) != 3 || n.Laws[0].Friction.Through != 7e4 || n.Laws[1].Stop.Gap != 0.02 || !n.Laws[1].Stop.Down ||
		n.Laws[2].Written.Starts[0] != 0.5 || n.Benches[0].Impedance[1] != 50+4i || !n.Hinge || n.SpringLoss != 0.1 {
		t.Errorf("clamp is %+v", n)
	}
	// Joints at 6, 14, 22 m of the second segment, those at 6 and 22 m with springs too.
	var rows []Node
	for _, n := range m.Nodes {
		if n.Mass == 0.12 {
			rows = append(rows, n)
		}
	}
	if len(rows) != 3 || rows[0].Name != "line.l.u.1" || rows[2].Name != "line.l.u.3" || rows[1].X != 26 || rows[0].Spring != 400 || rows[1].Spring != 0 || rows[2].SpringLoss != 0.2 {
		t.Errorf("rows are %+v", rows)
	}
	last := &m.Pieces[len(m.Pieces)-1]
	if last.TensionLoss != 0.01 || last.BendingLoss != 0.02 || last.Law == nil || last.Law.Written == nil {
		t.Errorf("last piece is %+v", last)
	}
	if m.Links[0].SpringLoss != 0.3 || m.Links[1].SpringLoss != 0.4 || m.Links[1].Through != 8e3 || !m.Links[1].Slack {
		t.Errorf("links are %+v", m.Links)
	}
	if got, want := m.Lines[0].Stretch.Stiffness, 1/(12/4e5+30/1e6+1/2e5); math.Abs(got-want) > 1e-12*want {
		t.Errorf("stretch %g, want %g", got, want)
	}
	want := Bending | Stretching | Hysteretic | BenchDamper | JointLaw | SpreadLaw | SlackTie | TurningJoint | TieBracket
	if m.Features() != want {
		t.Errorf("features %b, want %b", m.Features(), want)
	}
	if len(m.Unknown(0)) != 9 || len(m.Words(NonLinear)) != 4 {
		t.Errorf("unknown: %v", m.Unknown(0))
	}
}

// Places that coincide to rounding are one: three times 0.1 m is not 0.3 m in the
// arithmetic, and no piece of 6e-17 m stands between.
func TestRowsMeetPlaces(t *testing.T) {
	net := twoSegments()
	seg := &net.Lines[0].Segments[0]
	seg.Every = []scenario.EveryOf[float64]{
		{Spacing: 0.3, First: 0.3, Joint: scenario.Node{Mass: 0.1}},
		{Spacing: 0.1, First: 0.1, Joint: scenario.Node{Mass: 0.2}},
	}
	for _, p := range build(t, net).Pieces {
		if p.Length < 0.0999 {
			t.Fatalf("a piece of %g m", p.Length)
		}
	}
}
