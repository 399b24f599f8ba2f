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
		t += s.Length * math.Sqrt(s.MassPerLength/s.Tension)
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
		e += s.Tension * s.Tension * s.Length / (2 * s.Axial)
	}
	return e
}

// MeanTension is the tension of a line averaged over its length, N.
func MeanTension(line *scenario.Line) float64 {
	sum := 0.0
	for _, s := range line.Segments {
		sum += s.Tension * s.Length
	}
	return sum / Length(line)
}

// TensionAt is the tension at a place, N; at a node where it changes, that of
// the segment after it.
func TensionAt(net *scenario.Network, p scenario.Place) float64 {
	segs := net.Lines[p.Line].Segments
	i := p.Segment
	if p.Node >= 0 {
		i = min(p.Node, len(segs)-1)
	}
	return segs[i].Tension
}
