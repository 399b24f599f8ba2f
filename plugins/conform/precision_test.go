package conform_test

import (
	"context"
	"fmt"
	"math"
	"strings"
	"sync"
	"testing"
	"time"

	"github.com/tautspan/tautspan/engine/compare"
	"github.com/tautspan/tautspan/engine/mesh"
	"github.com/tautspan/tautspan/engine/scenario"
	"github.com/tautspan/tautspan/engine/solver"
)

// contest is a case that solvers and plain scripts compete on.
type contest struct {
	name      string
	net       *scenario.Network
	reference func() [][]float64
	stride    int // rows between those that count
	scripts   []script
}

// script is a plain baseline at growing sizes.
type script struct {
	name  string
	sizes []int
	run   func(size int) [][]float64
}

// contests are the three cases; rows is the length of the long record.
func contests(rows int) []contest {
	pluck, three, long := uniformPluck(), threeSegments(), longRecord(rows)
	start, frequencies := pluck.Starts[0].Shape, tones()
	return []contest{
		{"uniform pluck", pluck, sync.OnceValue(func() [][]float64 { return [][]float64{pluckRecord()} }), 1, []script{
			{"leapfrog, Courant 1", []int{20, 40, 100, 200, 400, 1000, 2000, 4000}, func(cells int) [][]float64 {
				return leapfrogUniform(20, 0.35, 8400, 0.05, cells, func(x float64) float64 { return start.At(0, x) }, nil, 0, []float64{7}, 20001, 1.0/2000)
			}},
			{"mode sum", []int{10, 20, 50, 100, 200, 400, 1000, 2000}, func(modes int) [][]float64 { return modeSum(modes, 20001, 1.0/2000) }},
		}},
		{"three segments", three, sync.OnceValue(func() [][]float64 {
			return [][]float64{struck().answer(500, 0.008, 10001, 1.0/2000, referenceContour())}
		}), 1, []script{
			{"leapfrog, matched", []int{5, 10, 20, 40, 80, 160, 320, 640}, func(k int) [][]float64 { return leapfrogMatched(k, 10001, 1.0/2000) }},
		}},
		{"long record", long, sync.OnceValue(func() [][]float64 { return tonesRecord(rows, 50, 6000) }), 50, []script{
			{"leapfrog, Courant 1", []int{100, 200, 400, 1000, 2000}, func(cells int) [][]float64 {
				push := func(t float64) float64 {
					f := 0.0
					for _, hz := range frequencies {
						f += tonesPeak * math.Sin(2*math.Pi*hz*t)
					}
					return f
				}
				return leapfrogUniform(tonesLength, tonesMass, tonesTension, tonesViscous, cells, nil, push, tonesAt, tonesHeard(), rows, tonesEvery)
			}},
			{"mode filters", []int{1, 2, 4, 8}, func(n int) [][]float64 { return modeFilters(12*n*n, n, rows) }},
		}},
	}
}

// outcome is one solution of a contest.
type outcome struct {
	seconds, err, gap float64
	plan              solver.Plan
	order, ratio      float64
	records           [][]float64
}

func (c *contest) solve(s solver.Solver, m *mesh.Mesh, level int) (outcome, error) {
	begin := time.Now()
	r, err := s.Solve(context.Background(), m, solver.Request{Level: level, Effort: 1}, nil)
	if err != nil {
		return outcome{}, err
	}
	o := outcome{seconds: time.Since(begin).Seconds(), plan: r.Plan, order: r.Order, ratio: r.Ratio}
	for _, ch := range r.Series {
		o.records = append(o.records, ch[0])
	}
	o.gap = math.Abs(r.Energy.Unaccounted()) / r.Energy.Most
	o.err = relativeErrors(o.records, c.reference(), c.stride)
	return o, nil
}

// Every solver's error falls from level to level, and its own error bar from
// three levels holds the true error. The long record is cut to 20 s here; the
// gap of the energy account is shown, not judged.
func TestWorkPrecision(t *testing.T) {
	for _, c := range contests(20001) {
		m, err := mesh.Build(c.net)
		if err != nil {
			t.Fatal(err)
		}
		for _, s := range solvers() {
			t.Run(c.name+"/"+s.Name(), func(t *testing.T) {
				var o [3]outcome
				var lines []string
				for level := range o {
					if o[level], err = c.solve(s, m, level); err != nil {
						t.Fatal(err)
					}
					lines = append(lines, fmt.Sprintf("%.3g s %.1e", o[level].seconds, o[level].err))
					if level > 0 && !(o[level].err < o[level-1].err) {
						t.Errorf("level %d: the error goes from %.2e to %.2e", level, o[level-1].err, o[level].err)
					}
				}
				last := o[2]
				change := func(fine, coarse outcome) float64 { // in the norm of the error
					norm, diff := 0.0, 0.0
					for p, want := range c.reference() {
						for i, w := range want {
							d := fine.records[p][i*c.stride] - coarse.records[p][i*c.stride]
							norm += w * w
							diff += d * d
						}
					}
					return math.Sqrt(diff / norm)
				}
				bar := compare.NewBar(change(o[1], o[0]), change(last, o[1]), last.ratio, last.order)
				t.Logf("%s; bar %.1e, order %.2f of %g, energy gap %.1e", strings.Join(lines, ", "), bar.Bound, bar.Order, last.order, last.gap)
				if last.err > bar.Bound+promised {
					t.Errorf("the error %.2e lies outside the bar %.2e", last.err, bar.Bound)
				}
			})
		}
	}
}
