package record

import (
	"errors"
	"fmt"
	"io"
	"math"
	"strings"
)

// columns gathers the columns of a table that are wanted.
type columns struct {
	table *table
	head  *heading
	opt   Options

	time  int // column; -1: none
	stamp bool
	scale float64 // s
	kept  []int
	times []float64 // s
	data  [][]float64
	rows  int         // expected by the size of the file; 0: not known
	early [][]float64 // the first rows of all columns, to tell which is a time
}

// timeNames are headings of a time column.
var timeNames = []string{"time", "t", "zeit", "temps", "tiempo", "timestamp", "seconds", "sec", "elapsed", "date", "datetime"}

// choose finds the time column and the channels.
func (c *columns) choose() error {
	h := c.head
	c.time, c.scale = -1, 1
	switch {
	case c.opt.TimeNumber > 0:
		if c.time = c.opt.TimeNumber - 1; c.time >= h.columns {
			return fieldError("unknown-channel", h.line, 1, "there is no column %d; there are %d", "", c.opt.TimeNumber, h.columns)
		}
	case c.opt.Time != "":
		for i, n := range h.names {
			if n == c.opt.Time {
				c.time = i
			}
		}
		if c.time < 0 {
			return fieldError("unknown-channel", h.line, 1, "no column is called %q; there are %s", "", c.opt.Time, strings.Join(h.names, ", "))
		}
	default:
		c.findTime()
	}
	if c.time < 0 && c.opt.Rate <= 0 {
		return fieldError("no-time", h.line, 1, "no column holds the time", "name it (--time COLUMN) or say the sampling rate (--rate '400 Hz')")
	}
	if c.time >= 0 {
		_, number := c.table.number(h.first[c.time])
		c.stamp = !number
		if u := h.units[c.time]; u != "" && !c.stamp {
			if c.scale, c.stamp = c.factor(u); !c.stamp {
				return fieldError("wants-time", h.line, 1, "the time column is in %q, which is no unit of time", "swapped columns? say which is the time: --time COLUMN", u)
			}
			c.stamp = false
		}
	}
	var all []Channel
	var at []int
	for i, n := range h.names {
		if i != c.time {
			all, at = append(all, Channel{Name: n}), append(at, i)
		}
	}
	if len(all) == 0 {
		return fieldError("no-data", h.line, 1, "there is no column beside the time", "")
	}
	chosen, err := choose(all, c.opt.Only)
	if err != nil {
		return err
	}
	for _, i := range chosen {
		c.kept = append(c.kept, at[i])
	}
	return nil
}

// findTime takes the column that is headed so, else the first that holds a time
// of day, else the first where it starts at 0 or has a unit of time.
func (c *columns) findTime() {
	for i, n := range c.head.names {
		for _, word := range timeNames {
			if strings.EqualFold(n, word) && c.time < 0 {
				c.time = i
			}
		}
	}
	for i, f := range c.head.first {
		if _, ok := c.table.stamp(f); ok && c.time < 0 {
			c.time = i
		}
	}
	for i, u := range c.head.units {
		if _, ok := c.factor(u); ok && c.time < 0 {
			c.time = i
		}
	}
	if v, ok := c.table.number(c.head.first[0]); c.time < 0 && ok && c.head.columns > 1 && c.opt.Rate <= 0 && v == 0 {
		c.time = 0
	}
}

func (c *columns) factor(u string) (float64, bool) {
	if c.opt.Scale != nil {
		return c.opt.Scale(u)
	}
	switch u {
	case "s":
		return 1, true
	case "ms":
		return 1e-3, true
	}
	return 0, false
}

// earlyRows is how many rows are kept of every column.
const earlyRows = 64

// evenly names a column that rises evenly in the first rows, for a hint: "".
func (c *columns) evenly() string {
	for i, n := range c.head.names {
		good := i != c.time && len(c.early) >= 3
		for k := 1; good && k < len(c.early); k++ {
			step, mean := c.early[k][i]-c.early[k-1][i], (c.early[len(c.early)-1][i]-c.early[0][i])/float64(len(c.early)-1)
			good = step > 0 && math.Abs(step-mean) < 0.5*mean
		}
		if good {
			return fmt.Sprintf("column %d (%s) rises evenly, as a time does: --time %d", i+1, n, i+1)
		}
	}
	return "swapped columns? say which is the time: --time COLUMN"
}

// keepEarly notes one of the first rows.
func (c *columns) keepEarly(row []string) {
	if len(c.early) >= earlyRows {
		return
	}
	values := make([]float64, len(row))
	for i, f := range row {
		v, ok := c.table.number(f)
		if !ok {
			v = math.NaN()
		}
		values[i] = v
	}
	c.early = append(c.early, values)
}

// read takes all rows in.
func (c *columns) read() error {
	c.data = make([][]float64, len(c.kept))
	// Room for what the file can hold, so that nothing is copied as it grows.
	room := int(min(int64(c.rows), samplesMost/int64(len(c.kept)+1)))
	for k := range c.data {
		c.data[k] = make([]float64, 0, room)
	}
	if c.time >= 0 {
		c.times = make([]float64, 0, room)
	}
	row := c.head.first
	for {
		line, _ := c.table.place(0)
		if len(row) != c.head.columns {
			return fieldError("broken-row", line, 1, "%d fields, where the first row of numbers has %d", "a decimal comma beside commas between columns? write semicolons between columns", len(row), c.head.columns)
		}
		c.keepEarly(row)
		if c.time >= 0 {
			at, ok := c.instant(row[c.time])
			if !ok {
				l, col := c.table.place(c.time)
				return fieldError("broken-row", l, col, "%q is no time", "", row[c.time])
			}
			if n := len(c.times); n > 0 && at < c.times[n-1] {
				l, col := c.table.place(c.time)
				return fieldError("time-turns-back", l, col, "the time goes from %.9g s back to %.9g s", c.readOn(), c.times[n-1], at)
			}
			c.times = append(c.times, at)
		}
		for k, i := range c.kept {
			v, ok := c.table.number(row[i])
			if !ok {
				l, col := c.table.place(i)
				return fieldError("broken-row", l, col, "%q is no number", "", row[i])
			}
			c.data[k] = append(c.data[k], v)
		}
		if n := int64(len(c.data[0])) * int64(len(c.kept)+1); n > samplesMost {
			return tooLong(n)
		}
		var err error
		if row, err = c.table.next(); errors.Is(err, io.EOF) {
			return nil
		} else if err != nil {
			return err
		}
	}
}

// readOn takes a few more rows in before a hint about columns is given.
func (c *columns) readOn() string {
	for len(c.early) < earlyRows {
		row, err := c.table.next()
		if err != nil || len(row) != c.head.columns {
			break
		}
		c.keepEarly(row)
	}
	return c.evenly()
}

func (c *columns) instant(field string) (float64, bool) {
	if c.stamp {
		return c.table.stamp(field)
	}
	v, ok := c.table.number(field)
	return v * c.scale, ok && !math.IsNaN(v)
}

// record works out the rate, fills what little is missing and cuts.
func (c *columns) record() (*Record, error) {
	n := len(c.data[0])
	if n < 3 {
		return nil, fieldError("empty-record", c.head.line, 1, "%d rows are no record", "", n)
	}
	rec := &Record{Rate: c.opt.Rate}
	if c.time >= 0 {
		clock, err := readClock(c.times, c.head.line, 1)
		if err != nil {
			return nil, err
		}
		rec.Rate, rec.Start, rec.Findings = clock.rate, c.times[clock.first], clock.findings
		for k := range c.data {
			c.data[k] = clock.place(c.data[k])
		}
	}
	for k, i := range c.kept {
		ch := Channel{Name: c.head.names[i], Unit: c.head.units[i], Samples: c.data[k]}
		found, err := fill(&ch)
		if err != nil {
			return nil, err
		}
		rec.Findings = append(rec.Findings, found...)
		rec.Channels = append(rec.Channels, ch)
	}
	if err := rec.cut(c.opt.From, c.opt.To); err != nil {
		return nil, err
	}
	rec.look()
	return rec, nil
}

// cut keeps the part between two times from the record's start.
func (r *Record) cut(from, to float64) error {
	n := len(r.Channels[0].Samples)
	first, last := int(math.Ceil(from*r.Rate)), n
	if to > 0 {
		last = min(n, int(to*r.Rate)+1)
	}
	if first < 0 || first >= last {
		return &Error{Code: "empty-record", What: fmt.Sprintf("nothing is left between %g s and %g s of a record of %.4g s", from, to, r.Duration())}
	}
	for i := range r.Channels {
		r.Channels[i].Samples = r.Channels[i].Samples[first:last]
	}
	r.Start += float64(first) / r.Rate
	return nil
}

// missingMost is the share of samples that may be missing here and there.
const missingMost = 0.01

// fill puts straight lines where samples are missing here and there.
func fill(c *Channel) ([]Finding, error) {
	missing, longest, run := 0, 0, 0
	for _, v := range c.Samples {
		if math.IsNaN(v) {
			missing++
			run++
			longest = max(longest, run)
			continue
		}
		run = 0
	}
	switch {
	case missing == 0:
		return nil, nil
	case float64(missing) > missingMost*float64(len(c.Samples)):
		return nil, &Error{Code: "missing-samples", What: fmt.Sprintf("%d of %d samples of %s are missing, more than 1 %%", missing, len(c.Samples), c.Name), Hint: "cut the record to a part that is whole: --from, --to"}
	}
	before := -1
	for i := 0; i <= len(c.Samples); i++ {
		if i < len(c.Samples) && math.IsNaN(c.Samples[i]) {
			continue
		}
		for k := before + 1; k < i; k++ {
			switch {
			case before < 0:
				c.Samples[k] = c.Samples[i]
			case i == len(c.Samples):
				c.Samples[k] = c.Samples[before]
			default:
				w := float64(k-before) / float64(i-before)
				c.Samples[k] = c.Samples[before]*(1-w) + c.Samples[i]*w
			}
		}
		before = i
	}
	return []Finding{{Code: "missing-samples", Channel: c.Name, What: fmt.Sprintf("%d samples are missing, at most %d in a row; straight lines stand for them", missing, longest)}}, nil
}
