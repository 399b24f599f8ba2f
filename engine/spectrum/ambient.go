package spectrum

import (
	"math"

	"gonum.org/v1/gonum/dsp/fourier"
)

// A record that wind or traffic keeps going has no line to fit: its spectrum is
// rough, and only the mean over many segments shows where its resonances lie.
const (
	ambientGroups = 8   // stretches of the record that are held against one another
	ambientAbove  = 6.0 // dB above the noise around: sixteen segments scatter by 1.2
	ambientSaddle = 5.0 // dB down to a higher neighbour
	ambientPad    = 4   // zeros, so that the ends of what is summed lie where they should
	ambientShare  = 8.0 // of a peak's top: where what is summed ends
)

// goesOn tells whether a vibration goes on to the record's end: its last quarter
// holds at least a third of the power of its first.
func goesOn(x []float64) bool {
	q := len(x) / 4
	power := func(part []float64) float64 {
		m, sum := mean(part), 0.0
		for _, v := range part {
			sum += (v - m) * (v - m)
		}
		return sum
	}
	return q > 0 && power(x[len(x)-q:]) > power(x[:q])/3
}

func mean(x []float64) float64 {
	sum := 0.0
	for _, v := range x {
		sum += v
	}
	return sum / float64(len(x))
}

// resonance is a peak of the averaged spectrum.
type resonance struct {
	frequency, u float64 // Hz, and one standard uncertainty
	level        float64 // dB, as that of a line of the same power
	prominence   float64 // dB
	from, to     float64 // Hz, where it stands above an eighth of its top
}

// ambient finds the resonances of a record that goes on: peaks of the mean of
// sixteen segments (Hann window, half overlap), each placed at the centre of what
// stands above an eighth of it. The uncertainty is that of the jackknife over
// eight stretches of the record, with Student's factor for seven degrees of freedom.
// Source of the jackknife: Efron and Stein, Ann. Stat. 9 (1981) 586-596, from memory.
func (b *band) ambient() []resonance {
	n := 64
	for 2*n*ambientGroups <= len(b.x) {
		n *= 2
	}
	if n*ambientGroups > len(b.x) {
		return nil
	}
	groups := b.groups(n)
	whole := average(groups, -1)
	step := b.rate / float64(ambientPad*n)
	db := make([]float64, len(whole))
	for k, p := range whole {
		db[k] = 10 * math.Log10(math.Max(p, 1e-300))
	}
	const width = 2 * ambientPad // half the main lobe of the Hann window, bins
	floor := runningMedian(db, width)
	first, last := max(width+1, int(math.Ceil(b.low/step))), min(len(db)-width-2, int(b.high/step))
	var out []resonance
	for k := first; k <= last; k++ {
		if db[k] < floor[k]+ambientAbove || !highest(db, k, width) || saddle(db, k) < ambientSaddle {
			continue
		}
		from, to := k, k
		for from > 1 && whole[from-1] > whole[k]/ambientShare {
			from--
		}
		for to < len(whole)-2 && whole[to+1] > whole[k]/ambientShare {
			to++
		}
		from, to = min(from, k-1), max(to, k+1)
		base := math.Pow(10, floor[k]/10)
		centre, power := centreOf(whole, from, to, base)
		spread, apart := 0.0, 0.0
		for g := range groups {
			c, _ := centreOf(average(groups, g), from, to, base)
			spread += (c - centre) * (c - centre)
			if own, power := centreOf(groups[g], from, to, base); power > 0 {
				apart += (own - centre) * (own - centre)
			}
		}
		count := float64(len(groups))
		// The jackknife weighs by power and says too little where one gust holds most
		// of it; the scatter of the stretches' own centres does not.
		spread = math.Max(spread*(count-1)/count, apart/(count*(count-1)))
		const student = 2.365 / 1.960 // 97.5 % points, 7 degrees of freedom over many
		u := student * math.Sqrt(spread)
		u = math.Max(u*step, b.ambientBound(whole, k, n))
		out = append(out, resonance{
			frequency: centre * step, u: u, level: 10 * math.Log10(2*power*step), prominence: db[k] - floor[k],
			from: float64(from) * step, to: float64(to) * step,
		})
	}
	return out
}

// ambientBound is the uncertainty that even the best estimate has: sqrt(W/(4 pi T))
// for a resonance of half-power width W (two damping ratios times the frequency)
// over a record of length T. Where W is less than the window's own width, the
// stretches are not independent of one another and the jackknife says too little.
// Source: Au, Mech. Syst. Signal Process. 48 (2014) 15-33, var f/f^2 = zeta/(2 pi f T)
// for a high signal-to-noise ratio and a wide band, from memory.
func (b *band) ambientBound(power []float64, top, n int) float64 {
	low, high := top, top
	for low > 0 && power[low] > power[top]/2 {
		low--
	}
	for high < len(power)-1 && power[high] > power[top]/2 {
		high++
	}
	window := 1.44 * b.rate / float64(n) // half-power width of the Hann window
	seen := float64(high-low) * b.rate / float64(ambientPad*n)
	width := math.Sqrt(math.Max(seen*seen-window*window, 0.1*window*window))
	return math.Sqrt(width / (4 * math.Pi * float64(len(b.x)) / b.rate))
}

// groups are the densities of eight stretches, each the mean of its segments.
func (b *band) groups(n int) [][]float64 {
	w, power := hann(n), 0.0
	for _, v := range w {
		power += v * v
	}
	size := ambientPad * n
	fft := fourier.NewFFT(size)
	part, c := make([]float64, size), make([]complex128, size/2+1)
	out := make([][]float64, ambientGroups)
	long := len(b.x) / ambientGroups
	for g := range out {
		out[g] = make([]float64, size/2+1)
		x := b.x[g*long : (g+1)*long]
		count := 0
		for at := 0; at+n <= len(x); at += n / 2 {
			m := mean(x[at : at+n])
			for i := range w {
				part[i] = (x[at+i] - m) * w[i]
			}
			c = fft.Coefficients(c, part)
			for k, v := range c {
				out[g][k] += 2 * (real(v)*real(v) + imag(v)*imag(v)) / (b.rate * power)
			}
			count++
		}
		for k := range out[g] {
			out[g][k] /= float64(count)
		}
	}
	return out
}

// average is the mean of the groups but one; -1: of all.
func average(groups [][]float64, without int) []float64 {
	out := make([]float64, len(groups[0]))
	count := 0
	for g, p := range groups {
		if g == without {
			continue
		}
		count++
		for k, v := range p {
			out[k] += v
		}
	}
	for k := range out {
		out[k] /= float64(count)
	}
	return out
}

// centreOf is the centre, in bins, and the sum of what stands above a base.
func centreOf(power []float64, from, to int, base float64) (centre, sum float64) {
	moment := 0.0
	for k := from; k <= to; k++ {
		v := math.Max(0, power[k]-base)
		sum += v
		moment += v * float64(k)
	}
	return moment / sum, sum
}

// keptGoing is what is said of a resonance instead of a decay.
const keptGoing = "kept going by wind or traffic: no decay is on record"

// overAmbient puts the resonances in the place of those peaks that no single
// decaying line explains, and which are the roughness of a resonance's spectrum.
func (r *Result) overAmbient(found []resonance, strongest, limit float64) {
	for _, a := range found {
		known := false
		kept := r.Peaks[:0]
		for _, p := range r.Peaks {
			inside := p.Frequency > a.from-(a.to-a.from) && p.Frequency < a.to+(a.to-a.from)
			known = known || inside && p.single
			if !inside || p.single {
				kept = append(kept, p)
			}
		}
		r.Peaks = kept
		if !known {
			r.Peaks = append(r.Peaks, Peak{
				Frequency: a.frequency, FrequencyU: a.u, Level: a.level - strongest, Prominence: a.prominence,
				Amplitude: math.NaN(), Decay: math.NaN(), DecayU: math.NaN(), Why: keptGoing, NearLimit: a.frequency > 0.8*limit,
			})
		}
	}
}
