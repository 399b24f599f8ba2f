package fit

import (
	"fmt"
	"math"
	"sort"
	"strings"

	"gonum.org/v1/gonum/mat"
	"gonum.org/v1/gonum/stat/distuv"

	"github.com/tautspan/tautspan/engine/doubt"
)

// cover is what the curvature of the cost says of a solution.
type cover struct {
	p *Problem
	s *solution

	j          *mat.Dense
	covariance *mat.SymDense // of the coordinates, without the factor below
	open       []direction   // that no reading decides
	chi2       float64
	freedom    int
	// factor multiplies standard uncertainties: the root of chi2 by freedom where
	// the readings scatter more than they say.
	factor float64
	// k is the coverage factor of 95 %: 1.960, or Student's where the scatter of
	// few readings stands for their doubt.
	k       float64
	roughly bool // the slopes do not settle as their step is halved
}

// direction is a unit vector in the coordinates, with how far along it the
// ranges of the sought lets reach as a standard uncertainty.
type direction struct {
	v []float64
	u float64
}

// Limits of identifiability. A singular value of the slopes, columns scaled to
// one, below nullRatio of the largest is rounding.
const (
	nullRatio  = 1e-6
	material   = 0.05 // component of a direction that counts
	correlated = 0.95
	loose      = 0.3 // sd of a logarithm from which a let is only roughly known
	// profiled is the sd of a logarithm from which the ends of an interval are
	// found on the cost itself and not by its curvature. Chosen: the two differ by
	// a tenth of the interval's width there.
	profiled = 0.1
)

// cover works out the doubt of a solution.
func (p *Problem) cover(s *solution) (*cover, error) {
	c := &cover{p: p, s: s, factor: 1, k: doubt.TwoSided}
	if c.j = p.jacobian(s.x, s.q, s.modes, 0, difference, nil); c.j == nil {
		return nil, fmt.Errorf("fit: the model has no slopes at the solution")
	}
	c.check()
	rows, n := c.j.Dims()
	c.chi2, c.freedom = s.sum, rows-n
	c.invert()
	c.freedom += len(c.open)
	if c.freedom > 0 && c.chi2 > float64(c.freedom) {
		c.factor = math.Sqrt(c.chi2 / float64(c.freedom))
		c.k = distuv.StudentsT{Mu: 0, Sigma: 1, Nu: float64(c.freedom)}.Quantile(0.975)
	}
	return c, nil
}

// check holds the slopes against those of a step ten times as long.
func (c *cover) check() {
	again := c.p.jacobian(c.s.x, c.s.q, c.s.modes, 0, 10*difference, nil)
	if again == nil {
		c.roughly = true
		return
	}
	rows, n := c.j.Dims()
	for k := range n {
		size, off := 0.0, 0.0
		for i := range rows {
			size = math.Max(size, math.Abs(c.j.At(i, k)))
			off = math.Max(off, math.Abs(c.j.At(i, k)-again.At(i, k)))
		}
		c.roughly = c.roughly || off > 1e-3*size
	}
}

// invert makes the covariance (J'J)^-1 by the singular values of J with its
// columns scaled to one, and sets directions apart that J does not see.
func (c *cover) invert() {
	rows, n := c.j.Dims()
	scaled := mat.NewDense(max(rows, n), n, nil) // zero rows change nothing
	norm := make([]float64, n)
	for k := range n {
		for i := range rows {
			norm[k] = math.Hypot(norm[k], c.j.At(i, k))
		}
		if norm[k] == 0 {
			norm[k] = 1
		}
		for i := range rows {
			scaled.Set(i, k, c.j.At(i, k)/norm[k])
		}
	}
	var svd mat.SVD
	c.covariance = mat.NewSymDense(n, nil)
	if !svd.Factorize(scaled, mat.SVDThin) {
		return
	}
	var v mat.Dense
	svd.VTo(&v)
	values := svd.Values(nil)
	for s, value := range values {
		d := make([]float64, n)
		size := 0.0
		for k := range n {
			d[k] = v.At(k, s) / norm[k]
			size = math.Hypot(size, d[k])
		}
		u := 1 / value
		if value < nullRatio*values[0] {
			for k := range d {
				d[k] /= size
			}
			u = c.p.reach(d)
			c.open = append(c.open, direction{d, u})
		}
		for a := range n {
			for b := a; b < n; b++ {
				c.covariance.SetSym(a, b, c.covariance.At(a, b)+u*u*d[a]*d[b])
			}
		}
	}
}

// reach is how far along a direction the ranges go, as the standard uncertainty
// of a rectangle.
func (p *Problem) reach(d []float64) float64 {
	u := math.Inf(1)
	for k := range d {
		lo, hi := p.unknowns[k].bounds()
		if p.unknowns[k].sought && math.Abs(d[k]) > 1e-6 {
			u = math.Min(u, (hi-lo)/math.Sqrt(12)/math.Abs(d[k]))
		}
	}
	if math.IsInf(u, 1) {
		return 1
	}
	return u
}

// sd is the standard uncertainty of a coordinate, the factor included.
func (c *cover) sd(i int) float64 { return c.factor * math.Sqrt(math.Max(0, c.covariance.At(i, i))) }

// undecided tells whether an unknown has a part in a direction that is open.
func (c *cover) undecided(i int) bool {
	for _, d := range c.open {
		if math.Abs(d.v[i]) > material {
			return true
		}
	}
	return false
}

// atBound tells whether a sought let stands at an end of its range.
func (c *cover) atBound(i int) bool {
	lo, hi := c.p.unknowns[i].bounds()
	slack := 1e-6 * (hi - lo)
	return c.s.x[i] <= lo+slack || c.s.x[i] >= hi-slack
}

// interval is the 95 % interval of a sought let, never beyond its range.
func (c *cover) interval(i int) (low, high float64) {
	u := &c.p.unknowns[i]
	lo, hi := u.bounds()
	half := c.k * c.sd(i)
	a, b := c.s.x[i]-half, c.s.x[i]+half
	switch {
	case c.undecided(i):
		a, b = lo, hi
	case c.atBound(i) || c.sd(i) > profiled || a < lo || b > hi:
		a, b = c.profile(i, -1), c.profile(i, 1)
	}
	return u.value(math.Max(a, lo)), u.value(math.Min(b, hi))
}

// profile is where the cost, lowered over everything else, has risen by
// (k factor)^2 to one side of the solution; the end of the range where it does
// not rise so far. Found by the secant on the root of the rise, which is nearly
// straight.
func (c *cover) profile(i int, side float64) float64 {
	p := c.p
	lo, hi := p.unknowns[i].bounds()
	end := hi
	if side < 0 {
		end = lo
	}
	fixed := make([]bool, len(p.unknowns))
	fixed[i] = true
	x := append([]float64(nil), c.s.x...)
	rise := func(at float64) float64 {
		x[i] = at
		nx, _, sum := p.descend(x, p.predict(x), c.s.modes, 0, 25, fixed)
		if math.IsInf(sum, 1) {
			return math.Inf(1)
		}
		copy(x, nx)
		return math.Sqrt(math.Max(0, sum-c.s.sum)) / c.factor
	}
	from, height := c.s.x[i], 0.0
	step := math.Max(c.k*c.sd(i), 1e-4)
	if step > 1 || math.IsNaN(step) {
		step = 1
	}
	for round := 0; round < 30; round++ {
		at := from + side*step
		if side*(at-end) > 0 {
			at = end
		}
		h := rise(at)
		if h >= c.k {
			return c.secant(from, height, at, h, rise)
		}
		if at == end {
			return end
		}
		if h > height {
			step = math.Min(math.Abs(at-from)/(h-height)*(c.k-h)*1.05, 1)
			step = math.Max(step, 0.02)
		}
		from, height = at, h
	}
	return from
}

// secant narrows the place where the rise is k between two coordinates.
func (c *cover) secant(a, fa, b, fb float64, rise func(float64) float64) float64 {
	for round := 0; round < 12 && math.Abs(fb-fa) > 1e-3; round++ {
		mid := (a + b) / 2
		if !math.IsInf(fb, 1) {
			mid = a + (c.k-fa)/(fb-fa)*(b-a)
		}
		f := rise(mid)
		if math.Abs(f-c.k) < 2e-3*c.k {
			return mid
		}
		if f < c.k {
			a, fa = mid, f
		} else {
			b, fb = mid, f
		}
	}
	if math.IsInf(fb, 1) || fb == fa {
		return a
	}
	return a + (c.k-fa)/(fb-fa)*(b-a)
}

// correlation of two unknowns.
func (c *cover) correlation(a, b int) float64 {
	if a == b {
		return 1
	}
	r := c.covariance.At(a, b) / math.Sqrt(c.covariance.At(a, a)*c.covariance.At(b, b))
	return math.Max(-1, math.Min(1, r))
}

// words says a direction that no reading decides.
func (c *cover) words(d direction) string {
	type part struct {
		name string
		v    float64
	}
	var parts []part
	top := 0.0
	for i, v := range d.v {
		if math.Abs(v) > material {
			parts = append(parts, part{c.p.unknowns[i].name, v})
			if math.Abs(v) > math.Abs(top) {
				top = v
			}
		}
	}
	sort.SliceStable(parts, func(a, b int) bool { return math.Abs(parts[a].v) > math.Abs(parts[b].v) })
	if len(parts) == 1 {
		return "no reading depends on " + parts[0].name
	}
	words := make([]string, len(parts))
	for i, q := range parts {
		way := "up"
		if q.v/top < 0 {
			way = "down"
		}
		words[i] = fmt.Sprintf("%s %s by %.2g %%", q.name, way, math.Abs(q.v/top))
	}
	return "no reading changes when " + strings.Join(words[:len(words)-1], ", ") + " goes with " + words[len(words)-1] + ": say what is known of one of them"
}
