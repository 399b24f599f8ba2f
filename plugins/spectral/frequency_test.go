package spectral

import (
	"math"
	"math/cmplx"
	"sort"
	"testing"

	"github.com/tautspan/tautspan/engine/mesh"
	"github.com/tautspan/tautspan/engine/solver"
	"gonum.org/v1/gonum/mat"
)

// poles are the eigenvalues of the semi-discrete network, from its own operator
// column by column, sorted by imaginary part.
func poles(t *testing.T, m *mesh.Mesh, level int) []complex128 {
	t.Helper()
	j, err := newJob(m, solver.Request{Level: level, Effort: 1})
	if err != nil {
		t.Fatal(err)
	}
	a := newArrow(j.sys, j.lay.hot)
	n, nb := j.sys.size(), len(j.sys.brackets)
	full := mat.NewDense(2*n+nb, 2*n+nb, nil)
	for c := 0; c < 2*n+nb; c++ {
		y := make([]float64, 2*n+nb)
		y[c] = 1
		acc := make([]float64, n)
		a.accel(acc, y[:n], y[n:2*n], y[2*n:], nil)
		for i := 0; i < n; i++ {
			full.Set(i, c, y[n+i])
			full.Set(n+i, c, acc[i])
		}
		for b := range j.sys.brackets {
			k := &j.sys.brackets[b]
			full.Set(2*n+b, c, k.k/k.c*(y[j.sys.inner+k.end]-y[2*n+b]))
		}
	}
	var eig mat.Eigen
	if !eig.Factorize(full, mat.EigenNone) {
		t.Fatal("eigenvalues")
	}
	var out []complex128
	for _, v := range eig.Values(nil) {
		if imag(v) > 0 {
			out = append(out, v)
		}
	}
	sort.Slice(out, func(i, k int) bool { return imag(out[i]) < imag(out[k]) })
	return out
}

// free lets an end of a chain go.
func free(m *mesh.Mesh, n int) *mesh.Node {
	m.Nodes[n].Fixed, m.Nodes[n].Fitting = false, false
	return &m.Nodes[n]
}

// tied is two equal lines of two pieces each, tied in the middle by a spring.
func tied(every float64, rows int, s1, s2 seg, spring, dash float64) *mesh.Mesh {
	m := chain(every, rows, s1, s2)
	o := chain(every, rows, s1, s2)
	for _, n := range o.Nodes {
		n.Line = 1
		m.Nodes = append(m.Nodes, n)
	}
	for _, p := range o.Pieces {
		p.Line, p.From, p.To = 1, p.From+3, p.To+3
		m.Pieces = append(m.Pieces, p)
	}
	m.Lines = append(m.Lines, mesh.Line{Name: "other", Pieces: []int{2, 3}, Length: m.Lines[0].Length})
	m.Links = []mesh.Link{{Name: "tie", A: 1, B: 4, Spring: spring, Dashpot: dash}}
	return m
}

// Natural frequencies against exact values (the project's table of check values,
// groups 1 to 4: roots of the closed frequency equations, recomputed with 40
// digits from Kinsler et al. 2000 ch. 2, Rao 2007 ch. 8, Rayleigh 1894 ch. VI,
// Graff 1975 ch. 1; numbers here with 12 digits). Tolerance 1e-9: level 1
// resolves these low modes far beyond; 5e-12 seen, which is the printed digits' rounding.
func TestNaturalFrequencies(t *testing.T) {
	cases := []struct {
		id   string
		m    func() *mesh.Mesh
		want []float64 // Hz
	}{
		{"C01-01", func() *mesh.Mesh { return chain(1, 2, seg{0.65, 0.00114, 70, 0}) },
			[]float64{190.613318378, 381.226636756, 571.839955135}},
		{"C01-03", func() *mesh.Mesh { m := chain(1, 2, seg{12, 2.4, 8000, 0}); free(m, 1); return m },
			[]float64{1.20281306081, 3.60843918244, 6.01406530406, 8.41969142568}},
		{"C02-01", func() *mesh.Mesh { m := chain(1, 2, seg{10, 0.8, 5000, 0}); free(m, 1).Spring = 500; return m },
			[]float64{2.55264458857, 6.1819125111, 10.0389989738, 13.9481603438}},
		{"C02-02", func() *mesh.Mesh { m := chain(1, 2, seg{10, 0.8, 5000, 0}); free(m, 1).Spring = 25000; return m },
			[]float64{3.87543617074, 7.7514427322, 11.6285655728}},
		{"C03-01", func() *mesh.Mesh {
			m := chain(1, 2, seg{10, 1.5, 20000, 0}, seg{10, 1.5, 20000, 0})
			m.Nodes[1].Mass = 30
			return m
		}, []float64{1.58108922443, 5.7735026919, 6.29547480468, 11.5470053838}},
		{"C03-02", func() *mesh.Mesh {
			m := chain(1, 2, seg{42, 18.4, 412000, 0}, seg{118.5, 18.4, 412000, 0})
			m.Nodes[1].Mass = 18
			return m
		}, []float64{0.46463292705, 0.926709850634, 1.39520013861, 1.86439410468, 2.320988341}},
		{"C03-03", func() *mesh.Mesh { m := chain(1, 2, seg{5, 0.3, 900, 0}); free(m, 1).Mass = 1.5; return m },
			[]float64{1.49995293994, 5.97241180049, 11.223140015, 16.6139661864}},
		{"C04-01", func() *mesh.Mesh { return chain(1, 2, seg{30, 1, 10000, 0}, seg{30, 4, 10000, 0}) },
			[]float64{0.506811206641, 1.15985546003, 1.66666666667, 2.17347787331, 2.82652212669}},
		{"C04-02", func() *mesh.Mesh { return chain(1, 2, seg{42, 18.4, 412000, 0}, seg{118.5, 11.2, 412000, 0}) },
			[]float64{0.577073507969, 1.09695936021, 1.66133442518, 2.24777617875}},
		{"C04-11", func() *mesh.Mesh {
			m := chain(1, 2, seg{22, 1.35, 20000, 0}, seg{38, 1.35, 20000, 0})
			m.Nodes[1].Spring = 2500
			return m
		}, []float64{1.34746598355, 2.23058251459, 3.06557489853, 4.23146114733}},
		{"C04-12", func() *mesh.Mesh {
			return tied(1, 2, seg{40, 50, 2e6, 0}, seg{60, 50, 2e6, 0}, 150000, 0)
		}, []float64{1, 1.49010804887, 2, 2.22070258759, 3, 3.13198502382}},
	}
	worst := 0.0
	defer func() { t.Logf("worst %.2g", worst) }()
	for _, c := range cases {
		got := poles(t, c.m(), 1)
		for i, want := range c.want {
			f := imag(got[i]) / (2 * math.Pi)
			worst = math.Max(worst, math.Abs(f/want-1))
			if math.Abs(f/want-1) > 1e-9 || math.Abs(real(got[i])) > 1e-9*imag(got[i]) {
				t.Errorf("%s: mode %d at %.12g Hz (%g), want %.12g", c.id, i+1, f, real(got[i]), want)
			}
		}
	}
}

// Damped poles: C02-04 (end dashpot, closed form: kL = (2n-1) pi/2 + i artanh(C/Z)
// for C < Z; Morse 1948 ch. III), C11-01 and C11-02 (Krenk 2000, Main and Jones
// 2002: sin kL + i (C/Z) sin ka sin k(L-a) = 0), C07-01 (Rayleigh 1894). 1e-8
// relative to the pole; 6e-12 seen.
func TestDampedPoles(t *testing.T) {
	worst := 0.0
	defer func() { t.Logf("worst %.2g", worst) }()
	check := func(id string, m *mesh.Mesh, want ...complex128) {
		got := poles(t, m, 1)
		for i, w := range want {
			near := math.Inf(1)
			for _, g := range got {
				near = math.Min(near, cmplx.Abs(g-w))
			}
			worst = math.Max(worst, near/cmplx.Abs(w))
			if near > 1e-8*cmplx.Abs(w) {
				t.Errorf("%s: pole %d %v missed by %g", id, i+1, w, near)
			}
		}
	}
	m := chain(1, 2, seg{25, 1, 10000, 0})
	free(m, 1).Dashpot = 50
	decay := 2.19722457734
	check("C02-04", m, complex(-decay, 2*math.Pi), complex(-decay, 6*math.Pi))

	// kL with e^{i w t}: s = i w = i c kL/L.
	pole := func(re, im, c, l float64) complex128 { return complex(-im, re) * complex(c/l, 0) }
	m = chain(1, 2, seg{2.4, 75, 4.5e6, 0}, seg{117.6, 75, 4.5e6, 0})
	m.Nodes[1].Dashpot = 150000
	c := math.Sqrt(4.5e6 / 75)
	check("C11-01", m, pole(3.15445695728, 0.0259589244778, c, 120), pole(6.3481561658, 0.0649406022597, c, 120),
		pole(9.55978239599, 0.0894278021905, c, 120))
	m = chain(1, 2, seg{42, 18.4, 412000, 0}, seg{118.5, 18.4, 412000, 0})
	m.Nodes[1].Dashpot = 2400
	c = math.Sqrt(412000 / 18.4)
	check("C11-02", m, pole(3.25290057642, 0.477251352067, c, 160.5), pole(6.249780916, 0.975625812106, c, 160.5),
		pole(9.34848804412, 0.342513499987, c, 160.5))
	m = chain(1, 2, seg{160.5, 18.4, 412000, 0.6})
	check("C07-01", m, complex(-0.0163043478261, 2*math.Pi*0.466152411535), complex(-0.0163043478261, 2*math.Pi*2.33079672555))
}
