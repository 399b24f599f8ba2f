// Package modal finds the natural vibrations of a network of lines
// exactly: frequency, damping and shape, and the proof that none is missed; and its
// steady motion under given forces.
//
// There is no mesh of cells. Every uniform piece is represented by the exact
// solution of its wave equation at a complex frequency s, displacement
// proportional to e^{st}, so that the natural vibrations are the zeros of one
// function of s, Delta(s) (see element.go for how it is built without poles).
//
//   - Without damping the zeros lie on the imaginary axis and are counted below
//     any frequency by the signs of a symmetric matrix (count.go).
//   - With damping they are complex. Start values come from a coarse mesh of
//     this package's own (start.go), Newton's method polishes them (polish.go),
//     and the argument principle proves that the list is complete, or finds what
//     is missing by cutting the region into parts (winding.go).
//
// Uniform taut strings have a path of their own. Groups with bending, internal
// loss, tension that varies along a piece, or sag go through system.go, on the
// stiffnesses of stiff.go and taper.go; counting, polishing and proof are shared.
//
// Lines that nothing ties together are found as groups of their own. Supports
// that are moved as told count as held.
package modal
