// Package solver is the contract between the network and whoever computes its
// motion: what is asked (Request), what is answered (Result), and how a solver
// says what it cannot represent.
//
// # What a record holds
//
// All solvers report on the mesh's time grid t_i = i*Every. A channel with
// Means == 0 is sampled: the value at t_i. Where the exact quantity may jump
// (velocity after a pluck, say) no mesh has a value at the jump and every solver
// would overshoot it by a share that refinement does not mend. Such a record
// holds what a logger with a sampling interval of Every holds: the mean over
// one interval around t_i,
//
//	Means == 1   (1/w) * integral of q(t) dt over t_i - w/2 .. t_i + w/2,   w = Every
//	Means == 2   the same mean taken of the record of means:
//	             triangular weight over t_i - w .. t_i + w
//
// so that a mean velocity is a difference of displacements,
// (u(t_i+w/2) - u(t_i-w/2))/w, and a twice-averaged acceleration is
// (u(t_i+w) - 2u(t_i) + u(t_i-w))/w^2. Before t = 0 the line goes on as it
// starts: u(-t) = u(0) - t*v(0), slopes and forces likewise constant at their
// start values; a solver runs far enough past the last row to fill it.
//
// # Quantities at a place
//
// slope is du/dx; force inside a line, and at a node that carries nothing, is
// T du/dx; at a support or a joint that carries something it is what the line
// exerts on it: the sum over the pieces that meet there of +T du/dx (piece
// starts there) and -T du/dx (piece ends there). slope at a node where two
// pieces meet is that of the piece after it. At a point force inside a piece,
// where the slope jumps, slope and force are those just after it. moment is 0 on a string. tension
// is the piece's tension.
package solver
