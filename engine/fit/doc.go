// Package fit finds the lets of a scenario that explain site readings: tension,
// bending stiffness, end springs, from natural frequencies with and without
// order numbers, round trips of a pulse, swings and damping ratios, of one line
// or of several that share lets.
//
// The model is the exact one of engine/modal and engine/statics; a fit moves
// lets through Template.Bind and never touches text. The method is weighted
// non-linear least squares,
//
//	cost = sum ((observed - computed)/u)^2 + sum ((let - stated)/u)^2
//	     + 9 for each reading that is taken for a stranger
//	     + 0.5 for each natural vibration that is passed over,
//
// by Levenberg and Marquardt in logarithms of the lets (lm.go), from many
// starts (starts.go, search.go), with peaks paired to vibrations in order (pair.go).
// Doubtful lets are prior knowledge: they move too, held by their doubt. What
// comes out is not one answer but every one whose cost lies within 9 of the
// best, each with intervals from the curvature of its cost (cover.go), and what
// a further reading would add (next.go).
//
// Sources, from memory: Levenberg, Q. Appl. Math. 2 (1944) 164-168; Marquardt,
// J. SIAM 11 (1963) 431-441; Madsen, Nielsen, Tingleff, Methods for non-linear
// least squares problems, Tech. Univ. Denmark 2004; JCGM 100:2008 (GUM).
package fit
