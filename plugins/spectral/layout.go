package spectral

import (
	"math"

	"github.com/tautspan/tautspan/engine/mesh"
	"github.com/tautspan/tautspan/engine/solver"
)

// ratio is the step ratio between successive levels: degrees p, 1.5p, 2.25p.
const ratio = 1.5

// layout is one discretisation: everything that was decided from numbers, so
// that it can be used again on a mesh with slightly different ones.
type layout struct {
	level  int
	pieces [][]stretch
	omega  float64 // rad/s, highest frequency that level 0 resolves
	hot    float64 // rad/s, highest frequency that the step follows; 0 until known
	quiet  float64 // s, longest substep without loads
	loaded float64 // s, longest substep under loads
	law    float64 // s, longest substep with forces that are not linear
	modal  bool    // real modes instead of the approximant
}

// stretch is a run of equal elements inside a piece.
type stretch struct {
	mark     int     // border at its end: index among the piece's border marks; -1 no mark
	share    float64 // without mark: where it ends as a share of the piece's length; 0 the piece's end
	elements int
	degree   int
}

// Rules of level 0; chosen, see the convergence tests for what they give.
const (
	elementPhase = 28.0 // rad of the highest wave that one long element takes: degree 24
	kinkedPhase  = 20.0 // the same for data with kinks: degree 15
	bentPhase    = 12.0 // the same of elements that bend: rounding grows fast with their degree
	snapPhase    = 0.05 // rad; a mark nearer to a border than this gets none of its own
	energyPhase  = 1.2  // rad of the highest wave per substep, for the energy account's quadrature
	loadPhase    = 0.8  // rad of the loads' highest frequency per substep at level 0
)

// halfWaves is how many half waves level 0 resolves along the slowest line at
// least, and over all lines at most, by effort. Data with a kink (jump <= 1) have
// no highest frequency; the least then decides.
func halfWaves(effort, jump int) (least, most float64) {
	effort = min(max(effort, 0), 2)
	least = [3]float64{16, 24, 40}[effort]
	most = [3]float64{400, 800, 1600}[effort]
	if jump <= 2 {
		most = [3]float64{48, 96, 192}[effort]
	}
	if jump <= 1 {
		least = [3]float64{18, 34, 68}[effort]
	}
	return least, most
}

// resolved is the highest angular frequency that level 0 resolves, rad/s, and
// whether the excitations go further.
func resolved(m *mesh.Mesh, effort int) (omega float64, capped bool) {
	slowest, total := 0.0, 0.0
	for _, l := range m.Lines {
		t := 0.0
		for _, p := range l.Pieces {
			t += travelTime(&m.Pieces[p])
		}
		slowest, total = math.Max(slowest, t), total+t
	}
	if total == 0 {
		for i := range m.Pieces {
			total += travelTime(&m.Pieces[i])
		}
		slowest = total
	}
	if total == 0 {
		return 1, false
	}
	least, most := halfWaves(effort, m.Jump)
	least, most = least*math.Pi/slowest, most*math.Pi/total
	if m.Features()&mesh.Bending != 0 {
		least, most = stiffer(m, least), stiffer(m, most)
	}
	omega = math.Max(2*math.Pi*m.Band, least)
	if limit := math.Max(most, least); omega > limit {
		return limit, true
	}
	return omega, false
}

// degreeFor is the level-0 degree of an element that the highest wave crosses in
// theta radians: p = 0.57 theta + 8 resolves frequencies to about 1e-8
// (measured rule of thumb for theta of 6 to 100); an element much shorter than a
// wave needs less, and so do data with a kink, whose waves beyond the highest
// resolved one are lost anyway.
func degreeFor(theta, margin float64) int {
	return max(3, int(math.Ceil(0.57*theta+3+margin*math.Min(1, theta/4))))
}

// borders lists where inside a piece elements must end: kinks, loads and edges.
func borders(p *mesh.Piece) []float64 {
	var at []float64
	for _, k := range p.Marks {
		if k.Kind != mesh.MarkWatch {
			at = append(at, k.At)
		}
	}
	return at
}

// newLayout chooses elements and degrees. Steps are chosen later, when the
// system's highest frequency is known.
func newLayout(m *mesh.Mesh, req solver.Request) (*layout, bool) {
	omega, capped := resolved(m, req.Effort)
	lay := &layout{level: req.Level, omega: omega, pieces: make([][]stretch, len(m.Pieces))}
	scale := math.Pow(ratio, float64(req.Level))
	for i := range m.Pieces {
		p := &m.Pieces[i]
		wave := omega / p.WaveSpeed() // rad/m
		if p.Bending > 0 || p.TensionRise != 0 {
			wave = waveNumber(p, omega)
		}
		last := 0.0
		add := func(mark int, share, to float64) {
			theta := wave * (to - last)
			phase, margin := elementPhase, 5.0
			if m.Jump <= 2 {
				phase, margin = kinkedPhase, 0
			}
			if p.Bending > 0 {
				phase = bentPhase
			}
			n := max(1, int(math.Round(theta/phase)))
			d, most := float64(degreeFor(theta/float64(n), margin)), float64(maxDegree)
			if p.Bending > 0 {
				d, most = math.Max(d, layerDegree(p, to-last)), maxBeam
			}
			d = math.Min(math.Round(d*scale), most)
			lay.pieces[i] = append(lay.pieces[i], stretch{mark: mark, share: share, elements: n, degree: int(d)})
			last = to
		}
		for k, at := range borders(p) {
			if wave*math.Min(at-last, p.Length-at) > snapPhase {
				layers(p, last, at, add)
				add(k, 0, at)
			}
		}
		layers(p, last, p.Length, add)
		add(-1, 0, p.Length)
	}
	return lay, capped
}

// maxDegree keeps the quadratic cost of the reference elements in bounds.
const maxDegree = 400

// fits tells whether a layout made for another mesh can be used on this one.
func (lay *layout) fits(m *mesh.Mesh) bool {
	if len(lay.pieces) != len(m.Pieces) {
		return false
	}
	for i := range m.Pieces {
		at := borders(&m.Pieces[i])
		last := 0.0
		for _, s := range lay.pieces[i] {
			if s.mark >= len(at) {
				return false
			}
			to := s.end(&m.Pieces[i], at)
			if !(to > last) {
				return false
			}
			last = to
		}
	}
	return true
}

// count is the number of elements, of inner coordinates and of end points.
func (lay *layout) count(m *mesh.Mesh) (elements, inner, ends int64) {
	ends = int64(len(m.Nodes))
	for _, ss := range lay.pieces {
		n := int64(0)
		for _, s := range ss {
			n += int64(s.elements)
			inner += int64(s.elements) * int64(s.degree-1)
		}
		elements += n
		if n > 0 {
			ends += n - 1
		}
	}
	return elements, inner, ends
}
