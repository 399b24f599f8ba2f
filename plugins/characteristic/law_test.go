package characteristic

import (
	"math"
	"testing"

	"github.com/tautspan/tautspan/engine/formula"
	"github.com/tautspan/tautspan/engine/mesh"
	"github.com/tautspan/tautspan/engine/scenario"
)

// hungOn is a mass by itself beside a short line that nobody touches.
func hungOn(mass float64, rows int) (*mesh.Mesh, *mesh.Node) {
	m := span(1e-2, rows, stretch{2, 1000, 0.4, 0})
	m.Nodes = append(m.Nodes, mesh.Node{Name: "hung", Line: -1, Mass: mass})
	look(m, scenario.Displacement, 0, node(2))
	return m, &m.Nodes[2]
}

// match wants records within tol of the exact course at the finer of two levels,
// and the finer not much worse than the coarser; the account must close to gap.
func match(t *testing.T, what string, m *mesh.Mesh, exact func(t float64) float64, tol, gap float64) {
	t.Helper()
	want := make([]float64, m.Timing.Rows)
	for i := range want {
		want[i] = exact(float64(i) * m.Timing.Every)
	}
	a, b := solve(t, m, 1), solve(t, m, 3)
	ea, eb := relative(a.Series[0][0], want), relative(b.Series[0][0], want)
	off := math.Abs(b.Energy.Unaccounted()) / b.Energy.Most
	t.Logf("%s: errors %.2g, %.2g, account off by %.2g", what, ea, eb, off)
	if !(eb < tol) || !(eb < ea/3 || eb < 1e-9) {
		t.Errorf("%s: errors %.2g, then %.2g two levels on", what, ea, eb)
	}
	if !(off < gap) {
		t.Errorf("%s: account off by %.2g", what, off)
	}
}

// A mass on a spring that slides loses 2F/k of its amplitude each half cycle and
// stays where the spring no longer overcomes F (Coulomb friction, closed form).
func TestFrictionOfSlider(t *testing.T) {
	const mass, k, force, start = 2.0, 800.0, 3.0, 0.05
	m, n := hungOn(mass, 301)
	n.Spring, n.Start = k, start
	n.Laws = []mesh.Law{{Friction: &mesh.Friction{Force: force}}}
	omega := math.Sqrt(k / mass)
	match(t, "slider", m, func(t float64) float64 {
		a, side := start, 1.0
		for half := 0; ; half++ {
			if a <= force/k {
				return side * a
			}
			if left := t - float64(half)*math.Pi/omega; left < math.Pi/omega {
				return side * (force/k + (a-force/k)*math.Cos(omega*left))
			}
			a, side = a-2*force/k, -side
		}
	}, 2e-4, 1e-4)
}

// A joint without mass between two long pieces moves where the pulse's force
// 2 Z p exceeds the friction, by the excess over 2 Z.
func TestFrictionOfMasslessJoint(t *testing.T) {
	const z, peak, duration, grip = 100.0, 60.0, 0.04, 25.0
	m := span(1e-3, 151, stretch{20, 10000, 1, 0}, stretch{20, 10000, 1, 0})
	m.Nodes[1].Laws = []mesh.Law{{Friction: &mesh.Friction{Force: grip}}}
	m.Pushes = []mesh.Push{{At: inside(0, 15), Force: halfSine(peak, duration)}}
	look(m, scenario.Displacement, 0, node(1))
	w := math.Pi / duration
	from := math.Asin(grip/peak) / w
	match(t, "massless joint", m, func(t float64) float64 {
		t -= 5 / 100.0
		t = math.Min(t, duration-from)
		if t < from {
			return 0
		}
		return (peak/w*(math.Cos(w*from)-math.Cos(w*t)) - grip*(t-from)) / (2 * z)
	}, 1e-4, 1e-3)
}

// A mass that flies against a stop stays on its spring for half a period and
// comes back as fast.
func TestStop(t *testing.T) {
	const mass, k, gap, speed = 2.0, 9000.0, 0.02, 0.5
	m, n := hungOn(mass, 21)
	n.StartRate = speed
	n.Laws = []mesh.Law{{Stop: &mesh.Stop{Gap: gap, Spring: k, Up: true}}}
	omega := math.Sqrt(k / mass)
	match(t, "stop", m, func(t float64) float64 {
		hit := gap / speed
		switch off := hit + math.Pi/omega; {
		case t < hit:
			return speed * t
		case t < off:
			return gap + speed/omega*math.Sin(omega*(t-hit))
		default:
			return gap - speed*(t-off)
		}
	}, 1e-3, 1e-9)
}

// A tie pulls for half a period and then lets go.
func TestSlackTie(t *testing.T) {
	const mass, k, speed = 2.0, 900.0, 0.5
	omega := math.Sqrt(k / mass)
	exact := func(t float64) float64 {
		if t < math.Pi/omega {
			return -speed / omega * math.Sin(omega*t)
		}
		return speed * (t - math.Pi/omega)
	}
	m, n := hungOn(mass, 31)
	n.StartRate = -speed
	m.Links = []mesh.Link{{Name: "tie", A: 1, B: 2, Spring: k, Slack: true}}
	match(t, "below", m, exact, 1e-3, 1e-9)
	n.StartRate = speed
	m.Links[0].A, m.Links[0].B = 2, 1
	match(t, "above", m, func(t float64) float64 { return -exact(t) }, 1e-3, 1e-9)
	// Between two masses: the difference moves like one with the reduced mass.
	n.StartRate, n.Mass = -speed, 2*mass
	m.Nodes = append(m.Nodes, mesh.Node{Name: "upper", Line: -1, Mass: 2 * mass, StartRate: speed})
	m.Links[0].A, m.Links[0].B = 3, 2
	m.Links[0].Spring = k
	match(t, "two masses", m, exact, 1e-3, 1e-9)
}

// Friction behind a bracket: the mass stretches the bracket, slides to where its
// speed is spent, and swings back on the bracket.
func TestFrictionBehindBracket(t *testing.T) {
	const mass, k, force, speed = 2.0, 900.0, 4.0, 0.5
	m, n := hungOn(mass, 101)
	n.StartRate = speed
	n.Laws = []mesh.Law{{Friction: &mesh.Friction{Force: force, Through: k}}}
	omega := math.Sqrt(k / mass)
	slip := math.Asin(force*omega/(k*speed)) / omega
	u1, v1 := force/k, speed*math.Cos(omega*slip)
	rest := slip + v1*mass/force
	top := u1 + mass*v1*v1/(2*force)
	match(t, "bracket", m, func(t float64) float64 {
		switch {
		case t < slip:
			return speed / omega * math.Sin(omega*t)
		case t < rest:
			s := t - slip
			return u1 + v1*s - force/(2*mass)*s*s
		}
		return top - force/k*(1-math.Cos(omega*(t-rest)))
	}, 1e-3, 1e-3)
}

// A written law that says what a dashpot behind a bracket does gives what that gives.
func TestWrittenLawWithState(t *testing.T) {
	const k, c = 4000.0, 90.0
	build := func() *mesh.Mesh {
		m := uniform2(0, 0)
		m.Nodes[1].Mass = 1
		m.Pushes = []mesh.Push{{At: inside(0, 4), Force: bump(300, 0.08)}}
		look(m, scenario.Displacement, 0, node(1), inside(1, 6))
		return m
	}
	a, b := build(), build()
	a.Nodes[1].Brackets = []mesh.Maxwell{{K: k, C: c}}
	arm := formula.Sub(formula.Arg(mesh.ArgU), formula.Arg(mesh.ArgState))
	b.Nodes[1].Laws = []mesh.Law{{Written: &mesh.Written{Force: formula.Mul(formula.Const(-k), arm), Starts: []float64{0},
		Rates: []formula.Program{formula.Mul(formula.Const(k/c), arm)}}}}
	want := solve(t, a, 3)
	// The bracket's spring stores, of which a written law knows nothing: all that it
	// takes is lost.
	if e := solve(t, b, 3).Energy; !(e.Lost > 0) || math.Abs(e.Work/want.Energy.Work-1) > 1e-4 || math.Abs(e.Unaccounted()) > 1e-5*e.Most {
		t.Errorf("account %+v, with a bracket %+v", e, want.Energy)
	}
	e1, e2 := 0.0, 0.0
	for spot := range 2 {
		e1 = math.Max(e1, relative(solve(t, b, 1).Series[0][spot], want.Series[0][spot]))
		e2 = math.Max(e2, relative(solve(t, b, 2).Series[0][spot], want.Series[0][spot]))
	}
	if t.Logf("errors %.2g, %.2g", e1, e2); !(e2 < e1/3.5) || !(e2 < 1e-3) {
		t.Errorf("errors %.2g, %.2g", e1, e2)
	}
}
