package spectrum_test

import (
	"bufio"
	"math"
	"os"
	"strconv"
	"strings"
	"testing"

	"github.com/tautspan/tautspan/engine/spectrum"
)

// The averaged spectrum, and frequencies and decays of two vibrations, against
// SciPy 1.10.1 (testdata/scipy_reference.py made testdata/scipy_reference.csv):
// its Welch density, and its least squares of the sum of both over all samples,
// which cuts no bands.
func TestAgainstSciPy(t *testing.T) {
	const rate, n = 200.0, 4096
	x := make([]float64, n)
	for i := range x {
		s := float64(i) / rate
		x[i] = math.Exp(-0.3*s)*math.Cos(2*math.Pi*7.3*s+0.4) + 0.5*math.Exp(-0.8*s)*math.Cos(2*math.Pi*22.9*s-1) + 0.01*math.Sin(0.7*float64(i*i%100003))
	}
	d := spectrum.Welch(x, rate, 1.5*rate/512)
	found, err := spectrum.Find(x, rate, spectrum.Want{WholeStart: true})
	if err != nil {
		t.Fatal(err)
	}
	near := func(f float64) *spectrum.Peak {
		for i := range found.Peaks {
			if math.Abs(found.Peaks[i].Frequency-f) < 0.2 {
				return &found.Peaks[i]
			}
		}
		t.Fatalf("no peak at %v Hz", f)
		return nil
	}
	file, err := os.Open("testdata/scipy_reference.csv")
	if err != nil {
		t.Fatal(err)
	}
	defer func() { _ = file.Close() }()
	top := 0.0
	for _, p := range d.Power {
		top = math.Max(top, p)
	}
	rows := 0
	about := []float64{7.3, 22.9}
	for in := bufio.NewScanner(file); in.Scan(); {
		if strings.HasPrefix(in.Text(), "#") {
			continue
		}
		cell := strings.Split(in.Text(), ",")
		k, _ := strconv.Atoi(cell[1])
		want, err := strconv.ParseFloat(cell[2], 64)
		if err != nil {
			t.Fatal(err)
		}
		rows++
		switch cell[0] {
		case "welch":
			if math.Abs(d.Power[k]-want) > 1e-9*top {
				t.Errorf("density %d: %v, SciPy has %v", k, d.Power[k], want)
			}
		case "frequency":
			// Both see the same noise; a band holds a little less of the signal.
			if p := near(about[k]); math.Abs(p.Frequency-want) > 2*p.FrequencyU {
				t.Errorf("frequency %.6f ± %.6f Hz, SciPy has %.6f", p.Frequency, p.FrequencyU, want)
			}
		case "decay":
			if p := near(about[k]); !p.Straight || math.Abs(p.Decay-want) > 2*p.DecayU {
				t.Errorf("decay %.5f ± %.5f 1/s, SciPy has %.5f", p.Decay, p.DecayU, want)
			}
		}
	}
	if rows != 69 {
		t.Errorf("%d rows of the reference", rows)
	}
}
