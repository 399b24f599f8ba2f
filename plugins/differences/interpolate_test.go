package differences

import (
	"math"
	"testing"
)

// Interpolation and its derivatives are exact for polynomials of degree
// points-1, at places inside and at the ends.
func TestLagrangeIsExactForPolynomials(t *testing.T) {
	for points := 2; points <= maxPoints; points++ {
		for degree := 0; degree < points; degree++ {
			for _, x := range []float64{0, 0.3, 1, 1.77, float64(points - 1)} {
				for deriv := 0; deriv <= 2; deriv++ {
					var w [maxPoints]float64
					lagrange(&w, points, x, deriv)
					got := 0.0
					for k := 0; k < points; k++ {
						got += w[k] * math.Pow(float64(k), float64(degree))
					}
					want := math.Pow(x, float64(degree))
					for i := 0; i < deriv; i++ {
						want = 0
						if degree > i {
							want = math.Pow(x, float64(degree-deriv))
							for q := 0; q < deriv; q++ {
								want *= float64(degree - q)
							}
						}
					}
					if deriv > degree {
						want = 0
					}
					// Rounding: sums of up to 6 terms of size 5^5 times weights of 10.
					if math.Abs(got-want) > 1e-10 {
						t.Errorf("%d points, x^%d at %g, derivative %d: %g, want %g", points, degree, x, deriv, got, want)
					}
				}
			}
		}
	}
}
