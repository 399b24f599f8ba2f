package characteristic

import (
	"context"
	"errors"
	"fmt"
	"math"
	"math/rand/v2"
	"runtime"
	"strings"
	"testing"

	"github.com/tautspan/tautspan/engine/mesh"
	"github.com/tautspan/tautspan/engine/scenario"
	"github.com/tautspan/tautspan/engine/solver"
)

func TestFreeze(t *testing.T) {
	m := threeBench(0.08)
	m.Timing.Rows = 500
	a := solve(t, m, 0)
	m.Pieces[1].Tension *= 0.99
	b, err := New().Solve(context.Background(), m, solver.Request{Level: 3, Freeze: a.Layout}, nil)
	if err != nil {
		t.Fatal(err)
	}
	if !b.Frozen || b.Layout.(Layout).Step != a.Layout.(Layout).Step {
		t.Errorf("frozen %v, steps %v and %v", b.Frozen, b.Layout, a.Layout)
	}
	m.Pieces[0].Tension *= 1e8
	b, err = New().Solve(context.Background(), m, solver.Request{Freeze: a.Layout}, nil)
	if err != nil {
		t.Fatal(err)
	}
	if b.Frozen || !strings.Contains(strings.Join(b.Notes, " "), "does not fit") {
		t.Errorf("a layout that does not fit was used: %v %q", b.Frozen, b.Notes)
	}
}

func TestLevelsHalveTheStep(t *testing.T) {
	m := threeBench(0)
	m.Timing.Rows = 100
	a, b := solve(t, m, 0), solve(t, m, 1)
	if got := a.Layout.(Layout).Step / b.Layout.(Layout).Step; got != a.Ratio || a.Ratio != 2 || a.Order != 4 {
		t.Errorf("step ratio %g, told %g, order %g", got, a.Ratio, a.Order)
	}
}

func TestCancelled(t *testing.T) {
	m := threeBench(0)
	m.Timing = mesh.Timing{Every: 1, Rows: 10000}
	ctx, stop := context.WithCancel(context.Background())
	calls := 0
	_, err := New().Solve(ctx, m, solver.Request{}, func(share float64) {
		if calls++; calls == 3 {
			stop()
		}
	})
	if !errors.Is(err, context.Canceled) || calls > 4 {
		t.Errorf("error %v after %d reports", err, calls)
	}
}

func TestBudget(t *testing.T) {
	m := threeBench(0)
	if _, err := New().Plan(m, solver.Request{Level: 30}); !errors.Is(err, solver.ErrBudget) {
		t.Errorf("plan: %v", err)
	}
	if _, err := New().Solve(context.Background(), m, solver.Request{Level: 30}, nil); !errors.Is(err, solver.ErrBudget) {
		t.Errorf("solve: %v", err)
	}
	if _, err := New().Plan(m, solver.Request{Level: 5000}); !errors.Is(err, solver.ErrBudget) {
		t.Errorf("plan: %v", err)
	}
	m.Timing.Rows = math.MaxInt / 2
	if _, err := New().Solve(context.Background(), m, solver.Request{}, nil); !errors.Is(err, solver.ErrBudget) {
		t.Errorf("rows: %v", err)
	}
}

// Plan's bytes are what Solve allocates, within a factor.
func TestPlanBytes(t *testing.T) {
	for _, m := range []*mesh.Mesh{threeBench(0), threeBench(0.08), pressedMesh(3)} {
		look(m, scenario.Velocity, 0, inside(1, 3))
		m.Timing.Rows = 20
		var before, after runtime.MemStats
		runtime.ReadMemStats(&before)
		solve(t, m, 3)
		runtime.ReadMemStats(&after)
		p, err := New().Plan(m, solver.Request{Level: 3, Effort: 1})
		if err != nil {
			t.Fatal(err)
		}
		if got := float64(after.TotalAlloc - before.TotalAlloc); got > 1.3*float64(p.Bytes) || got < 0.1*float64(p.Bytes) {
			t.Errorf("planned %d bytes, allocated %g", p.Bytes, got)
		}
	}
}

func TestNoAllocationPerStep(t *testing.T) {
	m := threeBench(0.08)
	m.Nodes[1].Brackets = []mesh.Maxwell{{K: 1e4, C: 50}}
	m.Presses = pressedMesh(0).Presses
	m.Timing.Rows = 100000
	look(m, scenario.Velocity, 1, node(1))
	lay, _ := plan(m, solver.Request{})
	r, err := assemble(m, &lay)
	if err != nil {
		t.Fatal(err)
	}
	if n := testing.AllocsPerRun(2000, func() {
		r.advance()
		r.output(float64(r.k) * r.step)
	}); n != 0 {
		t.Errorf("%g allocations a step", n)
	}
}

// On a lossless line with a bare joint a leapfrog with its cells matched to its
// step is exact at its points; so is, to its own error, this solver, but with
// other steps: the numbers must be close and not the same.
func TestOwnStepNotLeapfrogs(t *testing.T) {
	m := span(1e-3, 301, stretch{10, 10000, 1, 0}, stretch{10, 10000, 4, 0})
	m.Band = 60
	m.Pushes = []mesh.Push{{At: inside(0, 5), Force: bump(300, 0.08)}}
	look(m, scenario.Displacement, 0, inside(1, 5))
	got := solve(t, m, 0).Series[0][0]
	const n, z1, z2, dt = 100, 100.0, 200.0, 1e-3 // cells of 0.1 m and 0.05 m, Courant 1
	u, old := make([]float64, 301), make([]float64, 301)
	want := make([]float64, 301)
	for k := range want {
		want[k] = u[200]
		next := make([]float64, 301)
		for j := 1; j < 300; j++ {
			next[j] = u[j-1] + u[j+1] - old[j]
		}
		next[100] = 2*(z1*u[99]+z2*u[101])/(z1+z2) - old[100]
		next[50] += m.Pushes[0].Force.Value.At(float64(k)*dt, 0) * dt / z1
		if k == 0 {
			next[50] /= 2
		}
		u, old = next, u
	}
	d := relative(got, want)
	if !(d < 1e-3) || d < 1e-12 {
		t.Errorf("relative difference %g", d)
	}
	lay, _ := plan(m, solver.Request{Effort: 1})
	for _, p := range m.Pieces {
		if q := p.TravelTime() / lay.Step; math.Abs(q-math.Round(q)) < 0.02 {
			t.Errorf("travel time is %g steps", q)
		}
	}
}

// wild is a mesh of random numbers, some of them senseless.
func wild(rng *rand.Rand) *mesh.Mesh {
	size := func() float64 {
		switch rng.IntN(400) {
		case 0:
			return 0
		case 1:
			return -1
		case 2:
			return math.NaN()
		case 3:
			return math.Inf(1)
		case 4:
			return 1e300
		case 5:
			return 1e-300
		}
		return math.Exp(6 * (rng.Float64() - 0.5))
	}
	maybe := func() float64 {
		if rng.IntN(3) > 0 {
			return 0
		}
		return 100 * size()
	}
	var parts []stretch
	for i := 0; i <= rng.IntN(4); i++ {
		parts = append(parts, stretch{3 * size(), 1000 * size(), size(), maybe() / 100})
	}
	m := span(0.01*size(), 1+rng.IntN(50), parts...)
	m.Band, m.Jump = maybe()/10, rng.IntN(5)
	for i := range m.Nodes {
		n := &m.Nodes[i]
		n.Fixed = rng.IntN(3) == 0
		n.Mass, n.Spring, n.Dashpot = maybe()/100, maybe()*10, maybe()
		n.Start, n.StartRate = maybe()*1e-4, maybe()*1e-2
		if rng.IntN(5) == 0 {
			n.Brackets = []mesh.Maxwell{{K: 1000 * size(), C: 10 * size()}}
		}
	}
	m.Nodes = append(m.Nodes, mesh.Node{Name: "hung", Line: -1, Mass: size()})
	m.Links = []mesh.Link{{A: rng.IntN(len(m.Nodes)), B: len(m.Nodes) - 1, Spring: maybe() * 10, Dashpot: maybe()}}
	k := rng.IntN(len(parts))
	m.Pushes = []mesh.Push{{At: inside(k, parts[k].length*rng.Float64()), Force: step(100*size(), 0.01*size())}, {At: node(rng.IntN(len(m.Nodes))), Force: halfSine(size(), 0.01*size())}}
	if rng.IntN(3) == 0 {
		m.Presses = []mesh.Press{{Parts: []mesh.Part{{Piece: k, From: parts[k].length * rng.Float64(), To: parts[k].length}}, Force: step(size(), 0)}}
	}
	if rng.IntN(3) == 0 {
		m.Rolls = []mesh.Roll{{Speed: size(), Force: size(), From: maybe() / 100}}
	}
	if rng.IntN(2) == 0 && parts[0].length > 0 {
		m.Pieces[0].Start = hat(parts[0].length, parts[0].length/3, 0.01)
		m.Pieces[0].Marks = []mesh.Mark{{Kind: mesh.MarkKink, At: parts[0].length / 3}}
	}
	for q := scenario.Displacement; q <= scenario.Tension; q++ {
		look(m, q, rng.IntN(3), node(rng.IntN(len(m.Nodes))), inside(k, parts[k].length*rng.Float64()))
	}
	return m
}

// Whatever the mesh, there is an answer of numbers or an error of a known kind.
func TestAnyMesh(t *testing.T) {
	rng := rand.New(rand.NewPCG(1, 2))
	solved, faults := 0, 0
	for i := 0; i < 300; i++ {
		m := wild(rng)
		p, err := New().Plan(m, solver.Request{})
		if err == nil && p.Work > 3e6 {
			continue
		}
		res, err := New().Solve(context.Background(), m, solver.Request{}, nil)
		var fault *solver.FaultError
		switch {
		case err == nil:
			solved++
			for _, ch := range res.Series {
				for _, s := range ch {
					for _, v := range s {
						if math.IsNaN(v) || math.IsInf(v, 0) {
							t.Fatalf("mesh %d: a record is not finite", i)
						}
					}
				}
			}
		case errors.As(err, &fault):
			faults++
			if fault.Solver != name || fault.What == "" {
				t.Errorf("mesh %d: %v", i, err)
			}
		case !errors.Is(err, solver.ErrBudget):
			t.Errorf("mesh %d: %v", i, err)
		}
	}
	if solved < 100 || faults < 20 {
		t.Errorf("solved %d, faults %d: the test has lost its reach", solved, faults)
	}
	t.Logf("solved %d, faults %d", solved, faults)
}

// A picture over x and t holds every stride-th row of what points record, and a
// run leaves the mesh as it was and comes out the same again.
func TestPictureAndRepeat(t *testing.T) {
	m := threeBench(0.08)
	m.Timing.Rows = 3001
	m.Channels = nil
	spots := []mesh.Spot{node(0), inside(0, 10), node(1), inside(1, 20), node(3)}
	look(m, scenario.Velocity, 0, spots...)
	look(m, scenario.Velocity, 0, spots...)
	m.Channels[0].Along = true
	rows, stride := m.FieldRows()
	before := fmt.Sprintf("%+v", *m)
	a, b := solve(t, m, 0), solve(t, m, 0)
	if fmt.Sprintf("%+v", *m) != before {
		t.Error("the mesh has changed")
	}
	if stride < 2 || len(a.Series[0][0]) != rows {
		t.Fatalf("stride %d, %d rows", stride, len(a.Series[0][0]))
	}
	for k := range spots {
		for i := range rows {
			if a.Series[0][k][i] != a.Series[1][k][i*stride] || a.Series[0][k][i] != b.Series[0][k][i] {
				t.Fatalf("spot %d, row %d: %g, %g, %g", k, i, a.Series[0][k][i], a.Series[1][k][i*stride], b.Series[0][k][i])
			}
		}
	}
}
