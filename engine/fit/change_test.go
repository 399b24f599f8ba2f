package fit

import (
	"math"
	"math/rand/v2"
	"testing"
)

// A mass known alike in both surveys cancels from the ratio and leaves twice the
// scatter of the readings; known anew it does not.
func TestBetween(t *testing.T) {
	a := Figure{100, []Part{{"mass", 2}, {"readings r", 1}}}
	b := Figure{110, []Part{{"mass", 2.2}, {"readings r", 1}}}
	mass := map[string]Known{"mass": {15, 0.3}}
	d := Between(a, b, mass, mass)
	near(t, "difference", d.Value, 10, 1e-12)
	near(t, "u", d.U, math.Sqrt(0.2*0.2+2), 1e-12)
	near(t, "relative", d.Relative, 0.1, 1e-12)
	near(t, "log u", d.LogU, math.Hypot(1.0/100, 1.0/110), 1e-12)
	if len(d.Common) != 1 || d.Common[0] != "mass" {
		t.Errorf("common %v", d.Common)
	}
	d = Between(a, b, mass, map[string]Known{"mass": {15.1, 0.3}})
	near(t, "u, weighed again", d.U, math.Sqrt(2*2+2.2*2.2+2), 1e-12)
	if len(d.Common) != 0 {
		t.Errorf("common %v", d.Common)
	}
}

// Of one line the factor is 1.960; of ten each must give an alarm in 0.512 % of
// cases for 5 % of all.
func TestAlarmFactor(t *testing.T) {
	near(t, "one line", AlarmFactor(1, 0.05), 1.959964, 1e-6)
	for _, n := range []int{1, 3, 10, 40} {
		k := AlarmFactor(n, 0.05)
		near(t, "rate", 1-math.Pow(math.Erf(k/math.Sqrt2), float64(n)), 0.05, 1e-9)
	}
}

// figureOf is a sought let with what each direction of the fit's doubt does to it.
func figureOf(t *testing.T, r *Result, k int) Figure {
	t.Helper()
	u := r.Best.Unknowns[k]
	j := r.Best.Joint()
	f := Figure{Value: u.Value}
	for i, name := range j.Directions() {
		z := make([]float64, len(j.Directions()))
		var ends [2]float64
		for side, sign := range []float64{1, -1} {
			z[i] = sign
			values, err := j.Values(z, nil)
			if err != nil {
				t.Fatal(err)
			}
			ends[side] = values[u.Let]
		}
		f.Parts = append(f.Parts, Part{name, (ends[0] - ends[1]) / 2})
	}
	return f
}

// Lines that did not change give an alarm no more often than asked, though both
// surveys were reckoned with one wrong mass; and a change of three times what is
// resolved gives one.
func TestFalseAlarms(t *testing.T) {
	r := rand.New(rand.NewPCG(17, 0))
	known := map[string]Known{"mass": {20, 0.4}}
	survey := func(pull, mass float64) *Result {
		rows := ""
		for n := 1; n <= 5; n++ {
			f := float64(n) / 60 * math.Sqrt(pull/mass) * (1 + 0.002*r.NormFloat64())
			rows += " frequency " + string(rune('0'+n)) + " = " + scenarioNumber(f) + " Hz +- 0.2 %\n"
		}
		return solve(t, "let pull = 400 kN\nlet mass = 20 kg/m +- 2 %\nstock w {\n mass mass\n}\nline l {\n tension pull\n support a fixed\n segment s w 30 m\n support b fixed\n}\nreading r of l {\n"+rows+"}\nseek pull from 50 kN to 2 MN\n")
	}
	alarms, seen := 0, 0
	const trials = 120
	k := AlarmFactor(1, 0.05)
	for range trials {
		mass := 20 * (1 + 0.02*r.NormFloat64())
		before := figureOf(t, survey(500e3, mass), 0)
		d := Between(before, figureOf(t, survey(500e3, mass), 0), known, known)
		if d.Apart() > k {
			alarms++
		}
		after := 500e3 * math.Exp(-3*k*d.LogU)
		d = Between(before, figureOf(t, survey(after, mass), 0), known, known)
		if d.Apart() > k && d.Value < 0 {
			seen++
		}
	}
	// 5 % of 120 is 6; more than 13 is less likely than 1 in 500.
	if alarms > 13 || seen < trials-1 {
		t.Errorf("%d false alarms, %d changes seen, of %d", alarms, seen, trials)
	}
}
