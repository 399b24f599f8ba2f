// Package spectral solves taut strings with Gauss-Lobatto-Legendre elements in
// space and propagation without a step limit in time.
//
// # Space
//
// Every piece is cut at its kinks, loads and edges, and long stretches into
// equal elements. An element of degree p carries the p+1
// Gauss-Lobatto-Legendre points; quadrature on them gives a diagonal mass and
//
//	K = (2T/h) D' diag(w) D,   M = (m h/2) diag(w),   C = (c h/2) diag(w).
//
// Inside an element the fixed-ended problem is diagonalised once per degree on
// the reference element. In these coordinates (xi) the whole network is an
// arrow: every inner coordinate is an oscillator that sees only the two ends of
// its own element,
//
//	xi'' + g xi' + omega^2 xi + kappa_a u_a + kappa_b u_b = f,
//	M u'' + C u' + K u + sum kappa xi = F       at the ends,
//
// so that applying the operator, and solving with it for any complex shift,
// costs a few operations per degree of freedom. Nothing is truncated.
//
// # Time
//
// Proportionally damped networks are propagated by their real modes in closed
// form. All others use the (m-1, m) Padé approximant of the exponential, factor
// by factor; m is chosen from the highest frequency of the semi-discrete system
// times the step so that its error stays below 1e-13 per step. It is A- and
// L-stable, whatever dashpot, bracket or spring stands at a light node, and
// knows no defective case. Loads enter as polynomials of degree 4 through their
// values at five Gauss points of a substep; substeps end at the breaks of the
// loads, and this is the only error in time.
//
// Sources: Patera 1984, J. Comput. Phys. 54 (elements); Van Loan 1978, IEEE
// Trans. Autom. Control 23 (loads by augmentation); Ehle 1969 and Wanner, Hairer,
// Nørsett 1978, BIT 18 (stability of subdiagonal Padé approximants), all from
// memory.
package spectral
