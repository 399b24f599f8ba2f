package modal

import (
	"math"
	"math/cmplx"
	"math/rand"
	"reflect"
	"testing"

	"github.com/tautspan/tautspan/engine/mesh"
)

// compare checks that two lists of modes are the same up to a factor of s.
func compare(t *testing.T, what string, a, b *Result, factor, rel float64) {
	t.Helper()
	if len(a.Modes) != len(b.Modes) || len(a.Overdamped) != len(b.Overdamped) {
		t.Errorf("%s: %d and %d modes, %d and %d overdamped", what, len(a.Modes), len(b.Modes), len(a.Overdamped), len(b.Overdamped))
		return
	}
	for i := range a.Modes {
		x, y := a.Modes[i].S*complex(factor, 0), b.Modes[i].S
		if cmplx.Abs(x-y) > rel*cmplx.Abs(y) {
			t.Errorf("%s: mode %d: %v and %v (%.2g)", what, i, x, y, cmplx.Abs(x-y)/cmplx.Abs(y))
		}
	}
}

// Three changes that change nothing: nodes numbered and pieces walked the other
// way, a bare splice in every piece, and other units.
func TestSameAnswers(t *testing.T) {
	r := rand.New(rand.NewSource(5))
	for trial := 0; trial < 40; trial++ {
		m := randomNetwork(r, trial%2 == 0)
		if len(split(m)) > 1 {
			continue // turning round also turns the order of the groups
		}
		want := Want{Count: 7}
		base := find(t, m, want)
		// Rounding of a root is a few parts in 1e14 with hard springs; margin 20.
		const rel = 1e-11
		compare(t, "turned", base, find(t, turned(m), want), 1, rel)
		compare(t, "spliced", base, find(t, spliced(m), want), 1, rel)
		// Lengths in units of 1/7 m, masses of 1/3 kg, times of 1/50 s.
		compare(t, "units", base, find(t, scaled(m, 7, 3, 50), want), 1.0/50, rel)
	}
}

func turned(m *mesh.Mesh) *mesh.Mesh {
	n := len(m.Nodes)
	out := &mesh.Mesh{Lines: m.Lines}
	for i := range m.Nodes {
		out.Nodes = append(out.Nodes, m.Nodes[n-1-i])
	}
	for i := range m.Pieces {
		p := m.Pieces[len(m.Pieces)-1-i]
		p.From, p.To = n-1-p.To, n-1-p.From
		out.Pieces = append(out.Pieces, p)
	}
	for _, l := range m.Links {
		l.A, l.B = n-1-l.B, n-1-l.A
		out.Links = append(out.Links, l)
	}
	return out
}

func spliced(m *mesh.Mesh) *mesh.Mesh {
	out := &mesh.Mesh{Lines: m.Lines, Links: m.Links, Nodes: append([]mesh.Node(nil), m.Nodes...)}
	for _, p := range m.Pieces {
		out.Nodes = append(out.Nodes, mesh.Node{Line: p.Line})
		mid := len(out.Nodes) - 1
		a, b := p, p
		a.To, a.Length = mid, 0.37*p.Length
		b.From, b.Length = mid, p.Length-a.Length
		out.Pieces = append(out.Pieces, a, b)
	}
	return out
}

func scaled(m *mesh.Mesh, length, mass, time float64) *mesh.Mesh {
	out := &mesh.Mesh{Lines: m.Lines}
	for _, n := range m.Nodes {
		n.Mass *= mass
		n.Spring *= mass / time / time
		n.Dashpot *= mass / time
		n.Brackets = append([]mesh.Maxwell(nil), n.Brackets...)
		for i := range n.Brackets {
			n.Brackets[i].K *= mass / time / time
			n.Brackets[i].C *= mass / time
		}
		out.Nodes = append(out.Nodes, n)
	}
	for _, p := range m.Pieces {
		p.Length *= length
		p.MassPerLength *= mass / length
		p.Tension *= mass * length / time / time
		p.Viscous *= mass / time / length
		out.Pieces = append(out.Pieces, p)
	}
	for _, l := range m.Links {
		l.Spring *= mass / time / time
		l.Dashpot *= mass / time
		out.Links = append(out.Links, l)
	}
	return out
}

// The same input gives the same bits, and the mesh is left alone.
func TestDeterministic(t *testing.T) {
	r := rand.New(rand.NewSource(6))
	for trial := 0; trial < 10; trial++ {
		m := randomNetwork(r, true)
		before := spliced(m)
		a := find(t, m, Want{Count: 6, Shapes: true})
		b := find(t, m, Want{Count: 6, Shapes: true})
		if !reflect.DeepEqual(a, b) {
			t.Error("two calls differ")
		}
		if !reflect.DeepEqual(before, spliced(m)) {
			t.Error("the mesh was changed")
		}
	}
}

// Symmetric differences: over steps that shrink by ten the derivative by a
// tension settles with the square of the step until rounding, 1e-13 of s over
// the step, takes over; no jumps from choices inside.
func TestSmooth(t *testing.T) {
	for _, damped := range []bool{false, true} {
		at := func(h float64) []Mode {
			m := threePieces(damped)
			m.Pieces[1].Tension *= 1 + h
			return find(t, m, Want{Count: 12}).Modes
		}
		d := func(h float64, i int) complex128 {
			return (at(h)[i].S - at(-h)[i].S) / complex(2*h, 0)
		}
		for i := 0; i < 12; i++ {
			s := cmplx.Abs(at(0)[i].S)
			d3, d4, d5 := d(1e-3, i), d(1e-4, i), d(1e-5, i)
			// The third derivative by log T is a few s at most: 1e-6 and 1e-8 of s.
			if cmplx.Abs(d3-d4) > 3e-5*s || cmplx.Abs(d4-d5) > 3e-7*s {
				t.Errorf("damped %v mode %d: %v, %v, %v of %g", damped, i+1, d3/complex(s, 0), d4/complex(s, 0), d5/complex(s, 0), s)
			}
		}
	}
}

// A shape obeys the balance of forces at every node and the wave equation in
// every piece. Slopes are taken one-sided from the shape by a fourth-order
// difference.
func TestShapesBalance(t *testing.T) {
	r := rand.New(rand.NewSource(7))
	for trial := 0; trial < 20; trial++ {
		m := randomNetwork(r, trial%2 == 0)
		for _, mode := range find(t, m, Want{Count: 5, Shapes: true}).Modes {
			if mode.Multiplicity > 1 {
				continue
			}
			force := make([]complex128, len(m.Nodes))
			scale := make([]float64, len(m.Nodes))
			s := mode.S
			u := func(n int) complex128 { return mode.Shape.At(mesh.Spot{Node: n, Piece: -1}) }
			add := func(n int, f complex128) { force[n] += f; scale[n] += cmplx.Abs(f) }
			top := 0.0
			for i, p := range m.Pieces {
				in := func(x float64) complex128 { return mode.Shape.At(mesh.Spot{Node: -1, Piece: i, At: x}) }
				for k := 0; k <= 400; k++ {
					top = math.Max(top, cmplx.Abs(in(p.Length*float64(k)/400)))
				}
				w := (complex(p.MassPerLength, 0)*s + complex(p.Viscous, 0)) * s / complex(p.Tension, 0)
				h := math.Min(p.Length/8, 0.02/math.Sqrt(cmplx.Abs(w)))
				slope := func(at, h float64) complex128 {
					return (-25*in(at) + 48*in(at+h) - 36*in(at+2*h) + 16*in(at+3*h) - 3*in(at+4*h)) / complex(12*h, 0)
				}
				for _, n := range []int{p.From, p.To} {
					scale[n] += p.Tension * math.Sqrt(cmplx.Abs(w))
				}
				add(p.From, complex(p.Tension, 0)*slope(0, h))
				add(p.To, -complex(p.Tension, 0)*slope(p.Length, -h))
				if e := cmplx.Abs(in(0)-u(p.From)) + cmplx.Abs(in(p.Length)-u(p.To)); e > 1e-10 {
					t.Errorf("trial %d mode %d: piece %d does not meet its nodes: %g", trial, mode.Number, i, e)
				}
				x, dx := 0.41*p.Length, 0.05*h
				curve := (in(x+dx) - 2*in(x) + in(x-dx)) / complex(dx*dx, 0)
				// Second difference: (w dx^2)/12 of w u, and rounding over dx^2.
				if e := cmplx.Abs(curve - w*in(x)); e > cmplx.Abs(w)*1e-6+1e-14/(dx*dx) {
					t.Errorf("trial %d mode %d: wave equation off by %g of %g", trial, mode.Number, e, cmplx.Abs(w))
				}
			}
			for i, n := range m.Nodes {
				add(i, -(complex(n.Mass, 0)*s*s+complex(n.Dashpot, 0)*s+complex(n.Spring, 0))*u(i))
				for _, b := range n.Brackets {
					add(i, -u(i)*s*complex(b.K*b.C, 0)/(complex(b.K, 0)+s*complex(b.C, 0)))
				}
			}
			for _, l := range m.Links {
				f := (complex(l.Spring, 0) + s*complex(l.Dashpot, 0)) * (u(l.B) - u(l.A))
				add(l.A, f)
				add(l.B, -f)
			}
			for i, n := range m.Nodes {
				// The slope's error is T|a| (0.02)^4/5, 3e-8 of the scale.
				if !n.Fixed && cmplx.Abs(force[i]) > 1e-7*scale[i] {
					t.Errorf("trial %d mode %d node %d: unbalanced %g of %g", trial, mode.Number, i, cmplx.Abs(force[i]), scale[i])
				}
			}
			in := false
			for i := range m.Pieces {
				in = in || mode.Shape.At(mesh.Spot{Node: -1, Piece: i, At: m.Pieces[i].Length / 3}) != 0
			}
			if in && math.Abs(top-1) > 2e-3 { // 400 places a piece see the top to that
				t.Errorf("trial %d mode %d: largest displacement %g", trial, mode.Number, top)
			}
		}
	}
}

// Three equal spans between held joints share every frequency, and a ring of
// three equal pieces has its modes in pairs: as many shapes as roots, orthogonal.
func TestEqualFrequencies(t *testing.T) {
	spans := line(1, 1, 0, []float64{0, 1, 2, 3}, fixed, fixed, fixed, fixed)
	res := find(t, &spans.m, Want{Count: 6, Shapes: true})
	for i, m := range res.Modes {
		near(t, "span", imag(m.S), math.Pi*float64(1+i/3), 1e-14)
		if m.Multiplicity != 3 || m.Defective || m.Line != 0 || m.Number != i+1 {
			t.Errorf("mode %+v", m)
		}
	}
	orthogonal(t, &spans.m, res.Modes[:3])

	ring := &build{}
	for i := 0; i < 3; i++ {
		ring.node(mesh.Node{})
	}
	for i := 0; i < 3; i++ {
		ring.piece(i, (i+1)%3, 1, 1, 1, 0)
	}
	res = find(t, &ring.m, Want{Count: 6, Shapes: true})
	for i, m := range res.Modes {
		near(t, "ring", imag(m.S), 2*math.Pi/3*float64(1+i/2), 1e-14)
		if m.Multiplicity != 2 {
			t.Errorf("ring mode %d: multiplicity %d", i+1, m.Multiplicity)
		}
	}
	for i := 0; i < 6; i += 2 {
		orthogonal(t, &ring.m, res.Modes[i:i+2])
	}
	if len(res.Notes) != 1 {
		t.Errorf("a free ring can move as a whole: notes %v", res.Notes)
	}
	// A list that ends within a pair says that it is complete up to the pair only.
	res = find(t, &ring.m, Want{Count: 3})
	near(t, "complete below", res.CompleteBelow, 2.0/3, 1e-13)
}

// orthogonal checks shapes over the mass of the line by Simpson's rule.
func orthogonal(t *testing.T, m *mesh.Mesh, modes []Mode) {
	t.Helper()
	inner := func(a, b *Shape) float64 {
		sum := 0.0
		for i, p := range m.Pieces {
			const n = 200
			for k := 0; k <= n; k++ {
				spot := mesh.Spot{Node: -1, Piece: i, At: p.Length * float64(k) / n}
				f := 2.0 + 2*float64(k%2)
				if k == 0 || k == n {
					f = 1
				}
				sum += f / 3 / n * p.Length * p.MassPerLength * real(a.At(spot)*b.At(spot))
			}
		}
		return sum
	}
	for i := range modes {
		for k := 0; k < i; k++ {
			// Simpson with 200 intervals to two waves: 1e-7.
			if e := inner(modes[i].Shape, modes[k].Shape); math.Abs(e) > 1e-6 {
				t.Errorf("shapes %d and %d: product %g", i, k, e)
			}
		}
		if inner(modes[i].Shape, modes[i].Shape) < 0.1 {
			t.Errorf("shape %d is empty", i)
		}
	}
}

// Groups: two lines that nothing ties, and a mass on a spring to ground.
func TestGroups(t *testing.T) {
	b := line(1, 1, 0, []float64{0, 1}, fixed, fixed)
	l := b.node(mesh.Node{Fixed: true, Line: 1})
	r := b.node(mesh.Node{Motion: &mesh.Motion{}, Line: 1})
	b.piece(l, r, 2, 1, 1, 0.1)
	b.node(mesh.Node{Line: -1, Mass: 4, Spring: 9})
	b.link(0, l, 100, 5)                      // between held places: nothing
	b.node(mesh.Node{Line: -1, Name: "idle"}) // without anything
	res := find(t, &b.m, Want{Below: 1.2})
	type key struct{ group, line, number int }
	var got []key
	for _, m := range res.Modes {
		got = append(got, key{m.Group, m.Line, m.Number})
	}
	want := []key{{0, 0, 1}, {0, 0, 2}, {1, 1, 1}, {1, 1, 2}, {1, 1, 3}, {1, 1, 4}, {2, -1, 1}}
	if !reflect.DeepEqual(got, want) {
		t.Errorf("got %v, want %v", got, want)
	}
	if res.CompleteBelow < 1.2 {
		t.Errorf("complete below %g", res.CompleteBelow)
	}
	near(t, "mass on a spring", imag(res.Modes[6].S), 1.5, 1e-14)
}

// A free line: nothing at zero frequency is listed, damped or not. With a
// dashpot C at one end of a free line, s = 0 is a simple zero, and the others obey
// Z tanh(s tau) + C = 0: s tau = i(n+1/2)pi - artanh(Z/C) for C > Z (else
// i n pi - artanh(C/Z), n >= 0, n = 0 overdamped).
func TestFreeLine(t *testing.T) {
	res := find(t, &line(1, 1, 0, []float64{0, 1}, mesh.Node{}, mesh.Node{}).m, Want{Count: 3})
	for i, m := range res.Modes {
		near(t, "free", imag(m.S), math.Pi*float64(i+1), 1e-14)
	}
	if len(res.Notes) != 1 {
		t.Errorf("notes %v", res.Notes)
	}
	res = find(t, &line(1, 1, 0, []float64{0, 1}, mesh.Node{}, mesh.Node{Dashpot: 3}).m, Want{Count: 3})
	for i, m := range res.Modes {
		near(t, "free", imag(m.S), math.Pi*(float64(i)+0.5), 1e-12)
		near(t, "decay", m.Decay, math.Atanh(1.0/3), 1e-12)
	}
	res = find(t, &line(1, 1, 0, []float64{0, 1}, mesh.Node{}, mesh.Node{Dashpot: 0.2}).m, Want{Count: 3})
	for i, m := range res.Modes {
		near(t, "free", imag(m.S), math.Pi*float64(i+1), 1e-12)
		near(t, "decay", m.Decay, math.Atanh(0.2), 1e-12)
	}
	if len(res.Overdamped) != 1 {
		t.Fatalf("overdamped %v", res.Overdamped)
	}
	near(t, "creep", res.Overdamped[0].Decay, math.Atanh(0.2), 1e-12)
}

// Numbers outside the validity are refused.
func TestRefusals(t *testing.T) {
	good := func() *mesh.Mesh { return threePieces(true) }
	for name, spoil := range map[string]func(m *mesh.Mesh){
		"length":    func(m *mesh.Mesh) { m.Pieces[0].Length = 0 },
		"tension":   func(m *mesh.Mesh) { m.Pieces[1].Tension = math.NaN() },
		"mass":      func(m *mesh.Mesh) { m.Pieces[2].MassPerLength = -1 },
		"loss":      func(m *mesh.Mesh) { m.Pieces[2].Viscous = math.Inf(1) },
		"node":      func(m *mesh.Mesh) { m.Nodes[1].Mass = -2 },
		"bracket":   func(m *mesh.Mesh) { m.Nodes[2].Brackets[0].K = math.NaN() },
		"link":      func(m *mesh.Mesh) { m.Links = []mesh.Link{{A: 1, B: 2, Spring: -1}} },
		"link end":  func(m *mesh.Mesh) { m.Links = []mesh.Link{{A: 1, B: 9, Spring: 1}} },
		"piece end": func(m *mesh.Mesh) { m.Pieces[0].To = -1 },
	} {
		m := good()
		spoil(m)
		if _, err := Find(m, Want{}); err == nil {
			t.Errorf("%s: no error", name)
		}
	}
	for _, w := range []Want{{Count: -1}, {Count: mostModes + 1}, {Below: math.NaN()}, {Below: math.Inf(1)}} {
		if _, err := Find(good(), w); err == nil {
			t.Errorf("%+v: no error", w)
		}
	}
	if res := find(t, &mesh.Mesh{}, Want{}); len(res.Modes) != 0 {
		t.Error("modes of nothing")
	}
}
