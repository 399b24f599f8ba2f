package resolve

import (
	"fmt"
	"math"
	"strings"
	"testing"

	"github.com/tautspan/tautspan/engine/scenario"
	"github.com/tautspan/tautspan/engine/stock"
)

const gravity = 9.80665 // m/s^2, exact by definition (CGPM 1901)

// about compares within the rounding of a few dozen operations on numbers of the
// size of scale.
func about(t *testing.T, what string, got, want, scale float64) {
	t.Helper()
	if math.Abs(got-want) > 1e-14*scale {
		t.Errorf("%s = %.17g, want %.17g", what, got, want)
	}
}

// EI as said and from matter, and what wears the loss of bending.
func TestBendingOfStocks(t *testing.T) {
	res := resolveText(t, `
let d = 16 mm
stock said {
    mass 18 kg/m
    bending 92 kN*m^2
    loss internal 3 ms
    loss viscous 0.6 N*s/m^2
}
stock bar {
    density 7850 kg/m^3
    young 200 GPa
    diameter d
}
stock wires {
    density 7850 kg/m^3
    young 200 GPa
    wires 7 of 5 mm
    bending 0 N*m^2
}
line l {
    tension 400 kN
    support a clamped
    segment s said 50 m
    segment r bar 50 m
    segment u said 50 m, loss viscous 2 N*s/m^2
    segment w said 50 m, loss internal 5 ms
    support b pinned
}
`, Options{})
	segments := bind(t, res).Lines[0].Segments
	near(t, "EI said", segments[0].Bending, 92e3)
	near(t, "tau", segments[0].Internal, 0.003)
	near(t, "viscous beside it", segments[0].Viscous, 0.6)
	bar := 200e9 * math.Pi * math.Pow(0.016, 4) / 64
	near(t, "EI of a bar", segments[1].Bending, bar)
	near(t, "EA of a bar", segments[1].Axial, 200e9*math.Pi*math.Pow(0.016, 2)/4)
	if segments[2].Viscous != 2 || segments[2].Internal != 0 || segments[3].Internal != 0.005 || segments[3].Viscous != 0 {
		t.Errorf("the loss of a segment does not replace that of its stock: %+v", segments[2:])
	}
	wires := res.Stocks[2]
	near(t, "sum of wires", wires.BendingLow, 7*200e9*math.Pi*math.Pow(0.005, 4)/64)
	near(t, "solid bar", wires.BendingHigh, 200e9*math.Pow(7*math.Pi*0.005*0.005/4, 2)/(4*math.Pi))
	if wires.Name != "wires" || wires.Bending != 0 || res.Stocks[0].BendingHigh != 0 || res.Stocks[1].Bending != res.Stocks[1].BendingHigh {
		t.Errorf("stocks: %+v", res.Stocks)
	}
	values, err := res.Template.Values(map[string]float64{"d": 0.032})
	if err != nil {
		t.Fatal(err)
	}
	net, err := res.Template.Bind(values)
	if err != nil {
		t.Fatal(err)
	}
	about(t, "EI of a bar twice as thick", net.Lines[0].Segments[1].Bending, 16*bar, 16*bar)
}

// How the ends and joints of a line with bending turn.
func TestTurning(t *testing.T) {
	frame := `
stock w {
    mass 18 kg/m
    bending 3 kN*m^2
}
stock v {
    mass 18 kg/m
}
line l {
    tension 400 kN
    support a %s
    segment s w 50 m
    joint j %s
    segment u w 50 m
    joint k rotary 7 N*m/rad
    segment z v 50 m
    support b clamped
}
`
	for _, c := range []struct {
		support, joint      string
		fixed, clamped      bool
		rotary, jointRotary float64
		jointFixed          bool
	}{
		{"pinned", "mass 3 kg", true, false, 0, 0, false},
		{"clamped", "rotary 5 kN*m/rad", true, true, 0, 5000, false},
		{"fixed, turning", "fixed", true, false, 0, 0, true},
		{"fixed, guided", "fixed, rotary 2 N*m/rad", true, true, 0, 2, true},
		{"fixed, rotary 3 kN*m/rad", "mass 3 kg", true, false, 3000, 0, false},
		{"free", "mass 3 kg", false, false, 0, 0, false},
		{"spring 3 kN/m, guided", "mass 3 kg", false, true, 0, 0, false},
		{"mass 3 kg, rotary 2 N*m/rad", "mass 3 kg", false, false, 2, 0, false},
	} {
		nodes := bind(t, resolveText(t, fmt.Sprintf(frame, c.support, c.joint), Options{})).Lines[0].Nodes
		if a := nodes[0]; a.Fixed != c.fixed || a.Clamped != c.clamped || a.Rotary != c.rotary {
			t.Errorf("%s: %+v", c.support, a)
		}
		if j := nodes[1]; j.Fixed != c.jointFixed || j.Clamped || j.Rotary != c.jointRotary {
			t.Errorf("%s: %+v", c.joint, j)
		}
		// One side of joint k bends. Nothing bends at b, so that clamped is only fixed there.
		if nodes[2].Rotary != 7 || nodes[3].Clamped || !nodes[3].Fixed {
			t.Errorf("%+v", nodes[2:])
		}
	}
}

// inclined is a line of three segments with masses between them.
func inclined(tension, slope string) string {
	return fmt.Sprintf(`
let slope = %s
stock w {
    mass 18 kg/m
    axial 100 MN
}
stock v {
    mass 7 kg/m
    axial 100 MN
}
line l {
    tension %s
    incline slope
    support a fixed
    segment s w 100 m
    joint j mass 300 kg, tuned 20 kg 2 kN/m 3 N*s/m
    segment t v 60 m
    joint k mass 11 kg
    segment u w 40 m
    support b mass 50 kg
}
`, slope, tension)
}

// tensionAt is the tension of a bound line at x metres from its start, behind
// what stands there.
func tensionAt(l *scenario.Line, x float64) float64 {
	for i := range l.Segments {
		s := &l.Segments[i]
		if x < s.Length || i == len(l.Segments)-1 {
			return s.Tension + s.TensionRise*x
		}
		x -= s.Length
	}
	return math.NaN()
}

// The tension along an inclined line by equilibrium: at the place where it is
// said it is what is said, and from end to end it grows by the weight of the line
// and of what hangs on its joints, times the sine of the incline.
func TestTensionOfInclinedLine(t *testing.T) {
	const weight = (18*140 + 7*60 + 320 + 11) * gravity // N
	for _, angle := range []float64{90, 30, -30, -90, 12.5} {
		sin := math.Sin(angle * math.Pi / 180)
		for place, x := range map[string]float64{"a": 0, "b": 200, "j": 100, "k": 160, "t 25 %": 115, "u (10 m)": 170, "s 40 m": 40} {
			net := bind(t, resolveText(t, inclined("600 kN at "+place, fmt.Sprintf("%g deg", angle)), Options{}))
			l := &net.Lines[0]
			about(t, "incline", l.Incline, angle*math.Pi/180, 2)
			about(t, place+" tension", tensionAt(l, x), 600e3, 6e6)
			about(t, place+" from end to end", tensionAt(l, 200)-tensionAt(l, 0), weight*sin, 6e6)
			s := l.Segments
			about(t, "rise", s[1].TensionRise, 7*gravity*sin, 70)
			about(t, "over the joint", s[1].Tension-(s[0].Tension+100*s[0].TensionRise), 320*gravity*sin, 6e6)
			about(t, "over the other joint", s[2].Tension-(s[1].Tension+60*s[1].TensionRise), 11*gravity*sin, 6e6)
		}
		l := &bind(t, resolveText(t, inclined("600 kN at mean", fmt.Sprintf("%g deg", angle)), Options{})).Lines[0]
		mean := 0.0
		for _, s := range l.Segments {
			mean += (s.Tension + s.TensionRise*s.Length/2) * s.Length / 200
		}
		about(t, "mean tension", mean, 600e3, 6e6)
	}
}

// A rope that hangs free has no tension at its end, and m g (L-x) above; a let
// that changes the incline changes the tension with it.
func TestHangingRope(t *testing.T) {
	const text = `
let length = 40 m
let slope = 90 deg
stock w {
    mass 3 kg/m
}
line l {
    tension 3 kg/m * g0 * length at top
    incline slope
    support low free
    segment s w length
    support top fixed
}
`
	res := resolveText(t, text, Options{})
	for _, d := range res.Diags {
		if d.Code != "unlikely-wave-speed" {
			t.Errorf("remarked on:\n%s", d.Text())
		}
	}
	s := bind(t, res).Lines[0].Segments[0]
	if s.Tension != 0 {
		t.Errorf("tension of %g N at the free end", s.Tension)
	}
	near(t, "rise", s.TensionRise, 3*gravity)
	for slope, want := range map[float64]float64{math.Pi / 6: 0.5, 0: 1} {
		values, err := res.Template.Values(map[string]float64{"slope": slope})
		if err != nil {
			t.Fatal(err)
		}
		net, err := res.Template.Bind(values)
		if err != nil {
			t.Fatal(err)
		}
		about(t, "tension at the lower end of a slope", net.Lines[0].Segments[0].Tension, want*3*gravity*40, 1200)
	}
}

// A line that is level stays as it was, wherever its tension is said.
func TestLevelLine(t *testing.T) {
	l := bind(t, resolveText(t, strings.Replace(inclined("600 kN at s 3 m", "0 deg"), "incline slope", "incline 0 deg", 1), Options{})).Lines[0]
	for _, s := range l.Segments {
		if s.Tension != 600e3 || s.TensionRise != 0 {
			t.Errorf("%+v", s)
		}
	}
}

func TestSagIsTaken(t *testing.T) {
	text := strings.Replace(inclined("600 kN at a", "30 deg"), "incline slope", "incline slope\n    sag included", 1)
	if l := bind(t, resolveText(t, text, Options{})).Lines[0]; !l.Sag {
		t.Error("sag is left out")
	}
	for from, to := range map[string]string{"sag included": "sag included\n    plane sideways", "support b mass 50 kg": "support b mass 50 kg, weighted", "sag included\n": "\n"} {
		if l := bind(t, resolveText(t, strings.Replace(text, from, to, 1), Options{})).Lines[0]; l.Sag {
			t.Errorf("sag is taken with %q", to)
		}
	}
}

// Lines of many lets are refused before their tensions take all memory.
func TestInclineOfManyLets(t *testing.T) {
	for _, place := range []string{"a", "b", "mean"} {
		steep := func(n int) string {
			return strings.Replace(longLine(n), "tension pull", "tension 10 MN at "+place+"\n    incline 30 deg", 1)
		}
		if got := codes(one(steep(300)), Options{}); got != "" {
			t.Errorf("300 joints, said at %s: %s", place, got)
		}
		if got := codes(one(steep(2000)), Options{}); got != "too-long" {
			t.Errorf("2000 joints, said at %s: %q", place, got)
		}
	}
}

// A built-in stock is an ideal string with the values of the list.
func TestBuiltinStock(t *testing.T) {
	res := resolveText(t, "line l {\n    tension 28 kN\n    support a fixed\n    segment s acsr_drake 300 m\n    support b fixed\n}\n", Options{})
	s := bind(t, res).Lines[0].Segments[0]
	want, _ := stock.Find("acsr_drake")
	if s.Stock != "acsr_drake" || s.MassPerLength != want.Mass.SI || s.Axial != want.Axial() || s.Strength != want.Strength.SI || s.Bending != 0 || s.Viscous != 0 {
		t.Errorf("%+v", s)
	}
	if len(res.Stocks) != 1 || !res.Stocks[0].Builtin || res.Stocks[0].BendingHigh == 0 {
		t.Errorf("stocks: %+v", res.Stocks)
	}
}

// Every built-in stock resolves without an error.
func TestEveryBuiltinStock(t *testing.T) {
	for _, e := range stock.List() {
		text := fmt.Sprintf("line l {\n    tension %g N\n    support a fixed\n    segment s %s 300 m\n    support b fixed\n}\n", 0.2*e.Strength.SI, e.Name)
		res := resolveText(t, text, Options{})
		for _, d := range res.Diags {
			// A fifth of the strength is a usual share; the rest depends on the length.
			if d.Code == "unlikely-share" || d.Code == "unlikely-strain" || d.Code == "unlikely-mass" {
				t.Errorf("%s:\n%s", e.Name, d.Text())
			}
		}
	}
}
