package modal

import (
	"math"
	"math/cmplx"
	"math/rand"
	"testing"

	"github.com/tautspan/tautspan/engine/mesh"
)

func steadyOf(t *testing.T, m *mesh.Mesh, s complex128, loads []Load, moves map[int]complex128) *Field {
	t.Helper()
	d, err := NewDynamic(m)
	if err != nil {
		t.Fatal(err)
	}
	f, err := d.Solve(s, loads, moves)
	if err != nil {
		t.Fatal(err)
	}
	return f
}

func nearC(t *testing.T, what string, got, want complex128, rel float64) {
	t.Helper()
	if !(cmplx.Abs(got-want) <= rel*cmplx.Abs(want)) {
		t.Errorf("%s = %.12g, want %.12g (off %.2g)", what, got, want, cmplx.Abs(got-want)/cmplx.Abs(want))
	}
}

func inside(x float64) mesh.Spot { return mesh.Spot{Node: -1, At: x} }

// A beam with clamped ends under a load in the middle: F L^3/(192 EI), moment
// F L/8 at the middle and -F L/8 at the ends (beam tables, from memory).
func TestBeamAtRest(t *testing.T) {
	b := beam(4, 0, 3, 700, clamped, clamped)
	b.m.Nodes[0].Support, b.m.Nodes[1].Support = true, true
	f := steadyOf(t, &b.m, 0, []Load{{inside(2), 90}}, nil)
	// 1e-11: s = 1e-9 in place of 0, and a stiffness of four powers of length.
	nearC(t, "deflection", f.Displacement(inside(2)), complex(90*64/(192.0*700), 0), 1e-11)
	nearC(t, "moment", f.Moment(inside(2)), -90*4/8, 1e-11)
	nearC(t, "end moment", f.Moment(mesh.Spot{Node: 0, Piece: -1}), 90*4/8, 1e-11)
	nearC(t, "reaction", f.Force(mesh.Spot{Node: 1, Piece: -1}), 45, 1e-11)
	nearC(t, "force after", f.Force(inside(2)), -45, 1e-11)
}

// Hinged tensioned beam with losses: the receptance is a sum over sine modes,
// 2/(mL) sum sin sin/(s^2 + ...), which converges like n^-3 at least; 20000 terms.
func TestBeamReceptance(t *testing.T) {
	const length, tension, mass, ei, c, tau = 3.0, 800.0, 2.0, 150.0, 4.0, 1e-4
	b := beam(length, tension, mass, ei, fixed, fixed)
	b.m.Pieces[0].Viscous, b.m.Pieces[0].Internal = c, tau
	for _, s := range []complex128{3i, 60i, -1 + 300i, 20 + 5i, 2000i, 40} {
		f := steadyOf(t, &b.m, s, []Load{{inside(0.8), 1}}, nil)
		for _, x := range []float64{0.3, 0.8, 1.9, 2.999} {
			var u, slope, moment complex128
			e := complex(ei, 0) * (1 + tau*s)
			for n := 20000; n > 0; n-- {
				k := float64(n) * math.Pi / length
				k2 := complex(k*k, 0)
				a := complex(2/length*math.Sin(k*0.8), 0) / (e*k2*k2 + tension*k2 + mass*s*s + c*s)
				u += a * complex(math.Sin(k*x), 0)
				slope += a * complex(k*math.Cos(k*x), 0)
				moment -= e * a * k2 * complex(math.Sin(k*x), 0)
			}
			nearC(t, "displacement", f.Displacement(inside(x)), u, 3e-10) // the sum leaves 1.4e-10 at 2000i
			nearC(t, "slope", f.Slope(inside(x)), slope, 1e-6)            // the sum's tail
			if x != 0.8 {
				nearC(t, "moment", f.Moment(inside(x)), moment, 1e-3) // likewise, n^-1 at worst
			}
		}
	}
}

// An endless beam: force over velocity is 2 m c (1+i), c = (EI w^2/m)^(1/4)
// (Cremer, Heckl, Structure-Borne Sound, from memory); with tension the answer
// does not depend on where the ends are.
func TestEndlessBeam(t *testing.T) {
	end := mesh.Node{Absorbing: true, Dashpot: 1e9}
	const omega, mass, ei = 70.0, 3.0, 500.0
	b := beam(10, 0, mass, ei, end, end)
	u := steadyOf(t, &b.m, complex(0, omega), []Load{{inside(4), 1}}, nil).Displacement(inside(4))
	c := math.Pow(ei*omega*omega/mass, 0.25)
	nearC(t, "impedance", 1/(complex(0, omega)*u), complex(2*mass*c, 2*mass*c), 1e-11)
	var first complex128
	for i, length := range []float64{2, 11, 300} {
		b := beam(length, 400, mass, ei, end, end)
		u := steadyOf(t, &b.m, complex(0, omega), []Load{{inside(length / 2), 1}}, nil).Displacement(inside(length/2 + 0.4))
		if i == 0 {
			first = u
		}
		nearC(t, "displacement", u, first, 1e-11)
	}
}

// The general path gives what the path for uniform strings gives (published
// receptances are tested on that one).
func TestGeneralEqualsString(t *testing.T) {
	r := rand.New(rand.NewSource(41))
	for trial := 0; trial < 20; trial++ {
		m := randomNetwork(r, true)
		s := complex(0, 1+200*r.Float64())
		load := []Load{{mesh.Spot{Node: -1, Piece: 0, At: 0.37 * m.Pieces[0].Length}, 5}}
		one := steadyOf(t, m, s, load, nil)
		d := &Dynamic{m: m, attached: m.Attached(), general: true}
		two, err := d.Solve(s, load, nil)
		if err != nil {
			t.Fatal(err)
		}
		size := cmplx.Abs(one.Displacement(load[0].Spot))
		for k := range m.Pieces {
			at := mesh.Spot{Node: -1, Piece: k, At: 0.61 * m.Pieces[k].Length}
			// Of the size at the load, times the nearness of a resonance.
			if e := cmplx.Abs(one.Displacement(at) - two.Displacement(at)); e > 1e-9*size {
				t.Errorf("trial %d: displacement off %.2g of %.2g", trial, e, size)
			}
			if e := cmplx.Abs(one.Force(at) - two.Force(at)); e > 1e-9*(5+cmplx.Abs(one.Force(at))) {
				t.Errorf("trial %d: force off %.2g", trial, e)
			}
		}
	}
}

// Poles of the steady motion are the natural vibrations, and near one the motion
// has its shape; along every piece T u' - (EI u”)' and the motion agree with
// what differences of displacement say.
func TestPolesAreModes(t *testing.T) {
	r := rand.New(rand.NewSource(42))
	compared := 0
	for trial := 0; trial < 8; trial++ {
		m := randomGeneral(r, trial%2 == 1)
		res := find(t, m, Want{Count: 3, Shapes: true})
		for _, mode := range res.Modes {
			var load []Load
			for k := range m.Pieces {
				load = append(load, Load{mesh.Spot{Node: -1, Piece: k, At: 0.41 * m.Pieces[k].Length}, complex(1+0.3*float64(k), 0)})
			}
			near := steadyOf(t, m, mode.S*(1+1e-7), load, nil)
			far := steadyOf(t, m, mode.S*(1+1e-3), load, nil)
			var top, rest float64
			var ratio complex128
			for k := range m.Pieces {
				at := mesh.Spot{Node: -1, Piece: k, At: 0.23 * m.Pieces[k].Length}
				u := near.Displacement(at)
				rest = math.Max(rest, cmplx.Abs(far.Displacement(at)))
				if cmplx.Abs(u) > top {
					top, ratio = cmplx.Abs(u), mode.Shape.At(at)/u
				}
			}
			if top < 100*rest || mode.Multiplicity > 1 {
				continue // the loads hardly move this one
			}
			compared++
			for k := range m.Pieces {
				at := mesh.Spot{Node: -1, Piece: k, At: 0.8 * m.Pieces[k].Length}
				// Other modes add what is there away from the pole.
				if e := cmplx.Abs(near.Displacement(at)*ratio - mode.Shape.At(at)); e > 2*rest*cmplx.Abs(ratio)+1e-6 {
					t.Errorf("trial %d mode %d: shape off %.2g on piece %d", trial, mode.Number, e, k)
				}
			}
		}
	}
	if compared < 15 {
		t.Errorf("only %d modes compared", compared)
	}
}

// Along every piece slope, moment and transverse force are the derivatives that
// they stand for, and the balance of forces holds at joints.
func TestFieldIsConsistent(t *testing.T) {
	r := rand.New(rand.NewSource(43))
	for trial := 0; trial < 12; trial++ {
		m := randomGeneral(r, true)
		s := complex(0, 5+60*r.Float64())
		k := r.Intn(len(m.Pieces))
		p := &m.Pieces[k]
		f := steadyOf(t, m, s, []Load{{mesh.Spot{Node: -1, Piece: k, At: 0.1 * p.Length}, 1}}, nil)
		h := 1e-3 * p.Length
		at := func(x float64) mesh.Spot { return mesh.Spot{Node: -1, Piece: k, At: x} }
		for _, x := range []float64{0.35 * p.Length, 0.62 * p.Length, 0.9 * p.Length} {
			diff := func(q func(mesh.Spot) complex128) complex128 {
				return (8*(q(at(x+h))-q(at(x-h))) - q(at(x+2*h)) + q(at(x-2*h))) / complex(12*h, 0)
			}
			slope := f.Slope(at(x))
			size := cmplx.Abs(f.Displacement(at(x)))/p.Length + cmplx.Abs(slope)
			// 1e-7: fourth differences over a thousandth of the length.
			if e := cmplx.Abs(diff(f.Displacement) - slope); e > 1e-7*size {
				t.Errorf("trial %d: slope off %.2g of %.2g", trial, e, size)
			}
			force := complex(p.Tension+p.TensionRise*x, 0)*slope - diff(f.Moment)
			if e := cmplx.Abs(force - f.Force(at(x))); e > 1e-6*(cmplx.Abs(force)+p.Tension*size) {
				t.Errorf("trial %d: force off %.2g of %.2g", trial, e, cmplx.Abs(force))
			}
			ei := complex(p.Bending, 0) * (1 + s*complex(p.Internal, 0))
			if e := cmplx.Abs(ei*diff(f.Slope) - f.Moment(at(x))); e > 1e-6*(cmplx.Abs(f.Moment(at(x)))+cmplx.Abs(ei)*size/p.Length) {
				t.Errorf("trial %d: moment off %.2g of %.2g", trial, e, cmplx.Abs(f.Moment(at(x))))
			}
		}
	}
}

// What is not represented is refused in words.
func TestGeneralRefusals(t *testing.T) {
	end := mesh.Node{Absorbing: true, Dashpot: 10}
	if _, err := Find(&beam(3, 100, 1, 10, fixed, end).m, Want{}); err == nil {
		t.Error("modes of an endless beam")
	}
	b := line(1, 0, 0, []float64{0, 3}, mesh.Node{Mass: 2}, fixed)
	b.m.Pieces[0].TensionRise = 9
	if _, err := Find(&b.m, Want{}); err == nil {
		t.Error("a mass on an end without tension")
	}
	b = line(1, 0, 0, []float64{0, 3}, mesh.Node{}, fixed)
	b.m.Pieces[0].TensionRise = 9
	d, err := NewDynamic(&b.m)
	if err != nil {
		t.Fatal(err)
	}
	if _, err := d.Solve(4i, []Load{{mesh.Spot{Node: 0, Piece: -1}, 1}}, nil); err == nil {
		t.Error("a force on an end without tension")
	}
	b = beam(3, 1e9, 1, 1, fixed, fixed)
	b.m.Pieces[0].TensionRise = 9
	if _, err := NewDynamic(&b.m); err == nil {
		t.Error("an inclined line with next to no bending")
	}
	b = line(1, 10, 0, []float64{0, 3}, fixed, fixed)
	b.m.Pieces[0].TensionRise = -4
	if _, err := Find(&b.m, Want{}); err == nil {
		t.Error("compression")
	}
}

// A support that is moved: the far part of a hanging chain follows the Bessel
// function J0(2 w sqrt(y/g))/J0(2 w sqrt(L/g)) of the height y (Lamb 1910).
func TestDrivenChain(t *testing.T) {
	const g, length, omega = 9.80665, 10.0, 6.3
	b := line(0.7, 0, 0, []float64{0, length}, mesh.Node{}, fixed)
	b.m.Pieces[0].TensionRise = 0.7 * g
	f := steadyOf(t, &b.m, complex(0, omega), nil, map[int]complex128{1: 1})
	j := func(y float64) float64 { return math.J0(2 * omega * math.Sqrt(y/g)) }
	for _, y := range []float64{0.01, 1.7, 5, 9.9} {
		nearC(t, "height", f.Displacement(inside(y)), complex(j(y)/j(length), 0), 1e-10)
	}
	nearC(t, "tip", f.Displacement(mesh.Spot{Node: 0, Piece: -1}), complex(1/j(length), 0), 1e-10)
}
