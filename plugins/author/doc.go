// Package author is for whoever writes a plugin for tautspan in Go: a solver, a
// load or a law, served by one call of Serve from a main of its own.
//
// This package is a promise within protocol 1: what stands here stays. Every
// other package of the project may change at any time. A plugin in another
// language speaks the protocol of plugins/wire/tautspan.proto directly.
//
// All numbers are SI. A plugin must be deterministic: the same questions get the
// same answers, bit for bit, on one machine.
package author
