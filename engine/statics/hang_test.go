package statics

import (
	"math"
	"testing"

	"github.com/tautspan/tautspan/engine/scenario"
)

func hang(t *testing.T, net *scenario.Network) *Hanging {
	t.Helper()
	h, ok := Hang(net, 0, 0)
	if !ok {
		t.Fatal("the line does not hang")
	}
	return h
}

// Sag of a level span, w L^2/(8 H): the conductor of 318 m and 1.627 kg/m hangs
// 7.20 m at 28.0 kN and 7.02 m at 28.72 kN; its catenary within 5 mm.
// Source: common practice (parabola); hand figures of an invented line.
func TestSagOfLevelSpan(t *testing.T) {
	for _, c := range []struct{ tension, sag float64 }{{28000, 7.20}, {28720, 7.02}} {
		h := hang(t, network(span(c.tension, 1.627, fixed, fixed, 100, 218)))
		at, drop := h.Deepest()
		near(t, "deepest", drop, 1.627*Gravity*318*318/(8*c.tension), 1e-12)
		near(t, "as printed", drop, c.sag, 0.005/c.sag)
		near(t, "its place", at, 159, 1e-12)
		near(t, "quarter", h.Drop(79.5), 0.75*drop, 1e-12)
		a := c.tension / (1.627 * Gravity)
		if catenary := a * (math.Cosh(159/a) - 1); math.Abs(catenary-drop) > 0.006 || math.Abs(catenary/drop-1-4./3*drop*drop/(318*318)) > 1e-6 {
			t.Errorf("catenary %g m, parabola %g m", catenary, drop)
		}
		w := 1.627 * Gravity
		near(t, "excess of length", h.Excess(), w*w*318*318*318/(24*c.tension*c.tension), 1e-12)
	}
}

// A mass at a quarter adds M g a(L-a)/(T L); incline takes nothing from the drop
// straight down but turns the chord: m g L^2/(8 T) with T and L along the chord.
func TestSagWithMassAndIncline(t *testing.T) {
	line := span(9000, 2, fixed, fixed, 10, 30)
	line.Nodes[1] = scenario.Node{Name: "j", Kind: scenario.Joint, Mass: 25, Tuned: []scenario.TunedOf[float64]{{Mass: 5, Spring: 100}}, Spring: 5e4}
	line.Incline = 0.4
	h := hang(t, network(line))
	const w, p = 2 * Gravity, 30 * Gravity
	near(t, "at the mass", h.Drop(10), w*10*30/(2*9000)+p*10*30/(9000*40), 1e-12)
	near(t, "midway", h.Drop(20), w*20*20/(2*9000)+p*10*20/(9000*40), 1e-12)
	// v' = 0 beyond the mass: w(L/2 - x) = p a/L.
	at, drop := h.Deepest()
	near(t, "deepest at", at, 20-p*10/40/w, 1e-12)
	near(t, "deepest", drop, h.Drop(at), 1e-15)
}

// A clamped beam without much tension: w L^4/(384 EI), deepest in the middle.
func TestSagOfStiffLine(t *testing.T) {
	const L, EI = 3.0, 5e5
	h := hang(t, network(stiff(EI, span(2, 4, clamped, clamped, L))))
	at, drop := h.Deepest()
	near(t, "clamped beam", drop, 4*Gravity*L*L*L*L/(384*EI), 1e-5)
	near(t, "middle", at, L/2, 1e-9)
	// v = w L^4/(24 EI) (s^2 - 2 s^3 + s^4): half the integral of v'^2 is by hand
	// (w L^3/24EI)^2 L/2 times the integral of (2s-6s^2+4s^3)^2 = 2/105.
	slope := 4 * Gravity * L * L * L / (24 * EI)
	near(t, "excess", h.Excess(), slope*slope*L/2*2/105, 1e-5)
	for _, xi := range []float64{3, 60} { // the energy: T times the excess and the bending are half the work of the weight
		net := network(stiff(9e3*(20/xi)*(20/xi), span(9e3, 4, clamped, fixed, 20)))
		h, work, curve := hang(t, net), 0.0, 0.0
		const n = 40000
		for i := range n {
			x := (float64(i) + 0.5) * 20 / n
			work += 4 * Gravity * h.Drop(x) * 20 / n
			if d := 20.0 / n; i > 0 && i < n-1 {
				bend := (h.Drop(x+d) - 2*h.Drop(x) + h.Drop(x-d)) / (d * d)
				curve += 9e3 * (20 / xi) * (20 / xi) * bend * bend * d
			}
		}
		near(t, "energy", 2*9e3*h.Excess()+curve, work, 3e-4)
	}
}

// Travel of an anchor and change of state of a uniform level span, against the
// parabola's equations written out:
//
//	travel = dT L/EA + dT/K + w^2 L^3/24 (1/T0^2 - 1/T^2),
//	T - T0 + EA alpha dtheta = EA w^2 L^2/24 (1/T^2 - 1/T0^2).
//
// Source: as ChangeOfTension.
func TestTakeUpAndChangeOfState(t *testing.T) {
	const T0, L, m, EA, alpha, K = 28e3, 318.0, 1.627, 35.1e6, 19e-6, 4e6
	build := func() *scenario.Network {
		line := span(T0, m, fixed, fixed, 100, L-100)
		for i := range line.Segments {
			line.Segments[i].Axial, line.Segments[i].Expansion = EA, alpha
		}
		return network(line)
	}
	net := build()
	const w = m * Gravity
	c := w * w * L * L * L / 24
	near(t, "take up", TakeUp(net, 0, 31e3), 3e3*L/EA+c*(1/(T0*T0)-1/(31e3*31e3)), 1e-11)
	net.Lines[0].Nodes[0].AxialGive = K
	near(t, "take up with an end that gives", TakeUp(net, 0, 25e3), -3e3*(L/EA+1/K)+c*(1/(T0*T0)-1/(25e3*25e3)), 1e-11)
	for _, warmer := range []float64{-40, -5, 3, 60} {
		change := ChangeOfTension(build(), 0, warmer)
		T := T0 + change
		near(t, "change of state", change+EA*alpha*warmer, EA*c/L*(1/(T*T)-1/(T0*T0)), 1e-9)
		if warmer*change >= 0 {
			t.Errorf("%g K warmer adds %g N", warmer, change)
		}
	}
	net.Lines[0].Weighted = true
	if got := ChangeOfTension(net, 0, 30); got != 0 {
		t.Errorf("a weighted line changes by %g N", got)
	}
	if got := TakeUp(net, 0, 30e3); !math.IsNaN(got) {
		t.Errorf("a weighted line is taken up by %g m", got)
	}
	taut := build()
	taut.Lines[0].Segments[0].Axial = 0
	if !math.IsNaN(TakeUp(taut, 0, 30e3)) || !math.IsNaN(ChangeOfTension(taut, 0, 30)) {
		t.Error("an unknown axial stiffness gave an answer")
	}
	if !math.IsNaN(TakeUp(build(), 0, -1)) {
		t.Error("a push was reached")
	}
}

// The two ways by which a line's tension follows temperature, the wire that it
// keeps (readings) and the loaded shape (answers), agree on a uniform span but
// for products of small strains.
func TestBothChangesOfState(t *testing.T) {
	line := span(28e3, 1.627, fixed, fixed, 318)
	line.Warm, line.Temperature = true, 290
	line.Segments[0].Axial, line.Segments[0].Expansion = 35.1e6, 19e-6
	for _, warmer := range []float64{-30, 15, 50} {
		then, err := AtTemperature(&line, 290+warmer)
		if err != nil {
			t.Fatal(err)
		}
		near(t, "change", then.Segments[0].Tension-28e3, ChangeOfTension(network(line), 0, warmer), 3e-3)
	}
}
