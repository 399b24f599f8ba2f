// Package characteristic computes taut-string networks by tracking waves along
// their characteristics: no mesh along a lossless line, only the histories of
// what leaves its two ends.
//
// On a piece of wave speed c, impedance Z = sqrt(T m) and rate of loss
// gamma = viscous/(2m) the displacement is u = f + g with
//
//	f_t + c f_x + gamma f = r,   g_t - c g_x + gamma g = r,
//	r_t + gamma r = gamma^2 u/2 + q/(2m),
//
// which is m u_tt + viscous u_t = T u_xx + q exactly. What enters at an end
// leaves at the other one after the travel time, less exp(-gamma tau): that part
// is read from the sender's history by centred interpolation and never passes
// through a mesh, so fronts and kinks stay sharp. Only the weak source r is kept
// on a lattice of its own (second order; fourth for a force per length on a
// lossless piece). Point forces inside a piece and rolling loads enter by their
// exact waves, without a node.
//
// A node with incoming waves a and outgoing waves b = u - a feels the force
// Z (2a' - u') + gamma Z (2a - u) of each piece. Its law is integrated once, so
// that no history is differentiated:
//
//	M u' = y - R u + W,   y' = F - K u + sum gamma Z (2a - u),   W = 2 sum Z a,
//	R = C + sum Z,
//
// and advanced by the exponential of its matrix with quadratic inputs; nodes
// joined by links (ties, hung masses) share one matrix.
//
// The extra tension of a sagging line is alike all along it and moves a piece as a
// whole: u = f + g + s(t), without a mesh (sag.go).
//
// Friction, stops, written laws and ties that go slack act as a force that is
// constant over each part of a step and found from the displacement without it
// (law.go).
//
// Places of a history where its slope (or, after a jerked support, its value)
// jumps are known: they start at a kink of the shape, a break of a load, a
// roll's end, and travel with the waves. Each is carried with its own exact
// time, nodes take a step to it, and no stencil reaches across it.
//
// Sources: Laakso, Valimaki, Karjalainen, Laine 1996, IEEE Signal Process. Mag.
// 13, for the reading of delayed histories; Van Loan 1978, IEEE Trans. Autom.
// Control 23, for the input columns of the exponential; Fryba 1972, Vibration of
// Solids and Structures under Moving Loads, for the rolling load. The equations
// of the factored loss are derived in this package's comments.
package characteristic
