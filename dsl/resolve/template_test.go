package resolve

import (
	"errors"
	"math"
	"reflect"
	"strings"
	"testing"
	"testing/fstest"

	"github.com/tautspan/tautspan/engine/scenario"
)

// example is the whole example of the language's description.
const example = `tautspan 1
title "Footbridge stay S7: does the clamp damper settle a release test?"

let pull = 412 kN
let knob = 4.8 kN*s/m

stock strand {
    mass   18.4 kg/m
    axial  610 MN
    loss   viscous 0.6 N*s/m^2
}

line stay {
    tension  pull
    support  deck    fixed
    segment  lower   strand 12.0 m
    joint    clamp   mass 18 kg, dashpot knob
    segment  upper   strand 148.5 m
    support  saddle  spring 4.2 MN/m
}

excite snap pluck at upper 67 m with 2 kN

watch mid   at upper 68 m  displacement, velocity
watch hold  at deck        force
watch whole along stay     displacement

run {
    for    40 s
    every  5 ms
    agree  1 %
}

require peak(mid.displacement) < 250 mm        "clear of the rail"
require damping(1..4) > 2 %                    "the slowest of the first four"
require settle(mid.displacement, 5 %) < 35 s
`

// resolveText resolves one file and wants no error.
func resolveText(t *testing.T, text string, opts Options) Result {
	t.Helper()
	if !strings.HasPrefix(text, "tautspan") {
		text = "tautspan 1\n" + text
	}
	res := Resolve(fstest.MapFS{"case.taut": {Data: []byte(text)}}, "case.taut", opts)
	if res.Diags.HasErrors() {
		t.Fatal(res.Diags.Text(0))
	}
	return res
}

// bind binds the nominal values.
func bind(t *testing.T, res Result) *scenario.Network {
	t.Helper()
	values, err := res.Template.Values(nil)
	if err != nil {
		t.Fatal(err)
	}
	net, err := res.Template.Bind(values)
	if err != nil {
		t.Fatal(err)
	}
	return net
}

// near compares within a few roundings.
func near(t *testing.T, what string, got, want float64) {
	t.Helper()
	if math.Abs(got-want) > 1e-14*math.Abs(want) {
		t.Errorf("%s = %.17g, want %.17g", what, got, want)
	}
}

// The numbers of the example, read off its text.
func TestExample(t *testing.T) {
	res := resolveText(t, example, Options{})
	if got := len(res.Diags); got != 1 || res.Diags[0].Code != "sag-matters" {
		t.Errorf("diagnostics:\n%s", res.Diags.Text(0))
	}
	net := bind(t, res)
	l := net.Lines[0]
	if len(net.Lines) != 1 || len(l.Nodes) != 3 || len(l.Segments) != 2 || l.Name != "stay" {
		t.Fatalf("line: %+v", l)
	}
	for _, s := range l.Segments {
		near(t, "tension", s.Tension, 412e3)
		near(t, "mass", s.MassPerLength, 18.4)
		near(t, "axial", s.Axial, 610e6)
		near(t, "viscous", s.Viscous, 0.6)
	}
	near(t, "lower", l.Segments[0].Length, 12)
	near(t, "upper", l.Segments[1].Length, 148.5)
	deck, clamp, saddle := l.Nodes[0], l.Nodes[1], l.Nodes[2]
	if !deck.Fixed || deck.Kind != scenario.Support || clamp.Kind != scenario.Joint || saddle.Fixed || saddle.Kind != scenario.Support {
		t.Errorf("nodes: %+v", l.Nodes)
	}
	near(t, "clamp mass", clamp.Mass, 18)
	near(t, "clamp dashpot", clamp.Dashpots[0].C, 4800)
	near(t, "saddle spring", saddle.Spring, 4.2e6)
	p := net.Plucks[0]
	if p.ByLength || p.At.Segment != 1 || p.At.Node != -1 {
		t.Errorf("pluck: %+v", p)
	}
	near(t, "pluck force", p.Force, 2000)
	near(t, "pluck place", p.At.Offset, 67)
	if w := net.Watches; len(w) != 3 || w[1].At.Node != 0 || !w[2].Along || w[2].Span.Segment != -1 {
		t.Errorf("watches: %+v", w)
	}
	near(t, "for", net.Run.For, 40)
	near(t, "every", net.Run.Every, 0.005)
	near(t, "agree", net.Run.Agree, 0.01)
	q := res.Template.Requires
	if len(q) != 3 || q[0].Text != "clear of the rail" || q[0].Relation != scenario.Less || q[1].Relation != scenario.Greater ||
		q[1].Measures[0].ModeTo != 4 || q[1].Unit != "1" || q[2].Unit != "s" || q[0].Source != "peak(mid.displacement) < 250 mm" {
		t.Errorf("requirements: %+v", q)
	}
	limit, _ := q[0].Limit.IsConst()
	near(t, "limit", limit, 0.25)
	if res.Template.Title != "Footbridge stay S7: does the clamp damper settle a release test?" {
		t.Errorf("title %q", res.Template.Title)
	}
}

// letOf is the nominal value and standard uncertainty of a let.
func letOf(t *testing.T, res Result, name string) (value, u float64) {
	t.Helper()
	for _, l := range res.Lets {
		if l.Name == name {
			return l.Value, l.StdU
		}
	}
	t.Fatalf("no let %s", name)
	return 0, 0
}

// Doubts by the forms of the language; the divisors 1.960 and root 3 are the
// language's, 2.5758 is the two-sided 99 % quantile of the normal distribution
// (any table of it, such as NIST Handbook e-Handbook 1.3.6.7.1).
func TestDoubts(t *testing.T) {
	res := resolveText(t, `
let a = 400 kN +- 3 %
let b = 400 kN +- 9.8 kN at 95 %
let c = 0.05 +- 10 % of it
let d = 2 % +- 0.1 %
let e = between 3 m and 5 m
let f = 3.2 m between 3 m and 4 m
let h = 0.5 +- 0.25758 at 99 %
let i = 20 degC +- 2 degF
let j = between 10 and 20 degC
let k = -400 kN +- 3 %
let l = 2 * a +- 5 %
let m = 30 deg +- 10 %
let n = 30 deg +- 1 deg
let o = 2 * d +- 0.5 %
`, Options{})
	for _, c := range []struct {
		name     string
		value, u float64
		slack    float64
	}{
		{"a", 400e3, 12e3, 1e-14}, {"b", 400e3, 5e3, 1e-14}, {"c", 0.05, 0.005, 1e-14}, {"d", 0.02, 0.001, 1e-14},
		{"e", 4, 1 / math.Sqrt(3), 1e-14}, {"f", 3.2, 0.5 / math.Sqrt(3), 1e-14}, {"h", 0.5, 0.1, 2e-5}, {"i", 293.15, 10.0 / 9, 1e-14},
		{"j", 288.15, 5 / math.Sqrt(3), 1e-13}, {"k", -400e3, 12e3, 1e-14}, {"l", 800e3, 40e3, 1e-14},
		{"m", math.Pi / 6, math.Pi / 60, 1e-14}, {"n", math.Pi / 6, math.Pi / 180, 1e-14}, {"o", 0.04, 0.005, 1e-14},
	} {
		v, u := letOf(t, res, c.name)
		if math.Abs(v-c.value) > 1e-14*math.Abs(c.value) || math.Abs(u-c.u) > c.slack*c.u {
			t.Errorf("%s = %v +- %v, want %v +- %v", c.name, v, u, c.value, c.u)
		}
	}
	for _, l := range res.Template.Lets {
		if rect := l.Name == "e" || l.Name == "f" || l.Name == "j"; l.Doubt == nil || l.Doubt.Rectangular != rect || l.Doubt.AsTaken == "" {
			t.Errorf("%s: %+v", l.Name, l.Doubt)
		}
	}
}

// A relative doubt follows the let when it is varied.
func TestRelativeDoubtFollows(t *testing.T) {
	res := resolveText(t, "let a = 400 kN +- 3 %\n", Options{})
	values, err := res.Template.Values(map[string]float64{"a": 100e3})
	if err != nil {
		t.Fatal(err)
	}
	near(t, "doubt at 100 kN", res.Template.StandardU(values)[0], 3e3)
}

func TestLetsAreOrdered(t *testing.T) {
	res := resolveText(t, "let a = b + c\nlet b = 2 * c\nlet c = 3 m\n", Options{})
	seen := map[int]bool{}
	for i, l := range res.Template.Lets {
		used := map[int]bool{}
		l.Value.LetsUsed(used)
		for j := range used {
			if !seen[j] {
				t.Errorf("%s reads let %d, which stands later", l.Name, j)
			}
		}
		seen[i] = true
	}
	if v, _ := letOf(t, res, "a"); v != 9 {
		t.Errorf("a = %v", v)
	}
}

const quietLine = `
stock w {
    mass 1 kg/m
}
line l {
    tension 2 kN
    plane sideways
    support a fixed
    segment s w 10 m
    joint j mass 1 kg
    segment z w 20 m
    support b fixed
}
`

// Stocks from matter: A = pi d^2/4, m = rho A, EA = E A; a ratio at F is
// 2 m zeta 2 pi F.
func TestStocks(t *testing.T) {
	res := resolveText(t, `
stock a {
    density 7850 kg/m^3
    young 195 GPa
    area 140 mm^2
    strength 1860 MPa
    loss viscous 0.1 N*s/m^2
    loss ratio 0.1 % at 2 Hz
}
stock b {
    density 8000 kg/m^3
    diameter 10 mm
}
stock c {
    density 8000 kg/m^3
    wires 7 of 5 mm
    young 200 GPa
    bending 0 N*m^2
}
line l {
    tension 60 kN
    plane sideways
    support e fixed
    segment s a 10 m
    segment t b 10 m
    segment u c 10 m
    segment v c 10 m, loss ratio 0.05 % at 1 Hz
    support f fixed
}
`, Options{})
	s := bind(t, res).Lines[0].Segments
	near(t, "mass", s[0].MassPerLength, 7850*140e-6)
	near(t, "axial", s[0].Axial, 195e9*140e-6)
	near(t, "strength", s[0].Strength, 1860e6*140e-6)
	near(t, "loss", s[0].Viscous, 0.1+2*7850*140e-6*0.001*2*math.Pi*2)
	near(t, "round", s[1].MassPerLength, 8000*math.Pi*0.01*0.01/4)
	near(t, "wires", s[2].MassPerLength, 8000*7*math.Pi*0.005*0.005/4)
	near(t, "wires axial", s[2].Axial, 200e9*7*math.Pi*0.005*0.005/4)
	near(t, "loss of a segment", s[3].Viscous, 2*s[3].MassPerLength*0.0005*2*math.Pi*1)
}

// Places and elements.
func TestNodesAndPlaces(t *testing.T) {
	res := resolveText(t, quietLine+`
line m {
    plane sideways
    support c free
    segment d w 10 m, tension 1 kN
    joint h holds, dashpot 3 N*s/m through 4 kN/m, dashpot 5 N*s/m, tuned 3 kg 2 kN/m 7 N*s/m
    segment e w 10 m, tension 2 kN
    segment f w 3 m, tension 2 kN
    joint k fixed
    segment g w 3 m, tension 2 kN
    support i absorbing
}
tie x from l.s 3 m to d 25 % spring 3 kN/m, mass 2 kg
watch p at h force
watch r at e (2 m + 1 m) force mass 0.5 kg
watch u at e 100 % displacement
excite y roll along m at 36 km/h load -3 kN from d 1 m starting 3 s
`, Options{})
	net := bind(t, res)
	m := net.Lines[1]
	if m.Nodes[2].Kind != scenario.Splice || m.Nodes[2].Name != "" || !m.Nodes[3].Fixed || !m.Nodes[1].Holds || !m.Nodes[4].Absorbing {
		t.Errorf("nodes: %+v", m.Nodes)
	}
	if d := m.Nodes[1].Dashpots; len(d) != 2 || !d[0].Bracket || d[0].C != 3 || d[0].Through != 4000 || d[1].Bracket || d[1].C != 5 {
		t.Errorf("dashpots: %+v", d)
	}
	if d := m.Nodes[1].Tuned; len(d) != 1 || d[0].Mass != 3 || d[0].Spring != 2000 || d[0].Dashpot != 7 {
		t.Errorf("tuned: %+v", d)
	}
	tie := net.Ties[0]
	if tie.From.Offset != 3 || tie.To.Line != 1 || tie.To.Offset != 2.5 || tie.Spring != 3000 || tie.Mass != 2 {
		t.Errorf("tie: %+v", tie)
	}
	if w := net.Watches; w[0].At.Node != 1 || w[1].At.Offset != 3 || w[1].Mass != 0.5 || w[2].At.Node != 2 {
		t.Errorf("watches: %+v", w)
	}
	if r := net.Rolls[0]; r.Speed != 10 || r.Force != -3000 || r.From.Offset != 1 || r.Starting != 3 {
		t.Errorf("roll: %+v", r)
	}
}

// push compiles one push and binds it.
func push(t *testing.T, history string, files ...string) scenario.History {
	t.Helper()
	fs := fstest.MapFS{"case.taut": {Data: []byte("tautspan 1\nlet f = 2 Hz\nlet late = 2 s\n" + quietLine + "excite e push at j with " + history + "\n")}}
	for i := 0; i+1 < len(files); i += 2 {
		fs[files[i]] = &fstest.MapFile{Data: []byte(files[i+1])}
	}
	res := Resolve(fs, "case.taut", Options{})
	if res.Diags.HasErrors() {
		t.Fatal(res.Diags.Text(0))
	}
	return bind(t, res).Pushes[0].Force
}

// Histories against their formulas, written out here.
func TestHistories(t *testing.T) {
	table := "time [ms], push\r\n0, 0\r\n 100, 2\r\n300, -1.5e0\r\n"
	half := func(p, d float64) func(float64) float64 {
		return func(t float64) float64 {
			if t < 0 || t > d {
				return 0
			}
			return p * math.Sin(math.Pi*t/d)
		}
	}
	late := func(f func(float64) float64, d float64) func(float64) float64 {
		return func(t float64) float64 {
			if t < d {
				return 0
			}
			return f(t - d)
		}
	}
	cases := []struct {
		text   string
		f      func(t float64) float64
		breaks []float64
	}{
		{"half_sine(300 N, 500 ms)", half(300, 0.5), []float64{0, 0.5}},
		{"delay(half_sine(300 N, 500 ms), 1 s)", late(half(300, 0.5), 1), []float64{0, 1, 1.5}},
		{"delay(delay(half_sine(300 N, 500 ms), 1 s), late)", late(half(300, 0.5), 3), []float64{0, 2, 3, 3.5}},
		{"sine(2 N, f, 90 deg)", func(t float64) float64 { return 2 * math.Cos(4*math.Pi*t) }, []float64{0}},
		{"3 * sine(2 N, f) + step(1 N, 1 s) - ramp(2 N, 1 s, 3 s)", func(t float64) float64 {
			v := 6 * math.Sin(4*math.Pi*t)
			if t >= 1 {
				v += 1 - math.Min(t-1, 2)
			}
			return v
		}, []float64{0, 1, 3}},
		{"sweep_sine(2 N, 1 Hz, 3 Hz, 2 s)", func(t float64) float64 {
			if t > 2 {
				return 0
			}
			return 2 * math.Sin(2*math.Pi*(t+t*t/2))
		}, []float64{0, 2}},
		{"if(t < late, 1 N, 2 N * t / (1 s))", func(t float64) float64 {
			if t < 2 {
				return 1
			}
			return 2 * t
		}, []float64{0, 2}},
		{"delay(5 N * cos(f * t), late)", late(func(t float64) float64 { return 5 * math.Cos(2*t) }, 2), []float64{0, 2}},
		{"delay(if(t > 1 s, 1 N, 2 N), late)", late(func(t float64) float64 {
			if t > 1 {
				return 1
			}
			return 2
		}, 2), []float64{0, 2, 3}},
		{`table("p.csv", "time [ms]" unit ms, "push" unit kN)`, func(t float64) float64 {
			switch {
			case t > 0.3:
				return 0
			case t > 0.1:
				return 2000 - 3500*(t-0.1)/0.2
			}
			return 2000 * t / 0.1
		}, []float64{0, 0.1, 0.3}},
		{`delay(table("p.csv", 1 unit ms, 2 unit kN), 1 s)`, nil, []float64{0, 1, 1.1, 1.3}},
	}
	for _, c := range cases {
		h := push(t, c.text, "p.csv", byteOrderMark+table)
		for i := 0; c.f != nil && i < 500; i++ {
			at := 0.0071 * float64(i)
			// Chosen: sums of a few terms of order 1e3; 1e-10 leaves three digits of margin over rounding.
			if got, want := h.At(at, 0), c.f(at); math.Abs(got-want) > 1e-10 {
				t.Errorf("%s at %v: %v, want %v", c.text, at, got, want)
				break
			}
		}
		if h.At(-1, 0) != 0 {
			t.Errorf("%s acts before the start", c.text)
		}
		if !sameSet(h.Breaks, c.breaks) {
			t.Errorf("%s breaks at %v, want %v", c.text, h.Breaks, c.breaks)
		}
	}
}

func sameSet(a, b []float64) bool {
	in := func(list []float64, x float64) bool {
		for _, y := range list {
			if math.Abs(x-y) < 1e-12 {
				return true
			}
		}
		return false
	}
	for _, x := range a {
		if !in(b, x) {
			return false
		}
	}
	for _, x := range b {
		if !in(a, x) {
			return false
		}
	}
	return true
}

func TestStartsAndPresses(t *testing.T) {
	res := resolveText(t, quietLine+`
excite c start displacement along z = 2 mm * sin(pi * x / (20 m))
excite d start velocity along l = 1 m/s * exp(-((x - 3 m) / (2 m))^2)
excite e press along z with 3 N/m * x / (20 m) * sine(1, 1 Hz)
excite h move b with sine(3 m/s^2, 1 Hz)
`, Options{})
	net := bind(t, res)
	near(t, "start", net.Starts[0].Shape.At(0, 5), 0.002*math.Sin(math.Pi/4))
	if net.Starts[0].Velocity || !net.Starts[1].Velocity || net.Starts[0].Along.Segment != 1 || net.Starts[1].Along.Segment != -1 {
		t.Errorf("starts: %+v", net.Starts)
	}
	near(t, "start velocity", net.Starts[1].Shape.At(0, 5), math.Exp(-1))
	near(t, "press", net.Presses[0].Force.At(0.25, 10), 1.5)
	if m := net.Moves[0]; m.Kind != scenario.MotionAcceleration || m.Node != 2 {
		t.Errorf("move: %+v", m)
	}
}

// A range in collect asks for each of its numbers.
func TestCollectExpands(t *testing.T) {
	res := resolveText(t, quietLine+"watch q at j displacement\ncollect frequency(2..4) * 2, peak(q.displacement), high(damping(1..2)) - damping(3..4)\n", Options{})
	var got []string
	for _, c := range res.Template.Collects {
		got = append(got, c.Source+" ["+c.Unit+"]")
	}
	want := []string{"frequency(2) * 2 [Hz]", "frequency(3) * 2 [Hz]", "frequency(4) * 2 [Hz]", "peak(q.displacement) [m]",
		"high(damping(1)) - damping(3) [1]", "high(damping(2)) - damping(4) [1]"}
	if strings.Join(got, "\n") != strings.Join(want, "\n") {
		t.Errorf("collected:\n%s\nwant:\n%s", strings.Join(got, "\n"), strings.Join(want, "\n"))
	}
	if m := res.Template.Collects[1].Measures[0]; m.ModeFrom != 3 || m.ModeTo != 3 || m.Source != "frequency(3)" {
		t.Errorf("measure: %+v", m)
	}
	inner := res.Template.Collects[5].Measures[0].Inner
	if inner == nil || len(inner.Measures) != 1 || inner.Measures[0].ModeFrom != 2 {
		t.Errorf("inner: %+v", inner)
	}
}

// The programs of a requirement read measures by their number.
func TestRequirementPrograms(t *testing.T) {
	res := resolveText(t, quietLine+"let k = 2\nwatch q at j force\nrequire k * peak(q.force) - final(q.force) within 1 N .. k * 3 N\n", Options{})
	q := res.Template.Requires[0]
	args := []float64{5, 1}
	if q.Relation != scenario.Within || q.Value.Eval([]float64{2}, args) != 9 || q.Limit.Eval([]float64{2}, args) != 1 || q.Upper.Eval([]float64{2}, args) != 6 {
		t.Errorf("%+v", q)
	}
}

func TestOverrides(t *testing.T) {
	res := resolveText(t, example, Options{Set: map[string]string{"pull": "300 kN +- 2 %"}})
	v, u := letOf(t, res, "pull")
	if v != 300e3 || math.Abs(u-6e3) > 1e-9 {
		t.Errorf("pull = %v +- %v", v, u)
	}
	if !res.Lets[0].Given || res.Lets[1].Given {
		t.Errorf("given: %+v", res.Lets)
	}
	near(t, "tension", bind(t, res).Lines[0].Segments[0].Tension, 300e3)
	for set, code := range map[string]string{
		"pull=300 kg": "unit-mismatch", "pul=300 kN": "unknown-name", "pull=300 KN": "unknown-unit", "pull=-300 kN": "not-positive", "pull=300 kN\nlet q = 3": "bad-override",
		"pull=300": "unit-mismatch", "pull=knob": "unit-mismatch", "pull=": "trailing-sign", "pull=pull": "circular-lets", "pull=3 kN # x": "bad-override", "pull=\xff": "bad-override",
	} {
		name, text, _ := strings.Cut(set, "=")
		res := Resolve(fstest.MapFS{"case.taut": {Data: []byte(example)}}, "case.taut", Options{Set: map[string]string{name: text}})
		errors := res.Diags.Errors()
		if len(errors) == 0 || errors[0].Code != code {
			t.Errorf("--set %q: want %s, got\n%s", set, code, res.Diags.Text(0))
		}
	}
}

// A faulty value from outside is shown with its place in what was typed.
func TestOverrideMessage(t *testing.T) {
	res := Resolve(fstest.MapFS{"case.taut": {Data: []byte(example)}}, "case.taut", Options{Set: map[string]string{"pull": "300 KN"}})
	e := res.Diags.Errors()
	if len(e) != 1 || !matches(e[0], "--set pull:1:16 unknown-unit | perhaps  300 kN") {
		t.Error(res.Diags.Text(0))
	}
}

// The same line in other units is the same line. The factors are written out
// with all their digits (NIST SP 811, appendix B), so that only roundings differ.
func TestUnitsDoNotMatter(t *testing.T) {
	swap := strings.NewReplacer(
		"412 kN", "92.62128455708 kip", "4.8 kN*s/m", "328.9044761126 lbf*s/ft", "18.4 kg/m", "12.36422914257 lb/ft", "610 MN", "137133455.2908 lbf",
		"12.0 m", "39.37007874016 ft", "148.5 m", "5846.456692913 in", "mass 18 kg", "mass 39.68320719328 lb", "4.2 MN/m", "287.7914165985 kip/ft",
		"67 m", "73.27209098863 yd", "2 kN", "203.9432425956 kgf", "68 m", "0.04225324107214 mi", "40 s", "0.6666666666667 min", "5 ms", "5000 us", "0.6 N*s/m^2", "0.6 Pa*s")
	text := swap.Replace(example)
	a, b := bind(t, resolveText(t, example, Options{})), bind(t, resolveText(t, text, Options{}))
	// Thirteen digits were written.
	close := func(what string, x, y float64) {
		if math.Abs(x-y) > 1e-12*math.Abs(x) {
			t.Errorf("%s: %.15g and %.15g", what, x, y)
		}
	}
	for i := range a.Lines[0].Segments {
		x, y := a.Lines[0].Segments[i], b.Lines[0].Segments[i]
		close("length", x.Length, y.Length)
		close("mass", x.MassPerLength, y.MassPerLength)
		close("tension", x.Tension, y.Tension)
		close("axial", x.Axial, y.Axial)
		close("loss", x.Viscous, y.Viscous)
	}
	close("clamp", a.Lines[0].Nodes[1].Mass, b.Lines[0].Nodes[1].Mass)
	close("dashpot", a.Lines[0].Nodes[1].Dashpots[0].C, b.Lines[0].Nodes[1].Dashpots[0].C)
	close("spring", a.Lines[0].Nodes[2].Spring, b.Lines[0].Nodes[2].Spring)
	close("pluck", a.Plucks[0].Force, b.Plucks[0].Force)
	close("place", a.Plucks[0].At.Offset, b.Plucks[0].At.Offset)
	close("watch", a.Watches[0].At.Offset, b.Watches[0].At.Offset)
	close("for", a.Run.For, b.Run.For)
	close("every", a.Run.Every, b.Run.Every)
}

// The order of statements does not matter.
func TestOrderOfStatements(t *testing.T) {
	body := strings.TrimPrefix(example, "tautspan 1\n")
	var parts []string
	for _, p := range strings.Split(body, "\n\n") {
		parts = append([]string{strings.Trim(p, "\n")}, parts...)
	}
	turned := "tautspan 1\n" + strings.Join(parts, "\n") + "\n"
	a, b := bind(t, resolveText(t, example, Options{})), bind(t, resolveText(t, turned, Options{}))
	if !reflect.DeepEqual(a.Model, b.Model) {
		t.Errorf("turned round the scenario is another:\n%s", turned)
	}
}

// Every path that binding can name has a place in the text.
func TestPaths(t *testing.T) {
	res := resolveText(t, example, Options{})
	for path, text := range map[string]string{
		"line.stay.lower.length": "12.0 m", "line.stay.upper.mass": "18.4 kg/m", "line.stay.upper.tension": "pull", "line.stay.clamp.dashpot": "knob", "line.stay.saddle.spring": "4.2 MN/m",
		"line.stay.upper.axial": "610 MN", "line.stay.upper.loss": "loss   viscous 0.6 N*s/m^2", "let.pull": "412 kN", "excite.snap.at": "upper 67 m", "excite.snap.with": "2 kN",
		"watch.mid.at": "upper 68 m", "run.every": "5 ms", "run.for": "40 s", "line.stay.upper.strength": "upper", "line.stay.nothing.x": "stay",
	} {
		span, ok := res.Paths.Find(path)
		if !ok || span.Text() != text {
			t.Errorf("%s is %q, want %q", path, span.Text(), text)
		}
	}
	if _, ok := res.Paths.Find("nothing.at.all"); ok {
		t.Error("an unknown path has a place")
	}
}

// Moving any let out of its range is told by a path that has a place.
func TestBindErrorsHavePlaces(t *testing.T) {
	res := resolveText(t, example, Options{})
	for i := range res.Template.Lets {
		values, err := res.Template.Values(map[string]float64{res.Template.Lets[i].Name: -1})
		if err != nil {
			t.Fatal(err)
		}
		_, err = res.Template.Bind(values)
		var p *scenario.PathError
		if !errors.As(err, &p) {
			t.Fatalf("a negative %s binds: %v", res.Template.Lets[i].Name, err)
		}
		if span, ok := res.Paths.Find(p.Path); !ok || span.Text() != res.Template.Lets[i].Name {
			t.Errorf("%s lies at %q", p.Path, span.Text())
		}
	}
}

// Errors come in order of place, one a line.
func TestOrderOfErrors(t *testing.T) {
	res := Resolve(fstest.MapFS{"case.taut": {Data: []byte("tautspan 1\nlet c = d + 1 m + 2 s\nwatch q at s force\nlet a = 3 KN + 3 KG\nlet b = a + nothing\n")}}, "case.taut", Options{})
	last := 0
	for _, d := range res.Diags {
		line, _ := d.Span.Position()
		if line <= last {
			t.Errorf("order:\n%s", res.Diags.Text(0))
		}
		last = line
	}
	if len(res.Diags) != 4 {
		t.Errorf("want four errors:\n%s", res.Diags.Text(0))
	}
}

// A number computed from a bad let is not reported again.
func TestNoFollowOnErrors(t *testing.T) {
	text := strings.Replace(example, "let pull = 412 kN", "let pull = 412 KN", 1)
	res := Resolve(fstest.MapFS{"case.taut": {Data: []byte(text)}}, "case.taut", Options{})
	if e := res.Diags.Errors(); len(e) != 1 || e[0].Code != "unknown-unit" {
		t.Errorf("want one error:\n%s", res.Diags.Text(0))
	}
	text = strings.Replace(example, "stock strand {", "stok strand {", 1)
	res = Resolve(fstest.MapFS{"case.taut": {Data: []byte(text)}}, "case.taut", Options{})
	for _, d := range res.Diags.Errors() {
		if d.Code == "unknown-name" && strings.Contains(d.Summary, "strand") {
			t.Errorf("a stock that could not be read is reported as unknown:\n%s", res.Diags.Text(0))
		}
	}
}
