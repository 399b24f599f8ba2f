package mesh

import (
	"math"

	"github.com/tautspan/tautspan/engine/formula"
	"github.com/tautspan/tautspan/engine/scenario"
)

// linearLaw tells whether a written law is F = -K u - C v with K and C not
// negative, and nothing else: no states, no time, no place. It then stands for a
// spring and a dashpot, exactly, in every solver. Its values are looked at over
// ten decades of u and v; a law that is linear to 1e-13 there is linear. Only laws
// without K are taken so: a spring would belong into the static shapes too.
func linearLaw(w *scenario.WrittenOf[float64]) (k, c float64, ok bool) {
	f := w.Force
	if len(w.Starts) > 0 || f.UsesArg(formula.ArgT) || f.UsesArg(formula.ArgX) {
		return 0, 0, false
	}
	at := func(u, v float64) float64 { return f.Eval(nil, []float64{0, 0, u, v}) }
	k, c = -at(1, 0), -at(0, 1)
	if at(0, 0) != 0 || !(k >= 0) || !(c >= 0) || math.IsInf(k, 0) || math.IsInf(c, 0) {
		return 0, 0, false
	}
	for i := -5; i <= 4; i++ {
		size := math.Pow(10, float64(i))
		for _, turn := range []float64{0.3, 1.1, 1.9, 2.7, 3.5, 4.3, 5.1, 5.9} {
			sin, cos := math.Sincos(turn)
			u, v := size*cos, size*sin
			if math.Abs(at(u, v)+k*u+c*v) > 1e-13*(math.Abs(k*u)+math.Abs(c*v)) {
				return 0, 0, false
			}
		}
	}
	return k, c, true
}
