package spectrum

import (
	"fmt"
	"math"
)

// Expected is one arrival that a pulse ledger foretells.
type Expected struct {
	Time float64 // s, after the first arrival of the list, which has 0
	Sign int     // +1 or -1 against the first
}

// Arrival is what a record shows near an expected arrival.
type Arrival struct {
	Expected
	Found       bool    // the pulse stands out of what lies around it
	Seen, U     float64 // s after the first arrival, and one standard uncertainty; NaN where not found
	Correlation float64 // of the pulse there with the first, -1 to 1
	SignAgrees  bool
}

// How arrivals are told. Chosen.
const (
	onsetNoise = 6.0 // times the rms before it that an onset must reach
	arrivalMin = 0.5 // correlation from which a pulse counts as found
	// Noise of n samples correlates by 1/sqrt(n) in standard deviation: so many of
	// them are no chance, even where a hundred places are tried.
	arrivalChance = 4.5
)

// Onset is the sample at which a pulse begins: where the record first exceeds six
// times the rms of its first twentieth, which must be quiet. Drawn back to the
// least of Akaike's measure for two stretches of different variance,
//
//	k log var(x[:k]) + (n-k-1) log var(x[k:]),
//
// over the stretch before and after. ok is false where nothing stands out.
// Source: Maeda, Zisin 38 (1985) 365-379, from memory.
func Onset(x []float64) (at int, ok bool) {
	quiet := len(x) / 20
	if quiet < 16 {
		return 0, false
	}
	m, power := mean(x[:quiet]), 0.0
	for _, v := range x[:quiet] {
		power += (v - m) * (v - m) / float64(quiet)
	}
	over := -1
	for i, v := range x {
		if math.Abs(v-m) > onsetNoise*math.Sqrt(power) {
			over = i
			break
		}
	}
	if over < quiet/2 {
		return 0, false
	}
	from, to := max(0, over-quiet), min(len(x), over+quiet/4+2)
	part := x[from:to]
	n := len(part)
	sum, squares := make([]float64, n+1), make([]float64, n+1)
	for i, v := range part {
		sum[i+1], squares[i+1] = sum[i]+v-m, squares[i]+(v-m)*(v-m)
	}
	variance := func(a, b int) float64 {
		c := float64(b - a)
		mu := (sum[b] - sum[a]) / c
		return math.Max((squares[b]-squares[a])/c-mu*mu, 1e-12*power)
	}
	least, best := math.Inf(1), over-from
	for k := 2; k < n-2; k++ {
		if v := float64(k)*math.Log(variance(0, k)) + float64(n-k-1)*math.Log(variance(k, n)); v < least {
			least, best = v, k
		}
	}
	return from + best, true
}

// MatchArrivals looks for a pulse near each expected arrival. The pulse is what the
// record holds for a width from the first arrival on; within a search time about
// each expected one the place of largest correlation by size is taken, between
// samples by the parabola. The uncertainty is the Cramer-Rao bound of a delay in
// white noise, both copies noisy: sqrt(2) noise/|pulse'|, with the noise that the
// scaled pulse leaves.
//
// first is the sample of the first arrival, by Onset or by hand; width and search
// in s. An expected arrival that lies too close to the end, or whose search would
// reach the first pulse itself, is not found.
func MatchArrivals(x []float64, rate float64, first int, width, search float64, expected []Expected) ([]Arrival, error) {
	n, reach := int(width*rate), int(math.Ceil(search*rate))
	if n < 32 || first < 0 || first+n > len(x) || reach < 1 {
		return nil, fmt.Errorf("a pulse of %.4g s from sample %d on must hold 32 samples and fit into %d at %.6g Hz", width, first, len(x), rate)
	}
	pulse := make([]float64, n)
	m := mean(x[first : first+n])
	energy, steep := 0.0, 0.0
	for i := range pulse {
		pulse[i] = x[first+i] - m
		energy += pulse[i] * pulse[i]
		if i > 0 {
			d := (pulse[i] - pulse[i-1]) * rate
			steep += d * d
		}
	}
	if energy == 0 || steep == 0 {
		return nil, fmt.Errorf("there is no pulse at sample %d", first)
	}
	out := make([]Arrival, len(expected))
	for k, e := range expected {
		a := &out[k]
		*a = Arrival{Expected: e, Seen: math.NaN(), U: math.NaN()}
		centre := first + int(math.Round(e.Time*rate))
		if centre-reach < first+n || centre+reach+n > len(x) {
			if e.Time == 0 {
				a.Found, a.Seen, a.U, a.Correlation, a.SignAgrees = true, 0, 0, 1, e.Sign >= 0
			}
			continue
		}
		c := make([]float64, 2*reach+1)
		best := 0
		for i := range c {
			c[i] = correlation(pulse, x[centre-reach+i:centre-reach+i+n], energy)
			if math.Abs(c[i]) > math.Abs(c[best]) {
				best = i
			}
		}
		a.Correlation = c[best]
		if math.Abs(c[best]) < math.Max(arrivalMin, arrivalChance/math.Sqrt(float64(n))) || best == 0 || best == len(c)-1 {
			continue
		}
		at := float64(centre-reach+best) + parabola(math.Abs(c[best-1]), math.Abs(c[best]), math.Abs(c[best+1]))
		a.Found, a.Seen, a.SignAgrees = true, (at-float64(first))/rate, c[best] > 0 == (e.Sign > 0)
		scale, rest := fitScale(pulse, x[centre-reach+best:centre-reach+best+n], energy)
		a.U = math.Sqrt(2*rest/(scale*scale*steep) + 1.0/(12*16)/(rate*rate)) // and a quarter of a sample's grain
	}
	return out, nil
}

// correlation is the normalised one of a centred pulse with a stretch.
func correlation(pulse, part []float64, energy float64) float64 {
	m := mean(part)
	top, own := 0.0, 0.0
	for i, p := range pulse {
		v := part[i] - m
		top += p * v
		own += v * v
	}
	if own == 0 {
		return 0
	}
	return top / math.Sqrt(energy*own)
}

// fitScale is the factor of the pulse that fits a stretch best, and the variance
// that is left.
func fitScale(pulse, part []float64, energy float64) (scale, rest float64) {
	m := mean(part)
	for i, p := range pulse {
		scale += p * (part[i] - m) / energy
	}
	for i, p := range pulse {
		d := part[i] - m - scale*p
		rest += d * d / float64(len(pulse))
	}
	return scale, rest
}

// parabola is where the parabola through three evenly spaced values has its top,
// in steps from the middle one.
func parabola(a, b, c float64) float64 {
	bend := a - 2*b + c
	if bend >= 0 {
		return 0
	}
	return math.Max(-0.5, math.Min(0.5, 0.5*(a-c)/bend))
}
