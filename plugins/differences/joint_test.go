package differences

import (
	"math"
	"testing"

	"github.com/tautspan/tautspan/engine/mesh"
	"github.com/tautspan/tautspan/engine/scenario"
	"github.com/tautspan/tautspan/engine/solver"
)

// bell is a pulse that runs along a line from the left, and its derivative.
type bell struct{ at, width, high, c float64 }

func (b bell) shape(x float64) float64 {
	z := (x - b.at) / b.width
	return b.high * math.Exp(-z*z)
}

func (b bell) slope(x float64) float64 { return -2 * (x - b.at) / (b.width * b.width) * b.shape(x) }

// joint is everything that a node can carry at once.
type joint struct {
	mass, spring, dashpot    float64
	bracket, behind          float64 // N/m, N s/m
	hung, hungSpring, hungCs float64 // kg, N/m, N s/m
}

// scatter is the motion of a joint between two half lines that a bell reaches,
// integrated from the balance of the joint alone,
//
//	M u" + (C + Z1 + Z2) u' + K u = 2 Z1 a'(t) + bracket + hung mass,
//
// a the displacement of the incoming wave at the joint, by the classical
// Runge-Kutta method in steps so short that its error is below 1e-10. The line
// enters by its two impedances only. It returns u at the steps.
func scatter(j joint, z1, z2, place float64, b bell, dt float64, steps int) (u, v, vd, q []float64) {
	rate := func(t float64, s [5]float64) [5]float64 {
		a := b.slope(place-b.c*t) * -b.c
		f := 2*z1*a - (j.dashpot+z1+z2)*s[1] - j.spring*s[0] - j.bracket*(s[0]-s[4])
		hang := j.hungSpring*(s[2]-s[0]) + j.hungCs*(s[3]-s[1])
		f += hang
		out := [5]float64{s[1], f / j.mass, s[3], 0, 0}
		if j.hung > 0 {
			out[3] = -hang / j.hung
		}
		if j.behind > 0 {
			out[4] = j.bracket * (s[0] - s[4]) / j.behind
		}
		return out
	}
	var s [5]float64
	add := func(k [5]float64, h float64) [5]float64 {
		r := s
		for i := range r {
			r[i] += h * k[i]
		}
		return r
	}
	for n := 0; n <= steps; n++ {
		t := float64(n) * dt
		u, v, vd, q = append(u, s[0]), append(v, s[1]), append(vd, s[3]), append(q, s[4])
		k1 := rate(t, s)
		k2 := rate(t+dt/2, add(k1, dt/2))
		k3 := rate(t+dt/2, add(k2, dt/2))
		k4 := rate(t+dt, add(k3, dt))
		for i := range s {
			s[i] += dt / 6 * (k1[i] + 2*k2[i] + 2*k3[i] + k4[i])
		}
	}
	return u, v, vd, q
}

// scatterMesh is the joint between two lines with absorbing ends; the bell
// starts on the first. Node 1 is the joint, the last node the hung mass.
func scatterMesh(j joint, b bell, rows int, every float64) *mesh.Mesh {
	m := line(every, rows, stretch1{20, 2, 2 * b.c * b.c, 0}, stretch1{20, 3.5, 2 * b.c * b.c, 0})
	for _, end := range []int{0, 2} {
		n := &m.Nodes[end]
		n.Fixed, n.Absorbing = false, true
		n.Dashpot = m.Pieces[end/2].Impedance()
	}
	n := &m.Nodes[1]
	n.Fitting = true
	n.Mass, n.Spring, n.Dashpot = j.mass, j.spring, j.dashpot
	if j.bracket > 0 {
		n.Brackets = []mesh.Maxwell{{K: j.bracket, C: j.behind}}
	}
	if j.hung > 0 {
		m.Nodes = append(m.Nodes, mesh.Node{Name: "hung", Line: -1, Mass: j.hung})
		m.Links = append(m.Links, mesh.Link{Name: "hanger", A: 1, B: 3, Spring: j.hungSpring, Dashpot: j.hungCs})
	}
	m.Pieces[0].Start = b.shape
	m.Pieces[0].StartRate = func(x float64) float64 { return -b.c * b.slope(x) }
	m.Band = 1 / (2 * math.Pi) * b.c / b.width * 3
	return m
}

var joints1 = map[string]joint{
	"mass":           {mass: 1.5},
	"mass, K, C":     {mass: 1.5, spring: 5e4, dashpot: 150},
	"bracket":        {mass: 0.4, bracket: 4e4, behind: 300},
	"stiff bracket":  {mass: 0.4, bracket: 4e8, behind: 300},
	"hung mass":      {mass: 0.5, hung: 2, hungSpring: 3e4, hungCs: 60},
	"all":            {mass: 1.2, spring: 2e4, dashpot: 90, bracket: 4e4, behind: 300, hung: 2, hungSpring: 3e4, hungCs: 60},
	"stiff hung one": {mass: 0.5, hung: 2, hungSpring: 3e9, hungCs: 0},
}

// What a joint does to a smooth pulse converges with order 2 at the joint, in
// the waves sent on and back, and in the force on the joint.
func TestOrderAtJoints(t *testing.T) {
	const c, every, rows = 100.0, 0.002, 151
	b := bell{at: 12, width: 1.2, high: 0.01, c: c}
	for name, j := range joints1 {
		if name == "stiff hung one" || name == "stiff bracket" {
			continue // no reference that an explicit method could give
		}
		t.Run(name, func(t *testing.T) {
			m := scatterMesh(j, b, rows, every)
			at := watchNode(m, scenario.Displacement, 1, 0)
			rateAt := watchNode(m, scenario.Velocity, 1, 0)
			force := watchNode(m, scenario.Force, 1, 0)
			on := watchAt(m, scenario.Displacement, 1, 3.3, 0)
			back := watchAt(m, scenario.Velocity, 0, 17.77, 0)
			const fine = 64
			dt := every / fine
			z1, z2 := m.Pieces[0].Impedance(), m.Pieces[1].Impedance()
			u, v, _, _ := scatter(j, z1, z2, 20, b, dt, fine*(rows-1))
			read := func(r []float64, time float64) float64 {
				if time < 0 {
					return 0
				}
				k := min(max(int(time/dt)-1, 0), len(r)-4)
				x := time/dt - float64(k)
				return -r[k]*(x-1)*(x-2)*(x-3)/6 + r[k+1]*x*(x-2)*(x-3)/2 - r[k+2]*x*(x-1)*(x-3)/2 + r[k+3]*x*(x-1)*(x-2)/6
			}
			c2 := m.Pieces[1].WaveSpeed()
			in := func(x, time float64) float64 { return -c * b.slope(x-c*time) }
			want := map[int][]float64{
				at:     sample(m, func(s float64) float64 { return read(u, s) }),
				rateAt: sample(m, func(s float64) float64 { return read(v, s) }),
				on:     sample(m, func(s float64) float64 { return read(u, s-3.3/c2) }),
				back: sample(m, func(s float64) float64 {
					late := s - (20-17.77)/c
					return in(17.77, s) + read(v, late) - in(20, late)
				}),
				force: sample(m, func(s float64) float64 { return 2*z1*in(20, s) - (z1+z2)*read(v, s) }),
			}
			for _, order := range []int{2, 4} {
				layout, _ := layoutOf(m, 1, 2)
				if order == 4 {
					fourth, notes := newLayout(m, 1)
					layout = fourth
					if layout.Order != 4 {
						t.Log(notes)
						continue
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
					p := math.Log2(e[1] / e[2])
					t.Logf("order %d channel %d: %.2e order %.2f", order, ch, e, p)
					// 0.2 is the house's margin for an observed order.
					if p < float64(order)-0.2 || e[2] > 5e-3 {
						t.Errorf("order %d channel %d: errors %.2e, order %.2f", order, ch, e, p)
					}
				}
			}
		})
	}
}
