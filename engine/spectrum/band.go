package spectrum

import (
	"math"

	"gonum.org/v1/gonum/dsp/fourier"
)

// transform is the spectrum of a stretch of record without a window, from which
// bands are cut.
type transform struct {
	rate  float64
	n     int // samples of the stretch
	size  int // of the transform
	coeff []complex128
}

// newTransform pads the stretch to at least 1.25 times its length, so that what
// a band's filter smears past one end does not come back in at the other.
func newTransform(x []float64, rate float64) *transform {
	t := &transform{rate: rate, n: len(x), size: powerOfTwo(len(x) + len(x)/4)}
	padded := make([]float64, t.size)
	mean := 0.0
	for _, v := range x {
		mean += v / float64(len(x))
	}
	for i, v := range x {
		padded[i] = v - mean
	}
	t.coeff = fourier.NewFFT(t.size).Coefficients(nil, padded)
	return t
}

// baseband is the signal near a frequency, as a slow complex amplitude.
type baseband struct {
	centre float64 // Hz
	step   float64 // s between samples
	skip   int     // samples at either end that the filter's own length spoils
	z      []complex128
	sigma  float64 // Hz, of the Gaussian filter
}

// around filters with exp(-((f - centre)/sigma)^2/2) and moves the band down to
// zero frequency, sampled about 12 sigma apart in frequency.
func (t *transform) around(centre, sigma float64) *baseband {
	bin := t.rate / float64(t.size)
	half := max(4, int(math.Ceil(5*sigma/bin)))
	m := powerOfTwo(2*half + 2)
	k0 := int(math.Round(centre / bin))
	in := make([]complex128, m)
	for k := -half; k <= half; k++ {
		at := k0 + k
		if at < 1 || at >= len(t.coeff)-1 {
			continue
		}
		f := float64(at)*bin - centre
		g := math.Exp(-0.5 * (f / sigma) * (f / sigma))
		in[(k+m)%m] = 2 * t.coeff[at] * complex(g/float64(t.size), 0)
	}
	z := fourier.NewCmplxFFT(m).Sequence(nil, in)
	b := &baseband{centre: float64(k0) * bin, step: float64(t.size) / float64(m) / t.rate, sigma: sigma}
	length := int(float64(t.n) / t.rate / b.step)
	b.z = z[:min(length, m)]
	// exp(-(2 pi sigma t)^2/2) falls to 1 % at 3/(2 pi sigma).
	b.skip = int(math.Ceil(3 / (2 * math.Pi * sigma) / b.step))
	return b
}
