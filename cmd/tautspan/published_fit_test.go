package main

import (
	"bytes"
	"encoding/json"
	"fmt"
	"math"
	"os"
	"path/filepath"
	"strconv"
	"strings"
	"testing"

	"github.com/tautspan/tautspan/cmd/tautspan/internal/cli"
)

// fitted is the part of a fit's document that is held against published values.
type fitted struct {
	Unknowns []struct {
		Name      string
		Value     float64
		StandardU float64 `json:"standard_u"`
	}
}

func (f *fitted) value(t *testing.T, name string) (value, u float64) {
	t.Helper()
	for _, x := range f.Unknowns {
		if x.Name == name {
			return x.Value, x.StandardU
		}
	}
	t.Fatalf("the fit found no %s", name)
	return 0, 0
}

// fitOf fits a scenario through the command.
func fitOf(t *testing.T, text string) *fitted {
	t.Helper()
	file := filepath.Join(t.TempDir(), "case.taut")
	if err := os.WriteFile(file, []byte("tautspan 1\n"+text), 0o600); err != nil {
		t.Fatal(err)
	}
	var out, errs bytes.Buffer
	if code := cli.Main([]string{"fit", "--json", file}, cli.Streams{Out: &out, Err: &errs}); code > 1 {
		t.Fatalf("exit %d\n%s", code, errs.String())
	}
	f := &fitted{}
	if err := json.Unmarshal(out.Bytes(), f); err != nil {
		t.Fatal(err)
	}
	return f
}

func closeTo(t *testing.T, what string, got, want, tol float64) {
	t.Helper()
	if !(math.Abs(got-want) <= tol) {
		t.Errorf("%s: got %.12g, want %.12g within %.2g", what, got, want, tol)
	}
}

// surveyed is one line from pinned or clamped end to end with one reading block.
func surveyed(lets, ends string, L float64, stock, reading, ask string) string {
	return fmt.Sprintf("let pull = 100 kN\n%sstock w {\n%s}\nline l {\n tension pull\n support a %s\n segment z w %.12g m\n support b %s\n}\nreading r of l {\n%s}\n%s", lets, stock, ends, L, ends, reading, ask)
}

// Return waves: sag by D = g t^2/(32 N^2), so that the tension m g L^2/(8 D) is
// what a fit to N returns in t seconds must find, and the law printed in feet
// and inches with its own rounded gravity.
func TestPublishedSagByReturns(t *testing.T) {
	const g, span, mass = 9.80665, 250.0, 1.1
	for key, want := range caseOf(t, "C12-02").Expected {
		var n int
		var seconds float64
		if _, err := fmt.Sscanf(strings.ReplaceAll(key, "_", " "), "D N%d T%g", &n, &seconds); err != nil {
			t.Fatal(key, err)
		}
		f := fitOf(t, surveyed("", "fixed", span, fmt.Sprintf(" mass %g kg/m\n", mass), fmt.Sprintf(" returns %d took %g s +- 0.05 s at a\n", n, seconds), "seek pull from 100 N to 9 MN\n"))
		pull, _ := f.value(t, "pull")
		closeTo(t, "C12-02 "+key, mass*g*span*span/(8*pull), want.Value, 1e-9)
		// 48.3 in the printed law stands for 12 g/8 with g = 32.2 ft/s^2 = 9.81456 m/s^2.
		printed := caseOf(t, "C12-01").Expected[key].Value
		closeTo(t, "C12-01 "+key, mass*32.2*0.3048*span*span/(8*pull), printed, 1e-9)
	}
	for key, c := range caseOf(t, "C12-03").Expected {
		var n int
		var sag float64
		if _, err := fmt.Sscanf(strings.ReplaceAll(key, "_", " "), "t D%g N%d", &sag, &n); err != nil {
			t.Fatal(key, err)
		}
		f := fitOf(t, surveyed("", "fixed", span, fmt.Sprintf(" mass %g kg/m\n", mass), fmt.Sprintf(" returns %d took %.15g s +- 0.05 s\n", n, c.Value), "seek pull from 100 N to 9 MN\n"))
		pull, _ := f.value(t, "pull")
		closeTo(t, "C12-03 "+key, mass*g*span*span/(8*pull), sag, 1e-9)
	}
	for _, id := range []string{"C12-04", "C12-05"} {
		c := caseOf(t, id)
		text := surveyed("", "fixed", c.Inputs["span"].Value, fmt.Sprintf(" mass %g lb/ft\n", c.Inputs["w"].Value), fmt.Sprintf(" returns 10 took %.15g s +- 0.1 s\n", c.Expected["t_10_returns"].Value), "seek pull from 1 kN to 900 kN\n")
		pull, _ := fitOf(t, text).value(t, "pull")
		closeTo(t, id+" tension", pull, c.Expected["T"].Value, 1e-9*c.Expected["T"].Value)
	}
}

// A decay of a published damping ratio, and a swing count, through the fit: the
// loss found has that ratio in its first mode.
func TestPublishedDecrement(t *testing.T) {
	c := caseOf(t, "C17-01")
	for _, zeta := range []string{"0.001", "0.02", "0.1"} {
		delta := c.Expected["delta_zeta_"+zeta].Value
		ratio := delta / math.Hypot(2*math.Pi, delta)
		text := surveyed("let lossy = 1 N*s/m^2\n", "fixed", 50, " mass 2 kg/m\n loss viscous lossy\n", fmt.Sprintf(" decay 1 = %.15g %% +- 0.01 %%\n", 100*ratio), "seek lossy from 0.0001 N*s/m^2 to 10 kN*s/m^2\n")
		lossy, _ := fitOf(t, text).value(t, "lossy")
		omega := math.Pi / 50 * math.Sqrt(100e3/2)
		want, err := strconv.ParseFloat(zeta, 64)
		if err != nil {
			t.Fatal(err)
		}
		closeTo(t, "C17-01 "+zeta, lossy/(2*2*omega), want, 1e-9)
	}
}

// Tension and bending stiffness by vibration.
func TestPublishedTensionByVibration(t *testing.T) {
	c := caseOf(t, "C19-01")
	for key, want := range c.Expected {
		var n int
		var f float64
		if _, err := fmt.Sscanf(strings.ReplaceAll(key, "_", " "), "T n%d f%g", &n, &f); err != nil {
			t.Fatal(key, err)
		}
		text := surveyed("", "fixed", c.Inputs["L"].Value, fmt.Sprintf(" mass %g kg/m\n", c.Inputs["m"].Value), fmt.Sprintf(" frequency %d = %g Hz +- 0.1 %%\n", n, f), "seek pull from 1 kN to 9 MN\n")
		pull, _ := fitOf(t, text).value(t, "pull")
		closeTo(t, "C19-01 "+key, pull, want.Value, 1e-9*want.Value)
	}
	c = caseOf(t, "C19-02")
	text := surveyed("let stiff = 10 kN*m^2\n", "pinned", c.Inputs["L"].Value, fmt.Sprintf(" mass %g kg/m\n bending stiff\n", c.Inputs["m"].Value),
		fmt.Sprintf(" frequency 1 = %g Hz +- 0.1 %%\n frequency 4 = %g Hz +- 0.1 %%\n", c.Inputs["f1"].Value, c.Inputs["f4"].Value), "seek pull from 1 kN to 9 MN\nseek stiff from 1 kN*m^2 to 9 MN*m^2\n")
	f := fitOf(t, text)
	pull, _ := f.value(t, "pull")
	stiff, _ := f.value(t, "stiff")
	closeTo(t, "C19-02 T", pull, c.Expected["T"].Value, 1e-9*c.Expected["T"].Value)
	closeTo(t, "C19-02 EI", stiff, c.Expected["EI"].Value, 1e-8*c.Expected["EI"].Value)
	// A clamped hanger with a bending parameter of 50: its exact frequencies give
	// its tension and stiffness back, where the formula in use is off by a third
	// of a per cent.
	c = caseOf(t, "C19-03")
	text = surveyed("let stiff = 10 kN*m^2\n", "clamped", c.Inputs["L"].Value, fmt.Sprintf(" mass %g kg/m\n bending stiff\n", c.Inputs["m"].Value),
		fmt.Sprintf(" frequency 1 = %.15g Hz +- 0.1 %%\n frequency 2 = %.15g Hz +- 0.1 %%\n", c.Expected["f1_exact"].Value, c.Expected["f2_exact"].Value), "seek pull from 1 kN to 9 MN\nseek stiff from 1 kN*m^2 to 9 MN*m^2\n")
	f = fitOf(t, text)
	pull, _ = f.value(t, "pull")
	stiff, _ = f.value(t, "stiff")
	closeTo(t, "C19-03 T", pull, c.Inputs["T"].Value, 1e-8*c.Inputs["T"].Value*10)
	closeTo(t, "C19-03 EI", stiff, c.Inputs["EI"].Value, 1e-6*c.Inputs["EI"].Value)
	// Errors of frequency, length and mass carry over as published.
	c = caseOf(t, "C19-04")
	lets := fmt.Sprintf("let mass = 20 kg/m +- %g %%\nlet span = 30 m +- %g %%\n", 100*c.Inputs["dm"].Value, 100*c.Inputs["dL"].Value)
	text = fmt.Sprintf("let pull = 100 kN\n%sstock w {\n mass mass\n}\nline l {\n tension pull\n support a fixed\n segment z w span\n support b fixed\n}\nreading r of l {\n frequency 1 = 2 Hz +- %g %%\n}\nseek pull from 1 kN to 9 MN\n", lets, 100*c.Inputs["df"].Value)
	pull, u := fitOf(t, text).value(t, "pull")
	closeTo(t, "C19-04", u/pull, c.Expected["dT_over_T_rss"].Value, 1e-6)
}

// documentOf runs a command on a scenario's text and gives its document.
func documentOf(t *testing.T, into any, command, text string, flags ...string) {
	t.Helper()
	file := filepath.Join(t.TempDir(), "case.taut")
	if err := os.WriteFile(file, []byte("tautspan 1\n"+text), 0o600); err != nil {
		t.Fatal(err)
	}
	var out, errs bytes.Buffer
	if code := cli.Main(append([]string{command, "--json", file}, flags...), cli.Streams{Out: &out, Err: &errs}); code > 1 {
		t.Fatalf("exit %d\n%s", code, errs.String())
	}
	if err := json.Unmarshal(out.Bytes(), into); err != nil {
		t.Fatal(err)
	}
}

// How long a vibration of a published damping ratio takes to fall, by the decay
// that the exact vibrations have.
func TestPublishedFallOfAVibration(t *testing.T) {
	c := caseOf(t, "C17-03")
	f, zeta := c.Inputs["f"].Value, c.Inputs["zeta"].Value
	// A string of a metre and a kilogram a metre with the frequency undamped.
	text := fmt.Sprintf("stock w {\n mass 1 kg/m\n loss ratio %.15g at %.15g Hz\n}\nline l {\n tension %.15g N\n support a fixed\n segment s w 1 m\n support b fixed\n}\n", zeta, f, 4*f*f)
	var doc struct {
		Modes []struct {
			Frequency float64 `json:"frequency_hz"`
			Damped    float64 `json:"damped_frequency_hz"`
			Ratio     float64 `json:"damping_ratio"`
			Decay     float64 `json:"decay_per_s"`
		}
	}
	documentOf(t, &doc, "modes", text)
	m := doc.Modes[0]
	closeTo(t, "C17-03 t to 5 %", math.Log(20)/m.Decay, c.Expected["t_5_percent"].Value, 1e-9*c.Expected["t_5_percent"].Value)
	closeTo(t, "C17-03 t to 60 dB", math.Log(1000)/m.Decay, c.Expected["t_60dB"].Value, 1e-9*c.Expected["t_60dB"].Value)
	closeTo(t, "C17-03 Q", 1/(2*m.Ratio), c.Expected["Q"].Value, 1e-9*c.Expected["Q"].Value)
	closeTo(t, "C17-03 cycles to half", m.Damped*math.Ln2/m.Decay, c.Expected["cycles_to_half"].Value, 1e-9*c.Expected["cycles_to_half"].Value)
}

// The width of a resonance at half its power: a mass on a spring and a dashpot at
// the end of a line that weighs and pulls next to nothing.
func TestPublishedHalfPowerWidth(t *testing.T) {
	c := caseOf(t, "C17-02")
	f0 := c.Inputs["f0"].Value
	omega := 2 * math.Pi * f0
	for _, zeta := range []float64{0.005, 0.05} {
		text := fmt.Sprintf("stock w {\n mass 1e-8 kg/m\n}\nline l {\n tension 1e-6 N\n support a fixed\n segment s w 1 m\n support b mass 1 kg, spring %.15g N/m, dashpot %.15g N*s/m\n}\nexcite e push at b with sine(1 N, 1 Hz)\nwatch q at b displacement\n", omega*omega, 2*zeta*omega)
		const points = 4001
		var doc struct {
			Frequency []float64 `json:"frequency_hz"`
			Responses []struct{ Amplitude []float64 }
		}
		documentOf(t, &doc, "respond", text, "--from", fmt.Sprint(f0*(1-3*zeta)), "--to", fmt.Sprint(f0*(1+3*zeta)), "--points", fmt.Sprint(points))
		a := doc.Responses[0].Amplitude
		top := 0.0
		for _, v := range a {
			top = math.Max(top, v)
		}
		var ends []float64
		for i := 1; i < len(a); i++ {
			x, y := 2*a[i-1]*a[i-1]-top*top, 2*a[i]*a[i]-top*top
			if (x > 0) != (y > 0) {
				ends = append(ends, doc.Frequency[i-1]+x/(x-y)*(doc.Frequency[i]-doc.Frequency[i-1]))
			}
		}
		if len(ends) != 2 {
			t.Fatalf("zeta %g: %d ends", zeta, len(ends))
		}
		// A step is 1.5e-3 of the width; the top between two steps is missed by the
		// square of that, 1e-6 of it.
		want := c.Expected[fmt.Sprintf("width_exact_zeta_%g", zeta)].Value
		closeTo(t, fmt.Sprintf("C17-02 zeta %g", zeta), ends[1]-ends[0], want, 1e-5*want)
	}
}

// A sag found by a fit: that of a parabola, as the measure defines it, 0.06 % short
// of the catenary's.
func TestPublishedSagOfAFittedSpan(t *testing.T) {
	c := caseOf(t, "C12-06")
	h, m, span := c.Inputs["H"].Value, c.Inputs["m"].Value, c.Inputs["L"].Value
	text := surveyed("", "fixed", span, fmt.Sprintf(" mass %.12g kg/m\n", m), fmt.Sprintf(" returns 1 took %.15g s +- 0.01 s\n", 2*span*math.Sqrt(m/h)), "seek pull from 1 kN to 900 kN\ncollect sag(l)\n")
	var doc struct {
		Collected []struct{ Value struct{ Value float64 } }
	}
	documentOf(t, &doc, "fit", text)
	sag := doc.Collected[0].Value.Value
	closeTo(t, "C12-06 parabola", sag, c.Expected["sag_parabola"].Value, 1e-9*sag)
	closeTo(t, "C12-06 catenary", sag, c.Expected["sag_catenary"].Value, 7e-4*sag)
}
