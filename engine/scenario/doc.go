// Package scenario is the hinge between the language and the engine: a
// scenario whose numbers are still programs over named lets (Template), and the
// same scenario in SI numbers (Network) that Template.Bind makes of it in
// microseconds, without touching text.
//
// Both are the same structures with another type of number: every structure
// here is written once over V, and V is formula.Program in a template and
// float64 in a network. Whoever varies a let (a fit, a sweep, the doubt of a
// result, an optimum) re-evaluates through Bind and nothing else.
//
// Directions: x runs in walking order from the first support; u is positive
// upward, measured from static equilibrium; a force is positive towards
// positive u. All numbers are SI.
package scenario
