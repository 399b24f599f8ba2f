// Package scenarios holds the shipped scenarios. All lines, places and figures
// in them are invented; where a figure is that of a published case it says so.
package scenarios

import "embed"

// Files holds every shipped scenario and the tables that some of them read.
//
//go:embed *.taut
var Files embed.FS
