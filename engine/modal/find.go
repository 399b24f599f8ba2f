package modal

import (
	"fmt"
	"math"
	"sort"
	"strings"

	"github.com/tautspan/tautspan/engine/mesh"
	"github.com/tautspan/tautspan/engine/scenario"
)

// Want says how much is asked. Of Count and Below the first that is reached
// ends the list; with both zero the first ten modes of each group are given.
type Want struct {
	Count  int     // modes of each group; 0: no limit of number
	Below  float64 // Hz, damped frequency; 0: no limit of frequency
	Shapes bool    // also the shapes
}

// mostCounted bounds the dense count of a network: each takes the cube of its
// nodes, some 0.05 s for so many, and a vibration some forty counts.
const mostCounted = 600

// Most modes of one group that a call gives: thousands need seconds.
const mostModes = 20000

// Result holds the natural vibrations of all groups of a network.
type Result struct {
	// Modes that oscillate, group by group, by damped frequency.
	Modes []Mode
	// Overdamped motions that creep back without oscillating, group by group,
	// slowest first.
	Overdamped []Overdamped
	// CompleteBelow is the damped frequency, Hz, below which no mode of any
	// group is missing from Modes; 0 where that could not be proved.
	CompleteBelow float64
	// Notes are remarks for the report, each one sentence.
	Notes []string
}

// Mode is one natural vibration, displacement = Re(shape * e^{St}).
type Mode struct {
	Group  int // groups of lines that are tied to one another, from 0
	Line   int // index into mesh.Lines; -1 where several are tied
	Number int // from 1, by damped frequency within the group

	S               complex128 // 1/s, imaginary part positive
	Frequency       float64    // Hz, |s|/2pi
	DampedFrequency float64    // Hz, Im s/2pi
	DampingRatio    float64    // -Re s/|s|
	Decay           float64    // 1/s, -Re s

	// Multiplicity is the number of modes that share this S, 1 in general.
	Multiplicity int
	// Defective says that coinciding modes have fewer shapes than their number:
	// the motion then also grows like t*e^{St} before it dies away.
	Defective bool
	Shape     *Shape // nil unless asked for
}

// Overdamped is a natural motion proportional to e^{-Decay t}.
type Overdamped struct {
	Group, Line int
	Decay       float64 // 1/s
}

// Find computes the natural vibrations of a network.
//
// What is not linear, or known by a bench record alone, is refused with a
// *scenario.PathError that names the first such place.
//
// Validity: linear networks of lines with positive length and mass, and tension
// that is positive but for beams and for free ends that carry nothing; it returns
// an error for other numbers, for beams without end, and where an inclined line
// hardly bends (see represents). Accuracy: about 1e-13
// relative in s where modes are apart; the mean of two that nearly coincide is
// as good, their difference good to its square root.
func Find(m *mesh.Mesh, want Want) (*Result, error) {
	if err := check(m, want); err != nil {
		return nil, err
	}
	if want.Count == 0 && want.Below == 0 {
		want.Count = 10
	}
	if want.Count == 0 {
		want.Count = mostModes
	}
	res := &Result{CompleteBelow: math.Inf(1)}
	for g, w := range split(m) {
		var f found
		var err error
		if w.damped {
			f, err = w.dampedModes(want)
		} else {
			f, err = w.undampedModes(want)
		}
		if err != nil {
			return nil, err
		}
		w.list(res, f, g, want)
	}
	if math.IsInf(res.CompleteBelow, 1) {
		// Every mode of a network without pieces is listed; there is no limit to
		// name, so the highest frequency stands for it.
		res.CompleteBelow = want.Below
		for _, mode := range res.Modes {
			res.CompleteBelow = math.Max(res.CompleteBelow, mode.DampedFrequency)
		}
	}
	return res, nil
}

// found is what a search of one group gives: roots with positive imaginary part
// in order of it, real ones with falling value, and the angular damped
// frequency below which the list is complete.
type found struct {
	osc      []complex128
	real     []float64
	complete float64 // rad/s
	notes    []string
}

// list turns the roots of a group into modes.
func (w *network) list(res *Result, f found, group int, want Want) {
	n := 0
	for n < len(f.osc) && n < want.Count && (want.Below == 0 || imag(f.osc[n]) < 2*math.Pi*want.Below) {
		n++
	}
	complete := f.complete
	if n < len(f.osc) {
		complete = math.Min(complete, imag(f.osc[n]))
	}
	res.CompleteBelow = math.Min(res.CompleteBelow, complete/(2*math.Pi))
	for i := 0; i < n; {
		last := i + 1
		for last < len(f.osc) && f.osc[last] == f.osc[i] {
			last++
		}
		var shapes []*Shape
		rank := last - i
		if want.Shapes || rank > 1 {
			shapes, rank = w.shapes(f.osc[i], last-i)
		}
		for k := i; k < last && k < n; k++ {
			mode := newMode(f.osc[k])
			mode.Group, mode.Line, mode.Number = group, w.line, k+1
			mode.Multiplicity, mode.Defective = last-i, rank < last-i
			if want.Shapes && len(shapes) > 0 {
				mode.Shape = shapes[min(k-i, len(shapes)-1)]
			}
			res.Modes = append(res.Modes, mode)
		}
		i = last
	}
	for _, s := range f.real {
		res.Overdamped = append(res.Overdamped, Overdamped{Group: group, Line: w.line, Decay: -s})
	}
	res.Notes = append(res.Notes, f.notes...)
}

func newMode(s complex128) Mode {
	abs := math.Hypot(real(s), imag(s))
	return Mode{
		S:               s,
		Frequency:       abs / (2 * math.Pi),
		DampedFrequency: imag(s) / (2 * math.Pi),
		DampingRatio:    -real(s) / abs,
		Decay:           -real(s),
	}
}

// check refuses numbers outside the method's validity.
func check(m *mesh.Mesh, want Want) error {
	if want.Count < 0 || want.Count > mostModes {
		return fmt.Errorf("modal: %d modes asked for; the limit is %d", want.Count, mostModes)
	}
	if !(want.Below >= 0) || math.IsInf(want.Below, 0) {
		return fmt.Errorf("modal: modes below %g Hz asked for", want.Below)
	}
	if len(m.Nodes) > mostCounted {
		return fmt.Errorf("natural vibrations are counted for %d nodes at most, and the network has %d; leave out splices that change nothing", mostCounted, len(m.Nodes))
	}
	finite := func(least float64, v ...float64) bool {
		for _, x := range v {
			if !(x >= least) || math.IsInf(x, 0) {
				return false
			}
		}
		return true
	}
	const tiny = math.SmallestNonzeroFloat64
	for i, p := range m.Pieces {
		if !finite(tiny, p.Length, p.MassPerLength) || !finite(0, p.Viscous, p.Tension) || p.Tension == 0 && p.Bending == 0 && p.TensionRise <= 0 {
			return fmt.Errorf("modal: piece %d needs positive length, mass and tension (or bending stiffness) and no negative loss", i)
		}
		if p.From < 0 || p.To < 0 || p.From >= len(m.Nodes) || p.To >= len(m.Nodes) {
			return fmt.Errorf("modal: piece %d ends at a node that does not exist", i)
		}
	}
	for _, n := range m.Nodes {
		ok := finite(0, n.Mass, n.Spring, n.Dashpot)
		for _, b := range n.Brackets {
			ok = ok && finite(0, b.K, b.C)
		}
		if !ok {
			return fmt.Errorf("modal: node %q has a negative or unbounded mass, spring or dashpot", n.Name)
		}
	}
	for _, l := range m.Links {
		if !finite(0, l.Spring, l.Dashpot) {
			return fmt.Errorf("modal: link %q has a negative or unbounded spring or dashpot", l.Name)
		}
		if l.A < 0 || l.B < 0 || l.A >= len(m.Nodes) || l.B >= len(m.Nodes) {
			return fmt.Errorf("modal: link %q ends at a node that does not exist", l.Name)
		}
	}
	if words := m.Words(mesh.NonLinear); len(words) > 0 {
		return &scenario.PathError{Path: m.Where(mesh.NonLinear), What: "natural vibrations and their damping are refused, not linearised, with " + strings.Join(words, " and ") +
			": they would hang on the amplitude; ask a run for settle, peak or rms"}
	}
	if words := m.Words(mesh.BenchDamper); len(words) > 0 {
		return &scenario.PathError{Path: m.Where(mesh.BenchDamper), What: "natural vibrations are refused with " + words[0] +
			": its record holds real frequencies alone, and a vibration that dies away has a complex one; ask for the response at a frequency"}
	}
	if err := absorbs(m); err != nil {
		return err
	}
	return represents(m)
}

// sortRoots orders by imaginary, then real part, and tells the two kinds apart.
func sortRoots(roots []complex128) (osc []complex128, re []float64) {
	for _, s := range roots {
		if imag(s) > 0 {
			osc = append(osc, s)
		} else {
			re = append(re, real(s))
		}
	}
	sort.Slice(osc, func(i, j int) bool {
		if imag(osc[i]) != imag(osc[j]) {
			return imag(osc[i]) < imag(osc[j])
		}
		return real(osc[i]) > real(osc[j])
	})
	sort.Sort(sort.Reverse(sort.Float64Slice(re)))
	return osc, re
}
