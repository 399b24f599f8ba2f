package main

import (
	"fmt"
	"math"
	"strings"
	"testing"
)

// beamOf is a stock with bending stiffness.
func beamOf(mass, bending float64, more ...string) string {
	return "stock w {\n    mass " + q(mass, "kg/m") + "\n    bending " + q(bending, "N*m^2") + "\n    " + strings.Join(more, "\n    ") + "\n}"
}

// upright is a line that hangs straight up, from its lower end.
func upright(tension string, length float64, lower, upper string) string {
	return "line l {\n    tension " + tension + "\n    incline 90 deg\n    support a " + lower + "\n    segment s w " + q(length, "m") + "\n    support b " + upper + "\n}"
}

// frequenciesOf holds f1, f2, ... of a case against a list of vibrations.
func frequenciesOf(t *testing.T, c published, text string, most int) modesDoc {
	t.Helper()
	doc := modesOf(t, most, text)
	for n := 1; n <= most; n++ {
		if name := fmt.Sprintf("f%d", n); c.Expected[name].Unit != "" {
			c.exact(t, name, doc.Modes[n-1].Frequency)
		}
	}
	return doc
}

// Lines whose tension grows with height: chains, ropes with an end mass, a guide rope.
func TestPublishedHangingLines(t *testing.T) {
	const g = 9.80665
	c := caseOf(t, "C08-01")
	chain := taut(stockOf("w", 1.7, 0), upright(q(1.7*g*c.in("L"), "N")+" at b", c.in("L"), "free", "fixed"))
	doc := frequenciesOf(t, c, chain, 5)
	for n := 1; n <= 5; n++ {
		c.exact(t, fmt.Sprintf("j0_%d", n), 4*math.Pi*doc.Modes[n-1].Frequency*math.Sqrt(c.in("L")/g))
	}
	travel := func(text string) float64 {
		var doc struct {
			Lines []struct {
				Travel float64 `json:"travel_time_s"`
				Start  float64 `json:"tension_start_n"`
				End    float64 `json:"tension_end_n"`
			} `json:"lines"`
		}
		command(t, &doc, text, "check")
		return doc.Lines[0].Travel
	}
	caseOf(t, "C08-02").exact(t, "t", travel(chain))
	for _, id := range []string{"C08-03", "C08-04"} {
		c := caseOf(t, id)
		text := taut(stockOf("w", c.in("m"), 0), upright(q(c.in("M")*g, "N")+" at a", c.in("L"), "mass "+q(c.in("M"), "kg"), "fixed"), "collect tension(a), tension(b)")
		doc := frequenciesOf(t, c, text, 4)
		if id == "C08-03" {
			for n := 1; n <= 4; n++ {
				c.exact(t, fmt.Sprintf("Omega%d", n), 2*math.Pi*doc.Modes[n-1].Frequency*math.Sqrt(c.in("L")/g))
			}
			continue
		}
		c.exact(t, "t_up", travel(text))
		c.exact(t, "T_bottom", doc.Collected.exactly(t, 0))
		c.exact(t, "T_top", doc.Collected.exactly(t, 1))
	}
	c = caseOf(t, "C08-05")
	frequenciesOf(t, c, taut(stockOf("w", c.in("m"), 0), upright(q(c.in("Tb"), "N")+" at a", c.in("L"), "fixed", "fixed")), 3)
	mean := modesOf(t, 1, taut(stockOf("w", c.in("m"), 0), plain(c.in("Tb")+c.in("m")*g*c.in("L")/2, c.in("L"), "fixed", "fixed")))
	c.exact(t, "f1_mean_tension", mean.Modes[0].Frequency)
}

// sagging is a level line of one segment with the shallow-cable term.
func sagging(tension, length float64, how string) string {
	return "line l {\n    tension " + q(tension, "N") + "\n    " + how + "\n    support a fixed\n    segment s w " + q(length, "m") + "\n    support b fixed\n}"
}

// Shallow sagging cables: the list of vibrations holds each symmetric and each
// antisymmetric one of the sources; where two coincide it holds two.
func TestPublishedSaggingCables(t *testing.T) {
	const length, tension, mass = 200.0, 1e5, 2.0
	slope := mass * 9.80665 * length / tension
	nearest := func(doc modesDoc, f float64, taken map[int]bool) float64 {
		best := -1
		for i := range doc.Modes {
			if !taken[i] && (best < 0 || math.Abs(doc.Modes[i].Frequency-f) < math.Abs(doc.Modes[best].Frequency-f)) {
				best = i
			}
		}
		taken[best] = true
		return doc.Modes[best].Frequency
	}
	for _, id := range []string{"C09-01", "C09-02", "C09-03"} {
		c := caseOf(t, id)
		axial := c.in("lambda2") * tension * (1 + slope*slope/8) / (slope * slope)
		doc := modesOf(t, 6, taut("stock w {\n    mass "+q(mass, "kg/m")+"\n    axial "+q(axial, "N")+"\n}", sagging(tension, length, "sag included")))
		turn := 2 * math.Pi * length * math.Sqrt(mass/tension)
		taken := map[int]bool{}
		for _, name := range []string{"Omega_sym1", "Omega_anti1", "Omega_sym2", "Omega_sym3"} {
			c.exact(t, name, turn*nearest(doc, c.want(name)/turn, taken))
		}
	}
	for _, id := range []string{"C09-05", "C09-06"} {
		c := caseOf(t, id)
		stock := "stock w {\n    mass " + q(c.in("m"), "kg/m") + "\n    axial " + q(c.in("EA"), "N") + "\n}"
		text := taut(stock, sagging(c.in("H"), c.in("L"), "sag included"), "collect sag(l), sag(s 50 %), sag_place(l)")
		doc := modesOf(t, 4, text)
		taken := map[int]bool{}
		for _, name := range []string{"f_sym1", "f_anti1", "f_sym2"} {
			c.exact(t, name, nearest(doc, c.want(name), taken))
		}
		c.exact(t, "sag", doc.Collected.exactly(t, 0))
		c.exact(t, "sag", doc.Collected.exactly(t, 1))
		if at := doc.Collected.exactly(t, 2); math.Abs(at-c.in("L")/2) > 1e-9*c.in("L") {
			t.Errorf("%s: deepest at %.12g m", id, at)
		}
		var facts struct {
			Lines []struct {
				Lambda2 float64 `json:"lambda2"`
			} `json:"lines"`
		}
		command(t, &facts, text, "check")
		c.exact(t, "lambda2", facts.Lines[0].Lambda2)
		side := modesOf(t, 1, taut(stock, sagging(c.in("H"), c.in("L"), "plane sideways")))
		c.exact(t, "f_out1", side.Modes[0].Frequency)
	}
}

// Beams: stiff lines in the limit without tension.
func TestPublishedBeamLimits(t *testing.T) {
	for _, k := range []struct{ id, first, last string }{{"C10-04", "clamped", "clamped"}, {"C10-05", "clamped", "free"}} {
		c := caseOf(t, k.id)
		const mass, bending, length = 3.0, 5000.0, 2.0
		doc := modesOf(t, 4, taut(beamOf(mass, bending), plain(1e-8, length, k.first, k.last)))
		for n := 1; n <= 4; n++ {
			square := 2 * math.Pi * doc.Modes[n-1].Frequency * length * length * math.Sqrt(mass/bending)
			c.exact(t, fmt.Sprintf("bL%d_squared", n), square)
			c.exact(t, fmt.Sprintf("bL%d", n), math.Sqrt(square))
		}
	}
}

// The wave number of a stiff line at a frequency: hinged, with ten half waves on
// it, the line has its tenth vibration there.
func TestPublishedDispersion(t *testing.T) {
	c := caseOf(t, "C18-01")
	for _, f := range []float64{1, 20, 100, 400} {
		name := fmt.Sprintf("%gHz", f)
		length := 10 * math.Pi / c.want("k_"+name)
		doc := modesOf(t, 10, taut(beamOf(c.in("m"), c.in("EI")), plain(c.in("T"), length, "pinned", "pinned")))
		got := doc.Modes[9].Frequency
		if math.Abs(got-f) > 1e-9*f {
			t.Errorf("k at %g Hz belongs to %.12g Hz", f, got)
		}
		c.exact(t, "v_phase_"+name, 2*math.Pi*got*length/(10*math.Pi))
	}
}

// Steady drive of a string by a point force and by a moved support, by the measure.
func TestPublishedSteadyResponse(t *testing.T) {
	ask := func(text string) collected {
		var doc struct {
			Collected collected `json:"collected"`
		}
		command(t, &doc, text, "respond", "--points", "1")
		return doc.Collected
	}
	c := caseOf(t, "C14-01")
	for _, f := range []string{"1", "3.5", "6", "12.3"} {
		got := ask(taut(stockOf("w", c.in("m"), 0), plain(c.in("T"), c.in("L"), "fixed", "fixed"),
			"excite e push at s "+q(c.in("a"), "m")+" with sine(1 N, 1 Hz)", "watch x at s "+q(c.in("x"), "m")+" displacement", "watch a0 at s "+q(c.in("a"), "m")+" displacement",
			"collect response(x.displacement, e, "+f+" Hz), response(a0.displacement, e, "+f+" Hz)"))
		want := c.want("receptance_" + f + "Hz")
		c.exact(t, "receptance_"+f+"Hz", math.Copysign(got.exactly(t, 0), want))
		stiff := c.want("dynamic_stiffness_" + f + "Hz")
		c.exact(t, "dynamic_stiffness_"+f+"Hz", math.Copysign(1/got.exactly(t, 1), stiff))
	}
	c = caseOf(t, "C14-02")
	for _, k := range []struct{ end, name string }{{"", "point"}, {"free", "end"}} {
		line := lineOf("l", c.in("T"), "support a absorbing", "segment s w 10 m", "joint j", "segment r w 10 m", "support b absorbing")
		at := "j"
		if k.end != "" {
			line, at = plain(c.in("T"), 10, "free", "absorbing"), "a"
		}
		got := ask(taut(stockOf("w", c.in("m"), 0), line, "excite e push at "+at+" with sine(1 N, 1 Hz)", "watch x at "+at+" velocity", "collect response(x.velocity, e, 7 Hz)")).exactly(t, 0)
		c.exact(t, "Z_"+k.name, 1/got)
		c.exact(t, "mean_power_"+k.name, c.in("F")*c.in("F")*got/2)
		if k.name == "point" {
			c.exact(t, "velocity_point", c.in("F")*got)
		}
	}
	c = caseOf(t, "C14-03")
	for _, f := range []string{"1", "3", "7"} {
		got := ask(taut(stockOf("w", c.in("m"), 0), plain(c.in("T"), c.in("L"), "free", "fixed"),
			"excite e push at a with sine(1 N, 1 Hz)", "watch x at a velocity", "collect response(x.velocity, e, "+f+" Hz)")).exactly(t, 0)
		c.exact(t, "X_in_"+f+"Hz", math.Copysign(1/got, c.want("X_in_"+f+"Hz")))
	}
	c = caseOf(t, "C14-04")
	for _, x := range []string{"3", "6", "10"} {
		got := ask(taut(stockOf("w", c.in("m"), 0), plain(c.in("T"), c.in("L"), "fixed", "fixed"),
			"excite e move a with sine(1 mm, 1 Hz)", "watch x at s "+x+" m displacement", "collect response(x.displacement, e, "+q(c.in("f"), "Hz")+")")).exactly(t, 0)
		c.exact(t, "ratio_x"+x, math.Copysign(got, c.want("ratio_x"+x)))
	}
}

// sweepDoc is what these tests read of a sweep.
type sweepDoc struct {
	Crossings []struct {
		What string `json:"what"`
		With string `json:"with"`
		At   number `json:"at"`
	} `json:"crossings"`
	Best []struct {
		At     *float64 `json:"at"`
		Value  number   `json:"value"`
		Inside bool     `json:"inside"`
	} `json:"best"`
	Collected    collected `json:"collected"`
	Requirements []struct {
		Text    string `json:"text"`
		Verdict string `json:"verdict"`
		Value   number `json:"value"`
	} `json:"requirements"`
	Summary struct {
		Verdicts []struct {
			Text      string `json:"text"`
			Met       int    `json:"met"`
			Undecided int    `json:"undecided"`
			NotMet    int    `json:"not_met"`
		} `json:"verdicts"`
	} `json:"summary"`
}

// Wind on a line: the frequency of its vortices, and at which speeds it meets vibrations.
func TestPublishedVortexFrequencies(t *testing.T) {
	c := caseOf(t, "C15-01")
	var doc sweepDoc
	command(t, &doc, taut("let wind = "+q(c.in("V"), "m/s"), "let f = "+q(c.in("St"), "")+" * wind / "+q(c.in("D"), "m"), stockOf("w", c.in("m"), 0),
		plain(c.in("T"), 100, "fixed", "fixed"), "vary wind through 1, 2 m/s", "collect f, wave_speed(s) / (2 * f), "+q(caseOf(t, "C15-02").in("St"), "")+" * 1 mph / 1 in"), "sweep", "--out", "none")
	c.exact(t, "f", doc.Collected.exactly(t, 0))
	c.exact(t, "loop_length", doc.Collected.exactly(t, 1))
	caseOf(t, "C15-02").exact(t, "constant", doc.Collected.exactly(t, 2))
	c = caseOf(t, "C15-03")
	const length, mass = 100.0, 60.0
	speed := 2 * length * c.in("f1")
	command(t, &doc, taut("let wind = 1 m/s", stockOf("w", mass, 0), plain(speed*speed*mass, length, "fixed", "fixed"),
		"meet frequency(1..3) with "+q(c.in("St"), "")+" * wind / "+q(c.in("D"), "m")+" over wind from 0.1 m/s to 3 m/s"), "sweep", "--out", "none")
	if len(doc.Crossings) != 3 {
		t.Fatalf("%d meetings", len(doc.Crossings))
	}
	for n := range 3 {
		c.exact(t, fmt.Sprintf("V%d", n+1), *doc.Crossings[n].At.Value)
	}
}

// The best damper near an end: its constant is flat, so that it is known to 1e-4
// only; its damping ratio to the class of optima.
func TestPublishedBestDamper(t *testing.T) {
	c := caseOf(t, "C11-03")
	const tension, mass, length = 4e6, 60.0, 100.0
	z := math.Sqrt(tension * mass)
	for _, share := range []string{"0.02", "0.05"} {
		var a float64
		fmt.Sscan(share, &a)
		var doc sweepDoc
		command(t, &doc, taut("let knob = 1 N*s/m", stockOf("w", mass, 0), lineOf("l", tension, "support a fixed", "segment s w "+q(a*length, "m"), "joint j dashpot knob",
			"segment r w "+q((1-a)*length, "m"), "support b fixed"), "best damping(1) largest over knob from "+q(2*z, "N*s/m")+" to "+q(40*z, "N*s/m")), "sweep", "--out", "none")
		b := doc.Best[0]
		c.exact(t, "zeta_max_aL"+share, *b.Value.Value)
		if eta := *b.At / z; !b.Inside || math.Abs(eta/c.want("eta_opt_aL"+share)-1) > 1e-4 {
			t.Errorf("a/L %s: best at %g Z, published %g", share, eta, c.want("eta_opt_aL"+share))
		}
	}
}
