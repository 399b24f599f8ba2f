package mesh

import (
	"math"
	"testing"

	"github.com/tautspan/tautspan/engine/formula"
	"github.com/tautspan/tautspan/engine/scenario"
	"github.com/tautspan/tautspan/engine/statics"
)

// twoSegments is a line of 12 m and 30 m with a clamp between them.
func twoSegments() *scenario.Network {
	net := &scenario.Network{}
	seg := func(name string, length, mass float64) scenario.Segment {
		return scenario.Segment{Name: name, Length: length, MassPerLength: mass, Tension: 10000}
	}
	net.Lines = []scenario.Line{{
		Name: "l",
		Nodes: []scenario.Node{
			{Name: "a", Fixed: true},
			{Name: "clamp", Kind: scenario.Joint, Mass: 2, Dashpots: []scenario.DashpotOf[float64]{{C: 50}, {C: 70, Bracket: true, Through: 1e5}}},
			{Name: "b", Spring: 4e4},
		},
		Segments: []scenario.Segment{seg("s", 12, 1), seg("u", 30, 4)},
	}}
	net.Run = scenario.RunOf[float64]{For: 2, Every: 0.01}
	return net
}

func inside(segment int, at float64) scenario.Place {
	return scenario.Place{Node: -1, Segment: segment, Offset: at}
}

func build(t *testing.T, net *scenario.Network) *Mesh {
	t.Helper()
	m, err := Build(net)
	if err != nil {
		t.Fatal(err)
	}
	return m
}

func TestPiecesAndFittings(t *testing.T) {
	m := build(t, twoSegments())
	if len(m.Nodes) != 3 || len(m.Pieces) != 2 {
		t.Fatalf("%d nodes, %d pieces", len(m.Nodes), len(m.Pieces))
	}
	c := m.Nodes[1]
	if c.Name != "line.l.clamp" || c.Mass != 2 || c.Dashpot != 50 || len(c.Brackets) != 1 || c.Brackets[0].K != 1e5 || c.X != 12 || !c.Fitting || c.Support {
		t.Errorf("clamp is %+v", c)
	}
	p := m.Pieces[1]
	// Z = sqrt(T m) and c = sqrt(T/m) for T = 10 kN, m = 4 kg/m: 200 N s/m, 50 m/s.
	if p.Impedance() != 200 || p.WaveSpeed() != 50 || p.TravelTime() != 0.6 || p.X0 != 12 {
		t.Errorf("second piece is %+v", p)
	}
	if m.Timing.Rows != 201 || m.Timing.End() != 2 {
		t.Errorf("timing %+v", m.Timing)
	}
}

func TestOnlyTiesAndSensorMassesCut(t *testing.T) {
	net := twoSegments()
	net.Watches = []scenario.Watch{
		{Name: "plain", At: inside(1, 7), Quantities: []scenario.Quantity{scenario.Displacement}},
		{Name: "heavy", At: inside(1, 9), Mass: 0.5, Quantities: []scenario.Quantity{scenario.Velocity}},
	}
	net.Pushes = []scenario.PushOf[float64]{{Name: "k", At: inside(0, 3), Force: scenario.History{Value: formula.Arg(formula.ArgT)}}}
	m := build(t, net)
	if len(m.Pieces) != 3 {
		t.Fatalf("%d pieces, want a cut at the sensor mass only", len(m.Pieces))
	}
	if n := m.Nodes[2]; n.Mass != 0.5 || n.X != 21 {
		t.Errorf("sensor node %+v", n)
	}
	if m.Pieces[0].Marks[0] != (Mark{MarkLoad, 3}) || m.Pieces[1].Marks[0] != (Mark{MarkWatch, 7}) {
		t.Errorf("marks %v %v", m.Pieces[0].Marks, m.Pieces[1].Marks)
	}
	if s := m.Channels[0].Spots[0]; s.Piece != 1 || s.At != 7 {
		t.Errorf("plain watch at %+v", s)
	}
	if s := m.Channels[1].Spots[0]; s.Node != 2 {
		t.Errorf("heavy watch at %+v", s)
	}
}

func TestTiesTunedMassesAndAbsorbingEnds(t *testing.T) {
	net := twoSegments()
	net.Lines[0].Nodes[1].Tuned = []scenario.TunedOf[float64]{{Mass: 3, Spring: 1800, Dashpot: 40}}
	net.Lines[0].Nodes[2] = scenario.Node{Name: "b", Absorbing: true}
	net.Lines = append(net.Lines, twoSegments().Lines[0])
	net.Ties = []scenario.TieOf[float64]{{Name: "x", From: inside(1, 10), To: scenario.Place{Line: 1, Node: 1}, Spring: 500, Mass: 6}}
	m := build(t, net)
	if len(m.Links) != 2 {
		t.Fatalf("links %+v", m.Links)
	}
	hung := m.Nodes[m.Links[0].B]
	if hung.Line != -1 || hung.Mass != 3 || m.Links[0].Spring != 1800 {
		t.Errorf("tuned mass %+v on %+v", hung, m.Links[0])
	}
	tie := m.Links[1]
	if m.Nodes[tie.A].Mass != 3 || m.Nodes[tie.B].Mass != 2+3 || m.Nodes[tie.A].X != 22 {
		t.Errorf("tie ends %+v %+v", m.Nodes[tie.A], m.Nodes[tie.B])
	}
	end := m.Nodes[m.Pieces[m.Lines[0].Pieces[2]].To]
	if !end.Absorbing || end.Dashpot != 200 {
		t.Errorf("absorbing end %+v, want a dashpot of 200 N s/m", end)
	}
}

func TestStartShapes(t *testing.T) {
	net := twoSegments()
	net.Plucks = []scenario.PluckOf[float64]{{Name: "p", At: inside(1, 8), ByLength: true, Length: 0.1}}
	bell := formula.Mul(formula.Const(2), formula.Arg(formula.ArgX))
	net.Starts = []scenario.StartOf[float64]{{Name: "v", Along: scenario.SpanOf{Segment: 1}, Velocity: true, Shape: bell}}
	m := build(t, net)
	if u := m.Pieces[1].Start(8); math.Abs(u-0.1) > 1e-14 {
		t.Errorf("drawn place at %g m", u)
	}
	if u, n := m.Pieces[0].Start(12), m.Nodes[1].Start; math.Abs(u-0.06) > 1e-14 || math.Abs(n-u) > 1e-15 {
		t.Errorf("clamp at %g and %g m, want 0.06 by similar triangles", u, n)
	}
	if m.Nodes[1].Brackets[0].Start != m.Nodes[1].Start {
		t.Error("a dashpot behind a bracket must start relaxed")
	}
	if m.Pieces[0].StartRate != nil || m.Pieces[1].StartRate(3) != 6 {
		t.Error("start velocity along the second segment only, from its own start")
	}
	if m.Jump != 1 {
		t.Errorf("a pluck jumps at order 1, got %d", m.Jump)
	}
}

func halfSine(peak, duration float64) scenario.History {
	c := formula.Const
	return scenario.History{
		Value:  formula.Apply(formula.OpHalfSine, formula.Arg(formula.ArgT), c(peak), c(duration)),
		Breaks: []float64{0, duration},
	}
}

func TestJumpOrders(t *testing.T) {
	c := formula.Const
	step := scenario.History{Value: formula.Apply(formula.OpStep, formula.Arg(formula.ArgT), c(5), c(0.5)), Breaks: []float64{0.5}}
	gauss := formula.Apply(formula.OpExp, formula.Apply(formula.OpNeg, formula.Apply(formula.OpPow, formula.Sub(formula.Arg(formula.ArgX), c(15)), c(2))))
	for _, tc := range []struct {
		what  string
		alter func(*scenario.Network)
		want  int
	}{
		{"half-sine push: its slope jumps", func(n *scenario.Network) {
			n.Pushes = []scenario.PushOf[float64]{{At: inside(1, 4), Force: halfSine(100, 0.05)}}
		}, 2},
		{"step push", func(n *scenario.Network) { n.Pushes = []scenario.PushOf[float64]{{At: inside(1, 4), Force: step}} }, 1},
		{"step press", func(n *scenario.Network) { n.Presses = []scenario.PressOf[float64]{{Force: step}} }, 2},
		{"sine motion of a support: velocity jumps", func(n *scenario.Network) {
			sine := formula.Apply(formula.OpSine, formula.Arg(formula.ArgT), c(0.01), c(3), c(0))
			n.Moves = []scenario.MoveOf[float64]{{Motion: scenario.History{Value: sine, Breaks: []float64{0}}}}
		}, 1},
		{"bell far from everything", func(n *scenario.Network) {
			n.Starts = []scenario.StartOf[float64]{{Along: scenario.SpanOf{Segment: 1}, Shape: gauss}}
		}, SmoothJump},
		{"struck stretch", func(n *scenario.Network) {
			n.Starts = []scenario.StartOf[float64]{{Along: scenario.SpanOf{Segment: 1}, Velocity: true, Shape: c(1)}}
		}, 1},
		{"two ramps that meet at a joint: a kink, no tear", func(n *scenario.Network) {
			up, down := formula.Mul(c(0.1/12), formula.Arg(formula.ArgX)), formula.Sub(c(0.1), formula.Mul(c(0.1/30), formula.Arg(formula.ArgX)))
			n.Starts = []scenario.StartOf[float64]{{Along: scenario.SpanOf{}, Shape: up}, {Along: scenario.SpanOf{Segment: 1}, Shape: down}}
		}, 1},
		{"one ramp that ends at a joint", func(n *scenario.Network) {
			n.Starts = []scenario.StartOf[float64]{{Along: scenario.SpanOf{}, Shape: formula.Mul(c(0.1/12), formula.Arg(formula.ArgX))}}
		}, 0},
		{"rolling load", func(n *scenario.Network) {
			n.Rolls = []scenario.RollOf[float64]{{Speed: 10, Force: -100, From: scenario.Place{Node: 0}}}
		}, 1},
	} {
		net := twoSegments()
		tc.alter(net)
		if m := build(t, net); m.Jump != tc.want {
			t.Errorf("%s: order %d, want %d", tc.what, m.Jump, tc.want)
		}
	}
}

func TestMeans(t *testing.T) {
	for _, c := range []struct {
		q          scenario.Quantity
		smoothness float64
		stiff      bool
		want       int
	}{
		{scenario.Displacement, 1, false, 0}, {scenario.Velocity, 1, false, 1}, {scenario.Force, 1, false, 1}, {scenario.Acceleration, 1, false, 2},
		{scenario.Velocity, 2, false, 0}, {scenario.Acceleration, 2, false, 1}, {scenario.Acceleration, SmoothJump, false, 0},
		{scenario.Displacement, 0, false, 1}, {scenario.Tension, 1, false, 0}, {scenario.Slope, 1, false, 1},
		// A pluck of a stiff line: only the shear jumps, at its place, and the acceleration has no bound there.
		{scenario.Displacement, 1.5, true, 0}, {scenario.Velocity, 1.5, true, 0}, {scenario.Slope, 1.5, true, 0}, {scenario.Moment, 1.5, true, 0},
		{scenario.Force, 1.5, true, 1}, {scenario.Acceleration, 1.5, true, 1}, {scenario.Force, 1.5, false, 0},
		// A support of a stiff line that sets off at once: its moment jumps, its shear has no bound.
		{scenario.Moment, 1, true, 1}, {scenario.Force, 1, true, 1}, {scenario.Slope, 1, true, 0}, {scenario.Velocity, 1, true, 1},
	} {
		if got := means(c.q, c.smoothness, c.stiff); got != c.want {
			t.Errorf("%v, smoothness %g, stiff %v: %d means, want %d", c.q, c.smoothness, c.stiff, got, c.want)
		}
	}
}

// What TestMeans holds of a plucked stiff line, seen in its mode sum: on a pinned
// beam of length pi with EI = m = 1, let go from a point force at a, the velocity
// of that place is in proportion to the sum of sin^2(na) sin(n^2 t)/n^2, which
// grows as the root of time, and its acceleration falls as the inverse of that.
func TestVelocityAfterPluckOfBeam(t *testing.T) {
	velocity := func(at float64) float64 {
		sum := 0.0
		for n := 1.0; n < 20000; n++ {
			s := math.Sin(n * 1.1)
			sum += s * s * math.Sin(n*n*at) / (n * n)
		}
		return sum
	}
	early, late := velocity(1e-4), velocity(4e-4)
	if power := math.Log(late/early) / math.Log(4); math.Abs(power-0.5) > 0.01 {
		t.Errorf("velocity grows as time to the power %.4f, want 1/2", power)
	}
}

// A released pluck on a stiff line makes the acceleration jump, not the velocity,
// also at a joint where a string begins; elsewhere on a string it is the velocity.
func TestJumpOfStiffPluck(t *testing.T) {
	for _, c := range []struct {
		at   scenario.Place
		want int
	}{{inside(0, 1), 2}, {scenario.Place{Node: 1}, 2}, {inside(1, 4), 1}} {
		net := twoSegments()
		net.Lines[0].Segments[0].Bending = 500
		net.Plucks = []scenario.PluckOf[float64]{{Name: "p", At: c.at, Force: 10}}
		net.Watches = []scenario.Watch{{Name: "w", At: inside(0, 2), Quantities: []scenario.Quantity{scenario.Velocity, scenario.Force, scenario.Moment, scenario.Acceleration}}}
		m := build(t, net)
		for i := range m.Pieces {
			for _, k := range m.Pieces[i].Marks {
				if (k.Kind == MarkKink) != (c.want == 1) && k.Kind != MarkWatch {
					t.Errorf("pluck at %+v: mark of kind %d", c.at, k.Kind)
				}
			}
		}
		if m.Jump != c.want {
			t.Errorf("pluck at %+v: order %d, want %d", c.at, m.Jump, c.want)
		}
		rates := []int{0, 1, 0, 1}
		if c.want == 1 { // the kink runs into the stiff part
			rates = []int{1, 1, 1, 2}
		}
		for i, w := range rates {
			if m.Channels[i].Means != w {
				t.Errorf("pluck at %+v: %v has %d means, want %d", c.at, m.Channels[i].Quantity, m.Channels[i].Means, w)
			}
		}
	}
}

// The static shapes that plucks leave in a mesh are those of statics, with bending,
// sag and a hung mass, and the sag term is the same in both packages.
func TestStartOfStiffSaggingLine(t *testing.T) {
	net := twoSegments()
	line := &net.Lines[0]
	line.Sag = true
	for i := range line.Segments {
		line.Segments[i].Bending, line.Segments[i].Axial = 40, 3e6
	}
	line.Nodes[1].Tuned = []scenario.TunedOf[float64]{{Mass: 2, Spring: 900}}
	net.Plucks = []scenario.PluckOf[float64]{{Name: "p", At: inside(1, 4), Force: 10}}
	rest, err := statics.Hold(net)
	if err != nil {
		t.Fatal(err)
	}
	m := build(t, net)
	area, hung := 0.0, 0
	for i := range m.Pieces {
		p := &m.Pieces[i]
		for k := range 4000 {
			s := (float64(k) + 0.5) * p.Length / 4000
			if math.Abs(p.Start(s)-rest.Displacement(0, p.X0+s)) > 1e-15 {
				t.Fatalf("piece %d at %g", i, s)
			}
			area += m.Lines[0].Sag.Pieces[i] * p.Start(s) * p.Length / 4000
		}
	}
	for node, w := range m.Lines[0].Sag.Nodes {
		area += w * m.Nodes[node].Start
	}
	extra := m.Lines[0].Sag.Stiffness * area
	if got := rest.ExtraTension(0); math.Abs(got-extra) > 1e-6*extra {
		t.Errorf("extra tension %.9g N, by the mesh's own term %.9g N", got, extra)
	}
	for i := range m.Nodes {
		if n := &m.Nodes[i]; n.Line < 0 {
			hung++
			if at := m.Nodes[m.Links[0].A].Start; n.Start != at || at == 0 {
				t.Errorf("the hung mass starts at %g, its clamp at %g", n.Start, at)
			}
		}
	}
	if hung != 1 {
		t.Errorf("%d hung masses", hung)
	}
}

// The root-mean-square frequency of a half-sine of duration d is 1/(2d)
// (integrals of sin^2 and cos^2 over half a period are equal).
func TestBandOfHalfSine(t *testing.T) {
	net := twoSegments()
	net.Pushes = []scenario.PushOf[float64]{{At: inside(1, 4), Force: halfSine(100, 0.05)}}
	if m := build(t, net); math.Abs(m.Band-3*10) > 0.3 {
		t.Errorf("band %g Hz, want 30 Hz within the sampling of the estimate (1 %%)", m.Band)
	}
}

// A motion given as acceleration is integrated twice: a constant a gives
// v = a t and u = a t^2/2; a sine of angular frequency w gives
// u = A (w t - sin w t)/w^2.
func TestMotionByIntegration(t *testing.T) {
	const w, a = 40.0, 3.0
	sine := formula.Apply(formula.OpSine, formula.Arg(formula.ArgT), formula.Const(a), formula.Const(w/(2*math.Pi)), formula.Const(0))
	net := twoSegments()
	net.Moves = []scenario.MoveOf[float64]{{Kind: scenario.MotionAcceleration, Motion: scenario.History{Value: sine}}}
	m := build(t, net)
	motion := m.Nodes[0].Motion
	for _, at := range []float64{0.013, 0.5, 1.99} {
		u := a * (w*at - math.Sin(w*at)) / (w * w)
		v := a * (1 - math.Cos(w*at)) / w
		if math.Abs(motion.Displacement(at)-u) > 1e-12 || math.Abs(motion.Velocity(at)-v) > 1e-12 {
			t.Errorf("t = %g: %.15g, %.15g; want %.15g, %.15g", at, motion.Displacement(at), motion.Velocity(at), u, v)
		}
	}
}

func TestPictureCoversTheLine(t *testing.T) {
	net := twoSegments()
	net.Run = scenario.RunOf[float64]{For: 40, Every: 0.005}
	net.Watches = []scenario.Watch{{Name: "all", Along: true, Span: scenario.SpanOf{Segment: -1}, Quantities: []scenario.Quantity{scenario.Displacement}}}
	m := build(t, net)
	c := m.Channels[0]
	if c.X[0] != 0 || c.X[len(c.X)-1] != 42 || c.Spots[len(c.Spots)-1].Node != 2 {
		t.Errorf("picture from %g to %g", c.X[0], c.X[len(c.X)-1])
	}
	if rows, stride := m.FieldRows(); rows > maxFieldRows || (rows-1)*stride > m.Timing.Rows-1 {
		t.Errorf("%d rows, stride %d", rows, stride)
	}
}
