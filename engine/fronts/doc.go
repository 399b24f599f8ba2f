// Package fronts is the pulse ledger of taut strings: which front reaches which
// watched place, when, by which path, how strong and with which sign.
//
// # What a front is
//
// A front is a jump of the displacement or of one of its time derivatives that
// travels with the wave speed. Every break of the excitations starts fronts,
// and only the lowest derivative that jumps there is followed:
//
//	pluck, kink of a start shape    velocity       c [du0/dx] / 2 each way
//	jump of a start velocity        velocity       -+ [v0] / 2
//	jump of a start displacement    displacement   -+ [u0] / 2
//	push, its value jumps           velocity       [F] / (sum Z + C)
//	push, its slope jumps           acceleration   [dF/dt] / (sum Z + C)
//	short knock (push)              displacement   J / (sum Z + C), J = integral of F dt
//	press, its value jumps          acceleration   -+ [p/m] / 2 at the edges of its stretch
//	short press                     velocity       -+ [J/m] / 2 at the edges, J = integral of p dt
//	support motion                  displacement, velocity or acceleration, whichever jumps first
//	rolling load, start and end     velocity       F / (2 Z (1 -+ V/c)) ahead and behind
//
// A history is a knock, or several, when it is zero but for stretches between two
// of its breaks each of which is no longer than the larger of the shortest travel
// time of a piece and a tenth of the longest, and has an impulse J (above 1e-6 of
// the integral of |F|). A knock is one pulse per path: its front edge gives the
// time, the displacement step that it leaves behind gives amplitude and sign. Any
// other history starts fronts break by break; of one with more than 60 breaks (a
// record) only the value jumps count. Breaks at which neither value nor slope
// jumps, and smooth excitations, start no front; the notes say so. A line drawn
// aside and let go later starts its fronts when it is let go. Start shapes and
// velocities are searched for kinks and jumps beside those that the mesh marks.
// The passing of a rolling load itself is no front and is not listed; nor is what
// a moving support passes on through a link.
//
// # Scattering
//
// At a node met by the amplitudes a_i of all pieces at one instant
//
//	v = 2 sum Z_i a_i / (sum Z + C),   b_j = v - a_j,   Z = sqrt(T m),
//
// which is exact for impedance steps, dashpots, held, free and absorbing ends;
// on its way a front loses exp(-gamma tau), gamma = c/(2m) (c the viscous
// coefficient), which is exact too; the wake of a front is not followed. Source:
// Graff, Wave Motion in Elastic Solids (1975), ch. 1; Courant and Hilbert,
// Methods of Mathematical Physics II (telegraph equation); both from memory.
//
// A mass, a spring, a bracket, a tuned mass or a tie with a spring answers a
// front not at once but by exponentials. Such a front becomes a shape h(t) over
// the time t since its edge, for a step of height 1 the exact step response of
// the nodes passed, held at 64 times spaced geometrically up to a window (see
// Ledger.Window) and straight between them; edges keep their times, and all
// shapes add up exactly as fronts do. It is listed with Smeared true and
//
//	Onset      h(0+), what jumps at once: nothing passes a mass at once
//	Settled    h at the end of the window
//	Amplitude  the largest running mean of h over the blur time (Ledger.Blur):
//	           what a record with that sampling interval shows
//	PeakAfter  when the interval starts of the first mean of 99 % of Amplitude
//
// For fronts that met only instantaneous nodes all three are the same number.
// The straight parts cost about 1 % of the step where a joint swings, less where
// it creeps. The window is 24 of the slowest time constant of the joints, at most
// the longest travel time: what a soft spring does later than that is no front.
// Nodes joined by links scatter as one joint with several unknowns.
//
// # What bounds it
//
// Arrivals of one excitation and quantity that meet at a node at one instant
// (to within 1e-9 of the shortest travel time) are merged before they scatter,
// so that commensurate lines stay linear in time. A meeting all of whose parts
// are below the pruning level is dropped; the sum of the dropped amplitudes
// bounds what is missing in any record of that quantity. The number of meetings
// is limited; the ledger then says which time it reached.
package fronts
