package differences

import (
	"fmt"
	"math"
	"math/rand/v2"
	"testing"
	"time"

	"github.com/tautspan/tautspan/engine/formula"
	"github.com/tautspan/tautspan/engine/mesh"
	"github.com/tautspan/tautspan/engine/scenario"
	"github.com/tautspan/tautspan/engine/solver"
)

// The assembly is bit for bit the Go loop, at every length of tail and at
// magnitudes where a fused product would differ.
func TestKernelsAreBitEqual(t *testing.T) {
	if !vectors() {
		t.Skip("no vector kernel here")
	}
	rng := rand.New(rand.NewPCG(1, 2))
	for n := 0; n <= 70; n++ {
		fill := func(size int) []float64 {
			u := make([]float64, size)
			for i := range u {
				u[i] = rng.NormFloat64() * math.Exp(20*rng.NormFloat64())
			}
			return u
		}
		prev, cur := fill(n), fill(n+2)
		d, a := rng.Float64(), rng.Float64()
		want, lossy, lossyGo := append([]float64(nil), prev...), append([]float64(nil), prev...), append([]float64(nil), prev...)
		var sums, sumsGo [lanes]float64
		for step := 0; step < 3; step++ {
			advance(prev, cur, d, a)
			advanceGo(want, cur, d, a)
			advanceLossy(lossy, cur, d, a, &sums)
			advanceLossyGo(lossyGo, cur, d, a, &sumsGo)
		}
		for i := range want {
			if prev[i] != want[i] || lossy[i] != want[i] || lossyGo[i] != want[i] {
				t.Fatalf("n=%d: point %d differs: %v %v %v, want %v", n, i, prev[i], lossy[i], lossyGo[i], want[i])
			}
		}
		if sums != sumsGo {
			t.Fatalf("n=%d: sums %v, want %v", n, sums, sumsGo)
		}
	}
}

// The kernel does not touch what lies beside its points.
func TestKernelStaysInside(t *testing.T) {
	for n := 1; n <= 70; n++ {
		prev, cur := make([]float64, n+16), make([]float64, n+2)
		for i := range prev {
			prev[i] = 7
		}
		for i := range cur {
			cur[i] = float64(i)
		}
		var sums [lanes]float64
		advance(prev[8:8+n], cur, 1, 0.5)
		advanceLossy(prev[8:8+n], cur, 1, 0.5, &sums)
		for i, v := range prev {
			if (i < 8 || i >= 8+n) && v != 7 {
				t.Fatalf("n=%d: value %d beside the points became %v", n, i, v)
			}
		}
	}
}

func TestFlush(t *testing.T) {
	u := []float64{1e-251, -1e-300, 5e-324, 1e-249, -1, 0}
	flush(u)
	want := []float64{0, 0, 0, 1e-249, -1, 0}
	for i := range u {
		if u[i] != want[i] {
			t.Errorf("value %d: %g, want %g", i, u[i], want[i])
		}
	}
}

// Profile factor against the product of the matrix with a known vector.
func TestProfileSolve(t *testing.T) {
	first := []int{0, 0, 1, 0, 4, 4, 2}
	p, err := newProfile(first)
	if err != nil {
		t.Fatal(err)
	}
	n := len(first)
	dense := make([][]float64, n)
	for i := range dense {
		dense[i] = make([]float64, n)
	}
	rng := rand.New(rand.NewPCG(3, 4))
	for i := range first {
		for k := first[i]; k <= i; k++ {
			v := rng.NormFloat64()
			if k == i {
				v = 8
			}
			p.add(i, k, v)
			dense[i][k], dense[k][i] = v, v
		}
	}
	want, b := make([]float64, n), make([]float64, n)
	for i := range want {
		want[i] = rng.NormFloat64()
	}
	for i := range b {
		for k := range want {
			b[i] += dense[i][k] * want[k]
		}
	}
	if err := p.decompose(); err != nil {
		t.Fatal(err)
	}
	p.solve(b)
	for i := range b {
		if math.Abs(b[i]-want[i]) > 1e-13 {
			t.Errorf("unknown %d: %g, want %g", i, b[i], want[i])
		}
	}
}

var benchmarkSizes = []int{500, 1000, 2000, 10000, 1000000}

func BenchmarkStep(b *testing.B) {
	kernels := map[string]func(prev, cur []float64){
		"go":          func(p, c []float64) { advanceGo(p, c, 0.999, 0.98) },
		"vector":      func(p, c []float64) { advance(p, c, 0.999, 0.98) },
		"lossygo":     func(p, c []float64) { var s [lanes]float64; advanceLossyGo(p, c, 0.999, 0.98, &s) },
		"lossyvector": func(p, c []float64) { var s [lanes]float64; advanceLossy(p, c, 0.999, 0.98, &s) },
	}
	for _, name := range []string{"go", "vector", "lossygo", "lossyvector"} {
		for _, n := range benchmarkSizes {
			b.Run(fmt.Sprintf("%s/%d", name, n), func(b *testing.B) {
				u, o := make([]float64, n+2), make([]float64, n+2)
				for i := range u {
					u[i] = math.Sin(math.Pi * float64(i) / float64(n+1))
					o[i] = u[i]
				}
				kernel := kernels[name]
				b.ReportAllocs()
				start := time.Now()
				steps := 0
				for b.Loop() {
					kernel(o[1:n+1], u)
					u, o = o, u
					steps++
				}
				b.ReportMetric(float64(time.Since(start).Nanoseconds())/float64(n)/float64(steps), "ns/cellstep")
			})
		}
	}
}

// BenchmarkWholeStep is a step of a line of three pieces with clamp, dashpot and
// half-sine push, watched at one place, by cells in all. "bare" is the kernel alone on the same cells.
func BenchmarkWholeStep(b *testing.B) {
	for _, n := range []int{500, 1000, 2000, 10000, 100000} {
		for _, viscous := range []float64{0, 0.08} {
			m := line(0.0005, 10001, stretch1{30, 0.9, 20000, viscous}, stretch1{45, 1.6, 20000, viscous}, stretch1{25, 0.9, 20000, viscous})
			m.Nodes[1].Mass, m.Nodes[1].Fitting = 4, true
			m.Nodes[2].Mass, m.Nodes[2].Dashpot, m.Nodes[2].Fitting = 1.5, 120, true
			m.Pushes = []mesh.Push{{Name: "knock", At: mesh.Spot{Node: -1, Piece: 0, At: 12}, Force: timeHistory(formula.OpHalfSine, []float64{0, 0.008}, 500, 0.008)}}
			watchAt(m, scenario.Displacement, 1, 30, 0)
			tau := []float64{m.Pieces[0].TravelTime(), m.Pieces[1].TravelTime(), m.Pieces[2].TravelTime()}
			dt := (tau[0] + tau[1] + tau[2]) / float64(n)
			l := &Layout{Step: dt, Cells: make([]int, 3), Implicit: make([]bool, 3), Order: 2}
			l.fill(m, tau)
			run := func(name string, step func(n int), cells int) {
				b.Run(fmt.Sprintf("%s/%d/loss=%g", name, n, viscous), func(b *testing.B) {
					b.ReportAllocs()
					start, steps := time.Now(), 1
					for b.Loop() {
						step(steps)
						steps++
					}
					b.ReportMetric(float64(time.Since(start).Nanoseconds())/float64(cells)/float64(steps), "ns/cellstep")
				})
			}
			cells := l.Cells[0] + l.Cells[1] + l.Cells[2]
			r, err := newRun(newNetwork(m, l, 0), solver.NewSeries(m))
			if err != nil {
				b.Fatal(err)
			}
			r.begin()
			run("order2", r.step, cells)
			u, o := make([]float64, cells+1), make([]float64, cells+1)
			run("bare", func(int) {
				if viscous > 0 {
					var sums [lanes]float64
					advanceLossy(o[1:cells], u, 0.99, 0.98, &sums)
				} else {
					advance(o[1:cells], u, 0.99, 0.98)
				}
				u, o = o, u
			}, cells)
			l.Order = 4
			l.Step *= fourthShare
			f := newFourthRun(newNetwork(m, l, 0), solver.NewSeries(m))
			run("order4", f.step, cells)
		}
	}
}
