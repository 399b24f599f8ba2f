package statics

import (
	"errors"
	"math"
	"strings"
	"testing"

	"github.com/tautspan/tautspan/engine/scenario"
)

// Two tensioned cantilevers that meet at a hinge: under a force F there each
// carries half, and the tip of one of length l moves by
//
//	F/(2T) (l - tanh(kl)/k),   k = sqrt(T/EI).
//
// Source: EI u”” - T u” = 0, u = u' = 0 at the root, u” = 0 and T u' - EI u”' = F/2
// at the tip (derived here).
func TestHinge(t *testing.T) {
	const T, l, F = 20e3, 5.5, 300.0
	for _, xi := range []float64{0.4, 3, 60} {
		hinge := scenario.Node{Name: "h", Kind: scenario.Joint, Hinge: true}
		line := stiff(T*(l/xi)*(l/xi), span(T, 2, clamped, clamped, l, l))
		line.Nodes[1] = hinge
		net := network(line)
		pluck(net, 0, l, F)
		k := xi / l
		near(t, "hinge", drawn(t, net).Displacement(0, l), F/(2*T)*(l-math.Tanh(xi)/k), 1e-9)
	}
}

// Two strings tied at their middles by a slack tie: pulled up at the upper place
// both carry, pushed down there the lower one stays where it is. A string gives
// L/(4T) at its middle.
func TestSlackTie(t *testing.T) {
	const T, L, K, F = 10e3, 20.0, 3e3, 100.0
	own := L / (4 * T)
	net := network(span(T, 2, fixed, fixed, L), span(T, 2, fixed, fixed, L))
	at := func(line int) scenario.Place { return scenario.Place{Line: line, Node: -1, Offset: L / 2} }
	net.Ties = []scenario.TieOf[float64]{{Name: "d", From: at(0), To: at(1), Spring: K, Slack: true}}
	net.Plucks = []scenario.PluckOf[float64]{{Name: "p", At: at(0), Force: F}}
	r := drawn(t, net)
	both := 1 / (1/own + 1/(own+1/K))
	near(t, "upper line pulled up", r.Displacement(0, L/2), F*both, 1e-12)
	near(t, "lower line follows", r.Displacement(1, L/2), F*both*own/(own+1/K), 1e-12)
	net.Plucks[0].Force = -F
	r = drawn(t, net)
	near(t, "upper line pushed down", r.Displacement(0, L/2), -F*own, 1e-12)
	if u := r.Displacement(1, L/2); u != 0 {
		t.Errorf("the lower line moves by %g under a slack tie", u)
	}
}

// A row of springs on a string is the same as joints with springs.
func TestRowOfSprings(t *testing.T) {
	const T, K = 10e3, 2e3
	row := network(span(T, 2, fixed, fixed, 10))
	row.Lines[0].Segments[0].Every = []scenario.EveryOf[float64]{{Spacing: 3, First: 2, Joint: scenario.Node{Name: "every", Kind: scenario.Joint, Spring: K}}}
	pluck(row, 0, 4, 100)
	joints := network(span(T, 2, fixed, fixed, 2, 3, 3, 2))
	for i := 1; i <= 3; i++ {
		joints.Lines[0].Nodes[i].Spring = K
	}
	pluck(joints, 0, 4, 100)
	a, b := drawn(t, row), drawn(t, joints)
	for _, x := range []float64{1, 2, 4, 7, 9} {
		near(t, "row", a.Displacement(0, x), b.Displacement(0, x), 1e-12)
	}
}

func TestPluckOntoAStopIsRefused(t *testing.T) {
	line := span(10e3, 2, fixed, fixed, 5, 5)
	line.Nodes[1].Name = "j"
	line.Nodes[1].Laws = []scenario.LawOf[float64]{{Name: "stop", Stop: &scenario.StopOf[float64]{Gap: 0.01, Spring: 1e6, Up: true}}}
	net := network(line)
	pluck(net, 0, 5, 30) // 30 N * 10 m/(4 * 10 kN) = 7.5 mm
	drawn(t, net)
	net.Plucks[0].Force = 50
	var pe *scenario.PathError
	if _, err := Hold(net); !errors.As(err, &pe) || !strings.HasSuffix(pe.Path, ".j.stop") {
		t.Errorf("got %v", err)
	}
	net.Plucks[0].Force = -50
	drawn(t, net)
}

// A support that gives along the line takes its share of the stretch: an end of
// stiffness EA/L halves the stiffness of the sag term.
func TestSagWithAnEndThatGives(t *testing.T) {
	sagging := func(axial, ends float64) *scenario.Network {
		line := span(20e3, 4, fixed, fixed, 30)
		line.Sag = true
		line.Segments[0].Axial = axial
		line.Nodes[1].AxialGive = ends
		net := network(line)
		pluck(net, 0, 11, 100)
		return net
	}
	// Le = L (1 + (w L/H)^2/8), as in sagOf.
	weight := 4 * Gravity * 30 / 20e3
	le := 30 * (1 + weight*weight/8)
	a, b := drawn(t, sagging(2e6, 2e6/le)), drawn(t, sagging(1e6, 0))
	near(t, "shape", a.Displacement(0, 15), b.Displacement(0, 15), 1e-12)
	near(t, "extra tension", a.ExtraTension(0), b.ExtraTension(0), 1e-12)
}

// A row of equal masses hangs like joints of the same mass.
func TestRowHangs(t *testing.T) {
	row := network(span(10e3, 2, fixed, fixed, 10))
	row.Lines[0].Segments[0].Every = []scenario.EveryOf[float64]{{Spacing: 3, First: 2, Joint: scenario.Node{Name: "every", Mass: 5, Spring: 1e3}}}
	joints := network(span(10e3, 2, fixed, fixed, 2, 3, 3, 2))
	for i := 1; i <= 3; i++ {
		joints.Lines[0].Nodes[i].Mass = 5
	}
	a, ok := Hang(row, 0, 0)
	b, ok2 := Hang(joints, 0, 0)
	if !ok || !ok2 {
		t.Fatal("slack")
	}
	for _, x := range []float64{1, 2, 5, 9} {
		near(t, "drop", a.Drop(x), b.Drop(x), 1e-12)
	}
}
