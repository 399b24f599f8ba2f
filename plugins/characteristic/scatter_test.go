package characteristic

import (
	"fmt"
	"math"
	"testing"

	"github.com/tautspan/tautspan/engine/mesh"
	"github.com/tautspan/tautspan/engine/scenario"
)

// endless turns both ends of a line into matched dashpots.
func endless(m *mesh.Mesh) {
	attached := m.Attached()
	for _, i := range []int{0, len(m.Pieces)} {
		m.Nodes[i].Fixed, m.Nodes[i].Absorbing = false, true
		m.Nodes[i].Dashpot = m.Pieces[attached[i][0].Piece].Impedance()
	}
}

// incident is a mesh on whose node 1 a step of velocity v arrives at ta: a
// constant force set on inside the first piece.
func incident(m *mesh.Mesh, v, place float64) (ta float64) {
	p := &m.Pieces[0]
	m.Jump = 1
	m.Pushes = []mesh.Push{{Name: "p", At: inside(0, place), Force: step(2*p.Impedance()*v, 0)}}
	return (p.Length - place) / p.WaveSpeed()
}

// Reflection and transmission: Rayleigh 1894, Theory of Sound, vol. 1, ch. VI;
// Graff 1975, ch. 1; Kinsler and co-workers 2000, ch. 2 (cited from memory,
// values recomputed). Velocities are read as displacement differences between
// two rows on straight histories: tolerance 1e-10, rounding of u over 1e-3 s.
func TestScattering(t *testing.T) {
	const T = 10000.0
	for _, c := range []struct {
		what       string
		m1, m2, C  float64
		end        bool
		r, through float64
	}{
		{"light to heavy", 1, 4, 0, false, -0.333333333333333, 0.666666666666667},
		{"heavy to light", 4, 1, 0, false, 0.333333333333333, 1.33333333333333},
		{"dashpot 2Z", 1, 1, 200, false, -0.5, 0.5},
		{"end Z", 1, 1, 100, true, 0, 0},
		{"end 3Z", 1, 1, 300, true, -0.5, 0},
		{"end Z/3", 1, 1, 100.0 / 3, true, 0.5, 0},
	} {
		parts := []stretch{{10, T, c.m1, 0}, {10, T, c.m2, 0}}
		if c.end {
			parts = parts[:1]
		}
		m := span(1e-3, 300, parts...)
		endless(m)
		if c.end {
			m.Nodes[1].Absorbing = c.C == 100
		}
		m.Nodes[1].Dashpot = c.C
		ta := incident(m, 1, 4)
		look(m, scenario.Displacement, 0, inside(0, 5))
		if !c.end {
			look(m, scenario.Displacement, 0, inside(1, 1))
		}
		res := solve(t, m, 0)
		late := int((ta+6/m.Pieces[0].WaveSpeed()+0.02)/1e-3) + 1
		u := res.Series[0][0]
		near(t, c.what+" reflected", (u[late+1]-u[late])/1e-3-1, c.r, 1e-10)
		if !c.end {
			u = res.Series[1][0]
			near(t, c.what+" transmitted", (u[late+1]-u[late])/1e-3, c.through, 1e-10)
		}
	}
}

// A point mass met by a unit step of velocity, M v' + 2Z v = 2Z: Graff 1975,
// ch. 1 (cited from memory, values recomputed). One step is the exact
// exponential; what is left is the reading of the node's history, by cubics
// beside the break (chosen: 1e-6 of the velocity, seen 4e-8 at level 3; 1e-9 of
// a second's travel for the displacement, seen 5e-12).
func TestMassMetByAStep(t *testing.T) {
	const T, mass, M = 20000.0, 1.35, 2.0
	m := span(5e-4, 300, stretch{20, T, mass, 0}, stretch{20, T, mass, 0})
	endless(m)
	m.Nodes[1].Mass = M
	place := 20 - 0.04*m.Pieces[0].WaveSpeed() // arrives at 0.04 s
	incident(m, 1, place)
	look(m, scenario.Velocity, 0, node(1))
	look(m, scenario.Displacement, 0, node(1))
	res := solve(t, m, 3)
	k := 2 * m.Pieces[0].Impedance() / M
	for _, c := range []struct{ t, v float64 }{{0.002, 0.280093210588363}, {0.005, 0.560265364989385}, {0.02, 0.962609377639687}} {
		row := int(math.Round((0.04 + c.t) / 5e-4))
		near(t, fmt.Sprintf("v(%g)", c.t), res.Series[0][0][row], c.v, 1e-6)
		near(t, fmt.Sprintf("u(%g)", c.t), res.Series[1][0][row], c.t+math.Expm1(-k*c.t)/k, 1e-9)
	}
}

// A matched end swallows what comes: nothing is left on the line, and the
// account says where it went.
func TestAbsorbingEnd(t *testing.T) {
	m := span(1e-3, 1001, stretch{20, 10000, 1, 0})
	endless(m)
	m.Pushes = []mesh.Push{{Name: "p", At: inside(0, 7), Force: bump(100, 0.03)}}
	m.Band = 80
	look(m, scenario.Velocity, 0, inside(0, 3), inside(0, 13))
	res := solve(t, m, 0)
	for k := range res.Series[0] {
		for row := 300; row < 1000; row++ {
			near(t, "velocity", res.Series[0][k][row], 0, 1e-12)
		}
	}
	e := res.Energy
	if !(math.Abs(e.Unaccounted()) < 1e-4*e.Work) || !(math.Abs(e.End) < 1e-12*e.Work) {
		t.Errorf("energy %+v", e)
	}
}

// A force rolling over a line with fixed ends and over an endless line: Fryba
// 1999, Vibration of Solids and Structures under Moving Loads, 3rd ed.; Graff
// 1975 (cited from memory, values recomputed from the closed sum). Straight
// histories: tolerance 1e-13 m.
func TestRollingLoad(t *testing.T) {
	m := span(0.1, 14, stretch{60, 20000, 1.35, 0})
	m.Jump = 1
	m.Rolls = []mesh.Roll{{Name: "r", Speed: 48.68644955601476, Force: 150}}
	probes(t, m, []at{{10, 0.1, 0.00775575853215604}, {20, 0.4, 0.102451605557196}, {30, 0.6, 0.153677408335793},
		{50, 0.9, 0.0714285714285714}, {45, 1.2, -0.0127119595287296}}, 1e-13)

	m = span(0.1, 4, stretch{200, 20000, 1.35, 0})
	endless(m)
	m.Rolls = []mesh.Roll{{Name: "r", Speed: 60, Force: 150, From: 80}}
	look(m, scenario.Displacement, 0, inside(0, 98), inside(0, 80))
	look(m, scenario.Slope, 0, inside(0, 97), inside(0, 99))
	res := solve(t, m, 0)
	near(t, "under the load", res.Series[0][0][3], 0.136930639376292, 1e-13)
	near(t, "slope behind", res.Series[1][0][3], 0.00251180497809784, 1e-13)
	near(t, "slope ahead", res.Series[1][1][3], -0.00739572474449133, 1e-13)
	m.Rolls[0].Speed = 0.96 * m.Pieces[0].WaveSpeed()
	if len(New().Refuses(m)) != 1 {
		t.Error("a roll at 0.96 of the wave speed is not refused")
	}
}

// A roll over three pieces of one line is the roll over one piece.
func TestRollingOverJoints(t *testing.T) {
	whole := span(0.01, 200, stretch{60, 20000, 1.35, 0})
	cut := span(0.01, 200, stretch{17, 20000, 1.35, 0}, stretch{20, 20000, 1.35, 0}, stretch{23, 20000, 1.35, 0})
	for _, m := range []*mesh.Mesh{whole, cut} {
		m.Jump = 1
		m.Rolls = []mesh.Roll{{Name: "r", Speed: 40, Force: 150, From: 5, Starting: 0.1}}
	}
	look(whole, scenario.Displacement, 0, inside(0, 30))
	look(cut, scenario.Displacement, 0, inside(1, 13))
	a, b := solve(t, whole, 0), solve(t, cut, 0)
	if d := relative(b.Series[0][0], a.Series[0][0]); !(d < 1e-12) {
		t.Errorf("relative difference %g", d)
	}
	for _, e := range []float64{a.Energy.Unaccounted() / a.Energy.Most, b.Energy.Unaccounted() / b.Energy.Most} {
		t.Logf("roll energy gap %g", e)
	}
}

// The front of a displacement jump loses exp(-d x/(2Z)): Courant and Hilbert
// 1962, vol. II; Morse and Feshbach 1953, ch. 7 (cited from memory, values
// recomputed). The front itself is carried without error; behind it the loss's
// own wave rises with slope g gamma^2 t/2, and the cubic that reads the lattice
// rounds that corner by up to 0.15 of a lattice step (chosen).
func TestDampedFront(t *testing.T) {
	m := span(0.01, 2050, stretch{2100, 10000, 1, 0.5})
	m.Jump = 0
	m.Nodes[0].Motion = &mesh.Motion{Displacement: func(t float64) float64 { return 1 }, Velocity: func(float64) float64 { return 0 }}
	look(m, scenario.Displacement, 0, inside(0, 100), inside(0, 400), inside(0, 2000))
	res := solve(t, m, 2)
	ds := m.Pieces[0].TravelTime() / float64(res.Layout.(Layout).Cells[0])
	for k, c := range []struct{ x, f float64 }{{100, 0.778800783071405}, {400, 0.367879441171442}, {2000, 0.00673794699908547}} {
		tol := 0.15 * ds * c.f * 0.25 * 0.25 / 2 * c.x / 100
		near(t, fmt.Sprintf("front after %g m", c.x), res.Series[0][k][int(c.x)], c.f, tol)
		near(t, "before the front", res.Series[0][k][int(c.x)-1], 0, tol)
		if tol > 2e-3*c.f {
			t.Errorf("the tolerance %g says nothing", tol)
		}
	}
}

// The wake of a point impulse on an endless damped string is
// J/(2Z) exp(-s t) I0(s sqrt(t^2 - x^2/c^2)) behind the front: Courant and
// Hilbert 1962; Morse and Feshbach 1953 (cited from memory, values recomputed).
// The impulse is a rectangle of 1e-4 s; its wake is the mean of the formula over
// it. Tolerance: second order in the lattice step, 1/200 of 1/gamma at level 2.
func TestWakeOfAnImpulse(t *testing.T) {
	const J, width, s = 10.0, 1e-4, 2.0
	m := span(0.1, 11, stretch{260, 10000, 1, 4})
	m.Jump = 1
	m.Pushes = []mesh.Push{{At: inside(0, 130), Force: step(J/width, 0)}, {At: inside(0, 130), Force: step(-J/width, width)}}
	look(m, scenario.Displacement, 0, inside(0, 130), inside(0, 180), inside(0, 250))
	exact := func(x, t float64) float64 {
		if q := t*t - x*x/1e4; q > 0 {
			return J / 200 * math.Exp(-s*t) * bessel0(s*math.Sqrt(q))
		}
		return 0
	}
	wake := func(x, t float64) float64 {
		sum := 0.0
		for i := range 100 {
			sum += exact(x, t-width*(float64(i)+0.5)/100)
		}
		return sum / 100
	}
	near(t, "y(0, 0.1)", exact(0, 0.1), 0.0413469275817165, 1e-15)
	near(t, "y(0, 1)", exact(0, 1), 0.0154254161276836, 1e-15)
	near(t, "y(50, 0.6)", exact(50, 0.6), 0.0167623950214781, 1e-15)
	for level, tol := range []float64{2e-6, 5e-7, 1.3e-7} {
		u := solve(t, m, level).Series[0]
		near(t, "y(0, 0.1)", u[0][1], wake(0, 0.1), tol)
		near(t, "y(0, 1)", u[0][10], wake(0, 1), tol)
		near(t, "y(50, 0.6)", u[1][6], wake(50, 0.6), tol)
		near(t, "y(120, 1)", u[2][10], 0, tol)
	}
}

func bessel0(x float64) float64 {
	s, term := 1.0, 1.0
	for k := 1; k < 60; k++ {
		term *= x * x / 4 / float64(k*k)
		s += term
	}
	return s
}
