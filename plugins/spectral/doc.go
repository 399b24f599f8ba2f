// Package spectral solves networks of lines with elements of high degree in space and
// propagation without a step limit in time.
//
// # Strings
//
// Uniform taut strings take Gauss-Lobatto-Legendre elements.
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
// # Lines that are more
//
// Where a line bends, hangs in a tension that rises along it, sags or stretches, and in
// networks of more than 300 nodes, elements are bodies: the same polynomials in other
// coordinates, vibrations between clamped ends and static shapes of values and slopes
// at the ends (Craig and Bampton 1968), which share mass and no stiffness,
//
//	xi'' + g xi' + omega^2 xi + sum_a mu_a (u_a'' + g u_a') + loss = f.
//
// Elements that bend are C1, of cubics and bubbles whose second derivatives are Legendre
// polynomials; they end at eight bending lengths sqrt(EI/T) from clamps, joints and
// loads, where the layers have died away. Internal loss couples the inner coordinates
// of an element, which then takes a dense inverse. Sag is the rank-one stiffness G w w'
// of its line, taken into each solution by Sherman and Morrison's formula. The system of
// the ends is banded. Ten frequencies of clamped lines with L sqrt(T/EI) from 5 to 1500
// agree with the exact ones to 3e-9 at level 0 and to 1e-14 at level 2. Displacement,
// slope and force converge alike; moments inside lose two derivatives, to about 1e-7.
// The start shape of a line that bends is fitted in the mean square by mass.
//
// A record of tension is the whole of it: that at rest, and what sag and stretch add.
//
// # Forces that are not linear
//
// The linear part of a step is exact all the same. A force at a joint, along a piece
// (on Gauss points) or of a slack tie is constant over a step; what a unit of it moves
// by the step's end is prepared, and the forces of all are found by going round them
// until none changes, each in closed form (friction), by the difference of its energy
// over that of the displacement (stops, which so neither gain nor lose), or as the root
// of the law at the middle of the step. Joints send kinks through the elements: records
// are good to about 1e-3, and order 1 is claimed. Formulas without corners at a place
// between elements show order 2 to 4.
//
// The extra tension of a stretching line acts in kicks between linear steps, by a
// splitting of order 4 with positive parts (Chin 1997); the step follows the tension of
// the highest vibration of an element and is halved, from the start, where the tension
// grows too much for it. Where a line also sags, one extra tension G (s + e) is shared,
// so that the two couple.
//
// A load that rolls with a mass rides on its spring by the implicit midpoint rule, and
// may lose contact, never pull.
//
// # Time
//
// Proportionally damped networks of up to 500 degrees of freedom are propagated by
// their real modes in closed form, those of bodies by way of the inverse of K + sigma M,
// which keeps the lowest exact. All others use the (m-1, m) Padé approximant of
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
