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

	j     *mat.Dense
	plain *mat.SymDense // covariance of the coordinates by what the readings say of themselves
	gain  *mat.Dense    // change of the coordinates for one standard uncertainty of each residual
	// covariance is that with the scatter of the readings in it.
	covariance *mat.SymDense
	open       []direction // that no reading decides
	read       int         // residuals of readings; those of what was known follow
	chi2       float64
	freedom    int
	scatter    float64 // root of chi2 by freedom, at least 1
	factor     float64 // by which the readings' uncertainties count, at least 1
	roughly    bool    // the slopes do not settle as their step is changed
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
	c := &cover{p: p, s: s, factor: 1, scatter: 1}
	if c.j = p.jacobian(s.x, s.q, s.modes, 0, difference, nil); c.j == nil {
		return nil, fmt.Errorf("fit: the model has no slopes at the solution")
	}
	c.check()
	rows, n := c.j.Dims()
	c.invert()
	c.chi2, c.freedom = s.sum, rows-n+len(c.open)
	for _, m := range s.modes {
		if m != 0 {
			c.read++
		}
	}
	c.widen()
	c.carry()
	return c, nil
}

// widen lets the scatter of the readings count where it is more than they say,
//
//	factor = s t/1.960,  s^2 = chi2/freedom,
//
// with t Student's factor for the effective freedom s^4 freedom/(s^2-1)^2: of the
// variance s^2 the part that was stated has endless freedom, and what goes beyond
// it that of the scatter. Source: JCGM 100:2008, G.4.1 (Welch, Satterthwaite),
// from memory.
func (c *cover) widen() {
	if c.freedom <= 0 || c.chi2 <= float64(c.freedom) {
		return
	}
	s2 := c.chi2 / float64(c.freedom)
	c.scatter = math.Sqrt(s2)
	effective := s2 * s2 * float64(c.freedom) / ((s2 - 1) * (s2 - 1))
	t := doubt.TwoSided
	if effective < 1e6 {
		t = distuv.StudentsT{Mu: 0, Sigma: 1, Nu: effective}.Quantile(0.975)
	}
	c.factor = c.scatter * math.Max(1, t/doubt.TwoSided)
}

// carry makes the covariance of what the residuals do to the solution: those of
// readings by the factor, those of what was known as they are.
func (c *cover) carry() {
	rows, n := c.j.Dims()
	c.gain = mat.NewDense(n, rows, nil)
	c.gain.Mul(c.plain, c.j.T())
	for i := range c.read {
		for k := range n {
			c.gain.Set(k, i, c.factor*c.gain.At(k, i))
		}
	}
	c.covariance = mat.NewSymDense(n, nil)
	c.covariance.SymOuterK(1, c.gain)
	for _, d := range c.open {
		c.covariance.SymRankOne(c.covariance, d.u*d.u, mat.NewVecDense(n, d.v))
	}
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
	c.plain = mat.NewSymDense(n, nil)
	if !svd.Factorize(scaled, mat.SVDThin) { // has not been seen: nothing is decided then
		for k := range n {
			d := make([]float64, n)
			d[k] = 1
			c.open = append(c.open, direction{d, c.p.reach(d)})
		}
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
			c.open = append(c.open, direction{d, c.p.reach(d)})
			continue
		}
		for a := range n {
			for b := a; b < n; b++ {
				c.plain.SetSym(a, b, c.plain.At(a, b)+u*u*d[a]*d[b])
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

// sd is the standard uncertainty of a coordinate.
func (c *cover) sd(i int) float64 { return math.Sqrt(math.Max(0, c.covariance.At(i, i))) }

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

// interval is the 95 % interval of a sought let, never beyond its range. Where
// the model is slow the curvature has to do.
func (c *cover) interval(i int) (low, high float64) {
	u := &c.p.unknowns[i]
	lo, hi := u.bounds()
	half := doubt.TwoSided * c.sd(i)
	a, b := c.s.x[i]-half, c.s.x[i]+half
	switch {
	case c.undecided(i):
		a, b = lo, hi
	case c.atBound(i) || !c.p.slow() && (c.sd(i) > profiled || a < lo || b > hi):
		a, b = c.profile(i, -1), c.profile(i, 1)
	}
	return u.value(math.Max(a, lo)), u.value(math.Min(b, hi))
}

// profile is where the cost, lowered over everything else, has risen by
// k^2, with k 1.960 and as much more as the scatter widens the interval, to one side of the solution; the end of the range where it does
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
	k := doubt.TwoSided * math.Max(1, c.sd(i)/math.Sqrt(math.Max(c.plain.At(i, i), 1e-300)))
	x := append([]float64(nil), c.s.x...)
	rise := func(at float64) float64 {
		x[i] = at
		nx, _, sum := p.descend(x, p.predict(x), c.s.modes, 0, 25, fixed)
		if math.IsInf(sum, 1) {
			return math.Inf(1)
		}
		copy(x, nx)
		return math.Sqrt(math.Max(0, sum-c.s.sum))
	}
	from, height := c.s.x[i], 0.0
	step := math.Max(doubt.TwoSided*c.sd(i), 1e-4)
	if step > 1 || math.IsNaN(step) {
		step = 1
	}
	for round := 0; round < 30; round++ {
		at := from + side*step
		if side*(at-end) > 0 {
			at = end
		}
		h := rise(at)
		if h >= k {
			return secant(from, height, at, h, k, rise)
		}
		if at == end {
			return end
		}
		if h > height {
			step = math.Min(math.Abs(at-from)/(h-height)*(k-h)*1.05, 1)
			step = math.Max(step, 0.02)
		}
		from, height = at, h
	}
	return from
}

// secant narrows the place between two coordinates where the rise is k.
func secant(a, fa, b, fb, k float64, rise func(float64) float64) float64 {
	for round := 0; round < 12 && math.Abs(fb-fa) > 1e-3; round++ {
		mid := (a + b) / 2
		if !math.IsInf(fb, 1) {
			mid = a + (k-fa)/(fb-fa)*(b-a)
		}
		f := rise(mid)
		if math.Abs(f-k) < 2e-3*k {
			return mid
		}
		if f < k {
			a, fa = mid, f
		} else {
			b, fb = mid, f
		}
	}
	if math.IsInf(fb, 1) || fb == fa {
		return a
	}
	return a + (k-fa)/(fb-fa)*(b-a)
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
