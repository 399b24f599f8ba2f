package main

import (
	"math"
	"strings"
	"testing"
)

// The Fourier coefficients of a plucked string: over one period T the record at
// x is the sum of b_n sin(n pi x/L) cos(2 pi n t/T), so that a sum of N samples
// over a period picks out each coefficient, and those of order N-n, N+n, ...,
// which are at most b_1 (1/(N-n)^2 + ...) < 2 b_1/(N-n)^2.
func TestPublishedPluckCoefficients(t *testing.T) {
	c := caseOf(t, "C06-01")
	const n, mass, speed = 1000, 0.01, 130.0 // 2 L/c = 10 ms
	L := c.in("L")
	period := 2 * L / speed
	_, r := recordsOf(t, taut(stockOf("w", mass, 0), plain(mass*speed*speed, L, "fixed", "fixed"),
		"excite p pluck at s "+q(c.in("a"), "m")+" by "+q(c.in("h"), "m"), "watch m at s 0.1 m displacement", runFor(period, period/n, 0.002)))
	band := 0.0
	for _, v := range r.columns["m.displacement.band [m]"] {
		band = math.Max(band, v)
	}
	sharp := 0
	for column, values := range r.columns {
		if strings.Contains(column, ".band ") {
			continue
		}
		good := true
		for order, name := range map[float64]string{1: "b1", 2: "b2", 3: "b3", 4: "b4", 6: "b6"} {
			sum := 0.0
			for i := range n {
				sum += values[i] * math.Cos(2*math.Pi*order*float64(i)/n)
			}
			got := 2 * sum / n / math.Sin(order*math.Pi*0.1/L)
			allowed := (2*band + 2*c.want("b1")/math.Pow(n-order, 2)) / math.Abs(math.Sin(order*math.Pi*0.1/L))
			good = good && math.Abs(got-c.want(name)) <= allowed+c.slack(t, name, 1)
		}
		if good {
			sharp++
		}
	}
	if sharp < 2 {
		t.Errorf("the coefficients hold for %d solvers, expected the two that the band speaks of", sharp)
	}
}
