package fronts

import (
	"math"
	"math/rand"
	"reflect"
	"testing"

	"github.com/tautspan/tautspan/engine/formula"
	"github.com/tautspan/tautspan/engine/mesh"
	"github.com/tautspan/tautspan/engine/scenario"
)

// seg is one piece of a test line.
type seg struct{ length, mass, tension, viscous float64 }

// lineOf makes a mesh of one line: nodes[i] stands before piece i.
func lineOf(end float64, nodes []mesh.Node, segs ...seg) *mesh.Mesh {
	m := &mesh.Mesh{Nodes: nodes, Timing: mesh.Timing{Every: end / 1000, Rows: 1001}}
	l := mesh.Line{Name: "l"}
	for i, s := range segs {
		m.Pieces = append(m.Pieces, mesh.Piece{
			Segment: i, From: i, To: i + 1, X0: l.Length, Length: s.length, MassPerLength: s.mass, Tension: s.tension, Viscous: s.viscous,
		})
		l.Pieces = append(l.Pieces, i)
		l.Length += s.length
	}
	m.Lines = []mesh.Line{l}
	for i := range m.Nodes {
		if m.Nodes[i].Name == "" {
			m.Nodes[i].Name = "line.l." + string(rune('a'+i))
		}
	}
	return m
}

func watchAt(m *mesh.Mesh, name string, spot mesh.Spot) {
	m.Channels = append(m.Channels, mesh.Channel{Watch: name, Quantity: scenario.Displacement, Spots: []mesh.Spot{spot}, X: []float64{0}})
}

func in(piece int, at float64) mesh.Spot { return mesh.Spot{Node: -1, Piece: piece, At: at} }
func on(node int) mesh.Spot              { return mesh.Spot{Node: node, Piece: -1} }

func num(v float64) formula.Program { return formula.Const(v) }

func halfSine(peak, d float64) scenario.History {
	return scenario.History{Value: formula.Apply(formula.OpHalfSine, formula.Arg(formula.ArgT), num(peak), num(d)), Breaks: []float64{0, d}}
}

func stepAt(value, t float64) scenario.History {
	return scenario.History{Value: formula.Apply(formula.OpStep, formula.Arg(formula.ArgT), num(value), num(t)), Breaks: []float64{t}}
}

func trace1(t *testing.T, m *mesh.Mesh, opt Options) *Ledger {
	t.Helper()
	l, err := Trace(m, opt)
	if err != nil {
		t.Fatal(err)
	}
	for _, a := range l.Accounts {
		if math.Abs(a.Gap()) > 1e-12*a.Input {
			t.Errorf("account of %s %s: gap %g of %g", a.Excite, a.Quantity, a.Gap(), a.Input)
		}
	}
	return l
}

func near(t *testing.T, what string, got, want, tol float64) {
	t.Helper()
	if !(math.Abs(got-want) <= tol) {
		t.Errorf("%s: got %.15g, want %.15g within %g", what, got, want, tol)
	}
}

// knockLine is the line of C05-06.
func knockLine() *mesh.Mesh {
	const c = 149.637
	m := lineOf(4, []mesh.Node{{Fixed: true, Support: true}, {Fixed: true, Support: true}}, seg{160.5, 18.4, 18.4 * c * c, 0})
	m.Pushes = []mesh.Push{{Name: "k", At: in(0, 12), Force: halfSine(300, 0.005)}}
	watchAt(m, "q", in(0, 80.25))
	return m
}

// Source: Graff (1975) Wave Motion in Elastic Solids, ch. 1 (from memory); path
// lengths direct, near end, far end, both. Check case C05-06. Times hold to the
// 15 digits given: tolerance 1e-12 relative.
func TestKnockLedger(t *testing.T) {
	m := knockLine()
	l := trace1(t, m, Options{})
	want := []struct {
		time float64
		sign int
		path []string
	}{
		{0.456103771126125, 1, []string{"k", "q"}},
		{0.616491910423224, -1, []string{"k", "a", "q"}},
		{1.52869945267547, -1, []string{"k", "b", "q"}},
		{1.68908759197257, 1, []string{"k", "a", "b", "q"}},
	}
	// J of a half sine is 2 peak d / pi; the step is J/(2Z).
	step := 2 * 300 * 0.005 / math.Pi / (2 * 18.4 * 149.637)
	for i, w := range want {
		a := l.Arrivals[i]
		near(t, "time", a.Time, w.time, 1e-12*w.time*2)
		near(t, "amplitude", a.Amplitude, float64(w.sign)*step, 1e-12*step)
		if a.Number != i+1 || a.Sign != w.sign || !reflect.DeepEqual(a.Path, w.path) || a.Watch != "q" || a.Excite != "k" || a.Quantity != "displacement" || a.Unit != "m" || a.Smeared || a.Merged != 1 {
			t.Errorf("arrival %d: %+v", i+1, a)
		}
	}
	if l.ReachedTime != 4 || l.LostAmplitude != 0 {
		t.Errorf("reached %g, lost %g", l.ReachedTime, l.LostAmplitude)
	}
	if a, ok := l.At("q", 3, 0.01); !ok || a.Number != 3 {
		t.Errorf("third arrival %+v %v", a, ok)
	}
}

// scattered sends a unit displacement step from a knock in the first piece
// towards node 1 and returns what comes back and what passes.
func scattered(t *testing.T, joint mesh.Node, segs ...seg) (back, passed float64) {
	t.Helper()
	nodes := []mesh.Node{{Dashpot: math.Sqrt(segs[0].tension * segs[0].mass), Absorbing: true}, joint}
	if len(segs) > 1 {
		nodes = append(nodes, mesh.Node{Dashpot: math.Sqrt(segs[1].tension * segs[1].mass), Absorbing: true})
	}
	m := lineOf(10, nodes, segs...)
	z := math.Sqrt(segs[0].tension * segs[0].mass)
	d := 1e-3
	m.Pushes = []mesh.Push{{Name: "k", At: in(0, 20), Force: halfSine(2*z*math.Pi/(2*d), d)}}
	watchAt(m, "before", in(0, 10))
	watchAt(m, "after", in(len(segs)-1, segs[len(segs)-1].length/2))
	l := trace1(t, m, Options{})
	n := 0
	for _, a := range l.Arrivals {
		if a.Watch == "before" {
			if n++; n == 2 {
				back = a.Amplitude
			}
		} else if len(segs) > 1 {
			passed += a.Amplitude
		}
	}
	return back, passed
}

// Check cases C04-03, C04-04, C04-08, C04-09: Graff (1975) ch. 1; Kinsler and
// co-workers (2000) ch. 2 (from memory). The input is a unit step made by
// quadrature of a half sine, exact to rounding: tolerance 1e-12.
func TestInstantScattering(t *testing.T) {
	light, heavy := seg{100, 1, 10000, 0}, seg{100, 4, 10000, 0}
	cases := []struct {
		name    string
		joint   mesh.Node
		segs    []seg
		back, p float64
	}{
		{"C04-03 light to heavy", mesh.Node{}, []seg{light, heavy}, -1.0 / 3, 2.0 / 3},
		{"C04-04 heavy to light", mesh.Node{}, []seg{heavy, light}, 1.0 / 3, 4.0 / 3},
		{"C04-08 dashpot 2Z", mesh.Node{Dashpot: 200}, []seg{light, light}, -0.5, 0.5},
		{"C04-09 end C = Z", mesh.Node{Dashpot: 100}, []seg{light}, 0, 0},
		{"C04-09 end C = 3Z", mesh.Node{Dashpot: 300}, []seg{light}, -0.5, 0},
		{"C04-09 end C = Z/3", mesh.Node{Dashpot: 100.0 / 3}, []seg{light}, 0.5, 0},
		{"free end", mesh.Node{}, []seg{light}, 1, 0},
		{"held end", mesh.Node{Fixed: true}, []seg{light}, -1, 0},
	}
	for _, c := range cases {
		back, passed := scattered(t, c.joint, c.segs...)
		near(t, c.name+" reflected", back, c.back, 1e-12)
		near(t, c.name+" passed", passed, c.p, 1e-12)
	}
}

// Check case C07-03: Courant and Hilbert (1962) vol. II (from memory):
// exp(-d x/2Z), here after 100, 400, 2000 m. Exact: 1e-13.
func TestViscousLossOfAFront(t *testing.T) {
	m := lineOf(30, []mesh.Node{{Fixed: true}, {Fixed: true}}, seg{3000, 1, 10000, 0.5})
	d := 1e-3
	m.Pushes = []mesh.Push{{Name: "k", At: in(0, 500), Force: halfSine(2*100*math.Pi/(2*d), d)}}
	for _, x := range []float64{100, 400, 2000} {
		watchAt(m, "w", in(0, 500+x))
		m.Channels[len(m.Channels)-1].Watch = map[float64]string{100: "w100", 400: "w400", 2000: "w2000"}[x]
	}
	l := trace1(t, m, Options{})
	want := map[string]float64{"w100": 0.778800783071405, "w400": 0.367879441171442, "w2000": 0.00673794699908547}
	for w, v := range want {
		a, ok := l.At(w, 1, 0)
		if !ok {
			t.Fatalf("nothing at %s", w)
		}
		near(t, w, a.Amplitude, v, 1e-13)
	}
}

// Check case C04-06: Graff (1975) ch. 1 (from memory): M v' + 2Z v = 2Z v_in.
// The response is a matrix exponential: 1e-12.
func TestMassNodeStepResponse(t *testing.T) {
	T, mass, M := 20000.0, 1.35, 2.0
	z := math.Sqrt(T * mass)
	l := newLaw(1)
	l.mass[0] = M
	l.resistance[0][0] = 2 * z
	if err := l.solve(); err != nil {
		t.Fatal(err)
	}
	for tm, want := range map[float64]float64{0.002: 0.280093210588363, 0.005: 0.560265364989385, 0.02: 0.962609377639687} {
		v, u := l.after(tm)
		near(t, "mass velocity", 2*z*v[0][0], want, 1e-12)
		// u is the integral of v: t - T_M (1 - e^{-t/T_M}) for unit v_in.
		tc := M / (2 * z)
		near(t, "mass displacement", 2*z*u[0][0], tm-tc*(1-math.Exp(-tm/tc)), 1e-14)
	}
}

// massLine has the mass of C04-06 between two long absorbing pieces.
func massLine(joint mesh.Node) *mesh.Mesh {
	T, mass := 20000.0, 1.35
	z := math.Sqrt(T * mass)
	m := lineOf(2, []mesh.Node{{Dashpot: z, Absorbing: true}, joint, {Dashpot: z, Absorbing: true}}, seg{100, mass, T, 0}, seg{100, mass, T, 0})
	m.Pushes = []mesh.Push{{Name: "on", At: in(0, 40), Force: stepAt(2*z, 0)}} // unit velocity
	watchAt(m, "before", in(0, 10))
	watchAt(m, "at", on(1))
	watchAt(m, "after", in(1, 60))
	return m
}

// A unit velocity step at the mass: nothing passes at once, in the end all does;
// the reflected wave begins at -1 and dies out as e^{-t/T}, T = M/2Z, of which
// the window's end keeps a little.
func TestMassNodeSmears(t *testing.T) {
	m := massLine(mesh.Node{Mass: 2})
	m.Timing.Every = 0
	m.Timing.Rows = 1
	l := trace1(t, m, Options{End: 2})
	tail := math.Exp(-l.Window * math.Sqrt(20000*1.35))
	if tail > 1e-5 {
		t.Errorf("a window of %g s", l.Window)
	}
	for _, w := range []string{"at", "after"} {
		a, _ := l.At(w, 1, 0)
		if !a.Smeared || a.Onset != 0 || a.Quantity != "velocity" {
			t.Errorf("%s: %+v", w, a)
		}
		near(t, w+" settled", a.Settled, 1-tail, 1e-10)
		near(t, w+" amplitude", a.Amplitude, 1-tail, 1e-10)
	}
	a, _ := l.At("before", 2, 0)
	near(t, "reflected onset", a.Onset, -1, 1e-14)
	near(t, "reflected settled", a.Settled, -tail, 1e-10)
	near(t, "reflected peak", a.Amplitude, -1, 1e-14)
	near(t, "reflected peak time", a.PeakAfter, 0, 0)
	near(t, "time", a.Time, (60.0+90)/math.Sqrt(20000/1.35), 1e-12)
	if !reflect.DeepEqual(a.Path, []string{"on", "b", "before"}) {
		t.Errorf("path %v", a.Path)
	}
}

// With a blur the amplitude is what a record shows: the largest mean over the
// blur B, for the reflected wave -e^{-t/T} the first, -(T/B)(1 - e^{-B/T}). The
// shape is straight between times spaced by less than a factor 1.3: 1 % (seen 0.2 %).
func TestBlurredPeak(t *testing.T) {
	m := massLine(mesh.Node{Mass: 2})
	m.Timing = mesh.Timing{Every: 0.002, Rows: 1001}
	l := trace1(t, m, Options{})
	tc := 2 / (2 * math.Sqrt(20000*1.35))
	a, _ := l.At("before", 2, 0)
	near(t, "blur", l.Blur, 0.002, 0)
	near(t, "blurred", a.Amplitude, -tc/0.002*(1-math.Exp(-0.002/tc)), 0.01)
}

// Two masses in a row: the second sees what the first passed on. The passed
// velocity is the step response of two equal first-order lags with reflections
// between them still to come: 1 - e^{-x}(1 + x), x = t/T, here at the window's end,
// where 1e-8 is left.
func TestTwoMassesInARow(t *testing.T) {
	m := massLine(mesh.Node{Mass: 2})
	z := m.Nodes[0].Dashpot
	m.Nodes[2] = mesh.Node{Name: "line.l.c", Mass: 2}
	m.Nodes = append(m.Nodes, mesh.Node{Name: "line.l.d", Dashpot: z, Absorbing: true})
	m.Pieces = append(m.Pieces, mesh.Piece{Segment: 2, From: 2, To: 3, X0: 200, Length: 100, MassPerLength: 1.35, Tension: 20000})
	m.Lines[0].Pieces = append(m.Lines[0].Pieces, 2)
	watchAt(m, "far", in(2, 50))
	l := trace1(t, m, Options{})
	a, _ := l.At("far", 1, 0)
	near(t, "far onset", a.Onset, 0, 0)
	near(t, "far settled", a.Settled, 1, 1e-6)
	if !reflect.DeepEqual(a.Path, []string{"on", "b", "c", "far"}) {
		t.Errorf("path %v", a.Path)
	}
}

// A spring end answers a velocity step at once like a free end and in the end
// like a held one: r = 1 - 2(1 - e^{-Kt/Z}). A bracketed dashpot goes from
// nothing to r = -C/(C+2Z).
func TestSpringAndBracket(t *testing.T) {
	z := math.Sqrt(20000 * 1.35)
	m := massLine(mesh.Node{Spring: 4e5})
	m.Nodes, m.Pieces = m.Nodes[:2], m.Pieces[:1]
	m.Lines[0].Pieces = m.Lines[0].Pieces[:1]
	m.Channels = m.Channels[:1]
	l := trace1(t, m, Options{})
	a, _ := l.At("before", 2, 0)
	near(t, "spring end at once", a.Onset, 1, 1e-12)
	near(t, "spring end settled", a.Settled, -1, 1e-8)
	if a.Sign != -1 {
		t.Errorf("a stiff end must turn the front: %+v", a) // Z/K = 0.4 ms against Every = 2 ms
	}
	m = massLine(mesh.Node{Brackets: []mesh.Maxwell{{K: 4e5, C: 2 * z}}})
	l = trace1(t, m, Options{})
	a, _ = l.At("before", 2, 0)
	near(t, "bracket at once", a.Onset, 0, 1e-12)
	near(t, "bracket settled", a.Settled, -0.5, 1e-8)
	a, _ = l.At("after", 1, 0)
	near(t, "past a bracket", a.Settled, 1-0.5, 1e-8)
}

// A tie of a dashpot alone passes fronts at once. Two equal lines joined by a
// dashpot c: with R = 2Z, v_A + v_B = w/R, v_A - v_B = w/(R + 2c).
func TestTieByADashpot(t *testing.T) {
	z, c := 100.0, 70.0
	m := lineOf(1.5, []mesh.Node{{Fixed: true}, {}, {Fixed: true}}, seg{100, 1, 10000, 0}, seg{100, 1, 10000, 0})
	for i := 0; i < 3; i++ {
		m.Nodes = append(m.Nodes, mesh.Node{Name: "line.k." + string(rune('a'+i)), Line: 1, Fixed: i != 1})
	}
	for i := 3; i < 5; i++ {
		m.Pieces = append(m.Pieces, mesh.Piece{Line: 1, Segment: i - 3, From: i, To: i + 1, Length: 100, MassPerLength: 1, Tension: 10000})
	}
	m.Lines = append(m.Lines, mesh.Line{Name: "k", Pieces: []int{2, 3}})
	m.Links = []mesh.Link{{Name: "tie.x", A: 1, B: 4, Dashpot: c}}
	m.Pushes = []mesh.Push{{Name: "on", At: in(0, 40), Force: stepAt(2*z, 0)}}
	watchAt(m, "here", in(1, 20))
	watchAt(m, "there", in(3, 20))
	l := trace1(t, m, Options{})
	sum, diff := 2*z/(2*z), 2*z/(2*z+2*c)
	a, _ := l.At("here", 1, 0)
	near(t, "here", a.Amplitude, (sum+diff)/2, 1e-12)
	a, _ = l.At("there", 1, 0)
	near(t, "there", a.Amplitude, (sum-diff)/2, 1e-12)
	if a.Smeared || !reflect.DeepEqual(a.Path, []string{"on", "k.b", "there"}) {
		t.Errorf("%+v", a)
	}
	// With a spring beside it the fronts smear but the difference settles to 0:
	// both lines move as one in the end.
	m.Links[0].Spring = 5e3
	l = trace1(t, m, Options{})
	a, _ = l.At("there", 1, 0)
	near(t, "there at once", a.Onset, (sum-diff)/2, 1e-12)
	near(t, "there settled", a.Settled, 0.5, 1e-6)
	if !a.Smeared {
		t.Errorf("%+v", a)
	}
}

func randomLine(r *rand.Rand, n int, end float64) *mesh.Mesh {
	nodes := make([]mesh.Node, n+1)
	segs := make([]seg, n)
	for i := range segs {
		segs[i] = seg{2 + 8*r.Float64(), 0.5 + 3*r.Float64(), 1000 * (1 + r.Float64()), 0}
	}
	nodes[0].Fixed = r.Intn(2) == 0
	nodes[n].Fixed = r.Intn(2) == 0
	m := lineOf(end, nodes, segs...)
	m.Pushes = []mesh.Push{{Name: "on", At: in(0, segs[0].length*r.Float64()), Force: stepAt(100, 0)}}
	watchAt(m, "w", in(n-1, segs[n-1].length*r.Float64()))
	return m
}

// Lossless networks keep all energy of their fronts: what is lost to pruning
// plus what travels is the input, to 1e-12 (the sum of 1e4 terms of rounding
// 1e-16 each). trace1 holds it.
func TestEnergyCloses(t *testing.T) {
	r := rand.New(rand.NewSource(3))
	for n := 1; n <= 6; n++ {
		for k := 0; k < 5; k++ {
			m := randomLine(r, n, 3)
			l := trace1(t, m, Options{Prune: []float64{0, 1e-3}[k%2], Most: 10000})
			a := l.Accounts[0]
			if a.Absorbed != 0 || a.Damped != 0 || a.Travelling <= 0 {
				t.Errorf("%+v", a)
			}
			near(t, "lossless closure", a.Travelling+a.Lost, a.Input, 1e-12*a.Input)
			// With masses, springs, dashpots, loss and links the edges close too.
			for i := range m.Nodes {
				m.Nodes[i].Mass, m.Nodes[i].Spring, m.Nodes[i].Dashpot = float64(r.Intn(2)), 500*float64(r.Intn(2)), 40*r.Float64()
			}
			for i := range m.Pieces {
				m.Pieces[i].Viscous = r.Float64()
			}
			trace1(t, m, Options{Prune: 1e-3, Most: 2000})
		}
	}
}

// Two fronts that meet at a dashpot from both sides at one instant scatter as
// one: with a = 1 from either side, v = 4Z/(2Z+C). Taking each by itself would
// absorb 2 C (2Z/(2Z+C))^2 instead of C v^2, half of it.
func TestMetFromTwoSides(t *testing.T) {
	z, c := 100.0, 200.0
	m := lineOf(0.9, []mesh.Node{{Dashpot: z}, {Dashpot: c}, {Dashpot: z}}, seg{100, 1, 10000, 0}, seg{100, 1, 10000, 0})
	watchAt(m, "at", on(1))
	m.Presses = []mesh.Press{{Name: "both", Force: stepAt(1, 0), Parts: []mesh.Part{{Piece: 0, From: 50, To: 100}, {Piece: 1, From: 0, To: 50, Origin: 100}}}}
	l := trace1(t, m, Options{})
	// The stretch of 100 m about the dashpot is pushed by 1 N/m on 1 kg/m: its
	// edges send -1/2 inwards, which meet at the dashpot 0.5 s later.
	var at *Arrival
	for i := range l.Arrivals {
		if math.Abs(l.Arrivals[i].Time-0.5) < 1e-12 {
			at = &l.Arrivals[i]
		}
	}
	if at == nil || at.Merged != 2 {
		t.Fatalf("arrivals %+v", l.Arrivals)
	}
	v := -0.5 * 4 * z / (2*z + c)
	near(t, "met", at.Amplitude, v, 1e-13)
	// The two outward waves of 1/2 end in the absorbing ends.
	near(t, "absorbed", l.Accounts[0].Absorbed, c*v*v+2*z*0.5*0.5, 1e-10)
}

// Commensurate lossless segments: with travel times of 1, 2 and 3 s fronts meet at
// whole seconds only, so that there are at most four meetings a second.
func TestCommensurateStaysLinear(t *testing.T) {
	for _, end := range []float64{100, 400} {
		m := lineOf(end, []mesh.Node{{Fixed: true}, {}, {}, {Fixed: true}}, seg{100, 1, 10000, 0}, seg{100, 4, 10000, 0}, seg{300, 1, 10000, 0})
		m.Pushes = []mesh.Push{{Name: "k", At: on(1), Force: stepAt(1, 0)}}
		watchAt(m, "w", on(2))
		l := trace1(t, m, Options{})
		if l.ReachedTime != end || float64(l.Meetings) > 4*end {
			t.Errorf("%d meetings to %g s", l.Meetings, l.ReachedTime)
		}
	}
}

// Incommensurate lossless segments grow as t^3; the limit holds, and says where.
func TestLimitHolds(t *testing.T) {
	m := lineOf(1e4, []mesh.Node{{Fixed: true}, {}, {}, {Fixed: true}}, seg{100, 1, 10000, 0}, seg{100 * math.Sqrt2, 4, 10000, 0}, seg{100 * math.Pi, 2, 10000, 0})
	m.Pushes = []mesh.Push{{Name: "k", At: on(1), Force: stepAt(1, 0)}}
	watchAt(m, "w", in(2, 10))
	l := trace1(t, m, Options{Most: 5000})
	if l.Meetings != 5000 || l.ReachedTime >= 1e4 || l.ReachedTime <= 0 || len(l.Notes) == 0 {
		t.Errorf("%d meetings, reached %g, %v", l.Meetings, l.ReachedTime, l.Notes)
	}
	for _, a := range l.Arrivals {
		if a.Time > l.ReachedTime {
			t.Fatalf("arrival at %g after %g", a.Time, l.ReachedTime)
		}
		if len(a.Path) > pathHead+pathTail+1 {
			t.Fatalf("path of %d words", len(a.Path))
		}
	}
	if again := trace1(t, m, Options{Most: 5000}); !reflect.DeepEqual(again, l) {
		t.Error("a second trace of the same mesh differs")
	}
}

// Check case C05-01: Morse (1948), Rayleigh (1894) ch. VI (from memory): the
// pluck by d'Alembert. Its velocity steps, summed and integrated twice over
// nothing but time, give the displacement. The kink is measured by differences:
// 1e-9 of the height.
func TestPluckAgainstDAlembert(t *testing.T) {
	L, a, h, c := 1.2, 0.3, 0.005, 200.0
	m := lineOf(0.02, []mesh.Node{{Fixed: true}, {Fixed: true}}, seg{L, 0.002, 0.002 * c * c, 0})
	p := &m.Pieces[0]
	p.Start = func(s float64) float64 {
		if s <= a {
			return h * s / a
		}
		return h * (L - s) / (L - a)
	}
	p.Marks = []mesh.Mark{{Kind: mesh.MarkKink, At: a}}
	places := map[string]float64{"x0.6": 0.6, "x0.3": 0.3, "x0.9": 0.9, "x1.0": 1.0}
	for n, x := range places {
		watchAt(m, n, in(0, x))
	}
	l := trace1(t, m, Options{StartName: "snap"})
	for _, k := range []struct {
		watch   string
		t, want float64
	}{
		{"x0.6", 0, 0.00333333333333333}, {"x0.6", 0.001, 0.00333333333333333}, {"x0.3", 0.0025, -0.000555555555555556},
		{"x0.9", 0.004, -0.000555555555555556}, {"x0.6", 0.006, -0.00333333333333333}, {"x1.0", 0.0105, 0.00111111111111111}, {"x0.3", 0.012, 0.005},
	} {
		y := p.Start(places[k.watch])
		for _, ar := range l.Arrivals {
			if ar.Watch == k.watch && ar.Time <= k.t {
				y += ar.Amplitude * (k.t - ar.Time)
			}
		}
		near(t, k.watch, y, k.want, 1e-9*h)
	}
	if a := l.Arrivals[0]; a.Excite != "snap" || a.Quantity != "velocity" {
		t.Errorf("%+v", a)
	}
	// Without the mark the kink is found by looking.
	p.Marks = nil
	found := trace1(t, m, Options{StartName: "snap"})
	if len(found.Arrivals) != len(l.Arrivals) {
		t.Fatalf("%d arrivals by looking, %d by the mark", len(found.Arrivals), len(l.Arrivals))
	}
	for i := range l.Arrivals {
		near(t, "time", found.Arrivals[i].Time, l.Arrivals[i].Time, 1e-8*L/c)
		near(t, "amplitude", found.Arrivals[i].Amplitude, l.Arrivals[i].Amplitude, 1e-6*math.Abs(l.Arrivals[i].Amplitude))
	}
}
