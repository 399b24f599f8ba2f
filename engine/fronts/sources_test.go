package fronts

import (
	"math"
	"reflect"
	"strings"
	"testing"

	"github.com/tautspan/tautspan/engine/formula"
	"github.com/tautspan/tautspan/engine/mesh"
	"github.com/tautspan/tautspan/engine/scenario"
)

// ramped sums the arrivals of a watch as steps of the velocity and of the
// acceleration: the displacement change that they make by time t.
func ramped(l *Ledger, watch string, t float64) float64 {
	u := 0.0
	for _, a := range l.Arrivals {
		if a.Watch != watch || a.Time > t {
			continue
		}
		switch a.Quantity {
		case "displacement":
			u += a.Amplitude
		case "velocity":
			u += a.Amplitude * (t - a.Time)
		case "acceleration":
			u += a.Amplitude * (t - a.Time) * (t - a.Time) / 2
		}
	}
	return u
}

// Check case C05-02: Morse (1948) ch. III (from memory): a struck string. The
// edges of the stretch are found by looking, to about 1e-9 of the piece.
func TestStruckString(t *testing.T) {
	c := 120.0
	m := lineOf(0.04, []mesh.Node{{Fixed: true}, {Fixed: true}}, seg{2, 1, c * c, 0})
	m.Pieces[0].StartRate = func(s float64) float64 {
		if s > 0.4 && s < 0.6 {
			return 1.5
		}
		return 0
	}
	cases := []struct {
		watch string
		x     float64
		t     float64
		want  float64
	}{
		{"x0.5a", 0.5, 0.0005, 0.00075}, {"x0.5b", 0.5, 0.001, 0.00125}, {"x1.2", 1.2, 0.006, 0.00075},
		{"x1.5", 1.5, 0.02, -0.00125}, {"x0.3", 0.3, 0.031, -0.001125},
	}
	for _, k := range cases {
		watchAt(m, k.watch, in(0, k.x))
	}
	l := trace1(t, m, Options{})
	for _, k := range cases {
		near(t, k.watch, m.Pieces[0].StartRate(k.x)*k.t+ramped(l, k.watch, k.t), k.want, 1e-8*1.5/c)
	}
}

// A hump released on an endless line, check case C05-03: Rayleigh (1894) ch. VI
// (from memory). Three kinks, found by looking.
func TestReleasedHump(t *testing.T) {
	c := 50.0
	m := lineOf(0.2, []mesh.Node{{Dashpot: c, Absorbing: true}, {Dashpot: c, Absorbing: true}}, seg{40, 1, c * c, 0})
	m.Pieces[0].Start = func(s float64) float64 { return math.Max(0, 0.1*(1-math.Abs(s-20)/2)) }
	for _, k := range []struct{ x, t, want float64 }{{0, 0, 0.1}, {0, 0.02, 0.05}, {1, 0.02, 0.05}, {2.5, 0.05, 0.05}, {3, 0.1, 0}} {
		m.Channels = nil
		watchAt(m, "w", in(0, 20+k.x))
		l := trace1(t, m, Options{})
		near(t, "hump", m.Pieces[0].Start(20+k.x)+ramped(l, "w", k.t), k.want, 1e-7*0.1)
	}
}

// A stretch displaced by itself: both edges send half the step each way.
func TestStartDisplacementJump(t *testing.T) {
	m := lineOf(1, []mesh.Node{{Dashpot: 100}, {Dashpot: 100}}, seg{100, 1, 10000, 0})
	m.Pieces[0].Start = func(s float64) float64 {
		if s > 40 && s < 60 {
			return 0.02
		}
		return 0
	}
	watchAt(m, "w", in(0, 90))
	l := trace1(t, m, Options{})
	if len(l.Arrivals) != 2 {
		t.Fatalf("%+v", l.Arrivals)
	}
	for i, want := range []struct{ t, a float64 }{{0.3, 0.01}, {0.5, -0.01}} {
		near(t, "time", l.Arrivals[i].Time, want.t, 1e-8)
		near(t, "step", l.Arrivals[i].Amplitude, want.a, 1e-10)
	}
}

// A smooth bell has nothing to list: no nonsense, but a note. The bell of check
// case C05-04, which travels, likewise.
func TestSmoothStartHasNoFront(t *testing.T) {
	c, A, w := 100.0, 0.01, 0.5
	m := lineOf(0.2, []mesh.Node{{Fixed: true}, {Fixed: true}}, seg{20, 0.5, 0.5 * c * c, 0})
	g := func(s float64) float64 { return A * math.Exp(-(s-5)*(s-5)/(2*w*w)) }
	m.Pieces[0].Start = g
	watchAt(m, "q", in(0, 18))
	for _, travels := range []bool{false, true} {
		if travels {
			m.Pieces[0].StartRate = func(s float64) float64 { return c * (s - 5) / (w * w) * g(s) }
		}
		l := trace1(t, m, Options{})
		if len(l.Arrivals) != 0 || len(l.Notes) != 1 || !strings.Contains(l.Notes[0], "no jump") {
			t.Errorf("%+v %q", l.Arrivals, l.Notes)
		}
	}
}

// A narrow bell far from everything, and one across a step of impedance, where
// c^2 u" jumps and an acceleration front is due each way.
func TestNarrowBell(t *testing.T) {
	m := lineOf(2, []mesh.Node{{Fixed: true}, {}, {}}, seg{100, 1, 10000, 0}, seg{50, 4, 10000, 0})
	bell := func(s float64) float64 { return 0.01 * math.Exp(-(s-30)*(s-30)/(2*0.3*0.3)) }
	m.Pieces[0].Start = bell
	m.Pieces[1].Start = func(s float64) float64 { return bell(100 + s) }
	watchAt(m, "w", in(1, 20))
	if l := trace1(t, m, Options{}); len(l.Arrivals) != 0 || len(l.Notes) != 1 {
		t.Errorf("%+v %q", l.Arrivals, l.Notes)
	}
	wide := func(s float64) float64 { return 0.01 * math.Exp(-(s-100)*(s-100)/(2*9)) }
	m.Pieces[0].Start = wide
	m.Pieces[1].Start = func(s float64) float64 { return wide(100 + s) }
	m.Nodes[1].Start = 0.01
	l := trace1(t, m, Options{})
	// c^2 u" = -c^2 0.01/9: P1 = -11.1, P2 = -2.78 m/s^2; A = (Z1 P1 + Z2 P2)/(Z1 + Z2).
	p1, p2 := -1e4*0.01/9, -2500*0.01/9
	near(t, "jump of acceleration", l.Arrivals[0].Amplitude, (100*p1+200*p2)/300-p2, 1e-4)
	near(t, "time", l.Arrivals[0].Time, 20/50.0, 1e-12)
}

// A line that starts as a straight slope s to a free end: the end is out of
// balance by T s at once and sets off with -c s (momentum balance at the end).
// A mass there takes M/Z to do so; a spring that carries the slope is in balance.
func TestStartOutOfBalance(t *testing.T) {
	const slope = 0.01
	end := func(n mesh.Node) *Ledger {
		n.Start = slope * 100
		m := lineOf(1.5, []mesh.Node{{Fixed: true}, n}, seg{100, 1, 10000, 0})
		m.Pieces[0].Start = func(s float64) float64 { return slope * s }
		m.Timing = mesh.Timing{}
		watchAt(m, "w", in(0, 50))
		return trace1(t, m, Options{End: 1.5})
	}
	l := end(mesh.Node{})
	near(t, "time", l.Arrivals[0].Time, 0.5, 1e-15)
	near(t, "velocity", l.Arrivals[0].Amplitude, -100*slope, 1e-9)
	if want := []string{"start", "w"}; !reflect.DeepEqual(l.Arrivals[0].Path, want) || len(l.Arrivals) != 2 {
		t.Errorf("%+v", l.Arrivals)
	}
	l = end(mesh.Node{Mass: 2})
	near(t, "mass at once", l.Arrivals[0].Onset, 0, 0)
	near(t, "mass settled", l.Arrivals[0].Settled, -100*slope, 1e-8)
	// A hat whose falling side of slope -0.004 ends 0.3 m up on a spring of
	// 10000 * 0.004 / 0.3 N/m: only the kink in the middle sets off.
	m := lineOf(0.9, []mesh.Node{{Fixed: true}, {Spring: 10000 * 0.004 / 0.3, Start: 0.3}}, seg{100, 1, 10000, 0})
	m.Pieces[0].Start = func(s float64) float64 { return math.Min(0.01*s, 0.5-0.004*(s-50)) }
	m.Pieces[0].Marks = []mesh.Mark{{Kind: mesh.MarkKink, At: 50}}
	watchAt(m, "w", in(0, 50))
	if l = trace1(t, m, Options{}); len(l.Arrivals) != 1 || l.Arrivals[0].Time != 0 {
		t.Errorf("a balanced spring end: %+v", l.Arrivals)
	}
	near(t, "kink", l.Arrivals[0].Amplitude, -100*0.014/2, 1e-9)
}

// A line pressed all along, p = 2 N/m on 1 kg/m from 0.1 s on: its middle is
// accelerated by 2 until the fronts of both held ends come at 0.6 s, then by -2
// until they come again at 1.6 s, and so on: u_tt = (P(x+ct) + P(x-ct))/2 with P
// continued oddly beyond the ends (d'Alembert).
func TestPressAllAlong(t *testing.T) {
	m := lineOf(1.9, []mesh.Node{{Fixed: true}, {Fixed: true}}, seg{100, 1, 10000, 0})
	m.Presses = []mesh.Press{{Name: "wind", Force: stepAt(2, 0.1), Parts: []mesh.Part{{Piece: 0, From: 0, To: 100}}}}
	watchAt(m, "mid", in(0, 50))
	l := trace1(t, m, Options{})
	want := []struct{ t, a float64 }{{0.6, -4}, {1.6, 4}}
	if len(l.Arrivals) != 2 {
		t.Fatalf("%+v", l.Arrivals)
	}
	for i, w := range want {
		a := l.Arrivals[i]
		near(t, "time", a.Time, w.t, 1e-12)
		near(t, "amplitude", a.Amplitude, w.a, 1e-11)
		if a.Merged != 2 || a.Quantity != "acceleration" {
			t.Errorf("%+v", a)
		}
	}
	// As a short press of 2 ms it kicks: the velocity J/m, J = 2 * 2e-3 * 2/pi,
	// likewise turns to its opposite.
	m.Presses[0].Force = halfSine(2, 0.002)
	l = trace1(t, m, Options{})
	near(t, "kick", l.Arrivals[0].Amplitude, -2*2*0.002*2/math.Pi, 1e-14)
	near(t, "time", l.Arrivals[0].Time, 0.5, 1e-12)
	if l.Arrivals[0].Quantity != "velocity" {
		t.Errorf("%+v", l.Arrivals[0])
	}
	// Across a step of impedance the node is where the two motions meet: the
	// fronts keep both sides together, P1 + b1 = P2 + b2.
	m = lineOf(0.2, []mesh.Node{{Fixed: true}, {}, {Fixed: true}}, seg{100, 1, 10000, 0}, seg{100, 4, 10000, 0})
	m.Presses = []mesh.Press{{Name: "wind", Force: stepAt(2, 0), Parts: []mesh.Part{{Piece: 0, To: 100}, {Piece: 1, To: 100, Origin: 100}}}}
	watchAt(m, "left", in(0, 95))
	watchAt(m, "right", in(1, 5))
	l = trace1(t, m, Options{})
	a, _ := l.At("left", 1, 0)
	b, _ := l.At("right", 1, 0)
	near(t, "both sides alike", 2/1.0+a.Amplitude, 2/4.0+b.Amplitude, 1e-12)
	near(t, "no net force", 100*a.Amplitude+200*b.Amplitude, 0, 1e-12)
}

// rolled is the displacement under a constant force that rolls along a held line:
// c F/(2T) times the time for which |x - x_image(t')| < c (t - t'), odd images
// (Fryba, Vibration of Solids and Structures under Moving Loads, from memory;
// check case C13-03 is of this form).
func rolled(L, T, mass, F, V, x, t float64) float64 {
	c := math.Sqrt(T / mass)
	sum := 0.0
	for n := -8; n <= 8; n++ {
		for _, sign := range []float64{1, -1} {
			seen := func(tp float64) bool { return math.Abs(x-2*float64(n)*L-sign*V*tp) < c*(t-tp) }
			if !seen(0) {
				continue
			}
			lo, hi := 0.0, math.Min(t, L/V)
			if seen(hi) {
				sum += sign * hi
				continue
			}
			for k := 0; k < 80; k++ {
				if mid := (lo + hi) / 2; seen(mid) {
					lo = mid
				} else {
					hi = mid
				}
			}
			sum += sign * lo
		}
	}
	return c * F / (2 * T) * sum
}

// The fronts of a rolling load, with the change of velocity as the load itself
// passes the watch (behind less ahead), give its displacement before, during and
// after the run. Bisection: 1e-12 of F L/T.
func TestRollingLoad(t *testing.T) {
	L, T, mass, F, V := 60.0, 20000.0, 1.35, -500.0, 70.0
	m := lineOf(2, []mesh.Node{{Fixed: true}, {Fixed: true}}, seg{L, mass, T, 0})
	m.Rolls = []mesh.Roll{{Name: "car", Speed: V, Force: F}}
	x := 23.0
	watchAt(m, "w", in(0, x))
	l := trace1(t, m, Options{})
	z, c := math.Sqrt(T*mass), math.Sqrt(T/mass)
	pass := F / (2 * z) * (1/(1+V/c) - 1/(1-V/c))
	for i := 0; i <= 100; i++ {
		tm := 2 * float64(i) / 100
		u := ramped(l, "w", tm)
		if tm > x/V {
			u += pass * (tm - x/V)
		}
		near(t, "rolling", u, rolled(L, T, mass, F, V, x, tm), 1e-11*math.Abs(F)*L/T)
	}
	// Cut by a bare splice the line is the same: the load changes pieces unseen.
	cut := lineOf(2, []mesh.Node{{Fixed: true}, {}, {Fixed: true}}, seg{31, mass, T, 0}, seg{L - 31, mass, T, 0})
	cut.Lines[0].Pieces = []int{0, 1}
	cut.Pieces[1].X0 = 31
	cut.Rolls = m.Rolls
	watchAt(cut, "w", in(0, x))
	k := trace1(t, cut, Options{})
	if len(k.Arrivals) != len(l.Arrivals) {
		t.Fatalf("%d arrivals with a splice, %d without", len(k.Arrivals), len(l.Arrivals))
	}
	for i := range l.Arrivals {
		near(t, "time", k.Arrivals[i].Time, l.Arrivals[i].Time, 1e-12)
		near(t, "amplitude", k.Arrivals[i].Amplitude, l.Arrivals[i].Amplitude, 1e-12)
		if !reflect.DeepEqual(k.Arrivals[i].Path, renamed(l.Arrivals[i].Path, "b", "c")) {
			t.Errorf("path %v, without the splice %v", k.Arrivals[i].Path, l.Arrivals[i].Path)
		}
	}
	m.Rolls[0].Speed = c
	if l := trace1(t, m, Options{}); len(l.Arrivals) != 0 || len(l.Notes) != 1 {
		t.Errorf("%+v %v", l.Arrivals, l.Notes)
	}
}

func renamed(path []string, from, to string) []string {
	out := append([]string(nil), path...)
	for i, w := range out {
		if w == from {
			out[i] = to
		}
	}
	return out
}

// A support that jumps, sets off at once or is accelerated at once sends just
// that; a held watch at the far end feels twice Z times it.
func TestSupportMotion(t *testing.T) {
	zero := func(float64) float64 { return 0 }
	from := func(t0 float64, f func(float64) float64) func(float64) float64 {
		return func(t float64) float64 {
			if t < t0 {
				return 0
			}
			return f(t - t0)
		}
	}
	cases := []struct {
		u, v           func(float64) float64
		quantity, held string
		a              float64
	}{
		{from(0.1, func(float64) float64 { return 0.03 }), zero, "displacement", "impulse", 0.03},
		{from(0.1, func(t float64) float64 { return 0.4 * t }), from(0.1, func(float64) float64 { return 0.4 }), "velocity", "force", 0.4},
		{from(0.1, func(t float64) float64 { return 1 - math.Cos(3*t) }), from(0.1, func(t float64) float64 { return 3 * math.Sin(3*t) }), "acceleration", "force rate", 9},
	}
	for _, c := range cases {
		m := lineOf(1.5, []mesh.Node{{Motion: &mesh.Motion{Displacement: c.u, Velocity: c.v, Breaks: []float64{0.1}}}, {Fixed: true}}, seg{100, 1, 10000, 0})
		watchAt(m, "mid", in(0, 50))
		watchAt(m, "far", on(1))
		l := trace1(t, m, Options{})
		a, _ := l.At("mid", 1, 0)
		near(t, c.quantity, a.Amplitude, c.a, 1e-7*c.a)
		near(t, "time", a.Time, 0.6, 1e-12)
		if a.Quantity != c.quantity || a.Excite != "a" {
			t.Errorf("%+v", a)
		}
		b, _ := l.At("far", 1, 0)
		near(t, c.held, b.Amplitude, 2*100*c.a, 2e-5*c.a)
		if b.Quantity != c.held {
			t.Errorf("%+v", b)
		}
	}
}

// A push's own breaks decide: a long push starts acceleration fronts where its
// slope jumps, two hits are two knocks, a smooth force and a held place start
// nothing and say so.
func TestHistories(t *testing.T) {
	z := 100.0
	run := func(h scenario.History, at mesh.Spot) *Ledger {
		m := lineOf(4, []mesh.Node{{Fixed: true}, {Dashpot: z, Absorbing: true}}, seg{100, 1, 10000, 0})
		m.Pushes = []mesh.Push{{Name: "p", At: at, Force: h}}
		watchAt(m, "w", in(0, 80))
		return trace1(t, m, Options{})
	}
	type front struct {
		t, a     float64
		quantity string
	}
	arg := formula.Arg(formula.ArgT)
	later := formula.Apply(formula.OpHalfSine, formula.Sub(arg, num(1.5)), num(500), num(0.01))
	two := halfSine(300, 0.005)
	two.Value = formula.Add(two.Value, later)
	two.Breaks = append(two.Breaks, 1.5, 1.51)
	j := 2 / math.Pi / (2 * z)
	ramp := scenario.History{Value: formula.Apply(formula.OpRamp, arg, num(40), num(0.5), num(1.5)), Breaks: []float64{0.5, 1.5}}
	sine := scenario.History{Value: formula.Apply(formula.OpSine, arg, num(10), num(3), num(0)), Breaks: []float64{0}}
	decay := scenario.History{Value: formula.Mul(num(20), formula.Apply(formula.OpExp, formula.Mul(num(-3), arg)))}
	soon := scenario.History{Value: formula.Mul(num(20), formula.Apply(formula.OpExp, formula.Mul(num(-5000), arg)))}
	for name, c := range map[string]struct {
		h    scenario.History
		want []front
	}{
		"two knocks": {two, []front{{0.3, 300 * 0.005 * j, "displacement"}, {1.3, -300 * 0.005 * j, "displacement"}, {1.8, 500 * 0.01 * j, "displacement"}, {2.8, -500 * 0.01 * j, "displacement"}}},
		"long half sine": {halfSine(300, 1.2), []front{{0.3, 300 * math.Pi / 1.2 / (2 * z), "acceleration"}, {1.3, -300 * math.Pi / 1.2 / (2 * z), "acceleration"},
			{1.5, 300 * math.Pi / 1.2 / (2 * z), "acceleration"}, {2.5, -300 * math.Pi / 1.2 / (2 * z), "acceleration"}}},
		"ramp":                 {ramp, []front{{0.8, 40 / (2 * z), "acceleration"}, {1.8, -40 / (2 * z), "acceleration"}, {1.8, -40 / (2 * z), "acceleration"}, {2.8, 40 / (2 * z), "acceleration"}}[:2]},
		"sine":                 {sine, []front{{0.3, 10 * 6 * math.Pi / (2 * z), "acceleration"}, {1.3, -10 * 6 * math.Pi / (2 * z), "acceleration"}}},
		"sudden and dying out": {decay, []front{{0.3, 20 / (2 * z), "velocity"}, {1.3, -20 / (2 * z), "velocity"}}},
		"sudden and soon over": {soon, []front{{0.3, 20 / (2 * z), "velocity"}, {1.3, -20 / (2 * z), "velocity"}}},
	} {
		l := run(c.h, in(0, 50))
		if name == "ramp" { // at 1.8 s the end of the ramp meets the echo of its start
			near(t, "ramp, met", l.Arrivals[1].Amplitude, -2*40/(2*z), 1e-7)
			l.Arrivals = l.Arrivals[:1]
			c.want = c.want[:1]
		}
		if len(l.Arrivals) != len(c.want) {
			t.Errorf("%s: %+v", name, l.Arrivals)
			continue
		}
		for i, w := range c.want {
			a := l.Arrivals[i]
			near(t, name+" time", a.Time, w.t, 1e-12)
			near(t, name+" amplitude", a.Amplitude, w.a, 1e-7*math.Abs(w.a)) // slopes by differences
			if a.Quantity != w.quantity {
				t.Errorf("%s: %+v", name, a)
			}
		}
	}
	smooth := scenario.History{Value: formula.Mul(num(5), formula.Sub(num(1), formula.Apply(formula.OpCos, arg)))}
	for _, l := range []*Ledger{run(smooth, in(0, 50)), run(halfSine(1, 0.01), on(0))} {
		if len(l.Arrivals) != 0 || len(l.Notes) != 1 {
			t.Errorf("%+v %q", l.Arrivals, l.Notes)
		}
	}
}

// A mass on a spring lets through a bump: M v' + 2Z v + K u = 2Z, v = (2Z/M)
// (e^{s1 t} - e^{s2 t})/(s1 - s2), largest at ln(s2/s1)/(s1 - s2). Held at times
// 1.3 apart the peak is met to 2 %, its time to one spacing.
func TestBumpPastMassAndSpring(t *testing.T) {
	M, K := 2.0, 3000.0
	m := massLine(mesh.Node{Mass: M, Spring: K})
	m.Timing = mesh.Timing{}
	l := trace1(t, m, Options{End: 2})
	r := 2 * math.Sqrt(20000*1.35)
	d := math.Sqrt(r*r - 4*M*K)
	s1, s2 := (-r+d)/(2*M), (-r-d)/(2*M)
	at := math.Log(s2/s1) / (s1 - s2)
	peak := r / M * (math.Exp(s1*at) - math.Exp(s2*at)) / (s1 - s2)
	a, _ := l.At("after", 1, 0)
	near(t, "peak", a.Amplitude, peak, 0.02*peak)
	near(t, "peak time", a.PeakAfter, at, 0.3*at)
	near(t, "onset", a.Onset, 0, 0)
}

// A tuned mass on a joint: at once nothing of it is felt but its dashpot, in the
// end it moves along and nothing is reflected.
func TestTunedMass(t *testing.T) {
	m := massLine(mesh.Node{})
	z := m.Nodes[0].Dashpot
	m.Nodes = append(m.Nodes, mesh.Node{Name: "line.l.b.tuned1", Line: -1, Mass: 3})
	m.Links = []mesh.Link{{Name: "line.l.b.tuned1", A: 1, B: 3, Spring: 2e4, Dashpot: 200}}
	l := trace1(t, m, Options{})
	a, _ := l.At("after", 1, 0)
	near(t, "at once", a.Onset, 2*z/(2*z+200), 1e-12)
	near(t, "in the end", a.Settled, 1, 1e-6)
	if !a.Smeared {
		t.Errorf("%+v", a)
	}
	m.Nodes[3].Mass, m.Links[0].Dashpot = 0, 0
	if _, err := Trace(m, Options{}); err == nil || !strings.Contains(err.Error(), "tuned1") {
		t.Errorf("a hung node without mass: %v", err)
	}
}

func TestRefusals(t *testing.T) {
	for _, o := range []Options{{End: -1}, {End: math.NaN()}, {Prune: 1}, {Prune: -0.1}, {Most: -1}, {Most: MostMeetings + 1}, {End: 1e12}} {
		if _, err := Trace(knockLine(), o); err == nil {
			t.Errorf("%+v was taken", o)
		}
	}
	if _, err := Trace(&mesh.Mesh{}, Options{}); err == nil {
		t.Error("an empty mesh was taken")
	}
}

// Values that do not exist are no fronts.
func TestNotFinite(t *testing.T) {
	m := knockLine()
	m.Pieces[0].Start = func(s float64) float64 { return math.Sqrt(50 - s) }
	m.Pushes[0].Force = scenario.History{Value: formula.Apply(formula.OpSqrt, formula.Sub(num(0.5), formula.Arg(formula.ArgT))), Breaks: []float64{0, 0.5, math.NaN()}}
	l := trace1(t, m, Options{})
	for _, a := range l.Arrivals {
		if math.IsNaN(a.Amplitude) || math.IsInf(a.Amplitude, 0) {
			t.Fatalf("%+v", a)
		}
	}
	if !strings.Contains(strings.Join(l.Notes, "\n"), "no finite value") {
		t.Errorf("notes %q", l.Notes)
	}
}

// From a scenario: a line drawn aside and let go at 0.5 s starts its fronts then
// and none before.
func TestPluckLetGoLater(t *testing.T) {
	net := &scenario.Network{}
	net.Lines = []scenario.Line{{
		Name:     "l",
		Nodes:    []scenario.Node{{Name: "low", Fixed: true}, {Name: "clamp", Kind: scenario.Joint, Dashpots: []scenario.DashpotOf[float64]{{C: 50}}}, {Name: "top", Spring: 1e5}},
		Segments: []scenario.Segment{{Name: "s", Length: 20, MassPerLength: 1, Tension: 10000}, {Name: "u", Length: 80, MassPerLength: 1, Tension: 10000}},
	}}
	net.Run = scenario.RunOf[float64]{For: 2, Every: 0.01}
	place := scenario.Place{Node: -1, Segment: 1, Offset: 30}
	net.Watches = []scenario.Watch{{Name: "w", At: scenario.Place{Node: -1, Segment: 1, Offset: 60}, Quantities: []scenario.Quantity{scenario.Displacement, scenario.Velocity}}}
	for _, until := range []float64{0, 0.5} {
		net.Plucks = []scenario.PluckOf[float64]{{Name: "snap", At: place, Force: 2000, Until: until}}
		m, err := mesh.Build(net)
		if err != nil {
			t.Fatal(err)
		}
		l := trace1(t, m, Options{StartName: "snap", Prune: DefaultPrune})
		a, ok := l.At("w", 1, 0)
		if !ok {
			t.Fatal("no arrival")
		}
		near(t, "first", a.Time, until+0.3, 1e-12)
		near(t, "amplitude", a.Amplitude, -2000/(2*100.0), 1e-6)
		if a.Excite != "snap" || a.Number != 1 || !reflect.DeepEqual(a.Path, []string{"snap", "w"}) {
			t.Errorf("%+v", a)
		}
	}
}
