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
// The degree follows the wave's phase across the element: 0.57 theta + 8 where the
// data are smooth, less where they have kinks and no degree resolves them. Levels
// multiply the degrees by 1.5 and keep the elements. Smooth data converge faster than
// any power of the degree down to a floor of rounding of about 1e-10 (degrees near
// 50) to 1e-9 (near 120) of the record; kinks converge algebraically, p^-1.5 in a
// record's mean square after a pluck.
//
// # Time
//
// Proportionally damped networks of up to 500 degrees of freedom are propagated by
// their real modes in closed form. All others use the (m-1, m) Padé approximant of
// the exponential, factor by factor; m is chosen from the highest frequency of the
// semi-discrete system times the step so that its error stays below 1e-13 per step,
// and a step that would need more than m = 29 is split. It is A- and L-stable,
// whatever dashpot, bracket or spring stands at a light node, and knows no defective
// case. Vibrations of a stretch or attachment far above those of the ordinary
// elements are not followed but damped, and a note says so.
//
// Loads enter as polynomials of degree 4 through their values at five Gauss points
// of a window; windows end at the breaks of the loads, and this is the only error in
// time of the records. Work and losses are integrated over the same windows from
// powers with three derivatives (order 8). Under a moving load, where the velocity
// jumps, that account is good to about half a percent.
//
// Sources: Patera 1984, J. Comput. Phys. 54 (elements); Van Loan 1978, IEEE
// Trans. Autom. Control 23 (loads by augmentation); Ehle 1969 and Wanner, Hairer,
// Nørsett 1978, BIT 18 (stability of subdiagonal Padé approximants), all from
// memory.
package spectral
