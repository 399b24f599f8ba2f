package transform

import (
	"math"
	"math/cmplx"
)

// cells are functions on an element as cubics over common cells.
type cells struct {
	at   []float64      // edges, m from the element's start
	poly [][][4]float64 // by cell and function: coefficients of xi^0 .. xi^3
}

// cubic turns values at 0, 1/3, 2/3, 1 into coefficients of xi^0 .. xi^3.
func cubic(f [4]float64) [4]float64 {
	return [4]float64{
		f[0],
		-5.5*f[0] + 9*f[1] - 4.5*f[2] + f[3],
		9*f[0] - 22.5*f[1] + 18*f[2] - 4.5*f[3],
		-4.5*f[0] + 13.5*f[1] - 13.5*f[2] + 4.5*f[3],
	}
}

func cubicAt(f [4]float64, xi float64) float64 {
	c := cubic(f)
	return c[0] + xi*(c[1]+xi*(c[2]+xi*c[3]))
}

// What functions are resolved to: cells are halved until cubics meet them to a
// share of their size, down to a share of the element (a kink that falls within
// a cell).
const (
	cellGood  = 1e-9
	cellDepth = 18
	cellsMost = 4096
)

// newCells resolves functions of place; nil ones are 0. first is how many cells
// there are at least.
func newCells(length float64, first int, fs ...func(float64) float64) *cells {
	most := make([]float64, len(fs))
	for k, f := range fs {
		for i := range 101 {
			most[k] = math.Max(most[k], math.Abs(valueOf(f, length*float64(i)/100)))
		}
	}
	c := &cells{at: []float64{0}}
	var split func(a, b float64, depth int)
	split = func(a, b float64, depth int) {
		poly := make([][4]float64, len(fs))
		good := true
		for k, fn := range fs {
			var f [4]float64
			for i := range f {
				f[i] = valueOf(fn, a+(b-a)*float64(i)/3)
			}
			for _, xi := range []float64{1.0 / 6, 0.5, 5.0 / 6} {
				good = good && math.Abs(valueOf(fn, a+(b-a)*xi)-cubicAt(f, xi)) <= cellGood*most[k]
			}
			poly[k] = cubic(f)
		}
		if !good && depth < cellDepth && len(c.poly) < cellsMost {
			split(a, (a+b)/2, depth+1)
			split((a+b)/2, b, depth+1)
			return
		}
		c.at, c.poly = append(c.at, b), append(c.poly, poly)
	}
	for i := range first {
		split(length*float64(i)/float64(first), length*float64(i+1)/float64(first), 0)
	}
	return c
}

// sum writes the cubics of a combination of the functions into room.
func (c *cells) sum(weights []complex128, room [][4]complex128) [][4]complex128 {
	room = room[:0]
	for _, cell := range c.poly {
		var f [4]complex128
		for j, p := range cell {
			for k := range f {
				f[k] += weights[j] * complex(p[k], 0)
			}
		}
		room = append(room, f)
	}
	return room
}

// moments are, over a cell of length h and for one exponent r,
//
//	left[k]  = integral of e^{-r(h-y)} (y/h)^k dy
//	right[k] = integral of e^{-r y} (y/h)^k dy,   e = e^{-rh}.
type moments struct {
	left, right [4]complex128
	e           complex128
}

func newMoments(r complex128, h float64) moments {
	z := r * complex(h, 0)
	var m moments
	m.e = cmplx.Exp(-z)
	ch := complex(h, 0)
	if cmplx.Abs(z) < 2 {
		// Series: left k! sum (-z)^n/(n+k+1)!, right sum (-z)^n/(n! (n+k+1)).
		for k := range 4 {
			term, fact := complex(1, 0), complex(1, 0)
			l, lead := complex128(0), complex(1, 0)
			for j := 1; j <= k+1; j++ {
				if j > 1 {
					lead /= complex(float64(j), 0)
				}
			}
			for j := 2; j <= k; j++ {
				fact *= complex(float64(j), 0)
			}
			lead *= fact
			r := complex128(0)
			ln := lead
			for n := range 30 {
				if n > 0 {
					term *= -z / complex(float64(n), 0)
					ln *= -z / complex(float64(n+k+1), 0)
				}
				l += ln
				r += term / complex(float64(n+k+1), 0)
				if abs1(term) < 1e-17 {
					break
				}
			}
			m.left[k], m.right[k] = ch*l, ch*r
		}
		return m
	}
	m.left[0] = ch * (1 - m.e) / z
	m.right[0] = m.left[0]
	for k := 1; k < 4; k++ {
		m.left[k] = ch/z - complex(float64(k), 0)/z*m.left[k-1]
		m.right[k] = -ch*m.e/z + complex(float64(k), 0)/z*m.right[k-1]
	}
	return m
}

func (m *moments) sums(p *[4]complex128) (left, right complex128) {
	left = p[0]*m.left[0] + p[1]*m.left[1] + p[2]*m.left[2] + p[3]*m.left[3]
	right = p[0]*m.right[0] + p[1]*m.right[1] + p[2]*m.right[2] + p[3]*m.right[3]
	return left, right
}
