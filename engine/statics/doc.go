// Package statics holds what a line does at rest: the shape in which a pluck
// draws it, with bending, sag, rising tension and supports that give (rest.go);
// the force or travel that goes with it; how it hangs under its own weight, what
// an anchor has to travel and what temperature does (hang.go, warm.go); tension
// and stored energy.
//
// All solvers share it, so it is tested against closed forms and published
// values only.
package statics
