package spectrum

import (
	"math"
	"math/cmplx"
)

// tone is a decaying vibration fitted to a band: a e^{(-s + i 2 pi f) t}.
type tone struct {
	frequency, frequencyU float64 // Hz
	decay, decayU         float64 // 1/s, of the amplitude
	lineU                 float64 // 1/s, of the slope of the log envelope if there were no more than the noise nearby
	amplitude             float64 // at the first sample of the stretch analysed
	misfit                float64 // rms of what is left, share of the rms of the band
	expected              float64 // the misfit that the noise nearby would make
	rms                   float64 // dB, of the log envelope about its line
	span, drop            float64 // s, dB: length and fall of the line
	halves                [2]float64
	ok                    bool
}

// fit fits one decaying vibration to the band by least squares (Gauss-Newton in
// ln a, phase, s and f) from a line through its log envelope and its unwrapped
// phase. The uncertainty is that of the fit, with the noise that the fit leaves
// and with neighbouring samples' dependence (the filter makes them alike) taken
// into account; noise nearby in the spectrum bounds it from below.
func (b *baseband) fit(floor float64) tone {
	z := b.z
	skip := b.skip
	if len(z)-2*skip < 8 {
		skip = max(0, (len(z)-8)/2)
	}
	z = z[skip : len(z)-skip]
	if len(z) < 6 {
		return tone{}
	}
	n := b.useful(z, floor)
	if n < 6 {
		return tone{}
	}
	z = z[:n]
	t := tone{ok: true, span: float64(n-1) * b.step}
	level, phase := make([]float64, n), make([]float64, n)
	turn := 0.0
	for i, v := range z {
		level[i] = math.Log(cmplx.Abs(v))
		phase[i] = cmplx.Phase(v) + turn
		if i > 0 {
			for phase[i]-phase[i-1] > math.Pi {
				phase[i] -= 2 * math.Pi
				turn -= 2 * math.Pi
			}
			for phase[i]-phase[i-1] < -math.Pi {
				phase[i] += 2 * math.Pi
				turn += 2 * math.Pi
			}
		}
	}
	la, sa := line(level, b.step)
	lp, sp := line(phase, b.step)
	a, s, f := cmplx.Rect(math.Exp(la), lp), -sa, sp/(2*math.Pi)
	for range 30 {
		da, ds, df := b.newton(z, a, s, f)
		a, s, f = a*(1+da), s+ds, f+df
		if math.Abs(df) < 1e-12*(1+math.Abs(b.centre)) && math.Abs(ds) < 1e-10*(1+math.Abs(s)) {
			break
		}
	}
	if cmplx.IsNaN(a) || math.IsNaN(s) || math.IsNaN(f) || math.Abs(f) > 4*b.sigma {
		s, f = -sa, sp/(2*math.Pi)
		a = cmplx.Rect(math.Exp(la), lp)
	}
	b.judge(&t, z, level, a, s, f, floor)
	t.frequency = b.centre + f
	t.amplitude = cmplx.Abs(a) * math.Exp(s*float64(skip)*b.step)
	t.decay = s
	// Least squares weighs by power and is best in plain noise. Where it and the
	// envelope's line differ by more than the noise explains, the line is not quite
	// straight: the envelope, which weighs early and late alike, says what the whole
	// stretch does, and the difference is part of its doubt.
	if gap := math.Abs(s + sa); gap > 3*t.lineU {
		t.decay, t.decayU = -sa, math.Hypot(t.decayU, gap/2)
	}
	return t
}

// useful is how many samples stand clear of the noise: to where the envelope
// first stays within 14 dB of the floor: below that the noise bends the logarithm.
// A line is followed over 30 dB at most: far down, what rings beside it shows.
func (b *baseband) useful(z []complex128, floor float64) int {
	start := 0.0
	for _, v := range z[:min(len(z), 4)] {
		start = math.Max(start, cmplx.Abs(v))
	}
	limit := math.Max(floor*5, start/math.Pow(10, 30.0/20))
	below := 0
	for i, v := range z {
		if cmplx.Abs(v) >= limit {
			below = 0
			continue
		}
		if below++; below >= 4 {
			return i - 3
		}
	}
	return len(z)
}

// newton is one Gauss-Newton step.
func (b *baseband) newton(z []complex128, a complex128, s, f float64) (da complex128, ds, df float64) {
	// With d = da + (-ds + i 2 pi df) t the model changes by model*d: two complex
	// unknowns, p and q of d = p + q t, in weighted least squares.
	var w0, w1, w2 float64
	var r0, r1 complex128
	for i, v := range z {
		t := float64(i) * b.step
		model := a * cmplx.Exp(complex(-s*t, 2*math.Pi*f*t))
		w := real(model)*real(model) + imag(model)*imag(model)
		r := (v - model) * cmplx.Conj(model)
		w0, w1, w2 = w0+w, w1+w*t, w2+w*t*t
		r0, r1 = r0+r, r1+r*complex(t, 0)
	}
	det := w0*w2 - w1*w1
	if !(det > 0) {
		return 0, 0, 0
	}
	p := (r0*complex(w2, 0) - r1*complex(w1, 0)) / complex(det, 0)
	q := (r1*complex(w0, 0) - r0*complex(w1, 0)) / complex(det, 0)
	return p, -real(q), imag(q) / (2 * math.Pi)
}

// judge works out uncertainties and how straight the decay is.
func (b *baseband) judge(t *tone, z []complex128, level []float64, a complex128, s, f, floor float64) {
	var w0, w1, w2, left, whole float64
	residual := make([]complex128, len(z))
	for i, v := range z {
		at := float64(i) * b.step
		model := a * cmplx.Exp(complex(-s*at, 2*math.Pi*f*at))
		w := real(model)*real(model) + imag(model)*imag(model)
		w0, w1, w2 = w0+w, w1+w*at, w2+w*at*at
		residual[i] = v - model
		left += real(residual[i])*real(residual[i]) + imag(residual[i])*imag(residual[i])
		whole += real(v)*real(v) + imag(v)*imag(v)
	}
	n := float64(len(z))
	t.misfit, t.expected = math.Sqrt(left/whole), floor*math.Sqrt(n/whole)
	variance := math.Max(left/math.Max(n-2, 1), floor*floor) // of a complex sample
	variance *= b.alike(residual)
	det := w0*w2 - w1*w1
	// q has variance variance*w0/det as a complex number, half of it each way.
	u := math.Sqrt(variance / 2 * w0 / det)
	t.decayU, t.frequencyU = u, u/(2*math.Pi)
	l, slope := line(level, b.step)
	middle, bottom, top := float64(len(level)-1)/2, 0.0, 0.0
	for i := range level {
		// Noise of rms floor moves ln|z| by floor/(sqrt(2)|z|), the line taken for |z|.
		d := (float64(i) - middle) * b.step
		bottom += d * d
		top += math.Pow(d*floor/math.Exp(l+slope*float64(i)*b.step), 2) / 2
	}
	t.lineU = math.Sqrt(top*b.alike(nil)) / bottom
	sum := 0.0
	for i, v := range level {
		d := v - l - slope*float64(i)*b.step
		sum += d * d
	}
	const decibel = 8.685889638065037 // 20/ln 10
	t.rms, t.drop = decibel*math.Sqrt(sum/n), -decibel*slope*t.span
	half := len(level) / 2
	_, s1 := line(level[:half], b.step)
	_, s2 := line(level[half:], b.step)
	t.halves = [2]float64{-s1, -s2}
}

// alike is how many samples count as one, from the dependence that the filter
// makes: the sum over lags of the squared correlation of Gaussian-filtered noise,
// or of the residual itself where that is more.
func (b *baseband) alike(residual []complex128) float64 {
	sum := 1.0
	for lag := 1; lag < 40; lag++ {
		tau := float64(lag) * b.step
		// Noise through exp(-(f/sigma)^2/2) has correlation exp(-(pi sigma tau)^2).
		sum += 2 * math.Exp(-math.Pow(math.Pi*b.sigma*tau, 2))
	}
	own, zero := 1.0, 0.0
	for _, r := range residual {
		zero += real(r)*real(r) + imag(r)*imag(r)
	}
	for lag := 1; lag < len(residual)/4 && zero > 0; lag++ {
		c := 0.0
		for i := lag; i < len(residual); i++ {
			c += real(residual[i] * cmplx.Conj(residual[i-lag]))
		}
		if c /= zero; c < 0.05 {
			break
		}
		own += 2 * c
	}
	return math.Max(sum, own)
}

// line is the least-squares line through evenly spaced values: at the first, and
// its slope.
func line(y []float64, step float64) (at0, slope float64) {
	n := float64(len(y))
	my, sxy, sxx := 0.0, 0.0, 0.0
	for _, v := range y {
		my += v / n
	}
	mx := (n - 1) / 2
	for i, v := range y {
		sxy += (float64(i) - mx) * (v - my)
		sxx += (float64(i) - mx) * (float64(i) - mx)
	}
	if sxx == 0 {
		return my, 0
	}
	return my - sxy/sxx*mx, sxy / sxx / step
}
