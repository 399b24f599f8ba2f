package host

import (
	"context"
	"errors"
	"math"
	"os"
	"path/filepath"
	"reflect"
	"strings"
	"sync"
	"syscall"
	"testing"
	"time"

	"go.uber.org/goleak"

	"github.com/tautspan/tautspan/engine/formula"
	"github.com/tautspan/tautspan/engine/mesh"
	"github.com/tautspan/tautspan/engine/scenario"
	"github.com/tautspan/tautspan/engine/solver"
	"github.com/tautspan/tautspan/plugins/author"
	"github.com/tautspan/tautspan/plugins/characteristic"
	"github.com/tautspan/tautspan/plugins/conform"
	"github.com/tautspan/tautspan/plugins/differences"
	"github.com/tautspan/tautspan/plugins/spectral"
)

// started starts the test program as a plugin.
func started(t *testing.T, what string, limits Limits) (*Process, error) {
	t.Helper()
	exe, err := os.Executable()
	if err != nil {
		t.Fatal(err)
	}
	sum, err := Checksum(exe)
	if err != nil {
		t.Fatal(err)
	}
	p, err := Start(context.Background(), Spec{Name: "under-test", Path: exe, Args: []string{"serve", what}, Checksum: sum, Limits: limits})
	if err == nil {
		t.Cleanup(p.Close)
	}
	return p, err
}

func mustStart(t *testing.T, what string, limits Limits) *Process {
	t.Helper()
	p, err := started(t, what, limits)
	if err != nil {
		t.Fatal(err)
	}
	return p
}

// plucked is a small line at a watch.
func plucked(t *testing.T) *mesh.Mesh {
	t.Helper()
	return pluckedMesh(t)
}

func pluckedMesh(t testing.TB) *mesh.Mesh {
	t.Helper()
	net := &scenario.Network{}
	net.Lines = []scenario.Line{{Name: "l", Nodes: []scenario.Node{{Name: "a", Fixed: true}, {Name: "b", Fixed: true}},
		Segments: []scenario.Segment{{Name: "s", Length: 2, MassPerLength: 0.5, Tension: 800}}}}
	net.Plucks = []scenario.PluckOf[float64]{{Name: "p", At: scenario.Place{Node: -1, Offset: 0.5}, ByLength: true, Length: 0.01}}
	net.Watches = []scenario.Watch{{Name: "w", At: scenario.Place{Node: -1, Offset: 1}, Quantities: []scenario.Quantity{scenario.Displacement}}}
	net.Run = scenario.RunOf[float64]{For: 0.2, Every: 0.001}
	m, err := mesh.Build(net)
	if err != nil {
		t.Fatal(err)
	}
	return m
}

// The built-in solvers give the same bits apart as in process, on every
// manufactured case and in a frozen second solution.
func TestApartSameBits(t *testing.T) {
	for _, s := range []solver.Solver{differences.New(), spectral.New(), characteristic.New()} {
		p := mustStart(t, s.Name(), Limits{})
		apart, err := NewSolver(p, true)
		if err != nil {
			t.Fatal(err)
		}
		for i, c := range conform.Cases() {
			if testing.Short() && i%4 != 0 {
				continue
			}
			m, err := mesh.Build(c.Net)
			if err != nil {
				t.Fatal(err)
			}
			if here, there := s.Refuses(m), apart.Refuses(m); !reflect.DeepEqual(append([]string{}, here...), append([]string{}, there...)) {
				t.Fatalf("%s: refuses %v here and %v apart", c.Name, here, there)
			} else if len(here) > 0 {
				continue
			}
			req := solver.Request{Effort: 1}
			a, err := s.Solve(context.Background(), m, req, nil)
			if err != nil {
				t.Fatal(err)
			}
			b, err := apart.Solve(context.Background(), m, req, nil)
			if err != nil {
				t.Fatal(err)
			}
			same(t, c.Name, a, b)
			af, err := s.Solve(context.Background(), m, solver.Request{Effort: 1, Freeze: a.Layout}, nil)
			if err != nil {
				t.Fatal(err)
			}
			bf, err := apart.Solve(context.Background(), m, solver.Request{Effort: 1, Freeze: b.Layout}, nil)
			if err != nil {
				t.Fatal(err)
			}
			same(t, c.Name+", frozen", af, bf)
			if af.Frozen != bf.Frozen {
				t.Errorf("%s by %s: frozen %t here, %t apart", c.Name, s.Name(), af.Frozen, bf.Frozen)
			}
		}
	}
}

func same(t *testing.T, what string, a, b *solver.Result) {
	t.Helper()
	for c := range a.Series {
		for k := range a.Series[c] {
			for i, v := range a.Series[c][k] {
				if math.Float64bits(v) != math.Float64bits(b.Series[c][k][i]) {
					t.Fatalf("%s: channel %d row %d is %v in process and %v apart", what, c, i, v, b.Series[c][k][i])
				}
			}
		}
	}
	if a.Energy != b.Energy || a.Order != b.Order || a.Ratio != b.Ratio || a.Plan != b.Plan || !reflect.DeepEqual(a.Notes, b.Notes) {
		t.Errorf("%s: %+v and %+v", what, a.Plan, b.Plan)
	}
}

// Whatever a plugin does wrong becomes an error that names it, in time.
func TestFaults(t *testing.T) {
	m := plucked(t)
	limits := Limits{Start: 5 * time.Second, Stall: time.Second, Memory: 600 << 20, Output: 1 << 20}
	for what, want := range map[string]string{
		"crash":           "ended in the middle of its work",
		"panic":           "a wrong turn",
		"panic elsewhere": "ended in the middle of its work",
		"hang":            "was silent for 1s",
		"nan":             "answered NaN for w.displacement at row 3",
		"order":           "claims order 99",
		"ratio":           "at a step ratio of 1",
		"error":           "the line is too long for me",
		"flood":           "wrote more than its limit of output",
		"hoard":           "of memory",
		"wrong question":  "the problem has no start 99",
	} {
		t.Run(what, func(t *testing.T) {
			t.Parallel()
			limits := limits
			if what == "hoard" {
				limits.Stall = time.Minute // it must not be the silence that ends it
			}
			s, err := NewSolver(mustStart(t, what, limits), false)
			if err != nil {
				t.Fatal(err)
			}
			_, err = s.Solve(context.Background(), m, solver.Request{}, nil)
			var fault *solver.FaultError
			if !errors.As(err, &fault) || fault.Solver != "still" || !strings.Contains(fault.What, want) {
				t.Errorf("%v, want a fault of still with %q", err, want)
			}
		})
	}
	s, err := NewSolver(mustStart(t, "start", limits), false)
	if err != nil {
		t.Fatal(err)
	}
	r, err := s.Solve(context.Background(), m, solver.Request{}, nil)
	if err != nil || r.Series[0][0][0] != 0.01 || math.Abs(r.Series[0][0][1]-0.01*2/3) > 1e-15 {
		t.Errorf("a healthy plugin: %v", err)
	}
}

// An author's solver gives the same bits in this process and in one of its own.
func TestForeignSameBits(t *testing.T) {
	m := plucked(t)
	shape := formula.Apply(formula.OpSine, formula.Arg(formula.ArgT), formula.Const(3), formula.Const(7.7), formula.Const(0.2))
	m.Pushes = append(m.Pushes, mesh.Push{Name: "p", At: mesh.Spot{Node: -1, Piece: 0, At: 0.7}, Force: scenario.History{Value: shape, Breaks: []float64{0}}})
	here, err := InProcess(&still{bad: "work"}).Solve(context.Background(), m, solver.Request{}, nil)
	if err != nil {
		t.Fatal(err)
	}
	s, err := NewSolver(mustStart(t, "work", Limits{}), false)
	if err != nil {
		t.Fatal(err)
	}
	there, err := s.Solve(context.Background(), m, solver.Request{}, nil)
	if err != nil {
		t.Fatal(err)
	}
	same(t, "an author's solver", here, there)
	if here.Series[0][0][7] == 0 {
		t.Error("nothing was worked out")
	}
}

// What cannot start says so.
func TestStartFaults(t *testing.T) {
	limits := Limits{Start: time.Second}
	for what, want := range map[string]string{
		"not a plugin": "is not a tautspan plugin", "never starts": "did not start in time",
		"dies at once": "is not a tautspan plugin", "bad name": "is not a tautspan plugin",
	} {
		t.Run(what, func(t *testing.T) {
			t.Parallel()
			_, err := started(t, what, limits)
			if err == nil || !strings.Contains(err.Error(), want) || !strings.Contains(err.Error(), "under-test") {
				t.Errorf("%v, want %q", err, want)
			}
		})
	}
	exe, _ := os.Executable()
	for checksum, want := range map[string]string{strings.Repeat("ab", 32): "not the one that was trusted", "abc": "no SHA-256"} {
		_, err := Start(context.Background(), Spec{Name: "x", Path: exe, Args: []string{"serve", "ok"}, Checksum: checksum})
		if err == nil || !strings.Contains(err.Error(), want) {
			t.Errorf("%v, want %q", err, want)
		}
	}
	if _, err := Start(context.Background(), Spec{Name: "x", Path: filepath.Join(t.TempDir(), "none")}); err == nil {
		t.Error("a file that is not there starts")
	}
}

func TestJudgement(t *testing.T) {
	m := plucked(t)
	s, _ := NewSolver(mustStart(t, "refuses", Limits{}), false)
	if got := s.Refuses(m); len(got) != 1 || got[0] != "does not feel like it" {
		t.Errorf("refuses %v", got)
	}
	s, _ = NewSolver(mustStart(t, "budget", Limits{}), false)
	if _, err := s.Plan(m, solver.Request{}); !errors.Is(err, solver.ErrBudget) {
		t.Errorf("plan: %v", err)
	}
	s, _ = NewSolver(mustStart(t, "negative plan", Limits{}), false)
	var fault *solver.FaultError
	if _, err := s.Plan(m, solver.Request{}); !errors.As(err, &fault) {
		t.Errorf("plan: %v", err)
	}
	m.Lines[0].Stretch = &mesh.Stretch{Stiffness: 1}
	if got := s.Refuses(m); len(got) != 1 || !strings.Contains(got[0], "grows with amplitude") {
		t.Errorf("what the protocol cannot say is refused for the plugin: %v", got)
	}
}

// A cancelled solution ends at once and leaves the plugin usable.
func TestCancel(t *testing.T) {
	m := plucked(t)
	s, _ := NewSolver(mustStart(t, "slow", Limits{}), false)
	for range 3 {
		ctx, cancel := context.WithTimeout(context.Background(), 50*time.Millisecond)
		_, err := s.Solve(ctx, m, solver.Request{}, nil)
		cancel()
		if !errors.Is(err, context.DeadlineExceeded) {
			t.Errorf("%v", err)
		}
	}
	if len(s.Refuses(m)) != 0 {
		t.Error("the plugin is no longer usable")
	}
}

// A stopped process cannot be asked to end; it is ended, in time.
func TestStopped(t *testing.T) {
	p := mustStart(t, "ok", Limits{})
	if err := syscall.Kill(p.cmd.Process.Pid, syscall.SIGSTOP); err != nil {
		t.Fatal(err)
	}
	p.Close()
	if alive(p.cmd.Process.Pid) {
		t.Error("a stopped plugin lives on")
	}
}

func alive(pid int) bool {
	for range 40 {
		if syscall.Kill(pid, 0) != nil {
			return false
		}
		time.Sleep(50 * time.Millisecond)
	}
	return true
}

// Killed in mid-call again and again: no process, file or goroutine is left.
func TestKilledOften(t *testing.T) {
	loops := 200
	if testing.Short() {
		loops = 20
	}
	defer goleak.VerifyNone(t, goleak.IgnoreCurrent())
	m := plucked(t)
	before, kept := openFiles(t), folders(t)
	exe, _ := os.Executable()
	sem := make(chan struct{}, 4)
	var wg sync.WaitGroup
	for range loops {
		wg.Add(1)
		sem <- struct{}{}
		go func() {
			defer func() { <-sem; wg.Done() }()
			p, err := Start(context.Background(), Spec{Name: "k", Path: exe, Args: []string{"serve", "slow"}})
			if err != nil {
				t.Error(err)
				return
			}
			defer p.Close()
			s, _ := NewSolver(p, false)
			pid := p.cmd.Process.Pid
			timer := time.AfterFunc(20*time.Millisecond, func() { _ = syscall.Kill(pid, syscall.SIGKILL) })
			defer timer.Stop()
			var fault *solver.FaultError
			if _, err := s.Solve(context.Background(), m, solver.Request{}, nil); !errors.As(err, &fault) {
				t.Errorf("%v", err)
			}
			p.Close()
			if alive(pid) {
				t.Error("a killed plugin lives on")
			}
		}()
	}
	wg.Wait()
	if after := openFiles(t); after > before+3 {
		t.Errorf("%d open files before, %d after", before, after)
	}
	if n := folders(t); n > kept {
		t.Errorf("%d folders of plugins before, %d after", kept, n)
	}
}

func openFiles(t *testing.T) int {
	t.Helper()
	list, err := os.ReadDir("/proc/self/fd")
	if err != nil {
		t.Skip("no /proc to count open files in")
	}
	return len(list)
}

func folders(t *testing.T) int {
	t.Helper()
	list, err := filepath.Glob(filepath.Join(os.TempDir(), "tautspan-plugin-*"))
	if err != nil {
		t.Fatal(err)
	}
	return len(list)
}

// Many solutions at once over one process.
func TestManyAtOnce(t *testing.T) {
	m := plucked(t)
	direct := differences.New()
	want, err := direct.Solve(context.Background(), m, solver.Request{Effort: 1}, nil)
	if err != nil {
		t.Fatal(err)
	}
	s, _ := NewSolver(mustStart(t, "differences", Limits{}), true)
	var wg sync.WaitGroup
	for range 64 {
		wg.Add(1)
		go func() {
			defer wg.Done()
			got, err := s.Solve(context.Background(), m, solver.Request{Effort: 1}, nil)
			if err != nil {
				t.Error(err)
				return
			}
			if !reflect.DeepEqual(got.Series, want.Series) {
				t.Error("not the same answer")
			}
		}()
	}
	wg.Wait()
}

// Sixteen MiB and more each way: a record of 2.2 million rows back, as many
// places asked for.
func TestLargeMessages(t *testing.T) {
	m := plucked(t)
	m.Timing.Rows = 2_200_000
	s, _ := NewSolver(mustStart(t, "start", Limits{}), false)
	r, err := s.Solve(context.Background(), m, solver.Request{}, nil)
	if err != nil || len(r.Series[0][0]) != 2_200_000 || r.Series[0][0][2_199_998] != 0.01 {
		t.Fatalf("%v", err)
	}
	p := mustStart(t, "load", Limits{})
	l, err := NewLoad(p)
	if err != nil {
		t.Fatal(err)
	}
	places := make([]float64, 2_200_000)
	for i := range places {
		places[i] = float64(i)
	}
	force := make([][]float64, len(places))
	for k := range force {
		force[k] = make([]float64, 1)
	}
	q := author.LoadWant{Parameters: map[string]float64{"rate": 2}, Places: places}
	if err := l.Evaluate(context.Background(), q, []float64{0}, force); err != nil || force[2_199_999][0] != 2_199_999 {
		t.Fatalf("%v", err)
	}
}

func TestLoadsAndLaws(t *testing.T) {
	l, err := NewLoad(mustStart(t, "load", Limits{}))
	if err != nil {
		t.Fatal(err)
	}
	q := author.LoadWant{Parameters: map[string]float64{"rate": 2}, Along: true, Length: 10, Duration: 1, Places: []float64{0, 5}}
	if step, spacing, err := l.Prepare(q); step != 0.01 || spacing != 1 || err != nil {
		t.Errorf("%g %g %v", step, spacing, err)
	}
	times := make([]float64, 9001)
	for i := range times {
		times[i] = 0.01 * float64(i)
	}
	force := [][]float64{make([]float64, len(times)), make([]float64, len(times))}
	if err := l.Evaluate(context.Background(), q, times, force); err != nil || force[1][9000] != 2*times[9000]+5 || force[0][4096] != 2*times[4096] {
		t.Errorf("%v %v", err, force[1][9000])
	}
	q.Parameters["rate"] = 13
	if _, _, err := l.Prepare(q); err == nil || err.Error() != "a rate of 13 N/s is unlucky" {
		t.Errorf("%v", err)
	}
	q.Parameters["rate"] = 66
	if err := l.Evaluate(context.Background(), q, times, force); err == nil || !strings.Contains(err.Error(), "answered +Inf") {
		t.Errorf("%v", err)
	}

	w, err := NewLaw(mustStart(t, "law", Limits{}))
	if err != nil {
		t.Fatal(err)
	}
	if text, err := w.Written(map[string]float64{"c": 5}); text != "force = -c * v" || err != nil {
		t.Errorf("%q %v", text, err)
	}
	f, err := w.Follow(map[string]float64{"c": 5})
	if err != nil {
		t.Fatal(err)
	}
	if v, err := f.Force(0, 0, 3, true); v != -15 || err != nil {
		t.Errorf("%g %v", v, err)
	}
	if _, err := f.Force(0, 0, 1e4, true); err == nil || !strings.Contains(err.Error(), "too fast") {
		t.Errorf("%v", err)
	}
	if _, err := NewSolver(w.process, false); err == nil {
		t.Error("a law is no solver")
	}
}
