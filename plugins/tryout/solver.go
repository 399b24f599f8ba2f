package tryout

import (
	"context"
	"math"
	"strings"
	"time"

	"github.com/tautspan/tautspan/engine/compare"
	"github.com/tautspan/tautspan/engine/mesh"
	"github.com/tautspan/tautspan/engine/scenario"
	"github.com/tautspan/tautspan/engine/solver"
	"github.com/tautspan/tautspan/plugins/conform"
)

// rounding is the relative error below which no order can be read any more.
const rounding = 1e-10

// Solver tries a solver on cases whose exact motion is known: its order, whether
// its error bar holds the true error, whether it repeats itself bit for bit, and
// whether it stops when told.
func Solver(ctx context.Context, s solver.Solver) []Check {
	b := &book{}
	solved := 0
	var first *mesh.Mesh
	for _, c := range append(closed(), conform.Cases()...) {
		f, err := conform.Measure(ctx, s, c)
		switch {
		case ctx.Err() != nil:
			b.note(c.Name, false, "stopped")
			return b.checks
		case err != nil:
			b.note(c.Name, false, "%v", err)
			continue
		case len(f.Refused) > 0:
			b.refused(c.Name, strings.Join(f.Refused, "; "))
			continue
		}
		solved++
		if first == nil {
			first, _ = mesh.Build(c.Net) // Measure has built it
		}
		b.judge(c.Name, &f)
	}
	b.note("answers something", solved > 0, "%d cases solved", solved)
	if first != nil {
		b.repeats(ctx, s, first)
		b.stops(ctx, s, first)
	}
	return b.checks
}

// judge holds one case's errors against the order claimed and the bar that
// tautspan would print.
func (b *book) judge(name string, f *conform.Finding) {
	last, before := f.Error[len(f.Error)-1], f.Error[len(f.Error)-2]
	bar := compare.NewBar(f.Difference[0], f.Difference[1], f.Ratio, f.Claimed)
	switch {
	case math.IsNaN(last) || last > 0.2:
		b.note(name, false, "errors %.1e", f.Error)
	case last < rounding:
		b.note(name, true, "exact but for rounding")
	case f.Neglect > 0 && last <= bar.Bound+f.Neglect:
		b.note(name, true, "errors %.1e; leaves something out and says so: %.1e", f.Error, f.Neglect)
	case f.Claimed == 0 && last > before/10:
		b.note(name, false, "claims to be faster than any order, and its errors fall as %.1e", f.Error)
	case f.Claimed > 0 && f.Observed < f.Claimed-0.3:
		b.note(name, false, "claims order %g and shows %.2f (errors %.1e)", f.Claimed, f.Observed, f.Error)
	case last > bar.Bound:
		b.note(name, false, "the true error %.1e lies outside the bar %.1e", last, bar.Bound)
	case f.Unaccounted > 0.05:
		b.note(name, false, "%.0f %% of the energy is not accounted for", 100*f.Unaccounted)
	default:
		b.note(name, true, "errors %.1e, order %.2f, bar %.1e, energy gap %.0e", f.Error, f.Observed, bar.Bound, f.Unaccounted)
	}
}

// repeats asks twice for the same.
func (b *book) repeats(ctx context.Context, s solver.Solver, m *mesh.Mesh) {
	const name = "the same bits twice"
	var kept *solver.Result
	for range 2 {
		r, err := s.Solve(ctx, m, solver.Request{Level: 1, Effort: 1}, nil)
		if err != nil {
			b.note(name, false, "%v", err)
			return
		}
		if kept == nil {
			kept = r
			continue
		}
		for c := range r.Series {
			for k := range r.Series[c] {
				for i, v := range r.Series[c][k] {
					if math.Float64bits(v) != math.Float64bits(kept.Series[c][k][i]) {
						b.note(name, false, "row %d is %v, then %v", i, kept.Series[c][k][i], v)
						return
					}
				}
			}
		}
	}
	b.note(name, true, "every row")
}

// stopsWithin is how soon a solver must end when its context does.
const stopsWithin = 2 * time.Second

// stops cancels a long solution soon after its start.
func (b *book) stops(ctx context.Context, s solver.Solver, m *mesh.Mesh) {
	const name = "stops when told"
	long := *m
	long.Channels = append([]mesh.Channel(nil), m.Channels...)
	long.Timing.Rows = 400_000
	inner, cancel := context.WithTimeout(ctx, 50*time.Millisecond)
	defer cancel()
	begin := time.Now()
	_, err := s.Solve(inner, &long, solver.Request{Level: 3, Effort: 2}, nil)
	took := time.Since(begin)
	switch {
	case err == nil:
		b.note(name, true, "was done before it was told")
	case took > stopsWithin:
		b.note(name, false, "took %.1f s to stop", took.Seconds())
	default:
		b.note(name, true, "after %.2f s", took.Seconds())
	}
}

// closed are cases that the plainest solver can try: displacement alone, one
// held line.
func closed() []conform.Case {
	const L, m, T = 20.0, 0.5, 2000.0
	line := func(viscous float64) *scenario.Network {
		net := &scenario.Network{}
		net.Lines = []scenario.Line{{Name: "l", Nodes: []scenario.Node{{Name: "a", Fixed: true}, {Name: "b", Fixed: true}},
			Segments: []scenario.Segment{{Name: "s", Length: L, MassPerLength: m, Tension: T, Viscous: viscous}}}}
		for _, x := range []float64{3.1, 8.7, 15.2} {
			net.Watches = append(net.Watches, scenario.Watch{Name: "w", At: scenario.Place{Node: -1, Offset: x}, Quantities: []scenario.Quantity{scenario.Displacement}})
		}
		net.Run = scenario.RunOf[float64]{For: 1.2, Every: 0.006}
		return net
	}
	var out []conform.Case
	for name, c := range map[string]float64{"one vibration of a held line": 0, "one vibration that dies away": 0.8} {
		net := line(c)
		k := 3 * math.Pi / L
		net.Starts = []scenario.StartOf[float64]{{Name: "x", Along: scenario.SpanOf{Segment: -1}, Shape: sineShape(0.02, k)}}
		g := c / (2 * m)
		w := math.Sqrt(T/m*k*k - g*g)
		out = append(out, conform.Case{Name: name, Net: net, Exact: func(_ int, x, t float64) float64 {
			return 0.02 * math.Sin(k*x) * math.Exp(-g*t) * (math.Cos(w*t) + g/w*math.Sin(w*t))
		}, Rate: nothing})
	}
	if out[0].Name > out[1].Name {
		out[0], out[1] = out[1], out[0] // a map has no order
	}
	return append(out, knock(line(0), L, m, T))
}

func nothing(int, float64, float64) float64 { return 0 }
