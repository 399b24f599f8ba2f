package spectral

import (
	"fmt"
	"math"
	"math/cmplx"
	"math/rand"
	"testing"

	"github.com/tautspan/tautspan/engine/mesh"
	vibrations "github.com/tautspan/tautspan/engine/modal"
	"github.com/tautspan/tautspan/engine/scenario"
	"github.com/tautspan/tautspan/engine/solver"
)

// tones are the solver's own natural frequencies at a level, Hz.
func tones(t testing.TB, m *mesh.Mesh, level int) []float64 {
	t.Helper()
	j, err := newJob(m, solver.Request{Level: level, Effort: 1})
	if err != nil {
		t.Fatal(err)
	}
	mo, ok := newModal(j.sys, 0)
	if !ok {
		t.Fatal("eigenvalues")
	}
	var out []float64
	for _, w2 := range mo.omega2 {
		out = append(out, math.Sqrt(w2)/(2*math.Pi))
	}
	return out
}

// clampedLine is a clamped stiff line of 1 m, 1 kg/m and 1 N with a given L sqrt(T/EI).
func clampedLine(xi, every float64, rows int) *mesh.Mesh {
	m := chain(every, rows, seg{1, 1, 1, 0})
	m.Pieces[0].Bending = 1 / (xi * xi)
	m.Nodes[0].Clamped, m.Nodes[1].Clamped = true, true
	return m
}

// The solver's own frequencies of clamped stiff lines against engine/modal, which
// meets published values: faster than any order, to rounding.
func TestClampedStiffLine(t *testing.T) {
	for _, xi := range []float64{5, 50, 300, 1500} {
		m := clampedLine(xi, 0.01, 10)
		res, err := vibrations.Find(m, vibrations.Want{Count: 10})
		if err != nil {
			t.Fatal(err)
		}
		for level := 0; level < 3; level++ {
			own, worst := tones(t, m, level), 0.0
			for i := range res.Modes {
				worst = math.Max(worst, math.Abs(own[i]/res.Modes[i].Frequency-1))
			}
			t.Logf("xi %g level %d: %d unknowns, f1 %.1e, f10 %.1e, worst of ten %.1e", xi, level, len(own), own[0]/res.Modes[0].Frequency-1, own[9]/res.Modes[9].Frequency-1, worst)
			if limit := [3]float64{1e-8, 1e-11, 1e-12}[level]; worst > limit { // chosen; 3e-9, 3e-12, 1e-14 seen
				t.Errorf("xi %g level %d: %.1e", xi, level, worst)
			}
		}
	}
}

// randomReal is a line of up to three pieces with a random choice of what makes it
// more than an ideal string.
func randomReal(r *rand.Rand) (*mesh.Mesh, string) {
	n := 1 + r.Intn(3)
	between := func(a, b float64) float64 { return a + (b-a)*r.Float64() }
	var segs []seg
	tension := between(2000, 20000)
	for i := 0; i < n; i++ {
		segs = append(segs, seg{between(4, 20), between(0.5, 4), tension, 0})
	}
	m := chain(0.01, 20, segs...)
	what := fmt.Sprintf("%d pieces", n)
	bend, rise := r.Intn(4) > 0, r.Intn(2) == 0
	for i := range m.Pieces {
		p := &m.Pieces[i]
		p.Tension = tension
		if rise {
			p.TensionRise = p.MassPerLength * 9.8 * 0.6
			tension += p.TensionRise * p.Length
		}
		if bend {
			p.Bending = between(50, 3000)
		}
	}
	if rise {
		what += ", rising"
	}
	if bend {
		what += ", bending"
	}
	for i := range m.Nodes {
		nd := &m.Nodes[i]
		if nd.Fixed {
			nd.Clamped = bend && r.Intn(2) == 0
			if bend && !nd.Clamped && r.Intn(2) == 0 {
				nd.Rotary = between(10, 5000)
			}
			continue
		}
		nd.Fitting, nd.Mass = true, between(0, 8)
		if r.Intn(2) == 0 {
			nd.Spring = between(0, 5000)
		}
		if bend {
			switch r.Intn(3) {
			case 0:
				nd.Hinge = true
				what += ", hinge"
			case 1:
				nd.Inertia, nd.Rotary = between(0, 3), between(0, 800)
				what += ", inertia"
			}
		}
	}
	if r.Intn(2) == 0 {
		what += ", sag"
		sag := &mesh.Sag{Stiffness: between(1e5, 2e6), Nodes: map[int]float64{}}
		for i := range m.Pieces {
			sag.Pieces = append(sag.Pieces, m.Pieces[i].MassPerLength*9.8/tension)
		}
		for i := range m.Nodes {
			if !m.Nodes[i].Fixed {
				sag.Nodes[i] = m.Nodes[i].Mass * 9.8 / tension
			}
		}
		m.Lines[0].Sag = sag
	}
	return m, what
}

// Random lines with everything at once: ten frequencies against engine/modal.
func TestRandomRealFrequencies(t *testing.T) {
	r := rand.New(rand.NewSource(3))
	for i := 0; i < 30; i++ {
		m, what := randomReal(r)
		res, err := vibrations.Find(m, vibrations.Want{Count: 10})
		if err != nil {
			t.Fatalf("%s: %v", what, err)
		}
		if m.Features() == 0 {
			continue // an ideal string: TestNaturalFrequencies
		}
		own, worst := tones(t, m, 1), 0.0
		for k := range res.Modes {
			worst = math.Max(worst, math.Abs(own[k]/res.Modes[k].Frequency-1))
		}
		t.Logf("%-40s %d unknowns worst %.1e", what, len(own), worst)
		if worst > 1e-11 { // chosen; 2e-12 seen
			t.Errorf("%s: %.1e", what, worst)
		}
	}
}

// modeSum is the free motion at a place from a start shape along the first piece, by
// the natural vibrations of engine/modal, undamped; weight is the inner product of
// two shapes (mass).
func modeSum(t *testing.T, m *mesh.Mesh, count int, at mesh.Spot) []float64 {
	t.Helper()
	res, err := vibrations.Find(m, vibrations.Want{Count: count, Shapes: true})
	if err != nil {
		t.Fatal(err)
	}
	out := make([]float64, m.Timing.Rows)
	for _, mode := range res.Modes {
		p := &m.Pieces[0]
		num, den := 0.0, 0.0
		gx, gw := gauss(4*count + 40)
		for g, x := range gx {
			s := p.Length * (1 + x) / 2
			phi := real(mode.Shape.At(inside(0, s)))
			num += gw[g] * phi * p.Start(s)
			den += gw[g] * phi * phi
		}
		a := num / den * real(mode.Shape.At(at))
		for row := range out {
			out[row] += a * math.Cos(2*math.Pi*mode.Frequency*float64(row)*m.Timing.Every)
		}
	}
	return out
}

func bell(centre, width float64) func(float64) float64 {
	return func(s float64) float64 { z := (s - centre) / width; return math.Exp(-z * z) }
}

// A bell let go on clamped stiff lines, ten periods, and on a sagging line with
// lambda^2 = 4 pi^2, where the first symmetric vibration meets the first
// antisymmetric one, twenty periods; against sums of exact vibrations, which are good
// to about 1e-9. The sag pulls at once all along a line whose start shape does not
// answer it at the supports: a jump in curvature leaves them, and convergence is
// algebraic. Limits chosen, two to three times what is seen.
func TestBellOnRealLines(t *testing.T) {
	sagging := chain(0.01, 4001, seg{1, 1, 1, 0})
	sagging.Lines[0].Sag = &mesh.Sag{Stiffness: 4 * math.Pi * math.Pi, Pieces: []float64{1}}
	for _, c := range []struct {
		name  string
		m     *mesh.Mesh
		count int // vibrations
		limit [3]float64
	}{
		{"xi = 50", clampedLine(50, 0.01, 2001), 45, [3]float64{1e-6, 2e-9, 2e-9}},
		{"xi = 300", clampedLine(300, 0.01, 2001), 45, [3]float64{1e-6, 2e-9, 2e-9}},
		{"lambda^2 = 4 pi^2", sagging, 75, [3]float64{3e-4, 1e-4, 3e-5}},
	} {
		c.m.Pieces[0].Start = bell(0.4, 0.08)
		c.m.Band = 3 / 0.08 / (2 * math.Pi)
		at := inside(0, 0.7)
		watch(c.m, scenario.Displacement, 0, at)
		want := modeSum(t, c.m, c.count, at)
		for level := range c.limit {
			r := solve(t, c.m, level)
			d := apart(r.Series[0][0], want)
			gap := math.Abs(r.Energy.Unaccounted()) / r.Energy.Most
			t.Logf("%s level %d: %d unknowns, error %.1e, energy gap %.1e", c.name, level, r.Plan.Cells, d, gap)
			if d > c.limit[level] || gap > 1e-10 {
				t.Errorf("%s level %d: error %.1e, energy gap %.1e", c.name, level, d, gap)
			}
		}
	}
}

// Steady motion u e^(st) of random lines with internal, viscous and point losses under
// a force inside a piece: displacement, slope, force and moment at every node and
// inside, against the exact dynamic stiffness of engine/modal.
func TestSteadyRealLines(t *testing.T) {
	r := rand.New(rand.NewSource(5))
	quantities := []scenario.Quantity{scenario.Displacement, scenario.Slope, scenario.Force, scenario.Moment}
	worst := map[scenario.Quantity]float64{}
	for trial := 0; trial < 40; trial++ {
		m, what := randomReal(r)
		lossy := trial%2 == 0
		for i := range m.Pieces {
			m.Pieces[i].Viscous = 0.3 * r.Float64()
			if lossy {
				m.Pieces[i].Internal = 2e-3 * r.Float64()
			}
		}
		for i := range m.Nodes {
			if !m.Nodes[i].Fixed {
				m.Nodes[i].Dashpot = 60 * r.Float64()
			}
		}
		hit := inside(0, 0.37*m.Pieces[0].Length)
		m.Pieces[0].Marks = []mesh.Mark{{Kind: mesh.MarkLoad, At: hit.At}}
		spots := []mesh.Spot{inside(0, 0.71*m.Pieces[0].Length)}
		for i := range m.Nodes {
			spots = append(spots, atNode(i))
		}
		j, err := newJob(m, solver.Request{Level: 1, Effort: 1})
		if err != nil {
			t.Fatal(err)
		}
		if !j.sys.frame {
			continue
		}
		d, err := vibrations.NewDynamic(m)
		if err != nil {
			t.Fatal(err)
		}
		f := newFrame(j.sys, j.lay.hot)
		for _, s := range []complex128{complex(-0.05, 3.3), complex(0.2, 17.4), complex(0.6, 0.2)} {
			s *= complex(j.sys.lowest, 0)
			want, err := d.Solve(s, []vibrations.Load{{Spot: hit, Force: 1}}, nil)
			if err != nil {
				t.Fatal(err)
			}
			x := steadyMotion(f, hit, s)
			for _, q := range quantities {
				exact := func(at mesh.Spot) complex128 {
					switch q {
					case scenario.Slope:
						return want.Slope(at)
					case scenario.Force:
						return want.Force(at)
					case scenario.Moment:
						return want.Moment(at)
					}
					return want.Displacement(at)
				}
				scale, off := 0.0, 0.0
				for _, at := range spots {
					tap := j.sys.tapFor(f, &mesh.Channel{Quantity: q}, at, m.Attached())
					got := tap.steady(x, s)
					scale, off = math.Max(scale, cmplx.Abs(exact(at))), math.Max(off, cmplx.Abs(got-exact(at)))
				}
				if scale == 0 {
					continue
				}
				worst[q] = math.Max(worst[q], off/scale)
				limit := 1e-8 // chosen; 6e-10 seen, of moments, which take two derivatives, 3e-7
				if q == scenario.Moment {
					limit = 1e-6
				}
				if off > limit*scale {
					t.Errorf("%s, s = %g, %v: off by %.1e of %.1e", what, s, q, off, scale)
				}
			}
		}
	}
	t.Logf("worst by quantity: %v", worst)
}

// steadyMotion is the frame's own steady motion under a unit force.
func steadyMotion(f *frame, hit mesh.Spot, s complex128) []complex128 {
	load := make([]float64, f.size()+len(f.watched))
	e, at := f.find(hit.Piece, hit.At)
	f.spread(load, e, e.values(make([]float64, e.ref.p+1), at, 0))
	x := make([]complex128, f.size())
	for i := range x {
		x[i] = complex(load[i], 0)
	}
	var w [loadDegree + 1]float64
	p := f.shift(factor{pole: s, res: 1}, 1, &w)
	f.solve(&p, x)
	f.unbend(&p, x)
	return x
}

// steady is a tap's complex amplitude.
func (t *tap) steady(x []complex128, s complex128) complex128 {
	sum, power := complex128(0), complex128(1)
	part := make([]float64, len(x))
	for _, f := range t.f {
		for k, unit := range []complex128{1, 1i} {
			for i, v := range x {
				part[i] = []float64{real(v), imag(v)}[k]
			}
			sum += power * unit * complex(f.on(part), 0)
		}
		power *= s
	}
	return sum
}

// A line of 3000 pieces, such as spacers make, is solved by the banded system; splices
// change nothing.
func TestManyNodes(t *testing.T) {
	const n = 3000
	segs := make([]seg, n)
	for i := range segs {
		segs[i] = seg{0.01, 1, 900, 0.1}
	}
	many, one := chain(0.01, 21, segs...), chain(0.01, 21, seg{0.01 * n, 1, 900, 0.1})
	f := bell(12, 1.5)
	for i := range many.Pieces {
		x0 := many.Pieces[i].X0
		many.Pieces[i].Start = func(s float64) float64 { return f(x0 + s) }
		if i > 0 {
			many.Nodes[i].Start = f(x0)
		}
	}
	one.Pieces[0].Start = f
	watch(many, scenario.Displacement, 0, atNode(n/2))
	watch(one, scenario.Displacement, 0, inside(0, 0.01*n/2))
	a, b := solve(t, many, 0), solve(t, one, 2)
	if d := apart(a.Series[0][0], b.Series[0][0]); d > 1e-4 {
		t.Errorf("apart by %.1e", d)
	}
}

// A chain that hangs from one end, walked down and walked up: f_n = j_n/(4 pi)
// sqrt(g/L) with the zeros j_n of J_0 (Bernoulli 1732; zeros from Abramowitz and Stegun
// 1964, table 9.5, from memory).
func TestHangingChain(t *testing.T) {
	const length, g, mass = 5.0, 9.81, 2.0
	for _, down := range []bool{true, false} {
		m := chain(0.01, 11, seg{length, mass, mass * g * length, 0})
		m.Pieces[0].TensionRise = -mass * g
		if down {
			free(m, 1)
		} else {
			free(m, 0)
			m.Pieces[0].Tension, m.Pieces[0].TensionRise = 0, mass*g
		}
		if no := New().Refuses(m); len(no) > 0 {
			t.Fatal(no)
		}
		own := tones(t, m, 1)
		for i, j := range []float64{2.404825557695773, 5.520078110286311, 8.653727912911012, 11.791534439014281} {
			if want := j / (4 * math.Pi) * math.Sqrt(g/length); math.Abs(own[i]/want-1) > 1e-11 {
				t.Errorf("down %v: f%d = %.12g, %.12g is known", down, i+1, own[i], want)
			}
		}
		solve(t, m, 0)
	}
}
