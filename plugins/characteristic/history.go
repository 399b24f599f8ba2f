package characteristic

import "math"

// breakpoint is a moment at which a history or a derivative of it jumps.
type breakpoint struct {
	t           float64 // s
	left, right float64 // m, limits from both sides
	weight      float64 // strength relative to where it started
	order       int     // lowest derivative that jumps: 1 slope, 2 curvature, ...
}

// history is what left one end of a piece during the last travel time, sampled
// at times k*delta, in a ring. Breaks are kept apart, at their exact times.
type history struct {
	delta, inv float64 // s, 1/s
	buf        []float64
	mask       int
	newest     int // number of the newest sample
	tol        float64
	breaks     []breakpoint // sorted by time; never grows beyond its capacity
	dropped    int          // breaks forgotten so far: breaks[i] has number dropped+i
}

// Degrees of the interpolation: quintic on six equally spaced samples, cubic on
// four knots beside a break. In the central interval neither amplifies any
// frequency (Laakso and co-workers 1996), so that a wave that is read again and
// again does not grow.
const (
	wide   = 6
	narrow = 4
	// skip: samples nearer to a break than this share of a step are left out
	// of stencils; the break's own value stands for them. Chosen: differences
	// of values closer than that blow up what separates the two computations.
	skip = 0.2
)

func newHistory(delta, span float64, breaks int, tol float64) *history {
	size := ringSize(delta, span)
	return &history{delta: delta, inv: 1 / delta, buf: make([]float64, size), mask: size - 1,
		tol: tol, breaks: make([]breakpoint, 0, breaks)}
}

// ringSize is the number of samples of a ring that holds span, a power of two.
func ringSize(delta, span float64) int {
	need := math.Ceil(span/delta) + 2*wide
	size := 16
	for float64(size) < need {
		size *= 2
	}
	return size
}

func (h *history) push(v float64) {
	h.newest++
	h.buf[h.newest&h.mask] = v
}

// put writes sample k, which is the newest or the one after it.
func (h *history) put(k int, v float64) {
	h.buf[k&h.mask] = v
	h.newest = max(h.newest, k)
}

func (h *history) get(k int) float64 { return h.buf[k&h.mask] }

// mark adds a break after all earlier ones and tells whether there was room.
// Breaks that the ring no longer reaches back to are forgotten first.
func (h *history) mark(b breakpoint) bool {
	if n := len(h.breaks); n > 0 && b.t <= h.breaks[n-1].t+h.tol {
		last := &h.breaks[n-1]
		last.right = b.right
		last.weight += b.weight
		last.order = min(last.order, b.order)
		return true
	}
	if len(h.breaks) == cap(h.breaks) {
		horizon := float64(h.newest-len(h.buf)) * h.delta
		gone := 0
		for gone < len(h.breaks) && h.breaks[gone].t < horizon {
			gone++
		}
		if gone == 0 {
			return false
		}
		copy(h.breaks, h.breaks[gone:])
		h.breaks = h.breaks[:len(h.breaks)-gone]
		h.dropped += gone
	}
	h.breaks = append(h.breaks, b)
	return true
}

// after is the index of the first break later than t; a break within the
// tolerance of t counts as later for side < 0 and as earlier else.
func (h *history) after(t float64, side int) int {
	limit := t + h.tol
	if side < 0 {
		limit = t - h.tol
	}
	lo, hi := 0, len(h.breaks)
	for lo < hi {
		mid := (lo + hi) / 2
		if h.breaks[mid].t > limit {
			hi = mid
		} else {
			lo = mid + 1
		}
	}
	return lo
}

// at is the d-th derivative (d = 0, 1, 2) of the history at time t, from the
// left or the right of a break there. Error O(delta^(6-d)) away from breaks,
// O(delta^(4-d)) beside one, on what is smooth between breaks.
func (h *history) at(t float64, side, d int) float64 {
	p, dp, ddp := h.jet(t, side)
	switch d {
	case 0:
		return p
	case 1:
		return dp * h.inv
	}
	return ddp * h.inv * h.inv
}

// jet is the value and its first two derivatives by the number of samples; see at.
func (h *history) jet(t float64, side int) (p, dp, ddp float64) {
	i := h.after(t, side)
	pos := t * h.inv
	k := int(math.Floor(pos))
	kmin, kmax := h.newest-len(h.buf)+1, h.newest
	if i > 0 {
		if k2 := int(math.Floor(h.breaks[i-1].t*h.inv+skip)) + 1; k2 > kmin {
			kmin = k2
		}
	}
	if i < len(h.breaks) {
		if k2 := int(math.Ceil(h.breaks[i].t*h.inv-skip)) - 1; k2 < kmax {
			kmax = k2
		}
	}
	kmax = max(kmax, kmin-1) // two breaks with nothing between
	if k-2 >= kmin && k+3 <= kmax {
		var v [wide]float64
		for j := range v {
			v[j] = h.get(k - 2 + j)
		}
		return uniform(&v, pos-float64(k)+2)
	}
	return h.beside(pos, k, kmin, kmax, i)
}

// beside reads near a break or the newest end: up to four knots, among them the
// value at the break itself.
func (h *history) beside(pos float64, k, kmin, kmax, i int) (p, dp, ddp float64) {
	first, last := kmin, kmax
	if i > 0 {
		first = kmin - 1
	}
	if i < len(h.breaks) {
		last = kmax + 1
	}
	if k < kmin {
		k = kmin - 1
	}
	if k > kmax {
		k = kmax
	}
	start := min(k-1, last-narrow+1)
	start = max(start, first)
	n := min(narrow, last-start+1)
	var x, v [wide]float64
	for j := 0; j < n; j++ {
		switch q := start + j; {
		case q < kmin:
			x[j], v[j] = h.breaks[i-1].t*h.inv-pos, h.breaks[i-1].right
		case q > kmax:
			x[j], v[j] = h.breaks[i].t*h.inv-pos, h.breaks[i].left
		default:
			x[j], v[j] = float64(q)-pos, h.get(q)
		}
	}
	return divided(&x, &v, n)
}

// newton is the d-th derivative at 0 of the polynomial through n points (x, v),
// scaled by inv^d, by divided differences.
func newton(x, v *[wide]float64, n, d int, inv float64) float64 {
	p, dp, ddp := divided(x, v, n)
	switch d {
	case 0:
		return p
	case 1:
		return dp * inv
	}
	return ddp * inv * inv
}

func divided(x, v *[wide]float64, n int) (p, dp, ddp float64) {
	if n < 1 {
		return 0, 0, 0
	}
	for j := 1; j < n; j++ {
		for i := n - 1; i >= j; i-- {
			v[i] = (v[i] - v[i-1]) / (x[i] - x[i-j])
		}
	}
	p = v[n-1]
	for i := n - 2; i >= 0; i-- {
		ddp = 2*dp - ddp*x[i]
		dp = p - dp*x[i]
		p = v[i] - p*x[i]
	}
	return p, dp, ddp
}

// uniform is divided for six values at 0, 1, ... 5, evaluated at x.
func uniform(v *[wide]float64, x float64) (p, dp, ddp float64) {
	recip := [wide]float64{0, 1, 0.5, 1.0 / 3, 0.25, 0.2}
	for j := 1; j < wide; j++ {
		for i := wide - 1; i >= j; i-- {
			v[i] = (v[i] - v[i-1]) * recip[j]
		}
	}
	p = v[wide-1]
	for i := wide - 2; i >= 0; i-- {
		y := x - float64(i)
		ddp = 2*dp + ddp*y
		dp = p + dp*y
		p = v[i] + p*y
	}
	return p, dp, ddp
}

// lagrange fills w with the weights of samples -2 .. 3 for a value at theta in
// [0, 1] of the way from sample 0 to sample 1.
func lagrange(w *[wide]float64, theta float64) {
	for i := range w {
		p := 1.0
		for j := range w {
			if j != i {
				p *= (theta + 2 - float64(j)) / float64(i-j)
			}
		}
		w[i] = p
	}
}

// leaky is the integral of exp(-gamma (b-t)) times the history over a .. b, and
// that of its rate squared, by Gauss's three points on panels of two samples at
// most, cut at breaks.
func (h *history) leaky(gamma, a, b float64) (sum, square float64) {
	places, weights := gauss()
	for i := h.after(a, 1); a < b; i++ {
		end := b
		if i < len(h.breaks) && h.breaks[i].t < b {
			end = h.breaks[i].t
		}
		n := math.Ceil((end - a) * h.inv / 2)
		step := (end - a) / n
		for k := 0.0; k < n; k++ {
			for g, x := range places {
				t := a + (k+x)*step
				v, rate, _ := h.jet(t, 1)
				sum += weights[g] * step * math.Exp(-gamma*(b-t)) * v
				square += weights[g] * step * rate * rate
			}
		}
		if end == b {
			break
		}
		a = end
	}
	return sum, square * h.inv * h.inv
}

// reader reads a history that lags behind by a fixed delay. Where the lag is
// the same share of a sample at every step, the weights are prepared.
type reader struct {
	h      *history
	delay  float64 // s
	factor float64 // what the delay leaves of it
	ratio  int     // sender's samples per step of the reader; 0: not a whole number
	whole  [2]int  // samples back, for the step's end and its middle
	weight [2][wide]float64
	cursor int // number of the first break that may still be near
	event  int // number of the first break that has not arrived
}

// prepare fixes the weights for a reader that steps by delta.
func (r *reader) prepare(delta float64) {
	r.ratio = 0
	q := delta * r.h.inv
	if n := math.Round(q); n >= 1 && math.Abs(q-n) < 1e-9*n {
		r.ratio = int(n)
	}
	for i, lag := range [2]float64{r.delay, r.delay + delta/2} {
		back := math.Ceil(lag * r.h.inv)
		r.whole[i] = int(back)
		lagrange(&r.weight[i], back-lag*r.h.inv)
	}
}

// step reads at the end (which = 0) or the middle (which = 1) of the reader's
// step number k, which ends at time t.
func (r *reader) step(k int, t float64, which int) float64 {
	h := r.h
	now := t - r.delay
	i := r.cursor - h.dropped
	if i < 0 {
		i = 0
	}
	for i < len(h.breaks) && h.breaks[i].t < now-(wide/2)*h.delta {
		i++
	}
	r.cursor = i + h.dropped
	base := k*r.ratio - r.whole[which]
	if r.ratio == 0 || base+3 > h.newest || (i < len(h.breaks) && h.breaks[i].t < now+(wide/2+1)*h.delta) {
		return r.factor * h.at(now, -1, 0)
	}
	w := &r.weight[which]
	base -= 2
	var s float64
	if lo := base & h.mask; lo+wide <= len(h.buf) {
		b := h.buf[lo : lo+wide : lo+wide]
		s = w[0]*b[0] + w[1]*b[1] + w[2]*b[2] + w[3]*b[3] + w[4]*b[4] + w[5]*b[5]
	} else {
		for j := range w {
			s += w[j] * h.get(base+j)
		}
	}
	return r.factor * s
}

func (r *reader) at(t float64, side, d int) float64 {
	return r.factor * r.h.at(t-r.delay, side, d)
}

// next is the time at which the next break arrives.
func (r *reader) next() (float64, *breakpoint) {
	i := r.event - r.h.dropped
	if i < 0 {
		i, r.event = 0, r.h.dropped
	}
	if i >= len(r.h.breaks) {
		return math.Inf(1), nil
	}
	return r.h.breaks[i].t + r.delay, &r.h.breaks[i]
}
