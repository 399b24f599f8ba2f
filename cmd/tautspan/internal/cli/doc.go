// Package cli is the command line: commands, flags, exit codes, what goes to
// standard output and what to standard error. It turns the documents of package
// app into text for people; it computes nothing.
package cli
