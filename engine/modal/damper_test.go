package modal

import (
	"math"
	"math/cmplx"
	"math/rand"
	"strings"
	"testing"

	"github.com/tautspan/tautspan/engine/mesh"
)

// stay is a line of unit length, mass and tension (so Z = c = 1) with a dashpot.
func stay(a, dashpot float64) *mesh.Mesh {
	return &line(1, 1, 0, []float64{0, a, 1}, fixed, mesh.Node{Name: "damper", Dashpot: dashpot}, fixed).m
}

// C11-03: the best damper for mode 1 near an end. The maximum is found by golden
// section; Krenk's asymptotic optimum is met to the order of a/L.
func TestPublishedOptimum(t *testing.T) {
	c := cases(t)["C11-03"]
	for name, a := range map[string]float64{"aL0.02": 0.02, "aL0.05": 0.05} {
		zeta := func(eta float64) float64 { return find(t, stay(a, eta), Want{Count: 1}).Modes[0].DampingRatio }
		const g = 0.6180339887498949
		lo, hi := 0.5/(math.Pi*a), 2/(math.Pi*a)
		for hi-lo > 1e-6*hi {
			x, y := hi-g*(hi-lo), lo+g*(hi-lo)
			if zeta(x) > zeta(y) {
				hi = y
			} else {
				lo = x
			}
		}
		// Tolerances of the case: 1e-4 on the flat optimum, 1e-6 on its height.
		near(t, "eta_opt "+name, lo, c.Expected["eta_opt_"+name].Value, 1e-4)
		near(t, "zeta_max "+name, zeta(lo), c.Expected["zeta_max_"+name].Value, 1e-6)
		// Krenk (2000): eta = L/(pi a), zeta = a/(2L), to a share a/L of itself, doubled.
		near(t, "Krenk eta "+name, lo, c.Expected["eta_opt_asymptotic_"+name].Value, 2*a)
		near(t, "Krenk zeta "+name, zeta(lo), c.Expected["zeta_max_asymptotic_"+name].Value, 2*a)
	}
}

// Midpoint damper. By symmetry each half is a line with a dashpot C/2 at its
// end, whose decay is (2c/L) artanh of C/2Z or its inverse (table case C02-04):
// the odd family runs to minus infinity at C = 2Z and comes back with other
// frequencies, the even one does not feel the damper.
func TestMidpointDamper(t *testing.T) {
	for _, d := range []float64{0.5, 0.1, 1e-2, 1e-4, 1e-6, 1e-8} {
		for _, above := range []bool{false, true} {
			share, first := 1-d, math.Pi
			if above {
				share, first = 1/(1-d), 2*math.Pi
			}
			res := find(t, stay(0.5, 2*share), Want{Count: 8})
			want := 2 * math.Atanh(1-d)
			var odd, even int
			for _, m := range res.Modes {
				if m.Decay > 1e-9 {
					// artanh near 1 magnifies the rounding of C/2Z by 1/(2d).
					near(t, "decay", m.Decay, want, 1e-12+1e-15/d)
					near(t, "frequency", imag(m.S), first+2*math.Pi*float64(odd), 1e-12+1e-15/d)
					odd++
				} else {
					near(t, "still", imag(m.S), 2*math.Pi*float64(even+1), 1e-13)
					even++
				}
			}
			if odd != 4 || even != 4 || res.CompleteBelow == 0 {
				t.Errorf("C/2Z-1 = %g: %d damped and %d free modes, complete below %g: %v", share-1, odd, even, res.CompleteBelow, res.Notes)
			}
			creeps := 0
			if above {
				creeps = 1
			}
			if len(res.Overdamped) != creeps {
				t.Errorf("C/2Z-1 = %g: overdamped %v", share-1, res.Overdamped)
			}
		}
	}
	res := find(t, stay(0.5, 2), Want{Count: 6})
	for i, m := range res.Modes {
		near(t, "C = 2Z", imag(m.S), 2*math.Pi*float64(i+1), 1e-13)
	}
	if len(res.Modes) != 6 || res.CompleteBelow < 6 || len(res.Notes) == 0 || !strings.Contains(res.Notes[0], "damper equals the impedance") {
		t.Errorf("C = 2Z: %d modes, complete below %g, notes %v", len(res.Modes), res.CompleteBelow, res.Notes)
	}
}

// Table case C02-04's real root: one damper on a taut line has an overdamped
// root only for C > 2Z, and it comes from minus infinity. It obeys, with
// s = -r (unit L and c), sinh(r) = C/Z sinh(ra) sinh(r(1-a)).
func TestOverdampedBranch(t *testing.T) {
	const a = 0.05
	for _, c := range []float64{0.5, 1.9, 2.1, 5, 50} {
		res := find(t, stay(a, c), Want{Count: 5})
		if c < 2 {
			if len(res.Overdamped) != 0 {
				t.Errorf("C = %g Z: overdamped %v", c, res.Overdamped)
			}
			continue
		}
		if len(res.Overdamped) != 1 {
			t.Fatalf("C = %g Z: overdamped %v", c, res.Overdamped)
		}
		r := res.Overdamped[0].Decay
		left, right := math.Sinh(r), c*math.Sinh(r*a)*math.Sinh(r*(1-a))
		if math.Abs(left-right) > 1e-11*left*(1+r) {
			t.Errorf("C = %g Z: %g is no root: %g against %g", c, r, left, right)
		}
	}
}

// All roots of sin kL + i eta sin ka sin k(L-a) = 0 (Main and Jones 2002) for
// dampers from near an end to midspan: the equation holds and each n has its own
// root, so that none is a copy.
func TestDamperEquation(t *testing.T) {
	for _, a := range []float64{0.02, 0.05, 0.3, 0.5} {
		for _, eta := range []float64{0.1, 1, 1.9, 1.999, 2.001, 2.1, 5, 50} {
			res := find(t, stay(a, eta), Want{Count: 12})
			if len(res.Modes) != 12 || res.CompleteBelow == 0 {
				t.Fatalf("a = %g eta = %g: %d modes, %v", a, eta, len(res.Modes), res.Notes)
			}
			for n, m := range res.Modes {
				k := m.S / 1i
				x, y := complex(a, 0), complex(1-a, 0)
				f := cmplx.Sin(k) + complex(0, eta)*cmplx.Sin(k*x)*cmplx.Sin(k*y)
				f1 := cmplx.Cos(k) + complex(0, eta)*(x*cmplx.Cos(k*x)*cmplx.Sin(k*y)+y*cmplx.Sin(k*x)*cmplx.Cos(k*y))
				// The Newton correction left over, against the root; 16 roundings of
				// the terms, which nearly cancel about eta = 2.
				terms := cmplx.Abs(cmplx.Sin(k)) + eta*cmplx.Abs(cmplx.Sin(k*x)*cmplx.Sin(k*y))
				if e := cmplx.Abs(f / f1 / k); e > 1e-13+16*0x1p-52*terms*cmplx.Abs(1/f1) {
					t.Errorf("a = %g eta = %g mode %d: off by %.2g", a, eta, n+1, e)
				}
				if n > 0 && cmplx.Abs(m.S-res.Modes[n-1].S) < 1e-6 {
					t.Errorf("a = %g eta = %g: modes %d and %d are one", a, eta, n, n+1)
				}
			}
		}
	}
}

// An absorbing end takes everything: a uniform line has no vibration left.
func TestAbsorbingEnd(t *testing.T) {
	b := line(1, 1, 0, []float64{0, 1}, fixed, mesh.Node{Name: "far", Dashpot: 1, Absorbing: true})
	res := find(t, &b.m, Want{Count: 5})
	if len(res.Modes) != 0 || res.CompleteBelow <= 1 || len(res.Notes) < 2 {
		t.Errorf("%d modes, complete below %g, notes %q", len(res.Modes), res.CompleteBelow, res.Notes)
	}
	// A heavy joint before it holds waves back: roots exist again, and obey
	// Z + Z coth(s/2) + M s = 0 for a joint at the middle of unit length.
	b = line(1, 1, 0, []float64{0, 0.5, 1}, fixed, mesh.Node{Mass: 3}, mesh.Node{Dashpot: 1, Absorbing: true})
	res = find(t, &b.m, Want{Count: 5})
	if len(res.Modes) != 5 {
		t.Fatalf("%d modes: %v", len(res.Modes), res.Notes)
	}
	for _, m := range res.Modes {
		s := m.S
		if e := cmplx.Abs(1 + 1/cmplx.Tanh(s/2) + 3*s); e > 1e-9*cmplx.Abs(3*s) {
			t.Errorf("%v is no root: %g", s, e)
		}
	}
}

// A tuned mass on a light, stiff line is the tuned absorber of Den Hartog
// (Mechanical Vibrations, chapter 3, from memory): two masses, four roots of
//
//	(M s^2 + K + k + cs)(m s^2 + k + cs) - (k + cs)^2 = 0.
func TestTunedMass(t *testing.T) {
	const (
		big, small, k, c = 100.0, 5.0, 1900.0, 12.0
		tension          = 20000.0
		a, b             = 1.2, 3.3
	)
	stiff := tension/a + tension/b
	net := line(1e-12, tension, 0, []float64{0, a, a + b}, fixed, mesh.Node{Mass: big}, fixed)
	hung := net.node(mesh.Node{Line: -1, Mass: small})
	net.link(1, hung, k, c)
	res := find(t, &net.m, Want{Count: 2, Shapes: true})
	for i, m := range res.Modes {
		s := m.S
		h := k + complex(c, 0)*s
		f := (big*s*s+complex(stiff, 0)+h)*(small*s*s+h) - h*h
		f1 := (2*big*s+c)*(small*s*s+h) + (big*s*s+complex(stiff, 0)+h)*(2*small*s+c) - 2*h*c
		// The line's own mass matters by (a+b)*1e-12/(3*100) of the frequency.
		if e := cmplx.Abs(f / f1 / s); e > 1e-11 {
			t.Errorf("mode %d: %v off by %.2g", i+1, s, e)
		}
		ratio := m.Shape.At(mesh.Spot{Node: hung, Piece: -1}) / m.Shape.At(mesh.Spot{Node: 1, Piece: -1})
		if want := h / (small*s*s + h); cmplx.Abs(ratio-want) > 1e-9*cmplx.Abs(want) {
			t.Errorf("mode %d: the mass moves %v times the joint, want %v", i+1, ratio, want)
		}
		if m.Line != 0 {
			t.Errorf("a hung mass does not take the line from a mode: %d", m.Line)
		}
	}
	if len(res.Modes) != 2 {
		t.Errorf("%d modes", len(res.Modes))
	}
}

// Two masses without any line whose four roots coincide pairwise by
// construction: s^2 + 0.1 s + 1 twice. With masses 1 the equation is
// (s^2 + cs + A)(s^2 + B) - q^2, equal to the square for c = 0.2, B = 1,
// A = 1 + c^2/4, q = c/2; there is one shape only.
func TestDefectivePair(t *testing.T) {
	const c = 0.2
	b := &build{}
	x := b.node(mesh.Node{Line: -1, Mass: 1, Spring: 1 + c*c/4 - c/2, Dashpot: c})
	y := b.node(mesh.Node{Line: -1, Mass: 1, Spring: 1 - c/2})
	b.link(x, y, c/2, 0)
	res := find(t, &b.m, Want{Shapes: true})
	if len(res.Modes) != 2 {
		t.Fatalf("modes %v, notes %v", res.Modes, res.Notes)
	}
	want := complex(-c/4, math.Sqrt(1-c*c/16))
	for _, m := range res.Modes {
		// Rounding e of the matrix parts the pair by its root; the mean stays.
		if cmplx.Abs(m.S-want) > 1e-7 {
			t.Errorf("%v, want %v", m.S, want)
		}
		if m.Multiplicity != 2 || !m.Defective {
			t.Errorf("multiplicity %d, defective %v", m.Multiplicity, m.Defective)
		}
	}
	if mean := (res.Modes[0].S + res.Modes[1].S) / 2; cmplx.Abs(mean-want) > 1e-12 {
		t.Errorf("mean %v, want %v", mean, want)
	}
}

// Critical viscous loss c = 2 m omega_1: a double real root -omega_1.
func TestCriticalViscous(t *testing.T) {
	b := line(1, 1, 2*math.Pi, []float64{0, 1}, fixed, fixed)
	res := find(t, &b.m, Want{Count: 3})
	if len(res.Overdamped) != 2 {
		t.Fatalf("overdamped %v, modes %v, notes %v", res.Overdamped, res.Modes, res.Notes)
	}
	near(t, "mean", (res.Overdamped[0].Decay+res.Overdamped[1].Decay)/2, math.Pi, 1e-12)
	near(t, "each", res.Overdamped[0].Decay, math.Pi, 1e-7)
	near(t, "next", imag(res.Modes[0].S), math.Pi*math.Sqrt(3), 1e-12)
}

// A bracket with a stiff spring is the bare dashpot, with a soft one it is
// hardly there; in between it obeys coth(sa) + coth(s(1-a)) + CK/(K+sC) = 0
// (unit Z, L).
func TestBracketLimits(t *testing.T) {
	const a, c = 0.07, 4.0
	with := func(k float64) []Mode {
		return find(t, &line(1, 1, 0, []float64{0, a, 1}, fixed, mesh.Node{Brackets: []mesh.Maxwell{{K: k, C: c}}}, fixed).m, Want{Count: 4}).Modes
	}
	bare := find(t, stay(a, c), Want{Count: 4}).Modes
	for i := range bare {
		s := bare[i].S
		// First order: the force is C s u (1 - sC/K), so the shift is of size |s| C/K.
		if e := cmplx.Abs(with(1e9)[i].S - s); e > cmplx.Abs(s)*cmplx.Abs(s)*c/1e9 {
			t.Errorf("stiff bracket, mode %d: off by %g", i+1, e)
		}
		if e := cmplx.Abs(with(1e-9)[i].S - complex(0, math.Pi*float64(i+1))); e > 1e-9 {
			t.Errorf("soft bracket, mode %d: off by %g", i+1, e)
		}
		for _, k := range []float64{0.5, 20, 400} {
			s := with(k)[i].S
			f := 1/cmplx.Tanh(s*a) + 1/cmplx.Tanh(s*(1-a)) + complex(c*k, 0)/(complex(k, 0)+s*c)
			if cmplx.Abs(f) > 1e-10*cmplx.Abs(1/cmplx.Tanh(s*a)) {
				t.Errorf("K = %g mode %d: %v is no root: %v", k, i+1, s, f)
			}
		}
	}
}

// A mass hung on a dashpot behind a spring, without any line: the bracket as a
// place without mass, and as a bracket, obey M s^2 (K + sC) + K s C = 0.
func TestMassBehindBracket(t *testing.T) {
	const m, k, c = 2.0, 50.0, 30.0
	hung := &build{}
	mass := hung.node(mesh.Node{Line: -1, Mass: m})
	place := hung.node(mesh.Node{Line: -1, Spring: k})
	hung.link(mass, place, 0, c)
	bracket := &build{}
	bracket.node(mesh.Node{Line: -1, Mass: m, Brackets: []mesh.Maxwell{{K: k, C: c}}})
	for name, b := range map[string]*build{"place": hung, "bracket": bracket} {
		res := find(t, &b.m, Want{})
		if len(res.Modes) != 1 || res.CompleteBelow == 0 {
			t.Fatalf("%s: %d modes, notes %v", name, len(res.Modes), res.Notes)
		}
		s := res.Modes[0].S
		f, f1 := m*s*(k+s*c)+k*c, m*k+2*m*c*s
		if e := cmplx.Abs(f / f1 / s); e > 1e-13 {
			t.Errorf("%s: %v off by %g", name, s, e)
		}
	}
}

// Equal damped lines joined at a hung mass: by symmetry each family in which the
// mass stands still is a line with tie and dashpot to ground, n-1 times over, and
// each of its roots is a root of the single line; none is defective.
func TestEqualDampedLines(t *testing.T) {
	const mass, tension, k, kd = 1.0, 100.0, 30.0, 0.3
	for _, lines := range []int{2, 3, 4} {
		for _, c := range []float64{0.1, 5, 15, 40} {
			b := &build{}
			var at []int
			for l := 0; l < lines; l++ {
				x, y, z := b.node(mesh.Node{Line: l, Fixed: true}), b.node(mesh.Node{Line: l, Dashpot: c}), b.node(mesh.Node{Line: l, Fixed: true})
				b.piece(x, y, 3, mass, tension, 0)
				b.piece(y, z, 7, mass, tension, 0)
				at = append(at, y)
			}
			hung := b.node(mesh.Node{Line: -1, Mass: 2})
			for _, y := range at {
				b.link(y, hung, k, kd)
			}
			single := line(mass, tension, 0, []float64{0, 3, 10}, fixed, mesh.Node{Dashpot: c + kd, Spring: k}, fixed)
			one := find(t, &single.m, Want{Count: 3}).Modes
			res := find(t, &b.m, Want{Count: 5 * lines, Shapes: true})
			if res.CompleteBelow == 0 {
				t.Errorf("%d lines, c = %g: %v", lines, c, res.Notes)
			}
			for i, want := range one {
				n := 0
				for _, m := range res.Modes {
					if cmplx.Abs(m.S-want.S) < 1e-9*cmplx.Abs(want.S) {
						n++
						if m.Multiplicity != lines-1 || m.Defective {
							t.Errorf("%d lines, c = %g: %+v", lines, c, m)
						}
					}
				}
				if n != lines-1 {
					t.Errorf("%d lines, c = %g: root %d of the single line is met %d times", lines, c, i+1, n)
				}
			}
		}
	}
}

// Two equal lines under weak ties and nearly equal dashpots, through where their
// modes coincide: always complete.
func TestNearlyEqualLines(t *testing.T) {
	r := rand.New(rand.NewSource(9))
	for trial := 0; trial < 100; trial++ {
		b := &build{}
		c := math.Pow(10, -3+5*r.Float64())
		dc := c * math.Pow(10, -10*r.Float64())
		var at [2]int
		for l := range at {
			x, y, z := b.node(mesh.Node{Line: l, Fixed: true}), b.node(mesh.Node{Line: l, Dashpot: c + dc*float64(l)}), b.node(mesh.Node{Line: l, Fixed: true})
			b.piece(x, y, 4, 1, 100, 0)
			b.piece(y, z, 6, 1, 100, 0)
			at[l] = y
		}
		b.link(at[0], at[1], math.Pow(10, -10+14*r.Float64()), 0)
		res := find(t, &b.m, Want{Count: 10})
		if res.CompleteBelow == 0 || len(res.Modes) != 10 {
			t.Errorf("c = %g, dc = %g: %d modes, %v", c, dc, len(res.Modes), res.Notes)
		}
	}
}
