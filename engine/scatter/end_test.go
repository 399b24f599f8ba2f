package scatter

import (
	"context"
	"math"
	"math/cmplx"
	"math/rand/v2"
	"slices"
	"testing"

	"github.com/tautspan/tautspan/engine/mesh"
)

func endsOf(t *testing.T, m *mesh.Mesh, f ...float64) (first, last End) {
	t.Helper()
	ends, _, _ := Ends(context.Background(), m, f)
	if len(ends) != 2 {
		t.Fatalf("%d ends", len(ends))
	}
	return ends[0], ends[1]
}

// Dashpot as the end: r = (Z-C)/(Z+C), Z = 100 N s/m.
// Source: Kinsler et al., Fundamentals of Acoustics (2000), ch. 2; Morse (1948),
// ch. III (from memory).
func TestDashpotEnds(t *testing.T) {
	for _, c := range []struct{ dashpot, r float64 }{{100, 0}, {300, -0.5}, {100.0 / 3, 0.5}} {
		m := line([]mesh.Node{{Dashpot: c.dashpot}, {Dashpot: c.dashpot}}, piece(50, 10000, 1))
		a, b := endsOf(t, m, 3)
		for _, e := range []End{a, b} {
			near(t, "reflected", e.Reflected[0]*math.Cos(e.ReflectedPhase[0]), c.r, digits)
			near(t, "taken", e.Taken[0], 1-c.r*c.r, digits)
		}
	}
}

// Spring as the end: r = (i w Z - K)/(i w Z + K); phase pi/2 at K/(2 pi Z).
// Source: Graff (1975), ch. 1 (from memory); T = 10 kN, m = 1 kg/m, K = 5 kN/m.
func TestSpringEnds(t *testing.T) {
	m := line([]mesh.Node{{Spring: 5000}, {Spring: 5000}}, piece(50, 10000, 1))
	a, b := endsOf(t, m, 1, 7.957747154594768, 50)
	for i, want := range []float64{2.89157578088, 1.57079632679, 0.315662380576} {
		for _, e := range []End{a, b} {
			near(t, "reflected", e.Reflected[i], 1, digits)
			near(t, "phase", e.ReflectedPhase[i], want, 1e-11)
			if e.Taken[i] != 0 {
				t.Errorf("a spring takes nothing: %g", e.Taken[i])
			}
		}
	}
}

// conductor is an invented test span with the data of a damper pair hung at
// 0.8 m from a fixed end; loss factors 0.35 become dashpots eta k/w, which is
// exact at the one frequency f.
func conductor(f, at, bending float64) *mesh.Mesh {
	m := line([]mesh.Node{{Fixed: true}, {Name: "line.l.clamp", Mass: 0.45}, {Fixed: true}},
		piece(at, 28000, 1.627), piece(318-at, 28000, 1.627))
	for i := range m.Pieces {
		m.Pieces[i].Bending = bending
	}
	omega := 2 * math.Pi * f
	hang(m, 1, 3.2, 18200, 0.35*18200/omega)
	hang(m, 1, 1.1, 44500, 0.35*44500/omega)
	return m
}

// A damper near an end: alone on an endless string it absorbs 0.29 at 10 Hz, but
// the end 0.8 m away takes 0.995, because the end's echo meets it too. The closed
// form is that of a node with D at the distance a before a held end:
// r = (Z - y)/(Z + y), y = D/(i w) - i Z cot ka.
// Source of the pair of figures: worked by hand for a string with loss factors,
// three digits.
func TestDamperNearAnEnd(t *testing.T) {
	const f, at, eta = 10.0, 0.8, 0.35
	m := conductor(f, at, 0)
	s, err := JointAt(m, 1, f, false)
	if err != nil {
		t.Fatal(err)
	}
	near(t, "absorbed alone", s.Absorbed, 0.29, 0.005)
	first, last := endsOf(t, m, f)
	near(t, "taken at the end", first.Taken[0], 0.995, 0.0005)
	if !slices.Equal(first.Joints, []string{"clamp"}) || len(last.Joints) != 0 || last.Taken[0] != 0 {
		t.Errorf("joints %v and %v, far end takes %g", first.Joints, last.Joints, last.Taken[0])
	}
	omega, z := 2*math.Pi*f, math.Sqrt(28000*1.627)
	d := complex(-0.45*omega*omega, 0)
	for _, b := range [][2]float64{{3.2, 18200}, {1.1, 44500}} {
		k := complex(b[1], eta*b[1])
		d += -complex(b[0]*omega*omega, 0) * k / (k - complex(b[0]*omega*omega, 0))
	}
	y := d/complex(0, omega) - complex(0, z/math.Tan(omega*at*math.Sqrt(1.627/28000)))
	r := (complex(z, 0) - y) / (complex(z, 0) + y)
	near(t, "closed form", first.Reflected[0], cmplx.Abs(r), 1e-12)
	near(t, "closed form, phase", first.ReflectedPhase[0], cmplx.Phase(r), 1e-12)
}

// The wave arrives along the stretch that reaches the middle; what lies nearer
// is near the end. A joint in the very middle belongs to neither end.
func TestWhatIsNear(t *testing.T) {
	m := line([]mesh.Node{{Fixed: true}, {}, {}, {}, {}, {Fixed: true}},
		piece(2, 1e4, 1), piece(3, 1e4, 1), piece(45, 1e4, 1), piece(46, 1e4, 1), piece(4, 1e4, 1))
	a, b := endsOf(t, m, 1)
	if !slices.Equal(a.Joints, []string{"b", "c"}) || !slices.Equal(b.Joints, []string{"e"}) {
		t.Errorf("near %v and %v", a.Joints, b.Joints)
	}
}

// A line walked the other way has the same ends. Passive: no end gives more than
// it gets; without loss it takes nothing. Tolerance chosen: rounding missed
// by 3e-14.
func TestEndsReversedAndPassive(t *testing.T) {
	r := rand.New(rand.NewPCG(9, 1))
	ten := func(lo, hi float64) float64 { return math.Pow(10, lo+(hi-lo)*r.Float64()) }
	for i := 0; i < 200; i++ {
		lossy := i%2 == 0
		nodes := []mesh.Node{{Fixed: r.IntN(2) == 0, Clamped: r.IntN(2) == 0, Spring: ten(3, 6), Rotary: ten(1, 4)}, {}, {}, {Fixed: true}}
		tension := ten(3, 5)
		pieces := []mesh.Piece{piece(ten(-1, 1), tension, ten(-1, 1)), piece(ten(-1, 1), tension, ten(-1, 1)), piece(100, tension, 2)}
		for k := range pieces {
			if i%4 > 1 {
				pieces[k].Bending = ten(0, 4)
			}
			if lossy {
				pieces[k].Viscous, pieces[k].Internal = ten(-1, 1), ten(-5, -3)
			}
		}
		for k := 1; k < 3; k++ {
			nodes[k].Mass, nodes[k].Spring = ten(-1, 1), ten(1, 4)
			if lossy {
				nodes[k].Dashpot = ten(0, 3)
			}
		}
		m := line(nodes, pieces...)
		slices.Reverse(nodes)
		slices.Reverse(pieces)
		back := line(nodes, pieces...)
		f := ten(-1, 2)
		a, _ := endsOf(t, m, f)
		_, b := endsOf(t, back, f)
		near(t, "reflected, walked backwards", b.Reflected[0], a.Reflected[0], 1e-12)
		if a.Taken[0] < 0 || a.Taken[0] > 1 || !lossy && a.Taken[0] != 0 {
			t.Errorf("case %d: takes %g", i, a.Taken[0])
		}
	}
}

// Cutting a stretch by a bare splice changes nothing but rounding, 2e-16 here.
func TestSpliceChangesNothing(t *testing.T) {
	whole := conductor(14, 1.1, 300)
	cut := line([]mesh.Node{{Fixed: true}, {}, {Mass: 0.45}, {Fixed: true}},
		piece(0.4, 28000, 1.627), piece(0.7, 28000, 1.627), piece(316.9, 28000, 1.627))
	for i := range cut.Pieces {
		cut.Pieces[i].Bending = 300
	}
	omega := 2 * math.Pi * 14
	hang(cut, 2, 3.2, 18200, 0.35*18200/omega)
	hang(cut, 2, 1.1, 44500, 0.35*44500/omega)
	a, _ := endsOf(t, whole, 14)
	b, _ := endsOf(t, cut, 14)
	near(t, "reflected", b.Reflected[0], a.Reflected[0], 1e-13)
	near(t, "phase", b.ReflectedPhase[0], a.ReflectedPhase[0], 1e-13)
}

// A viscous stretch of length a before a held end: r = -e^{-2 s a} seen from a
// line of its own impedance Zc = T s/(i w) gives
// r = (Z - Zc coth sa)/(Z + Zc coth sa), with s^2 = (-m w^2 + i w c)/T.
// Derived here from the wave equation.
func TestViscousStretchNearAnEnd(t *testing.T) {
	m := line([]mesh.Node{{Fixed: true}, {}, {Fixed: true}}, piece(6, 9000, 1.5), piece(60, 9000, 1.5))
	m.Pieces[0].Viscous = 12
	const f = 8.0
	omega := 2 * math.Pi * f
	s := cmplx.Sqrt(complex(-1.5*omega*omega, 12*omega) / 9000)
	y := 9000 * s / complex(0, omega) / cmplx.Tanh(6*s)
	z := complex(math.Sqrt(9000*1.5), 0)
	a, _ := endsOf(t, m, f)
	near(t, "reflected", a.Reflected[0], cmplx.Abs((z-y)/(z+y)), 1e-12)
}

// A string whose tension rises from 2 to 3.2 kN before it meets the endless line:
// u = A J0(z) + B Y0(z), z = 2 w sqrt(m T)/g, T u' by dz/dx = w sqrt(m/T), and
// r = (Z - C - y)/(Z + C + y) with y = T u'/(i w u) at the joint.
// Source: the equation of a hanging string, Bessel functions of order 0 (Rao,
// Vibration of Continuous Systems (2007), ch. 8, from memory). Tolerance: the
// miss was 2.4e-5 rad with parts of 0.2 % and 1.5e-6 with 0.05 %, that is of
// second order; chosen three times the latter.
func TestRisingTension(t *testing.T) {
	const rise, length, mass, c0, c1, f = 60.0, 20.0, 3.0, 30.0, 40.0, 5.0
	first := piece(length, 2000, mass)
	first.TensionRise = rise
	m := line([]mesh.Node{{Dashpot: c0}, {Dashpot: c1}, {Fixed: true}}, first, piece(200, 3200, mass))
	omega := 2 * math.Pi * f
	iw := complex(0, omega)
	bessel := func(tension float64) (j, y, dj, dy complex128) {
		z := 2 * omega * math.Sqrt(mass*tension) / rise
		slope := omega * math.Sqrt(mass*tension) // T dz/dx
		return complex(math.J0(z), 0), complex(math.Y0(z), 0), complex(-math.J1(z)*slope, 0), complex(-math.Y1(z)*slope, 0)
	}
	j, y, dj, dy := bessel(2000)
	a, b := dy-iw*c0*y, -(dj - iw*c0*j) // T u' = i w C u at the support
	j, y, dj, dy = bessel(3200)
	admit := (a*dj + b*dy) / (iw * (a*j + b*y))
	z := complex(math.Sqrt(3200*mass), 0)
	r := (z - c1 - admit) / (z + c1 + admit)
	e, _ := endsOf(t, m, f)
	near(t, "reflected", e.Reflected[0], cmplx.Abs(r), 5e-6)
	near(t, "phase", e.ReflectedPhase[0], cmplx.Phase(r), 5e-6)
}
