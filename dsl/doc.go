// Package dsl is the front of the scenario language: it compiles a scenario
// file with everything it uses into a template, tidies a text, folds used
// files into one scenario, and explains the codes of its diagnostics.
//
// It reads files only through the file system that it is given, prints nothing,
// and never stops at the first mistake.
package dsl
