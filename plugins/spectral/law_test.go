package spectral

import (
	"math"
	"testing"

	"github.com/tautspan/tautspan/engine/formula"
	"github.com/tautspan/tautspan/engine/mesh"
	"github.com/tautspan/tautspan/engine/scenario"
)

// gapOf is the share of the most energy that the account does not explain.
func gapOf(e interface{ Unaccounted() float64 }, most float64) float64 {
	return math.Abs(e.Unaccounted()) / most
}

// runge integrates y' = f(t, y) by the classical method with a step so small that its
// error is rounding's.
func runge(y []float64, every float64, rows, sub int, f func(t float64, y, dst []float64)) [][]float64 {
	n := len(y)
	out := [][]float64{append([]float64(nil), y...)}
	k := [4][]float64{make([]float64, n), make([]float64, n), make([]float64, n), make([]float64, n)}
	z := make([]float64, n)
	h := every / float64(sub)
	for row := 1; row < rows; row++ {
		for s := 0; s < sub; s++ {
			t := (float64(row-1) + float64(s)/float64(sub)) * every
			for i, c := range [4]float64{0, 0.5, 0.5, 1} {
				copy(z, y)
				if i > 0 {
					for q := range z {
						z[q] += c * h * k[i-1][q]
					}
				}
				f(t+c*h, z, k[i])
			}
			for q := range y {
				y[q] += h / 6 * (k[0][q] + 2*k[1][q] + 2*k[2][q] + k[3][q])
			}
		}
		out = append(out, append([]float64(nil), y...))
	}
	return out
}

// A stretching line that starts in its first mode stays in it:
//
//	q'' + c/m q' + w^2 (1 + G pi^2 q^2/(4 L T)) q = 0
//
// (Kirchhoff 1876 and Carrier 1945, from memory; e = pi^2 q^2/(4 L)). Ordinary
// integration of that equation is the reference.
func TestStretchInOneMode(t *testing.T) {
	const l, mass, tension, g, a = 10.0, 1.0, 4000.0, 2e5, 0.6
	for _, c := range []float64{0, 0.5} {
		m := chain(0.005, 121, seg{l, mass, tension, c})
		m.Lines[0].Stretch = &mesh.Stretch{Stiffness: g}
		m.Pieces[0].Start = func(s float64) float64 { return a * math.Sin(math.Pi*s/l) }
		watch(m, scenario.Displacement, 0, inside(0, 3))
		watch(m, scenario.Tension, 0, inside(0, 3))
		watch(m, scenario.Force, 0, atNode(0))
		w2 := tension / mass * math.Pow(math.Pi/l, 2)
		ref := runge([]float64{a, 0}, 0.005, 121, 50, func(_ float64, y, dst []float64) {
			dst[0], dst[1] = y[1], -c/mass*y[1]-w2*y[0]*(1+g*math.Pi*math.Pi*y[0]*y[0]/(4*l*tension))
		})
		var u, pull, force []float64
		for _, y := range ref {
			h := g * math.Pow(math.Pi*y[0], 2) / (4 * l)
			u = append(u, y[0]*math.Sin(math.Pi*0.3))
			pull = append(pull, tension+h)
			force = append(force, (tension+h)*y[0]*math.Pi/l)
		}
		for level := 0; level < 2; level++ {
			r := solve(t, m, level)
			d, dt, df := apart(r.Series[0][0], u), apart(r.Series[1][0], pull), apart(r.Series[2][0], force)
			if d > 1e-7 || dt > 1e-7 || df > 1e-7 || gapOf(r.Energy, r.Energy.Most) > 1e-6 { // chosen; 5e-9 and 1e-7 seen
				t.Errorf("c = %g level %d: off by %.1e, tension %.1e, force %.1e", c, level, d, dt, df)
			}
			t.Logf("c = %g level %d: %d unknowns, error %.1e, tension %.1e, force %.1e, energy gap %.1e", c, level, r.Plan.Cells, d, dt, df, gapOf(r.Energy, r.Energy.Most))
		}
	}
}

// jointed is a line of two pieces, knocked, with a mass and a law where they meet.
func jointed(law mesh.Law) *mesh.Mesh {
	m := chain(0.002, 201, seg{6, 1.2, 6000, 0}, seg{9, 1.2, 6000, 0})
	m.Nodes[1].Fitting = true
	m.Nodes[1].Mass = 3
	m.Nodes[1].Laws = []mesh.Law{law}
	m.Jump, m.Band = 2, 30
	m.Pieces[0].Marks = []mesh.Mark{{Kind: mesh.MarkLoad, At: 2}}
	m.Pushes = []mesh.Push{{At: inside(0, 2), Force: halfSine(300, 0.03)}}
	watch(m, scenario.Displacement, 0, inside(1, 3))
	watch(m, scenario.Displacement, 0, atNode(1))
	return m
}

// Each law at a joint: the record converges, and the account closes.
func TestJointLaws(t *testing.T) {
	arg := formula.Arg
	// -200 v (1 + 5 z), z' = u - z.
	written := &mesh.Written{
		Force:  formula.Mul(formula.Mul(formula.Const(-200), arg(mesh.ArgV)), formula.Add(formula.Const(1), formula.Mul(formula.Const(5), arg(mesh.ArgState)))),
		Starts: []float64{0.1},
		Rates:  []formula.Program{formula.Sub(arg(mesh.ArgU), arg(mesh.ArgState))},
	}
	for name, law := range map[string]mesh.Law{
		"friction":         {Friction: &mesh.Friction{Force: 20}},
		"friction through": {Friction: &mesh.Friction{Force: 20, Through: 2e4}},
		"stop":             {Stop: &mesh.Stop{Gap: 0.002, Spring: 5e5, Up: true, Down: true}},
		"written":          {Written: written},
	} {
		m := jointed(law)
		var last []float64
		change := 1.0
		for level := 0; level < 4; level++ {
			r := solve(t, m, level)
			d := change
			if last != nil {
				d = apart(last, r.Series[0][0])
			}
			if d > change {
				t.Errorf("%s level %d: changes by %.1e after %.1e", name, level, d, change)
			}
			if gap := gapOf(r.Energy, r.Energy.Most); gap > 1e-6 { // chosen; 3e-8 seen
				t.Errorf("%s level %d: energy gap %.1e", name, level, gap)
			}
			change = d
			t.Logf("%s level %d: change %.1e, energy gap %.1e, lost %.3g of %.3g", name, level, d, gapOf(r.Energy, r.Energy.Most), r.Energy.Lost, r.Energy.Work)
			last = r.Series[0][0]
		}
		if change > 2e-2 { // the stop's, which multiplies every difference
			t.Errorf("%s: still changes by %.1e", name, change)
		}
	}
}
