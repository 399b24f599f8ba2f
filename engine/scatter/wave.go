package scatter

import (
	"math"
	"math/cmplx"

	"github.com/tautspan/tautspan/engine/mesh"
)

// medium is what a stretch of line is made of at one place.
type medium struct {
	t, m, ei float64 // N, kg/m, N m^2
	c, tau   float64 // N s/m^2, s; viscous and internal loss
	etaT     float64 // loss factor of the tension
	etaB     float64 // loss factor of the bending
}

// mediumAt is the medium of a piece at the distance s from its start.
func mediumAt(p *mesh.Piece, s float64) medium {
	return medium{t: p.Tension + p.TensionRise*s, m: p.MassPerLength, ei: p.Bending, c: p.Viscous, tau: p.Internal, etaT: p.TensionLoss, etaB: p.BendingLoss}
}

// lossless is the same medium without its losses.
func (d medium) lossless() medium {
	d.c, d.tau, d.etaT, d.etaB = 0, 0, 0, 0
	return d
}

// pull is the tension with its loss, N.
func (d medium) pull() complex128 { return complex(d.t, d.t*d.etaT) }

func (d medium) beam() bool { return d.ei > 0 }

// carries tells whether a wave of angular frequency omega > 0 can travel.
func (d medium) carries(omega float64) bool {
	return omega > 0 && d.m > 0 && (d.t > 0 || d.t == 0 && d.ei > 0)
}

// roots gives the exponents of the waves e^{-rx} that go on or die away towards
// +x: the travelling one first, then, with bending, the one that dies away near
// its source. They solve
//
//	E r^4 - T r^2 + b = 0,   E = EI (1 + i (omega tau + eta)),   b = -m omega^2 + i omega c,
//
// with Re r >= 0. The travelling root is found from the other by the product of
// the two squares, never as a difference, so that EI -> 0 costs no digits.
//
// Units: omega in rad/s; r in 1/m. Valid for omega > 0.
// Source: the equation of motion m u” + c u' = T u_xx - EI u_xxxx; Graff, Wave
// Motion in Elastic Solids (1975), on the tensioned beam (from memory).
func (d medium) roots(omega float64) []complex128 {
	b := complex(-d.m*omega*omega, omega*d.c)
	t := d.pull()
	if !d.beam() {
		return []complex128{travelling(b / t)}
	}
	e := d.stiffness(omega)
	sum := t + cmplx.Sqrt(t*t-4*e*b) // 2 E r1^2
	return []complex128{travelling(2 * b / sum), cmplx.Sqrt(sum / (2 * e))}
}

// travelling is the root of a square with Re >= 0 and, of a wave without loss,
// Im > 0 whatever the sign of the zero in the square.
func travelling(square complex128) complex128 {
	if imag(square) == 0 && real(square) < 0 {
		return complex(0, math.Sqrt(-real(square)))
	}
	return cmplx.Sqrt(square)
}

// stiffness is E of roots, N m^2.
func (d medium) stiffness(omega float64) complex128 {
	return complex(d.ei, d.ei*(omega*d.tau+d.etaB))
}

// flux is the mean energy flux of the wave e^{-ikx} with amplitude 1 m, over
// omega/2: k (T + 2 EI k^2), N/m. The force and the moment carry an equal share
// of what bending adds.
func (d medium) flux(omega float64) float64 {
	k := math.Abs(imag(d.lossless().roots(omega)[0]))
	return k * (d.t + 2*d.ei*k*k)
}

// push is the force and the moment that have to act on the start of a stretch of
// line for it to hold the wave e^{lx}: E l^3 - T l and -E l^2. At the end of a
// stretch they have the opposite sign.
func (d medium) push(l complex128, omega float64) (force, moment complex128) {
	e := d.stiffness(omega)
	return e*l*l*l - d.pull()*l, -e * l * l
}
