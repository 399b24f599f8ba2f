package formula

import (
	"math"
	"sort"
)

// history evaluates the named time functions. Each is 0 before it starts; s[0]
// is the time, already shifted by any delay.
//
//	half_sine   peak sin(pi t/duration) for 0 <= t <= duration
//	sine        amplitude sin(2 pi f t + phase) for t >= 0
//	sweep_sine  amplitude sin(2 pi (f1 t + (f2-f1) t^2/(2 duration))) for 0 <= t <= duration
//	step        value from time on
//	ramp        0 until from, value after to, straight between
func history(op Op, s []float64) float64 {
	t := s[0]
	switch op {
	case OpHalfSine:
		if t <= 0 || t >= s[2] {
			return 0
		}
		return s[1] * math.Sin(math.Pi*t/s[2])
	case OpSine:
		if t < 0 {
			return 0
		}
		return s[1] * math.Sin(2*math.Pi*s[2]*t+s[3])
	case OpSweepSine:
		if t <= 0 || t >= s[4] {
			return 0
		}
		return s[1] * math.Sin(2*math.Pi*(s[2]*t+(s[3]-s[2])*t*t/(2*s[4])))
	case OpStep:
		if t < s[2] {
			return 0
		}
		return s[1]
	case OpRamp:
		switch {
		case t <= s[2]:
			return 0
		case t >= s[3]:
			return s[1]
		}
		return s[1] * (t - s[2]) / (s[3] - s[2])
	}
	panic("formula: unknown operation")
}

// Table is a function given by rows, straight between them and 0 outside.
type Table struct {
	Name string    `json:"name"` // where it came from, for messages
	X    []float64 `json:"x"`    // strictly increasing, SI
	Y    []float64 `json:"y"`    // same length, SI
}

// At is the table's value at x; NaN where x is.
func (t *Table) At(x float64) float64 {
	n := len(t.X)
	if math.IsNaN(x) {
		return x
	}
	if n == 0 || x < t.X[0] || x > t.X[n-1] {
		return 0
	}
	i := sort.SearchFloat64s(t.X, x)
	if i < n && t.X[i] == x {
		return t.Y[i]
	}
	w := (x - t.X[i-1]) / (t.X[i] - t.X[i-1])
	return t.Y[i-1] + w*(t.Y[i]-t.Y[i-1])
}
