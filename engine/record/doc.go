// Package record reads field records: channels of samples against time from a
// logger's CSV file or a WAV file, with what is odd about them.
//
// The sampling rate comes from the whole time column, (last - first)/(rows - 1),
// since loggers round their stamps: one difference of stamps, or the median of
// them, is off by the rounding. Missing samples, gaps, clipping, an offset and a
// drift are reported as findings, not mended in silence.
package record

import "fmt"

// Channel is one channel of a record.
type Channel struct {
	Name    string
	Unit    string    // as the file says it; "" where it says none
	Samples []float64 // in that unit; of a WAV file in parts of full scale
}

// Record is what a file holds. All channels have the same number of samples.
type Record struct {
	Rate     float64 // Hz
	Start    float64 // s, time of the first sample by the file's own clock; 0 where it has none
	Channels []Channel
	Findings []Finding
}

// Duration is the time from the first to the last sample, s.
func (r *Record) Duration() float64 {
	if len(r.Channels) == 0 || len(r.Channels[0].Samples) == 0 {
		return 0
	}
	return float64(len(r.Channels[0].Samples)-1) / r.Rate
}

// Finding is something that whoever uses the record should know.
type Finding struct {
	Code    string // rounded-time, missing-samples, gap, clipped, offset, drift, nothing-in-it
	Channel string // "" where it is of the whole record
	What    string
}

// Error is a file that cannot be read, with the place in it.
type Error struct {
	Code         string
	Line, Column int // from 1; 0 where there is none, as in a WAV file
	What         string
	Hint         string
}

// Error says what is wrong.
func (e *Error) Error() string {
	if e.Line > 0 {
		return fmt.Sprintf("%d:%d  %s", e.Line, e.Column, e.What)
	}
	return e.What
}

// Options say what is known of a file from outside.
type Options struct {
	Time       string // heading of the time column; "": found by itself
	TimeNumber int    // the same by number from 1; 0: by heading
	Rate       float64
	// Scale gives the factor to seconds of a unit of time; ok is false where the
	// text is none. nil: s and ms are known.
	Scale func(text string) (factor float64, ok bool)
	// Only keeps channels by heading or number, in this order; none: all.
	Only []string
	// From and To cut the record, s from its start; To 0: to its end.
	From, To float64
}

// samplesMost bounds what is held: an hour of four channels at 10 kHz is 144
// million samples, 1.2 GB; one channel is 0.3 GB.
const samplesMost = 100_000_000
