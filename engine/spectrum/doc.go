// Package spectrum tells what a record of a vibrating line holds: its power
// spectrum, its peaks with the uncertainty of their frequencies, the decay of
// each and whether it is straight, the series of a stiff string, and when the
// fronts of a pulse arrive.
//
// Nothing here knows of lines or scenarios: samples, a rate, numbers out.
package spectrum
