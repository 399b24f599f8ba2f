package fronts

import (
	"math"
	"math/rand"
	"sort"
	"testing"

	"github.com/tautspan/tautspan/engine/mesh"
)

// at is the shape at time t after its edge.
func at(grid, w []float64, t float64) float64 {
	if len(w) == 1 || t <= 0 {
		return w[0]
	}
	k := sort.SearchFloat64s(grid, t)
	if k == len(grid) {
		return w[len(w)-1]
	}
	return w[k-1] + (w[k]-w[k-1])*(t-grid[k-1])/(grid[k]-grid[k-1])
}

// Superposed shapes against the delay equations of two masses on a line, stepped
// in time by the trapezoidal rule: M v' = 2 sum Z a - R v, b = v - a. Step 2e-5 s
// against time constants of 10 ms. Differences come from the straight parts of
// the shapes: a swing of 70 rad/s and 0.5 of the step, held 0.11 t apart, is off
// by (70 * 0.11 t)^2/8 of that at t = 50 ms, 1 % of the step; twice that is
// allowed (seen 1.1 %).
func TestShapesAgainstDelayEquations(t *testing.T) {
	const dt, end = 2e-5, 4.0
	m := lineOf(end, []mesh.Node{{Fixed: true}, {Mass: 2}, {Mass: 3, Dashpot: 40, Spring: 20000}, {Fixed: true}}, seg{50, 1, 10000, 0}, seg{70, 1, 10000, 0}, seg{40, 1, 10000, 0})
	z := 100.0
	m.Pushes = []mesh.Push{{Name: "on", At: in(0, 20), Force: stepAt(2*z, 0)}}
	watchAt(m, "w", in(2, 10))
	opt := Options{End: end, Prune: 1e-4, Most: DefaultMost}
	net, err := newNetwork(m, end)
	if err != nil {
		t.Fatal(err)
	}
	tr := newTrace(net, collect(net, opt), opt)
	tr.run()

	// right[i][n], left[i][n]: waves that leave the start and the end of piece i
	// at step n. The push of unit velocity is inside piece 0, 20 m from its start.
	n := int(end/dt) + 1
	var right, left [3][]float64
	for i := range right {
		right[i], left[i] = make([]float64, n), make([]float64, n)
	}
	var delay [3]int
	for i := range delay {
		delay[i] = int(math.Round(m.Pieces[i].TravelTime() / dt))
	}
	past := func(h []float64, k int) float64 {
		if k < 0 {
			return 0
		}
		return h[k]
	}
	push := func(k int, s float64) float64 { // 1 from s/c on
		if float64(k)*dt >= s/100-1e-9 {
			return 1
		}
		return 0
	}
	var v, u, drive [4]float64
	worst := 0.0
	for k := 0; k < n; k++ {
		end0 := past(right[0], k-delay[0]) + push(k, 30)
		start0 := past(left[0], k-delay[0]) + push(k, 20)
		right[0][k] = -start0
		for i := 1; i <= 2; i++ {
			fromLeft := past(right[i-1], k-delay[i-1])
			if i == 1 {
				fromLeft = end0
			}
			fromRight := past(left[i], k-delay[i])
			f := 2 * z * (fromLeft + fromRight)
			nd := m.Nodes[i]
			r := 2*z + nd.Dashpot
			// (M/dt + r/2 + K dt/4) v+ = (M/dt - r/2 - K dt/4) v - K u + (f+ + f)/2
			next := ((nd.Mass/dt-r/2-nd.Spring*dt/4)*v[i] - nd.Spring*u[i] + (f+drive[i])/2) / (nd.Mass/dt + r/2 + nd.Spring*dt/4)
			u[i] += dt * (v[i] + next) / 2
			v[i], drive[i] = next, f
			left[i-1][k] = next - fromLeft
			right[i][k] = next - fromRight
		}
		left[2][k] = -past(right[2], k-delay[2])
		tm := float64(k) * dt
		want := past(right[2], k-5000) + past(left[2], k-15000)
		got, edge := 0.0, false
		for _, p := range tr.seen {
			d := tm - p.when.hi
			if d >= 0 {
				got += p.factor * at(net.grid, p.wave, d)
			}
			edge = edge || math.Abs(d) < 2*dt
		}
		if k%7 == 3 && !edge {
			worst = math.Max(worst, math.Abs(got-want))
		}
	}
	t.Logf("largest difference %.2g, window %.3g s", worst, net.grid[samples-1])
	if worst > 0.02 {
		t.Errorf("shapes are off by %g", worst)
	}
}

// Stiff springs, light masses and weak dampers must not spoil the exponentials:
// a spring of 1e12 N/m holds the joint, u = f/K.
func TestStiffLaws(t *testing.T) {
	for _, mass := range []float64{0, 1e-6, 10} {
		l := newLaw(1)
		l.mass[0], l.resistance[0][0], l.spring[0][0] = mass, 300, 1e12
		if err := l.solve(); err != nil {
			t.Fatal(err)
		}
		v, u := l.after(3600)
		near(t, "velocity", v[0][0]*300, 0, 1e-6)
		near(t, "displacement", u[0][0]*1e12, 1, 1e-6)
	}
}

// Whatever stands at the nodes, edges balance their energy and nothing is not
// finite; trace1 holds the account.
func TestRandomNetworks(t *testing.T) {
	r := rand.New(rand.NewSource(11))
	for k := 0; k < 25; k++ {
		m := randomLine(r, 1+r.Intn(4), 1.5)
		n := len(m.Nodes)
		for i := range m.Nodes {
			nd := &m.Nodes[i]
			nd.Mass = 3 * r.Float64() * float64(r.Intn(2))
			nd.Spring = 1e6 * r.Float64() * float64(r.Intn(2))
			nd.Dashpot = 300 * r.Float64() * float64(r.Intn(2))
			if r.Intn(3) == 0 {
				nd.Brackets = []mesh.Maxwell{{K: 1e5 * r.Float64(), C: 100 * r.Float64()}, {K: 1e3, C: 1}}
			}
		}
		if r.Intn(2) == 0 {
			m.Nodes = append(m.Nodes, mesh.Node{Name: "hung", Line: -1, Mass: 1})
			m.Links = append(m.Links, mesh.Link{Name: "hung", A: r.Intn(n), B: n, Spring: 1e4 * r.Float64(), Dashpot: 20 * r.Float64()})
		}
		if n > 2 && r.Intn(2) == 0 {
			m.Links = append(m.Links, mesh.Link{Name: "tie.t", A: 0, B: n - 1, Spring: 1e4 * r.Float64(), Dashpot: 20 * r.Float64()})
		}
		watchAt(m, "first", on(0))
		l := trace1(t, m, Options{Prune: 1e-3, Most: 500})
		for _, a := range l.Arrivals {
			for _, v := range []float64{a.Time, a.Amplitude, a.Onset, a.Settled, a.PeakAfter} {
				if math.IsNaN(v) || math.IsInf(v, 0) {
					t.Fatalf("%+v", a)
				}
			}
		}
	}
}
