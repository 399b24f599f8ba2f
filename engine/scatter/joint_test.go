package scatter

import (
	"context"
	"math"
	"math/rand/v2"
	"testing"

	"github.com/tautspan/tautspan/engine/mesh"
)

// line builds a mesh of one line: stretches between nodes, node 0 first.
func line(nodes []mesh.Node, pieces ...mesh.Piece) *mesh.Mesh {
	m := &mesh.Mesh{Nodes: append([]mesh.Node(nil), nodes...), Lines: []mesh.Line{{Name: "l"}}}
	x := 0.0
	for i, p := range pieces {
		p.From, p.To, p.X0 = i, i+1, x
		m.Nodes[i].X = x
		x += p.Length
		m.Nodes[i+1].X = x
		m.Pieces = append(m.Pieces, p)
		m.Lines[0].Pieces = append(m.Lines[0].Pieces, i)
	}
	m.Lines[0].Length = x
	for i := range m.Nodes {
		if m.Nodes[i].Name == "" {
			m.Nodes[i].Name = "line.l." + string(rune('a'+i))
		}
	}
	m.Nodes[0].Support, m.Nodes[len(pieces)].Support = true, true
	return m
}

func piece(length, tension, mass float64) mesh.Piece {
	return mesh.Piece{Length: length, Tension: tension, MassPerLength: mass}
}

// hang hangs a mass on a spring and a dashpot from a node.
func hang(m *mesh.Mesh, node int, mass, k, c float64) {
	m.Links = append(m.Links, mesh.Link{Name: "hung", A: node, B: len(m.Nodes), Spring: k, Dashpot: c})
	m.Nodes = append(m.Nodes, mesh.Node{Name: "hung", Line: -1, Mass: mass})
}

func oneJoint(t1, m1, t2, m2 float64, joint mesh.Node) *mesh.Mesh {
	return line([]mesh.Node{{Fixed: true}, joint, {Fixed: true}}, piece(40, t1, m1), piece(60, t2, m2))
}

func near(t *testing.T, what string, got, want, tol float64) {
	t.Helper()
	if !(math.Abs(got-want) <= tol) {
		t.Errorf("%s: %.12g, want %.12g", what, got, want)
	}
}

// The published figures have 12 digits or more, so that phases up to pi are known
// to 5e-12; rounding missed by 1e-15 where they have 15.
const digits = 5e-12

type expected struct{ f, absR, phaseR, absT, phaseT float64 }

func holds(t *testing.T, what string, m *mesh.Mesh, list []expected) {
	t.Helper()
	for _, e := range list {
		for _, after := range []bool{false, true} { // the same stock on both sides: the same shares
			s, err := JointAt(m, 1, e.f, after)
			if err != nil {
				t.Fatal(err)
			}
			near(t, what+" reflected", s.Reflected, e.absR, digits)
			near(t, what+" passed", s.Passed, e.absT, digits)
			near(t, what+" phase of reflected", s.ReflectedPhase, e.phaseR, digits)
			near(t, what+" phase of passed", s.PassedPhase, e.phaseT, digits)
		}
	}
}

// Impedance step: r = (Z1-Z2)/(Z1+Z2), t = 2 Z1/(Z1+Z2).
// Source: Rayleigh, The Theory of Sound, vol. 1 (1894), ch. VI; Graff, Wave
// Motion in Elastic Solids (1975), ch. 1 (both from memory).
func TestImpedanceStep(t *testing.T) {
	m := oneJoint(10000, 1, 10000, 4, mesh.Node{})
	s, _ := JointAt(m, 1, 3, false)
	near(t, "light to heavy", s.Reflected, 1.0/3, digits)
	near(t, "light to heavy, phase", math.Abs(s.ReflectedPhase), math.Pi, digits)
	near(t, "light to heavy", s.Passed, 2.0/3, digits)
	near(t, "light to heavy, power passed", s.PassedPower, 8.0/9, digits)
	s, _ = JointAt(m, 1, 3, true)
	near(t, "heavy to light", s.Reflected, 1.0/3, digits)
	near(t, "heavy to light, phase", s.ReflectedPhase, 0, digits)
	near(t, "heavy to light", s.Passed, 4.0/3, digits)
	near(t, "heavy to light, power passed", s.PassedPower, 8.0/9, digits)
}

// Point mass: r = -i w M/(2Z + i w M), half the power at w M = 2Z.
// Source: Graff (1975), ch. 1; Morse, Vibration and Sound (1948), ch. III (from
// memory); T = 20 kN, m = 1.35 kg/m, M = 2 kg.
func TestPointMass(t *testing.T) {
	m := oneJoint(20000, 1.35, 20000, 1.35, mesh.Node{Mass: 2})
	holds(t, "mass", m, []expected{
		{1, 0.038210323395224, -1.60901595433322, 0.999269718937801, -0.0382196275383218},
		{10, 0.357161538094208, -1.9360235481145, 0.934042630561464, -0.36522722132},
		{50, 0.886112918156685, -2.65968612951, 0.463469412449025, -1.08888980272},
	})
	s, _ := JointAt(m, 1, 26.1518257409646, false)
	near(t, "half power", s.Reflected*s.Reflected, 0.5, digits)
}

// Spring to ground: r = -K/(K + 2 i w Z).
// Source: Graff (1975), ch. 1 (from memory); T = 15 kN, m = 1.07 kg/m, K = 8 kN/m.
func TestSpringToGround(t *testing.T) {
	holds(t, "spring", oneJoint(15000, 1.07, 15000, 1.07, mesh.Node{Spring: 8000}), []expected{
		{2, 0.929114815167, 2.76280818575, 0.369791373936, 1.19201185896},
		{10, 0.449005163726, 2.03644797535, 0.893529161778, 0.465651648555},
		{40, 0.124647144014, 1.69576852052, 0.992201133586, 0.124972193723},
	})
}

// Tuned mass: node stiffness -w^2 M (k + i w c)/(k - M w^2 + i w c).
// Source: Den Hartog, Mechanical Vibrations (1956), ch. 3, for the auxiliary
// mass; Graff (1975), ch. 1, for the scattering (both from memory).
func TestTunedMass(t *testing.T) {
	m := oneJoint(28000, 1.628, 28000, 1.628, mesh.Node{})
	hang(m, 1, 5, 30000, 40)
	holds(t, "tuned mass", m, []expected{
		{5, 0.401612560262064, -1.99228781346, 0.912510654215877, -0.413262121389185},
		{12, 0.9016850334798, -3.07823087288704, 0.115258970814954, -0.518243856281},
		{20, 0.598468148964767, 2.4542359964582, 0.658043353044272, 0.615115548327745},
	})
}

// Dashpot C = 2Z absorbs one half, the most a dashpot can: 4 C Z/(C+2Z)^2.
// Source: Graff (1975), ch. 1 (from memory).
func TestDashpotAbsorbsHalfAtMost(t *testing.T) {
	m := oneJoint(10000, 1, 10000, 1, mesh.Node{Dashpot: 200})
	s, _ := JointAt(m, 1, 4, false)
	near(t, "absorbed", s.Absorbed, 0.5, digits)
	near(t, "reflected", s.Reflected, 0.5, digits)
	near(t, "passed", s.Passed, 0.5, digits)
}

// A dashpot behind a bracket of K = w C, C = 2Z: stiffness K i w C/(K + i w C) =
// w C (1 + i)/2, so with D/(i w) = Z (1 - i), r = -(1-i)/(3-i): |r|^2 = 2/10,
// |t|^2 = |2/(3-i)|^2 = 4/10, 4/10 absorbed.
func TestBracketGives(t *testing.T) {
	omega := 2 * math.Pi * 4
	m := oneJoint(10000, 1, 10000, 1, mesh.Node{Brackets: []mesh.Maxwell{{K: omega * 200, C: 200}}})
	s, _ := JointAt(m, 1, 4, false)
	near(t, "reflected", s.Reflected*s.Reflected, 0.2, digits)
	near(t, "passed", s.Passed*s.Passed, 0.4, digits)
	near(t, "absorbed", s.Absorbed, 0.4, digits)
}

// A held joint of a string lets nothing pass, whatever hangs there; a tuned mass
// without loss holds the line still at its own frequency.
func TestTotalReflection(t *testing.T) {
	m := oneJoint(10000, 1, 10000, 3, mesh.Node{Fixed: true, Mass: 3, Dashpot: 100})
	for _, after := range []bool{false, true} {
		s, _ := JointAt(m, 1, 4, after)
		if s.Reflected != 1 || s.Passed != 0 || s.Absorbed != 0 || s.ReflectedPhase != math.Pi {
			t.Errorf("held joint: %+v", s)
		}
	}
	m = oneJoint(10000, 1, 10000, 3, mesh.Node{})
	omega := 2 * math.Pi * 5
	hang(m, 1, 2, 2*omega*omega, 0)
	s, _ := JointAt(m, 1, 5, false)
	near(t, "tuned mass in tune, reflected", s.Reflected, 1, 1e-12)
	near(t, "tuned mass in tune, passed", s.Passed, 0, 1e-12)
}

func TestNoWaveAtZero(t *testing.T) {
	s, err := JointAt(oneJoint(10000, 1, 10000, 1, mesh.Node{Spring: 5}), 1, 0, false)
	if err != nil || !math.IsNaN(s.Reflected) || !math.IsNaN(s.Passed) || !math.IsNaN(s.Absorbed) {
		t.Errorf("%+v, %v", s, err)
	}
	if _, err := JointAt(oneJoint(1, 1, 1, 1, mesh.Node{}), 0, 1, false); err == nil {
		t.Error("a support is no joint")
	}
}

// randomJoint draws a joint between two stocks; kind chooses what stands there.
func randomJoint(r *rand.Rand, loss bool) *mesh.Mesh {
	ten := func(lo, hi float64) float64 { return math.Pow(10, lo+(hi-lo)*r.Float64()) }
	n := mesh.Node{Mass: ten(-1, 1), Spring: ten(2, 5), Fixed: r.IntN(8) == 0, Clamped: r.IntN(8) == 0, Rotary: ten(1, 5)}
	if loss {
		n.Dashpot = ten(0, 4)
		n.Brackets = []mesh.Maxwell{{K: ten(3, 5), C: ten(1, 4)}}
	}
	m := oneJoint(ten(3, 5), ten(-1, 1), ten(3, 5), ten(-1, 1), n)
	for i := range m.Pieces {
		if r.IntN(3) > 0 {
			m.Pieces[i].Bending = ten(-2, 5)
		}
	}
	c := 0.0
	if loss {
		c = ten(0, 3)
	}
	hang(m, 1, ten(-1, 1), ten(2, 5), c)
	return m
}

// Reflected, passed and absorbed power add up to the whole. The three are found
// apart: absorbed is summed over the dashpots. Tolerance: what the shares are to
// hold; rounding of about ten unknowns missed by 2e-15 at most.
func TestEnergyCloses(t *testing.T) {
	r := rand.New(rand.NewPCG(7, 1))
	for i := 0; i < 600; i++ {
		loss := i%2 == 1
		m := randomJoint(r, loss)
		f := 0.1 * math.Pow(10, 3*r.Float64())
		for _, after := range []bool{false, true} {
			s, err := JointAt(m, 1, f, after)
			if err != nil {
				t.Fatal(err)
			}
			if miss := s.Reflected*s.Reflected + s.PassedPower + s.Absorbed - 1; !(math.Abs(miss) < 1e-12) {
				t.Errorf("case %d at %g Hz: off by %g: %+v", i, f, miss, s)
			}
			if !(s.Absorbed >= 0) || !loss && s.Absorbed != 0 {
				t.Errorf("case %d: absorbed %g", i, s.Absorbed)
			}
		}
	}
}

// Reciprocity: the power that passes is the same from both sides, and the phases
// agree, because the joint's matrix is symmetric. Tolerance as for the energy.
func TestReciprocity(t *testing.T) {
	r := rand.New(rand.NewPCG(7, 2))
	for i := 0; i < 300; i++ {
		m := randomJoint(r, true)
		f := 0.1 * math.Pow(10, 3*r.Float64())
		a, _ := JointAt(m, 1, f, false)
		b, _ := JointAt(m, 1, f, true)
		near(t, "power passed", a.PassedPower, b.PassedPower, 1e-12)
		if a.Passed > 1e-6 {
			near(t, "phase", math.Cos(a.PassedPhase-b.PassedPhase), 1, 1e-12)
		}
	}
}

// With EI -> 0 the beam is the string. What bending adds is of the order of the
// bending length times wave number, k sqrt(EI/T), and of EI k^2/T; here
// k = 2 pi 10/141 = 0.45/m, so that EI = T 1e-12 m^2 leaves 4.5e-7.
func TestBeamLimitIsString(t *testing.T) {
	stringLike := oneJoint(20000, 1, 20000, 2, mesh.Node{Mass: 1, Spring: 3000, Dashpot: 50})
	hang(stringLike, 1, 2, 8000, 20)
	for _, c := range []struct{ ei, tol float64 }{{2e-8, 1e-6}, {2e-4, 1e-4}} {
		beam := oneJoint(20000, 1, 20000, 2, mesh.Node{Mass: 1, Spring: 3000, Dashpot: 50})
		hang(beam, 1, 2, 8000, 20)
		for i := range beam.Pieces {
			beam.Pieces[i].Bending = c.ei
		}
		a, _ := JointAt(stringLike, 1, 10, false)
		b, _ := JointAt(beam, 1, 10, false)
		near(t, "reflected", b.Reflected, a.Reflected, c.tol)
		near(t, "passed", b.Passed, a.Passed, c.tol)
		near(t, "absorbed", b.Absorbed, a.Absorbed, c.tol)
	}
}

// Endless beam without tension, held at a hinge. Left u = e^{-ikx} + r e^{ikx} +
// p e^{kx}, right u = t e^{-ikx} + q e^{-kx}; u = 0 on both sides, slope and
// curvature agree:
//
//	1 + r + p = 0,  t + q = 0,  -i + i r + p = -i t - q,  -1 - r + p = -t + q,
//
// so that t = 1 + r and r = 1/(i - 1) = -(1+i)/2: half the power passes.
// Derived here; Cremer, Heckl, Structure-Borne Sound (1988), has the same 3 dB
// for a simply supported beam (from memory).
func TestHingeOnBareBeam(t *testing.T) {
	m := oneJoint(0, 1, 0, 1, mesh.Node{Fixed: true})
	for i := range m.Pieces {
		m.Pieces[i].Bending = 500
	}
	s, _ := JointAt(m, 1, 7, false)
	near(t, "power passed", s.PassedPower, 0.5, digits)
	near(t, "phase of reflected", s.ReflectedPhase, -3*math.Pi/4, digits)
	near(t, "phase of passed", s.PassedPhase, -math.Pi/4, digits)
}

// The mass met by a unit step of velocity moves as 1 - e^{-2Zt/M}; the reflected
// velocity is that less 1. Found here from the shares alone, by the sine
// transform of the passed share's real part,
//
//	v(t) = (2/pi) integral of Re t(w) sin(w t)/w dw,
//
// whose tail beyond W is below (2Z/(M W))^2/pi = 1e-5 here.
// Source: Graff (1975), ch. 1 (from memory); T = 20 kN, m = 1.35 kg/m, M = 2 kg.
func TestStepOntoMass(t *testing.T) {
	m := oneJoint(20000, 1.35, 20000, 1.35, mesh.Node{Mass: 2})
	const top, cells = 3e4, 20000      // rad/s; 0.03 rad a cell at 20 ms
	passed := make([]float64, cells+1) // real part
	var f []float64
	for i := 1; i <= cells; i++ {
		f = append(f, top*float64(i)/cells/(2*math.Pi))
	}
	joints, _, _ := Joints(context.Background(), m, f)
	passed[0] = 1
	for i, s := range joints[0].Before {
		passed[i+1] = s.Passed * math.Cos(s.PassedPhase)
	}
	for _, c := range []struct{ t, mass, reflected float64 }{
		{0.002, 0.280093210588, -0.719906789412}, {0.005, 0.560265364989, -0.439734635011}, {0.02, 0.96260937764, -0.0373906223603},
	} {
		h := top / cells
		sum := c.t * h / 3 // Simpson, the limit of sin(wt)/w at 0
		for i := 1; i <= cells; i++ {
			w := 2.0
			if i%2 == 1 {
				w = 4
			}
			if i == cells {
				w = 1
			}
			omega := h * float64(i)
			sum += h / 3 * w * passed[i] * math.Sin(omega*c.t) / omega
		}
		v := 2 / math.Pi * sum
		near(t, "velocity of the mass", v, c.mass, 2e-5)
		near(t, "reflected velocity", v-1, c.reflected, 2e-5)
	}
}
