package statics

import (
	"math"

	"github.com/tautspan/tautspan/engine/scenario"
)

// TravelTime is the time a small kink takes from end to end of a line, s:
// the sum of L sqrt(m/T) over its segments.
func TravelTime(line *scenario.Line) float64 {
	t := 0.0
	for _, s := range line.Segments {
		t += s.Length / WaveSpeed(&s)
	}
	return t
}

// Length is a line's length from support to support, m.
func Length(line *scenario.Line) float64 {
	l := 0.0
	for _, s := range line.Segments {
		l += s.Length
	}
	return l
}

// StoredEnergy is the energy of stretch that a line holds at rest, J: the sum
// of T^2 L/(2 EA) over its segments. It is NaN where a segment's axial
// stiffness is not known.
func StoredEnergy(line *scenario.Line) float64 {
	e := 0.0
	for _, s := range line.Segments {
		if s.Axial <= 0 {
			return math.NaN()
		}
		t0, t1 := s.Tension, EndTension(&s)
		e += (t0*t0 + t0*t1 + t1*t1) / 3 * s.Length / (2 * s.Axial)
	}
	return e
}

// MeanTension is the tension of a line averaged over its length, N.
func MeanTension(line *scenario.Line) float64 {
	sum := 0.0
	for _, s := range line.Segments {
		sum += (s.Tension + EndTension(&s)) / 2 * s.Length
	}
	return sum / Length(line)
}

// WaveSpeed is the speed of a small kink over a segment, m/s: its length by its
// travel time, (sqrt(T0) + sqrt(T1))/(2 sqrt(m)).
func WaveSpeed(s *scenario.Segment) float64 {
	return (math.Sqrt(s.Tension) + math.Sqrt(EndTension(s))) / (2 * math.Sqrt(s.MassPerLength))
}

// EndTension is the tension at the end of a segment, N.
func EndTension(s *scenario.Segment) float64 {
	return math.Max(0, s.Tension+s.TensionRise*s.Length)
}

// TensionAt is the tension at a place, N; at a node where it changes, that of
// the segment after it.
func TensionAt(net *scenario.Network, p scenario.Place) float64 {
	segs := net.Lines[p.Line].Segments
	if p.Node < 0 {
		s := &segs[p.Segment]
		return s.Tension + s.TensionRise*p.Offset
	}
	if p.Node == len(segs) {
		return EndTension(&segs[p.Node-1])
	}
	return segs[p.Node].Tension
}
