package spectrum

import (
	"fmt"
	"math"
	"sort"

	"gonum.org/v1/gonum/dsp/fourier"
)

// Want says what is looked for.
type Want struct {
	Low, High  float64 // Hz; High 0: half the sampling rate
	Count      int     // at most so many, the strongest; 0: 40
	Above      float64 // dB above the noise nearby; 0: 20
	Below      float64 // dB below the strongest at most; 0: 65
	WholeStart bool    // analyse from the first sample, also where a strike is found
}

// Peak is one vibration that a record holds.
type Peak struct {
	Frequency, FrequencyU float64 // Hz, and one standard uncertainty
	Level                 float64 // dB below the strongest: 0 or less
	Prominence            float64 // dB above the noise nearby
	Amplitude             float64 // in the samples' unit, where the analysis starts; NaN where no decay fits
	Decay, DecayU         float64 // 1/s, of the amplitude; NaN where it cannot be told
	Straight              bool    // the decay is one: see Why
	Why                   string  // where it is not: beats, bends, too short, kept going
	NearLimit             bool    // close to half the sampling rate: it may be an alias

	single bool // beyond doubt one line: hardly anything is left of its band, which no neighbour narrows
}

// DampingRatio is s/sqrt((2 pi f)^2 + s^2).
func (p *Peak) DampingRatio() float64 {
	return p.Decay / math.Hypot(2*math.Pi*p.Frequency, p.Decay)
}

// Result is what a channel holds.
type Result struct {
	Peaks    []Peak // rising by frequency
	From, To float64
	Struck   bool    // a strike was found, and the analysis starts after it
	Step     float64 // Hz, of the spectrum the peaks were found in, before padding
	Notes    []string
}

// analysedMost bounds the samples of one transform: 3.5 minutes at 10 kHz. Longer
// records are analysed in two bands, see bands.
const analysedMost = 1 << 21

// afterStrike is how long after a strike the analysis starts, s: what the mallet
// and the first waves add has gone by then. Common practice, no source.
const afterStrike = 0.15

// ErrNothing says in its text why no peak can be told.
type ErrNothing struct{ What string }

// Error says why.
func (e *ErrNothing) Error() string { return e.What }

// Find finds the peaks of a record.
func Find(x []float64, rate float64, want Want) (*Result, error) {
	if want.Count <= 0 {
		want.Count = 40
	}
	if want.Above <= 0 {
		want.Above = 20
	}
	if want.Below <= 0 {
		want.Below = 65
	}
	if want.High <= 0 || want.High > rate/2 {
		want.High = rate / 2
	}
	if len(x) < 64 {
		return nil, &ErrNothing{fmt.Sprintf("%d samples are too few to tell a frequency", len(x))}
	}
	r := &Result{}
	first := 0
	if at, struck := strike(x, rate); struck && !want.WholeStart && !goesOn(x[at:]) {
		if skip := int(afterStrike * rate); len(x)-at > 4*skip {
			first, r.Struck = at+skip, true
		}
	}
	x = x[first:]
	r.From, r.To = float64(first)/rate, float64(first+len(x)-1)/rate
	r.Step = rate / float64(len(x))
	parts := bands(x, rate, want)
	switch {
	case len(parts) == 1 && len(parts[0].x) == analysedMost && len(x) > analysedMost:
		r.Notes = append(r.Notes, fmt.Sprintf("peaks are of the first %.4g s", analysedMost/rate))
	case len(parts) > 1:
		r.Notes = append(r.Notes, fmt.Sprintf("peaks below %.4g Hz are of the whole record, those above of its first %.4g s", parts[0].high, float64(len(parts[1].x))/parts[1].rate))
	}
	strongest := math.Inf(-1)
	for i := range parts {
		p := &parts[i]
		var err error
		if p.tops, err = p.allTops(want); err != nil {
			return nil, err
		}
		for _, t := range p.tops {
			strongest = math.Max(strongest, t.level)
		}
	}
	var rough [][]resonance
	for i := range parts {
		var found []resonance
		if !r.Struck && goesOn(parts[i].x) {
			found = parts[i].ambient()
		}
		for _, a := range found {
			strongest = math.Max(strongest, a.level)
		}
		rough = append(rough, found)
	}
	for i := range parts {
		r.measure(&parts[i], strongest, want)
	}
	for _, found := range rough {
		r.overAmbient(found, strongest, rate/2)
	}
	if len(r.Peaks) == 0 {
		return nil, &ErrNothing{"no peak stands out of the noise"}
	}
	r.strongest(want.Count)
	return r, nil
}

// strongest keeps so many peaks, rising by frequency.
func (r *Result) strongest(count int) {
	sort.SliceStable(r.Peaks, func(a, b int) bool { return r.Peaks[a].Level > r.Peaks[b].Level })
	r.Peaks = r.Peaks[:min(len(r.Peaks), count)]
	sort.Slice(r.Peaks, func(a, b int) bool { return r.Peaks[a].Frequency < r.Peaks[b].Frequency })
}

// top is a peak of the spectrum before it is measured.
type top struct {
	frequency, level, prominence float64 // Hz, dB absolute, dB
	floor                        float64 // amplitude of the noise in one bin of the window
	duration                     float64 // s, of the stretch that it was found in
}

// stretches are the shares of the record in which peaks are looked for: what has
// died away long before the record ends is lost in a spectrum of the whole, whose
// window is all but closed at its beginning.
var stretches = []int{1, 4, 16}

// allTops are the peaks of the whole stretch, and those of its beginning that the
// whole does not show.
func (b *band) allTops(want Want) ([]top, error) {
	x, rate := b.x, b.rate
	want.Low, want.High = b.low, b.high
	var out []top
	for _, k := range stretches {
		n := len(x) / k
		if k > 1 && n < 512 {
			break
		}
		found, err := tops(x[:n], rate, want)
		if err != nil && k == 1 {
			return nil, err
		}
		apart := 4 * rate / float64(n) // half the window's main lobe
		for _, p := range found {
			known := false
			for _, q := range out {
				known = known || math.Abs(q.frequency-p.frequency) < apart
			}
			if !known {
				out = append(out, p)
			}
		}
	}
	return out, nil
}

// tops finds the peaks of one spectrum of the whole stretch: Blackman-Harris
// window, padded four times (twice where it is long), a parabola through the logarithm of three
// bins. The noise is the running median over about 60 widths of a line.
func tops(x []float64, rate float64, want Want) ([]top, error) {
	n := len(x)
	size := powerOfTwo(4 * n)
	if n > analysedMost/4 {
		size = powerOfTwo(2 * n) // memory; the parabola does the rest
	}
	w := blackmanHarris(n)
	gain, mean := 0.0, 0.0
	for i, v := range x {
		gain += w[i]
		mean += v / float64(n)
	}
	padded := make([]float64, size)
	for i, v := range x {
		padded[i] = (v - mean) * w[i]
	}
	c := fourier.NewFFT(size).Coefficients(nil, padded)
	level := make([]float64, len(c))
	for k, v := range c {
		level[k] = 20 * math.Log10(2*math.Hypot(real(v), imag(v))/gain+1e-300)
	}
	bin := rate / float64(size)
	width := int(math.Ceil(4 * float64(size) / float64(n))) // main lobe's half width, bins
	floor := runningMedian(level, width)
	low, high := max(width, int(want.Low/bin)), min(len(level)-2, int(want.High/bin))
	if low >= high {
		return nil, &ErrNothing{fmt.Sprintf("the record is too short for frequencies below %.4g Hz: it lasts %.4g s", want.High, float64(n)/rate)}
	}
	strongest := math.Inf(-1)
	for k := low; k <= high; k++ {
		strongest = math.Max(strongest, level[k])
	}
	var out []top
	for k := low; k <= high; k++ {
		if level[k] < floor[k]+want.Above || level[k] < strongest-want.Below || !highest(level, k, width) || saddle(level, k) < saddleLeast {
			continue
		}
		a, b, d := level[k-1], level[k], level[k+1]
		shift := 0.0
		if curve := a - 2*b + d; curve < 0 {
			shift = math.Max(-0.5, math.Min(0.5, 0.5*(a-d)/curve))
		}
		out = append(out, top{
			frequency: (float64(k) + shift) * bin, level: b - 0.25*(a-d)*shift, prominence: b - floor[k],
			floor: math.Pow(10, floor[k]/20), duration: float64(n) / rate,
		})
	}
	return out, nil
}

// highest tells whether bin k is the highest within a width on both sides.
func highest(level []float64, k, width int) bool {
	for i := max(0, k-width); i <= min(len(level)-1, k+width); i++ {
		if level[i] > level[k] || level[i] == level[k] && i < k {
			return false
		}
	}
	return true
}

// saddleLeast is how far the spectrum must fall, in dB, between a peak and any
// higher one: the skirts of a strong line are rough. Chosen.
const saddleLeast = 10

// saddle is how far one must go down from bin k before it goes up to more.
func saddle(level []float64, k int) float64 {
	least := math.Inf(1)
	for _, step := range []int{-1, 1} {
		low := level[k]
		i := k + step
		for ; i >= 0 && i < len(level) && level[i] <= level[k]; i += step {
			if low = math.Min(low, level[i]); level[k]-low > 2*saddleLeast {
				break
			}
		}
		least = math.Min(least, level[k]-low)
	}
	return least
}

// runningMedian is the median over 60 widths about each bin, worked out at every
// width (every fourth where there are many) and straight between.
func runningMedian(level []float64, width int) []float64 {
	half, apart := 30*width, width
	if len(level) > 1<<18 {
		apart = 4 * width // time
	}
	var at []int
	var mid []float64
	for k := 0; ; k += apart {
		k = min(k, len(level)-1)
		// A tenth of the bins is enough for a median, and a padded spectrum's
		// neighbours say the same.
		var part []float64
		step := max(1, width/4)
		for i := max(0, k-half); i <= min(len(level)-1, k+half); i += step {
			part = append(part, level[i])
		}
		sort.Float64s(part)
		at, mid = append(at, k), append(mid, part[len(part)/2])
		if k == len(level)-1 {
			break
		}
	}
	out := make([]float64, len(level))
	j := 0
	for k := range out {
		for j < len(at)-2 && at[j+1] < k {
			j++
		}
		if len(at) == 1 || at[j+1] == at[j] {
			out[k] = mid[j]
			continue
		}
		s := float64(k-at[j]) / float64(at[j+1]-at[j])
		out[k] = mid[j]*(1-s) + mid[j+1]*s
	}
	return out
}

// strike finds a single blow in the first half of a record: before it all is
// quiet, less than a tenth of what follows.
func strike(x []float64, rate float64) (at int, found bool) {
	block := max(1, int(0.005*rate))
	most, where := 0.0, 0
	for i, v := range x {
		if math.Abs(v) > most {
			most, where = math.Abs(v), i
		}
	}
	if where > len(x)/2 {
		return 0, false
	}
	first := 0
	for ; first < len(x) && math.Abs(x[first]) < 0.1*most; first++ {
	}
	return max(where, first) / block * block, where-first < len(x)/8
}

// quickly is how many times over a vibration must fall to 1/e within the record
// that the whole record's spectrum does not show. Chosen: the window's weight lies
// on its middle half.
const quickly = 6

// measure fits a decaying vibration in the band of each peak.
func (r *Result) measure(part *band, strongest float64, want Want) {
	t, list := newTransform(part.x, part.rate), part.tops
	for i, p := range list {
		if p.level < strongest-want.Below {
			continue
		}
		gap := p.frequency
		for k, other := range list {
			// What is 30 dB weaker hardly bends a line; it is not worth a band so
			// narrow that it rings longer than the line.
			if k != i && other.level > p.level-30 {
				gap = math.Min(gap, math.Abs(other.frequency-p.frequency))
			}
		}
		// Narrow enough to leave neighbours out, wide enough to follow the decay.
		duration := p.duration
		wide := math.Max(5/duration, 0.003*p.frequency)
		sigma := math.Min(gap/6, wide)
		sigma = math.Max(sigma, 1.5/duration)
		b := t.around(p.frequency, sigma)
		// The window's bin holds noise of a width of 2/T; the band of sigma sqrt(pi).
		floor := p.floor * math.Sqrt(sigma*math.Sqrt(math.Pi)*duration/2)
		tone := b.fit(floor)
		if whole := float64(t.n) / t.rate; duration < 0.9*whole && !(tone.ok && tone.misfit < steady && tone.decay > quickly/whole) {
			continue // the whole record would show it, if it were there
		}
		out := peakOf(p, tone, strongest, duration, part.limit)
		dies := tone.misfit < single/3 && tone.decay*float64(t.n)/t.rate > quickly
		crowded := gap/6 < wide && gap < p.frequency && !dies
		out.single = tone.ok && tone.misfit < math.Max(single, 1.3*tone.expected) && !crowded
		// A band that must be so narrow rings through half the record and would
		// smooth the beats away.
		if ringing := 6 / (2 * math.Pi * sigma); ringing > duration/2 && gap < p.frequency {
			out.Straight, out.Decay, out.DecayU = false, tone.decay, math.Inf(1)
			out.Why = fmt.Sprintf("beats with a neighbour %.3g Hz away", gap)
		}
		r.Peaks = append(r.Peaks, out)
	}
}

// What makes a decay one straight line. Common practice, no source: within 1 dB
// rms of it, a fall of more than 8 dB, both halves within a quarter of one another.
const (
	straightRMS  = 1.0
	straightDrop = 8.0
	straightHalf = 0.25
)

// steady is the misfit above which a band is no single decaying vibration.
const steady = 0.35

// single is the misfit, beyond that of the noise, below which it is one beyond doubt: the rough spectrum of a
// resonance that wind keeps going has spikes that look like lines. Chosen.
const single = 0.15

func peakOf(p top, t tone, strongest, duration, limit float64) Peak {
	out := Peak{Frequency: p.frequency, Level: p.level - strongest, Prominence: p.prominence, Amplitude: math.NaN(), Decay: math.NaN(), DecayU: math.NaN(), NearLimit: p.frequency > 0.8*limit}
	// Without a fit a line's place is known to a fraction of its width that the
	// noise allows.
	out.FrequencyU = 1 / duration / math.Sqrt(math.Max(1, math.Pow(10, p.prominence/10)))
	if !t.ok {
		out.Why = "too short to tell"
		return out
	}
	out.FrequencyU = t.frequencyU
	if t.misfit < steady {
		out.Frequency, out.Amplitude = t.frequency, t.amplitude
	} else {
		// Kept going by wind or traffic, or several in one: the peak of the
		// spectrum, known to the width of the line over the cycles seen.
		width := math.Max(math.Abs(t.decay), 1/t.span)
		out.FrequencyU = math.Max(out.FrequencyU, math.Sqrt(width/(2*math.Pi)/(2*math.Pi*duration)))
	}
	lower, upper := math.Min(t.halves[0], t.halves[1]), math.Max(t.halves[0], t.halves[1])
	switch {
	case t.drop < straightDrop || t.decay <= 0:
		out.Why = fmt.Sprintf("falls by %.0f dB only", math.Max(0, t.drop))
		if t.misfit >= steady {
			out.Why = "does not die away: kept going, or beating"
		}
	case lower < (1-straightHalf)*upper:
		out.Why = fmt.Sprintf("bends: %.3g/s in its first half, %.3g/s in its second", t.halves[0], t.halves[1])
		out.Decay, out.DecayU = t.decay, math.Max(t.decayU, (upper-lower)/2)
	case t.rms > straightRMS:
		out.Why = fmt.Sprintf("beats: %.1f dB rms about its line", t.rms)
		out.Decay, out.DecayU = t.decay, math.Max(t.decayU, (upper-lower)/2)
	default:
		out.Straight, out.Decay, out.DecayU = true, t.decay, t.decayU
	}
	return out
}
