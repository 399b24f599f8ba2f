// Package measure answers what a scenario asks of itself: the values of its
// require and collect statements, with their doubt, and the verdicts.
//
// A statement is an expression over measures (peak of a record, frequency of a
// mode, ...). Its doubt is worked out for the expression as a whole, never
// measure by measure: a let that stands in two measures and in the limit moves
// all three together. Numerical bounds travel by evaluating the expression at
// the ends of each measure's interval; the doubt of the lets by evaluating it
// at plus and minus one standard uncertainty of each let (package doubt).
//
// Exact measures (modes, statics, fronts) are computed anew at each such point.
// Measures of a run are not: a comparison at each point would drown a small
// change in the noise of refinement. One settled solver solves at the centre
// and at each point with its discretisation frozen, and only the change that it
// shows is added to the value that the comparison found.
package measure
