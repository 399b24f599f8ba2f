// Command tautspan answers for tensioned lines: what they do when they are
// struck, plucked, driven or released, how strongly, for how long, and how far
// the numbers can be trusted. See README.md.
package main

import (
	"os"

	"github.com/tautspan/tautspan/cmd/tautspan/internal/cli"
)

func main() {
	os.Exit(cli.Main(os.Args[1:], cli.Streams{In: os.Stdin, Out: os.Stdout, Err: os.Stderr}))
}
