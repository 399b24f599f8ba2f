// Package resolve turns the syntax tree of a scenario file, with the files it
// uses, into a scenario.Template: names are looked up, every expression is
// checked for dimension and compiled to a program in SI, ranges are checked at
// the nominal values of the lets, and every path of the template is mapped to
// the place in the text that said it.
//
// Resolving never stops at the first mistake: it returns the best template it
// can together with all diagnostics. What the language can say and the engine
// cannot yet do is refused in the user's terms (code not-yet), never left out
// in silence.
//
// Names. Statements at the top of a file share one namespace, whatever their
// kind; the supports, segments and joints of a line share one namespace of
// their own, so that a bare name is enough wherever only one line has it and
// LINE.NAME tells them apart. No element may be called as a line is.
package resolve
