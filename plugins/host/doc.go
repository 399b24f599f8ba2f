// Package host starts plugins, keeps them within bounds and speaks with them. A
// plugin that hangs, crashes, floods or answers nonsense becomes an error that
// names it; no process outlives the one that started it.
//
// It also serves the built-in solvers to a process of their own (ServeSolver),
// and runs author's plugins without a process (InProcess), all through the same
// protocol types.
package host
