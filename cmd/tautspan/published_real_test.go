package main

import (
	"fmt"
	"math"
	"strings"
	"testing"
)

// numbered holds the published frequencies f<n> of a case against a scenario's
// vibrations.
func numbered(t *testing.T, c published, text string) {
	t.Helper()
	most := 0
	order := func(name string) (n int) {
		if k, _ := fmt.Sscanf(name, "f%d", &n); k == 1 && name == fmt.Sprint("f", n) {
			return n
		}
		return 0
	}
	for name := range c.Expected {
		most = max(most, order(name))
	}
	if most == 0 {
		t.Fatalf("%s expects no frequency", c.ID)
	}
	doc := modesOf(t, most, text)
	for name := range c.Expected {
		if n := order(name); n > 0 {
			c.exact(t, name, doc.Modes[n-1].Frequency)
		}
	}
}

// bending is a stock with a bending stiffness.
func bending(c published, more string) string {
	return strings.TrimSuffix(stockOf("w", c.in("m"), 0), "}") + "    bending " + q(c.in("EI"), "N*m^2") + "\n" + more + "}"
}

// Lines with bending: hinged, clamped, with rotary ends, and almost a bare beam.
// A wire is said by its matter where the case does.
func TestPublishedStiffLines(t *testing.T) {
	for id, ends := range map[string]string{"C10-01": "pinned", "C10-02": "clamped", "C10-03": "clamped", "C10-06": "clamped", "C10-07": "pinned", "C22-03": "rotary"} {
		c := caseOf(t, id)
		if ends == "rotary" {
			ends = "fixed, rotary " + q(c.in("kr"), "N*m/rad")
		}
		var stock string
		if _, ok := c.Inputs["EI"]; ok {
			stock = bending(c, "")
		} else {
			stock = "stock w {\n    density " + q(c.in("rho"), "kg/m^3") + "\n    young " + q(c.in("E"), "Pa") + "\n    diameter " + q(c.in("d"), "m") + "\n}"
		}
		numbered(t, c, taut(stock, plain(c.in("T"), c.in("L"), ends, ends)))
	}
}

// Internal loss of Kelvin and Voigt: the damping ratio of the modes of a hinged wire.
func TestPublishedInternalLoss(t *testing.T) {
	c := caseOf(t, "C22-02")
	doc := modesOf(t, 20, taut(bending(c, "    loss internal "+q(c.in("tau"), "s")+"\n"), plain(c.in("T"), c.in("L"), "pinned", "pinned")))
	for name := range c.Expected {
		n := 0
		if k, _ := fmt.Sscanf(name, "zeta%d", &n); k != 1 {
			t.Fatalf("%s: no value called %s", c.ID, name)
		}
		c.exact(t, name, doc.Modes[n-1].Ratio)
	}
}

// Ropes that hang upright: the tension grows with height, and a mass at the lower
// end is drawn by its own weight.
func TestPublishedUprightRopes(t *testing.T) {
	const gravity = 9.80665 // m/s^2, exact by definition (CGPM 1901)
	c := caseOf(t, "C08-03")
	upright := func(tension float64, first string, c published) string {
		return taut(stockOf("w", c.in("m"), 0), "line l {\n    tension "+q(tension, "N")+" at a\n    incline 90 deg\n    support a "+first+"\n    segment s w "+q(c.in("L"), "m")+"\n    support b fixed\n}")
	}
	numbered(t, c, upright(c.in("M")*gravity, "mass "+q(c.in("M"), "kg"), c))
	c = caseOf(t, "C08-05")
	numbered(t, c, upright(c.in("Tb"), "fixed", c))
}

// Sagging lines in their plane and out of it.
func TestPublishedSag(t *testing.T) {
	for _, id := range []string{"C09-05", "C09-06"} {
		c := caseOf(t, id)
		stock := "stock w {\n    mass " + q(c.in("m"), "kg/m") + "\n    axial " + q(c.in("EA"), "N") + "\n}"
		line := func(words string) string {
			return taut(stock, lineOf("l", c.in("H"), words, "support a fixed", "segment s w "+q(c.in("L"), "m"), "support b fixed"))
		}
		var inPlane []float64
		for _, m := range modesOf(t, 3, line("sag included")).Modes {
			inPlane = append(inPlane, m.Frequency)
		}
		for _, name := range []string{"f_sym1", "f_sym2", "f_anti1"} {
			best := inPlane[0]
			for _, f := range inPlane {
				if math.Abs(f-c.want(name)) < math.Abs(best-c.want(name)) {
					best = f
				}
			}
			c.exact(t, name, best)
		}
		c.exact(t, "f_out1", modesOf(t, 1, line("plane sideways")).Modes[0].Frequency)
	}
}

// hysteretic lines have no published table here; that a ratio without a frequency
// is the same in every mode is its definition, sin(atan(2 z)/2) of a string.
func TestRatioInEveryMode(t *testing.T) {
	doc := modesOf(t, 6, taut("stock w {\n    mass 1.2 kg/m\n    loss ratio 0.3 %\n}", plain(14e3, 40, "fixed", "fixed")))
	want := math.Sin(math.Atan(0.006) / 2)
	for _, m := range doc.Modes {
		if math.Abs(m.Ratio-want) > 1e-11*want {
			t.Errorf("mode damps %.15g, want %.15g", m.Ratio, want)
		}
	}
}

// Many small equal fittings on a contact wire (0.12 kg every 6.5 m of 65 m of
// wire at 1.35 kg/m): to first order they add to its mass, so that the low
// frequencies fall by sqrt(1 + M/(m d)); the frequency of mode 1 of beads on a
// string is below that of the spread mass by the share (pi/N)^2/24 of what the
// beads carry (Rayleigh, Theory of Sound, sec. 120, from memory). Against joints
// written one by one it is the same to rounding.
func TestManyEqualFittings(t *testing.T) {
	const m, M, d, L, T = 1.35, 0.12, 6.5, 65.0, 20e3
	rows := modesOf(t, 5, taut(stockOf("w", m, 0), lineOf("l", T, "support a fixed", "segment s w 65 m, every 6.5 m mass 0.12 kg", "support b fixed")))
	parts := []string{"support a fixed", "segment s w 6.5 m"}
	for i := 1; i < 10; i++ {
		parts = append(parts, fmt.Sprintf("joint j%d mass 0.12 kg", i), fmt.Sprintf("segment s%d w 6.5 m", i))
	}
	joints := modesOf(t, 5, taut(stockOf("w", m, 0), lineOf("l", T, append(parts, "support b fixed")...)))
	for i := range rows.Modes {
		if a, b := rows.Modes[i].Frequency, joints.Modes[i].Frequency; math.Abs(a-b) > 1e-11*b {
			t.Errorf("mode %d: %.15g by every, %.15g by joints", i+1, a, b)
		}
	}
	spread := math.Sqrt(T/(m+M/d)) / (2 * L)
	share := M / (m * d) / (1 + M/(m*d))
	if f := rows.Modes[0].Frequency; math.Abs(f/spread-1) > share*math.Pi*math.Pi/100/12 {
		t.Errorf("mode 1 at %.12g Hz, of the spread mass %.12g Hz", f, spread)
	}
}
