package statics

import (
	"errors"
	"math"
	"testing"

	"github.com/tautspan/tautspan/engine/scenario"
)

func warmLine(tension, mass, axial float64) *scenario.Line {
	return &scenario.Line{Name: "l", Warm: true, Temperature: 283.15,
		Nodes:    []scenario.Node{{Fixed: true}, {Fixed: true}},
		Segments: []scenario.Segment{{Name: "s", Length: 300, MassPerLength: mass, Tension: tension, Axial: axial, Expansion: 19e-6}}}
}

// Without weight a line between fixed ends loses EA expansion (1 + T/EA) for each
// degree: s0 (1 + a d)(1 + T'/EA) = s0 (1 + T/EA).
func TestTautLineWarms(t *testing.T) {
	line := warmLine(40e3, 1e-9, 30e6)
	got, err := AtTemperature(line, 283.15+20)
	if err != nil {
		t.Fatal(err)
	}
	want := 30e6 * ((1+40e3/30e6)/(1+19e-6*20) - 1)
	if T := got.Segments[0].Tension; math.Abs(T-want) > 1e-6*want {
		t.Errorf("%g, want %g", T, want)
	}
	if line.Segments[0].Tension != 40e3 {
		t.Error("the line itself was changed")
	}
}

// With weight, the wire that lies in the parabola is kept: its length without
// tension and at the old temperature is the same before and after.
func TestSaggingLineKeepsItsWire(t *testing.T) {
	line := warmLine(28e3, 1.628, 35.1e6)
	for _, d := range []float64{-40, -5, 1, 30, 70} {
		got, err := AtTemperature(line, 283.15+d)
		if err != nil {
			t.Fatal(err)
		}
		wire := func(T, d float64) float64 {
			w := 1.628 * 9.80665 * 300 / T
			return 300 * (1 + w*w/24) / (1 + T/35.1e6) / (1 + 19e-6*d)
		}
		T := got.Segments[0].Tension
		if a, b := wire(28e3, 0), wire(T, d); math.Abs(a-b) > 1e-9*a {
			t.Errorf("%g K: %.12g m of wire, was %.12g", d, b, a)
		}
		if (d > 0) != (T < 28e3) {
			t.Errorf("%g K: tension %g", d, T)
		}
	}
}

func TestTemperatureNotKnown(t *testing.T) {
	cold := warmLine(1e3, 1e-9, 30e6)
	for _, c := range []struct {
		change func(l *scenario.Line)
		at     float64
	}{
		{func(l *scenario.Line) { l.Warm = false }, 300},
		{func(l *scenario.Line) { l.Segments[0].Axial = 0 }, 300},
		{func(l *scenario.Line) { l.Segments[0].Expansion = 0 }, 300},
		{func(l *scenario.Line) { l.Segments[0].Expansion = 0.1 }, 400}, // hangs too deep
	} {
		l := *cold
		l.Segments = append([]scenario.Segment(nil), cold.Segments...)
		c.change(&l)
		_, err := AtTemperature(&l, c.at)
		var p *scenario.PathError
		if !errors.As(err, &p) {
			t.Errorf("%v", err)
		}
	}
	weighted := *cold
	weighted.Weighted = true
	if got, err := AtTemperature(&weighted, 400); err != nil || got.Segments[0].Tension != 1e3 {
		t.Errorf("%v %v", got, err)
	}
}
