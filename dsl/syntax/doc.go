// Package syntax reads the text of a scenario into a syntax tree: an own
// scanner, a participle grammar for each kind of statement, and recovery from
// statement to statement, so that one pass reports several mistakes.
//
// The tree keeps quantities as they were written (digits, unit text, place);
// the package knows the shape of a unit but no unit. Names, units, ranges and
// defaults are the business of package resolve. The parser accepts slightly
// more than the language allows where resolve can refuse it in better words.
package syntax
