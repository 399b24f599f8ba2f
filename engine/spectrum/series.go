package spectrum

import (
	"math"
	"sort"
)

// Series is a stiff string's: f_n = n f0 sqrt(1 + B n^2).
// Source: Fletcher, J. Acoust. Soc. Am. 36 (1964) 203-209, from memory.
type Series struct {
	F0, F0U float64 // Hz, of the ideal string
	B, BU   float64
	Order   []int   // of each peak given; 0: it does not belong
	RMS     float64 // relative, of those that belong
}

// guessPeaks strongest peaks over each number up to guessOrders give first guesses.
const (
	guessPeaks  = 8
	guessOrders = 6
)

// FitSeries numbers peaks as partials of one stiff string and fits f0 and B. Every
// first guess of f0 from a strong peak over a small number is tried, the one that takes
// in the strongest peaks with the fewest orders skipped wins; then numbers and fit
// are renewed in turn, and partials more than four robust deviations off are left
// out. ok is false where fewer than four peaks make a series.
func FitSeries(peaks []Peak) (s Series, ok bool) {
	if len(peaks) < 4 {
		return Series{}, false
	}
	best := math.Inf(-1)
	strongest := make([]int, len(peaks))
	for i := range strongest {
		strongest[i] = i
	}
	sort.Slice(strongest, func(a, b int) bool { return peaks[strongest[a]].Level > peaks[strongest[b]].Level })
	for _, i := range strongest[:min(len(peaks), guessPeaks)] {
		for n := 1; n <= guessOrders; n++ {
			t := Series{F0: peaks[i].Frequency / float64(n)}
			if !t.settle(peaks) {
				continue
			}
			if score := t.score(peaks); score > best {
				best, s, ok = score, t, true
			}
		}
	}
	return s, ok
}

// score prefers series that take in many peaks, strong ones first, and that leave
// few of their own partials out.
func (s *Series) score(peaks []Peak) float64 {
	in, top := 0.0, 0
	for i, n := range s.Order {
		if n > 0 {
			in += 1 + (70+peaks[i].Level)/70
			top = max(top, n)
		} else {
			in -= 0.5
		}
	}
	count := 0
	for _, n := range s.Order {
		if n > 0 {
			count++
		}
	}
	return in - 0.8*float64(top-count)
}

// settle numbers and fits until nothing changes.
func (s *Series) settle(peaks []Peak) bool {
	for round := range 12 {
		order := s.number(peaks, round)
		same := round > 2 && equal(order, s.Order)
		s.Order = order
		if !s.fit(peaks) {
			return false
		}
		if same {
			break
		}
	}
	s.drop(peaks)
	count := 0
	for _, n := range s.Order {
		if n > 0 {
			count++
		}
	}
	return count >= 4 && s.fit(peaks)
}

func equal(a, b []int) bool {
	if len(a) != len(b) {
		return false
	}
	for i := range a {
		if a[i] != b[i] {
			return false
		}
	}
	return true
}

// at is partial n.
func (s *Series) at(n float64) float64 { return n * s.F0 * math.Sqrt(1+s.B*n*n) }

// number gives each peak the nearest order; of two for one order the nearer stays.
// In early rounds only low orders are believed: B is not known yet.
func (s *Series) number(peaks []Peak, round int) []int {
	order := make([]int, len(peaks))
	limit := 6 * (round + 1)
	taken := map[int]int{}
	for i := range peaks {
		f := peaks[i].Frequency
		n := 1.0
		for range 8 { // n f0 sqrt(1+B n^2) = f, by repeated division
			n = f / (s.F0 * math.Sqrt(1+s.B*n*n))
		}
		k := int(math.Round(n))
		if k < 1 || k > limit && round < 10 || math.Abs(s.at(float64(k))-f) > 0.2*s.F0 {
			continue
		}
		if j, is := taken[k]; is {
			if math.Abs(peaks[j].Frequency-s.at(float64(k))) <= math.Abs(f-s.at(float64(k))) {
				continue
			}
			order[j] = 0
		}
		order[i], taken[k] = k, i
	}
	return order
}

// fit is linear: (f/n)^2 = f0^2 + f0^2 B n^2, with equal relative weights.
func (s *Series) fit(peaks []Peak) bool {
	var w, x, y, xx, xy float64
	count := 0
	for i, n := range s.Order {
		if n == 0 {
			continue
		}
		v := math.Pow(peaks[i].Frequency/float64(n), 2)
		g, n2 := 1/(v*v), float64(n*n) // (df/f)^2 = (dv/2v)^2
		w, x, y, xx, xy = w+g, x+g*n2, y+g*v, xx+g*n2*n2, xy+g*n2*v
		count++
	}
	det := w*xx - x*x
	if count < 3 || !(det > 1e-12*w*xx) {
		if count < 1 {
			return false
		}
		s.F0, s.B = math.Sqrt(y/w), 0
		return true
	}
	a, b := (xx*y-x*xy)/det, (w*xy-x*y)/det
	if a <= 0 {
		return false
	}
	s.F0, s.B = math.Sqrt(a), math.Max(b/a, 0)
	sum := 0.0
	for i, n := range s.Order {
		if n > 0 {
			d := peaks[i].Frequency/s.at(float64(n)) - 1
			sum += d * d
		}
	}
	s.RMS = math.Sqrt(sum / float64(count))
	if count > 2 {
		variance := 4 * sum / float64(count-2) // of v/v
		ua, ub := variance*xx/det, variance*w/det
		s.F0U = math.Sqrt(ua) / (2 * s.F0)
		// B = b/a: its doubt from both, with their covariance -x/det.
		s.BU = math.Sqrt(ub+s.B*s.B*ua+2*s.B*variance*x/det) / a
	}
	return true
}

// drop leaves out partials further than four robust deviations, at least a cent.
func (s *Series) drop(peaks []Peak) {
	const cent = 5.778e-4 // 2^(1/1200) - 1
	for range 4 {
		var off []float64
		for i, n := range s.Order {
			if n > 0 {
				off = append(off, math.Abs(peaks[i].Frequency/s.at(float64(n))-1))
			}
		}
		if len(off) < 5 {
			return
		}
		sort.Float64s(off)
		limit := math.Max(cent, 4*1.4826*off[len(off)/2])
		changed := false
		for i, n := range s.Order {
			if n > 0 && math.Abs(peaks[i].Frequency/s.at(float64(n))-1) > limit {
				s.Order[i], changed = 0, true
			}
		}
		if !changed || !s.fit(peaks) {
			return
		}
	}
}
