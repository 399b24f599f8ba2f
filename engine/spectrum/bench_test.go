package spectrum_test

import (
	"math"
	"math/rand/v2"
	"testing"

	"github.com/tautspan/tautspan/engine/spectrum"
)

// An hour of one channel at 10 kHz, 36 million samples.
func BenchmarkHour(b *testing.B) {
	r := rand.New(rand.NewPCG(1, 1))
	x := make([]float64, 36_000_000)
	for i := range x {
		t := float64(i) / 1e4
		x[i] = math.Cos(2*math.Pi*1.31*t) + 0.3*math.Cos(2*math.Pi*412*t) + 0.1*r.NormFloat64()
	}
	b.ReportAllocs()
	for b.Loop() {
		if _, err := spectrum.Find(x, 1e4, spectrum.Want{}); err != nil {
			b.Fatal(err)
		}
	}
}
