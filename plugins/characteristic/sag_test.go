package characteristic

import (
	"math"
	"testing"

	"github.com/tautspan/tautspan/engine/mesh"
	"github.com/tautspan/tautspan/engine/scenario"
)

const (
	sagLength  = 20.0
	sagTension = 8400.0
	sagMass    = 0.35
)

// crossover is a sagging line cut in two at lambda^2 = 4 pi^2, where the first
// symmetric motion is 1 - cos(2 pi x/L) at the frequency of the second of a taut
// line. Source: Irvine, Caughey, Proc. R. Soc. Lond. A 341 (1974) 299-315 (from
// memory); put into the equation of motion by hand.
func crossover(viscous float64) *mesh.Mesh {
	m := span(1e-3, 401, stretch{7, sagTension, sagMass, viscous}, stretch{sagLength - 7, sagTension, sagMass, viscous})
	kappa := 4 * math.Pi * math.Pi * sagTension / (sagLength * sagLength * sagLength)
	const w = 0.004 // 1/m, chosen
	m.Lines[0].Sag = &mesh.Sag{Stiffness: kappa / (w * w), Pieces: []float64{w, w}}
	look(m, scenario.Displacement, 0, node(1), inside(1, 3))
	look(m, scenario.Velocity, 0, node(1), inside(1, 3))
	return m
}

func TestSagAtCrossover(t *testing.T) {
	k := 2 * math.Pi / sagLength
	shape := func(x float64) float64 { return 0.01 * (1 - math.Cos(k*x)) }
	for _, viscous := range []float64{0, 0.3} {
		m := crossover(viscous)
		m.Pieces[0].Start = shape
		m.Pieces[1].Start = func(s float64) float64 { return shape(s + 7) }
		m.Nodes[1].Start = shape(7)
		gamma, omega := viscous/(2*sagMass), k*math.Sqrt(sagTension/sagMass)
		own := math.Sqrt(omega*omega - gamma*gamma)
		course := func(t float64) float64 {
			return math.Exp(-gamma*t) * (math.Cos(own*t) + gamma/own*math.Sin(own*t))
		}
		pace := func(t float64) float64 {
			return -math.Exp(-gamma*t) * omega * omega / own * math.Sin(own*t)
		}
		worst := [2]float64{}
		for i, level := range []int{1, 2} {
			r := solve(t, m, level)
			for c, of := range []func(float64) float64{course, pace} {
				for spot, x := range []float64{7, 10} {
					want := make([]float64, m.Timing.Rows)
					for row := range want {
						want[row] = shape(x) * of(float64(row)*m.Timing.Every)
					}
					worst[i] = math.Max(worst[i], relative(r.Series[c][spot], want))
				}
			}
			// A lattice of ten cells for a weak loss: a twelfth of (omega ds)^2 of what
			// is lost, a third of all.
			if gap := math.Abs(r.Energy.Unaccounted()) / r.Energy.Most; level == 2 && !(gap < 1e-3) {
				t.Errorf("viscous %g, level %d: account off by %.2g", viscous, level, gap)
			}
		}
		t.Logf("viscous %g: errors %.2g", viscous, worst)
		if !(worst[1] < 1e-5) || !(worst[1] < worst[0]/3.5) {
			t.Errorf("viscous %g: errors %.2g", viscous, worst)
		}
	}
}

// Kinks, a knock inside a piece and a clamp that hangs on the line: the account
// closes, and levels draw together at the order of kinked data.
func TestSagOfKinkedLine(t *testing.T) {
	m := crossover(0.2)
	m.Jump = 1
	m.Nodes[1].Mass = 2
	m.Lines[0].Sag.Nodes = map[int]float64{1: 0.02}
	h := hat(sagLength, 4, 0.02)
	m.Pieces[0].Start = h
	m.Pieces[0].Marks = []mesh.Mark{{Kind: mesh.MarkKink, At: 4}}
	m.Pieces[1].Start = func(s float64) float64 { return h(s + 7) }
	m.Nodes[1].Start = h(7)
	m.Pushes = []mesh.Push{{At: inside(1, 5), Force: halfSine(200, 0.05)}}
	a, b, c := solve(t, m, 1), solve(t, m, 2), solve(t, m, 3)
	for spot := range 2 {
		e1, e2 := relative(a.Series[0][spot], b.Series[0][spot]), relative(b.Series[0][spot], c.Series[0][spot])
		if !(e2 < e1/2.8) || !(e2 < 2e-5) {
			t.Errorf("spot %d: levels differ by %.2g, then %.2g", spot, e1, e2)
		}
	}
	if gap := math.Abs(c.Energy.Unaccounted()) / c.Energy.Most; !(gap < 1e-4) {
		t.Errorf("account off by %.2g", gap)
	}
}

func TestSagRefusesRolls(t *testing.T) {
	m := crossover(0)
	m.Rolls = []mesh.Roll{{Name: "r", Speed: 10, Force: 100}}
	if len(New().Refuses(m)) != 1 {
		t.Errorf("%q", New().Refuses(m))
	}
}
