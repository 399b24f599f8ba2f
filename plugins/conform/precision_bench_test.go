package conform_test

import (
	"context"
	"fmt"
	"math"
	"sort"
	"strings"
	"testing"
	"time"

	"github.com/tautspan/tautspan/engine/mesh"
	"github.com/tautspan/tautspan/engine/solver"
)

// longRows is the long record of the benchmarks.
const longRows = 1_000_001

// The time that one solution of a benchmark may take, s. A ladder of levels or
// sizes ends, after its second rung, where the next would take longer.
const (
	longestSolver = 6
	longestScript = 10
)

// rung is one solution by one contestant: a level of a solver or a size of a
// script.
type rung struct {
	size    int
	seconds float64 // fastest seen
	err     float64
	work    int64
	run     func() ([][]float64, error)
}

// ladder is a contestant with its rungs, coarse to fine.
type ladder struct {
	name   string
	script bool
	rungs  []*rung
}

// climb adds rungs until the next would take too long or the error stalls.
func (l *ladder) climb(b *testing.B, c *contest, sizes []int, make func(size int) *rung) {
	b.Helper()
	longest := float64(longestSolver)
	if l.script {
		longest = longestScript
	}
	for _, size := range sizes {
		r := make(size)
		if n := len(l.rungs); n > 1 {
			last, before := l.rungs[n-1], l.rungs[n-2]
			if last.seconds*math.Max(1, last.seconds/before.seconds) > longest || last.err > 0.7*before.err && last.err < 1e-4 {
				return
			}
		}
		begin := time.Now()
		records, err := r.run()
		if err != nil {
			b.Fatal(err)
		}
		r.size, r.seconds, r.err = size, time.Since(begin).Seconds(), relativeErrors(records, c.reference(), c.stride)
		l.rungs = append(l.rungs, r)
		if r.seconds > longest && len(l.rungs) > 1 {
			return
		}
	}
}

// ladders lists the contestants of a case: scripts first.
func ladders(b *testing.B, c *contest) []*ladder {
	b.Helper()
	var out []*ladder
	for _, s := range c.scripts {
		l := &ladder{name: s.name, script: true}
		l.climb(b, c, s.sizes, func(size int) *rung {
			return &rung{run: func() ([][]float64, error) { return s.run(size), nil }}
		})
		out = append(out, l)
	}
	m, err := mesh.Build(c.net)
	if err != nil {
		b.Fatal(err)
	}
	for _, s := range solvers() {
		l := &ladder{name: s.Name()}
		l.climb(b, c, []int{0, 1, 2, 3, 4, 5, 6}, func(level int) *rung {
			req := solver.Request{Level: level, Effort: 1}
			r := &rung{run: func() ([][]float64, error) {
				r, err := s.Solve(context.Background(), m, req, nil)
				if err != nil {
					return nil, err
				}
				var out [][]float64
				for _, ch := range r.Series {
					out = append(out, ch[0])
				}
				return out, nil
			}}
			if p, err := s.Plan(m, req); err == nil {
				r.work = p.Work
			}
			return r
		})
		out = append(out, l)
	}
	return out
}

// BenchmarkPrecision gives work-precision pairs rung by rung: time of a
// solution, relative L2 error against the reference, and the work planned.
func BenchmarkPrecision(b *testing.B) {
	for _, c := range contests(longRows) {
		b.Run(c.name, func(b *testing.B) {
			for _, l := range ladders(b, &c) {
				for _, r := range l.rungs {
					b.Run(fmt.Sprintf("%s/%d", l.name, r.size), r.measure)
				}
			}
		})
	}
}

func (r *rung) measure(b *testing.B) {
	b.ReportAllocs()
	for b.Loop() {
		if _, err := r.run(); err != nil {
			b.Fatal(err)
		}
	}
	b.ReportMetric(r.err, "rel-error")
	b.ReportMetric(-math.Log10(r.err), "digits")
	if r.work > 0 {
		b.ReportMetric(float64(r.work), "cell-steps")
	}
}

// BenchmarkEqualError compares contestants at equal error. Each pass runs every
// rung of every contestant of a case once, one after the other, so that what
// else the machine does meets them alike, and the fastest pass of each counts.
// Run it with -benchtime 5x or more; it prints a table.
func BenchmarkEqualError(b *testing.B) {
	for _, c := range contests(longRows) {
		b.Run(c.name, func(b *testing.B) {
			all := ladders(b, &c)
			for b.Loop() {
				for _, l := range all {
					for _, r := range l.rungs {
						begin := time.Now()
						if _, err := r.run(); err != nil {
							b.Fatal(err)
						}
						r.seconds = math.Min(r.seconds, time.Since(begin).Seconds())
					}
				}
			}
			b.Log("\n" + tableOf(c.name, all))
		})
	}
}

// tableOf is a table of pairs and of the scripts' times in those of each
// contestant.
func tableOf(name string, all []*ladder) string {
	var s strings.Builder
	head, rule := "| case | by | seconds and error |", "| --- | --- | --- |"
	for _, base := range all {
		if base.script {
			head += fmt.Sprintf(" times faster than %s at 1e-3 | at 1e-6 |", base.name)
			rule += " --- | --- |"
		}
	}
	fmt.Fprintf(&s, "%s\n%s\n", head, rule)
	for _, l := range all {
		var pairs []string
		for _, r := range l.rungs {
			pairs = append(pairs, fmt.Sprintf("%.2g s %.1e", r.seconds, r.err))
		}
		fmt.Fprintf(&s, "| %s | %s | %s |", name, l.name, strings.Join(pairs, " · "))
		for _, base := range all {
			if !base.script {
				continue
			}
			for _, e := range []float64{1e-3, 1e-6} {
				theirs, how1 := base.at(e)
				ours, how2 := l.at(e)
				fmt.Fprintf(&s, " %.3g%s |", theirs/ours, how1+how2)
			}
		}
		s.WriteString("\n")
	}
	return s.String()
}

// at is the time to reach an error, by straight lines through the logarithms of
// the pairs that no other pair beats in both; "e" says that it was extrapolated
// along the last four, "c" that the coarsest rung is finer already.
func (l *ladder) at(err float64) (seconds float64, how string) {
	sorted := append([]*rung(nil), l.rungs...)
	sort.Slice(sorted, func(i, j int) bool { return sorted[i].seconds < sorted[j].seconds })
	var best []*rung
	for _, r := range sorted {
		if n := len(best); n == 0 || r.err < best[n-1].err {
			best = append(best, r)
		}
	}
	if err >= best[0].err {
		return best[0].seconds, "c"
	}
	if len(best) == 1 {
		return math.NaN(), ""
	}
	k := 1
	for k < len(best)-1 && best[k].err > err {
		k++
	}
	a, z := best[k-1], best[k]
	if z.err > err {
		// The last two alone would take one lucky or unlucky rung for the order.
		a, how = best[max(0, k-3)], "e"
	}
	slope := math.Log(z.seconds/a.seconds) / math.Log(z.err/a.err)
	return z.seconds * math.Pow(err/z.err, slope), how
}
