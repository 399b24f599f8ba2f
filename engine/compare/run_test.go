package compare

import (
	"context"
	"errors"
	"fmt"
	"math"
	"math/rand/v2"
	"strings"
	"sync"
	"sync/atomic"
	"testing"
	"time"

	"go.uber.org/goleak"

	"github.com/tautspan/tautspan/engine/mesh"
	"github.com/tautspan/tautspan/engine/scenario"
	"github.com/tautspan/tautspan/engine/solver"
)

// plain is a mesh for solvers that do not look at it: one line, one watch.
func plain(rows int, quantities ...scenario.Quantity) *mesh.Mesh {
	m := &mesh.Mesh{
		Nodes:  []mesh.Node{{Fixed: true, Line: 0}, {Fixed: true, Line: 0, X: 10}},
		Pieces: []mesh.Piece{{From: 0, To: 1, Length: 10, MassPerLength: 1, Tension: 1000}},
		Lines:  []mesh.Line{{Name: "l", Pieces: []int{0}, Length: 10}},
		Timing: mesh.Timing{Every: 0.01, Rows: rows},
	}
	for i, q := range quantities {
		m.Channels = append(m.Channels, mesh.Channel{Watch: fmt.Sprintf("w%d", i), Quantity: q, Spots: []mesh.Spot{{Node: -1, At: 3}}, X: []float64{3}})
	}
	return m
}

// fake answers with a known record plus an error of known order:
// v(t) = truth(t) + a e1(t) h^order + b e2(t) h^(order+1), h = ratio^-level.
type fake struct {
	name         string
	order, ratio float64 // true order; the claimed one is theory
	theory       float64
	truth        func(c int, t float64) float64
	error1       func(c int, t float64) float64
	error2       func(c int, t float64) float64
	work         int64
	refuses      []string
	before       func(ctx context.Context, level int) error
	after        func(level int, r *solver.Result)
	most         *atomic.Int64 // largest number of solutions at once
	now          *atomic.Int64
}

func (f *fake) Name() string                { return f.name }
func (f *fake) Version() string             { return "1" }
func (f *fake) Refuses(*mesh.Mesh) []string { return f.refuses }
func (f *fake) h(level int) float64         { return math.Pow(f.ratio, -float64(level)) }
func (f *fake) cost(level int) (work int64) {
	return int64(float64(f.work) / (f.h(level) * f.h(level)))
}
func (f *fake) Plan(m *mesh.Mesh, r solver.Request) (solver.Plan, error) {
	return solver.Plan{Cells: 10 << r.Level, Steps: 10 << r.Level, Work: f.cost(r.Level), Bytes: 1000}, nil
}

func (f *fake) Solve(ctx context.Context, m *mesh.Mesh, req solver.Request, progress func(float64)) (*solver.Result, error) {
	if f.now != nil {
		n := f.now.Add(1)
		for old := f.most.Load(); n > old && !f.most.CompareAndSwap(old, n); old = f.most.Load() {
		}
		defer f.now.Add(-1)
	}
	if f.before != nil {
		if err := f.before(ctx, req.Level); err != nil {
			return nil, err
		}
	}
	plan, _ := f.Plan(m, req)
	r := &solver.Result{Plan: plan, Order: f.theory, Ratio: f.ratio, Series: solver.NewSeries(m), Energy: solver.Energy{Start: 1, End: 0.5, Lost: 0.5, Most: 1}}
	h := f.h(req.Level)
	a, b := math.Pow(h, f.order), math.Pow(h, f.order+1)
	for c := range r.Series {
		for k := range r.Series[c] {
			for i := range r.Series[c][k] {
				t := float64(i) * m.Timing.Every
				v := f.truth(c, t)
				if f.error1 != nil {
					v += a * f.error1(c, t)
				}
				if f.error2 != nil {
					v += b * f.error2(c, t)
				}
				r.Series[c][k][i] = v
			}
		}
	}
	if progress != nil {
		progress(1)
	}
	if f.after != nil {
		f.after(req.Level, r)
	}
	return r, nil
}

func swing(amplitude, frequency, phase float64) func(int, float64) float64 {
	return func(_ int, t float64) float64 {
		return amplitude * math.Sin(2*math.Pi*frequency*t+phase) * math.Exp(-0.2*t)
	}
}

func three() []*fake {
	truth := swing(0.01, 2, 0.3)
	return []*fake{
		{name: "one", order: 2, theory: 2, ratio: 2, truth: truth, error1: swing(4e-4, 2, 1.9), work: 1000},
		{name: "two", order: 4, theory: 4, ratio: 2, truth: truth, error1: swing(4e-4, 3, 0.2), work: 1000},
		{name: "three", order: 6, theory: 0, ratio: 1.5, truth: truth, error1: swing(4e-4, 2, 2.5), work: 1000},
	}
}

func asSolvers(fakes []*fake) []solver.Solver {
	out := make([]solver.Solver, len(fakes))
	for i := range fakes {
		out[i] = fakes[i]
	}
	return out
}

func run(t *testing.T, m *mesh.Mesh, fakes []*fake, o Options) *Outcome {
	t.Helper()
	out, err := Run(context.Background(), m, asSolvers(fakes), o)
	if err != nil {
		t.Fatal(err)
	}
	return out
}

func TestHealthySolversAgree(t *testing.T) {
	m := plain(400, scenario.Displacement, scenario.Velocity)
	out := run(t, m, three(), Options{Agree: 0.001})
	if out.Verdict != Agree {
		t.Fatalf("verdict %v", out.Verdict)
	}
	for _, ch := range out.Channels {
		for _, o := range ch.Observables {
			truth := newFigures([][]float64{record(m, swing(0.01, 2, 0.3))}).of[o.Kind]
			if o.Governed && (o.ResolvingPower > 0.001 || o.Verdict != Agree) {
				t.Errorf("%s %v: %v at %g", ch.Name, o.Kind, o.Verdict, o.ResolvingPower)
			}
			if math.Abs(o.Value-truth) > o.Numerical {
				t.Errorf("%s %v: %g +- %g does not hold %g", ch.Name, o.Kind, o.Value, o.Numerical, truth)
			}
		}
		for i, v := range record(m, swing(0.01, 2, 0.3)) {
			if math.Abs(ch.Series[0][i]-v) > ch.Band[0][i] {
				t.Fatalf("%s row %d: %g +- %g does not hold %g", ch.Name, i, ch.Series[0][i], ch.Band[0][i], v)
			}
		}
		// Pure error terms: observed orders are those of the error.
		near(t, "order of one", ch.Solvers[0].Order, 2, 1e-6)
		near(t, "order of two", ch.Solvers[1].Order, 4, 1e-6)
	}
}

func record(m *mesh.Mesh, f func(int, float64) float64) []float64 {
	out := make([]float64, m.Timing.Rows)
	for i := range out {
		out[i] = f(0, float64(i)*m.Timing.Every)
	}
	return out
}

func TestWrongSolverIsNamed(t *testing.T) {
	m := plain(400, scenario.Displacement)
	for odd := range 3 {
		fakes := three()
		wrong := fakes[odd].truth
		fakes[odd].truth = func(c int, t float64) float64 { return 1.02 * wrong(c, t) }
		out := run(t, m, fakes, Options{Agree: 0.002})
		if out.Verdict != Differ || out.Channels[0].OddOneOut != fakes[odd].name {
			t.Errorf("%s 2 %% off: %v, odd one %q", fakes[odd].name, out.Verdict, out.Channels[0].OddOneOut)
		}
		o := out.Channels[0].Observables[Peak]
		truth := newFigures([][]float64{record(m, swing(0.01, 2, 0.3))}).of[Peak]
		if math.Abs(o.Value-truth) > o.Numerical {
			t.Errorf("reported peak %g +- %g does not hold %g", o.Value, o.Numerical, truth)
		}
	}
	fakes := three()[:2]
	wrong := fakes[0].truth
	fakes[0].truth = func(c int, t float64) float64 { return 1.02 * wrong(c, t) }
	out := run(t, m, fakes, Options{Agree: 0.002})
	o := out.Channels[0].Observables[Peak]
	if out.Verdict != Differ || out.Channels[0].OddOneOut != "" || math.Abs(o.Values[0]-o.Values[1]) > o.Numerical {
		t.Errorf("two solvers: %v, odd one %q, bound %g", out.Verdict, out.Channels[0].OddOneOut, o.Numerical)
	}
}

// A difference of a hundredth of what is asked is no finding, however sharp the
// bars, and the reported bound covers it; ten times as much is one.
func TestImmaterialDifference(t *testing.T) {
	for _, c := range []struct {
		off  float64
		want Verdict
	}{{1e-4, Agree}, {5e-3, Differ}} {
		fakes := three()[:2]
		for _, f := range fakes {
			f.error1 = nil
		}
		right := fakes[0].truth
		fakes[1].truth = func(c1 int, t float64) float64 { return (1 + c.off) * right(c1, t) }
		out := run(t, plain(400, scenario.Displacement), fakes, Options{Agree: 0.01})
		o := out.Channels[0].Observables[Peak]
		if out.Verdict != c.want || math.Abs(o.Values[0]-o.Values[1]) > 1.0001*o.Numerical {
			t.Errorf("%g off: %v, apart %g, bound %g", c.off, out.Verdict, math.Abs(o.Values[0]-o.Values[1]), o.Numerical)
		}
	}
}

func TestOneSolverAlone(t *testing.T) {
	fakes := three()
	fakes[1].refuses = []string{"does not take bending", "does not take stops"}
	fakes[2].refuses = []string{"no"}
	out := run(t, plain(200, scenario.Displacement), fakes, Options{Agree: 0.001})
	if out.Verdict != Alone || out.Channels[0].ResolvingPower > 0.001 {
		t.Errorf("%v at %g", out.Verdict, out.Channels[0].ResolvingPower)
	}
	if out.Voices[1].Reason() != "does not take bending; does not take stops" || out.Voices[1].Finest != nil {
		t.Errorf("voice %+v", out.Voices[1])
	}
	for _, f := range fakes {
		f.refuses = []string{"no"}
	}
	_, err := Run(context.Background(), plain(200), asSolvers(fakes), Options{})
	var absent *AllAbsentError
	if !errors.As(err, &absent) || len(absent.Reasons) != 3 {
		t.Errorf("all refuse: %v", err)
	}
}

func TestFaultsAreFindings(t *testing.T) {
	m := plain(200, scenario.Displacement)
	for name, spoil := range map[string]func(f *fake){
		"not a number":  func(f *fake) { f.after = func(_ int, r *solver.Result) { r.Series[0][0][7] = math.NaN() } },
		"late infinity": func(f *fake) { f.after = func(l int, r *solver.Result) { r.Series[0][0][7] /= float64(2 - l) } },
		"short record":  func(f *fake) { f.after = func(_ int, r *solver.Result) { r.Series[0][0] = r.Series[0][0][1:] } },
		"no record":     func(f *fake) { f.after = func(_ int, r *solver.Result) { r.Series = nil } },
		"energy":        func(f *fake) { f.after = func(_ int, r *solver.Result) { r.Energy.Lost = math.Inf(1) } },
		"fault": func(f *fake) {
			f.before = func(context.Context, int) error { return &solver.FaultError{Solver: f.name, What: "unstable"} }
		},
		"error": func(f *fake) { f.before = func(context.Context, int) error { return errors.New("broken") } },
		"panic": func(f *fake) { f.before = func(context.Context, int) error { panic("index out of range") } },
	} {
		fakes := three()
		spoil(fakes[1])
		out := run(t, m, fakes, Options{Agree: 0.002})
		if out.Verdict != Agree || out.Voices[1].Fault == "" || out.Voices[1].Usable() {
			t.Errorf("%s: %v, fault %q", name, out.Verdict, out.Voices[1].Fault)
		}
		if !math.IsNaN(out.Channels[0].Solvers[1].Peak) || len(out.Channels[0].Observables[Peak].Pairs) != 1 {
			t.Errorf("%s: the faulty solver still counts", name)
		}
	}
}

func TestLimits(t *testing.T) {
	m := plain(200, scenario.Displacement)
	// First three levels: 1000 (1 + 4 + 16) = 21000 and 1000 (1 + 2.25 + 5.0625) = 8312.
	out := run(t, m, three(), Options{Agree: 1e-7, LimitWork: 60000})
	if out.Verdict != Unsettled || out.Work > 60000 {
		t.Errorf("%v with %d spent", out.Verdict, out.Work)
	}
	out = run(t, m, three(), Options{Agree: 0.01, LimitWork: 30000})
	if out.Voices[1].Usable() || !strings.Contains(out.Voices[1].Absent, "limit on work") || !out.Voices[0].Usable() || !out.Voices[2].Usable() {
		t.Errorf("little work: %+v", out.Voices[1])
	}
	_, err := Run(context.Background(), m, asSolvers(three()), Options{LimitMemory: 500})
	var absent *AllAbsentError
	if !errors.As(err, &absent) || !strings.Contains(err.Error(), "limit on memory") {
		t.Errorf("little memory: %v", err)
	}
}

func TestWideThirdIsLeftAlone(t *testing.T) {
	fakes := three()
	fakes[2].order, fakes[2].theory, fakes[2].ratio, fakes[2].work = 0.8, 2, 2, 1e6 // dear and slow
	out := run(t, plain(200, scenario.Displacement), fakes, Options{Agree: 0.001, LimitWork: 1e9})
	if out.Verdict != Agree || out.Voices[2].Levels[2] != 2 {
		t.Errorf("%v, levels of the third %v", out.Verdict, out.Voices[2].Levels)
	}
}

func TestWorkersAndDeterminism(t *testing.T) {
	m := plain(300, scenario.Displacement, scenario.Acceleration)
	first := ""
	for _, workers := range []int{1, 2, 5} {
		var now, most atomic.Int64
		fakes := three()
		for i, f := range fakes {
			f.now, f.most = &now, &most
			f.before = func(_ context.Context, level int) error {
				time.Sleep(time.Duration(3*i+level) * 100 * time.Microsecond)
				return nil
			}
		}
		out := run(t, m, fakes, Options{Agree: 1e-5, Workers: workers})
		if most.Load() > int64(workers) {
			t.Errorf("%d at once on %d workers", most.Load(), workers)
		}
		if got := describe(out); first == "" {
			first = got
		} else if got != first {
			t.Errorf("%d workers: another outcome", workers)
		}
	}
}

// describe prints an outcome to the last bit; NaN prints equal to itself.
func describe(o *Outcome) string {
	s := ""
	for i := range o.Voices {
		s += fmt.Sprintf("%v", *o.Voices[i].Finest)
		o.Voices[i].Finest, o.Voices[i].Solver = nil, nil
	}
	return s + fmt.Sprintf("%v", *o)
}

func TestCancel(t *testing.T) {
	defer goleak.VerifyNone(t)
	fakes := three()
	var once sync.Once
	ctx, cancel := context.WithCancel(context.Background())
	defer cancel()
	hang := make(chan struct{})
	for _, f := range fakes {
		f.before = func(ctx context.Context, level int) error {
			if level < 3 {
				return nil
			}
			once.Do(cancel)
			<-hang // does not listen
			return ctx.Err()
		}
	}
	start := time.Now()
	out, err := Run(ctx, plain(200, scenario.Displacement), asSolvers(fakes), Options{Agree: 1e-6})
	if !errors.Is(err, context.Canceled) || out == nil || !out.Cut || len(out.Channels) != 1 {
		t.Errorf("cut run: %v", err)
	}
	if time.Since(start) > time.Second {
		t.Errorf("took %v to stop", time.Since(start))
	}
	close(hang)
	ended, end := context.WithCancel(context.Background())
	end()
	if out, err := Run(ended, plain(200, scenario.Displacement), asSolvers(three()), Options{}); !errors.Is(err, context.Canceled) || out != nil {
		t.Errorf("cut before the start: %v", err)
	}
}

func TestProgressComesOneAtATime(t *testing.T) {
	inside := false
	count := 0
	run(t, plain(50, scenario.Displacement), three(), Options{Workers: 3, Progress: func(Progress) {
		if inside {
			t.Error("two calls at once")
		}
		inside = true
		count++
		inside = false
	}})
	if count < 9 {
		t.Errorf("%d calls", count)
	}
}

func TestQuietWatchIsNotJudgedOnRounding(t *testing.T) {
	m := plain(200, scenario.Displacement, scenario.Displacement)
	fakes := three()
	for i, f := range fakes {
		loud := f.truth
		random := rand.New(rand.NewPCG(uint64(i), 5))
		f.error1 = nil
		f.truth = func(c int, t float64) float64 {
			if c == 0 {
				return loud(c, t)
			}
			return 1e-17 * random.NormFloat64()
		}
	}
	if out := run(t, m, fakes, Options{Agree: 0.001, Workers: 1}); out.Verdict != Agree {
		t.Errorf("beside a loud watch: %v", out.Verdict)
	}
	m.Channels = m.Channels[1:]
	for i, f := range fakes {
		random := rand.New(rand.NewPCG(uint64(i), 5))
		f.truth = func(c int, t float64) float64 { return 1e-14 * random.NormFloat64() }
	}
	if out := run(t, m, fakes, Options{Agree: 0.001, Workers: 1}); out.Verdict != Agree {
		t.Errorf("alone: %v", out.Verdict)
	}
}

// The bars of solvers whose error is a sum of two terms of successive orders,
// with shapes drawn at random, hold the truth. Nominal 95 %; the cases count each
// observable of each solver.
func TestBarsCoverTheTruth(t *testing.T) {
	random := rand.New(rand.NewPCG(11, 7))
	const cases = 2000
	held, all := map[Kind]int{}, map[Kind]int{}
	for range cases {
		truth := swing(0.01, 1+2*random.Float64(), 6*random.Float64())
		theory := []float64{2, 4, 0}[random.IntN(3)]
		f := &fake{name: "f", theory: theory, ratio: 2, truth: truth, work: 10,
			error1: swing(math.Pow(10, -2-2*random.Float64())*math.Copysign(1, random.Float64()-0.5)*0.3, 1+3*random.Float64(), 6*random.Float64()),
			error2: swing(math.Pow(10, -2-2*random.Float64())*0.3, 1+3*random.Float64(), 6*random.Float64())}
		f.order = theory
		switch {
		case theory == 0:
			f.order, f.ratio = 3+3*random.Float64(), 1.5
		case random.IntN(2) == 0: // not smooth: less than theory
			f.order = 1 + random.Float64()*(theory-1)
		}
		m := plain(300, scenario.Displacement)
		out := run(t, m, []*fake{f}, Options{Agree: 10})
		exact := record(m, truth)
		of := newFigures([][]float64{exact})
		for _, o := range out.Channels[0].Observables {
			off := math.Abs(o.Values[0] - of.of[o.Kind])
			if o.Kind == Record {
				off = distance(out.Channels[0].Series, [][]float64{exact})
			}
			all[o.Kind]++
			if off <= o.Bars[0] {
				held[o.Kind]++
			}
		}
	}
	for k := Kind(0); k < kindCount; k++ {
		share := float64(held[k]) / float64(all[k])
		t.Logf("%v: %.1f %% of %d bars hold the truth", k, 100*share, all[k])
		if share < 0.95 {
			t.Errorf("%v: only %.1f %% of bars hold the truth", k, 100*share)
		}
	}
}

func TestEnvelope(t *testing.T) {
	random := rand.New(rand.NewPCG(3, 4))
	for range 50 {
		d := make([]float64, 1+random.IntN(120))
		for i := range d {
			d[i] = random.NormFloat64()
		}
		w := random.IntN(9)
		got := envelope(d, w, 2)
		for i := range d {
			want := 0.0
			for j := max(0, i-w); j <= min(len(d)-1, i+w); j++ {
				want = math.Max(want, 2*math.Abs(d[j]))
			}
			if got[i] != want {
				t.Fatalf("row %d of %d, half-width %d: %g, want %g", i, len(d), w, got[i], want)
			}
		}
	}
}

func TestReadingIsRefinedUntilKnown(t *testing.T) {
	m := plain(400, scenario.Displacement)
	fakes := three()
	for _, f := range fakes {
		slow := f.error1
		f.error1 = func(c int, t float64) float64 { return 10 * slow(c, t) }
	}
	// The time at which the record passes 1 mm for the first time.
	level := 0.001
	first := func(shift float64) func(r Reading) float64 {
		return func(r Reading) float64 {
			for i, v := range r.Values {
				if math.Abs(v)+shift*r.Band[i] >= level {
					return float64(i) * r.Every
				}
			}
			return math.NaN()
		}
	}
	out := run(t, m, fakes, Options{Agree: 0.02, Asked: []Asked{{Channel: 0, Reading: func(r Reading) Interval {
		return Interval{first(0)(r), first(1)(r), first(-1)(r)}
	}}, {Channel: 0, Kind: Lowest}}})
	a := out.Asked[0]
	if !a.Settled || a.High-a.Low > 2*m.Timing.Every {
		t.Errorf("%+v", a)
	}
	if !out.Channels[0].Observables[Lowest].Governed || out.Channels[0].Observables[Highest].Governed {
		t.Error("what is asked for is governed, and only that")
	}
}
