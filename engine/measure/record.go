package measure

import (
	"fmt"
	"math"

	"github.com/tautspan/tautspan/engine/compare"
	"github.com/tautspan/tautspan/engine/scenario"
)

// reader is how a leaf that tells a time is read from a record, at a point.
func (s *Session) reader(p *Point, l *leaf) (func(compare.Reading) compare.Interval, error) {
	m := l.bound(p)
	switch m.Kind {
	case scenario.TimeOfPeak:
		return TimeOfPeak, nil
	case scenario.Reach:
		return func(r compare.Reading) compare.Interval { return Reach(r, m.Args[0]) }, nil
	case scenario.Settle:
		after, rest := ExcitationEnd(p.Network), StaticValue(p.Network, p.Mesh, l.channel)
		return func(r compare.Reading) compare.Interval { return Settle(r, m.Args[0], after, rest) }, nil
	}
	return nil, fmt.Errorf("measure: %s is not read from a record", m.Source)
}

// unknown is a reading of which nothing can be said.
func unknown() compare.Interval {
	return compare.Interval{Value: math.NaN(), Low: math.Inf(-1), High: math.Inf(1)}
}

// TimeOfPeak is when the record's magnitude is largest, s, by rows; it lies
// between the first and the last row that could be the largest within the band.
func TimeOfPeak(r compare.Reading) compare.Interval {
	peak, least, at := 0.0, math.Inf(-1), 0
	for i, v := range r.Values {
		a := math.Abs(v)
		if a > peak {
			peak, at = a, i
		}
		least = math.Max(least, a-r.Band[i])
	}
	out := compare.Interval{Value: float64(at) * r.Every, Low: float64(at) * r.Every, High: float64(at) * r.Every}
	for i, v := range r.Values {
		if math.Abs(v)+r.Band[i] >= least {
			t := float64(i) * r.Every
			out.Low, out.High = math.Min(out.Low, t), math.Max(out.High, t)
		}
	}
	return out
}

// Reach is the first time, s, at which the record's magnitude reaches a level,
// straight between rows. Where it does not, the value is NaN and it lies beyond
// the record's end, or where the band allows within it.
func Reach(r compare.Reading, level float64) compare.Interval {
	end := float64(len(r.Values)-1) * r.Every
	out := compare.Interval{Value: math.NaN(), Low: end, High: math.Inf(1)}
	lowFound := false
	for i, v := range r.Values {
		a, t := math.Abs(v), float64(i)*r.Every
		if !lowFound && a+r.Band[i] >= level {
			lowFound = true
			out.Low = math.Max(0, t-r.Every)
			if i == 0 {
				out.Low = 0
			}
		}
		if math.IsNaN(out.Value) && a >= level {
			out.Value = t
			if i > 0 {
				before := math.Abs(r.Values[i-1])
				out.Value = t - r.Every*(a-level)/(a-before)
			}
		}
		if a-r.Band[i] >= level {
			out.High = t
			break
		}
	}
	return out
}

// Settle is the last time, s, at which the record less its static value exceeds
// a share of its peak, both counted from the end of the excitation; straight
// between rows. Where it still does in the last row, the value is NaN and it
// lies beyond the record's end. A record that stays at rest has settled when
// the excitation ends. There is no value where the excitation goes on or the
// static value is not known.
func Settle(r compare.Reading, share, after, static float64) compare.Interval {
	n := len(r.Values)
	first := int(math.Ceil(after/r.Every - 1e-9))
	if !(after < math.Inf(1)) || first >= n || !(share >= 0) || math.IsNaN(static) {
		return unknown()
	}
	peak, least, most := 0.0, 0.0, 0.0
	for i := first; i < n; i++ {
		a := math.Abs(r.Values[i] - static)
		peak, least, most = math.Max(peak, a), math.Max(least, a-r.Band[i]), math.Max(most, a+r.Band[i])
	}
	last := func(threshold, sign float64) int {
		for i := n - 1; i >= first; i-- {
			if math.Abs(r.Values[i]-static)+sign*r.Band[i] > threshold {
				return i
			}
		}
		return -1
	}
	start := math.Max(after, 0)
	out := compare.Interval{Value: start, Low: start, High: start}
	if i := last(share*peak, 0); i == n-1 {
		out.Value = math.NaN()
	} else if i >= 0 {
		a, b := math.Abs(r.Values[i]-static), math.Abs(r.Values[i+1]-static)
		out.Value = (float64(i) + (a-share*peak)/(a-b)) * r.Every
	}
	if i := last(share*most, -1); i >= 0 {
		out.Low = float64(i) * r.Every
	}
	if i := last(share*least, 1); i == n-1 {
		out.High = math.Inf(1)
	} else if i >= 0 {
		out.High = float64(i+1) * r.Every
	}
	return out
}

// swings counts the changes of sign of a record up to a time: the number of the
// swing in which an event lies.
func swings(values []float64, every, until float64) int {
	n := 0
	for i := 1; i < len(values) && float64(i)*every <= until; i++ {
		if (values[i] > 0) != (values[i-1] > 0) {
			n++
		}
	}
	return n
}
