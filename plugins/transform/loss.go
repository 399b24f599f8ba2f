package transform

import (
	"math"
	"math/cmplx"

	"github.com/tautspan/tautspan/engine/mesh"
)

// lossy is the factor by which a stiffness with the loss factor eta stands at s,
//
//	1 + (2 eta/pi) ln((s + e)/w0),
//
// which at s = i w is 1 + (2 eta/pi) ln(w/w0) + i eta: the loss is eta at every
// frequency, and the stiffness is the one stated at w0 and grows slowly, as it
// must for no effect to come before its cause. A plain 1 + i eta in time would
// answer before it is struck. e keeps the factor above a half down to s = 0.
// Source: Biot, J. Appl. Phys. 1958 (linear thermodynamics of solids, the
// logarithmic spectrum), from memory.
func lossy(s complex128, eta, w0 float64) complex128 {
	if eta == 0 {
		return 1
	}
	e := complex(w0*math.Exp(-math.Pi/(4*eta)), 0)
	return 1 + complex(2*eta/math.Pi, 0)*cmplx.Log((s+e)/complex(w0, 0))
}

// references are the frequencies w0: of a line that of its first vibration as a
// string, of a spring at a node likewise, of a hung mass its own on its spring.
type references struct {
	line []float64
	link []float64
}

func newReferences(m *mesh.Mesh) references {
	r := references{line: make([]float64, len(m.Lines)), link: make([]float64, len(m.Links))}
	for i := range m.Lines {
		sum := 0.0
		for _, p := range m.Lines[i].Pieces {
			sum += travel(&m.Pieces[p])
		}
		r.line[i] = math.Pi / sum
	}
	for i, l := range m.Links {
		a, b := &m.Nodes[l.A], &m.Nodes[l.B]
		switch {
		case b.Line < 0 && b.Mass > 0:
			r.link[i] = math.Sqrt(l.Spring / b.Mass)
		case a.Line < 0 && a.Mass > 0:
			r.link[i] = math.Sqrt(l.Spring / a.Mass)
		case a.Line >= 0:
			r.link[i] = r.line[a.Line]
		default:
			r.link[i] = r.line[0]
		}
	}
	return r
}
