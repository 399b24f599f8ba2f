// Package statics holds what a line does at rest: the shape in which a pluck
// draws it, supports that give included, the force or travel that goes with it,
// tension and stored energy.
//
// All solvers share it, so it is tested against closed forms and published
// values only.
package statics
