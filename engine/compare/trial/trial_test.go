package trial

import (
	"context"
	"math/rand/v2"
	"reflect"
	"sync/atomic"
	"testing"

	"github.com/tautspan/tautspan/engine/compare"
	"github.com/tautspan/tautspan/engine/mesh"
	"github.com/tautspan/tautspan/engine/solver"
)

// crude answers with numbers that depend on everything that the defects change.
// Its error falls as ratio^-order.
type crude struct {
	name  string
	calls *atomic.Int64
}

func (c crude) Name() string                { return c.name }
func (c crude) Version() string             { return "1" }
func (c crude) Refuses(*mesh.Mesh) []string { return nil }
func (c crude) Plan(*mesh.Mesh, solver.Request) (solver.Plan, error) {
	return solver.Plan{Work: 1, Bytes: 1}, nil
}

func (c crude) Solve(_ context.Context, m *mesh.Mesh, req solver.Request, _ func(float64)) (*solver.Result, error) {
	c.calls.Add(1)
	sum := 0.0
	for i, n := range m.Nodes {
		sum += float64(i+1) * (n.Mass + n.Dashpot/100 + n.Spring/1e5)
		if n.Fixed {
			sum++
		}
	}
	for i, p := range m.Pieces {
		sum += float64(i+2) * p.MassPerLength
	}
	r := &solver.Result{Order: 2, Ratio: 2, Series: solver.NewSeries(m)}
	for ch := range r.Series {
		for i := range r.Series[ch][0] {
			r.Series[ch][0][i] = sum * (1 + 1e-4/float64(int(1)<<(2*req.Level)))
		}
	}
	return r, nil
}

func TestStudy(t *testing.T) {
	var calls atomic.Int64
	solvers := []solver.Solver{crude{"a", &calls}, crude{"b", &calls}, crude{"c", &calls}}
	scores, err := Study(context.Background(), solvers, 10, 2, 1, compare.Options{Agree: 1e-4, Workers: 1})
	if err != nil {
		t.Fatal(err)
	}
	if scores[0].Raised != 0 || scores[0].Settled != 10 {
		t.Errorf("healthy: %v", scores[0])
	}
	for _, s := range scores[1:] {
		if s.Raised != 10 || s.Named != 10 || s.Misnamed != 0 {
			t.Errorf("%v", s)
		}
	}
	// Three levels each of three healthy solvers and of one spoilt for each defect,
	// a line; the healthy solutions are remembered.
	if want := 10 * (9 + 3*len(Defects(3))); calls.Load() > int64(2*want) {
		t.Errorf("%d solutions, expected about %d", calls.Load(), want)
	}
	again, _ := Study(context.Background(), solvers, 10, 2, 1, compare.Options{Agree: 1e-4})
	if !reflect.DeepEqual(scores, again) {
		t.Error("the same seed gives another study")
	}
}

func TestSpoiltLeavesTheMesh(t *testing.T) {
	m, err := Line(rand.New(rand.NewPCG(3, 1)), 3)
	if err != nil {
		t.Fatal(err)
	}
	if len(m.Pieces) != 3 || len(m.Nodes) != 4 || len(m.Channels) != 7 {
		t.Fatalf("%d pieces, %d nodes, %d channels", len(m.Pieces), len(m.Nodes), len(m.Channels))
	}
	nodes, pieces := append([]mesh.Node(nil), m.Nodes...), append([]mesh.Piece(nil), m.Pieces...)
	for _, d := range Defects(2) {
		seen := Spoilt(crude{}, d.Spoil).(spoilt).seen(m)
		changed := false
		for i := range nodes {
			a, b := seen.Nodes[i], nodes[i]
			changed = changed || a.Mass != b.Mass || a.Spring != b.Spring || a.Dashpot != b.Dashpot || a.Fixed != b.Fixed
			if m.Nodes[i].Mass != b.Mass || m.Nodes[i].Spring != b.Spring || m.Nodes[i].Dashpot != b.Dashpot || m.Nodes[i].Fixed != b.Fixed {
				t.Errorf("%s changes the mesh", d.Name)
			}
		}
		for i := range pieces {
			changed = changed || seen.Pieces[i].MassPerLength != pieces[i].MassPerLength
			if m.Pieces[i].MassPerLength != pieces[i].MassPerLength {
				t.Errorf("%s changes the mesh", d.Name)
			}
		}
		if !changed {
			t.Errorf("%s changes nothing", d.Name)
		}
	}
}
