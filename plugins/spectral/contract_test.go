package spectral

import (
	"context"
	"errors"
	"math"
	"testing"
	"time"

	"github.com/tautspan/tautspan/engine/formula"
	"github.com/tautspan/tautspan/engine/mesh"
	"github.com/tautspan/tautspan/engine/scenario"
	"github.com/tautspan/tautspan/engine/solver"
)

// knocked is a lossy two-piece line with a dashpot, knocked at one place and read
// at another.
func knocked(hit, read mesh.Spot, f scenario.History) *mesh.Mesh {
	m := chain(0.002, 300, seg{9, 1.2, 7000, 0.3}, seg{6, 0.8, 7000, 0.1})
	m.Nodes[1].Mass, m.Nodes[1].Dashpot = 0.5, 60
	m.Jump, m.Band = 2, 50
	for _, s := range []mesh.Spot{hit, read} {
		if s.Node < 0 {
			m.Pieces[s.Piece].Marks = append(m.Pieces[s.Piece].Marks, mesh.Mark{Kind: mesh.MarkLoad, At: s.At})
		}
	}
	m.Pushes = []mesh.Push{{At: hit, Force: f}}
	watch(m, scenario.Displacement, 0, read)
	return m
}

// Reciprocity: hitting and reading swapped gives the same record, and superposition:
// two loads give the sum. Both hold for the semi-discrete system and the propagation
// exactly, to rounding: 1e-11 chosen, 2e-14 seen.
func TestReciprocityAndSuperposition(t *testing.T) {
	a, b := inside(0, 2.5), inside(1, 4)
	one := solve(t, knocked(a, b, halfSine(100, 0.03)), 0).Series[0][0]
	other := solve(t, knocked(b, a, halfSine(100, 0.03)), 0).Series[0][0]
	t.Logf("reciprocity %.2g", apart(one, other))
	if d := apart(one, other); d > 1e-11 {
		t.Errorf("not reciprocal: %g", d)
	}
	m := knocked(a, b, halfSine(100, 0.03))
	m.Pushes = append(m.Pushes, mesh.Push{At: b, Force: sine(30, 6)})
	both := solve(t, m, 0).Series[0][0]
	second := knocked(a, b, sine(0, 6))
	second.Pushes = []mesh.Push{{At: b, Force: sine(30, 6)}}
	sum := solve(t, second, 0).Series[0][0]
	for i := range sum {
		sum[i] += one[i]
	}
	t.Logf("superposition %.2g", apart(both, sum))
	if d := apart(both, sum); d > 1e-11 {
		t.Errorf("no superposition: %g", d)
	}
}

// The approximant and the real modes are two routes to the same motion: a dashpot too
// weak to matter (1e-12 of the impedance) forces the former.
func TestModesAgainstApproximant(t *testing.T) {
	build := func(c float64) *mesh.Mesh {
		m := chain(0.003, 400, seg{9, 1.2, 7000, 0}, seg{6, 0.8, 7000, 0})
		m.Nodes[1].Mass, m.Nodes[1].Spring, m.Nodes[1].Dashpot = 0.5, 300, c
		m.Jump, m.Band = 2, 50
		m.Pieces[0].Marks = []mesh.Mark{{Kind: mesh.MarkLoad, At: 2}}
		m.Pushes = []mesh.Push{{At: inside(0, 2), Force: halfSine(100, 0.0301)}}
		for _, means := range []int{0, 1, 2} {
			watch(m, scenario.Displacement, means, inside(1, 2))
			watch(m, scenario.Velocity, means, inside(1, 2))
			watch(m, scenario.Acceleration, means, inside(1, 2))
			watch(m, scenario.Slope, means, inside(1, 2))
			watch(m, scenario.Force, means, atNode(0))
		}
		return m
	}
	modes, pade := solve(t, build(0), 1), solve(t, build(1e-10), 1)
	if !modes.Layout.(*layout).modal || pade.Layout.(*layout).modal {
		t.Fatal("methods not as meant")
	}
	worst := 0.0
	defer func() { t.Logf("worst %.2g", worst) }()
	for c := range modes.Series {
		worst = math.Max(worst, apart(pade.Series[c][0], modes.Series[c][0]))
		// Chosen; 4e-12 seen.
		if d := apart(pade.Series[c][0], modes.Series[c][0]); d > 1e-9 {
			t.Errorf("channel %d: apart by %g", c, d)
		}
	}
}

// Means against the definition: the record averaged over one interval, from a sampled
// record 64 times as fine by Simpson's rule, and averaged again; also before t = 0.
func TestMeans(t *testing.T) {
	const fine, w = 64, 0.004
	build := func(every float64, rows int) *mesh.Mesh {
		m, _ := mixed(every, rows)
		m.Presses = []mesh.Press{{Force: program(formula.Apply(formula.OpSin, formula.Mul(formula.Const(40), formula.Arg(formula.ArgT)))),
			Parts: []mesh.Part{{Piece: 0, From: 0, To: 7}}}}
		m.Nodes[3].Motion = &mesh.Motion{
			Displacement: func(t float64) float64 { return 0.01 * t * math.Sin(30*t) },
			Velocity:     func(t float64) float64 { return 0.01*math.Sin(30*t) + 0.3*t*math.Cos(30*t) },
		}
		return m
	}
	type probe struct {
		q scenario.Quantity
		s mesh.Spot
	}
	probes := []probe{{scenario.Displacement, inside(2, 3)}, {scenario.Velocity, inside(2, 3)}, {scenario.Acceleration, atNode(4)},
		{scenario.Slope, inside(0, 3)}, {scenario.Force, inside(2, 3)}, {scenario.Force, atNode(0)}, {scenario.Force, atNode(3)}, {scenario.Velocity, atNode(3)}}
	coarseRows := 12
	m := build(w, coarseRows)
	f := build(w/fine, (coarseRows+1)*fine+1)
	for _, p := range probes {
		watch(m, p.q, 1, p.s)
		watch(m, p.q, 2, p.s)
		watch(f, p.q, 0, p.s)
	}
	run := func(m *mesh.Mesh) *solver.Result {
		r, err := New().Solve(context.Background(), m, solver.Request{Freeze: coarse(m, 7)}, nil)
		if err != nil {
			t.Fatal(err)
		}
		return r
	}
	got, sampled := run(m), run(f)
	worst := 0.0
	defer func() { t.Logf("worst %.2g", worst) }()
	for p := range probes {
		q := sampled.Series[p][0]
		scale := 0.0
		for _, v := range q {
			scale = math.Max(scale, math.Abs(v))
		}
		for i := 1; i < coarseRows; i++ {
			once, twice := 0.0, 0.0
			for k := -fine; k < fine; k++ { // midpoint pairs by Simpson over cells of two
				if (k+fine)%2 != 0 {
					continue
				}
				at := i*fine + k
				for s, c := range [3]float64{1, 4, 1} {
					v := c / 3 * q[at+s]
					if k >= -fine/2 && k < fine/2 {
						once += v / fine
					}
					twice += v / fine * (1 - math.Abs(float64(k+s))/fine)
				}
			}
			worst = math.Max(worst, math.Max(math.Abs(got.Series[2*p][0][i]-once), math.Abs(got.Series[2*p+1][0][i]-twice))/scale)
			// Simpson's rule on cells of 1/64 interval; 1e-6 chosen, 6e-9 seen.
			if math.Abs(got.Series[2*p][0][i]-once) > 1e-6*scale || math.Abs(got.Series[2*p+1][0][i]-twice) > 1e-6*scale {
				t.Errorf("probe %d row %d: means %g, %g, want %g, %g (scale %g)", p, i,
					got.Series[2*p][0][i], got.Series[2*p+1][0][i], once, twice, scale)
				break
			}
		}
	}
}

// A mean velocity is a difference of displacements, and a twice-averaged acceleration
// a second one, at t = 0 with u(-t) = u(0) - t v(0). Exact but for rounding of u divided
// by w and w^2: 1e-11 m/s and 1e-8 m/s^2 chosen for u of 0.01 m.
func TestMeansAreDifferences(t *testing.T) {
	const w = 0.004
	m, _ := mixed(w, 40)
	m.Pieces[1].Marks = []mesh.Mark{{Kind: mesh.MarkLoad, At: 1}}
	spot := inside(1, 2)
	watch(m, scenario.Velocity, 1, spot)
	watch(m, scenario.Acceleration, 2, spot)
	f, _ := mixed(w/2, 82)
	f.Pieces[1].Marks = m.Pieces[1].Marks
	watch(f, scenario.Displacement, 0, spot)
	watch(f, scenario.Velocity, 0, spot)
	a, b := solve(t, m, 0), solve(t, f, 0)
	u := func(half int) float64 {
		if half < 0 {
			return b.Series[0][0][0] + float64(half)*w/2*b.Series[1][0][0]
		}
		return b.Series[0][0][half]
	}
	for i := 0; i < 40; i++ {
		v := (u(2*i+1) - u(2*i-1)) / w
		acc := (u(2*i+2) - 2*u(2*i) + u(2*i-2)) / (w * w)
		if math.Abs(a.Series[0][0][i]-v) > 1e-11 || math.Abs(a.Series[1][0][i]-acc) > 1e-8 {
			t.Fatalf("row %d: %g, %g, want %g, %g", i, a.Series[0][0][i], a.Series[1][0][i], v, acc)
		}
	}
}

// Smooth data converge faster than any order: a Gaussian pulse under loss and a mass,
// each level against the next but one. The start is a pulse of 0.6 m far from the ends.
func TestConvergenceSmooth(t *testing.T) {
	rec := [4][]float64{}
	for level := range rec {
		m := chain(0.01, 100, seg{12, 1, 1e4, 0.5}, seg{8, 2, 1e4, 0.2})
		m.Nodes[1].Mass, m.Nodes[1].Dashpot = 3, 40
		m.Band = 6 * 100 / (2 * math.Pi)
		m.Pieces[0].Start = func(x float64) float64 { return 0.01 * math.Exp(-(x-6)*(x-6)/0.5) }
		watch(m, scenario.Displacement, 0, inside(1, 5))
		rec[level] = solve(t, m, level).Series[0][0]
	}
	e := [3]float64{apart(rec[0], rec[3]), apart(rec[1], rec[3]), apart(rec[2], rec[3])}
	t.Logf("errors %.2g", e)
	// A factor of 1e4 in one level is seen (order 24 in p); 100 is chosen. The floor of
	// rounding at level 3's degrees is 3e-10.
	if e[1] > e[0]/100 || e[2] > 2e-9 {
		t.Errorf("errors %v", e)
	}
}

// The half sine's jumps in rate converge algebraically, with at least order 2 in p on
// a record of displacements; against a level far above.
func TestConvergenceHalfSine(t *testing.T) {
	build := func() *mesh.Mesh { return knocked(inside(0, 2.5), inside(1, 4), halfSine(100, 0.03)) }
	ref := solve(t, build(), 5).Series[0][0]
	e := [3]float64{}
	for level := range e {
		e[level] = apart(solve(t, build(), level).Series[0][0], ref)
	}
	t.Logf("errors %.2g", e)
	if e[0] > 1e-2 || e[2] > e[0]/math.Pow(ratio, 4) {
		t.Errorf("errors %v", e)
	}
}

// With a frozen layout the answer is a smooth function of the inputs: second
// differences fall with the square of the change. Tension, a mark's place and a
// dashpot change together.
func TestFreezeIsSmooth(t *testing.T) {
	build := func(x float64) *mesh.Mesh {
		m := knocked(inside(0, 2.5*(1+x)), inside(1, 4), halfSine(100, 0.03*(1+x/3)))
		for i := range m.Pieces {
			m.Pieces[i].Tension *= 1 + x
			m.Pieces[i].Length *= 1 - x/2
		}
		m.Nodes[1].Dashpot *= 1 + 2*x
		return m
	}
	base := solve(t, build(0), 0)
	run := func(x float64) []float64 {
		r, err := New().Solve(context.Background(), build(x), solver.Request{Level: 0, Effort: 1, Freeze: base.Layout}, nil)
		if err != nil || !r.Frozen {
			t.Fatal(err, "not frozen")
		}
		return r.Series[0][0]
	}
	if d := apart(run(0), base.Series[0][0]); d != 0 {
		t.Errorf("the same mesh on its own layout differs by %g", d)
	}
	second := func(h float64) float64 {
		p, z, n := run(h), base.Series[0][0], run(-h)
		s, f := 0.0, 0.0
		for i := range p {
			s += (p[i] - 2*z[i] + n[i]) * (p[i] - 2*z[i] + n[i])
			f += (p[i] - n[i]) * (p[i] - n[i])
		}
		return math.Sqrt(s / f)
	}
	// Second over first differences are proportional to h where the function is smooth.
	a, b := second(1e-3), second(1e-4)
	t.Logf("%.4g %.4g", a, b)
	if math.Abs(a/b-10) > 0.5 {
		t.Errorf("second over first differences %g at 1e-3, %g at 1e-4", a, b)
	}
}

// A bare splice and the walking order must not matter: the cut line has other
// elements, so that only the level's own error may show: 1e-8 chosen, 2e-11 seen.
func TestSpliceAndOrder(t *testing.T) {
	build := func(segs ...seg) *mesh.Mesh {
		m := chain(0.01, 100, segs...)
		m.Band = 6 * 100 / (2 * math.Pi)
		return m
	}
	bump := func(x float64) float64 { return 0.01 * math.Exp(-(x-6)*(x-6)/0.5) }
	one := build(seg{20, 1, 1e4, 0.5})
	one.Pieces[0].Start = bump
	watch(one, scenario.Displacement, 0, inside(0, 15))
	two := build(seg{7.3, 1, 1e4, 0.5}, seg{12.7, 1, 1e4, 0.5})
	two.Pieces[0].Start = bump
	two.Pieces[1].Start = func(s float64) float64 { return bump(7.3 + s) }
	two.Nodes[1].Start = bump(7.3)
	watch(two, scenario.Displacement, 0, inside(1, 7.7))
	back := build(seg{20, 1, 1e4, 0.5})
	back.Pieces[0].Start = func(s float64) float64 { return bump(20 - s) }
	watch(back, scenario.Displacement, 0, inside(0, 5))
	a := solve(t, one, 1).Series[0][0]
	t.Logf("cut %.2g, reversed %.2g", apart(solve(t, two, 1).Series[0][0], a), apart(solve(t, back, 1).Series[0][0], a))
	if d := apart(solve(t, two, 1).Series[0][0], a); d > 1e-8 {
		t.Errorf("cut: %g", d)
	}
	if d := apart(solve(t, back, 1).Series[0][0], a); d > 1e-8 {
		t.Errorf("reversed: %g", d)
	}
}

// A stiff dashpot, a stiff spring and a stiff bracket at a light node stay bounded
// and hold the node, and a mark very near a node does not ruin the step.
func TestStiffAttachments(t *testing.T) {
	for name, change := range map[string]func(n *mesh.Node){
		"dashpot": func(n *mesh.Node) { n.Dashpot = 1e9 },
		"spring":  func(n *mesh.Node) { n.Spring = 1e13 },
		"bracket": func(n *mesh.Node) { n.Brackets = []mesh.Maxwell{{K: 1e11, C: 1e9}} },
	} {
		m := knocked(inside(0, 2.5), inside(1, 4), halfSine(100, 0.03))
		change(&m.Nodes[1])
		m.Pieces[0].Marks = append(m.Pieces[0].Marks, mesh.Mark{Kind: mesh.MarkKink, At: 9 - 1e-7}, mesh.Mark{Kind: mesh.MarkKink, At: 9 - 1e-12})
		watch(m, scenario.Displacement, 0, inside(0, 5), atNode(1))
		r := solve(t, m, 0)
		line, node := 0.0, 0.0
		for i := range r.Series[1][0] {
			line = math.Max(line, math.Abs(r.Series[1][0][i]))
			node = math.Max(node, math.Abs(r.Series[1][1][i]))
		}
		if node > 1e-4*line || line > 0.1 {
			t.Errorf("%s: node moves %g, line %g", name, node, line)
		}
	}
}

func TestCancel(t *testing.T) {
	m := threeLossy()
	ctx, cancel := context.WithCancel(context.Background())
	calls := 0
	begin := time.Now()
	_, err := New().Solve(ctx, m, solver.Request{Level: 2, Effort: 2}, func(float64) {
		if calls++; calls == 2 {
			cancel()
		}
	})
	if !errors.Is(err, context.Canceled) {
		t.Errorf("got %v", err)
	}
	if d := time.Since(begin); d > 5*time.Second { // far below the run's own length
		t.Errorf("stopped after %v", d)
	}
	if _, err := New().Solve(ctx, m, solver.Request{}, nil); !errors.Is(err, context.Canceled) {
		t.Errorf("started although cancelled: %v", err)
	}
}

func TestBudget(t *testing.T) {
	m := chain(1e-6, 1<<34, seg{1, 1, 1, 0})
	watch(m, scenario.Displacement, 0, inside(0, 0.5))
	if _, err := New().Solve(context.Background(), m, solver.Request{}, nil); !errors.Is(err, solver.ErrBudget) {
		t.Errorf("got %v", err)
	}
	if _, err := New().Plan(threeLossy(), solver.Request{Level: 40}); !errors.Is(err, solver.ErrBudget) {
		t.Errorf("got %v", err)
	}
	many := make([]seg, 20000)
	for i := range many {
		many[i] = seg{1, 1, 1, 0}
	}
	if _, err := New().Plan(chain(1, 2, many...), solver.Request{}); !errors.Is(err, solver.ErrBudget) {
		t.Errorf("got %v", err)
	}
}

// Faulty meshes give an error that names the solver, never a panic or NaN.
func TestFaults(t *testing.T) {
	nan := math.NaN()
	push := func(m *mesh.Mesh, v float64) {
		m.Pushes = []mesh.Push{{At: inside(0, 1), Force: program(formula.Const(v))}}
	}
	cases := map[string]func(m *mesh.Mesh){
		"tension":  func(m *mesh.Mesh) { m.Pieces[0].Tension = nan },
		"length":   func(m *mesh.Mesh) { m.Pieces[0].Length = 0 },
		"slack":    func(m *mesh.Mesh) { m.Pieces[0].Tension = -1 },
		"huge":     func(m *mesh.Mesh) { m.Pieces[0].Tension, m.Pieces[0].MassPerLength = 1e308, 1e-308 },
		"mass":     func(m *mesh.Mesh) { m.Nodes[1].Mass = -5 },
		"infinite": func(m *mesh.Mesh) { m.Nodes[1].Spring = math.Inf(1) },
		"nodes":    func(m *mesh.Mesh) { m.Pieces[1].To = 9 },
		"loop":     func(m *mesh.Mesh) { m.Pieces[1].To = m.Pieces[1].From },
		"marks":    func(m *mesh.Mesh) { m.Pieces[0].Marks = []mesh.Mark{{Kind: mesh.MarkKink, At: 99}} },
		"link":     func(m *mesh.Mesh) { m.Links = []mesh.Link{{A: 0, B: 77}} },
		"spot":     func(m *mesh.Mesh) { watch(m, scenario.Force, 0, atNode(55)) },
		"inside":   func(m *mesh.Mesh) { watch(m, scenario.Force, 0, inside(0, 1e9)) },
		"every":    func(m *mesh.Mesh) { m.Timing.Every = nan },
		"rows":     func(m *mesh.Mesh) { m.Timing.Rows = 0 },
		"load":     func(m *mesh.Mesh) { push(m, nan) },
		"overflow": func(m *mesh.Mesh) { push(m, 1e307) },
		"start":    func(m *mesh.Mesh) { m.Pieces[0].Start = func(float64) float64 { return nan } },
		"roll":     func(m *mesh.Mesh) { m.Rolls = []mesh.Roll{{Line: 3, Force: 1}} },
		"break":    func(m *mesh.Mesh) { push(m, 1); m.Pushes[0].Force.Breaks = []float64{nan} },
		"massless": func(m *mesh.Mesh) { m.Nodes = append(m.Nodes, mesh.Node{Name: "hung", Line: -1}) },
	}
	for name, spoil := range cases {
		m := chain(0.01, 20, seg{9, 1.2, 7000, 0.3}, seg{6, 0.8, 7000, 0.1})
		watch(m, scenario.Displacement, 0, inside(1, 2))
		spoil(m)
		_, err := New().Solve(context.Background(), m, solver.Request{}, nil)
		var f *solver.FaultError
		if !errors.As(err, &f) || f.Solver != "spectral" {
			t.Errorf("%s: got %v", name, err)
		}
	}
}

// Odd but lawful meshes.
func TestOddMeshes(t *testing.T) {
	cases := map[string]func(m *mesh.Mesh){
		"one row":      func(m *mesh.Mesh) { m.Timing.Rows = 1 },
		"one row mean": func(m *mesh.Mesh) { m.Timing.Rows = 1; m.Channels[0].Means = 2 },
		"no channels":  func(m *mesh.Mesh) { m.Channels = nil },
		"no pieces": func(m *mesh.Mesh) {
			m.Pieces, m.Lines, m.Channels = nil, nil, nil
			m.Nodes = []mesh.Node{{Name: "hung", Line: -1, Mass: 2, Spring: 50, StartRate: 1}}
			watch(m, scenario.Slope, 1, atNode(0))
		},
		"free ends": func(m *mesh.Mesh) { free(m, 0); free(m, 2); m.Nodes[1].Dashpot = 3 },
		"along": func(m *mesh.Mesh) {
			m.Channels[0].Along, m.Channels[0].Means = true, 2
			m.Timing.Rows = 3000
		},
		"linked to itself": func(m *mesh.Mesh) { m.Links = []mesh.Link{{A: 1, B: 1, Spring: 1}} },
		"empty brackets":   func(m *mesh.Mesh) { m.Nodes[1].Brackets = []mesh.Maxwell{{K: 0, C: 5}, {K: 5, C: 0}} },
		"two moved": func(m *mesh.Mesh) {
			z := &mesh.Motion{Displacement: func(float64) float64 { return 0 }, Velocity: func(float64) float64 { return 0 }}
			m.Nodes[0].Motion, m.Nodes[2].Motion = z, z
		},
		"push on a support": func(m *mesh.Mesh) { m.Pushes = []mesh.Push{{At: atNode(0), Force: sine(1, 1)}} },
		"still load":        func(m *mesh.Mesh) { m.Rolls = []mesh.Roll{{Force: 5, From: 4, Starting: 0.013}} },
	}
	for name, change := range cases {
		m := chain(0.01, 20, seg{9, 1.2, 7000, 0.3}, seg{6, 0.8, 7000, 0.1})
		watch(m, scenario.Displacement, 0, inside(1, 2), atNode(0), atNode(1), inside(0, 0), inside(0, 9))
		watch(m, scenario.Force, 0, inside(1, 2), atNode(0), atNode(1))
		m.Pieces[0].Start = func(x float64) float64 { return 0.001 * math.Sin(math.Pi*x/9) }
		change(m)
		if _, err := New().Solve(context.Background(), m, solver.Request{}, nil); err != nil {
			t.Errorf("%s: %v", name, err)
		}
	}
}

// The account closes for a stay with a strong damper near its end, whose own node
// forgets its velocity within microseconds: 1e-3 chosen, 7e-5 seen.
func TestStrongDamperAccount(t *testing.T) {
	for name, change := range map[string]func(n *mesh.Node){
		"rigid":     func(n *mesh.Node) { n.Dashpot = 150000 },
		"bracketed": func(n *mesh.Node) { n.Brackets = []mesh.Maxwell{{K: 2e7, C: 150000}} },
		"soft":      func(n *mesh.Node) { n.Brackets = []mesh.Maxwell{{K: 3e5, C: 150000}} },
	} {
		m := chain(0.01, 400, seg{2.4, 75, 4.5e6, 0}, seg{117.6, 75, 4.5e6, 5})
		change(&m.Nodes[1])
		m.Jump, m.Band = 2, 15
		m.Pieces[1].Marks = []mesh.Mark{{Kind: mesh.MarkLoad, At: 40}}
		m.Pushes = []mesh.Push{{At: inside(1, 40), Force: halfSine(3000, 0.1)}}
		watch(m, scenario.Displacement, 0, inside(1, 50))
		for level := 0; level < 2; level++ {
			e := solve(t, m, level).Energy
			t.Logf("%s, level %d: gap %.2g of the most, lost %.3g", name, level, e.Unaccounted()/e.Most, e.Lost/e.Most)
			if math.Abs(e.Unaccounted()) > 1e-3*e.Most || e.Lost < 0.1*e.Most {
				t.Errorf("%s, level %d: account %+v", name, level, e)
			}
		}
	}
}
