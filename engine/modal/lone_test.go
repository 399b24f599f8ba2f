package modal

import (
	"math"
	"math/rand/v2"
	"testing"

	"github.com/tautspan/tautspan/engine/mesh"
)

// The closed frequency equation of a single span against the counted search of
// the matrix, over ends that turn freely, not at all, and against springs, from a
// slack bar to a slender line.
func TestLoneSpanAgainstTheMatrix(t *testing.T) {
	r := rand.New(rand.NewPCG(1, 2))
	for trial := range 60 {
		end := func() mesh.Node {
			switch r.IntN(4) {
			case 0:
				return mesh.Node{Fixed: true}
			case 1:
				return mesh.Node{Fixed: true, Clamped: true}
			}
			return mesh.Node{Fixed: true, Rotary: math.Pow(10, 2+6*r.Float64())}
		}
		b := &build{}
		a := b.node(end())
		b.piece(a, b.node(end()), 2+20*r.Float64(), 1+30*r.Float64(), math.Pow(10, 3+3*r.Float64()), 0)
		xi := math.Pow(10, 0.3+2.5*r.Float64())
		p := &b.m.Pieces[0]
		if p.Bending = p.Tension * p.Length * p.Length / (xi * xi); trial%10 == 0 {
			p.Bending = 0 // a string
		}
		w := split(&b.m)[0]
		l, ok := w.lone()
		if !ok {
			t.Fatal("not taken for a single span")
		}
		fast := l.modes(Want{Count: 12}, nil)
		c := newCounter(w)
		lo, hi, jhi, err := c.reach(13, 0)
		if err != nil {
			t.Fatal(err)
		}
		slow := c.roots(span{lo, hi, w.rigid, jhi})
		if len(slow) < 12 || len(fast.osc) != 12 {
			t.Fatalf("trial %d: %d and %d vibrations", trial, len(slow), len(fast.osc))
		}
		for i := range fast.osc {
			// The matrix is good to some 1e-12 at these sizes.
			if d := math.Abs(imag(fast.osc[i])/slow[i] - 1); d > 1e-10 {
				t.Errorf("trial %d, xi %.1f, mode %d: %.14g, by the matrix %.14g", trial, xi, i+1, imag(fast.osc[i]), slow[i])
			}
		}
		if n := c.below(0.5 * (imag(fast.osc[11]) + fast.complete)); n != 12 {
			t.Errorf("trial %d: %d vibrations lie below the end of a list of 12", trial, n)
		}
	}
}

func BenchmarkLoneSpan10(b *testing.B) {
	s := &build{}
	a := s.node(mesh.Node{Fixed: true, Rotary: 9e5})
	s.piece(a, s.node(mesh.Node{Fixed: true, Rotary: 9e5}), 11.6, 15.3, 310e3, 0)
	s.m.Pieces[0].Bending = 27.5e3
	benchmark(b, &s.m, Want{Count: 10})
}
