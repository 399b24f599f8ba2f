package app

import (
	"context"
	"os"
	"path/filepath"
	"strings"
	"testing"

	"github.com/tautspan/tautspan/engine/scenario"
)

const varied = `tautspan 1
let pull = 10 kN
stock w {
    mass  1 kg/m
}
line l {
    tension  pull
    support  a  fixed
    segment  s  w 20 m
    support  b  fixed
}
vary pull from 8 kN to 12 kN, 400 steps
collect frequency(1)
`

// A sweep that is stopped keeps the cases that are done, and says so.
func TestStoppedSweepKeepsWhatIsDone(t *testing.T) {
	dir := filepath.Join(t.TempDir(), "out")
	ctx, cancel := context.WithCancel(context.Background())
	defer cancel()
	doc, status, err := New().Sweep(ctx, Input{File: "-", Stdin: strings.NewReader(varied)}, SweepWant{Out: dir, Workers: 2, Progress: func(done, _ int) {
		if done == 25 {
			cancel()
		}
	}})
	if err != nil || status != Interrupted || !doc.Cut {
		t.Fatalf("status %v, error %v", status, err)
	}
	if doc.Cases != 401 || doc.Done < 20 || doc.Done > 40 || doc.Failed != 0 || len(doc.Rows) != doc.Done {
		t.Errorf("%d cases, %d done, %d failed, %d rows", doc.Cases, doc.Done, doc.Failed, len(doc.Rows))
	}
	csv, err := os.ReadFile(filepath.Join(dir, "cases.csv"))
	if err != nil {
		t.Fatal(err)
	}
	if n := strings.Count(string(csv), "\n"); n != doc.Done+1 {
		t.Errorf("the table has %d lines for %d cases", n, doc.Done)
	}
}

// The cases of a grid: the last statement changes fastest; drawn lets are drawn
// anew at every point of the grid, the same ones.
func TestPlan(t *testing.T) {
	s := &sweeper{doc: emptySweep(), loaded: &loaded{}}
	c := New()
	l, err := c.load("sweep", Input{File: "-", Stdin: strings.NewReader("tautspan 1\nlet a = 1\nlet b = 2\nlet c = 3\nvary a through 1, 2\nvary b through 5, 6, 7\nvary c lognormal(2, 0.5)\nsample 1000, seed 3\n")})
	if err != nil {
		t.Fatal(err)
	}
	s.loaded = l
	p, total := s.plan(10000)
	if p == nil || len(p.values) != 6000 || total != 6000 {
		t.Fatalf("%v cases", total)
	}
	for k, want := range map[int][2]float64{0: {1, 5}, 1000: {1, 6}, 2999: {1, 7}, 3000: {2, 5}, 5999: {2, 7}} {
		if got := p.values[k]; got[0] != want[0] || got[1] != want[1] || got[2] != p.values[k%1000][2] {
			t.Errorf("case %d: %v", k, got)
		}
	}
	sum, squares := 0.0, 0.0
	for _, row := range p.values[:1000] {
		sum += row[2] / 1000
	}
	for _, row := range p.values[:1000] {
		squares += (row[2] - sum) * (row[2] - sum) / 999
	}
	// A hypercube of 1000: mean and variance of the let itself to about a per cent.
	if sum < 1.99 || sum > 2.01 || squares < 0.24 || squares > 0.26 {
		t.Errorf("mean %g, variance %g, want 2 and 0.25", sum, squares)
	}
	if p, _ := s.plan(5999); p != nil {
		t.Error("more cases than allowed were planned")
	}
}

// Quantiles by hand: the median of each, and one end.
func TestQuantiles(t *testing.T) {
	for _, c := range []struct {
		draw        scenario.Distribution
		values      []float64
		share, want float64
	}{
		{scenario.DrawNormal, []float64{5, 2}, 0.5, 5}, {scenario.DrawNormal, []float64{5, 2}, 0.9772498680518208, 9},
		{scenario.DrawUniform, []float64{3, 7}, 0.25, 4}, {scenario.DrawOneOf, []float64{1, 2, 5}, 0.99, 5}, {scenario.DrawOneOf, []float64{1, 2, 5}, 0.34, 2},
		{scenario.DrawLognormal, []float64{2, 0.5}, 0.5, 2 / 1.0307764064044151}, // mean/sqrt(1 + (sd/mean)^2)
	} {
		got := quantile(&scenario.Vary{Draw: c.draw, Values: c.values}, c.share)
		if d := got - c.want; d > 1e-9 || d < -1e-9 {
			t.Errorf("%v %v at %g: %.12g, want %.12g", c.draw, c.values, c.share, got, c.want)
		}
	}
}
