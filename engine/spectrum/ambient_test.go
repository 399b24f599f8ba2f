package spectrum_test

import (
	"math"
	"math/rand/v2"
	"testing"

	"github.com/tautspan/tautspan/engine/spectrum"
)

// driven is a damped vibration that white noise keeps going, scaled to an rms.
func driven(r *rand.Rand, frequency, ratio, rms, rate float64, n int) []float64 {
	// The two-pole filter that samples the oscillator's free motion exactly.
	w := 2 * math.Pi * frequency / rate
	decay := math.Exp(-ratio * w)
	a, b := 2*decay*math.Cos(w*math.Sqrt(1-ratio*ratio)), -decay*decay
	x := make([]float64, n)
	y1, y2, power := 0.0, 0.0, 0.0
	settle := int(6 / (ratio * w))
	for i := -settle; i < n; i++ {
		y := a*y1 + b*y2 + r.NormFloat64()
		y2, y1 = y1, y
		if i >= 0 {
			x[i] = y
			power += y * y / float64(n)
		}
	}
	for i := range x {
		x[i] *= rms / math.Sqrt(power)
	}
	return x
}

// Under wind each resonance gives one peak, not its roughness; 95 % intervals hold
// the true frequency in 92 to 99 of 100 (they are a little wide where a resonance
// is narrower than the resolution); no decay is told.
func TestAmbient(t *testing.T) {
	r := rand.New(rand.NewPCG(11, 2))
	const rate, n = 25.0, 15_000 // ten minutes
	inside, all, extra := 0, 0, 0
	for range 60 {
		frequencies := []float64{1 + r.Float64(), 3 + r.Float64(), 6 + 2*r.Float64()}
		x := make([]float64, n)
		for _, f := range frequencies {
			for i, v := range driven(r, f, 0.001*math.Exp(r.Float64()*math.Log(10)), 0.3+r.Float64(), rate, n) {
				x[i] += v
			}
		}
		for i := range x {
			x[i] += 0.1 * r.NormFloat64()
		}
		found, err := spectrum.Find(x, rate, spectrum.Want{})
		if err != nil {
			t.Fatal(err)
		}
		extra += max(0, len(found.Peaks)-3)
		for _, f := range frequencies {
			all++
			for _, p := range found.Peaks {
				if p.Straight {
					t.Errorf("a straight decay of %.3g/s at %.4g Hz in a record that is kept going", p.Decay, p.Frequency)
				}
				if math.Abs(p.Frequency-f) < math.Min(1.96*p.FrequencyU, 0.2) {
					inside++
					break
				}
			}
		}
	}
	t.Logf("%d of %d inside; %d peaks too many", inside, all, extra)
	if s := float64(inside) / float64(all); s < 0.92 || s > 0.99 {
		t.Errorf("intervals hold the truth in %.3f of %d", s, all)
	}
	if extra > 9 {
		t.Errorf("%d peaks too many in 60 records", extra)
	}
}
