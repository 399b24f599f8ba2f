// Package transform computes motion from the exact dynamic stiffness of the
// network, inverted from the Laplace domain. It has no mesh and no time step:
// for each of many complex frequencies s = sigma + i omega it assembles
//
//	b u = (T u')' - (EI (1 + s tau) u'')'' + g,  b = m s^2 + c s
//
// over the pieces in closed form, solves for the places that are watched, and
// transforms back by FFT over a window W,
//
//	u(t) = (e^{sigma t}/W) sum over k of U(sigma + 2 pi i k/W) e^{2 pi i k t/W},
//
// with e^{-sigma W} = 1e-10 or less, so that what comes round again is small.
//
// What starts as a static shape enters as the end of the force that held it; a
// start shape given by `start` enters as a load m s u0 + c u0 + m v0, integrated
// exactly over cubics. Values at t = 0 are taken off before the inversion, so
// that what is left falls as 1/s^2 at least; records of means are made from the
// integral, whose transform falls faster by one power.
//
// Each level doubles the band and moves the contour, so that two levels differ by
// all that is approximate: the band's end, the window, the straight lines between
// samples of a load. Tension that rises along a piece is taken in steps of equal
// travel time, halved from level to level (order 2).
//
// Hysteretic loss factors are made causal (lossy): the loss is the one stated at
// every frequency, the stiffness is the one stated at one frequency and grows with
// the logarithm of frequency.
//
// Sources, from memory: Wittrick, Williams, Q. J. Mech. Appl. Math. 24 (1971) for
// dynamic stiffness matrices; Dubner, Abate, J. ACM 15 (1968) 115-123 for the
// inversion. The matrices here are written for this package alone: the exact
// vibrations of engine/modal have their own.
package transform
