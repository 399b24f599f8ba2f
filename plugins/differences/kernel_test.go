package differences

import (
	"fmt"
	"math"
	"math/rand/v2"
	"testing"
	"time"
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
	u := []float64{1e-281, -1e-300, 5e-324, 1e-279, -1, 0}
	flush(u)
	want := []float64{0, 0, 0, 1e-279, -1, 0}
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
