package modal

import (
	"math"
	"math/cmplx"
	"math/rand"
	"sort"
	"testing"

	"gonum.org/v1/gonum/mat"

	"github.com/tautspan/tautspan/engine/mesh"
)

// randomNetwork makes two to four lines of up to four pieces with masses,
// springs, free and held places, hung masses, ties and loops; with damping also
// dashpots, brackets, viscous loss and dashpots in links.
func randomNetwork(r *rand.Rand, damped bool) *mesh.Mesh {
	b := &build{}
	some := func(share float64) bool { return r.Float64() < share }
	span := func(lo, hi float64) float64 { return lo * math.Pow(hi/lo, r.Float64()) }
	var free []int
	for l, lines := 0, 1+r.Intn(3); l < lines; l++ {
		tension := span(3e3, 3e4)
		pieces := 1 + r.Intn(4)
		for i := 0; i <= pieces; i++ {
			n := mesh.Node{Line: l}
			end := i == 0 || i == pieces
			n.Fixed = end && some(0.7) || !end && some(0.05)
			if some(0.3) {
				n.Mass = span(0.1, 30)
			}
			if some(0.3) || i == 0 {
				n.Spring = span(1e2, 1e6)
			}
			if damped && some(0.4) {
				n.Dashpot = span(3, 3e3)
			}
			if damped && some(0.2) {
				n.Brackets = append(n.Brackets, mesh.Maxwell{K: span(1e3, 1e6), C: span(10, 1e4)})
			}
			at := b.node(n)
			if !n.Fixed {
				free = append(free, at)
			}
			if i > 0 {
				c := 0.0
				if damped && some(0.3) {
					c = span(0.01, 3)
				}
				b.piece(at-1, at, span(0.7, 7), span(0.5, 5), tension, c)
			}
		}
	}
	dash := func() float64 {
		if damped && some(0.5) {
			return span(1, 1e3)
		}
		return 0
	}
	for k := r.Intn(3); k > 0 && len(free) > 0; k-- {
		at := b.node(mesh.Node{Line: -1, Mass: span(0.3, 10)})
		b.link(free[r.Intn(len(free))], at, span(1e2, 1e5), dash())
	}
	for k := r.Intn(4); k > 0 && len(free) > 1; k-- {
		x, y := free[r.Intn(len(free))], free[r.Intn(len(free))]
		b.link(x, y, span(1e2, 1e6), dash())
	}
	return &b.m
}

// dense assembles a network on a fine mesh: degree 0.57 k h + 14, six more than
// the rule that gives 1e-8 in frequency.
func (w *network) dense(omega float64) *coarse {
	n := len(w.nodes)
	degree := make([]int, len(w.elements))
	for i, el := range w.elements {
		degree[i] = int(0.57*omega*el.tau) + 14
		n += degree[i] - 1
	}
	g := newCoarse(n)
	for i := range w.nodes {
		g.mass[i] = w.mass[i]
		g.add(i, i, w.spring[i], w.dashpot[i])
	}
	for _, l := range w.links {
		g.join(l.a, l.b, l.k, l.c)
	}
	next := len(w.nodes)
	for i := range w.elements {
		next = g.piece(&w.elements[i], degree[i:i+1], next)
	}
	return g
}

// denseOmegas are the undamped angular frequencies of the fine mesh.
func (w *network) denseOmegas(omega float64) []float64 {
	g := w.dense(omega)
	a := mat.NewSymDense(g.n, nil)
	for i := 0; i < g.n; i++ {
		for j := 0; j <= i; j++ {
			a.SetSym(i, j, g.k[i*g.n+j]/math.Sqrt(g.mass[i]*g.mass[j]))
		}
	}
	var eig mat.EigenSym
	eig.Factorize(a, false)
	out := eig.Values(nil)
	for i, v := range out {
		out[i] = math.Sqrt(math.Max(v, 0))
	}
	return out
}

// The count misses nothing: every root of a fine mesh is there and no other.
func TestRandomUndampedAgainstDense(t *testing.T) {
	r := rand.New(rand.NewSource(1))
	worst, groups := 0.0, 0
	for trial := 0; trial < 40; trial++ {
		m := randomNetwork(r, false)
		res := find(t, m, Want{Count: 15})
		for g, w := range split(m) {
			var got []float64
			for _, mode := range res.Modes {
				if mode.Group == g {
					got = append(got, imag(mode.S))
				}
			}
			want := w.denseOmegas(2 * got[len(got)-1])[w.rigid:]
			groups++
			for i, omega := range got {
				e := math.Abs(omega/want[i] - 1)
				worst = math.Max(worst, e)
				// What the mesh's rule promises; the worst seen is 1e-10.
				if e > 1e-8 {
					t.Errorf("trial %d group %d mode %d: %.12g, dense %.12g", trial, g, i+1, omega, want[i])
				}
			}
		}
	}
	t.Logf("%d groups, worst difference %.2g", groups, worst)
	if groups < 40 {
		t.Errorf("only %d groups", groups)
	}
}

// denseRoots are the eigenvalues of the state matrix of the fine mesh.
func (w *network) denseRoots(omega float64) []complex128 {
	return w.dense(omega).eigenvalues(w.brackets, omega)
}

// Every root of a fine state matrix in the lower part of the region is found,
// and every root found is one of the matrix, brackets included.
func TestRandomDampedAgainstDense(t *testing.T) {
	r := rand.New(rand.NewSource(2))
	worst, compared := 0.0, 0
	for trial := 0; trial < 30; trial++ {
		m := randomNetwork(r, true)
		res := find(t, m, Want{Count: 8})
		if res.CompleteBelow == 0 {
			t.Errorf("trial %d: %v", trial, res.Notes)
		}
		for g, w := range split(m) {
			var got []complex128
			for _, mode := range res.Modes {
				if mode.Group == g {
					got = append(got, mode.S)
				}
			}
			top := imag(got[len(got)-1])
			var want []complex128
			for _, s := range w.denseRoots(2.2*top + 3*w.gamma()) {
				// Roots far left need a finer mesh; those of the upper edge may
				// fall on either side of the list's end.
				if imag(s) > 1e-6*cmplx.Abs(s) && imag(s) < 0.999*top && real(s) > -1.0*top {
					want = append(want, s)
				}
			}
			match := func(s complex128, in []complex128) float64 {
				best := math.Inf(1)
				for _, z := range in {
					best = math.Min(best, cmplx.Abs(s-z)/cmplx.Abs(s))
				}
				return best
			}
			n := 0
			for _, s := range want {
				e := match(s, got)
				worst = math.Max(worst, e)
				if e > 1e-8 { // as above; the worst seen is 2e-12
					t.Errorf("trial %d group %d: root %.9g of the dense matrix is missing in %.6g", trial, g, s, got)
				}
				compared++
			}
			for _, s := range got {
				if imag(s) < 0.999*top && real(s) > -0.999*top {
					n++
				}
			}
			if n != len(want) {
				t.Errorf("trial %d group %d: %d roots found, %d in the dense matrix", trial, g, n, len(want))
			}
		}
	}
	t.Logf("%d roots, worst difference %.2g", compared, worst)
}

func (w *network) gamma() float64 {
	g := 0.0
	for _, el := range w.elements {
		g = math.Max(g, el.c/(2*el.m))
	}
	return g
}

// The winding number of rectangles that the search did not choose equals the
// number of listed roots in them.
func TestWindingEqualsRoots(t *testing.T) {
	r := rand.New(rand.NewSource(3))
	compared, listed := 0, 0
	for trial := 0; trial < 40; trial++ {
		m := randomNetwork(r, true)
		for _, w := range split(m) {
			if !w.damped {
				continue
			}
			f, err := w.dampedModes(Want{Count: 12})
			if err != nil || f.complete == 0 {
				t.Fatalf("trial %d: %v %v", trial, err, f.notes)
			}
			all := append([]complex128(nil), f.osc...)
			for _, s := range f.real {
				all = append(all, complex(s, 0))
			}
			l := &list{e: newEvaluator(w), roots: all}
			for k := 0; k < 6; k++ {
				y := []float64{r.Float64() * f.complete, r.Float64() * f.complete}
				sort.Float64s(y)
				reg := region{x0: -f.complete * (0.01 + r.Float64()), x1: 0.3 / w.travel, y0: y[0], y1: y[1]}
				if k%2 == 0 {
					reg.y0 = 0
				}
				n, ok := l.e.count(reg)
				if !ok {
					continue // an edge on a root
				}
				compared++
				listed += n
				if n != l.inside(reg) {
					t.Errorf("trial %d: %d roots by winding, %d listed in %+v", trial, n, l.inside(reg), reg)
				}
			}
		}
	}
	if compared < 200 {
		t.Errorf("only %d rectangles", compared)
	}
	t.Logf("%d rectangles with %d roots", compared, listed)
}

// The search by counting alone, without start values, finds the same roots.
func TestSearchWithoutStarts(t *testing.T) {
	r := rand.New(rand.NewSource(4))
	for trial := 0; trial < 15; trial++ {
		m := randomNetwork(r, true)
		for _, w := range split(m) {
			if !w.damped {
				continue
			}
			f, err := w.dampedModes(Want{Count: 10})
			if err != nil {
				t.Fatal(err)
			}
			l := &list{e: newEvaluator(w), work: 2000}
			if !l.complete(region{x0: -f.complete * 9, x1: 0.4 / w.travel, y0: 0, y1: f.complete}) {
				t.Errorf("trial %d: not complete", trial)
				continue
			}
			osc, _ := l.within(f.complete, math.Inf(1))
			n := 0
			for i, s := range osc {
				if i < len(f.osc) && cmplx.Abs(s-f.osc[i]) < 1e-9*cmplx.Abs(s) {
					n++
				}
			}
			if n < 10 {
				t.Errorf("trial %d: only %d of 10 roots agree: %v and %v", trial, n, osc, f.osc)
			}
		}
	}
}

// The proof can fail, and what is missing is found again: roots are struck from
// a complete list, and the count tells how many.
func TestProofSeesWhatIsMissing(t *testing.T) {
	r := rand.New(rand.NewSource(8))
	for trial := 0; trial < 20; trial++ {
		for _, w := range split(randomNetwork(r, true)) {
			if !w.damped {
				continue
			}
			f, err := w.dampedModes(Want{Count: 9})
			if err != nil || f.complete == 0 || len(f.osc) < 3 {
				t.Fatal(err, f.notes)
			}
			all := append([]complex128(nil), f.osc...)
			for _, s := range f.real {
				all = append(all, complex(s, 0))
			}
			left := 2 * f.complete
			for _, s := range all {
				left = math.Max(left, -1.2*real(s))
			}
			reg := region{x0: -left, x1: 0.5 / w.travel, y0: 0, y1: f.complete}
			k := r.Intn(len(f.osc))
			l := &list{e: newEvaluator(w), roots: append(append([]complex128(nil), all[:k]...), all[k+1:]...), work: 2000}
			n, ok := l.e.count(reg)
			if !ok {
				continue
			}
			if lack := n - l.inside(reg); lack != 2 {
				t.Errorf("trial %d: a root and its mirror image struck, %d missing", trial, lack)
			}
			if !l.complete(reg) || l.inside(reg) != n {
				t.Errorf("trial %d: %d roots after repair of %d", trial, l.inside(reg), n)
				continue
			}
			best := math.Inf(1)
			for _, s := range l.roots {
				best = math.Min(best, cmplx.Abs(s-all[k])/cmplx.Abs(s))
			}
			if best > 1e-11 {
				t.Errorf("trial %d: %v is not found again (%g)", trial, all[k], best)
			}
			// A list without allowance of work and with a false root is refused.
			l.roots = append(l.roots, complex(-0.01, 0.5)*complex(f.complete, 0))
			if l.complete(reg) {
				t.Errorf("trial %d: a root too many passed", trial)
			}
		}
	}
}
