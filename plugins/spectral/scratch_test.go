package spectral

import (
	"context"
	"github.com/tautspan/tautspan/engine/solver"
	"syscall"
	"testing"
	"time"
)

func TestScratchB2(t *testing.T) {
	ref := caseB2()
	ref.Jump = 9
	rr, err := New().Solve(context.Background(), ref, solver.Request{Level: 2, Effort: 2}, nil)
	if err != nil {
		t.Fatal(err)
	}
	t.Log("ref", rr.Plan.Cells)
	for lev := 0; lev < 5; lev++ {
		m := caseB2()
		c0 := cpu()
		r := solve(t, m, lev)
		t.Log(lev, r.Plan.Cells, r.Plan.Steps, cpu()-c0, apart(r.Series[0][0], rr.Series[0][0]), "gap", r.Energy.Unaccounted()/r.Energy.Most)
	}
}
func TestScratchThree(t *testing.T) {
	ref := threeLossy()
	ref.Jump = 9
	rr, err := New().Solve(context.Background(), ref, solver.Request{Level: 1, Effort: 2}, nil)
	if err != nil {
		t.Fatal(err)
	}
	t.Log("ref", rr.Plan.Cells)
	for lev := 0; lev < 4; lev++ {
		m := threeLossy()
		c0 := cpu()
		r := solve(t, m, lev)
		t.Log(lev, r.Plan.Cells, r.Plan.Steps, cpu()-c0, apart(r.Series[0][0], rr.Series[0][0]), apart(r.Series[1][0], rr.Series[1][0]), apart(r.Series[2][0], rr.Series[2][0]), "gap", r.Energy.Unaccounted()/r.Energy.Most)
	}
}

func cpu() time.Duration {
	var r syscall.Rusage
	syscall.Getrusage(0, &r)
	return time.Duration(r.Utime.Nano())
}
