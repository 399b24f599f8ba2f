package conform

import (
	"context"
	"fmt"
	"math"

	"github.com/tautspan/tautspan/engine/mesh"
	"github.com/tautspan/tautspan/engine/scenario"
	"github.com/tautspan/tautspan/engine/solver"
)

// Finding is what one solver does on one manufactured case.
type Finding struct {
	Case, Solver string
	Refused      []string
	Error        []float64 // relative L2 error of displacement over all watches, a level each
	RateError    []float64 // the same of velocity
	Observed     float64   // order from the last two levels
	Claimed      float64   // 0: faster than any order
	Ratio        float64
	Difference   []float64 // relative L2 difference between successive levels
	Neglect      float64   // share of a record that the solver says it may be off for what it leaves out
	Unaccounted  float64   // share of the most energy held
}

// String is a line for a test's log.
func (f Finding) String() string {
	return fmt.Sprintf("%-14s %-58s errors %.1e velocity %.1e order %.2f (claims %g) energy gap %.1e", f.Solver, f.Case, f.Error, f.RateError, f.Observed, f.Claimed, f.Unaccounted)
}

// Measure runs a solver at three levels of a case.
func Measure(ctx context.Context, s solver.Solver, c Case) (Finding, error) {
	f := Finding{Case: c.Name, Solver: s.Name()}
	m, err := mesh.Build(c.Net)
	if err != nil {
		return f, err
	}
	if c.Adjust != nil {
		c.Adjust(m)
	}
	if f.Refused = s.Refuses(m); len(f.Refused) > 0 {
		return f, nil
	}
	var last *solver.Result
	for level := 0; level < 3; level++ {
		r, err := s.Solve(ctx, m, solver.Request{Level: level, Effort: 1}, nil)
		if err != nil {
			return f, err
		}
		f.Error = append(f.Error, errorOf(m, r, scenario.Displacement, c.Exact))
		f.RateError = append(f.RateError, errorOf(m, r, scenario.Velocity, c.Rate))
		if last != nil {
			f.Difference = append(f.Difference, differenceOf(m, last, r))
		}
		f.Claimed, f.Ratio, f.Neglect = r.Order, r.Ratio, r.Neglect
		f.Unaccounted = math.Abs(r.Energy.Unaccounted()) / r.Energy.Most
		last = r
	}
	f.Observed = math.Log(f.Error[1]/f.Error[2]) / math.Log(f.Ratio)
	return f, nil
}

// errorOf is the relative L2 error over all channels of one quantity.
func errorOf(m *mesh.Mesh, r *solver.Result, q scenario.Quantity, exact func(line int, x, t float64) float64) float64 {
	diff, norm := 0.0, 0.0
	for ci := range m.Channels {
		c := &m.Channels[ci]
		if c.Quantity != q || c.Along {
			continue
		}
		for row, v := range r.Series[ci][0] {
			want := exact(c.Line, c.X[0], float64(row)*m.Timing.Every)
			diff += (v - want) * (v - want)
			norm += want * want
		}
	}
	return math.Sqrt(diff / norm)
}

func differenceOf(m *mesh.Mesh, a, b *solver.Result) float64 {
	diff, norm := 0.0, 0.0
	for ci := range m.Channels {
		if m.Channels[ci].Quantity != scenario.Displacement {
			continue
		}
		for row, v := range b.Series[ci][0] {
			d := v - a.Series[ci][0][row]
			diff += d * d
			norm += v * v
		}
	}
	return math.Sqrt(diff / norm)
}
