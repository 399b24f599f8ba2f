package scatter

import (
	"context"
	"math"
	"math/cmplx"
	"math/rand/v2"
	"testing"

	"github.com/tautspan/tautspan/engine/formula"
	"github.com/tautspan/tautspan/engine/mesh"
	"github.com/tautspan/tautspan/engine/scenario"
)

func inside(piece int, at float64) mesh.Spot { return mesh.Spot{Node: -1, Piece: piece, At: at} }
func atNode(node int) mesh.Spot              { return mesh.Spot{Node: node, Piece: -1} }

func channel(q scenario.Quantity, at mesh.Spot) mesh.Channel {
	return mesh.Channel{Watch: "w", Quantity: q, Spots: []mesh.Spot{at}, X: []float64{0}}
}

func pushAt(at mesh.Spot) *Drive { return &Drive{Name: "p", push: &at, node: -1, unit: newton} }

func respond(t *testing.T, m *mesh.Mesh, q scenario.Quantity, at mesh.Spot, d *Drive, f float64) complex128 {
	t.Helper()
	c := channel(q, at)
	m.Channels = append(m.Channels, c)
	n, err := NewNetwork(m)
	if err != nil {
		t.Fatal(err)
	}
	v, err := n.ResponseAt(&c, d, f)
	if err != nil {
		t.Fatal(err)
	}
	return v
}

// closeTo holds a complex number against its published value by the scale of that.
func closeTo(t *testing.T, what string, got, want complex128, tol float64) {
	t.Helper()
	if !(cmplx.Abs(got-want) <= tol*cmplx.Abs(want)) {
		t.Errorf("%s: %.12g, want %.12g", what, got, want)
	}
}

// Point drive of a held string: Y = sin k x< sin k(L - x>)/(T k sin kL) and the
// stiffness D met at the drive.
// Source: Kinsler et al. (2000), ch. 2; Rao (2007), ch. 8 (from memory);
// L = 10 m, T = 5 kN, m = 0.8 kg/m, drive at 3 m, watch at 6 m. The figures have
// 12 digits, and missed by 3e-12.
func TestPointDrive(t *testing.T) {
	for _, c := range []struct{ f, y, stiffness float64 }{
		{1, 0.000260298893331, 2273.98941167}, {3.5, 0.00135669219644, 710.840452323},
		{6, -0.000392602957902, 12318.2400627}, {12.3, 8.58173370088e-05, -15255.9178878},
	} {
		m := line([]mesh.Node{{Fixed: true}, {Fixed: true}}, piece(10, 5000, 0.8))
		d := pushAt(inside(0, 3))
		closeTo(t, "receptance", respond(t, m, scenario.Displacement, inside(0, 6), d, c.f), complex(c.y, 0), 1e-10)
		closeTo(t, "stiffness", 1/respond(t, m, scenario.Displacement, inside(0, 3), d, c.f), complex(c.stiffness, 0), 1e-10)
	}
}

// Endless string: force over velocity 2Z in mid-line, Z at a driven end; mean
// power F^2/(2 F/v).
// Source: Cremer, Heckl (1988); Kinsler et al. (2000), ch. 2 (from memory);
// T = 20 kN, m = 1.35 kg/m, F = 100 N.
func TestEndlessStringDriven(t *testing.T) {
	z := math.Sqrt(20000 * 1.35)
	m := line([]mesh.Node{{Dashpot: z, Absorbing: true}, {Dashpot: z, Absorbing: true}}, piece(50, 20000, 1.35))
	for _, f := range []float64{0.7, 4, 31} {
		v := respond(t, m, scenario.Velocity, inside(0, 20), pushAt(inside(0, 20)), f)
		closeTo(t, "F/v", 1/v, 328.6335345031, 1e-11)
		near(t, "mean power", 100*100*real(v)/2, 15.2145154862546, 1e-9)
	}
	m = line([]mesh.Node{{}, {Dashpot: z, Absorbing: true}}, piece(50, 20000, 1.35))
	v := respond(t, m, scenario.Velocity, atNode(0), pushAt(atNode(0)), 4)
	closeTo(t, "F/v at the end", 1/v, 164.31676725155, 1e-11)
	near(t, "mean power at the end", 100*100*real(v)/2, 30.4290309725092, 1e-9)
}

// Driven at one end, far end fixed: Z = -i Z0 cot kL.
// Source: Kinsler et al. (2000), ch. 2 (from memory); L = 10 m, T = 5 kN,
// m = 0.8 kg/m.
func TestInputImpedance(t *testing.T) {
	for _, c := range []struct{ f, x float64 }{{1, -62.07143677}, {3, 66.9046074763}, {7, 72.137001645}} {
		m := line([]mesh.Node{{}, {Fixed: true}}, piece(10, 5000, 0.8))
		v := respond(t, m, scenario.Velocity, atNode(0), pushAt(atNode(0)), c.f)
		closeTo(t, "input impedance", 1/v, complex(0, c.x), 1e-10)
	}
}

// One support moved, the other held: u(x)/u(0) = sin k(L-x)/sin kL, as a ratio of
// displacement whatever the motion was given as.
// Source: Kinsler et al. (2000), ch. 2; Rao (2007), ch. 8 (from memory);
// L = 12 m, T = 3 kN, m = 0.75 kg/m, 4 Hz.
func TestMovedSupport(t *testing.T) {
	still := &mesh.Motion{Displacement: func(float64) float64 { return 0 }, Velocity: func(float64) float64 { return 0 }}
	omega := complex(0, 2*math.Pi*4)
	for _, c := range []struct{ x, ratio float64 }{{3, 0.421949131704}, {6, -0.688042482211}, {10, -0.714829575782}} {
		for order, per := range []complex128{1, omega, omega * omega} {
			m := line([]mesh.Node{{Motion: still}, {Fixed: true}}, piece(12, 3000, 0.75))
			got := respond(t, m, scenario.Displacement, inside(0, c.x), &Drive{Name: "m", node: 0, order: order}, 4)
			closeTo(t, "ratio", got*per, complex(c.ratio, 0), 1e-10)
		}
	}
}

// A force along a stretch on a held string: u = (q/(T k^2)) (cos k(x - L/2)/
// cos(kL/2) - 1), from T u” + m w^2 u + q = 0. Derived here.
func TestForceAlongStretch(t *testing.T) {
	const length, tension, mass = 10.0, 5000.0, 0.8
	whole := &Drive{Name: "p", press: []mesh.Part{{Piece: 0, To: length}}, node: -1}
	for _, f := range []float64{0.5, 6, 33} {
		k := 2 * math.Pi * f * math.Sqrt(mass/tension)
		for _, x := range []float64{1.3, 5, 8} {
			m := line([]mesh.Node{{Fixed: true}, {Fixed: true}}, piece(length, tension, mass))
			u := (math.Cos(k*(x-length/2))/math.Cos(k*length/2) - 1) / (tension * k * k)
			slope := -math.Sin(k*(x-length/2)) / math.Cos(k*length/2) / (tension * k)
			got := respond(t, m, scenario.Displacement, inside(0, x), whole, f)
			near(t, "displacement", real(got)*tension*k*k, u*tension*k*k, 1e-10)
			got = respond(t, m, scenario.Slope, inside(0, x), whole, f)
			near(t, "slope", real(got)*tension*k, slope*tension*k, 1e-10)
		}
	}
}

// Reciprocity: a force here moves there as a force there moves here, with loss,
// joints and a hung mass. Rounding missed by 2e-15.
func TestResponseReciprocity(t *testing.T) {
	r := rand.New(rand.NewPCG(3, 5))
	for i := 0; i < 40; i++ {
		build := func() *mesh.Mesh {
			m := line([]mesh.Node{{Fixed: true}, {Mass: 2, Spring: 300, Dashpot: 60}, {Spring: 4e4}}, piece(8, 9000, 1.2), piece(31, 9000, 2))
			for k := range m.Pieces {
				m.Pieces[k].Viscous = 0.3
			}
			hang(m, 1, 1.5, 2500, 12)
			return m
		}
		a, b := inside(0, 8*r.Float64()), inside(1, 31*r.Float64())
		f := 0.3 + 12*r.Float64()
		there := respond(t, build(), scenario.Displacement, b, pushAt(a), f)
		here := respond(t, build(), scenario.Displacement, a, pushAt(b), f)
		closeTo(t, "reciprocity", there, here, 1e-12)
	}
}

// A resonance that nothing damps has no amplitude; beside it everything is finite.
// A line of 10 m with wave speed 100 m/s vibrates at 5 Hz by itself.
func TestUndampedResonance(t *testing.T) {
	m := line([]mesh.Node{{Fixed: true}, {Fixed: true}}, piece(10, 10000, 1))
	c := channel(scenario.Displacement, inside(0, 4))
	m.Channels = []mesh.Channel{c}
	n, err := NewNetwork(m)
	if err != nil {
		t.Fatal(err)
	}
	grid := []float64{0, 1.25, 2.5, 3.75, 5, 6.25, 7.5}
	d := pushAt(inside(0, 3))
	list, _, err := n.Responses(context.Background(), []Drive{*d}, grid)
	if err != nil {
		t.Fatal(err)
	}
	for k, v := range list[0].Value {
		if grid[k] != 5 && (cmplx.IsNaN(v) || cmplx.Abs(v) > 1) {
			t.Errorf("%g Hz: %v", grid[k], v)
		}
	}
	if v := list[0].Value[4]; !cmplx.IsNaN(v) {
		t.Errorf("at the resonance: %v", v)
	}
	// Static: u = F x<(L - x>)/(T L) = 3*6/(1e4*10).
	closeTo(t, "static", list[0].Value[0], 3*6/1e5, 1e-12)
	if list[0].Unit != "m/N" {
		t.Errorf("unit %s", list[0].Unit)
	}
	// On another grid the resonance falls between the frequencies, and is found.
	grid = []float64{4, 4.4, 4.8, 5.2, 5.6}
	list, _, _ = n.Responses(context.Background(), []Drive{*d}, grid)
	peaks, err := n.Peaks(context.Background(), &list[0], grid, 3)
	if err != nil || len(peaks) != 1 || math.Abs(peaks[0].Frequency-5) > 1e-6 || !cmplx.IsNaN(peaks[0].Value) {
		t.Errorf("peaks %v, %v", peaks, err)
	}
}

// With viscous loss c the first mode of a held string, driven and watched at the
// middle, peaks near its own frequency; the response there is the sum over odd
// modes of 2/(m L)/(w_n^2 - w^2 + i w c/m).
// Source: Rao (2007), ch. 8, modal sum (from memory).
func TestDampedPeak(t *testing.T) {
	m := line([]mesh.Node{{Fixed: true}, {Fixed: true}}, piece(10, 10000, 1))
	m.Pieces[0].Viscous = 0.4
	c := channel(scenario.Displacement, inside(0, 5))
	m.Channels = []mesh.Channel{c}
	n, err := NewNetwork(m)
	if err != nil {
		t.Fatal(err)
	}
	var grid []float64
	for f := 3.0; f < 8; f += 0.21 {
		grid = append(grid, f)
	}
	d := pushAt(inside(0, 5))
	list, _, _ := n.Responses(context.Background(), []Drive{*d}, grid)
	peaks, err := n.Peaks(context.Background(), &list[0], grid, 3)
	if err != nil || len(peaks) != 1 {
		t.Fatalf("%v, %v", peaks, err)
	}
	sum := func(f float64) complex128 {
		omega, v := 2*math.Pi*f, complex(0, 0)
		for k := 1; k < 40001; k += 2 {
			w := math.Pi * 10 * float64(k)
			v += 0.2 / complex(w*w-omega*omega, omega*0.4)
		}
		return v
	}
	p := peaks[0]
	// The modes beyond those summed add 0.2/(31.4^2 * 2 * 40000) = 2.5e-9 m/N to
	// some 0.016 m/N, 1.6e-7 of it.
	closeTo(t, "amplitude of the peak", p.Value, sum(p.Frequency), 2e-7)
	for _, beside := range []float64{p.Frequency * 0.9999, p.Frequency * 1.0001} {
		if cmplx.Abs(sum(beside)) > cmplx.Abs(p.Value) {
			t.Errorf("larger at %g Hz than at the peak, %g Hz", beside, p.Frequency)
		}
	}
}

func TestUnits(t *testing.T) {
	for _, c := range []struct {
		d    dims
		want string
	}{{dimsOf(scenario.Displacement).over(newton), "m/N"}, {dimsOf(scenario.Displacement).over(newton.over(metre)), "m^2/N"},
		{dimsOf(scenario.Acceleration).over(newton), "m/(N*s^2)"}, {dimsOf(scenario.Slope).over(newton), "1/N"},
		{dimsOf(scenario.Force).over(dims{1, 0, -1}), "N*s/m"}, {dimsOf(scenario.Displacement).over(metre), "1"}, {dimsOf(scenario.Moment).over(newton), "m"}} {
		if got := c.d.String(); got != c.want {
			t.Errorf("%v: %s, want %s", c.d, got, c.want)
		}
	}
}

func TestWhatDrivesSteadily(t *testing.T) {
	net := &scenario.Network{}
	net.Lines = []scenario.Line{{Name: "l", Nodes: []scenario.Node{{Name: "a", Fixed: true}, {Name: "b", Fixed: true}},
		Segments: []scenario.Segment{{Name: "s", Length: 10, MassPerLength: 1, Tension: 1e4}}}}
	net.Run = scenario.RunOf[float64]{For: 1, Every: 0.01}
	mid := scenario.Place{Node: -1, Offset: 4}
	one := scenario.History{Value: formula.Const(1)}
	changing := scenario.History{Value: formula.Arg(formula.ArgX)}
	net.Plucks = []scenario.PluckOf[float64]{{Name: "pluck", At: mid, Force: 10, Until: 0.5}}
	net.Pushes = []scenario.PushOf[float64]{{Name: "push", At: mid, Force: one}}
	net.Presses = []scenario.PressOf[float64]{{Name: "even", Along: scenario.SpanOf{Segment: -1}, Force: one}, {Name: "uneven", Along: scenario.SpanOf{Segment: -1}, Force: changing}}
	net.Moves = []scenario.MoveOf[float64]{{Name: "shake", Node: 1, Kind: scenario.MotionAcceleration, Motion: scenario.History{Value: formula.Arg(formula.ArgT)}}}
	net.Rolls = []scenario.RollOf[float64]{{Name: "roll", Speed: 5, Force: -1, From: scenario.Place{Node: 0}}}
	m, err := mesh.Build(net)
	if err != nil {
		t.Fatal(err)
	}
	drives, reasons := Drives(net, m)
	var names []string
	for _, d := range drives {
		names = append(names, d.Name)
	}
	if len(names) != 3 || names[0] != "push" || names[1] != "even" || names[2] != "shake" || len(reasons) != 3 {
		t.Errorf("drives %v, reasons %v", names, reasons)
	}
	if argPlace != formula.ArgX {
		t.Error("a history's place is another argument")
	}
	if drives[2].node != 1 || drives[2].order != 2 {
		t.Errorf("move %+v", drives[2])
	}
}
