package scatter

import (
	"fmt"
	"math"
	"math/cmplx"

	"github.com/tautspan/tautspan/engine/mesh"
	"github.com/tautspan/tautspan/engine/modal"
)

// JointAtAmplitude is JointAt where the joint answers differently to large and
// small motion: friction, stops and written laws stand there with the stiffness
// that their first harmonic has at the amplitude of the joint, m, which follows
// from that of the incoming wave. Harmonics beyond the first are left out.
//
// What answers so elsewhere on the line does not matter: the joint stands alone.
//
// It fails where a law pushes the line to one side, hangs on time or on states of
// its own, and where several steady motions belong to one amplitude.
//
// Source: the describing function; Nayfeh, Mook, Nonlinear Oscillations (1979),
// harmonic balance (from memory).
func JointAtAmplitude(m *mesh.Mesh, node int, frequency, amplitude float64, fromAfter bool) (Shares, error) {
	if m.Features()&mesh.BenchDamper != 0 {
		if err := modal.Measured(m, 2*math.Pi*frequency); err != nil {
			return Shares{}, err
		}
	}
	s := newSite(m)
	for line := range m.Lines {
		nodes, pieces := s.nodes(line), m.Lines[line].Pieces
		for k := 1; k+1 < len(nodes); k++ {
			if nodes[k] != node {
				continue
			}
			before, after := &m.Pieces[pieces[k-1]], &m.Pieces[pieces[k]]
			d1, d2 := mediumAt(before, before.Length), mediumAt(after, 0)
			c := &chain{nodes: []fitting{s.fitting(node)}, before: &d1, after: &d2}
			return c.balanced(m.Nodes[node].Laws, 2*math.Pi*frequency, amplitude, !fromAfter)
		}
	}
	return Shares{}, fmt.Errorf("%s is no joint: shares need a line on both sides", s.name(node))
}

// Looks at the amplitude of a joint, from a millionth of the incoming one to ten
// times it, in equal steps of its logarithm. Chosen.
const (
	amplitudeLooks = 600
	leastAmplitude = 1e-6
	mostAmplitude  = 10.0
)

// balanced finds the amplitude at which the joint moves as the laws at that
// amplitude let it, and gives its shares.
func (c *chain) balanced(laws []mesh.Law, omega, amplitude float64, fromBefore bool) (Shares, error) {
	if len(laws) == 0 {
		return c.shares(omega, fromBefore), nil
	}
	off := func(u float64) (float64, error) { // how much more the joint would move than u
		n, err := stiffnessAt(laws, omega, u)
		if err != nil {
			return 0, err
		}
		c.nodes[0].law = n
		e, ok := c.solve(omega, fromBefore)
		if !ok {
			return 0, fmt.Errorf("no wave of this frequency travels there")
		}
		return cmplx.Abs(e.moved)*amplitude - u, nil
	}
	last, before := 0.0, 0.0
	var found []float64
	for k := 0; k <= amplitudeLooks; k++ {
		u := amplitude * leastAmplitude * math.Pow(mostAmplitude/leastAmplitude, float64(k)/amplitudeLooks)
		v, err := off(u)
		if err != nil {
			return Shares{}, err
		}
		if k > 0 && before > 0 != (v > 0) {
			low, high := last, u
			for range 200 {
				mid := (low + high) / 2
				w, err := off(mid)
				if err != nil {
					return Shares{}, err
				}
				if w > 0 == (before > 0) {
					low = mid
				} else {
					high = mid
				}
			}
			found = append(found, (low+high)/2)
		}
		last, before = u, v
	}
	switch len(found) {
	case 0: // it moves by less than the least looked at: friction holds it
		c.nodes[0].law, c.nodes[0].held = 0, true
		return c.shares(omega, fromBefore), nil
	case 1:
		if _, err := off(found[0]); err != nil {
			return Shares{}, err
		}
		return c.shares(omega, fromBefore), nil
	}
	return Shares{}, fmt.Errorf("several steady motions belong to this amplitude: the joint moves by %.4g m or by %.4g m", found[0], found[len(found)-1])
}

// stiffnessAt is the sum of what the laws do at an amplitude, as a stiffness:
// their force on the line is minus this times the displacement.
func stiffnessAt(laws []mesh.Law, omega, u float64) (complex128, error) {
	sum := complex128(0)
	for i := range laws {
		l := &laws[i]
		switch {
		case l.Friction != nil:
			sum += frictionAt(l.Friction, u)
		case l.Stop != nil:
			if !l.Stop.Up || !l.Stop.Down {
				return 0, fmt.Errorf("a stop on one side (%s) pushes the line aside, so that no wave goes to and fro about where it was", l.Name)
			}
			sum += stopAt(l.Stop, u)
		default:
			n, err := writtenAt(l, omega, u)
			if err != nil {
				return 0, err
			}
			sum += n
		}
	}
	return sum, nil
}

// frictionAt is the first harmonic of dry friction F: a loss of 4 F u a cycle, so
// i 4F/(pi u). Behind a bracket K that yields at x = F/K: K as long as u stays
// below, then with cos a = 1 - 2x/u
//
//	K/pi (a - sin 2a / 2) + i 4F/(pi u) (1 - x/u).
//
// Source: Jenkins (1962) element, first harmonic (from memory; the loss a cycle is
// 4 F (u - x)).
func frictionAt(f *mesh.Friction, u float64) complex128 {
	if f.Through <= 0 {
		return complex(0, 4*f.Force/(math.Pi*u))
	}
	x := f.Force / f.Through
	if u <= x {
		return complex(f.Through, 0)
	}
	a := math.Acos(1 - 2*x/u)
	return complex(f.Through/math.Pi*(a-math.Sin(2*a)/2), 4*f.Force/(math.Pi*u)*(1-x/u))
}

// stopAt is the first harmonic of a spring behind a gap g on both sides:
// K (1 - 2/pi (asin(g/u) + g/u sqrt(1 - (g/u)^2))), 0 within the gap.
func stopAt(s *mesh.Stop, u float64) complex128 {
	if u <= s.Gap {
		return 0
	}
	r := s.Gap / u
	return complex(s.Spring*(1-2/math.Pi*(math.Asin(r)+r*math.Sqrt(1-r*r))), 0)
}

// harmonicLooks is the number of looks at a law over one cycle; chosen.
const harmonicLooks = 512

// writtenAt is the first harmonic of a law in formulas of displacement and velocity.
func writtenAt(l *mesh.Law, omega, u float64) (complex128, error) {
	if l.Written.Start != nil || !l.Open() || len(l.Written.Rates) > 0 || l.Written.Force.UsesArg(0) {
		return 0, fmt.Errorf("the law %s hangs on time or on states of its own, of which the first harmonic is not known here", l.Name)
	}
	mean, largest, first := 0.0, 0.0, complex128(0)
	for k := range harmonicLooks {
		phase := 2 * math.Pi * (float64(k) + 0.5) / harmonicLooks
		args := make([]float64, mesh.ArgState)
		args[mesh.ArgU], args[mesh.ArgV] = u*math.Cos(phase), -omega*u*math.Sin(phase)
		f := l.Written.Force.Eval(nil, args)
		mean += f / harmonicLooks
		largest = math.Max(largest, math.Abs(f))
		first += complex(f*2/harmonicLooks, 0) * cmplx.Exp(complex(0, -phase))
	}
	if math.Abs(mean) > 1e-6*largest {
		return 0, fmt.Errorf("the law %s pushes the line aside, so that no wave goes to and fro about where it was", l.Name)
	}
	return -first / complex(u, 0), nil
}
