package record

import (
	"fmt"
	"math"
	"sort"
)

// clock is what a time column says: the rate, and which stretch of rows is
// evenly sampled.
type clock struct {
	rate        float64
	first, last int   // rows used
	index       []int // of the rows used: sample number on the even grid
	samples     int
	findings    []Finding
}

// gapMost is how many samples in a row may be missing before a record counts as
// broken there.
const gapMost = 8

// readClock tells rate, missing rows and gaps from time stamps that loggers
// round. A first guess of the step is the mean of the middle half of the steps;
// with it every row gets a sample number, and the step is then that of the
// longest stretch without a gap, (last - first)/(number of steps).
func readClock(times []float64, line int) (*clock, error) {
	n := len(times)
	if times[n-1] <= times[0] {
		return nil, fieldError("time-stands-still", line, 1, "the time does not go on: it is %.9g s in the first and %.9g s in the last row", "swapped columns? say which is the time: --time COLUMN", times[0], times[n-1])
	}
	steps := make([]float64, n-1)
	for i := range steps {
		steps[i] = times[i+1] - times[i]
	}
	sorted := append([]float64(nil), steps...)
	sort.Float64s(sorted)
	guess, count := 0.0, 0
	for _, s := range sorted[len(sorted)/4 : len(sorted)-len(sorted)/4] {
		guess += s
		count++
	}
	if guess /= float64(count); guess <= 0 {
		// Stamps coarser than the step: rows share them. Only the whole is known.
		guess = (times[n-1] - times[0]) / float64(n-1)
	}
	coarse := sorted[len(sorted)/4] <= 0
	c := &clock{first: 0, last: n}
	if !coarse {
		c.longest(steps, guess)
	}
	c.number(times, steps, guess, coarse)
	intervals := c.samples - 1
	if intervals < 2 {
		return nil, fieldError("empty-record", line, 1, "the longest stretch without a gap has %d rows", "", c.last-c.first)
	}
	step := (times[c.last-1] - times[c.first]) / float64(intervals)
	c.rate = 1 / step
	worst := 0.0
	for i := c.first; i < c.last; i++ {
		worst = math.Max(worst, math.Abs(times[i]-times[c.first]-float64(c.index[i-c.first])*step))
	}
	if missing := c.samples - (c.last - c.first); missing > 0 {
		c.findings = append(c.findings, Finding{Code: "missing-samples", What: fmt.Sprintf("%d rows are missing; straight lines stand for them", missing)})
	}
	if worst > 0.02*step {
		c.findings = append(c.findings, Finding{Code: "rounded-time", What: fmt.Sprintf("time stamps stand up to %.2g of a step off an even grid (rounded by the logger, or jitter); the rate is that of the whole column", worst/step)})
	}
	return c, nil
}

// longest finds the longest stretch of rows without a gap.
func (c *clock) longest(steps []float64, guess float64) {
	from, best, gaps := 0, 0, 0
	end := func(to int) { // rows from .. to
		if to-from+1 > best {
			best, c.first, c.last = to-from+1, from, to+1
		}
		from = to + 1
	}
	for i, s := range steps {
		if s > (gapMost+0.5)*guess {
			gaps++
			end(i)
		}
	}
	end(len(steps))
	if gaps > 0 {
		c.findings = append(c.findings, Finding{Code: "gap", What: fmt.Sprintf("%d gaps; the longest stretch without one is used: rows %d to %d of %d", gaps, c.first+1, c.last, len(steps)+1)})
	}
}

// number gives every row used its sample number. The guess of the step is
// carried along, so that rounding never adds up to a whole step.
func (c *clock) number(times, steps []float64, guess float64, coarse bool) {
	c.index = make([]int, c.last-c.first)
	at := 0
	for i := 1; i < len(c.index); i++ {
		jump := 1
		if !coarse {
			jump = max(1, int(math.Round(steps[c.first+i-1]/guess)))
		}
		at += jump
		c.index[i] = at
	}
	c.samples = at + 1
}

// place puts the rows of a column onto the even grid, NaN where none is.
func (c *clock) place(column []float64) []float64 {
	if c.samples == c.last-c.first {
		return column[c.first:c.last]
	}
	out := make([]float64, c.samples)
	for i := range out {
		out[i] = math.NaN()
	}
	for i, k := range c.index {
		out[k] = column[c.first+i]
	}
	return out
}
