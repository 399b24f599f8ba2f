package conform_test

import (
	"context"
	"fmt"
	"math"
	"math/cmplx"
	"sync"
	"testing"

	"github.com/tautspan/tautspan/engine/formula"
	"github.com/tautspan/tautspan/engine/mesh"
	"github.com/tautspan/tautspan/engine/modal"
	"github.com/tautspan/tautspan/engine/scenario"
	"github.com/tautspan/tautspan/engine/solver"
)

// workCase is a benchmark case: a network, one probe, and a reference record
// that no time solver had a part in.
type workCase struct {
	name      string
	net       *scenario.Network
	reference func() []float64
	stride    int // rows between those that count
	levels    int
}

func inside(segment int, at float64) scenario.Place {
	return scenario.Place{Node: -1, Segment: segment, Offset: at}
}

func probe(net *scenario.Network, at scenario.Place, duration, every float64) *scenario.Network {
	net.Watches = []scenario.Watch{{Name: "w", At: at, Quantities: []scenario.Quantity{scenario.Displacement}}}
	net.Run = scenario.RunOf[float64]{For: duration, Every: every}
	return net
}

// uniformPluck is a damped uniform line released from a plucked shape whose kink
// is replaced by the parabola that touches both flanks 0.2 m from it.
func uniformPluck() workCase {
	const L, m, T, c, a, h, r = 20.0, 0.35, 8400.0, 0.05, 4.0, 0.02, 0.2
	c1, c2 := h/a, -h/(L-a)
	k := formula.Const
	x := formula.Arg(formula.ArgX)
	left := formula.Mul(k(c1), x)
	right := formula.Mul(k(c2), formula.Sub(x, k(L)))
	// The parabola through both tangent points: value and slope of the left flank
	// at a-r, slope of the right one at a+r.
	s := formula.Sub(x, k(a-r))
	bend := formula.Add(formula.Mul(k(c1), x), formula.Mul(k((c2-c1)/(4*r)), formula.Mul(s, s)))
	shape := formula.Apply(formula.OpSelect, formula.Apply(formula.OpLess, x, k(a-r)), left,
		formula.Apply(formula.OpSelect, formula.Apply(formula.OpLess, x, k(a+r)), bend, right))
	net := &scenario.Network{}
	net.Lines = []scenario.Line{{Name: "l", Nodes: []scenario.Node{{Name: "a", Fixed: true}, {Name: "b", Fixed: true}},
		Segments: []scenario.Segment{{Name: "s", Length: L, MassPerLength: m, Tension: T, Viscous: c}}}}
	net.Starts = []scenario.StartOf[float64]{{Name: "p", Along: scenario.SpanOf{Segment: -1}, Shape: shape}}
	probe(net, inside(0, 7), 10, 1.0/2000)
	reference := func() []float64 {
		// b_n = (2/L) integral of u0 sin(k x): for a broken line whose slope falls
		// evenly over 2r, (2/(L k^2)) (c1-c2) sin(k a) sin(k r)/(k r). Modes of
		// amplitude below rounding are left out: 20000 are taken.
		const rows, modes = 20001, 20000
		out := make([]float64, rows)
		g := c / (2 * m)
		for n := 1; n <= modes; n++ {
			kn := float64(n) * math.Pi / L
			b := 2 / (L * kn * kn) * (c1 - c2) * math.Sin(kn*a) * math.Sin(kn*r) / (kn * r) * math.Sin(kn*7)
			if math.Abs(b) < 1e-13*h {
				continue
			}
			w := math.Sqrt(T/m*kn*kn - g*g)
			step := cmplx.Exp(complex(-g, w) / 2000)
			z := complex(b, 0)
			for i := range out {
				// u = b e^{-gt} (cos wt + g/w sin wt)
				out[i] += real(z) + g/w*imag(z)
				z *= step
			}
		}
		return out
	}
	return workCase{"uniform pluck", net, sync.OnceValue(reference), 1, 6}
}

// threeSegments is a damped line of three segments with two clamps and a
// dashpot, hit by a half sine. The reference is the exact dynamic stiffness
// inverted from the Laplace domain.
func threeSegments() workCase {
	const T, c = 20000.0, 0.08
	seg := func(name string, length, m float64) scenario.Segment {
		return scenario.Segment{Name: name, Length: length, MassPerLength: m, Tension: T, Viscous: c}
	}
	net := &scenario.Network{}
	net.Lines = []scenario.Line{{Name: "l", Nodes: []scenario.Node{
		{Name: "a", Fixed: true}, {Name: "j", Kind: scenario.Joint, Mass: 4},
		{Name: "k", Kind: scenario.Joint, Mass: 1.5, Dashpots: []scenario.DashpotOf[float64]{{C: 120}}}, {Name: "b", Fixed: true},
	}, Segments: []scenario.Segment{seg("s", 30, 0.9), seg("t", 45, 1.6), seg("u", 25, 0.9)}}}
	const F0, d = 500.0, 0.008
	force := formula.Apply(formula.OpHalfSine, formula.Arg(formula.ArgT), formula.Const(F0), formula.Const(d))
	net.Pushes = []scenario.PushOf[float64]{{Name: "h", At: inside(0, 12), Force: scenario.History{Value: force, Breaks: []float64{0, d}}}}
	probe(net, inside(1, 30), 5, 1.0/2000)
	reference := func() []float64 {
		m, err := mesh.Build(net)
		if err != nil {
			panic(err)
		}
		out, err := inverted(m, F0, d, 5, 10001)
		if err != nil {
			panic(err)
		}
		return out
	}
	return workCase{"three segments", net, sync.OnceValue(reference), 1, 6}
}

// inverted sums u(t) = (e^{bt}/pi) Re integral of U(b + iw) e^{iwt} dw for a
// half-sine push by a power-of-two FFT: window twice the run, so that what wraps
// round is damped by e^{-2 b run} = 1e-10 or less.
func inverted(m *mesh.Mesh, f0, d, run float64, rows int) ([]float64, error) {
	exact, err := modal.NewDynamic(m)
	if err != nil {
		return nil, err
	}
	const n = 1 << 21
	every := run / float64(rows-1)
	const fine = 64 // samples an output row; band 64 times that of the rows
	window := float64(n) * every / fine
	b := math.Log(1e10) / (2 * run)
	values := make([]complex128, n)
	load := []modal.Load{{Spot: m.Pushes[0].At, Force: 1}}
	for k := 0; k < n/2; k++ {
		s := complex(b, 2*math.Pi*float64(k)/window)
		field, err := exact.Solve(s, load, nil)
		if err != nil {
			return nil, err
		}
		p := complex(math.Pi/d, 0)
		force := complex(f0, 0) * p * (1 + cmplx.Exp(-s*complex(d, 0))) / (s*s + p*p)
		values[k] = force * field.Displacement(m.Channels[0].Spots[0])
	}
	values[0] /= 2
	fft(values)
	out := make([]float64, rows)
	for i := range out {
		t := float64(i) * every
		out[i] = 2 / window * math.Exp(b*t) * real(values[i*fine])
	}
	return out, nil
}

// fft replaces x_k by the sum of x_k e^{+2 pi i j k/n}; n is a power of two.
func fft(x []complex128) {
	n := len(x)
	for i, j := 1, 0; i < n; i++ {
		bit := n >> 1
		for ; j&bit != 0; bit >>= 1 {
			j ^= bit
		}
		j ^= bit
		if i < j {
			x[i], x[j] = x[j], x[i]
		}
	}
	for size := 2; size <= n; size <<= 1 {
		for k := 0; k < size/2; k++ {
			w := cmplx.Exp(complex(0, 2*math.Pi*float64(k)/float64(size)))
			for i := k; i < n; i += size {
				a, b := x[i], w*x[i+size/2]
				x[i], x[i+size/2] = a+b, a-b
			}
		}
	}
}

func relativeError(got, want []float64, stride int) float64 {
	diff, norm := 0.0, 0.0
	for i := 0; i < len(want); i += stride {
		diff += (got[i] - want[i]) * (got[i] - want[i])
		norm += want[i] * want[i]
	}
	return math.Sqrt(diff / norm)
}

// BenchmarkWork gives work-precision pairs: time of a solution and its relative
// L2 error at every row against a reference of another kind.
func BenchmarkWork(b *testing.B) {
	for _, c := range []workCase{uniformPluck(), threeSegments()} {
		m, err := mesh.Build(c.net)
		if err != nil {
			b.Fatal(err)
		}
		for _, s := range solvers() {
			for level := range c.levels {
				b.Run(fmt.Sprintf("%s/%s/level=%d", c.name, s.Name(), level), func(b *testing.B) {
					want := c.reference()
					var r *solver.Result
					for b.Loop() {
						if r, err = s.Solve(context.Background(), m, solver.Request{Level: level, Effort: 1}, nil); err != nil {
							b.Fatal(err)
						}
					}
					b.ReportMetric(relativeError(r.Series[0][0], want, c.stride), "rel-error")
					b.ReportMetric(float64(r.Plan.Work), "cell-steps")
				})
			}
		}
	}
}

// The references agree with the sharpest solver to what each of them promises:
// the work-precision pairs are read against something that is right.
func TestWorkReferences(t *testing.T) {
	if testing.Short() {
		return // half a minute of transforms; the full run has them
	}
	for _, c := range []workCase{uniformPluck(), threeSegments()} {
		m, err := mesh.Build(c.net)
		if err != nil {
			t.Fatal(err)
		}
		want := c.reference()
		for _, s := range solvers() {
			last := math.Inf(1)
			for level := range 3 {
				r, err := s.Solve(context.Background(), m, solver.Request{Level: level, Effort: 1}, nil)
				if err != nil {
					t.Fatal(err)
				}
				e := relativeError(r.Series[0][0], want, c.stride)
				t.Logf("%-14s %-14s level %d error %.1e", c.name, s.Name(), level, e)
				if e > last && e > 1e-6 {
					t.Errorf("%s by %s: the error grows from %.1e to %.1e", c.name, s.Name(), last, e)
				}
				last = e
			}
			if last > 5e-3 {
				t.Errorf("%s by %s: error %.1e at level 2", c.name, s.Name(), last)
			}
		}
	}
}
