// Package mesh turns a bound scenario into the network that every solver and
// the exact methods work on: nodes with lumped properties, uniform pieces of
// line between them, links, and what happens to them.
//
// The mesh holds no cell counts: each solver discretises for itself. It is cut
// at every support, joint, splice, tie and sensor mass. Places that are only
// loaded, plucked or watched stay inside a piece and are listed as its marks, so
// that a watch 5 cm from a joint does not force a 5 cm piece on anybody.
//
// All solvers share this package; a fault here gives equal wrong answers. It is
// therefore tested against published values and closed forms, never against
// solvers.
package mesh
