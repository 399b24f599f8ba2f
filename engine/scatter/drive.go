package scatter

import (
	"fmt"
	"math"
	"slices"
	"strings"

	"github.com/tautspan/tautspan/engine/mesh"
	"github.com/tautspan/tautspan/engine/scenario"
)

// Drive is an excitation that can go on for ever at one frequency: a point force,
// a force along a stretch, or the motion of a support.
type Drive struct {
	Name string

	push  *mesh.Spot  // a force of 1 N
	press []mesh.Part // a force of 1 N/m all along
	node  int         // of a moved support; -1: none
	order int         // of a moved support: what moves by 1 is its displacement, velocity (1) or acceleration (2)
	unit  dims
}

// argPlace is the argument of a history's program that holds the place along its
// stretch, the second as in History.At(t, x).
const argPlace = 1

// Drives lists what can drive a network steadily, and says of every other
// excitation why it cannot.
func Drives(net *scenario.Network, m *mesh.Mesh) (list []Drive, reasons []string) {
	for _, p := range net.Plucks {
		reasons = append(reasons, p.Name+" is a pluck: it lets the line swing freely and drives nothing steadily")
	}
	for _, s := range net.Starts {
		reasons = append(reasons, s.Name+" is an initial state: it drives nothing steadily")
	}
	for _, r := range net.Rolls {
		reasons = append(reasons, r.Name+" travels along the line: it drives no steady vibration of one frequency")
	}
	held := func(p mesh.Push) bool { // a pluck that is let go later
		return slices.ContainsFunc(net.Plucks, func(k scenario.PluckOf[float64]) bool { return k.Name == p.Name })
	}
	for i := range m.Pushes {
		if !held(m.Pushes[i]) {
			list = append(list, Drive{Name: m.Pushes[i].Name, push: &m.Pushes[i].At, node: -1, unit: newton})
		}
	}
	for _, p := range m.Presses {
		if p.Force.Value.UsesArg(argPlace) {
			reasons = append(reasons, p.Name+" presses by a force that changes along the stretch: a response per unit needs the same force all along")
			continue
		}
		list = append(list, Drive{Name: p.Name, press: p.Parts, node: -1, unit: newton.over(metre)})
	}
	for _, mv := range net.Moves {
		name := "line." + net.Lines[mv.Line].Name + "." + net.Lines[mv.Line].Nodes[mv.Node].Name
		node := slices.IndexFunc(m.Nodes, func(n mesh.Node) bool { return n.Support && n.Line == mv.Line && n.Name == name })
		if node < 0 {
			reasons = append(reasons, fmt.Sprintf("%s moves a support that the network does not have", mv.Name))
			continue
		}
		list = append(list, Drive{Name: mv.Name, node: node, order: int(mv.Kind), unit: dims{1, 0, -int(mv.Kind)}})
	}
	return list, reasons
}

// dims are the powers of metre, newton and second of a unit.
type dims [3]int

var (
	metre  = dims{1, 0, 0}
	newton = dims{0, 1, 0}
)

func (d dims) over(e dims) dims { return dims{d[0] - e[0], d[1] - e[1], d[2] - e[2]} }

// dimsOf gives the unit of a watched quantity; slope is a pure number.
func dimsOf(q scenario.Quantity) dims {
	switch q {
	case scenario.Displacement:
		return dims{1, 0, 0}
	case scenario.Velocity:
		return dims{1, 0, -1}
	case scenario.Acceleration:
		return dims{1, 0, -2}
	case scenario.Moment:
		return dims{1, 1, 0}
	case scenario.Force, scenario.Tension:
		return newton
	}
	return dims{}
}

// String writes the unit as the language does: m/N, m^2/N, N*s/m, 1/s, 1.
func (d dims) String() string {
	var above, below []string
	for i, sign := range [3]string{"m", "N", "s"} {
		p := d[i]
		if p == 0 {
			continue
		}
		word := sign
		if p > 1 || p < -1 {
			word += fmt.Sprintf("^%d", max(p, -p))
		}
		if p > 0 {
			above = append(above, word)
		} else {
			below = append(below, word)
		}
	}
	text := strings.Join(above, "*")
	if text == "" {
		text = "1"
	}
	switch len(below) {
	case 0:
		return text
	case 1:
		return text + "/" + below[0]
	}
	return text + "/(" + strings.Join(below, "*") + ")"
}

// points spreads a force of 1 N/m along a part over point forces, by Gauss's
// rule of eight points on panels of at most 1.5 rad of the travelling wave. The
// panels end at every watched place, where the answer has a kink, and with
// bending grow from the bending length by doubling away from every end, where
// waves that die away matter.
//
// Accuracy: 8 points integrate e^{ix} over 1.5 rad to 1e-15, and likewise the
// waves that die away over panels that double.
// Source: the rule from Abramowitz, Stegun (1964), table 25.4 (from memory).
func points(p *mesh.Piece, part mesh.Part, watched []float64, omega float64) (at, weight []float64) {
	edges := []float64{part.From, part.To}
	for _, w := range watched {
		if w > part.From && w < part.To {
			edges = append(edges, w)
		}
	}
	slices.Sort(edges)
	edges = slices.Compact(edges)
	k, fade := 0.0, 0.0
	d := mediumAt(p, p.Length/2).lossless()
	if d.carries(omega) {
		k = imag(d.roots(omega)[0])
	}
	if d.beam() && d.t > 0 {
		fade = math.Sqrt(d.ei / d.t)
	}
	for i := 1; i < len(edges); i++ {
		inner := graded(edges[i-1], edges[i], fade)
		for j := 1; j < len(inner); j++ {
			n := max(1, int(math.Ceil((inner[j]-inner[j-1])*k/1.5)))
			h := (inner[j] - inner[j-1]) / float64(n)
			for c := 0; c < n; c++ {
				middle := inner[j-1] + (float64(c)+0.5)*h
				for g := range gaussAt {
					at = append(at, middle-gaussAt[g]*h/2, middle+gaussAt[g]*h/2)
					weight = append(weight, gaussWeight[g]*h/2, gaussWeight[g]*h/2)
				}
			}
		}
	}
	return at, weight
}

// graded divides a stretch from both its ends by doubling steps that begin with
// first; first 0 leaves it whole.
func graded(from, to, first float64) []float64 {
	edges := []float64{from, to}
	if first > 0 {
		for step, x := first, first; x < (to-from)/2; step, x = 2*step, x+2*step {
			edges = append(edges, from+x, to-x)
		}
	}
	slices.Sort(edges)
	return edges
}

// The Gauss-Legendre rule of eight points on [-1, 1], its positive half
// (Abramowitz, Stegun, table 25.4).
var (
	gaussAt     = [4]float64{0.1834346424956498, 0.5255324099163290, 0.7966664774136267, 0.9602898564975363}
	gaussWeight = [4]float64{0.3626837833783620, 0.3137066458778873, 0.2223810344533745, 0.1012285362903763}
)
