package scatter

import (
	"math"
	"math/cmplx"
	"testing"

	"github.com/tautspan/tautspan/engine/formula"
	"github.com/tautspan/tautspan/engine/mesh"
)

// lawful is two stretches of one string with a joint of laws between them.
func lawful(mass float64, laws ...mesh.Law) *mesh.Mesh {
	p := mesh.Piece{Length: 10, MassPerLength: 1, Tension: 1e4}
	a, b := p, p
	a.To, b.From, b.To, b.X0 = 1, 1, 2, 10
	return &mesh.Mesh{Nodes: []mesh.Node{{Name: "line.l.a"}, {Name: "line.l.j", Mass: mass, Laws: laws}, {Name: "line.l.b"}},
		Pieces: []mesh.Piece{a, b}, Lines: []mesh.Line{{Name: "l", Pieces: []int{0, 1}, Length: 20}}}
}

// Dry friction F at a joint of a string of impedance Z: the wave keeps the phase,
// so that the joint moves by U = A - 2F/(pi w Z) and lets U/A through; below
// A = 2F/(pi w Z) it sticks and throws everything back. Source: force balance of
// the first harmonic, 2 w Z (A - U) = 4F/pi.
func TestFrictionByAmplitude(t *testing.T) {
	const force, f, z = 20.0, 5.0, 100.0
	w := 2 * math.Pi * f
	stick := 2 * force / (math.Pi * w * z)
	for _, times := range []float64{0.5, 1.5, 3, 100} {
		a := times * stick
		s, err := JointAtAmplitude(lawful(0, mesh.Law{Friction: &mesh.Friction{Force: force}}), 1, f, a, false)
		if err != nil {
			t.Fatal(err)
		}
		u := math.Max(0, a-stick)
		if math.Abs(s.Passed-u/a) > 1e-9 || math.Abs(s.Reflected-(1-u/a)) > 1e-9 {
			t.Errorf("%g times: passed %g, reflected %g, want %g", times, s.Passed, s.Reflected, u/a)
		}
		if want := 1 - s.Passed*s.Passed - s.Reflected*s.Reflected; math.Abs(s.Absorbed-want) > 1e-9 {
			t.Errorf("%g times: absorbed %g, want %g", times, s.Absorbed, want)
		}
	}
}

// A bracket makes friction a spring for small waves; a stop does nothing within
// its gap; a written law -c v is the dashpot c, -k u^3 has the stiffness 3/4 k U^2.
func TestLawsByAmplitude(t *testing.T) {
	const f = 5.0
	w := 2 * math.Pi * f
	at := func(m *mesh.Mesh, amplitude float64) Shares {
		t.Helper()
		s, err := JointAtAmplitude(m, 1, f, amplitude, false)
		if err != nil {
			t.Fatal(err)
		}
		return s
	}
	same := func(what string, a, b Shares) {
		t.Helper()
		if math.Abs(a.Reflected-b.Reflected) > 1e-9 || math.Abs(a.Passed-b.Passed) > 1e-9 || math.Abs(a.Absorbed-b.Absorbed) > 1e-9 {
			t.Errorf("%s: %+v, want %+v", what, a, b)
		}
	}
	spring := lawful(2)
	spring.Nodes[1].Spring = 3000
	free, dash := lawful(2), lawful(2)
	dash.Nodes[1].Dashpot = 70
	same("bracket of friction", at(lawful(2, mesh.Law{Friction: &mesh.Friction{Force: 20, Through: 3000}}), 1e-3), at(spring, 1))
	stop := mesh.Law{Stop: &mesh.Stop{Gap: 0.05, Spring: 3000, Up: true, Down: true}}
	same("stop within its gap", at(lawful(2, stop), 0.01), at(free, 1))
	same("stop met hard", at(lawful(2, mesh.Law{Stop: &mesh.Stop{Gap: 1e-12, Spring: 3000, Up: true, Down: true}}), 1), at(spring, 1))
	u, v := formula.Arg(mesh.ArgU), formula.Arg(mesh.ArgV)
	same("written dashpot", at(lawful(2, mesh.Law{Written: &mesh.Written{Force: formula.Mul(formula.Const(-70), v)}}), 0.01), at(dash, 1))
	const k, a = 1e7, 0.02
	s := at(lawful(0, mesh.Law{Written: &mesh.Written{Force: formula.Mul(formula.Const(-k), formula.Mul(u, formula.Mul(u, u)))}}), a)
	moved := s.Passed * a // the joint moves as what goes on
	d := complex(0.75*k*moved*moved, 0)
	if want := cmplx.Abs(complex(0, 2*w*100) / (d + complex(0, 2*w*100))); math.Abs(s.Passed-want) > 1e-9 {
		t.Errorf("cubic spring: passed %g, want %g", s.Passed, want)
	}
	for what, law := range map[string]mesh.Law{
		"one side": {Stop: &mesh.Stop{Spring: 10, Up: true}}, "even law": {Written: &mesh.Written{Force: formula.Mul(u, u)}},
		"time": {Written: &mesh.Written{Force: formula.Mul(u, formula.Arg(0))}},
	} {
		if _, err := JointAtAmplitude(lawful(0, law), 1, f, 1, false); err == nil {
			t.Errorf("%s: answered", what)
		}
	}
}
