package spectrum_test

import (
	"math"
	"math/rand/v2"
	"testing"

	"github.com/tautspan/tautspan/engine/spectrum"
)

// A pulse that comes back three times, smaller each time and turned over at every
// second end, under noise: times are found between samples, with their signs; an
// arrival that is foretold and does not come is not found.
func TestArrivals(t *testing.T) {
	r := rand.New(rand.NewPCG(4, 9))
	const rate, n, start = 500.0, 6000, 1.2345
	echoes := []spectrum.Expected{{Time: 2.0417, Sign: -1}, {Time: 4.0834, Sign: 1}, {Time: 6.1251, Sign: -1}}
	size := []float64{0.7, 0.5, 0.35}
	inside, all := 0, 0
	for range 60 {
		x := make([]float64, n)
		pulse := func(at, a float64) {
			for i := range x {
				if u := (float64(i)/rate - at) / 0.06; u > 0 && u < 1 {
					x[i] += a * math.Pow(math.Sin(math.Pi*u), 2)
				}
			}
		}
		pulse(start, 1)
		for k, e := range echoes {
			pulse(start+e.Time, size[k]*float64(e.Sign))
		}
		for i := range x {
			x[i] += 0.02 * r.NormFloat64()
		}
		at, ok := spectrum.Onset(x)
		if !ok || math.Abs(float64(at)/rate-start) > 0.012 {
			t.Fatalf("onset at %.4f s (%v), expected %.4f", float64(at)/rate, ok, start)
		}
		// Foretold 20 ms late, and one that does not come.
		list := []spectrum.Expected{{}}
		for _, e := range echoes {
			list = append(list, spectrum.Expected{Time: e.Time + 0.02, Sign: e.Sign})
		}
		list = append(list, spectrum.Expected{Time: 7.5, Sign: 1})
		got, err := spectrum.MatchArrivals(x, rate, at, 0.08, 0.06, list)
		if err != nil {
			t.Fatal(err)
		}
		for k, e := range echoes {
			a := got[k+1]
			if !a.Found || !a.SignAgrees || math.Abs(a.Seen-e.Time) > 0.006 {
				t.Fatalf("arrival %d: %+v, expected at %.4f s", k+1, a, e.Time)
			}
			all++
			if math.Abs(a.Seen-e.Time) < 1.96*a.U {
				inside++
			}
		}
		if got[4].Found {
			t.Errorf("an arrival that does not come is found at %.4f s, correlation %.2f", got[4].Seen, got[4].Correlation)
		}
	}
	t.Logf("%d of %d times inside", inside, all)
	if s := float64(inside) / float64(all); s < 0.9 {
		t.Errorf("intervals of times hold the truth in %.3f", s)
	}
	if _, ok := spectrum.Onset(make([]float64, 1000)); ok {
		t.Error("an onset in nothing")
	}
	if _, err := spectrum.MatchArrivals(make([]float64, 100), 10, 95, 1, 1, nil); err == nil {
		t.Error("a pulse beyond the end")
	}
}
