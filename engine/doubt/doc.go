// Package doubt holds the one type of a number with doubt, how doubt travels
// from inputs to answers, and how a requirement is judged with it.
//
// Two kinds of doubt are kept apart. The numerical bound of an answer is a
// bound: it is added in full and bounds of several parts add up. The doubt of
// the inputs is a standard uncertainty: independent parts combine as the root
// of the sum of squares, to first order in the inputs (JCGM 100:2008, "GUM",
// section 5.1.2, cited from memory), or by sampling where the answer is not of
// first order in them.
package doubt
