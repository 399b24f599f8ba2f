package differences

import (
	"context"
	"errors"
	"math"
	"math/rand/v2"
	"testing"

	"github.com/tautspan/tautspan/engine/formula"
	"github.com/tautspan/tautspan/engine/mesh"
	"github.com/tautspan/tautspan/engine/scenario"
	"github.com/tautspan/tautspan/engine/solver"
)

// rungeKutta is the classical method for a small system of the tests.
func rungeKutta(y []float64, dt float64, steps int, rate func(t float64, y, dy []float64), see func(n int, y []float64)) {
	k := [4][]float64{}
	for i := range k {
		k[i] = make([]float64, len(y))
	}
	mid := make([]float64, len(y))
	for n := 0; n <= steps; n++ {
		see(n, y)
		t := float64(n) * dt
		ahead := func(i int, h float64) []float64 {
			for q := range y {
				mid[q] = y[q] + h*k[i][q]
			}
			return mid
		}
		rate(t, y, k[0])
		rate(t+dt/2, ahead(0, dt/2), k[1])
		rate(t+dt/2, ahead(1, dt/2), k[2])
		rate(t+dt, ahead(2, dt), k[3])
		for q := range y {
			y[q] += dt / 6 * (k[0][q] + 2*k[1][q] + 2*k[2][q] + k[3][q])
		}
	}
}

// Two endless lines tied together, with clamps at the tie and a mass hung from
// one of them; a bell arrives on the first. The lines enter the reference by
// their impedances alone: M u" + 2Z u' = 2Z a' + tie + hanger.
func tied(every float64, rows int) (m *mesh.Mesh, want map[int][]float64) {
	const c1, c2, fine = 100.0, 140.0, 64
	b := bell{at: 12, width: 1.2, high: 0.01, c: c1}
	m = line(every, rows, stretch1{20, 2, 2 * c1 * c1, 0}, stretch1{15, 2, 2 * c1 * c1, 0})
	other := addLine(m, stretch1{13, 1.1, 1.1 * c2 * c2, 0}, stretch1{17, 1.1, 1.1 * c2 * c2, 0})
	for _, end := range []int{0, 2, other, other + 2} {
		n := &m.Nodes[end]
		n.Fixed, n.Absorbing = false, true
		n.Dashpot = 2 * c1
		if end >= other {
			n.Dashpot = 1.1 * c2
		}
	}
	m.Nodes[1].Mass, m.Nodes[other+1].Mass = 0.4, 0.3
	m.Nodes[1].Fitting, m.Nodes[other+1].Fitting = true, true
	m.Nodes = append(m.Nodes, mesh.Node{Name: "hung", Line: -1, Mass: 1.7})
	m.Links = []mesh.Link{
		{Name: "tie", A: 1, B: other + 1, Spring: 3e4, Dashpot: 40},
		{Name: "hanger", A: len(m.Nodes) - 1, B: other + 1, Spring: 2e4, Dashpot: 10},
	}
	m.Pieces[0].Start = b.shape
	m.Pieces[0].StartRate = func(x float64) float64 { return -c1 * b.slope(x) }
	m.Band = 40
	ch := [3]int{
		watchNode(m, scenario.Displacement, 1, 0), watchNode(m, scenario.Displacement, other+1, 0),
		watchNode(m, scenario.Displacement, len(m.Nodes)-1, 0),
	}
	want = map[int][]float64{}
	rate := func(t float64, y, dy []float64) {
		a := -c1 * b.slope(20-c1*t)
		tie := 3e4*(y[1]-y[0]) + 40*(y[4]-y[3])
		hang := 2e4*(y[2]-y[1]) + 10*(y[5]-y[4])
		copy(dy, y[3:])
		dy[3] = (4*c1*(a-y[3]) + tie) / 0.4
		dy[4] = (-2*1.1*c2*y[4] - tie + hang) / 0.3
		dy[5] = -hang / 1.7
	}
	rungeKutta(make([]float64, 6), every/fine, fine*(rows-1), rate, func(n int, y []float64) {
		if n%fine == 0 {
			for i, c := range ch {
				want[c] = append(want[c], y[i])
			}
		}
	})
	return m, want
}

func TestTiedLines(t *testing.T) {
	m, want := tied(0.002, 151)
	orders(t, m, 2, want, 2, 5e-3)
	orders(t, m, 4, want, 4, 1e-3)
}

// A bell meets a spring at the end of a line: Z u' + K u = 2 Z a'. From a soft
// spring to one far stiffer than the step would bear if it were explicit.
func TestSpringEnd(t *testing.T) {
	const c, mass, every, rows = 100.0, 2.0, 0.002, 126
	for _, k := range []float64{2e3, 2e5, 2e7} {
		b := bell{at: 12, width: 1.2, high: 0.01, c: c}
		m := line(every, rows, stretch1{20, mass, mass * c * c, 0})
		m.Nodes[0].Fixed, m.Nodes[0].Absorbing, m.Nodes[0].Dashpot = false, true, mass*c
		m.Nodes[1].Fixed, m.Nodes[1].Spring = false, k
		m.Pieces[0].Start = b.shape
		m.Pieces[0].StartRate = func(x float64) float64 { return -c * b.slope(x) }
		m.Band = 40
		end, force := watchNode(m, scenario.Displacement, 1, 0), watchNode(m, scenario.Force, 1, 0)
		want := map[int][]float64{}
		// The exact step of the equation under a' taken as a parabola per step
		// would do; so fine a step that the explicit method bears the spring does
		// as well: K dt/Z is below 1.
		const fine = 400
		rungeKutta([]float64{0}, every/fine, fine*(rows-1), func(t float64, y, dy []float64) {
			dy[0] = -2*c*b.slope(20-c*t) - k/(mass*c)*y[0]
		}, func(n int, y []float64) {
			if n%fine == 0 {
				want[end] = append(want[end], y[0])
				want[force] = append(want[force], k*y[0])
			}
		})
		orders(t, m, 2, want, 2, 2e-2)
	}
}

// Parts that are stiffer than anything resolved act as rigid ones: a bracket of
// 1e12 N/m as none, a hanger of 1e12 N/m as mass added to the node, a link of
// 1e12 N/m between nodes of two lines as one node.
func TestStiffMeansRigid(t *testing.T) {
	b := bell{at: 12, width: 1.2, high: 0.01, c: 100}
	cases := map[string][2]joint{
		"bracket": {{mass: 0.4, bracket: 1e12, behind: 300}, {mass: 0.4, dashpot: 300}},
		"hanger":  {{mass: 0.5, hung: 2, hungSpring: 1e12}, {mass: 2.5}},
	}
	for name, pair := range cases {
		var got [2][]float64
		for i, j := range pair {
			m := scatterMesh(j, b, 151, 0.002)
			at := watchNode(m, scenario.Displacement, 1, 0)
			layout, _ := layoutOf(m, 1, 2)
			got[i] = solve(t, m, solver.Request{Freeze: layout}).Series[at][0]
		}
		// The stiff part gives by 1e-12 of a force of some 100 N; the bound is
		// rounding in a sum with numbers 1e9 times as large as the others.
		if d := distance(got[0], got[1]); d > 1e-6 {
			t.Errorf("%s: stiff and rigid differ by %.2g", name, d)
		}
	}
}

// A splice that cuts 4 mm off a long line changes nothing and does not rule the
// step: the waves are d'Alembert's.
func TestShortPiece(t *testing.T) {
	const c, mass, length = 100.0, 2.0, 20.0
	f := func(x float64) float64 { z := (x - 8) / 1.3; return 0.01 * math.Exp(-z*z) }
	m := line(0.01, 61, stretch1{6, mass, mass * c * c, 0}, stretch1{0.004, mass, mass * c * c, 0}, stretch1{13.996, mass, mass * c * c, 0})
	for i := range m.Pieces {
		x0 := m.Pieces[i].X0
		m.Pieces[i].Start = func(s float64) float64 { return f(x0 + s) }
		m.Nodes[i].Start = f(x0)
	}
	whole := oddPeriodic(length, f)
	u := func(x float64) func(t float64) float64 {
		return func(t float64) float64 { return (whole(x-c*t) + whole(x+c*t)) / 2 }
	}
	k := func(x float64) func(t float64) float64 {
		const d = 1e-5
		return func(t float64) float64 { return mass * c * c * (u(x+d)(t) - u(x-d)(t)) / (2 * d) }
	}
	want := map[int][]float64{
		watchAt(m, scenario.Displacement, 2, 3, 0):     sample(m, u(9.004)),
		watchAt(m, scenario.Displacement, 1, 0.002, 0): sample(m, u(6.002)),
		watchNode(m, scenario.Force, 1, 0):             sample(m, k(6)),
		watchAt(m, scenario.Force, 1, 0.002, 0):        sample(m, k(6.002)),
		watchNode(m, scenario.Force, 0, 0):             sample(m, k(0)),
	}
	plan, err := New().Plan(m, solver.Request{Effort: 1})
	if err != nil {
		t.Fatal(err)
	}
	if plan.Cells > 400 {
		t.Errorf("%d cells: the short piece rules the step", plan.Cells)
	}
	orders(t, m, 2, want, 2, 5e-3)
}

// busy is a network with everything on it; lossless without what takes energy.
func busy(loss bool) *mesh.Mesh {
	rng := rand.New(rand.NewPCG(7, 8))
	v := 0.0
	if loss {
		v = 1.5
	}
	m := line(0.01, 301, stretch1{7, 2, 2e4, v}, stretch1{0.003, 1.5, 2e4, v}, stretch1{5.3, 3, 2e4, v})
	o := addLine(m, stretch1{4, 1, 1.5e4, v}, stretch1{9, 1, 1.5e4, 0})
	m.Nodes[1].Mass, m.Nodes[1].Spring = 1.5, 3e4
	m.Nodes[3].Fixed, m.Nodes[3].Spring = false, 5e8
	m.Nodes = append(m.Nodes, mesh.Node{Name: "hung", Line: -1, Mass: 2})
	m.Links = []mesh.Link{{Name: "tie", A: 1, B: o + 1, Spring: 1e4}, {Name: "hanger", A: o + 1, B: len(m.Nodes) - 1, Spring: 800}, {Name: "far tie", A: 0, B: o + 1, Spring: 300}}
	for i := range m.Pieces {
		a, b, k := rng.NormFloat64(), rng.NormFloat64(), rng.Float64()*8
		l := m.Pieces[i].Length
		m.Pieces[i].Start = func(s float64) float64 { return 0.01 * a * math.Sin(math.Pi*s/l) }
		m.Pieces[i].StartRate = func(s float64) float64 { return b * math.Cos(k*s) }
	}
	m.Nodes[len(m.Nodes)-1].StartRate = 0.3
	m.Jump = 1
	if loss {
		m.Nodes[1].Dashpot = 50
		m.Nodes[1].Brackets = []mesh.Maxwell{{K: 3e4, C: 70, Start: 0.002}, {K: 1e9, C: 20}}
		m.Links[0].Dashpot = 12
		m.Links[2].Dashpot = 7
		m.Nodes[0].Motion = &mesh.Motion{
			Displacement: func(t float64) float64 { return 0.01 * math.Sin(9*t) },
			Velocity:     func(t float64) float64 { return 0.09 * math.Cos(9*t) },
		}
		m.Nodes[o+2].Fixed, m.Nodes[o+2].Absorbing, m.Nodes[o+2].Dashpot = false, true, math.Sqrt(1.5e4)
		m.Rolls = []mesh.Roll{{Name: "wheel", Line: 0, Speed: 31, Force: -400, From: 1.2, Starting: 0.05}}
		m.Pushes = []mesh.Push{
			{Name: "in", At: mesh.Spot{Node: -1, Piece: 0, At: 2.22}, Force: timeHistory(formula.OpSine, nil, 200, 4, 0.3)},
			{Name: "on", At: mesh.Spot{Node: 1, Piece: -1}, Force: timeHistory(formula.OpStep, []float64{0.333}, 90, 0.333)},
			{Name: "hung", At: mesh.Spot{Node: len(m.Nodes) - 1, Piece: -1}, Force: timeHistory(formula.OpStep, []float64{0.1}, -20, 0.1)},
		}
		x := formula.Apply(formula.OpSin, formula.Mul(formula.Const(0.7), formula.Arg(formula.ArgX)))
		m.Presses = []mesh.Press{
			{Name: "wind", Force: timeHistory(formula.OpRamp, []float64{0.2, 0.7}, 30, 0.2, 0.7), Parts: []mesh.Part{{Piece: 0, From: 1.1, To: 7}, {Piece: 1, To: 0.003, Origin: 7}}},
			{Name: "shaped", Force: scenario.History{Value: formula.Mul(x, formula.Apply(formula.OpCos, formula.Arg(formula.ArgT)))}, Parts: []mesh.Part{{Piece: 3, To: 4}}},
		}
	}
	watchNode(m, scenario.Force, 0, 1)
	watchNode(m, scenario.Velocity, 1, 1)
	watchAt(m, scenario.Slope, 2, 1.234, 1)
	watchAt(m, scenario.Acceleration, 3, 1.234, 2)
	watchNode(m, scenario.Displacement, len(m.Nodes)-1, 0)
	return m
}

// The scheme's energy keeps its balance: without loss and load to 1e-12 of what
// is stored; with all of them to 1e-11 of what went through (rounding of some
// thousand steps; 1e-13 and 1e-12 seen).
func TestEnergyBalance(t *testing.T) {
	for _, effort := range []int{0, 2} {
		e := solve(t, busy(false), solver.Request{Effort: effort}).Energy
		if e.Work != 0 || e.Lost != 0 || math.Abs(e.End-e.Start) > 1e-12*e.Most {
			t.Errorf("lossless: %+v, drift %.2g", e, (e.End-e.Start)/e.Most)
		}
		e = solve(t, busy(true), solver.Request{Effort: effort}).Energy
		through := e.Most + math.Abs(e.Work) + e.Lost
		t.Logf("%+v unaccounted %.2g", e, e.Unaccounted()/through)
		if math.Abs(e.Unaccounted()) > 1e-11*through || e.Lost <= 0 || e.Work == 0 {
			t.Errorf("with losses and loads: %+v, unaccounted %.2g", e, e.Unaccounted()/through)
		}
	}
}

// A line from rest has no energy at the start, and what a push does appears as
// energy: F^2 t/(2Z) of a step of force inside an endless line.
func TestEnergyFromRest(t *testing.T) {
	m := line(0.001, 21, stretch1{10, 2, 2e4, 0})
	m.Jump = 1
	m.Pushes = []mesh.Push{{Name: "step", At: mesh.Spot{Node: -1, Piece: 0, At: 5}, Force: timeHistory(formula.OpStep, []float64{0}, 50, 0)}}
	e := solve(t, m, solver.Request{Effort: 1}).Energy
	if math.Abs(e.Start) > 1e-15*e.Most {
		t.Errorf("%g J at the start", e.Start)
	}
	plan, _ := New().Plan(m, solver.Request{Effort: 1})
	layout, _ := newLayout(m, 1)
	end := (float64(plan.Steps) - 0.5) * layout.Step // before the ends are heard at 0.05 s
	// The scheme's first half step moves the point half as far as it should: a
	// quarter of a step is missing.
	power := 50.0 * 50 / (2 * math.Sqrt(2*2e4))
	if math.Abs(e.Work-power*(end-layout.Step/4)) > 1e-12*e.Work {
		t.Errorf("work %g J, want %g", e.Work, power*end)
	}
}

// Turned end for end, the network answers the same.
func TestReversedWalk(t *testing.T) {
	m := busy(true)
	m.Rolls, m.Presses[1].Parts = nil, nil // these know their direction
	n := busy(true)
	n.Rolls, n.Presses[1].Parts = nil, nil
	for i := range n.Pieces {
		p := &n.Pieces[i]
		l := p.Length
		start, rate := p.Start, p.StartRate
		p.Start, p.StartRate = func(s float64) float64 { return start(l - s) }, func(s float64) float64 { return rate(l - s) }
		p.From, p.To = p.To, p.From
	}
	n.Pushes[0].At.At = 7 - 2.22
	n.Presses[0].Parts[0].From, n.Presses[0].Parts[0].To = 0, 5.9
	n.Channels[2].Spots[0].At = 5.3 - 1.234
	n.Channels[3].Spots[0].At = 4 - 1.234
	a, b := solve(t, m, solver.Request{Effort: 1}), solve(t, n, solver.Request{Effort: 1})
	for c := range m.Channels {
		sign := 1.0
		if c == 2 {
			sign = -1 // a slope
		}
		scale := 0.0
		for i := range a.Series[c][0] {
			scale = math.Max(scale, math.Abs(a.Series[c][0][i]))
		}
		for i := range a.Series[c][0] {
			// Rounding over some thousand steps; the accelerations divide it by
			// the square of the output interval. 1e-10 seen.
			if d := math.Abs(a.Series[c][0][i] - sign*b.Series[c][0][i]); d > 1e-8*scale {
				t.Fatalf("channel %d row %d: %g and %g", c, i, a.Series[c][0][i], b.Series[c][0][i])
			}
		}
	}
}

func TestFreeze(t *testing.T) {
	m, _ := tied(0.002, 151)
	first := solve(t, m, solver.Request{Level: 1, Effort: 1})
	if first.Frozen {
		t.Error("a fresh layout counts as frozen")
	}
	again := solve(t, m, solver.Request{Level: 1, Freeze: first.Layout})
	if !again.Frozen {
		t.Error("an unchanged mesh is not frozen")
	}
	for i := range first.Series[0][0] {
		if first.Series[0][0][i] != again.Series[0][0][i] {
			t.Fatal("the frozen answer is another one")
		}
	}
	for i := range m.Pieces {
		m.Pieces[i].MassPerLength *= 1.03
	}
	if res := solve(t, m, solver.Request{Level: 1, Freeze: first.Layout}); !res.Frozen || res.Plan.Steps != first.Plan.Steps {
		t.Error("a slower line is not frozen")
	}
	second, _ := layoutOf(m, 1, 2)
	for i := range m.Pieces {
		m.Pieces[i].Tension *= 1.05
	}
	if res := solve(t, m, solver.Request{Level: 1, Freeze: second}); res.Frozen || len(res.Notes) == 0 {
		t.Error("a line too fast for the step counts as frozen, or without a note")
	}
	other := line(0.01, 10, stretch1{3, 1, 100, 0})
	if res := solve(t, other, solver.Request{Freeze: first.Layout}); res.Frozen {
		t.Error("the layout of another network counts as kept")
	}
	if res := solve(t, other, solver.Request{Freeze: "nonsense"}); res.Frozen {
		t.Error("a string counts as a layout")
	}
}

// Levels halve the step and double the cells.
func TestLevels(t *testing.T) {
	m := busy(true)
	var last solver.Plan
	for level := 0; level < 4; level++ {
		p, err := New().Plan(m, solver.Request{Level: level, Effort: 1})
		if err != nil {
			t.Fatal(err)
		}
		if level > 0 && (p.Cells != 2*last.Cells || math.Abs(float64(p.Steps-2*last.Steps)) > 2*maxPoints) {
			t.Errorf("level %d: %+v after %+v", level, p, last)
		}
		last = p
	}
}

func TestBudget(t *testing.T) {
	m := busy(true)
	for _, level := range []int{25, 60, 2000} {
		_, err := New().Plan(m, solver.Request{Level: level})
		if !errors.Is(err, solver.ErrBudget) {
			t.Errorf("level %d: %v", level, err)
		}
		if _, err := New().Solve(context.Background(), m, solver.Request{Level: level}, nil); !errors.Is(err, solver.ErrBudget) {
			t.Errorf("level %d: %v", level, err)
		}
	}
	m.Timing.Rows = 1 << 31
	if _, err := New().Plan(m, solver.Request{}); !errors.Is(err, solver.ErrBudget) {
		t.Errorf("rows: %v", err)
	}
}

func TestCancel(t *testing.T) {
	m := busy(true)
	ctx, cancel := context.WithCancel(context.Background())
	seen := 0.0
	_, err := New().Solve(ctx, m, solver.Request{Level: 5}, func(share float64) {
		seen = share
		if share > 0 {
			cancel()
		}
	})
	if !errors.Is(err, context.Canceled) || seen == 0 || seen > 0.5 {
		t.Errorf("%v after %g", err, seen)
	}
}

// A step allocates nothing, with every kind of load, joint and channel.
func TestStepAllocatesNothing(t *testing.T) {
	m := busy(true)
	layout, _ := layoutOf(m, 1, 2)
	r, err := newRun(newNetwork(m, layout, 0), solver.NewSeries(m))
	if err != nil {
		t.Fatal(err)
	}
	r.begin()
	n := 1
	if a := testing.AllocsPerRun(200, func() { r.step(n); n++ }); a != 0 {
		t.Errorf("%g allocations a step", a)
	}
	m, _ = tied(0.002, 151)
	layout, _ = newLayout(m, 1)
	f := newFourthRun(newNetwork(m, layout, 0), solver.NewSeries(m))
	n = 0
	if a := testing.AllocsPerRun(200, func() { f.step(n); n++ }); a != 0 {
		t.Errorf("%g allocations a step of order 4", a)
	}
}

// A picture along a line holds at its rows what the same places hold as spots.
func TestPicture(t *testing.T) {
	m := busy(true)
	m.Timing.Rows, m.Timing.Every = 3001, 0.001
	for _, q := range []scenario.Quantity{scenario.Displacement, scenario.Velocity, scenario.Slope, scenario.Acceleration} {
		for means := 0; means <= 2; means++ {
			m.Channels = nil
			spots := []mesh.Spot{{Node: 1, Piece: -1}, {Node: -1, Piece: 2, At: 1.7}}
			watch(m, q, spots[0], means)
			watch(m, q, spots[1], means)
			m.Channels = append(m.Channels, mesh.Channel{Quantity: q, Spots: spots, X: []float64{7, 8.7}, Along: true, Means: means})
			rows, stride := m.FieldRows()
			if stride != 3 {
				t.Fatalf("stride %d", stride)
			}
			s := solve(t, m, solver.Request{}).Series
			for k := range spots {
				for i := 0; i < rows; i++ {
					if s[2][k][i] != s[k][0][i*stride] {
						t.Fatalf("%v, %d means, spot %d, row %d: %g, want %g", q, means, k, i, s[2][k][i], s[k][0][i*stride])
					}
				}
			}
		}
	}
}

// Tension and moment are what they are.
func TestConstantChannels(t *testing.T) {
	m := line(0.01, 5, stretch1{3, 1, 100, 0}, stretch1{4, 1, 200, 0})
	watchNode(m, scenario.Tension, 1, 0)
	watchNode(m, scenario.Tension, 2, 0)
	watchAt(m, scenario.Tension, 0, 1, 0)
	watchAt(m, scenario.Moment, 0, 1, 0)
	s := solve(t, m, solver.Request{}).Series
	for c, want := range []float64{200, 200, 100, 0} {
		for i, v := range s[c][0] {
			if v != want {
				t.Errorf("channel %d row %d: %g, want %g", c, i, v, want)
			}
		}
	}
}

// Odd meshes end in an answer or an error, never in a panic or a number that is
// none.
func TestOddMeshes(t *testing.T) {
	rng := rand.New(rand.NewPCG(11, 12))
	wild := func() float64 {
		switch rng.IntN(12) {
		case 0:
			return 0
		case 1:
			return math.Exp(40 * rng.NormFloat64())
		case 2:
			return math.NaN()
		case 3:
			return math.Inf(1)
		case 4:
			return -1
		}
		return math.Exp(3 * rng.NormFloat64())
	}
	tame := func() float64 { return math.Exp(6 * rng.NormFloat64()) }
	answered, refused := 0, 0
	for i := 0; i < 240; i++ {
		pick := tame
		if i%3 == 0 {
			pick = wild
		}
		var parts []stretch1
		for k := rng.IntN(4); k >= 0; k-- {
			parts = append(parts, stretch1{tame(), tame(), tame() * 100, pick()})
		}
		m := line(0.01, 1+rng.IntN(30), parts...)
		m.Jump = rng.IntN(10)
		m.Band = pick()
		for n := range m.Nodes {
			node := &m.Nodes[n]
			node.Fixed = rng.IntN(3) == 0
			node.Mass, node.Spring, node.Dashpot = pick()*float64(rng.IntN(2)), pick()*float64(rng.IntN(2)), pick()*float64(rng.IntN(2))
			node.Brackets = []mesh.Maxwell{{K: pick(), C: pick()}}
			node.StartRate = pick()
		}
		m.Nodes = append(m.Nodes, mesh.Node{Line: -1, Mass: pick() * float64(rng.IntN(2))})
		m.Links = []mesh.Link{{A: rng.IntN(len(m.Nodes)), B: rng.IntN(len(m.Nodes)), Spring: pick(), Dashpot: pick()}}
		m.Rolls = []mesh.Roll{{Speed: pick(), Force: 10, From: pick(), Starting: pick()}}
		m.Pushes = []mesh.Push{{At: mesh.Spot{Node: -1, Piece: rng.IntN(len(m.Pieces)), At: pick()}, Force: timeHistory(formula.OpStep, []float64{0.01, math.NaN()}, pick(), 0.01)}}
		watchNode(m, scenario.Force, rng.IntN(len(m.Nodes)), rng.IntN(3))
		watchAt(m, scenario.Acceleration, 0, m.Pieces[0].Length*rng.Float64(), rng.IntN(3))
		plan, err := New().Plan(m, solver.Request{Effort: rng.IntN(3)})
		if err == nil && plan.Work > 1e6 {
			continue
		}
		res, err := New().Solve(context.Background(), m, solver.Request{}, nil)
		if err != nil {
			refused++
			continue
		}
		answered++
		if !finite(res.Series) {
			t.Fatalf("mesh %d: not finite", i)
		}
	}
	t.Logf("%d answered, %d refused", answered, refused)
	if answered < 30 || refused < 30 {
		t.Errorf("%d answered, %d refused: the draw proves little", answered, refused)
	}
}

// A force that is no number is a fault of the solution, with the solver's name.
func TestFault(t *testing.T) {
	m := line(0.01, 30, stretch1{3, 1, 100, 0})
	m.Jump = 1
	nan := formula.Apply(formula.OpSqrt, formula.Sub(formula.Const(-1), formula.Arg(formula.ArgT)))
	m.Pushes = []mesh.Push{{Name: "none", At: mesh.Spot{Node: -1, Piece: 0, At: 1}, Force: scenario.History{Value: nan}}}
	_, err := New().Solve(context.Background(), m, solver.Request{}, nil)
	var fault *solver.FaultError
	if !errors.As(err, &fault) || fault.Solver != name {
		t.Errorf("%v", err)
	}
}
