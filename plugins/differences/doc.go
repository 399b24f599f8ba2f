// Package differences computes the motion of a network of taut strings by
// finite differences.
//
// # Space
//
// Every piece of line is cut into equal cells of length h. The energies of the
// cells are assembled: a cell puts half of its mass m h on each of its two
// points, joins them by a spring T/h, and puts half of its viscous loss c h on
// each. Points at a node are shared, so that the balance at joints holds by
// construction. Masses, springs, dashpots, brackets and links of the nodes are
// added to the shared points.
//
// # Time
//
// The three-level scheme
//
//	M (u+ - 2u + u-)/dt^2 + C (u+ - u-)/(2 dt) + Ke u + Ki (u+ + 2u + u-)/4 = f
//
// holds at every step, with Ke the cells and Ki everything that must not limit
// dt: springs to ground, links, brackets, and the cells of pieces too short for
// the step. Only the nodes are coupled by Ki; their small matrix is factored
// once (Newmark, J. Eng. Mech. Div. 85, 1959, with beta = 1/4). The energy
//
//	1/2 |(u+ - u)/dt|_M^2 + 1/2 u+ Ke u + 1/2 ubar Ki ubar,   ubar = (u+ + u)/2
//
// changes only by the work of the loads and by the losses, to rounding.
//
// # Resolution
//
// The step is chosen so that the Courant number c dt/h of every piece is just
// below 1. At 1 the scheme is d'Alembert's solution at the points, joints with
// dashpots included (Courant, Friedrichs, Lewy, Math. Ann. 100, 1928). A level
// halves dt and doubles all cells, at the same Courant numbers.
//
// Accuracy is of order 2, of order 1 where the data have kinks or jumps in
// velocity. Smooth data on suitable lines are taken to order 4 by the operator
// of Mattsson and Nordstroem (J. Comput. Phys. 199, 2004) in space and the
// classical Runge-Kutta method in time.
package differences
