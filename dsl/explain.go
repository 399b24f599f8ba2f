package dsl

import "github.com/tautspan/tautspan/dsl/resolve"

// Explain is the longer text about the code of a diagnostic, for `tautspan why
// CODE`; false for a code that no diagnostic has. The code scope lists what the
// language does not say.
func Explain(code string) (string, bool) { return resolve.Explain(code) }

// Codes lists every code that Explain knows, in alphabetical order.
func Codes() []string { return resolve.Codes() }
