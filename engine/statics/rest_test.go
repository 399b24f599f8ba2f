package statics

import (
	"errors"
	"math"
	"testing"

	"github.com/tautspan/tautspan/engine/scenario"
)

// span is a line of one stock between two nodes, cut into segments of the given lengths.
func span(tension, mass float64, first, last scenario.Node, lengths ...float64) scenario.Line {
	first.Name, last.Name = "a", "b"
	line := scenario.Line{Name: "l", Nodes: []scenario.Node{first}}
	for i, l := range lengths {
		line.Segments = append(line.Segments, scenario.Segment{Name: "s", Length: l, Tension: tension, MassPerLength: mass})
		if i+1 < len(lengths) {
			line.Nodes = append(line.Nodes, scenario.Node{Kind: scenario.Splice})
		}
	}
	line.Nodes = append(line.Nodes, last)
	return line
}

var fixed = scenario.Node{Fixed: true}

func network(lines ...scenario.Line) *scenario.Network {
	net := &scenario.Network{}
	net.Lines = lines
	return net
}

func near(t *testing.T, what string, got, want, rel float64) {
	t.Helper()
	if math.Abs(got-want) > rel*math.Abs(want) {
		t.Errorf("%s: got %.15g, want %.15g within %g", what, got, want, rel)
	}
}

// Static deflection under a point force: F a (L-a)/(T L), and half-way between.
// Source: Rao (2007), Vibration of Continuous Systems, ch. 8; Irvine (1981),
// Cable Structures, ch. 1 (both cited from memory), values recomputed with 40 digits.
func TestPointForceOnUniformSpan(t *testing.T) {
	net := network(span(20000, 1.35, fixed, fixed, 60))
	net.Plucks = []scenario.PluckOf[float64]{{Name: "p", At: scenario.Place{Node: -1, Offset: 20}, Force: 150}}
	r, err := Hold(net)
	if err != nil {
		t.Fatal(err)
	}
	near(t, "deflection at the force", r.Displacement(0, 20), 0.1, 1e-12)
	near(t, "deflection at midspan", r.Displacement(0, 30), 0.075, 1e-12)
	near(t, "end force near (T times slope)", 20000*r.Displacement(0, 1), 100, 1e-12)
	if u := r.Displacement(0, 60); u != 0 {
		t.Errorf("held end moves by %g", u)
	}
}

// Holding force of a pluck by length, F = T h L/(a (L-a)).
// Source: Morse (1948), Vibration and Sound, ch. III (cited from memory); value
// 1855.38720539 N recomputed with 40 digits.
func TestPluckByLength(t *testing.T) {
	for _, lengths := range [][]float64{{160.5}, {12, 148.5}, {5, 100, 55.5}} {
		net := network(span(412000, 18.4, fixed, fixed, lengths...))
		at := scenario.Place{Node: -1, Offset: 12}
		if lengths[0] == 12 {
			at = scenario.Place{Node: 1}
		} else if lengths[0] == 5 {
			at = scenario.Place{Node: -1, Segment: 1, Offset: 7}
		}
		net.Plucks = []scenario.PluckOf[float64]{{Name: "p", At: at, ByLength: true, Length: 0.05}}
		r, err := Hold(net)
		if err != nil {
			t.Fatal(err)
		}
		near(t, "holding force", r.Plucks[0].Force, 1855.38720539, 1e-11)
		near(t, "shape", r.Displacement(0, 6), 0.025, 1e-12)
	}
}

// A support that gives: with spring K at the far end the line is two springs in
// parallel at the pluck, T/a and 1/(1/K + (L-a)/T), by series and parallel rules.
func TestSupportThatGives(t *testing.T) {
	const T, L, a, K, F = 8000.0, 30.0, 11.0, 900.0, 70.0
	net := network(span(T, 1, fixed, scenario.Node{Spring: K}, L))
	net.Plucks = []scenario.PluckOf[float64]{{Name: "p", At: scenario.Place{Node: -1, Offset: a}, Force: F}}
	r, err := Hold(net)
	if err != nil {
		t.Fatal(err)
	}
	far := 1 / (1/K + (L-a)/T)
	u := F / (T/a + far)
	near(t, "at the pluck", r.Displacement(0, a), u, 1e-12)
	near(t, "at the spring", r.Displacement(0, L), u*far/K, 1e-12)
}

// Two equal lines tied at one place by a spring: the tie carries force into the
// other line; closed form by series springs.
func TestTieCarriesForce(t *testing.T) {
	const T, L, a, K, F = 5000.0, 20.0, 8.0, 1200.0, 40.0
	net := network(span(T, 1, fixed, fixed, L), span(T, 2, fixed, fixed, L))
	place := func(line int) scenario.Place { return scenario.Place{Line: line, Node: -1, Offset: a} }
	net.Ties = []scenario.TieOf[float64]{{Name: "k", From: place(0), To: place(1), Spring: K}}
	net.Plucks = []scenario.PluckOf[float64]{{Name: "p", At: place(0), Force: F}}
	r, err := Hold(net)
	if err != nil {
		t.Fatal(err)
	}
	line := T/a + T/(L-a)
	through := 1 / (1/K + 1/line)
	u := F / (line + through)
	near(t, "plucked line", r.Displacement(0, a), u, 1e-12)
	near(t, "tied line", r.Displacement(1, a), u*through/line, 1e-12)
}

func TestFloatingLineIsRefused(t *testing.T) {
	net := network(span(5000, 1, scenario.Node{}, scenario.Node{}, 5, 7, 9))
	net.Plucks = []scenario.PluckOf[float64]{{Name: "p", At: scenario.Place{Node: 1}, Force: 1}}
	var pe *scenario.PathError
	if _, err := Hold(net); !errors.As(err, &pe) || pe.Path != "excite.p" {
		t.Fatalf("want a refusal at excite.p, got %v", err)
	}
}

func TestPluckAtHeldPlaceIsRefused(t *testing.T) {
	net := network(span(5000, 1, fixed, fixed, 5))
	net.Plucks = []scenario.PluckOf[float64]{{Name: "p", At: scenario.Place{Node: 0}, Force: 1}}
	if _, err := Hold(net); err == nil {
		t.Fatal("a pluck at a held support was accepted")
	}
}

// Stored energy T^2 L/(2 EA): stay of story S2, 1.73 MJ (three digits given
// there; the constants are those of the invented stay).
func TestStoredEnergy(t *testing.T) {
	line := span(5.85e6, 75.3, fixed, fixed, 62.4, 100)
	for i := range line.Segments {
		line.Segments[i].Axial = 8250e-6 * 195e9
	}
	near(t, "stored energy", StoredEnergy(&line), 1.73e6, 3e-3)
	line.Segments[1].Axial = 0
	if !math.IsNaN(StoredEnergy(&line)) {
		t.Error("an unknown axial stiffness gave a stored energy")
	}
	near(t, "travel time", TravelTime(&line), 162.4*math.Sqrt(75.3/5.85e6), 1e-14)
}

// Ten thousand segments must neither take long nor much memory.
func TestManySegments(t *testing.T) {
	lengths := make([]float64, 10000)
	for i := range lengths {
		lengths[i] = 0.01
	}
	net := network(span(1000, 1, fixed, fixed, lengths...))
	net.Plucks = []scenario.PluckOf[float64]{{Name: "p", At: scenario.Place{Node: 2500}, Force: 3}}
	r, err := Hold(net)
	if err != nil {
		t.Fatal(err)
	}
	near(t, "F a(L-a)/(T L)", r.Displacement(0, 25), 3*25*75/(1000*100.0), 1e-9)
}
