// Package scatter answers for steady vibration: what share of a travelling wave
// a joint throws back, lets pass and absorbs (joint.go), what share the end of a
// line takes with everything near it counted together (end.go), and how strongly
// a watch answers to each excitation at each frequency (response.go).
//
// Phases follow e^{+i omega t} and lie in (-pi, pi]; they are those at the joint
// itself. Shares of displacement compare amplitudes, shares of power compare
// mean energy flux.
//
// Waves arrive along an endless line that has the mass, tension and bending
// stiffness of the segment just beside the joint, without its losses: in a lossy
// medium the flux of a wave and that of its echo do not add up, and a share of
// power would mean nothing. The loss of the pieces between a support and the
// last joint near it is kept. Sag is no part of it: it acts on a line as a whole.
// Ties are left out, and notes say so.
package scatter
