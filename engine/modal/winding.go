package modal

import (
	"math"
	"math/cmplx"
)

// region is a rectangle of the s plane. With y0 = 0 it stands for the rectangle
// from -y1 to y1: Delta is real on the real axis, so that half the way round
// tells the whole.
type region struct {
	x0, x1, y0, y1 float64
}

// count is the number of zeros of Delta in the region by the argument principle:
// the change of the phase of Delta once round it, divided by 2 pi. It reports
// false where a zero lies so near the edge that the phase cannot be followed.
func (e *evaluator) count(r region) (int, bool) {
	corners := []complex128{complex(r.x1, r.y0), complex(r.x1, r.y1), complex(r.x0, r.y1), complex(r.x0, r.y0)}
	turn := math.Pi // half the way
	if r.y0 != 0 {
		corners = append(corners, corners[0])
		turn = 2 * math.Pi
	}
	sum := 0.0
	for i := 1; i < len(corners); i++ {
		d, ok := e.phase(corners[i-1], corners[i])
		if !ok {
			return 0, false
		}
		sum += d
	}
	n := math.Round(sum / turn)
	// 0.05: the sum is an integer to rounding unless a step was taken wrongly;
	// the largest departure seen is 1e-9.
	return int(n), math.Abs(sum/turn-n) < 0.05
}

// phase follows the phase of Delta along a straight way. A step is taken when it
// turns by less than 0.8 and the slopes at both its ends foretell the turn to
// 0.35; else it is halved. Steps grow no faster than the pattern of zeros can
// change: by their distance from the imaginary axis.
func (e *evaluator) phase(from, to complex128) (float64, bool) {
	length := cmplx.Abs(to - from)
	if length == 0 {
		return 0, true
	}
	dir := (to - from) / complex(length, 0)
	log0, slope0, ok := e.delta(from)
	if !ok {
		return 0, false
	}
	rate0 := imag(slope0 * dir)
	unit := length
	if e.w.travel > 0 {
		unit = math.Min(length, 0.5/e.w.travel)
	}
	sum, done, h := 0.0, 0.0, unit
	for done < length {
		s := from + complex(done, 0)*dir
		h = math.Min(h, math.Max(unit, 0.1*math.Abs(real(s))))
		last := h >= length-done
		if last {
			h = length - done
		}
		next := from + complex(done+h, 0)*dir
		if last {
			next = to
		}
		log1, slope1, ok := e.delta(next)
		if !ok {
			return 0, false
		}
		rate1 := imag(slope1 * dir)
		turn := math.Remainder(imag(log1)-imag(log0), 2*math.Pi)
		told := 0.5 * h * (rate0 + rate1)
		if math.Abs(turn) < 0.8 && math.Abs(turn-told) < 0.35 && h*math.Max(math.Abs(rate0), math.Abs(rate1)) < 1.6 {
			sum += turn
			done += h
			log0, rate0 = log1, rate1
			h *= 1.7
			if last {
				break
			}
			continue
		}
		h /= 2
		if h < 1e-10*length && h < 1e-9*cmplx.Abs(next) {
			return 0, false
		}
	}
	return sum, true
}

// inside is the number of known zeros in the region, counted as count does.
func (l *list) inside(r region) int {
	n := 0
	in := func(s complex128) bool {
		return real(s) > r.x0 && real(s) < r.x1 && imag(s) < r.y1 && (imag(s) > r.y0 || r.y0 == 0)
	}
	for _, z := range l.roots {
		if !in(z) {
			continue
		}
		n++
		if r.y0 == 0 && imag(z) > 0 {
			n++
		}
	}
	if r.y0 == 0 && r.x0 < 0 && r.x1 > 0 {
		n += l.e.w.zeros
	}
	return n
}

// complete makes the list hold every zero of a region and reports whether it
// does. Where the count tells that some are missing, the region is cut until
// Newton's method, started in the part that lacks them, finds them. It gives up
// when the list's allowance of work is spent.
func (l *list) complete(r region) bool {
	n, ok := l.e.count(r)
	return ok && l.fill(r, n)
}

// fill completes a region that holds n zeros.
func (l *list) fill(r region, n int) bool {
	before := math.MaxInt
	for {
		lack := n - l.inside(r)
		if lack <= 0 {
			return lack == 0
		}
		// Roots found outside are kept but do not help here.
		if lack > 2 || lack == before || !(l.again(r) || l.seek(r)) {
			break
		}
		before = lack
	}
	return l.divide(r, n)
}

// again looks for more zeros where some are known; true when the list grew.
func (l *list) again(r region) bool {
	if l.inside(r) > 6 {
		return false
	}
	for _, z := range l.roots {
		if real(z) > r.x0 && real(z) < r.x1 && imag(z) >= r.y0 && imag(z) < r.y1 && l.merge(z, false) {
			return true
		}
	}
	return false
}

// seek tries a few places of a region; true when the list grew.
func (l *list) seek(r region) bool {
	for _, f := range [...][2]float64{{0.5, 0.5}, {0.2, 0.3}, {0.8, 0.7}, {0.9, 0}, {0.4, 0}} {
		s := complex(r.x0+f[0]*(r.x1-r.x0), r.y0+f[1]*(r.y1-r.y0))
		if s == 0 {
			continue
		}
		if z, ok := l.e.newton(s, l.roots); ok && l.offer(z) {
			return true
		}
	}
	return false
}

// divide cuts a region with n zeros and fills both parts. A cut that a zero lies
// on is moved.
func (l *list) divide(r region, n int) bool {
	height := r.y1 - r.y0
	if r.y0 == 0 {
		height *= 2
	}
	for _, f := range [...]float64{0.5, 0.43, 0.59, 0.37, 0.66, 0.29} {
		if l.work <= 0 {
			return false
		}
		l.work--
		a, b := r, r
		if height > r.x1-r.x0 {
			y := r.y0 + f*(r.y1-r.y0)
			a.y1, b.y0 = y, y
		} else {
			x := r.x1 - f*(r.x1-r.x0)
			if r.x0 < -4*r.y1 && r.x1 > r.x0/4 { // far left is empty most often
				near := math.Min(r.x1, 0)
				x = near + 0.25*f*(r.x0-near)
			}
			a.x0, b.x1 = x, x
		}
		na, ok := l.e.count(a)
		if !ok {
			continue
		}
		nb := n - na
		if b.y0 > 0 && r.y0 == 0 { // r holds b's mirror image as well
			nb /= 2
		}
		okA := l.fill(a, na)
		return l.fill(b, nb) && okA
	}
	return false
}
