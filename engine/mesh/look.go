package mesh

import "math"

// sampled is what looks at a function over [0, width] show.
type sampled struct {
	value, change float64 // integrals of f^2 and f'^2
	most, slope   float64 // largest |f| and |f'|
}

// Numbers of looks; chosen. A record of a million rows costs no more than one of
// ten thousand.
const (
	overall  = 4000 // evenly over the whole
	windows  = 16   // stretches that are looked at more closely
	inWindow = 500  // looks in each
)

// sample looks at f inside the ends of [0, width], so that a jump at an end does
// not count. Where even looks would lie further apart than half of every, which
// makes fast things look slow, stretches spread over the width and one about the
// largest value seen are looked at that closely too, and the quicker of the two
// impressions counts. Cost: at most 12,500 looks.
func sample(f func(float64) float64, width, every float64) sampled {
	h := width / (overall + 2)
	s, peak := stretchOf(f, h, h, overall)
	if !(every > 0) || h <= every/2 {
		return s
	}
	fine := every / 2
	long := fine * inWindow
	var near sampled
	for k := 0; k <= windows; k++ {
		from := h + (width-2*h-long)*(float64(k)+0.5)/windows
		if k == windows {
			from = math.Max(h, math.Min(peak-long/2, width-h-long))
		}
		w, _ := stretchOf(f, from, fine, inWindow)
		near.value += w.value
		near.change += w.change
		s.most, s.slope = math.Max(s.most, w.most), math.Max(s.slope, w.slope)
	}
	if near.value > 0 {
		s.change = math.Max(s.change, s.value*near.change/near.value)
	}
	return s
}

// stretchOf takes n steps of h from a place, and tells where |f| was largest.
func stretchOf(f func(float64) float64, from, h float64, n int) (s sampled, peak float64) {
	prev := f(from)
	for i := 1; i <= n; i++ {
		x := from + float64(i)*h
		v := f(x)
		if math.IsNaN(v) || math.IsInf(v, 0) {
			continue
		}
		s.value += h * (v*v + prev*prev) / 2
		s.change += (v - prev) * (v - prev) / h
		s.slope = math.Max(s.slope, math.Abs(v-prev)/h)
		if a := math.Abs(v); a > s.most {
			s.most, peak = a, x
		}
		prev = v
	}
	return s, peak
}
