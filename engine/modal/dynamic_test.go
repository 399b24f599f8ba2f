package modal

import (
	"math"
	"math/cmplx"
	"testing"

	"github.com/tautspan/tautspan/engine/mesh"
)

// oneString is a taut string of one piece, both ends held.
func oneString(length, tension, mass float64) *mesh.Mesh {
	return &mesh.Mesh{
		Nodes:  []mesh.Node{{Name: "a", Fixed: true, Support: true}, {Name: "b", Fixed: true, Support: true, X: length}},
		Pieces: []mesh.Piece{{From: 0, To: 1, Length: length, Tension: tension, MassPerLength: mass}},
		Lines:  []mesh.Line{{Pieces: []int{0}, Length: length}},
	}
}

func solved(t *testing.T, m *mesh.Mesh, f float64, loads []Load, moves map[int]complex128) *Field {
	t.Helper()
	d, err := NewDynamic(m)
	if err != nil {
		t.Fatal(err)
	}
	field, err := d.Solve(complex(0, 2*math.Pi*f), loads, moves)
	if err != nil {
		t.Fatal(err)
	}
	return field
}

func meets(t *testing.T, what string, got complex128, want float64) {
	t.Helper()
	if cmplx.Abs(got-complex(want, 0)) > 1e-9*math.Abs(want) { // class T1
		t.Errorf("%s: %v, published %g", what, got, want)
	}
}

// Transfer receptance of a string driven at 3 m and read at 6 m (C14-01).
// Source: Kinsler, Frey, Coppens, Sanders (2000), ch. 2; Rao (2007), ch. 8
// (cited from memory, recomputed with 40 digits).
func TestReceptance(t *testing.T) {
	at := []Load{{Spot: mesh.Spot{Node: -1, At: 3}, Force: 1}}
	for f, want := range map[float64]float64{1: 0.000260298893331, 3.5: 0.00135669219644, 6: -0.000392602957902, 12.3: 8.58173370088e-05} {
		u := solved(t, oneString(10, 5000, 0.8), f, at, nil).Displacement(mesh.Spot{Node: -1, At: 6})
		meets(t, "receptance", u, want)
	}
}

// Input impedance -i Z cot kL of a string driven at its end (C14-03), force over
// velocity; and the displacement ratio along a line with one support moved
// (C14-04). Sources as above.
func TestDrivenEnd(t *testing.T) {
	for f, want := range map[float64]float64{1: -62.07143677, 3: 66.9046074763, 7: 72.137001645} {
		field := solved(t, oneString(10, 5000, 0.8), f, nil, map[int]complex128{0: 1})
		// Force that moves the end: minus what the line exerts on it.
		z := -field.Force(mesh.Spot{Node: 0}) / complex(0, 2*math.Pi*f)
		meets(t, "impedance", z/complex(0, 1), want)
	}
	field := solved(t, oneString(12, 3000, 0.75), 4, nil, map[int]complex128{0: 1})
	for x, want := range map[float64]float64{3: 0.421949131704, 6: -0.688042482211, 10: -0.714829575782} {
		meets(t, "ratio", field.Displacement(mesh.Spot{Node: -1, At: x}), want)
	}
}

// Static limit and the slope's jump at the force: T u' is F (L-a)/L before and
// -F a/L after (statics).
func TestDynamicAtRest(t *testing.T) {
	m := oneString(20, 10000, 1)
	field := solved(t, m, 0, []Load{{Spot: mesh.Spot{Node: -1, At: 7}, Force: 100}}, nil)
	meets(t, "deflection", field.Displacement(mesh.Spot{Node: -1, At: 7}), 100.0*7*13/(10000*20))
	meets(t, "force after", field.Force(mesh.Spot{Node: -1, At: 7}), -35)
	meets(t, "force before", field.Force(mesh.Spot{Node: -1, At: 6.9}), 65)
	meets(t, "on the far support", field.Force(mesh.Spot{Node: 1}), 35)
}

// A network cut by a splice in the node of a wave has its pieces in resonance by
// themselves; the answer stays that of the uncut line.
func TestPieceInResonance(t *testing.T) {
	// c = 100 m/s: the first piece, 10 m, resonates at 5 Hz by itself, the whole does not.
	cut := &mesh.Mesh{
		Nodes: []mesh.Node{{Fixed: true}, {}, {Fixed: true, X: 27}},
		Pieces: []mesh.Piece{
			{From: 0, To: 1, Length: 10, Tension: 10000, MassPerLength: 1},
			{From: 1, To: 2, Length: 17, Tension: 10000, MassPerLength: 1, X0: 10},
		},
		Lines: []mesh.Line{{Pieces: []int{0, 1}, Length: 27}},
	}
	m := oneString(27, 10000, 1)
	whole := solved(t, m, 5, []Load{{Spot: mesh.Spot{Node: -1, At: 4}, Force: 1}}, nil).Displacement(mesh.Spot{Node: -1, At: 22})
	parts := solved(t, cut, 5, []Load{{Spot: mesh.Spot{Node: -1, At: 4}, Force: 1}}, nil).Displacement(mesh.Spot{Node: -1, Piece: 1, At: 12})
	if cmplx.Abs(whole-parts) > 1e-7*cmplx.Abs(whole) { // 1e-9 beside the pole, times the slope of the response there
		t.Errorf("cut %v, whole %v", parts, whole)
	}
	d, err := NewDynamic(m)
	if err != nil {
		t.Fatal(err)
	}
	if _, err := d.Solve(complex(0, 2*math.Pi*50/27), []Load{{Spot: mesh.Spot{Node: -1, At: 4}, Force: 1}}, nil); err == nil {
		t.Error("an undamped resonance gave an answer")
	}
}
