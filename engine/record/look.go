package record

import (
	"fmt"
	"math"
)

// What counts as odd. Chosen: three samples at the rail in a row are no chance;
// an offset of the size of the signal, and a drift of a third of it, are worth a
// word.
const (
	railRun     = 3
	offsetShare = 1.0
	driftShare  = 0.33
)

// look adds what is odd in the samples.
func (r *Record) look() {
	for i := range r.Channels {
		c := &r.Channels[i]
		r.Findings = append(r.Findings, c.look()...)
	}
}

func (c *Channel) look() []Finding {
	n := len(c.Samples)
	if n == 0 {
		return nil
	}
	mean, low, high := 0.0, math.Inf(1), math.Inf(-1)
	for _, v := range c.Samples {
		mean += v / float64(n)
		low, high = math.Min(low, v), math.Max(high, v)
	}
	note := func(code, what string, args ...any) Finding {
		return Finding{Code: code, Channel: c.Name, What: fmt.Sprintf(what, args...)}
	}
	if low == high {
		return []Finding{note("nothing-in-it", "every sample is %g", low)}
	}
	variance := 0.0
	for _, v := range c.Samples {
		variance += (v - mean) * (v - mean) / float64(n)
	}
	rms := math.Sqrt(variance)
	var out []Finding
	if runs, samples := c.rail(low, high); runs > 0 {
		out = append(out, note("clipped", "clipped: %d samples in %d stretches stand at the largest or smallest value; amplitudes and higher frequencies are not to be trusted there", samples, runs))
	}
	if math.Abs(mean) > offsetShare*rms {
		out = append(out, note("offset", "an offset of %.3g, %.1f times the rms of the rest (taken off)", mean, math.Abs(mean)/rms))
	}
	tenth := max(1, n/10)
	first, last := 0.0, 0.0
	for i := range tenth {
		first += c.Samples[i] / float64(tenth)
		last += c.Samples[n-1-i] / float64(tenth)
	}
	// The mean of so many samples of a vibration wanders by rms/sqrt(tenth) at most
	// where they are many cycles; a drift stands out from both.
	if n >= 1000 && math.Abs(last-first) > driftShare*rms {
		out = append(out, note("drift", "drifts by %.3g from its first to its last tenth, %.1f times its rms", last-first, math.Abs(last-first)/rms))
	}
	return out
}

// rail counts stretches of equal samples at the ends of the range.
func (c *Channel) rail(low, high float64) (runs, samples int) {
	run := 0
	end := func() {
		if run >= railRun {
			runs++
			samples += run
		}
		run = 0
	}
	var at float64
	for _, v := range c.Samples {
		if v != low && v != high || run > 0 && v != at {
			end()
		}
		if v == low || v == high {
			at = v
			run++
		}
	}
	end()
	return runs, samples
}
