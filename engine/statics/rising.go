package statics

// terms are the solutions of a beam's equation that begin with one unit of a
// derivative of order 1, 2 or 3 and nothing else, and the one under a unit load
// per length that begins with nothing; each with its derivatives up to the third.
type terms [4][4]float64

// termsAt sums the power series u = sum of a_n s^n, whose coefficients follow from
//
//	EI (n+4)(n+3)(n+2)(n+1) a_(n+4) = T0 (n+2)(n+1) a_(n+2) + rise (n+1)^2 a_(n+1) + w [n = 0].
//
// Validity: k s up to a few; the terms are all positive where tension rises from
// the start, and lose a digit or two where it falls.
func (e *element) termsAt(s float64) (out terms) {
	for i := range out {
		var a [4]float64 // a_n s^n of the last four n, oldest first
		if i < 3 {
			a[i+1] = [3]float64{s, s * s / 2, s * s * s / 6}[i]
		}
		add := func(n int, v float64) {
			for d := range 4 {
				out[i][d] += v
				v *= float64(n-d) / s
			}
		}
		for n, v := range a {
			add(n, v)
		}
		small := 0
		for n := 0; n < 200 && small < 4; n++ {
			m := float64(n)
			next := (e.tension*(m+2)*(m+1)*a[2]*s*s + e.rise*(m+1)*(m+1)*a[1]*s*s*s) / e.bending
			if n == 0 && i == 3 {
				next += s * s * s * s / e.bending
			}
			next /= (m + 4) * (m + 3) * (m + 2) * (m + 1)
			add(n+4, next)
			small++
			if next*next*m*m*m*m*m*m > 1e-36*out[i][0]*out[i][0] {
				small = 0
			}
			a = [4]float64{a[1], a[2], a[3], next}
		}
	}
	return out
}

// full are the terms at the element's end, worked out once for one whose tension
// rises.
func (e *element) full() *terms {
	if e.whole == nil {
		t := e.termsAt(e.length)
		return &t
	}
	return e.whole
}

// initial are the second and third derivative at an element's start.
type initial struct{ second, third float64 }

// initial finds what the values at both ends ask of the start.
func (e *element) initial(v ends) initial {
	t := e.full()
	u := v.u1 - v.u0 - v.t0*t[0][0] - v.w*t[3][0]
	slope := v.t1 - v.t0*t[0][1] - v.w*t[3][1]
	det := t[1][0]*t[2][1] - t[1][1]*t[2][0]
	return initial{(u*t[2][1] - slope*t[2][0]) / det, (t[1][0]*slope - t[1][1]*u) / det}
}

// inSeries is the shape at s.
func (e *element) inSeries(v ends, s float64) float64 {
	if s == 0 {
		return v.u0
	}
	i, t := e.initial(v), e.termsAt(s)
	return v.u0 + v.t0*t[0][0] + i.second*t[1][0] + i.third*t[2][0] + v.w*t[3][0]
}

// farEnd is the force and the moment that act on the end of an element.
func (e *element) farEnd(v ends, i initial) (force, moment float64) {
	t := e.full()
	d := func(order int) float64 {
		return v.t0*t[0][order] + i.second*t[1][order] + i.third*t[2][order] + v.w*t[3][order]
	}
	return (e.tension+e.rise*e.length)*d(1) - e.bending*d(3), e.bending * d(2)
}

// risingStiffness is the stiffness of a beam whose tension rises along it: the
// forces and moments at its start, EI u”' - T u' and -EI u”, and the moment at
// its end for a unit of each.
func (e *element) risingStiffness() stiffness {
	moved := e.initial(ends{u1: -1})
	v0, v1 := ends{t0: 1}, ends{t1: 1}
	turned, far := e.initial(v0), e.initial(v1)
	_, m1 := e.farEnd(v1, far)
	return stiffness{
		uu: e.bending * moved.third, tf: -e.bending * far.second,
		ut: [2]float64{-e.bending * moved.second, e.bending * far.third},
		tt: [2]float64{-e.bending * turned.second, m1},
	}
}
