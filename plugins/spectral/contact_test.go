package spectral

import (
	"math"
	"testing"

	"github.com/tautspan/tautspan/engine/formula"
	"github.com/tautspan/tautspan/engine/mesh"
	"github.com/tautspan/tautspan/engine/scenario"
	"github.com/tautspan/tautspan/engine/solver"
)

// oscillator is one mass of 2 kg that hangs on 800 N/m from a fixed node (20 rad/s),
// let go at u0, beside a line that is at rest; law acts on it.
func oscillator(u0 float64, law *mesh.Law) *mesh.Mesh {
	m := chain(0.002, 501, seg{6, 1.2, 6000, 0})
	m.Nodes = append(m.Nodes, mesh.Node{Name: "mass", Line: -1, Mass: 2, Start: u0})
	if law != nil {
		m.Nodes[2].Laws = []mesh.Law{*law}
	}
	m.Links = []mesh.Link{{Name: "spring", A: 0, B: 2, Spring: 800}}
	m.Jump = 2
	watch(m, scenario.Displacement, 0, atNode(2))
	return m
}

func program2(text func(u, v, z formula.Program) formula.Program) formula.Program {
	return text(formula.Arg(mesh.ArgU), formula.Arg(mesh.ArgV), formula.Arg(mesh.ArgState))
}

// Laws on one mass against what is known of it: with dry friction the amplitude falls
// by 2F/K each half period, and the motion between is a cosine about +-F/K (Den
// Hartog, Mechanical Vibrations, from memory); everything else by ordinary integration.
func TestLawsOnOneMass(t *testing.T) {
	const k, mass, u0 = 800.0, 2.0, 0.05
	ordinary := func(force func(u, v float64) float64) func() []float64 {
		return func() []float64 {
			var out []float64
			for _, y := range runge([]float64{u0, 0}, 0.002, 501, 400, func(_ float64, y, dst []float64) {
				dst[0], dst[1] = y[1], (force(y[0], y[1])-k*y[0])/mass
			}) {
				out = append(out, y[0])
			}
			return out
		}
	}
	state := func() []float64 {
		var out []float64
		for _, y := range runge([]float64{u0, 0, 0.02}, 0.002, 501, 20, func(_ float64, y, dst []float64) {
			dst[0], dst[1], dst[2] = y[1], (-300*(y[0]-y[2])-k*y[0])/mass, 15*(y[0]-y[2])
		}) {
			out = append(out, y[0])
		}
		return out
	}
	coulomb := func() []float64 {
		const shift, w = 5 / k, 20.0
		var out []float64
		for row := 0; row < 501; row++ {
			half := math.Floor(w * float64(row) * 0.002 / math.Pi)
			a := u0 - 2*shift*half // amplitude at the half period's start
			if a <= shift {        // it stays where it stopped
				stuck := math.Ceil((u0/shift - 1) / 2)
				out = append(out, (u0-2*shift*stuck)*math.Cos(math.Pi*stuck))
				continue
			}
			sign := math.Cos(math.Pi * half)
			out = append(out, sign*(shift+(a-shift)*math.Cos(w*float64(row)*0.002-math.Pi*half)))
		}
		return out
	}
	c := formula.Const
	for _, x := range []struct {
		name  string
		law   mesh.Law
		want  func() []float64
		limit float64 // at level 3; chosen, about twice what is seen
	}{
		{"dry friction", mesh.Law{Friction: &mesh.Friction{Force: 5}}, coulomb, 1e-3},
		{"stop above", mesh.Law{Stop: &mesh.Stop{Gap: 0.02, Spring: 6000, Up: true}}, ordinary(func(u, _ float64) float64 { return -6000 * math.Max(0, u-0.02) }), 1e-3},
		{"stop on both sides", mesh.Law{Stop: &mesh.Stop{Gap: 0.01, Spring: 6000, Up: true, Down: true}},
			ordinary(func(u, _ float64) float64 { return -6000*math.Max(0, u-0.01) + 6000*math.Max(0, -u-0.01) }), 1e-3},
		{"cubic spring", mesh.Law{Written: &mesh.Written{Force: program2(func(u, _, _ formula.Program) formula.Program {
			return formula.Mul(c(-4e5), formula.Mul(u, formula.Mul(u, u)))
		})}}, ordinary(func(u, _ float64) float64 { return -4e5 * u * u * u }), 1e-3},
		{"velocity to the power 2", mesh.Law{Written: &mesh.Written{Force: program2(func(_, v, _ formula.Program) formula.Program {
			return formula.Mul(c(-8), formula.Mul(v, formula.Apply(formula.OpAbs, v)))
		})}}, ordinary(func(_, v float64) float64 { return -8 * v * math.Abs(v) }), 1e-3},
		{"a law with a state", mesh.Law{Written: &mesh.Written{
			Force:  program2(func(u, _, z formula.Program) formula.Program { return formula.Mul(c(-300), formula.Sub(u, z)) }),
			Starts: []float64{0.02},
			Rates:  []formula.Program{program2(func(u, _, z formula.Program) formula.Program { return formula.Mul(c(15), formula.Sub(u, z)) })},
		}}, state, 1e-3},
	} {
		want, before := x.want(), 1.0
		for level := 0; level < 4; level++ {
			r := solve(t, oscillator(u0, &x.law), level)
			d := apart(r.Series[0][0], want)
			t.Logf("%s level %d: error %.1e, order %.1f, energy gap %.1e", x.name, level, d, math.Log(before/d)/math.Log(ratio), gapOf(r.Energy, r.Energy.Most))
			if level == 3 && d > x.limit {
				t.Errorf("%s: error %.1e", x.name, d)
			}
			if gap := gapOf(r.Energy, r.Energy.Most); gap > 1e-9 || r.Energy.Lost < -1e-9*r.Energy.Most && x.law.Written == nil {
				t.Errorf("%s level %d: energy gap %.1e, lost %g", x.name, level, gap, r.Energy.Lost)
			}
			before = d
		}
	}
}

// What is linear can be said as a law: a dashpot, a spring, a viscous loss, a tie that
// stays taut.
func TestLinearLaws(t *testing.T) {
	linear := func(a, b float64) *mesh.Written {
		return &mesh.Written{Force: program2(func(u, v, _ formula.Program) formula.Program {
			return formula.Add(formula.Mul(formula.Const(-a), u), formula.Mul(formula.Const(-b), v))
		})}
	}
	base := func() *mesh.Mesh { return jointed(mesh.Law{}) }
	for name, change := range map[string]func(m *mesh.Mesh, law bool){
		"spring and dashpot": func(m *mesh.Mesh, law bool) {
			if law {
				m.Nodes[1].Laws = []mesh.Law{{Written: linear(3000, 80)}}
			} else {
				m.Nodes[1].Spring, m.Nodes[1].Dashpot = 3000, 80
			}
		},
		"viscous loss": func(m *mesh.Mesh, law bool) {
			if law {
				m.Pieces[0].Law = &mesh.Law{Written: linear(0, 3)}
			} else {
				m.Pieces[0].Viscous = 3
			}
		},
	} {
		plain := base()
		plain.Nodes[1].Laws = nil
		lawful := base()
		lawful.Nodes[1].Laws = nil
		change(plain, false)
		change(lawful, true)
		want := solve(t, plain, 3)
		before := 1.0
		for level := 0; level < 3; level++ {
			r := solve(t, lawful, level)
			d := apart(r.Series[0][0], want.Series[0][0])
			t.Logf("%s level %d: apart by %.1e (order %.1f), lost %.5g for %.5g", name, level, d, math.Log(before/d)/math.Log(ratio), r.Energy.Lost, want.Energy.Lost)
			if level == 2 && (d > 2e-3 || math.Abs(r.Energy.Lost/want.Energy.Lost-1) > 1e-2) {
				t.Errorf("%s: apart by %.1e", name, d)
			}
			before = d
		}
	}
}

// A pulse on an endless line meets a slider with dry friction. With v_in the velocity
// of the arriving wave, 2 Z v = 2 Z v_in - F where the slider moves, else it stands:
// what goes on is known in closed form.
func TestPulseAtSlider(t *testing.T) {
	const z, top, d, grip = 100.0, 200.0, 0.05, 120.0 // sqrt(T m), peak push, duration, friction
	m := chain(0.001, 301, seg{5, 1, z * z, 0}, seg{5, 1, z * z, 0})
	for _, i := range []int{0, 2} {
		free(m, i).Dashpot = z
	}
	m.Nodes[1].Fitting = true
	m.Nodes[1].Laws = []mesh.Law{{Friction: &mesh.Friction{Force: grip}}}
	m.Pushes = []mesh.Push{{At: atNode(0), Force: halfSine(2*top, d)}} // a wave of half of it over Z
	m.Jump, m.Band = 2, 60
	watch(m, scenario.Displacement, 0, inside(1, 1))
	// The wave's velocity is push/(2 Z): the start node feels its dashpot and the line.
	want := make([]float64, 301)
	const fine = 200
	u, slides := 0.0, false
	for row := 1; row < 301; row++ {
		for i := 0; i < fine; i++ {
			t := (float64(row-1)+(float64(i)+0.5)/fine)*0.001 - 6/z
			if t > 0 && t < d {
				if drive := 2 * top * math.Sin(math.Pi*t/d); drive > grip {
					u += (drive - grip) / (2 * z) * 0.001 / fine
					slides = true
				}
			}
		}
		want[row] = u
	}
	if !slides {
		t.Fatal("the slider never moves")
	}
	for level := 0; level < 4; level++ {
		r := solve(t, m, level)
		off := apart(r.Series[0][0], want)
		t.Logf("level %d: error %.1e, energy gap %.1e", level, off, gapOf(r.Energy, r.Energy.Most))
		if level == 3 && off > 2e-3 {
			t.Errorf("error %.1e", off)
		}
	}
}

// A slack tie between two hung masses pulls and never pushes: against ordinary
// integration.
func TestSlackTie(t *testing.T) {
	m := oscillator(0.05, nil)
	m.Nodes = append(m.Nodes, mesh.Node{Name: "other", Line: -1, Mass: 1})
	m.Links = append(m.Links, mesh.Link{Name: "hold", A: 0, B: 3, Spring: 100}, mesh.Link{Name: "rope", A: 2, B: 3, Spring: 5000, Dashpot: 10, Slack: true})
	watch(m, scenario.Displacement, 0, atNode(3))
	var want [2][]float64
	for _, y := range runge([]float64{0.05, 0, 0, 0}, 0.002, 501, 400, func(_ float64, y, dst []float64) {
		f := 0.0
		if y[0] > y[2] {
			f = math.Max(0, 5000*(y[0]-y[2])+10*(y[1]-y[3]))
		}
		dst[0], dst[1] = y[1], (-800*y[0]-f)/2
		dst[2], dst[3] = y[3], -100*y[2]+f
	}) {
		want[0], want[1] = append(want[0], y[0]), append(want[1], y[2])
	}
	for level := 0; level < 4; level++ {
		r := solve(t, m, level)
		a, b := apart(r.Series[0][0], want[0]), apart(r.Series[1][0], want[1])
		t.Logf("level %d: errors %.1e %.1e, energy gap %.1e", level, a, b, gapOf(r.Energy, r.Energy.Most))
		if level == 3 && math.Max(a, b) > 5e-3 {
			t.Errorf("errors %.1e %.1e", a, b)
		}
	}
}

// A load that rides on a spring: standing still it is a hung mass; with a stiff spring
// and hardly any mass it is the constant force.
func TestRides(t *testing.T) {
	base := func() *mesh.Mesh {
		m := chain(0.002, 301, seg{12, 1.2, 4800, 0.2})
		m.Jump = 1
		watch(m, scenario.Displacement, 0, inside(0, 7))
		return m
	}
	still := base()
	still.Rolls = []mesh.Roll{{Line: 0, Speed: 0, From: 4, Force: -300, Mass: 30, Spring: 4e4, Dashpot: 200}}
	hung := chain(0.002, 301, seg{4, 1.2, 4800, 0.2}, seg{8, 1.2, 4800, 0.2})
	hung.Jump = 1
	watch(hung, scenario.Displacement, 0, inside(1, 3))
	hung.Nodes = append(hung.Nodes, mesh.Node{Name: "mass", Line: -1, Mass: 30, Start: -300 / 4e4})
	hung.Links = []mesh.Link{{A: 1, B: 3, Spring: 4e4, Dashpot: 200}}
	hung.Pushes = []mesh.Push{{At: atNode(3), Force: program(formula.Const(-300), 0)}}
	light := base()
	light.Rolls = []mesh.Roll{{Line: 0, Speed: 15, Force: -300, Mass: 0.002, Spring: 1e4, Dashpot: 10}}
	bare := base()
	bare.Rolls = []mesh.Roll{{Line: 0, Speed: 15, Force: -300}}
	for _, c := range []struct {
		name      string
		ride, ref *mesh.Mesh
		limit     float64
	}{{"standing still", still, hung, 5e-3}, {"hardly any mass", light, bare, 1e-2}} {
		want := solve(t, c.ref, 2)
		for level := 0; level < 3; level++ {
			var r *solver.Result = solve(t, c.ride, level)
			off := apart(r.Series[0][0], want.Series[0][0])
			t.Logf("%s level %d: apart by %.1e, energy gap %.1e", c.name, level, off, gapOf(r.Energy, r.Energy.Most))
			if level == 2 && (off > c.limit || gapOf(r.Energy, r.Energy.Most) > 1e-2) {
				t.Errorf("%s: apart by %.1e", c.name, off)
			}
		}
	}
}

// A tie's dashpot behind a bracket between two masses, alone and where it goes slack:
// against ordinary integration with the dashpot's own displacement as a third unknown.
func TestTieBracket(t *testing.T) {
	for _, slack := range []bool{false, true} {
		for _, bends := range []float64{0, 5} { // the second on the banded system
			m := oscillator(0.05, nil)
			m.Pieces[0].Bending = bends
			m.Nodes = append(m.Nodes, mesh.Node{Name: "other", Line: -1, Mass: 1})
			m.Links = append(m.Links, mesh.Link{Name: "hold", A: 0, B: 3, Spring: 100},
				mesh.Link{Name: "rope", A: 2, B: 3, Spring: 2000, Dashpot: 40, Through: 3000, Slack: slack})
			watch(m, scenario.Displacement, 0, atNode(3))
			var want [2][]float64
			y := []float64{0.05, 0, 0, 0, 0.05}
			for row := 0; row < 501; row++ {
				want[0], want[1] = append(want[0], y[0]), append(want[1], y[2])
				// A slack rope's bracket is at rest: set so after every short step.
				for i := 0; i < 50; i++ {
					y = runge(y, 4e-5, 2, 1, func(_ float64, y, dst []float64) {
						e := y[0] - y[2]
						bracket := 3000 * (e - y[4])
						f := 2000*e + bracket
						dst[4] = bracket / 40
						if slack && (e <= 0 || f < 0) {
							f = 0
						}
						dst[0], dst[1] = y[1], (-800*y[0]-f)/2
						dst[2], dst[3] = y[3], -100*y[2]+f
					})[1]
					if e := y[0] - y[2]; slack && e <= 0 {
						y[4] = e
					}
				}
			}
			r := solve(t, m, 3)
			a, b := apart(r.Series[0][0], want[0]), apart(r.Series[1][0], want[1])
			t.Logf("slack %v, bending %g: errors %.1e %.1e, energy gap %.1e", slack, bends, a, b, gapOf(r.Energy, r.Energy.Most))
			limit := 1e-9
			if slack {
				limit = 5e-3
			}
			if math.Max(a, b) > limit || gapOf(r.Energy, r.Energy.Most) > 1e-6 {
				t.Errorf("slack %v, bending %g: errors %.1e %.1e", slack, bends, a, b)
			}
		}
	}
}
