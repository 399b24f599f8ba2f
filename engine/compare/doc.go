// Package compare runs several solvers on one mesh, gives every answer of each
// an error bar from refinement, and says whether the solvers agree.
//
// Each solver solves at three successive levels. From the two differences comes
// the observed order and from that the error bar (see NewBar). Two solvers agree
// on an observable when their difference is at most the sum of their bars; the
// sum of the bars is the resolving power, and agreement counts only when that is
// within the share that the scenario asks for. Solvers whose bars are too wide
// are refined until it is, or until the limits of work and memory are reached.
//
// What solvers share (scenario, statics, mesh, and this package) the comparison
// cannot see.
//
// The outcome does not depend on the number of workers: all decisions are taken
// between rounds, from plans and results, never from clocks.
package compare
