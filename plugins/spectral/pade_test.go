package spectral

import (
	"math"
	"math/cmplx"
	"testing"
)

func evalPade(fs []factor, z complex128) complex128 {
	r := complex128(1)
	for _, f := range fs {
		if f.single {
			r *= f.res / (z - f.pole)
		} else {
			r *= complex(f.nu, 0) + f.res/(z-f.pole) + cmplx.Conj(f.res)/(z-cmplx.Conj(f.pole))
		}
	}
	return r
}

// The approximant against exp itself on the imaginary axis up to its reach, and
// bounded by 1 everywhere in the left half-plane (A-stability), tending to 0 at
// -infinity (L-stability).
func TestPadeAgainstExp(t *testing.T) {
	for m := padeMin; m <= padeMax; m += 2 {
		fs := pade(m)
		if len(fs) != (m+1)/2 {
			t.Fatalf("m=%d: %d factors", m, len(fs))
		}
		reach := padeReach(m, padeTol)
		worst := 0.0
		for i := 0; i <= 400; i++ {
			z := complex(0, reach*float64(i)/400)
			worst = math.Max(worst, cmplx.Abs(evalPade(fs, z)-cmplx.Exp(z)))
		}
		// The leading term overestimates; 2 padeTol chosen, at most padeTol seen.
		if worst > 2*padeTol {
			t.Errorf("m=%d reach %.1f: error %.2g", m, reach, worst)
		}
		t.Logf("m=%d reach %.2f worst %.2g", m, reach, worst)
		for _, y := range []float64{0, 1, 10, 100, 1e4, 1e8} {
			if a := cmplx.Abs(evalPade(fs, complex(0, y))); a > 1+1e-12 {
				t.Errorf("m=%d: |r(i %g)| = 1 + %g", m, y, a-1)
			}
		}
		if a := cmplx.Abs(evalPade(fs, -1e12)); a > 1e-8 {
			t.Errorf("m=%d: r(-1e12) = %g", m, a)
		}
	}
}
