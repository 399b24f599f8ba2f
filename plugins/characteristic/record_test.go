package characteristic

import (
	"fmt"
	"math"
	"testing"

	"gonum.org/v1/gonum/mat"

	"github.com/tautspan/tautspan/engine/mesh"
	"github.com/tautspan/tautspan/engine/scenario"
	"github.com/tautspan/tautspan/engine/solver"
)

// Records of means on a plucked line against d'Alembert's solution,
// u = (P(x-ct) + P(x+ct))/2 with P the odd periodic extension of the hat, whose
// own means are differences of P. Before t = 0 the line rests as drawn.
func TestMeansOfAPluckedLine(t *testing.T) {
	const L, c, tension, w = 1.2, 200.0, 1000.0, 7e-4
	h := hat(L, 0.3, 0.005)
	P := func(x float64) float64 {
		x = math.Mod(x, 2*L)
		if x < 0 {
			x += 2 * L
		}
		if x > L {
			return -h(2*L - x)
		}
		return h(x)
	}
	u := func(x, t float64) float64 {
		if t < 0 {
			return h(x)
		}
		return (P(x-c*t) + P(x+c*t)) / 2
	}
	// stem(x, t) has the rate u_x for t >= 0.
	stem := func(x, t float64) float64 { return (P(x+c*t) - P(x-c*t)) / (2 * c) }
	m := span(w, 40, stretch{L, tension, tension / (c * c), 0})
	m.Jump = 1
	m.Pieces[0].Start = h
	m.Pieces[0].Marks = []mesh.Mark{{Kind: mesh.MarkKink, At: 0.3}}
	const x = 0.5
	look(m, scenario.Velocity, 1, inside(0, x))
	look(m, scenario.Slope, 1, inside(0, x))
	look(m, scenario.Force, 1, node(0), node(1))
	look(m, scenario.Acceleration, 2, inside(0, x))
	look(m, scenario.Slope, 2, inside(0, x))
	look(m, scenario.Velocity, 2, inside(0, x))
	look(m, scenario.Tension, 0, inside(0, x))
	look(m, scenario.Moment, 1, inside(0, x))
	res := solve(t, m, 0)
	slope := func(x, t float64) float64 { // mean over t-w/2 .. t+w/2
		a, b := t-w/2, t+w/2
		still := 0.0
		if a < 0 {
			e := 1e-9
			still = (h(x+e) - h(x-e)) / (2 * e) * -a
			if x == 0 {
				still = h(e) / e * -a
			}
			if x == L {
				still = -h(L-e) / e * -a
			}
			a = 0
		}
		return (still + stem(x, b) - stem(x, a)) / w
	}
	velocity := func(t float64) float64 { return (u(x, t+w/2) - u(x, t-w/2)) / w }
	again := func(q func(t float64) float64, t float64) float64 { // mean by many points
		s := 0.0
		for i := range 20000 {
			s += q(t + w*((float64(i)+0.5)/20000-0.5))
		}
		return s / 20000
	}
	for row := range 40 {
		at := float64(row) * w
		near(t, fmt.Sprint("velocity ", row), res.Series[0][0][row], velocity(at), 1e-9)
		near(t, fmt.Sprint("slope ", row), res.Series[1][0][row], slope(x, at), 1e-9)
		near(t, fmt.Sprint("force left ", row), res.Series[2][0][row], tension*slope(0, at), 1e-6)
		near(t, fmt.Sprint("force right ", row), res.Series[2][1][row], -tension*slope(L, at), 1e-6)
		near(t, fmt.Sprint("acceleration ", row), res.Series[3][0][row], (u(x, at+w)-2*u(x, at)+u(x, at-w))/(w*w), 1e-6)
		// The second mean is a quadrature over pieces of straight lines: third
		// order at their corners, 1e-3 of a slope of 0.0167.
		near(t, fmt.Sprint("slope twice ", row), res.Series[4][0][row], again(func(s float64) float64 { return slope(x, s) }, at), 2e-5)
		near(t, fmt.Sprint("velocity twice ", row), res.Series[5][0][row], again(velocity, at), 4e-3)
	}
	if res.Series[6][0][7] != tension || res.Series[7][0][7] != 0 {
		t.Error("tension or moment")
	}
}

// Force at a joint that carries something is what the line exerts on it: with
// M u” + C u' + K u = F + that force. Checked with the solver's own smooth
// acceleration and velocity of the joint.
func TestForceOnAFitting(t *testing.T) {
	m := jointed()
	m.Channels = nil
	m.Band = 40
	m.Nodes[1].Fitting, m.Nodes[2].Fitting = true, true
	m.Nodes[1].Spring = 4000
	m.Pushes = []mesh.Push{{At: node(1), Force: bump(300, 0.08)}}
	for _, q := range []scenario.Quantity{scenario.Displacement, scenario.Velocity, scenario.Acceleration, scenario.Force} {
		look(m, q, 0, node(1), node(2))
	}
	res := solve(t, m, 3)
	s := res.Series
	worst, most := 0.0, 0.0
	for row := range m.Timing.Rows {
		f := m.Pushes[0].Force.Value.At(float64(row)*m.Timing.Every, 0)
		left := 1.5*s[2][0][row] + 4000*s[0][0][row] - f
		worst = math.Max(worst, math.Abs(left-s[3][0][row]))
		left = 150*s[1][1][row] + 30000*s[0][1][row]
		worst = math.Max(worst, math.Abs(left-s[3][1][row]))
		most = math.Max(most, math.Abs(s[3][0][row]))
	}
	// Accelerations are second differences of a cubic beside breaks: chosen.
	if !(worst < 1e-4*most) {
		t.Errorf("node law off by %g of %g", worst, most)
	}
}

// The node law's step against a dense exponential of another library: states and
// inputs 1, s, s^2 in one matrix.
func TestStepAgainstDenseExponential(t *testing.T) {
	m := jointed()
	m.Nodes[1].Brackets = []mesh.Maxwell{{K: 3e4, C: 80}}
	m.Links = []mesh.Link{{A: 1, B: 2, Spring: 5000, Dashpot: 30}}
	lay, _ := plan(m, solver.Request{})
	r, err := assemble(m, &lay)
	if err != nil {
		t.Fatal(err)
	}
	var c *cluster
	for _, k := range r.clusters {
		if len(k.joints) == 2 {
			c = k
		}
	}
	n, in := c.a.rows, c.b.cols
	for _, share := range []float64{1, 0.37} {
		h := share * c.delta
		big := mat.NewDense(n+3, n+3, nil)
		coef := [3][]float64{}
		for k := range coef {
			coef[k] = make([]float64, in)
			for i := range coef[k] {
				coef[k][i] = math.Sin(float64(3*i + k + 1))
			}
		}
		for i := range n {
			for j := range n {
				big.Set(i, j, h*c.a.at(i, j))
			}
			for k := range coef {
				s := 0.0
				for j := range in {
					s += c.b.at(i, j) * coef[k][j]
				}
				big.Set(i, n+k, h*s)
			}
		}
		big.Set(n+1, n, 1) // s' = 1
		big.Set(n+2, n+1, 2)
		// Row n+k is s^k; it multiplies column n+k.
		var e mat.Dense
		e.Exp(big)
		x0 := make([]float64, n)
		for i := range x0 {
			x0[i] = math.Cos(float64(i))
		}
		copy(c.x, x0)
		for k := range coef {
			copy(c.coef[k], coef[k])
		}
		p := propagate(c.a, c.b, h)
		got := make([]float64, n)
		p.e.addTo(got, x0)
		for k := range coef {
			p.g[k].addTo(got, coef[k])
		}
		c.odd(h)
		for i := range n {
			want := e.At(i, n)
			for j := range n {
				want += e.At(i, j) * x0[j]
			}
			near(t, fmt.Sprint("propagator ", i), got[i], want, 1e-12)
			near(t, fmt.Sprint("series ", i), c.x[i], want, 1e-12)
		}
	}
}

// Walked the other way, or cut by a bare splice, a line is the same line.
func TestReversedAndSpliced(t *testing.T) {
	m := jointed()
	m.Band = 80
	m.Pieces[1].Viscous = 4
	m.Pushes = []mesh.Push{{At: inside(0, 2), Force: bump(300, 0.04)}}
	back := jointed()
	back.Band = 80
	back.Pushes = []mesh.Push{{At: inside(2, 3.1-2), Force: bump(300, 0.04)}}
	for i, p := range m.Pieces {
		q := p
		q.From, q.To, q.X0 = 3-p.To, 3-p.From, 10-p.X0-p.Length
		back.Pieces[2-i] = q
	}
	for i, n := range m.Nodes {
		back.Nodes[3-i] = n
	}
	back.Channels = nil
	look(back, scenario.Displacement, 0, inside(2, 3.1-1.3), inside(1, 4.7-2), node(1))
	a, b := solve(t, m, 0), solve(t, back, 0)
	for k := range a.Series[0] {
		if d := relative(b.Series[0][k], a.Series[0][k]); !(d < 1e-11) {
			t.Errorf("reversed, spot %d: %g", k, d)
		}
	}
	cut := span(2e-3, 251, stretch{3.1, 20000, 2, 0}, stretch{1.7, 20000, 3.5, 4}, stretch{3, 20000, 3.5, 4}, stretch{2.2, 20000, 2, 0})
	cut.Band = 80
	cut.Nodes[1], cut.Nodes[3], cut.Nodes[4] = m.Nodes[1], m.Nodes[2], m.Nodes[3]
	cut.Pushes = m.Pushes
	look(cut, scenario.Displacement, 0, inside(0, 1.3), inside(2, 0.3), node(3))
	a, b = solve(t, m, 2), solve(t, cut, 2)
	for k := range a.Series[0] {
		// Other steps, other errors: those of level 2, 1e-6.
		if d := relative(b.Series[0][k], a.Series[0][k]); !(d < 5e-6) {
			t.Errorf("cut, spot %d: %g", k, d)
		}
	}
}
