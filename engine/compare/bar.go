package compare

import "math"

// Bar is the error bar of one observable of one solver.
type Bar struct {
	Order         float64 // observed, limited to 0.5 .. theory; NaN where differences vanish or the solver has no order
	Bound         float64 // half-width, in the observable's unit
	NotConverging bool    // differences fall more slowly than order 0.5
}

// Safety factors of Roache for three grids: 1.25 where the observed order is
// that of theory, 3 where it is not.
const (
	safetySure   = 1.25
	safetyUnsure = 3
	orderNear    = 0.6 // how near the observed order must be to theory; chosen with the false-alarm study
	orderLeast   = 0.5
)

// NewBar gives the error bar of a value at the finest of three levels from the
// size of the change coarse to middle (e1) and middle to fine (e2), with step
// ratio r between levels:
//
//	p = log(e1/e2)/log(r)
//	F = 1.25 if |p - theory| < 0.6, else 3
//	U = F e2/(r^p - 1)                 for 0.5 <= p <= theory
//	U = F e1 r^-theory/(r^theory - 1)  for p > theory
//	U = 3 max(e1, e2)                  for p < 0.5: not converging
//
// Changes that fall faster than theory are not believed: the last one is then
// taken as theory lets it follow from the one before. Where a kink falls
// between cells its place in its cell, and with it the error, differs from level
// to level, and one change is now and then small by chance.
//
// A solver whose theory order is 0 converges faster than any order, where
// extrapolation has no meaning: U = e2 if e2 < e1/2, else 3 e2.
//
// Units: those of e1 and e2. Valid for r > 1; e1, e2 >= 0.
// Source: Roache, J. Fluids Eng. 116 (1994) 405-413, for F and the formula; the
// limits on p and the rule for order 0 are common practice, checked by the
// coverage test of this package.
func NewBar(e1, e2, ratio, theory float64) Bar {
	if theory == 0 {
		b := Bar{Order: math.NaN(), Bound: 3 * e2}
		if e2 < e1/2 {
			b.Bound = e2
		}
		b.NotConverging = e2 > e1
		return b
	}
	if e1 == 0 && e2 == 0 {
		return Bar{Order: math.NaN()}
	}
	p := math.Log(e1/e2) / math.Log(ratio)
	if !(p >= orderLeast) { // also where e1 is 0
		return Bar{Order: orderLeast, Bound: 3 * math.Max(e1, e2), NotConverging: true}
	}
	factor := float64(safetyUnsure)
	if math.Abs(p-theory) < orderNear {
		factor = safetySure
	}
	if theory = math.Max(theory, orderLeast); p > theory {
		p, e2 = theory, e1*math.Pow(ratio, -theory)
	}
	return Bar{Order: p, Bound: factor * e2 / (math.Pow(ratio, p) - 1)}
}

// refinements is the number of further levels after which a bar is likely to be
// within target, from its order; at least 1.
func (b Bar) refinements(target, ratio, theory float64) int {
	order := b.Order
	if math.IsNaN(order) {
		order = math.Max(theory, 2)
	}
	if !(b.Bound > target) || target <= 0 {
		return 1
	}
	n := math.Ceil(math.Log(b.Bound/target)/(order*math.Log(ratio)) - 0.1)
	return int(math.Min(math.Max(n, 1), 8))
}
