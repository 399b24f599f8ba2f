package fit

import (
	"math"
	"math/rand/v2"
	"strconv"
	"testing"
)

func scenarioNumber(v float64) string { return strconv.FormatFloat(v, 'g', 12, 64) }

// alignAll tries every pairing in order, to hold the dynamic programming against.
func alignAll(read, u, model []float64) float64 {
	best := math.Inf(1)
	var walk func(i, j int, cost float64, pending int)
	walk = func(i, j int, cost float64, pending int) {
		if i == len(read) {
			best = math.Min(best, cost)
			return
		}
		walk(i+1, j, cost+strangerCost, pending)
		for k := j; k < len(model); k++ {
			d := (read[i] - model[k]) / u[i]
			walk(i+1, k+1, cost+missingCost*float64(k-j)+d*d, 0)
		}
	}
	walk(0, 0, 0, 0)
	return best
}

func TestAlignIsTheBest(t *testing.T) {
	r := rand.New(rand.NewPCG(3, 4))
	for trial := range 300 {
		n, m := 1+r.IntN(5), 1+r.IntN(6)
		rising := func(n int) []float64 {
			out := make([]float64, n)
			x := 0.0
			for i := range out {
				x += 0.2 + r.Float64()
				out[i] = x
			}
			return out
		}
		read, model := rising(n), rising(m)
		u := make([]float64, n)
		for i := range u {
			u[i] = 0.05 + 0.3*r.Float64()
		}
		mode, cost := align(read, u, model, nil)
		if want := alignAll(read, u, model); math.Abs(cost-want) > 1e-9 {
			t.Fatalf("trial %d: cost %g, best is %g", trial, cost, want)
		}
		last, sum := -1, 0.0
		for i, k := range mode {
			if k < 0 {
				sum += strangerCost
				continue
			}
			if k <= last {
				t.Fatalf("trial %d: out of order: %v", trial, mode)
			}
			d := (read[i] - model[k]) / u[i]
			sum += d*d + missingCost*float64(k-last-1)
			last = k
		}
		if math.Abs(sum-cost) > 1e-9 {
			t.Fatalf("trial %d: the pairs cost %g, said %g", trial, sum, cost)
		}
	}
}
