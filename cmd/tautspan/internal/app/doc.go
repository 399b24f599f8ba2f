// Package app holds what the program can do as use cases: text in, documents
// out. It is the only place that joins the language, the engine and the solvers.
// Front ends (the commands; later a page) call it and hold no arithmetic.
//
// Every use case returns a document that can be printed for people or as one
// JSON document; its keys are a promise within format 1. All numbers are SI.
package app
