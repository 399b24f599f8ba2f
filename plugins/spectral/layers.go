package spectral

import (
	"math"

	"github.com/tautspan/tautspan/engine/mesh"
)

// travelTime is that of waves along a piece whose tension may rise, s: the integral
// of dx/c is 2L sqrt m/(sqrt T0 + sqrt T1).
func travelTime(p *mesh.Piece) float64 {
	if p.TensionRise == 0 {
		return p.TravelTime()
	}
	return 2 * p.Length * math.Sqrt(p.MassPerLength) / (math.Sqrt(p.Tension) + math.Sqrt(endTension(p)))
}

// endTension is the tension at a piece's end, N; 0, where a line hangs free, within
// rounding.
func endTension(p *mesh.Piece) float64 {
	end := p.Tension + p.TensionRise*p.Length
	if math.Abs(end) < 1e-12*p.Tension {
		return 0
	}
	return end
}

// stiffer is the frequency at which a wave is as short as omega makes it on a string:
// bending makes short waves faster. Mean over the pieces by length.
func stiffer(m *mesh.Mesh, omega float64) float64 {
	sum, length := 0.0, 0.0
	for i := range m.Pieces {
		p := &m.Pieces[i]
		t := p.Tension + p.TensionRise*p.Length/2
		k := omega * math.Sqrt(p.MassPerLength/t)
		sum += p.Length * omega * math.Sqrt(1+k*k*p.Bending/t)
		length += p.Length
	}
	return sum / length
}

// Layers beside clamps, joints and loads die away over the bending length l =
// sqrt(EI/T). Elements end at 8 l from them, or at a quarter of the stretch.
const layerLengths = 8.0

// bendingLength is sqrt(EI/T) with the mean tension, m.
func bendingLength(p *mesh.Piece) float64 {
	return math.Sqrt(p.Bending / (p.Tension + p.TensionRise*p.Length/2))
}

// layers adds the borders of the layers at both ends of a stretch; none where the
// whole stretch is hardly longer than they are.
func layers(p *mesh.Piece, from, to float64, add func(mark int, share, to float64)) {
	w := layerLengths * bendingLength(p)
	if w == 0 || to-from < 2*w {
		return
	}
	w = math.Min(w, (to-from)/4)
	add(-1, (from+w)/p.Length, from+w)
	add(-1, (to-w)/p.Length, to-w)
}

// maxBeam keeps the condition of elements that bend in bounds.
const maxBeam = 90

// layerDegree is the least degree at level 0 of an element that bends: 10 where it is
// eight bending lengths long, 13 from sixteen on; what is longer lies beyond the
// layers. Chosen.
func layerDegree(p *mesh.Piece, length float64) float64 {
	return 6 + 0.4*math.Min(length/bendingLength(p), 16)
}
