package spectral

import "math"

// beam is the basis of a C1 element of degree p >= 4 on [-1, 1]: a function for the
// value at each end, one for the slope at each, and bubbles
//
//	phi_n = sqrt((2n+1)/2) [(P_(n+2)-P_n)/(2n+3) - (P_n-P_(n-2))/(2n-1)]/(2n+1),  n = 2 .. p-2,
//
// whose second derivative is a multiple of P_n. In order: value at -1, bubbles, slope
// at -1, slope at +1, value at +1. Slopes are with respect to the coordinate on
// [-1, 1]. Source: Shen 1994, SIAM J. Sci. Comput. 15 (from memory).
type beam struct {
	p      int
	gx, gw []float64    // p+2 Gauss points and weights
	at     [3][]float64 // value, first and second derivative of function i at point g: [g*(p+1)+i]
}

func newBeam(p int) *beam {
	b := &beam{p: p}
	b.gx, b.gw = gauss(p + 2)
	for d := range b.at {
		b.at[d] = make([]float64, (p+2)*(p+1))
		for g, x := range b.gx {
			b.values(b.at[d][g*(p+1):(g+1)*(p+1)], x, d)
		}
	}
	return b
}

// values writes the derivative of order d, 0 to 3, of all functions at x into dst.
func (b *beam) values(dst []float64, x float64, d int) {
	p := b.p
	leg := make([]float64, p+3) // P_n, and for d = 3 its derivative
	leg[0], leg[1] = 1, x
	for n := 2; n < len(leg); n++ {
		leg[n] = ((2*float64(n)-1)*x*leg[n-1] - (float64(n)-1)*leg[n-2]) / float64(n)
	}
	var rise []float64
	if d == 3 {
		rise = make([]float64, p+3)
		rise[1] = 1
		for n := 2; n < len(rise); n++ {
			rise[n] = rise[n-2] + (2*float64(n)-1)*leg[n-1]
		}
	}
	for n := 2; n <= p-2; n++ {
		f := float64(n)
		v := 0.0
		switch d {
		case 0:
			v = ((leg[n+2]-leg[n])/(2*f+3) - (leg[n]-leg[n-2])/(2*f-1)) / (2*f + 1)
		case 1:
			v = (leg[n+1] - leg[n-1]) / (2*f + 1)
		case 2:
			v = leg[n]
		case 3:
			v = rise[n]
		}
		dst[n-1] = math.Sqrt((2*f+1)/2) * v
	}
	var u, s [2]float64 // value and slope functions at -1, +1
	switch d {
	case 0:
		u = [2]float64{(2 - 3*x + x*x*x) / 4, (2 + 3*x - x*x*x) / 4}
		s = [2]float64{(1 - x - x*x + x*x*x) / 4, (-1 - x + x*x + x*x*x) / 4}
	case 1:
		u = [2]float64{(-3 + 3*x*x) / 4, (3 - 3*x*x) / 4}
		s = [2]float64{(-1 - 2*x + 3*x*x) / 4, (-1 + 2*x + 3*x*x) / 4}
	case 2:
		u = [2]float64{6 * x / 4, -6 * x / 4}
		s = [2]float64{(-2 + 6*x) / 4, (2 + 6*x) / 4}
	case 3:
		u = [2]float64{6.0 / 4, -6.0 / 4}
		s = [2]float64{6.0 / 4, 6.0 / 4}
	}
	dst[0], dst[p], dst[p-2], dst[p-1] = u[0], u[1], s[0], s[1]
}
