// Package numeric holds the numerical routines that the engine needs and the
// general library it builds on does not have: bracketed roots, the inertia of a
// symmetric matrix, complex factors. It knows nothing of lines.
package numeric
