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
	first, last int   // rows used: first, and one past the last
	index       []int // of the rows used: sample number on the even grid; nil: one a row
	samples     int
	findings    []Finding
}

const (
	// gapMost is how many samples in a row may be missing before a record counts
	// as broken there. Chosen.
	gapMost = 8
	// stepsLooked bounds how many steps are sorted to tell their middle.
	stepsLooked = 200_000
)

// readClock tells rate, missing rows and gaps from time stamps that loggers
// round. A first guess of the step is the mean of the ordinary steps; with it every row gets a sample number, and the step is then that of the
// longest stretch without a gap, (last - first)/(number of steps).
func readClock(times []float64, line, column int) (*clock, error) {
	n := len(times)
	if times[n-1] <= times[0] {
		return nil, fieldError("time-stands-still", line, column, "the time does not go on: it is %.9g s in the first and %.9g s in the last row", "swapped columns? say which is the time: --time COLUMN", times[0], times[n-1])
	}
	guess, grain := middleStep(times)
	c := &clock{last: n}
	if guess <= 0 { // stamps coarser than the step: rows share them
		c.samples = n
	} else {
		c.longest(times, guess, grain)
		c.number(times, guess, grain)
	}
	if c.samples < 3 {
		return nil, fieldError("empty-record", line, column, "the longest stretch without a gap has %d rows", "", c.last-c.first)
	}
	step := (times[c.last-1] - times[c.first]) / float64(c.samples-1)
	c.rate = 1 / step
	c.unevenness(times, step, grain)
	return c, nil
}

// unevenness says how far stamps stand off an even grid: rounding where that
// explains it, else jitter.
func (c *clock) unevenness(times []float64, step, grain float64) {
	worst := 0.0
	for i := c.first; i < c.last; i++ {
		worst = math.Max(worst, math.Abs(times[i]-times[c.first]-float64(c.at(i-c.first))*step))
	}
	switch {
	case worst <= 0.02*step:
	case worst <= 1.1*grain || grain >= step:
		c.findings = append(c.findings, Finding{Code: "rounded-time", What: fmt.Sprintf("time stamps are rounded, by up to %.2g of a step; the rate is that of the whole column", worst/step)})
	default:
		c.findings = append(c.findings, Finding{Code: "jitter", What: fmt.Sprintf("time stamps stand up to %.2g of a step off an even grid; the rate is that of the whole column, and frequencies near the sampling limit suffer most", worst/step)})
	}
}

// middleStep is the mean of the ordinary steps, 0 where rows share stamps, and the
// grain to which stamps are rounded.
func middleStep(times []float64) (guess, grain float64) {
	n := len(times) - 1
	stride := (n + stepsLooked - 1) / stepsLooked
	sorted := make([]float64, 0, n/stride+1)
	for i := 0; i < n; i += stride {
		sorted = append(sorted, times[i+1]-times[i])
	}
	sort.Float64s(sorted)
	quarter := len(sorted) / 4
	if sorted[quarter] <= 0 {
		for _, s := range sorted {
			if s > 0 {
				return 0, s
			}
		}
		return 0, 0
	}
	middle := mean(sorted[quarter : len(sorted)-quarter])
	grain = math.Inf(1)
	ordinary := 0 // steps in which no row is missing, as far as the middle tells
	for i, s := range sorted {
		// Differences below a thousandth of a step are the arithmetic's, or do no harm.
		if i > 0 && s-sorted[i-1] > 1e-3*middle && s < 1.9*middle {
			grain = math.Min(grain, s-sorted[i-1])
		}
		if s < 1.9*middle {
			ordinary = i + 1
		}
	}
	guess = mean(sorted[:ordinary])
	if math.IsInf(grain, 1) {
		grain = 0
		if doubled(times, middle) {
			return (times[n] - times[0]) / float64(n), middle
		}
	}
	return guess, grain
}

func mean(values []float64) float64 {
	sum := 0.0
	for _, v := range values {
		sum += v
	}
	return sum / float64(len(values))
}

// doubled tells why some steps are twice the others, and none lies between: by
// rounding to a grain of one short step they come evenly, and often; where rows are
// missing they come anyhow, and seldom.
func doubled(times []float64, short float64) bool {
	count, last, least, most := 0, -1, math.MaxInt, 0
	for i := 0; i+1 < len(times); i++ {
		if step := times[i+1] - times[i]; step < 1.5*short || step > 2.5*short {
			continue
		}
		if last >= 0 {
			least, most = min(least, i-last), max(most, i-last)
		}
		last = i
		count++
	}
	return count >= 5 && most-least <= 2
}

// missing is how many rows are missing between row i and the next. A late stamp is
// followed by a short step: three steps together must be too long as well.
func missing(times []float64, i int, guess, grain float64) int {
	step := times[i+1] - times[i]
	if step <= math.Max(1.5*guess, guess+1.01*grain) {
		return 0
	}
	extra := math.Round(step/guess) - 1
	if i > 0 && i+2 < len(times) {
		extra = math.Min(extra, math.Floor((times[i+2]-times[i-1])/guess-3+0.25))
	}
	return max(0, int(extra))
}

// longest finds the longest stretch of rows without a gap.
func (c *clock) longest(times []float64, guess, grain float64) {
	from, best, gaps := 0, 0, 0
	end := func(to int) { // rows from .. to, the latter with it
		if to-from+1 > best {
			best, c.first, c.last = to-from+1, from, to+1
		}
		from = to + 1
	}
	for i := 0; i+1 < len(times); i++ {
		if times[i+1]-times[i] > (gapMost+0.5)*guess+grain {
			gaps++
			end(i)
		}
	}
	end(len(times) - 1)
	if gaps > 0 {
		c.findings = append(c.findings, Finding{Code: "gap", What: fmt.Sprintf("%d gap(s) in the time column; the longest stretch without one is used: rows %d to %d of %d", gaps, c.first+1, c.last, len(times))})
	}
}

// number gives every row used its sample number.
func (c *clock) number(times []float64, guess, grain float64) {
	rows := c.last - c.first
	extra := 0
	for i := 1; i < rows; i++ {
		if more := missing(times[c.first:c.last], i-1, guess, grain); more > 0 {
			if c.index == nil {
				c.index = make([]int, rows)
				for k := range i {
					c.index[k] = k
				}
			}
			extra += more
		}
		if c.index != nil {
			c.index[i] = i + extra
		}
	}
	c.samples = rows + extra
}

func (c *clock) at(row int) int {
	if c.index == nil {
		return row
	}
	return c.index[row]
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
	for i := range c.last - c.first {
		out[c.at(i)] = column[c.first+i]
	}
	return out
}
