package differences

import (
	"math"
	"testing"

	"github.com/tautspan/tautspan/engine/formula"
	"github.com/tautspan/tautspan/engine/mesh"
	"github.com/tautspan/tautspan/engine/scenario"
	"github.com/tautspan/tautspan/engine/solver"
)

// orders solves a mesh at three levels by a scheme and checks the order of the
// records against want, within the house's margin of 0.2, and the last error.
func orders(t *testing.T, m *mesh.Mesh, order int, want map[int][]float64, expect, most float64) {
	t.Helper()
	layout, _ := layoutOf(m, 1, order)
	if order == 4 {
		layout.Step *= fourthShare
		if why := unfit(m) + layout.unstable(m); why != "" {
			t.Fatalf("order 4 refused: %s", why)
		}
	}
	errs := map[int][]float64{}
	for level := 0; level < 3; level++ {
		res := solve(t, m, solver.Request{Level: level, Freeze: layout})
		for ch := range want {
			errs[ch] = append(errs[ch], distance(res.Series[ch][0], want[ch]))
		}
	}
	for ch, e := range errs {
		// Near Courant number 1 the leading error is small and the next one may
		// cancel it at a level: the better of the last step and the mean counts.
		p := math.Max(math.Log2(e[1]/e[2]), math.Log2(e[0]/e[2])/2)
		t.Logf("order %d channel %d (%s): %.2e order %.2f", order, ch, m.Channels[ch].Name(), e, p)
		if !(p > expect-0.2) && e[2] > 1e-12 || e[2] > most {
			t.Errorf("order %d channel %d (%s): errors %.2e, order %.2f", order, ch, m.Channels[ch].Name(), e, p)
		}
	}
}

// A viscous line released in a mode: e^(-gt) (cos wt + g/w sin wt) sin kx with
// g = c/(2m), w^2 = (kc)^2 - g^2. The line is cut by bare splices.
func TestViscousMode(t *testing.T) {
	const length, c, mass, viscous, n = 10.0, 100.0, 2.0, 3.0, 3
	m := line(0.004, 101, stretch1{4, mass, mass * c * c, viscous}, stretch1{3.3, mass, mass * c * c, viscous}, stretch1{2.7, mass, mass * c * c, viscous})
	for i := 1; i < 3; i++ {
		m.Nodes[i].Start = math.Sin(n * math.Pi * m.Nodes[i].X / length)
	}
	k := n * math.Pi / length
	for i := range m.Pieces {
		x0 := m.Pieces[i].X0
		m.Pieces[i].Start = func(s float64) float64 { return math.Sin(k * (x0 + s)) }
	}
	g := viscous / (2 * mass)
	w := math.Sqrt(k*k*c*c - g*g)
	f := func(t float64) float64 { return math.Exp(-g*t) * (math.Cos(w*t) + g/w*math.Sin(w*t)) }
	rate := func(t float64) float64 { return -math.Exp(-g*t) * (g*g/w + w) * math.Sin(w*t) }
	bend := func(t float64) float64 { return -k*k*c*c*f(t) - 2*g*rate(t) }
	want := map[int][]float64{
		watchAt(m, scenario.Displacement, 0, 1.234, 0): sample(m, func(t float64) float64 { return math.Sin(k*1.234) * f(t) }),
		watchAt(m, scenario.Velocity, 1, 1.11, 0):      sample(m, func(t float64) float64 { return math.Sin(k*5.11) * rate(t) }),
		watchNode(m, scenario.Acceleration, 2, 0):      sample(m, func(t float64) float64 { return math.Sin(k*7.3) * bend(t) }),
		watchNode(m, scenario.Slope, 1, 0):             sample(m, func(t float64) float64 { return k * math.Cos(k*4) * f(t) }),
		watchAt(m, scenario.Slope, 2, 0.777, 0):        sample(m, func(t float64) float64 { return k * math.Cos(k*8.077) * f(t) }),
		watchNode(m, scenario.Force, 0, 0):             sample(m, func(t float64) float64 { return mass * c * c * k * f(t) }),
		watchNode(m, scenario.Force, 3, 0):             sample(m, func(t float64) float64 { return -mass * c * c * k * math.Cos(k*length) * f(t) }),
		watchNode(m, scenario.Force, 2, 0):             sample(m, func(t float64) float64 { return mass * c * c * k * math.Cos(k*7.3) * f(t) }),
		watchNode(m, scenario.Slope, 3, 0):             sample(m, func(t float64) float64 { return k * math.Cos(k*length) * f(t) }),
	}
	orders(t, m, 2, want, 2, 5e-3)
	// Near joints the operator's own error is of order 2 and sets off waves of the
	// shortest kind: of order 4 as displacements, of order 2 as accelerations.
	acceleration := map[int][]float64{2: want[2]}
	delete(want, 2)
	orders(t, m, 4, want, 4, 1e-4)
	orders(t, m, 4, acceleration, 2, 1e-3)
}

// A force per length q sin(kx) sin(pt) from rest drives mode k alone:
// u = q/m (sin pt - p/w sin wt)/(w^2 - p^2) sin kx, w = kc.
func TestPressedMode(t *testing.T) {
	const length, c, mass, q, n, p = 10.0, 100.0, 2.0, 7.0, 2, 40.0
	m := line(0.004, 101, stretch1{4, mass, mass * c * c, 0}, stretch1{6, mass, mass * c * c, 0})
	k := n * math.Pi / length
	shape := formula.Apply(formula.OpSin, formula.Mul(formula.Const(k), formula.Arg(formula.ArgX)))
	value := formula.Mul(formula.Mul(formula.Const(q), shape), formula.Apply(formula.OpSin, formula.Mul(formula.Const(p), formula.Arg(formula.ArgT))))
	m.Presses = []mesh.Press{{Name: "wind", Force: scenario.History{Value: value}, Parts: []mesh.Part{
		{Piece: 0, To: 4, Origin: 0}, {Piece: 1, To: 6, Origin: 4},
	}}}
	m.Jump = 3
	w := k * c
	f := func(t float64) float64 { return q / mass * (math.Sin(p*t) - p/w*math.Sin(w*t)) / (w*w - p*p) }
	want := map[int][]float64{
		watchAt(m, scenario.Displacement, 0, 1.234, 0): sample(m, func(t float64) float64 { return math.Sin(k*1.234) * f(t) }),
		watchNode(m, scenario.Displacement, 1, 0):      sample(m, func(t float64) float64 { return math.Sin(k*4) * f(t) }),
		watchNode(m, scenario.Force, 0, 0):             sample(m, func(t float64) float64 { return mass * c * c * k * f(t) }),
		watchNode(m, scenario.Slope, 1, 0):             sample(m, func(t float64) float64 { return k * math.Cos(k*4) * f(t) }),
	}
	orders(t, m, 2, want, 2, 5e-3)
	orders(t, m, 4, want, 4, 1e-4)
}

// A uniform step of force per length on an endless line: u = q t^2/(2m) far from
// the ends, and with an end stretch loaded only, half of that at its border after
// d'Alembert; here the whole line but for the fixed ends, before they are heard.
func TestPressedStep(t *testing.T) {
	const mass, q, c = 2.0, 5.0, 100.0
	m := line(0.001, 41, stretch1{10, mass, mass * c * c, 0})
	m.Presses = []mesh.Press{{Name: "gust", Parts: []mesh.Part{{Piece: 0, From: 2.345, To: 10}}, Force: timeHistory(formula.OpStep, []float64{0.0012345}, q, 0.0012345)}}
	m.Jump = 2
	inside := watchAt(m, scenario.Displacement, 0, 7, 0)
	border := watchAt(m, scenario.Displacement, 0, 2.345, 0)
	u := func(t float64) float64 { return q / mass / 2 * math.Pow(math.Max(t-0.0012345, 0), 2) }
	want := map[int][]float64{
		inside: sample(m, func(t float64) float64 {
			return u(t) - u(t-0.03) // the wave from the fixed end, 3 m off, takes as much away again
		}),
		border: sample(m, func(t float64) float64 { return u(t) / 2 }),
	}
	// Before 0.0234 s for the border; after that the fixed end is heard.
	for i := range want[border] {
		if tt := float64(i) * 0.001; tt > 0.023 {
			want[border] = want[border][:i]
			break
		}
	}
	want[inside] = want[inside][:31]
	orders(t, m, 2, want, 2, 2e-3)
}

// A point force inside an endless line: u = 1/(2Z) integral of F(t - |x - xs|/c).
// The place is between points, the line cut elsewhere, the half sine starts late.
func TestPushInside(t *testing.T) {
	const c, mass, peak, width, late = 100.0, 2.0, 30.0, 0.03, 0.0123
	m := line(0.002, 101, stretch1{11, mass, mass * c * c, 0}, stretch1{9, mass, mass * c * c, 0})
	for i := range []int{0, 1} {
		n := &m.Nodes[2*i]
		n.Fixed, n.Absorbing, n.Dashpot = false, true, mass*c
	}
	shifted := formula.Apply(formula.OpHalfSine, formula.Sub(formula.Arg(formula.ArgT), formula.Const(late)), formula.Const(peak), formula.Const(width))
	m.Pieces[0].Marks = []mesh.Mark{{Kind: mesh.MarkLoad, At: 5.4321}}
	m.Pushes = []mesh.Push{{Name: "knock", At: mesh.Spot{Node: -1, Piece: 0, At: 5.4321}, Force: scenario.History{Value: shifted, Breaks: []float64{late, late + width}}}}
	m.Jump = 2
	m.Band = 50
	u := func(x, t float64) float64 {
		s := math.Min(math.Max(t-late-math.Abs(x-5.4321)/c, 0), width)
		return peak * width / math.Pi * (1 - math.Cos(math.Pi*s/width)) / (2 * mass * c)
	}
	want := map[int][]float64{}
	for _, x := range []float64{0, 5.4321, 7.7} {
		want[watchAt(m, scenario.Displacement, 0, x, 0)] = sample(m, func(t float64) float64 { return u(x, t) })
	}
	rate := func(x, t float64) float64 {
		s := t - late - math.Abs(x-5.4321)/c
		if s < 0 || s > width {
			return 0
		}
		return peak * math.Sin(math.Pi*s/width) / (2 * mass * c)
	}
	rates := map[int][]float64{}
	rates[watchAt(m, scenario.Velocity, 0, 5.4321, 0)] = sample(m, func(t float64) float64 { return rate(5.4321, t) })
	rates[watchAt(m, scenario.Slope, 0, 5.4321, 0)] = sample(m, func(t float64) float64 { return -rate(5.4321, t) / c })
	rates[watchAt(m, scenario.Velocity, 0, 7.7, 0)] = sample(m, func(t float64) float64 { return rate(7.7, t) })
	want[watchAt(m, scenario.Displacement, 1, 3, 0)] = sample(m, func(t float64) float64 { return u(14, t) })
	orders(t, m, 2, want, 2, 1e-3)
	orders(t, m, 2, rates, 2, 5e-3) // slope at the force: that after it
}

// A support that moves sends u(x, t) = g(t - x/c) into the line; the other end
// absorbs it, so that an ideal record goes on for ever.
func TestPrescribedMotion(t *testing.T) {
	const c, mass = 100.0, 2.0
	m := line(0.002, 151, stretch1{7, mass, mass * c * c, 0}, stretch1{5, mass * 2, mass * 2 * c * c, 0})
	g := func(t float64) float64 {
		if t < 0 {
			return 0
		}
		return 0.01 * math.Pow(math.Sin(9*t), 4)
	}
	rate := func(t float64) float64 {
		if t < 0 {
			return 0
		}
		return 0.36 * math.Pow(math.Sin(9*t), 3) * math.Cos(9*t)
	}
	m.Nodes[0].Motion = &mesh.Motion{Displacement: g, Velocity: rate}
	m.Nodes[2].Fixed, m.Nodes[2].Absorbing, m.Nodes[2].Dashpot = false, true, m.Pieces[1].Impedance()
	// Impedances 2mc and mc: 2/3 goes on, -1/3 comes back and is turned over
	// at the moving support, which holds its own course: +1/3 again.
	through := func(t float64) float64 {
		sum, share := 0.0, 1.0
		for n := 0; n < 5; n++ {
			sum += share * 2 / 3 * g(t-0.07-0.14*float64(n))
			share /= 3
		}
		return sum
	}
	want := map[int][]float64{
		watchNode(m, scenario.Displacement, 1, 0):     sample(m, through),
		watchAt(m, scenario.Displacement, 1, 2.22, 0): sample(m, func(t float64) float64 { return through(t - 0.0222) }),
		watchNode(m, scenario.Velocity, 0, 0):         sample(m, rate),
	}
	orders(t, m, 2, want, 2, 1e-3)
	force := watchNode(m, scenario.Force, 0, 0)
	layout, _ := layoutOf(m, 1, 2)
	res := solve(t, m, solver.Request{Level: 2, Freeze: layout})
	// The line's force on the moving support is -Z (rate + 2 sum of echoes).
	wantForce := sample(m, func(t float64) float64 {
		sum, share := rate(t), 2.0
		for n := 1; n < 5; n++ {
			share /= 3
			sum += share * rate(t-0.14*float64(n))
		}
		return -mass * c * sum
	})
	// Chosen; 3e-4 seen at this level.
	if d := distance(res.Series[force][0], wantForce); d > 2e-3 {
		t.Errorf("force at the moving support off by %.2g", d)
	}
}

// A node without mass that starts out of balance moves off at once with
// force/(C + 2Z): a pluck let go at a dashpot, at Courant number 1 exactly.
func TestPluckAtDashpot(t *testing.T) {
	const c, mass, dashpot = 100.0, 2.0, 130.0
	m := line(0.005, 9, stretch1{5, mass, mass * c * c, 0}, stretch1{5, mass, mass * c * c, 0})
	m.Jump = 1
	m.Nodes[1].Dashpot, m.Nodes[1].Fitting, m.Nodes[1].Start = dashpot, true, 0.01
	m.Pieces[0].Start = func(s float64) float64 { return 0.01 * s / 5 }
	m.Pieces[1].Start = func(s float64) float64 { return 0.01 * (1 - s/5) }
	at := watchNode(m, scenario.Displacement, 1, 0)
	res := solve(t, m, solver.Request{})
	force := -2 * mass * c * c * 0.01 / 5
	for i, got := range res.Series[at][0] {
		want := 0.01 + force/(dashpot+2*mass*c)*float64(i)*0.005
		if math.Abs(got-want) > 1e-14 {
			t.Errorf("row %d: %.15g, want %.15g", i, got, want)
		}
	}
}

// Means of a plucked line at Courant number 1, from d'Alembert's displacement
// alone: mean velocity and slope, twice-averaged acceleration, mean force.
func TestMeans(t *testing.T) {
	const length, c, mass, every = 10.0, 100.0, 2.0, 0.0037
	m := line(every, 120, stretch1{length, mass, mass * c * c, 0})
	m.Jump = 1
	m.Pieces[0].Start = triangle(length, 3, 0.01)
	m.Pieces[0].Marks = []mesh.Mark{{Kind: mesh.MarkKink, At: 3}}
	hat := oddPeriodic(length, triangle(length, 3, 0.01))
	const x = 6.13
	u := func(x, t float64) float64 {
		t = math.Max(t, 0)
		return (hat(x-c*t) + hat(x+c*t)) / 2
	}
	vel := watchAt(m, scenario.Velocity, 0, x, 1)
	acc := watchAt(m, scenario.Acceleration, 0, x, 2)
	slope := watchAt(m, scenario.Slope, 0, x, 1)
	twice := watchAt(m, scenario.Slope, 0, x, 2)
	force := watchNode(m, scenario.Force, 0, 1)
	// Integrals of slope over time by the midpoint rule in steps of every/4000.
	integral := func(weight func(s float64) float64, f func(t float64) float64) func(t float64) float64 {
		return func(t float64) float64 {
			const n = 4000
			sum := 0.0
			for i := 0; i < 2*n; i++ {
				s := (float64(i)+0.5)/n - 1
				sum += weight(s) * f(t+s*every) / n
			}
			return sum
		}
	}
	box := func(s float64) float64 {
		if math.Abs(s) < 0.5 {
			return 1
		}
		return 0
	}
	tent := func(s float64) float64 { return 1 - math.Abs(s) }
	const d = 1e-6
	du := func(at float64) func(t float64) float64 {
		return func(t float64) float64 { return (u(at+d, t) - u(at-d, t)) / (2 * d) }
	}
	want := map[int][]float64{
		vel:   sample(m, func(t float64) float64 { return (u(x, t+every/2) - u(x, t-every/2)) / every }),
		acc:   sample(m, func(t float64) float64 { return (u(x, t+every) - 2*u(x, t) + u(x, t-every)) / every / every }),
		slope: sample(m, integral(box, du(x))),
		twice: sample(m, integral(tent, du(x))),
		force: sample(m, func(t float64) float64 { return mass * c * c * integral(box, du(d))(t) }),
	}
	for level := 0; level < 3; level++ {
		res := solve(t, m, solver.Request{Level: level, Effort: 1})
		now := map[int]float64{}
		for ch, w := range want {
			now[ch] = distance(res.Series[ch][0], w)
		}
		t.Log(now)
		for ch, e := range now {
			// Kinks off the grid leave order 1 or better; two levels of it are
			// asked for, from 3 % (seen 1 %; the acceleration is a set of spikes,
			// each as wide as an output interval).
			if level == 0 && e > 0.03 || level == 2 && e > 0.03/3 {
				t.Errorf("level %d: %s with %d means off by %.2g", level, m.Channels[ch].Name(), m.Channels[ch].Means, e)
			}
		}
	}
}
