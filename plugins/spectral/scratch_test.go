package spectral

import (
	"math"
	"math/cmplx"
	"testing"
)

func TestScratchPartial(t *testing.T) {
	for _, m := range []int{15, 21, 29} {
		fs := pade(m)
		reach := padeReach(m, 1e-13)
		for _, ord := range []string{"asc", "desc"} {
			worst := 0.0
			low := 1e9
			for i := 0; i <= 200; i++ {
				z := complex(0, reach*float64(i)/200)
				r := complex128(1)
				for k := range fs {
					f := fs[k]
					if ord == "desc" {
						f = fs[len(fs)-1-k]
					}
					if f.single {
						r *= f.res / (z - f.pole)
					} else {
						r *= complex(f.nu, 0) + f.res/(z-f.pole) + cmplx.Conj(f.res)/(z-cmplx.Conj(f.pole))
					}
					worst = math.Max(worst, cmplx.Abs(r))
					low = math.Min(low, cmplx.Abs(r))
				}
			}
			t.Log(m, ord, worst, low)
		}
		for _, f := range fs {
			t.Log(f.pole, f.nu, cmplx.Abs(f.res))
		}
	}
}
