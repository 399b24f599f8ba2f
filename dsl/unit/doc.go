// Package unit holds dimensions, the unit table of the scenario language with
// exact factors, the reading of a unit word and the writing of SI values for
// people. It knows nothing of scenarios.
//
// Factors come from the SI brochure (9th edition, BIPM 2019) and, for the
// customary units, from NIST Special Publication 811 (2008), appendix B, where
// inch, pound and standard gravity are exact by definition.
package unit
