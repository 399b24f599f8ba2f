package characteristic

import "math"

// strips keeps, of one wave of a lattice, the integrals of its rate squared over
// each step in which it left its end. A strip between two characteristics carries
// its own across the piece, less the loss, so that only their sum is kept.
type strips struct {
	left  []float64 // m^2/s at the end, of the strip at point j: left[(now-j) % len]
	now   int
	fade  float64   // of a square, a step
	power []float64 // fade^j
	total float64   // over all points, each with its own loss
}

func newStrips(cells int, e float64) strips {
	s := strips{left: make([]float64, cells+1), power: make([]float64, cells+1), fade: e * e}
	for j := range s.power {
		s.power[j] = math.Pow(e, 2*float64(j))
	}
	return s
}

// depart moves all strips on by a point and adds the one that has just left.
func (s *strips) depart(square float64) {
	n := len(s.left) - 1
	s.now++
	last := &s.left[s.now%(n+1)] // was at the last point
	s.total = s.fade*(s.total-s.power[n]**last) + square
	*last = square
}

// add adds to the strip at point j.
func (s *strips) add(j int, square float64) {
	s.total += square
	n := len(s.left)
	s.left[(s.now-j+n)%n] += square / s.power[j]
}

// sum is that over all points, those at the ends by half.
func (s *strips) sum() float64 {
	n := len(s.left)
	return s.total - 0.5*(s.left[s.now%n]+s.power[n-1]*s.left[(s.now+1)%n])
}

// together is the integral over t0 .. t1 of the rates of two histories, the
// second read with a lag, by Gauss's three points on panels of two samples at
// most, cut at the breaks of both.
func together(a, b *history, lag, t0, t1 float64) float64 {
	places, weights := gauss()
	sum := 0.0
	i, j := a.after(t0, 1), b.after(t0-lag, 1)
	for t0 < t1 {
		end := t1
		if i < len(a.breaks) && a.breaks[i].t < end {
			end = a.breaks[i].t
		}
		if j < len(b.breaks) && b.breaks[j].t+lag < end {
			end = b.breaks[j].t + lag
		}
		if i < len(a.breaks) && a.breaks[i].t <= end {
			i++
		}
		if j < len(b.breaks) && b.breaks[j].t+lag <= end {
			j++
		}
		if end-t0 > a.tol {
			n := math.Ceil((end - t0) * a.inv / 2)
			h := (end - t0) / n
			for k := 0.0; k < n; k++ {
				for g, x := range places {
					t := t0 + (k+x)*h
					sum += weights[g] * h * a.at(t, 1, 1) * b.at(t-lag, 1, 1)
				}
			}
		}
		t0 = end
	}
	return sum
}
