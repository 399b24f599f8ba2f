package unit

import (
	"errors"
	"math"
	"strings"
	"testing"

	"pgregory.net/rapid"
)

// Factors from NIST SP 811 (2008) appendix B.8 where a number has more than its
// definition's digits, else from the SI brochure; lbf, psi and mph are exact there
// or follow from exact definitions.
func TestFactors(t *testing.T) {
	cases := []struct {
		text string
		one  float64
		si   string
	}{
		{"m", 1, "m"}, {"mm", 1e-3, "m"}, {"km", 1e3, "m"}, {"um", 1e-6, "m"}, {"µm", 1e-6, "m"}, {"μm", 1e-6, "m"}, {"nm", 1e-9, "m"},
		{"g", 1e-3, "kg"}, {"kg", 1, "kg"}, {"mg", 1e-6, "kg"}, {"t", 1000, "kg"}, {"Mg", 1000, "kg"},
		{"s", 1, "s"}, {"ms", 1e-3, "s"}, {"min", 60, "s"}, {"h", 3600, "s"},
		{"N", 1, "N"}, {"kN", 1e3, "N"}, {"MN", 1e6, "N"}, {"GN", 1e9, "N"}, {"lbf", 4.4482216152605, "N"}, {"kip", 4448.2216152605, "N"}, {"kgf", 9.80665, "N"},
		{"Pa", 1, "Pa"}, {"MPa", 1e6, "Pa"}, {"GPa", 1e9, "Pa"}, {"psi", 6894.757293168361, "Pa"}, {"ksi", 6894757.293168361, "Pa"},
		{"J", 1, "J"}, {"W", 1, "W"}, {"Hz", 1, "Hz"}, {"kHz", 1e3, "Hz"}, {"K", 1, "K"},
		{"rad", 1, "1"}, {"mrad", 1e-3, "1"}, {"deg", math.Pi / 180, "1"}, {"%", 0.01, "1"},
		{"in", 0.0254, "m"}, {"ft", 0.3048, "m"}, {"yd", 0.9144, "m"}, {"mi", 1609.344, "m"}, {"lb", 0.45359237, "kg"}, {"mph", 0.44704, "m/s"},
		{"B", 1, "B"}, {"kB", 1e3, "B"}, {"GB", 1e9, "B"},
		{"kN*m^2", 1e3, "N*m^2"}, {"N·s/m²", 1, "N*s/m^2"}, {"N*s/m^2", 1, "N*s/m^2"}, {"kN·s/m", 1e3, "N*s/m"}, {"1/K", 1, "1/K"}, {"K⁻¹", 1, "1/K"}, {"K^-1", 1, "1/K"},
		{"W/(m^2*K)", 1, "kg/(s^3*K)"}, {"lb/ft", 1.4881639435695539, "kg/m"}, {"lbf/ft", 14.593902937206365, "N/m"}, {"lb/ft^3", 16.018463373960142, "kg/m^3"},
		{"km/h", 1 / 3.6, "m/s"}, {"mm^2", 1e-6, "m^2"}, {"m/s^2", 1, "m/s^2"}, {"N*m/rad", 1, "J"}, {"1/min", 1.0 / 60, "Hz"}, {"degC", 274.15, "K"}, {"degF", (1 + 459.67) * 5 / 9, "K"},
		{"W*h", 3600, "J"},
	}
	for _, c := range cases {
		u, err := Parse(c.text)
		if err != nil {
			t.Errorf("%s: %v", c.text, err)
			continue
		}
		// Two roundings of 1.1e-16 each.
		if got := u.SI(1); math.Abs(got-c.one) > 3e-16*c.one {
			t.Errorf("1 %s = %.17g, want %.17g", c.text, got, c.one)
		}
		if got := u.Dim.SI(); got != c.si {
			t.Errorf("%s is in %s, want %s", c.text, got, c.si)
		}
	}
}

// A decimal number with a decimal prefix is the float64 nearest to its value,
// as a literal of the Go compiler is.
func TestDecimalPrefixesRoundOnce(t *testing.T) {
	for text, want := range map[string]float64{"ms": 9e-3, "mm": 9e-3, "um": 9e-6, "nm": 9e-9, "kN": 9e3, "cm": 9e-2, "g": 9e-3} {
		u, err := Parse(text)
		if err != nil || u.SI(9) != want {
			t.Errorf("9 %s = %.17g, want %.17g (%v)", text, u.SI(9), want, err)
		}
	}
}

func TestTemperatures(t *testing.T) {
	c, _ := Parse("degC")
	f, _ := Parse("degF")
	// 0 degC = 273.15 K by definition; 50 degF = 10 degC; -40 is the same on both scales.
	if c.SI(0) != 273.15 || math.Abs(f.SI(50)-283.15) > 1e-12 || math.Abs(f.SI(-40)-c.SI(-40)) > 1e-12 {
		t.Errorf("scales: %v %v %v", c.SI(0), f.SI(50), f.SI(-40))
	}
	if c.Difference(5) != 5 || f.Difference(9) != 5 {
		t.Errorf("differences: %v %v", c.Difference(5), f.Difference(9))
	}
	if per, err := Parse("1/degC"); err != nil || per.Scale || per.SI(2) != 2 {
		t.Errorf("1/degC: %+v %v", per, err)
	}
}

func TestMarks(t *testing.T) {
	for text, want := range map[string]Unit{"rad/s": {Angle: 1}, "deg": {Angle: 1}, "N*m/rad": {Angle: -1}, "%": {Percent: true}, "N*t": {TimesT: true}, "kN/t": {}} {
		u, err := Parse(text)
		if err != nil || u.Angle != want.Angle || u.Percent != want.Percent || u.TimesT != want.TimesT {
			t.Errorf("%s: %+v %v", text, u, err)
		}
	}
}

func TestFaults(t *testing.T) {
	cases := []struct{ text, part, hint string }{
		{"KN", "KN", "kN"}, {"KG/m", "KG", "kg/m"}, {"Mpa", "Mpa", "MPa"}, {"hz", "hz", "Hz"}, {"HZ", "HZ", "Hz"}, {"plf", "plf", "lbf/ft"}, {"Kn*M^2", "Kn", "kN*m^2"},
		{"lbs", "lbs", "lb"}, {"kips", "kips", "kip"}, {"sec", "sec", "s"}, {"m2", "m2", "m^2"}, {"kNm2", "kNm2", "kN*m^2"}, {"kNm", "kNm", "kN*m"}, {"kg/m3", "m3", "kg/m^3"},
		{"°", "°", "deg"}, {"°C", "°C", "degC"}, {"rpm", "rpm", "1/min"}, {"feet", "feet", "ft"}, {"kph", "kph", "km/h"}, {"fathom", "fathom", ""}, {"Ns/m", "Ns", "N*s/m"},
		{"N/m/s", "/", "N/(m*s)"}, {"N/m*s", "*", "N/(m*s)"}, {"N*", "", ""}, {"/m", "/", ""}, {"N^", "^", ""}, {"N^0", "^0", ""}, {"m^99999999999999999999", "^99999999999999999999", ""}, {"W/(m^2*K", "(m^2*K", ""},
		{"m)", ")", ""}, {"", "", ""}, {"m^60*m", "m", ""}, {"Gm^36", "Gm^36", ""}, {"degrees", "degrees", "deg"},
		{"kin", "kin", ""}, {"mmin", "mmin", "m*min"}, {"MB/s/s", "/", "MB/(s*s)"}, {"mB", "mB", "MB"}, {"klbf", "klbf", "kip"},
	}
	for _, c := range cases {
		_, err := Parse(c.text)
		var e *Error
		if !errors.As(err, &e) {
			t.Errorf("%q is read without an error", c.text)
			continue
		}
		if got := e.Text[e.Start:e.End]; got != c.part || e.Hint != c.hint {
			t.Errorf("%q: part %q hint %q, want %q %q (%s)", c.text, got, e.Hint, c.part, c.hint, e.What)
		}
	}
}

func TestEveryTableEntryReads(t *testing.T) {
	for _, table := range []map[Dim]string{scalesSI, scalesUS} {
		for d, names := range table {
			for _, n := range strings.Fields(names) {
				if u, err := Parse(n); err != nil || u.Dim != d {
					t.Errorf("%s: %v %v, want %v", n, err, u.Dim, d)
				}
			}
		}
	}
	for _, table := range []map[string]string{usual, preferred} {
		for typed, meant := range table {
			if _, err := Parse(meant); err != nil {
				t.Errorf("%s is taken for %s, which is no unit: %v", typed, meant, err)
			}
		}
	}
	for typed := range usual {
		if _, err := Parse(typed); err == nil {
			t.Logf("%s is a unit already; its hint never shows", typed)
		}
	}
	for _, k := range named {
		if k.Dim.IsNumber() || k.Dim == Temperature.Dim {
			continue
		}
		if u, err := Parse(k.SI); err != nil || u.Dim != k.Dim || u.Factor() != 1 {
			t.Errorf("%s: SI unit %s: %v", k.Word, k.SI, err)
		}
	}
}

func TestFormat(t *testing.T) {
	cases := []struct {
		si     float64
		dim    Dim
		system System
		want   string
	}{
		{412e3, Force.Dim, SI, "412 kN"}, {4040.34, Force.Dim, SI, "4.04 kN"}, {999.97, Force.Dim, SI, "1 kN"}, {0, Force.Dim, SI, "0 N"}, {-2e3, Force.Dim, SI, "-2 kN"},
		{0.012, Length.Dim, SI, "12 mm"}, {160.5, Length.Dim, SI, "160.5 m"}, {18.4, MassPerLength.Dim, SI, "18.4 kg/m"}, {4800, Dashpot.Dim, SI, "4.8 kN*s/m"}, {0.6, Viscous.Dim, SI, "0.6 N*s/m^2"},
		{0.5, Number.Dim, SI, "0.5"}, {293.15, Temperature.Dim, SI, "20 degC"}, {293.15, Temperature.Dim, US, "68 degF"},
		{4448.2216152605, Force.Dim, US, "1 kip"}, {0.3048, Length.Dim, US, "1 ft"}, {1.4881639435695539, MassPerLength.Dim, US, "1 lb/ft"},
		{math.Inf(1), Force.Dim, SI, "infinity N"}, {1e-9, Number.Dim, SI, "1e-9"}, {1234567, Number.Dim, SI, "1235000"}, {2.5e12, Number.Dim, SI, "2.5e12"}, {1e9, Number.Dim, SI, "1e9"}, {-1e-5, Number.Dim, SI, "-1e-5"}, {1e-12, Number.Dim, SI, "1e-12"},
		{3, Dim{Length: 2, Mass: 1, Time: -4}, SI, "3 kg*m^2/s^4"},
	}
	for _, c := range cases {
		want := c.want
		if c.want == "4.04 kN" {
			if got := Format(c.si, c.dim, c.system, 3); got != want {
				t.Errorf("%v: %q, want %q", c.si, got, want)
			}
			continue
		}
		if got := Format(c.si, c.dim, c.system, 0); got != want {
			t.Errorf("%v: %q, want %q", c.si, got, want)
		}
	}
}

// genUnit draws a well-formed unit.
func genUnit(t *rapid.T) string {
	words := []string{"m", "kg", "s", "N", "Pa", "J", "W", "Hz", "K", "t", "deg", "min", "h", "in", "ft", "lb", "lbf", "kip", "psi", "mm", "kN", "ms", "GPa", "rad"}
	one := func() string {
		w := rapid.SampledFrom(words).Draw(t, "word")
		return w + rapid.SampledFrom([]string{"", "", "^2", "²", "^3", "^-1"}).Draw(t, "power")
	}
	product := func(n int) string {
		out := one()
		for range n {
			out += rapid.SampledFrom([]string{"*", "·"}).Draw(t, "sign") + one()
		}
		return out
	}
	switch rapid.IntRange(0, 3).Draw(t, "shape") {
	case 0:
		return product(2)
	case 1:
		return product(1) + "/" + one()
	case 2:
		return "1/" + one()
	}
	return product(1) + "/(" + product(1) + ")"
}

func TestProperties(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		a, b := genUnit(t), rapid.SampledFrom([]string{"m", "kN", "s^2", "lb", "1/K"}).Draw(t, "other")
		ua, err := Parse(a)
		if err != nil {
			t.Fatalf("%s: %v", a, err)
		}
		// The dimension's own SI unit has factor 1 and the same dimension.
		if ua.Dim != Number.Dim {
			si, err := Parse(ua.Dim.SI())
			if err != nil || si.Dim != ua.Dim || si.Factor() != 1 {
				t.Fatalf("%s: SI %s: %v", a, ua.Dim.SI(), err)
			}
		}
		// There and back.
		v := math.Pow(10, rapid.Float64Range(-6, 6).Draw(t, "exponent"))
		// Four roundings of 1.1e-16 each, there and back.
		if got := ua.From(ua.SI(v)); math.Abs(got-v) > 4.5e-16*v {
			t.Fatalf("%s: %v became %v", a, v, got)
		}
		// The factor of a product is the product of factors.
		if !strings.Contains(a, "/") && !strings.Contains(b, "/") {
			ub, _ := Parse(b)
			ab, err := Parse(a + "*" + b)
			if err != nil {
				t.Fatal(err)
			}
			want, _ := ua.Dim.Mul(ub.Dim)
			if ab.Dim != want || math.Abs(ab.Factor()-ua.Factor()*ub.Factor()) > 1e-14*ab.Factor() {
				t.Fatalf("%s * %s: %v", a, b, ab)
			}
		}
	})
}

// What Format writes reads back to the value within its digits.
func TestFormatReadsBack(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		k := rapid.SampledFrom(named[1:]).Draw(t, "kind")
		v := math.Pow(10, rapid.Float64Range(-8, 8).Draw(t, "exponent"))
		system := rapid.SampledFrom([]System{SI, US}).Draw(t, "system")
		if k.Dim == Temperature.Dim {
			v = rapid.Float64Range(200, 400).Draw(t, "kelvin")
		}
		u, shown := Display(v, k.Dim, system)
		// Three roundings and, for temperatures, an offset of some hundred kelvin.
		if back := u.SI(shown); math.Abs(back-v) > 1e-12*v {
			t.Fatalf("%v %s: shown as %v %s, back %v", v, k.Word, shown, u.Text, back)
		}
	})
}

func FuzzParse(f *testing.F) {
	for _, s := range []string{"kN*m^2", "N·s/m²", "1/K", "W/(m^2*K)", "KN", "m2", "°C", "a/b/c", "^", "((", "m⁻⁻²", "\xff", "µ"} {
		f.Add(s)
	}
	f.Fuzz(func(t *testing.T, s string) {
		u, err := Parse(s)
		if err != nil {
			var e *Error
			if !errors.As(err, &e) || e.Start < 0 || e.End > len(s) || e.Start > e.End || e.What == "" {
				t.Fatalf("%q: %#v", s, err)
			}
			if e.Hint != "" {
				if _, err := Parse(e.Hint); err != nil {
					t.Fatalf("%q: hint %q is no unit", s, e.Hint)
				}
			}
			return
		}
		if f := u.Factor(); !(f > 0) || math.IsInf(f, 0) || u.Text != s {
			t.Fatalf("%q: factor %v", s, f)
		}
	})
}
