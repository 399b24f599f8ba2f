package modal

import (
	"fmt"
	"math"
	"math/cmplx"
	"math/rand"
	"strings"
	"testing"

	"github.com/tautspan/tautspan/engine/mesh"
)

// same tells whether two roots agree.
func root(t *testing.T, what string, got, want complex128, rel float64) {
	t.Helper()
	if !(cmplx.Abs(got-want) <= rel*cmplx.Abs(want)) {
		t.Errorf("%s = %.15g, want %.15g", what, got, want)
	}
}

// With hinged ends the shapes are sines whatever is lost, so that
//
//	m s^2 + c s = -(T (1 + i etaT) k^2 + EI (1 + i etaB + s tau) k^4),  k = n pi/L,
//
// and a line whose tension alone bears has the ratio sin(atan(eta)/2) in every mode.
func TestLossFactorOfHingedLine(t *testing.T) {
	const L, T, m, EI = 12.0, 20e3, 1.5, 60.0
	for _, c := range []struct{ etaT, etaB, tau, viscous, ei float64 }{
		{0.004, 0, 0, 0, 0}, {0.3, 0, 0, 0, 0}, {0.01, 0.01, 0, 0, EI}, {0, 0.2, 0, 0, EI}, {0.02, 0.3, 1e-5, 0.7, EI},
	} {
		for _, cut := range []float64{0, 3.7} {
			b := line(m, T, c.viscous, []float64{0, L}, fixed, fixed)
			if cut > 0 {
				b = line(m, T, c.viscous, []float64{0, cut, L}, fixed, mesh.Node{}, fixed)
			}
			for i := range b.m.Pieces {
				p := &b.m.Pieces[i]
				p.Bending, p.Internal, p.TensionLoss, p.BendingLoss = c.ei, c.tau, c.etaT, c.etaB
			}
			res := find(t, &b.m, Want{Count: 8})
			if len(res.Modes) != 8 || res.CompleteBelow <= res.Modes[7].DampedFrequency || len(res.Overdamped) != 0 {
				t.Fatalf("%+v: %d modes, complete below %g", c, len(res.Modes), res.CompleteBelow)
			}
			for n := range res.Modes {
				k := float64(n+1) * math.Pi / L
				// m s^2 + d s + e = 0
				d := complex(c.viscous+c.ei*c.tau*math.Pow(k, 4), 0)
				e := complex(T*k*k, T*c.etaT*k*k) + complex(c.ei, c.ei*c.etaB)*complex(math.Pow(k, 4), 0)
				s := (-d + cmplx.Sqrt(d*d-4*m*e)) / (2 * m)
				if imag(s) < 0 {
					s = (-d - cmplx.Sqrt(d*d-4*m*e)) / (2 * m)
				}
				root(t, fmt.Sprintf("%+v mode %d", c, n+1), res.Modes[n].S, s, 1e-12)
				if c.ei == 0 && c.viscous == 0 {
					near(t, "ratio", res.Modes[n].DampingRatio, math.Sin(math.Atan(c.etaT)/2), 1e-10)
				}
			}
		}
	}
}

// A string on an end spring with a loss factor, T a coth(aL) + K(1 + i eta) = 0,
// and on a mass hung from a spring with one, where K(1 + i eta) M s^2/(K(1 + i eta)
// + M s^2) stands in place of the spring and a fixed string continues behind.
func TestLossFactorOfSprings(t *testing.T) {
	const T, m, K, eta, M, a, L = 20e3, 1.5, 9e3, 0.4, 6.0, 4.1, 11.0
	spring := complex(K, K*eta)
	arm := func(s complex128, x float64) complex128 { // T a coth(a x)
		w := s * complex(math.Sqrt(m/T), 0)
		return T * w * cmplx.Cosh(w*complex(x, 0)) / cmplx.Sinh(w*complex(x, 0))
	}
	end := line(m, T, 0, []float64{0, a}, fixed, mesh.Node{Spring: K, SpringLoss: eta})
	for _, mode := range find(t, &end.m, Want{Count: 6}).Modes {
		if r := arm(mode.S, a) + spring; cmplx.Abs(r) > 1e-9*K || mode.DampingRatio <= 0 {
			t.Errorf("end spring, mode %d: %g left", mode.Number, cmplx.Abs(r))
		}
	}
	hung := line(m, T, 0, []float64{0, a, L}, fixed, mesh.Node{}, fixed)
	hung.m.Links = []mesh.Link{{A: 1, B: hung.node(mesh.Node{Line: -1, Mass: M}), Spring: K, SpringLoss: eta}}
	modes := find(t, &hung.m, Want{Count: 7}).Modes
	for _, mode := range modes {
		s := mode.S
		own := spring * M * s * s / (spring + M*s*s)
		if r := arm(s, a) + arm(s, L-a) + own; cmplx.Abs(r) > 1e-8*K {
			t.Errorf("hung mass, mode %d: %g left", mode.Number, cmplx.Abs(r))
		}
	}
	// One more than the string has below the same frequency: nothing is missing.
	if top := modes[6].DampedFrequency * 2 * L * math.Sqrt(m/T); top < 5.5 || top > 6.5 {
		t.Errorf("seventh mode at %.3g half waves", top)
	}
}

// Random networks with loss factors: each root leaves the steady equations
// singular, cutting a piece changes nothing, and with factors that fade the roots
// go over into those without.
func TestRandomLossFactors(t *testing.T) {
	rng := rand.New(rand.NewSource(5))
	for round := 0; round < 6; round++ {
		x1, x2 := 2+rng.Float64(), 6+2*rng.Float64()
		ei := 0.0
		if round%2 == 1 {
			ei = 50 * rng.Float64()
		}
		make := func(scale float64, cut bool) *mesh.Mesh {
			nodes := []mesh.Node{fixed, {Mass: 3, Dashpot: 60}, {Spring: 4e3, SpringLoss: 0.2 * scale}, clamped}
			at := []float64{0, x1, x2, 11}
			if cut {
				nodes = append(nodes[:2:2], mesh.Node{}, nodes[2], nodes[3])
				at = []float64{0, x1, x1 + 0.3*(x2-x1), x2, 11}
			}
			b := line(1.4, 18e3, 0.2, at, nodes...)
			for i := range b.m.Pieces {
				b.m.Pieces[i].Bending, b.m.Pieces[i].TensionLoss, b.m.Pieces[i].BendingLoss = ei, 0.05*scale, 0.1*scale
			}
			return &b.m
		}
		whole, cut, faint, none := find(t, make(1, false), Want{Count: 6}), find(t, make(1, true), Want{Count: 6}), find(t, make(1e-9, false), Want{Count: 6}), find(t, make(0, false), Want{Count: 6})
		for i := range whole.Modes {
			root(t, "cut", cut.Modes[i].S, whole.Modes[i].S, 1e-10)
			root(t, "fading", faint.Modes[i].S, none.Modes[i].S, 1e-8)
			if whole.Modes[i].DampingRatio <= none.Modes[i].DampingRatio {
				t.Errorf("round %d: mode %d is damped less with losses", round, i+1)
			}
		}
		if whole.CompleteBelow == 0 {
			t.Errorf("round %d: not proved complete: %v", round, whole.Notes)
		}
	}
}

// A beam with pinned ends and a hinge in its middle: motions that hold the middle
// still are those of a pinned half; in the others the half obeys
//
//	p^3 cos(q l) tanh(p l) = q^3 sin(q l),   EI p^2 = T + EI q^2,
//
// for u = A sin(q x) + B sinh(p x) without moment and transverse force at x = l.
func TestHinge(t *testing.T) {
	const l, T, m, EI = 5.0, 6e3, 2.0, 9e3
	b := line(m, T, 0, []float64{0, l, 2 * l}, fixed, mesh.Node{Hinge: true}, fixed)
	for i := range b.m.Pieces {
		b.m.Pieces[i].Bending = EI
	}
	modes := find(t, &b.m, Want{Count: 8, Shapes: true}).Modes
	omega := func(q float64) float64 { return q * math.Sqrt((T+EI*q*q)/m) }
	free := func(q float64) float64 {
		p := math.Sqrt(T/EI + q*q)
		return math.Pow(p, 3)*math.Cos(q*l)*math.Tanh(p*l) - math.Pow(q, 3)*math.Sin(q*l)
	}
	var want []float64
	for n := 1; n <= 4; n++ {
		lo, hi := (float64(n)-1)*math.Pi/l+1e-9, float64(n)*math.Pi/l
		for k := 0; k < 200; k++ {
			mid := (lo + hi) / 2
			if free(mid)*free(lo) > 0 {
				lo = mid
			} else {
				hi = mid
			}
		}
		want = append(want, omega(lo), omega(float64(n)*math.Pi/l))
	}
	for i, mode := range modes {
		near(t, fmt.Sprintf("mode %d", i+1), mode.Frequency*2*math.Pi, want[i], 1e-11)
		if at := cmplx.Abs(mode.Shape.At(mesh.Spot{Node: 1})); i%2 == 1 && at > 1e-9 || i%2 == 0 && at < 0.1 {
			t.Errorf("mode %d moves the hinge by %g", i+1, at)
		}
	}
	// Statics: the hinge bears no moment.
	d, err := NewDynamic(&b.m)
	if err != nil {
		t.Fatal(err)
	}
	f, err := d.Solve(0, []Load{{Spot: mesh.Spot{Node: -1, Piece: 0, At: 2}, Force: 100}}, nil)
	if err != nil {
		t.Fatal(err)
	}
	if m := cmplx.Abs(f.Moment(mesh.Spot{Node: 1})); m > 1e-9*cmplx.Abs(f.Moment(mesh.Spot{Node: -1, Piece: 0, At: 2})) {
		t.Errorf("moment %g at the hinge", m)
	}
}

// A pinned beam that turns a mass of inertia J at one end:
//
//	-EI (p^2 + q^2) sin(qL) = J w^2 (q cos(qL) - p coth(pL) sin(qL)).
//
// The roots are counted one by one up to the twelfth.
func TestInertia(t *testing.T) {
	const L, T, m, EI, J = 6.0, 4e3, 3.0, 5e3, 11.0
	b := beam(L, T, m, EI, fixed, mesh.Node{Fixed: true, Inertia: J})
	modes := find(t, &b.m, Want{Count: 12}).Modes
	left := func(q float64) float64 {
		p := math.Sqrt(T/EI + q*q)
		w2 := (T + EI*q*q) * q * q / m
		return EI*(p*p+q*q)*math.Sin(q*L) + J*w2*(q*math.Cos(q*L)-p/math.Tanh(p*L)*math.Sin(q*L))
	}
	var want []float64
	const h = 1e-3
	for q := h; len(want) < 12; q += h {
		if left(q)*left(q+h) < 0 {
			lo, hi := q, q+h
			for k := 0; k < 60; k++ {
				if mid := (lo + hi) / 2; left(mid)*left(lo) > 0 {
					lo = mid
				} else {
					hi = mid
				}
			}
			want = append(want, lo*math.Sqrt((T+EI*lo*lo)/m)/(2*math.Pi))
		}
	}
	for i := range modes {
		near(t, fmt.Sprintf("mode %d", i+1), modes[i].Frequency, want[i], 1e-10)
	}
}

// A dashpot of a tie behind a bracket is the two in series, a complex stiffness
// K s C/(K + s C) between the places.
func TestTieBehindABracket(t *testing.T) {
	const T, m, K, C, a, L = 20e3, 1.5, 9e3, 70.0, 4.1, 11.0
	b := line(m, T, 0, []float64{0, a, L}, fixed, mesh.Node{}, fixed)
	b.m.Links = []mesh.Link{{A: 1, B: b.node(mesh.Node{Line: -1, Fixed: true}), Dashpot: C, Through: K}}
	arm := func(s complex128, x float64) complex128 {
		w := s * complex(math.Sqrt(m/T), 0)
		return T * w * cmplx.Cosh(w*complex(x, 0)) / cmplx.Sinh(w*complex(x, 0))
	}
	for _, mode := range find(t, &b.m, Want{Count: 6}).Modes {
		s := mode.S
		if r := arm(s, a) + arm(s, L-a) + K*s*C/(K+s*C); cmplx.Abs(r) > 1e-8*K {
			t.Errorf("mode %d: %g left", mode.Number, cmplx.Abs(r))
		}
	}
}

// A bench record answers within its ends only, and as the dashpot it was taken of.
func TestBenchDamper(t *testing.T) {
	with := func(n mesh.Node) *mesh.Mesh { return &line(1.5, 20e3, 0, []float64{0, 4, 11}, fixed, n, fixed).m }
	record := &mesh.Bench{Name: "b.csv", Frequency: []float64{1, 3, 9}, Impedance: []complex128{70, 70, 70}}
	bench := with(mesh.Node{Benches: []*mesh.Bench{record}})
	if _, err := Find(bench, Want{}); err == nil || !strings.Contains(err.Error(), "bench record") {
		t.Errorf("modes: %v", err)
	}
	d, err := NewDynamic(bench)
	if err != nil {
		t.Fatal(err)
	}
	e, err := NewDynamic(with(mesh.Node{Dashpot: 70}))
	if err != nil {
		t.Fatal(err)
	}
	load := []Load{{Spot: mesh.Spot{Node: -1, Piece: 1, At: 2}, Force: 3}}
	at := mesh.Spot{Node: 1}
	for _, f := range []float64{1, 2.2, 9} {
		s := complex(0, 2*math.Pi*f)
		a, err := d.Solve(s, load, nil)
		if err != nil {
			t.Fatal(err)
		}
		b, err := e.Solve(s, load, nil)
		if err != nil {
			t.Fatal(err)
		}
		root(t, "response", a.Displacement(at), b.Displacement(at), 1e-12)
	}
	for _, f := range []float64{0.99, 9.1} {
		if _, err := d.Solve(complex(0, 2*math.Pi*f), load, nil); err == nil || !strings.Contains(err.Error(), "from 1 Hz to 9 Hz") {
			t.Errorf("at %g Hz: %v", f, err)
		}
	}
	record.Impedance = []complex128{complex(40, -8), complex(60, 6), 70}
	if z := Impedance(record, 2*math.Pi*2); z != complex(50, -1) {
		t.Errorf("between rows: %v", z)
	}
}

// What is not linear has no natural vibrations, each with its reason.
func TestNotLinearIsRefused(t *testing.T) {
	for word, change := range map[string]func(*mesh.Mesh){
		"friction": func(m *mesh.Mesh) { m.Nodes[1].Laws = []mesh.Law{{Friction: &mesh.Friction{Force: 3}}} },
		"along":    func(m *mesh.Mesh) { m.Pieces[0].Law = &mesh.Law{} },
		"slack":    func(m *mesh.Mesh) { m.Links = []mesh.Link{{A: 1, B: 2, Spring: 3, Slack: true}} },
		"grows":    func(m *mesh.Mesh) { m.Lines[0].Stretch = &mesh.Stretch{Stiffness: 3} },
	} {
		m := &line(1.5, 20e3, 0, []float64{0, 4, 11}, fixed, mesh.Node{}, fixed).m
		change(m)
		if _, err := Find(m, Want{}); err == nil || !strings.Contains(err.Error(), word) {
			t.Errorf("%s: %v", word, err)
		}
		if _, err := NewDynamic(m); err == nil || !strings.Contains(err.Error(), word) {
			t.Errorf("steady, %s: %v", word, err)
		}
	}
}
