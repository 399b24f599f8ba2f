package scatter

import (
	"context"
	"math"
	"math/cmplx"
	"strings"
	"testing"

	"github.com/tautspan/tautspan/engine/mesh"
)

// jointed is a long line with one joint in its middle.
func jointed(n mesh.Node, ei float64) *mesh.Mesh {
	m := &mesh.Mesh{
		Nodes: []mesh.Node{{Fixed: true, Clamped: ei > 0, Support: true}, n, {Fixed: true, Clamped: ei > 0, Support: true}},
		Lines: []mesh.Line{{Name: "l", Pieces: []int{0, 1}, Length: 20}},
	}
	for i := range 2 {
		m.Pieces = append(m.Pieces, mesh.Piece{From: i, To: i + 1, Length: 10, MassPerLength: 1.5, Tension: 20e3, Bending: ei})
		m.Nodes[i+1].X = float64(i+1) * 10
	}
	return m
}

// On a string r = -D/(2 i w Z + D): a spring with a loss factor, a hung mass on
// one, and a bench record.
func TestSharesWithLossFactors(t *testing.T) {
	const f, K, eta, M = 3.0, 9e3, 0.4, 6.0
	w := 2 * math.Pi * f
	z := math.Sqrt(1.5 * 20e3)
	spring := complex(K, K*eta)
	hungOn := jointed(mesh.Node{}, 0)
	hungOn.Nodes = append(hungOn.Nodes, mesh.Node{Line: -1, Mass: M})
	hungOn.Links = []mesh.Link{{A: 1, B: 3, Spring: K, SpringLoss: eta}}
	bench := &mesh.Bench{Name: "b.csv", Frequency: []float64{1, 5}, Impedance: []complex128{complex(100, -20), complex(300, 20)}}
	for name, c := range map[string]struct {
		m *mesh.Mesh
		d complex128
	}{
		"spring":    {jointed(mesh.Node{Spring: K, SpringLoss: eta}, 0), spring},
		"hung mass": {hungOn, -spring * M * complex(w*w, 0) / (spring - complex(M*w*w, 0))},
		"bench":     {jointed(mesh.Node{Benches: []*mesh.Bench{bench}}, 0), complex(0, w) * complex(200, 0)},
	} {
		s, err := JointAt(c.m, 1, f, false)
		if err != nil {
			t.Fatal(err)
		}
		r := -c.d / (complex(0, 2*w*z) + c.d)
		lost := 1 - math.Pow(cmplx.Abs(r), 2) - math.Pow(cmplx.Abs(1+r), 2)
		if math.Abs(s.Reflected-cmplx.Abs(r)) > 1e-12 || math.Abs(s.Passed-cmplx.Abs(1+r)) > 1e-12 || math.Abs(s.Absorbed-lost) > 1e-12 || lost < 0.001 {
			t.Errorf("%s: %+v, want r = %v, lost %g", name, s, r, lost)
		}
	}
	out := jointed(mesh.Node{Benches: []*mesh.Bench{bench}}, 0)
	if _, err := JointAt(out, 1, 7, false); err == nil || !strings.Contains(err.Error(), "from 1 Hz to 5 Hz") {
		t.Errorf("beyond the record: %v", err)
	}
	if _, _, err := Ends(context.Background(), out, []float64{0.5}); err == nil {
		t.Error("ends beyond the record")
	}
	rough := jointed(mesh.Node{Laws: []mesh.Law{{Friction: &mesh.Friction{Force: 3}}}}, 0)
	if _, _, err := Joints(context.Background(), rough, []float64{1}); err == nil || !strings.Contains(err.Error(), "friction") {
		t.Errorf("friction: %v", err)
	}
}

// A hinge on a tensioned beam: by symmetry the incoming wave is the mean of one
// that is odd about the hinge, which passes as if there were none (no moment, no
// displacement there), and an even one, which meets zero moment and zero force.
// With waves e^{-rx} and near fields e^{-px} of the even motion, u” = 0 and
// E u”' - T u' = 0 at the hinge.
func TestHingeShares(t *testing.T) {
	const f, EI, T, m = 40.0, 90.0, 20e3, 1.5
	w := 2 * math.Pi * f
	q2 := (-T + math.Sqrt(T*T+4*EI*m*w*w)) / (2 * EI)
	q, p := math.Sqrt(q2), math.Sqrt(q2+T/EI)
	// Even half, x > 0: e^{iqx} + a e^{-iqx} + b e^{-px}; q^2 (1 + a) = p^2 b, and the
	// force i q EI p^2 (1 - a) + p EI q^2 b = 0 (E p^2 = T + E q^2).
	k := complex(math.Pow(q, 4)/p, 0)
	iqp := complex(0, q*p*p)
	even := (iqp + k) / (iqp - k)
	r, on := (even-1)/2, (even+1)/2
	s, err := JointAt(jointed(mesh.Node{Hinge: true}, EI), 1, f, true)
	if err != nil {
		t.Fatal(err)
	}
	if math.Abs(s.Reflected-cmplx.Abs(r)) > 1e-10 || math.Abs(s.Passed-cmplx.Abs(on)) > 1e-10 || math.Abs(s.Absorbed) > 1e-12 {
		t.Errorf("%+v, want %g and %g", s, cmplx.Abs(r), cmplx.Abs(on))
	}
}
