package spectrum

import (
	"math"

	"gonum.org/v1/gonum/floats"
)

// band is a stretch of record with the range of frequencies that is looked for in it.
type band struct {
	x         []float64
	rate      float64 // Hz
	limit     float64 // Hz, half the sampling rate of the record as it was taken
	low, high float64 // Hz
	tops      []top
}

// bands cuts a record that is too long for one transform in two: its low
// frequencies, thinned to a lower rate, over its whole length, since they are what
// needs length; its high ones over the first part.
func bands(x []float64, rate float64, want Want) []band {
	if len(x) <= analysedMost {
		return []band{{x: x, rate: rate, limit: rate / 2, low: want.Low, high: want.High}}
	}
	factor := (len(x) + analysedMost - 1) / analysedMost
	edge := thinPass * rate / float64(factor)
	var out []band
	if want.Low < edge {
		out = append(out, band{x: thin(x, factor), rate: rate / float64(factor), limit: rate / 2, low: want.Low, high: math.Min(edge, want.High)})
	}
	if want.High > edge {
		out = append(out, band{x: x[:analysedMost], rate: rate, limit: rate / 2, low: math.Max(edge, want.Low), high: want.High})
	}
	return out
}

// The filter of thin: its length in output samples, its cut-off and the highest
// frequency that it passes within 0.1 %, in output rates. The window's transition
// is 4/64 wide on either side of the cut-off, so that what folds back onto the
// pass band comes from above 0.48 and is 90 dB down.
const (
	thinLength = 64
	thinCut    = 0.42
	thinPass   = 0.35
)

// thin keeps every factor-th sample of the low-passed record: a sinc under the
// Blackman-Harris window. The output begins half a filter late and ends half a
// filter early.
func thin(x []float64, factor int) []float64 {
	n := thinLength*factor + 1
	h := blackmanHarris(n)
	sum := 0.0
	for i := range h {
		u := 2 * math.Pi * thinCut * float64(i-n/2) / float64(factor)
		if u != 0 {
			h[i] *= math.Sin(u) / u
		}
		sum += h[i]
	}
	floats.Scale(1/sum, h)
	out := make([]float64, 0, len(x)/factor)
	for from := 0; from+n <= len(x); from += factor {
		out = append(out, floats.Dot(h, x[from:from+n]))
	}
	return out
}
