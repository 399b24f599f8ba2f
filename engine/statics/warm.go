package statics

import (
	"fmt"
	"math"

	"github.com/tautspan/tautspan/engine/numeric"
	"github.com/tautspan/tautspan/engine/scenario"
)

// deepest is the weight of a line by its tension from which it is no shallow
// parabola any more: a sag of a quarter of the span.
const deepest = 2

// AtTemperature is a line as it stands at another temperature than that at which
// its tension was said: the same supports, the same wire. Its length without
// tension, s0, is that which fits now,
//
//	sum s0_i (1 + T/EA_i) = L (1 + (W/T)^2/24),
//
// with T the mean tension, L the chord and W the weight across it; warmer by d
// degrees, T' follows from the same with s0_i (1 + expansion_i d). The tension of
// every segment changes by T' - T. With an end that keeps its tension (weighted)
// nothing changes.
//
// Units: temperatures in K. Validity: shallow sag, W/T below about 1; the chord
// does not change. It returns a *scenario.PathError where the line does not say
// its own temperature, or the expansion or the axial stiffness of a segment is
// not known, and where the line would go slack.
// Source: the length of a shallow parabola and Hooke's law; Irvine, Cable
// Structures, MIT Press 1981, ch. 1 and 3 (from memory).
func AtTemperature(line *scenario.Line, temperature float64) (scenario.Line, error) {
	out := *line
	path := "line." + line.Name
	if !line.Warm {
		return out, &scenario.PathError{Path: path, What: "does not say at which temperature its tension holds; say `at 10 degC` in the line"}
	}
	degrees := temperature - line.Temperature
	if degrees == 0 || line.Weighted {
		return out, nil
	}
	weight := 0.0
	for i := range line.Segments {
		s := &line.Segments[i]
		if s.Axial <= 0 {
			return out, &scenario.PathError{Path: path + "." + s.Name + ".axial", What: "is not known, so that the tension at another temperature is not either; say `axial` in the stock"}
		}
		if s.Expansion == 0 {
			return out, &scenario.PathError{Path: path + "." + s.Name, What: "does not say how it expands with temperature; say `expansion` in the stock"}
		}
		weight += s.MassPerLength * s.Length
		for _, row := range scenario.Rows(s) {
			weight += row.Joint.Mass
		}
		if i > 0 {
			weight += line.Nodes[i].Mass
		}
	}
	const gravity = 9.80665 // m/s^2, standard, exact by definition (CGPM 1901)
	weight *= gravity * math.Cos(line.Incline)
	chord, now := Length(line), MeanTension(line)
	slack := func(t, degrees float64) float64 { // m, wire there is less wire that fits
		have := 0.0
		for i := range line.Segments {
			s := &line.Segments[i]
			share := s.Length / chord * (1 + weight*weight/(24*now*now)) / (1 + now/s.Axial) // of s0 in the chord
			have += share * (1 + s.Expansion*degrees) * (1 + t/s.Axial)
		}
		return chord * (have - 1 - weight*weight/(24*t*t))
	}
	// Wire less room rises with tension from minus infinity: one zero.
	lo, hi := now, now
	for k := 0; slack(lo, degrees) > 0 && k < 60; k++ {
		lo /= 2
	}
	for k := 0; slack(hi, degrees) < 0 && k < 60; k++ {
		hi *= 2
	}
	flo, fhi := slack(lo, degrees), slack(hi, degrees)
	if flo > 0 || fhi < 0 || math.IsNaN(flo) || math.IsNaN(fhi) {
		return out, &scenario.PathError{Path: path, What: fmt.Sprintf("would be slack %g K away from the temperature of its tension", degrees)}
	}
	then := numeric.Root(func(t float64) float64 { return slack(t, degrees) }, lo, hi, flo, fhi, 0)
	if weight > deepest*then {
		return out, &scenario.PathError{Path: path, What: fmt.Sprintf("would be slack %g K away from the temperature of its tension", degrees)}
	}
	out.Segments = append([]scenario.Segment(nil), line.Segments...)
	for i := range out.Segments {
		s := &out.Segments[i]
		if s.Tension += then - now; s.Tension <= 0 || s.Tension+s.TensionRise*s.Length < 0 {
			return out, &scenario.PathError{Path: path, What: fmt.Sprintf("would be slack %g K away from the temperature of its tension", degrees)}
		}
	}
	return out, nil
}
