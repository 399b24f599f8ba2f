package fit

import (
	"context"
	"math"
	"slices"
	"sort"
)

// Widenings of the uncertainties, as shares of the value, from the screening to
// the end: a start that is off by a few per cent pairs the low peaks first and
// the high ones as it comes nearer.
var widenings = [...]float64{0.03, 0.015, 0.007, 0.003, 0.001, 0}

// solution is one minimum of the cost.
type solution struct {
	x     []float64
	q     []prediction
	modes pairing
	cost  float64 // all together
	sum   float64 // of squares alone
}

// search finds the minima within `ambiguous` of the lowest, lowest first: every
// start is led to a minimum with what is known beforehand standing still and, on
// lines with losses, with the model without them; then the best of these with
// everything.
func (p *Problem) search(ctx context.Context) ([]solution, error) {
	p.leading = true
	if p.slow() {
		p.detail = rough
	}
	var led []solution
	best := math.Inf(1)
	for _, s := range p.starts() {
		if err := ctx.Err(); err != nil {
			return nil, err
		}
		if sol, ok := p.lead(s.x, best); ok {
			best = math.Min(best, sol.cost)
			led = p.keep(led, sol)
		}
	}
	p.detail, p.leading = exact, false
	sort.SliceStable(led, func(a, b int) bool { return led[a].cost < led[b].cost })
	var found []solution
	for i := range led {
		if err := ctx.Err(); err != nil {
			return nil, err
		}
		if led[i].cost > led[0].cost+hopeless || i == p.size().finish {
			break
		}
		if sol, ok := p.settle(led[i].x); ok {
			found = p.keep(found, sol)
		}
	}
	found = p.loosen(found)
	sort.SliceStable(found, func(a, b int) bool { return found[a].cost < found[b].cost })
	for i := range found {
		if found[i].cost > found[0].cost+ambiguous {
			return found[:i], nil
		}
	}
	return found, nil
}

// slacks are how many times worse than they say readings may be taken to be.
var slacks = [...]float64{1.5, 2, 3, 4}

// loosen asks whether the readings are worse than they say: three standard
// uncertainties, beyond which a reading is a stranger, would then throw out the
// very ones that show it. With all of them s times as uncertain the likelihood
// costs 2 ln s for each,
//
//	sum r^2/s^2 + 2 n ln s + strangers + passed over,
//
// and where that is less for some s > 1 than for 1, solutions are paired with it.
// Residuals and intervals go on to use what the readings say, widened by their
// scatter. Source: the likelihood of a normal distribution of unknown width.
func (p *Problem) loosen(found []solution) []solution {
	if len(found) == 0 {
		return found
	}
	best := 0
	for i := range found {
		if found[i].cost < found[best].cost {
			best = i
		}
	}
	if !slices.Contains(found[best].modes, 0) {
		return found // nothing was thrown out
	}
	least, slack := found[best].cost, 1.0
	for _, s := range slacks {
		p.slack = s
		if sol, ok := p.settle(found[best].x); ok && sol.cost < least {
			least, slack = sol.cost, s
		}
	}
	p.slack = slack
	if slack == 1 {
		return found
	}
	var out []solution
	for i := range found {
		if sol, ok := p.settle(found[i].x); ok {
			out = p.keep(out, sol)
		}
	}
	return out
}

// keep enters a solution unless it is one of those at hand; of two that are one
// the better stays.
func (p *Problem) keep(list []solution, s solution) []solution {
	for i := range list {
		if p.same(&list[i], &s) {
			if s.cost < list[i].cost {
				list[i] = s
			}
			return list
		}
	}
	return append(list, s)
}

// slow tells whether any config's frequencies wait for complex roots, or for
// series in a tension that rises along a segment that bends.
func (p *Problem) slow() bool {
	for _, c := range p.configs {
		if c.lossy() || c.rises() {
			return true
		}
	}
	return false
}

// lead leads a start to a minimum by narrowing uncertainties, with what is known
// beforehand standing still. False where it comes to nothing.
func (p *Problem) lead(x []float64, best float64) (solution, bool) {
	known := make([]bool, len(x))
	for i := range p.unknowns {
		known[i] = !p.unknowns[i].sought
	}
	q := p.predict(x)
	for _, w := range widenings {
		modes, cost := p.pair(x, q, w)
		if math.IsInf(cost, 1) || w <= 0.003 && cost > best+hopeless {
			return solution{}, false
		}
		x, q, _ = p.descend(x, q, modes, w, 8, known)
	}
	modes, cost := p.pair(x, q, 0)
	return solution{x: x, q: q, modes: modes, cost: cost}, !math.IsInf(cost, 1)
}

// settle goes on from there with everything free until the pairing stands.
func (p *Problem) settle(x []float64) (solution, bool) {
	q := p.predict(x)
	var s solution
	for round := 0; round < 8; round++ {
		modes, cost := p.pair(x, q, 0)
		if math.IsInf(cost, 1) {
			return solution{}, false
		}
		if s.modes != nil && equal(modes, s.modes) {
			break
		}
		s.modes = modes
		x, q, s.sum = p.descend(x, q, modes, 0, mostSteps, nil)
	}
	if math.IsInf(s.sum, 1) || !slices.ContainsFunc(s.modes, func(m int) bool { return m != 0 }) {
		return solution{}, false // without a value, or all readings strangers
	}
	s.x, s.q = x, q
	s.cost = p.total(s.sum, s.modes)
	return s, true
}

// total is the cost of a sum of squares with a pairing.
func (p *Problem) total(sum float64, modes pairing) float64 {
	if p.slack == 1 {
		return sum + p.extras(modes)
	}
	paired := 0.0
	for _, m := range modes {
		if m != 0 {
			paired++
		}
	}
	return sum/(p.slack*p.slack) + 2*paired*math.Log(p.slack) + p.extras(modes)
}

func equal(a, b pairing) bool {
	for i := range a {
		if a[i] != b[i] {
			return false
		}
	}
	return true
}

// apart is the share of a let by which two solutions must differ to be two.
const apart = 0.02

// same tells whether two minima are one: nowhere apart, or with one pairing and
// no hill between them.
func (p *Problem) same(a, b *solution) bool {
	near := true
	for _, i := range p.sought {
		near = near && math.Abs(a.x[i]-b.x[i]) < apart
	}
	if near {
		return true
	}
	if !equal(a.modes, b.modes) {
		return false
	}
	mid := make([]float64, len(a.x))
	for i := range mid {
		mid[i] = (a.x[i] + b.x[i]) / 2
	}
	r := p.residuals(mid, p.predict(mid), a.modes, 0)
	return r != nil && p.total(square(r), a.modes) <= math.Max(a.cost, b.cost)+1
}
