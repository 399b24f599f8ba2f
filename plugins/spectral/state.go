package spectral

// loadDegree is the degree in time of the loads within one substep.
const loadDegree = 4

// load is what acts during one substep: the j-th derivative with respect to
// tau = t/h at the substep's start, j = 0 .. loadDegree, in the operator's
// coordinates, followed by the watched nodes' own shares (N).
type load struct {
	active bool
	lo     int // coordinates below lo carry no load
	at     [loadDegree + 1][]float64
}

// state is the motion in the operator's coordinates. z and y hold the integral
// of x over the base step so far, and the integral of z.
type state struct {
	x, v, r []float64 // r: displacement between spring and dashpot of each bracket, m
	z, y    []float64 // nil unless means of x are asked for
}

func newState(n, brackets int, means bool) *state {
	s := &state{x: make([]float64, n), v: make([]float64, n), r: make([]float64, brackets)}
	if means {
		s.z, s.y = make([]float64, n), make([]float64, n)
	}
	return s
}

// operator is the semi-discrete network M x” + C x' + K x = f, with its
// propagator.
type operator interface {
	// size is the number of coordinates.
	size() int
	// step advances a state by h under a load, exactly but for the load's polynomial.
	step(st *state, h float64, ld *load)
	// accel writes M^-1 (f - C v - K x - pull of the brackets); f may be nil.
	accel(dst, x, v, r, f []float64)
	// lossForce writes C v.
	lossForce(dst, v []float64)
	// stored is the energy (v'Mv + x'Kx)/2 with the brackets' springs, J.
	stored(x, v, r []float64) float64
	// row turns a functional on the arrow coordinates into one on the operator's,
	// and so a load vector.
	row(arrow []float64) []float64
	// enter turns arrow coordinates of a motion into the operator's.
	enter(arrow []float64) []float64
}
