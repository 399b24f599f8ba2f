package differences

// advanceGo is one step of the inner points of a uniform piece,
//
//	prev[i] <- u + d (u - prev[i]) + a ((l + r) - 2 u),   l, u, r = cur[i], cur[i+1], cur[i+2],
//
// the leapfrog scheme with d = (1-g)/(1+g), a = nu^2/(1+g), g = c dt/(2m), where
// nu is the Courant number, c the viscous loss in N s/m^2 and m the mass per
// length.
//
// Shapes: prev has n values, cur n+2: the inner points and one neighbour at each
// side. Valid for nu <= 1. Order 2 in dt and h at fixed nu.
// Products and sums are rounded one by one, so that the result is bit for bit
// that of the assembly; the conversions keep the compiler from fusing them.
func advanceGo(prev, cur []float64, d, a float64) {
	n := len(prev)
	if n == 0 {
		return
	}
	cur = cur[:n+2]
	l, u := cur[0], cur[1]
	right := cur[2:]
	right = right[:n]
	for i, r := range right {
		curve := float64(a * ((l + r) - (u + u)))
		prev[i] = (u + float64(d*(u-prev[i]))) + curve
		l, u = u, r
	}
}

// lanes is the number of partial sums that the lossy kernel keeps.
const lanes = 8

// advanceLossyGo does what advanceGo does and adds the squares of
// u+ - u- to sums, inner point i to sums[i mod 8]. The loss of a step is
// c h/(4 dt) times their total.
func advanceLossyGo(prev, cur []float64, d, a float64, sums *[lanes]float64) {
	n := len(prev)
	if n == 0 {
		return
	}
	cur = cur[:n+2]
	l, u := cur[0], cur[1]
	right := cur[2:]
	right = right[:n]
	for i, r := range right {
		old := prev[i]
		curve := float64(a * ((l + r) - (u + u)))
		next := (u + float64(d*(u-old))) + curve
		prev[i] = next
		step := next - old
		sums[i%lanes] += float64(step * step)
		l, u = u, r
	}
}

// tiny is the magnitude below which a displacement is set to zero now and then:
// numbers below 2.2e-308 take the processor some forty times as long, and a
// front of such numbers runs ahead of every pulse on a quiet line.
const tiny = 1e-250

// flush sets values of magnitude below tiny to zero.
func flush(u []float64) {
	for i, v := range u {
		if v < tiny && v > -tiny {
			u[i] = 0
		}
	}
}
