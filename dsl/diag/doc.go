// Package diag holds what every stage of the scenario language says to its
// user: source files, spans of bytes in them, diagnostics with a stable word
// code, ordered lists of diagnostics, and their rendering as text and as JSON.
//
// Positions are byte offsets in half-open spans. Line and column are worked
// out for display only; both count from 1, columns in code points.
package diag
