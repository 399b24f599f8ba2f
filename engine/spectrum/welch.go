package spectrum

import (
	"math"

	"gonum.org/v1/gonum/dsp/fourier"
)

// Density is a one-sided power spectral density.
type Density struct {
	Step     float64   // Hz between values
	Power    []float64 // unit^2/Hz, from 0 Hz up
	Segments int       // averaged
}

// Welch averages the spectra of overlapping stretches (Hann window, half
// overlap, the mean of each taken off) so that the resolution, the width of a
// line in the spectrum, is about resolution Hz: 1.5 bins of the window.
// Resolutions finer than the record allows become what it allows.
// Source: Welch, IEEE Trans. Audio Electroacoust. 15 (1967) 70-73, from memory.
func Welch(x []float64, rate, resolution float64) Density {
	n := 8
	for n < len(x) && 1.5*rate/float64(n) > resolution {
		n *= 2
	}
	for n > len(x) && n > 8 {
		n /= 2
	}
	w, power := hann(n), 0.0
	for _, v := range w {
		power += v * v
	}
	fft := fourier.NewFFT(n)
	d := Density{Step: rate / float64(n), Power: make([]float64, n/2+1)}
	part, c := make([]float64, n), make([]complex128, n/2+1)
	for at := 0; at+n <= len(x); at += n / 2 {
		mean := 0.0
		for _, v := range x[at : at+n] {
			mean += v / float64(n)
		}
		for i := range part {
			part[i] = (x[at+i] - mean) * w[i]
		}
		c = fft.Coefficients(c, part)
		for k, v := range c {
			p := 2 * (real(v)*real(v) + imag(v)*imag(v)) / (rate * power)
			if k == 0 || k == n/2 {
				p /= 2
			}
			d.Power[k] += p
		}
		d.Segments++
	}
	for k := range d.Power {
		d.Power[k] /= float64(max(1, d.Segments))
	}
	return d
}

func hann(n int) []float64 {
	w := make([]float64, n)
	for i := range w {
		w[i] = 0.5 - 0.5*math.Cos(2*math.Pi*float64(i)/float64(n))
	}
	return w
}

// blackmanHarris is the four-term window whose side lobes lie 92 dB down.
// Source: Harris, Proc. IEEE 66 (1978) 51-83, from memory.
func blackmanHarris(n int) []float64 {
	w := make([]float64, n)
	for i := range w {
		a := 2 * math.Pi * float64(i) / float64(n-1)
		w[i] = 0.35875 - 0.48829*math.Cos(a) + 0.14128*math.Cos(2*a) - 0.01168*math.Cos(3*a)
	}
	return w
}

// powerOfTwo is the least power of two that is not below n.
func powerOfTwo(n int) int {
	p := 1
	for p < n {
		p *= 2
	}
	return p
}

// Thin is the density in dB at count places between two frequencies, each the
// highest of its stretch so that no peak is lost, against the highest of all.
func (d *Density) Thin(from, to float64, count int) []float64 {
	out := make([]float64, count)
	top := math.Inf(-1)
	for k := range out {
		a := int(math.Round((from + (to-from)*float64(k)/float64(count)) / d.Step))
		b := int((from + (to-from)*float64(k+1)/float64(count)) / d.Step)
		best := 0.0
		for i := max(a, 0); i <= max(a, b) && i < len(d.Power); i++ {
			best = math.Max(best, d.Power[i])
		}
		out[k] = 10 * math.Log10(math.Max(best, 1e-300))
		top = math.Max(top, out[k])
	}
	for k := range out {
		out[k] = math.Max(out[k]-top, -200)
	}
	return out
}
