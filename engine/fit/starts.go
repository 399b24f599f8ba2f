package fit

import (
	"math"
	"math/rand/v2"
	"sort"
)

// How a search is sized. Chosen: what a step of the fine unknown moves frequencies
// by is within the widening of the screening.
const (
	mostFine     = 160
	seedOfStarts = 1
	ambiguous    = 9  // solutions within this cost of the best are all told
	hopeless     = 60 // above the best: a start that is given up half way
)

// size is how wide a search is.
type size struct {
	follow int     // starts that are led to a minimum
	finish int     // minima that are settled with everything free
	keep   int     // starts kept of each group of lines and point of the shared lets
	coarse int     // values of the second of a group's unknowns
	ratio  float64 // between values of a group's first unknown
	widen  float64 // of the screening, as a share of the value
}

// Single spans are evaluated in some 20 microseconds, other lines in some ten to a
// hundred times that, and stiff ones whose tension rises in up to a second.
var (
	wide   = size{follow: 30, finish: 12, keep: 12, coarse: 5, ratio: 1.05, widen: 0.02}
	narrow = size{follow: 24, finish: 5, keep: 8, coarse: 4, ratio: 1.08, widen: 0.03}
	scarce = size{follow: 24, finish: 2, keep: 8, coarse: 4, ratio: 1.08, widen: 0.03}
)

// size settles how wide to search.
func (p *Problem) size() size {
	out := wide
	for _, c := range p.configs {
		switch {
		case c.rises():
			return scarce
		case !c.quick():
			out = narrow
		}
	}
	return out
}

// start is a point with its screening cost.
type start struct {
	x    []float64
	cost float64
}

// starts screens the ranges of the sought lets and gives the points that are
// worth following. Lets that several groups of lines share are gone through on a
// coarse grid; for each of its points every group is searched for itself.
func (p *Problem) starts() []start {
	base := p.middle()
	shared, private := p.split()
	var all []start
	for _, s := range p.grid(base, shared, sharedPoints(len(shared))) {
		x := append([]float64(nil), s...)
		options := make([][]start, len(private))
		for g := range private {
			options[g] = p.scan(x, private[g])
		}
		all = append(all, combine(x, options, private)...)
	}
	sort.SliceStable(all, func(a, b int) bool { return all[a].cost < all[b].cost })
	return p.diverse(all, private)
}

// middle is the middle of all ranges.
func (p *Problem) middle() []float64 {
	x := make([]float64, len(p.unknowns))
	for _, i := range p.sought {
		lo, hi := p.unknowns[i].bounds()
		x[i] = (lo + hi) / 2
	}
	return x
}

func sharedPoints(n int) int {
	switch n {
	case 0:
		return 1
	case 1:
		return 6
	case 2:
		return 4
	case 3:
		return 3
	}
	return 32
}

// own are the sought unknowns of one group of lines that no other depends on,
// the one that moves its readings most first.
type own struct {
	group    int
	unknowns []int
}

// split parts the sought unknowns into those of single groups and shared ones.
func (p *Problem) split() (shared []int, private []own) {
	at := map[int]int{}
	for _, c := range p.configs {
		if _, seen := at[c.group]; !seen {
			at[c.group] = len(private)
			private = append(private, own{group: c.group})
		}
	}
	for _, i := range p.sought {
		if u := &p.unknowns[i]; u.private < 0 {
			shared = append(shared, i)
		} else {
			g := &private[at[u.private]]
			g.unknowns = append(g.unknowns, i)
		}
	}
	for g := range private {
		private[g].unknowns = p.byInfluence(private[g].unknowns)
	}
	return shared, private
}

// byInfluence orders unknowns by how much they move what is read, looked at in
// the middle of their ranges, and leaves out those that do not move it at all:
// losses, where the search leaves them out.
func (p *Problem) byInfluence(list []int) []int {
	x := p.middle()
	const look = 0.05
	pull := map[int]float64{}
	for _, i := range list {
		x[i] += look
		up := p.predict(x)
		x[i] -= 2 * look
		down := p.predict(x)
		x[i] += look
		for _, c := range p.unknowns[i].configs {
			a, b := up[c], down[c]
			for n := 0; n < min(3, len(a.frequency), len(b.frequency)); n++ {
				pull[i] += math.Abs(math.Log(a.frequency[n] / b.frequency[n]))
			}
			if a.trip > 0 && b.trip > 0 {
				pull[i] += math.Abs(math.Log(a.trip / b.trip))
			}
		}
	}
	sort.SliceStable(list, func(a, b int) bool { return pull[list[a]] > pull[list[b]] })
	n := len(list)
	for n > 1 && pull[list[n-1]] == 0 {
		n--
	}
	return list[:n]
}

// grid varies unknowns around a point: a full grid of n values each for up to
// three, a Latin hypercube of n points for more. Ends of the ranges are left out.
func (p *Problem) grid(x []float64, list []int, n int) [][]float64 {
	place := func(y []float64, i int, share float64) {
		lo, hi := p.unknowns[i].bounds()
		y[i] = lo + share*(hi-lo)
	}
	if len(list) > 3 {
		random := rand.New(rand.NewPCG(seedOfStarts, uint64(len(list))))
		out := make([][]float64, n)
		for k := range out {
			out[k] = append([]float64(nil), x...)
		}
		for _, i := range list {
			for k, rank := range random.Perm(n) {
				place(out[k], i, (float64(rank)+0.5)/float64(n))
			}
		}
		return out
	}
	out := [][]float64{append([]float64(nil), x...)}
	for _, i := range list {
		var next [][]float64
		for _, y := range out {
			for k := range n {
				z := append([]float64(nil), y...)
				place(z, i, (float64(k)+0.5)/float64(n))
				next = append(next, z)
			}
		}
		out = next
	}
	return out
}

// scan searches one group with everything shared standing still: finely over
// the unknown that moves most, coarsely over the others. It gives the lowest
// minima along the fine one, apart from one another in either.
func (p *Problem) scan(x []float64, g own) []start {
	if len(g.unknowns) == 0 {
		return []start{{x, p.screen(x, g.group)}}
	}
	fine, coarse := g.unknowns[0], g.unknowns[1:]
	lo, hi := p.unknowns[fine].bounds()
	n := p.fineSteps(fine, g.group)
	points := [...]int{1, p.size().coarse, 3, 2}
	of := 12
	if len(coarse) < len(points) {
		of = points[len(coarse)]
	}
	var out []start
	for _, y := range p.grid(x, coarse, of) {
		costs := make([]float64, n)
		for k := range n {
			y[fine] = lo + (float64(k)+0.5)/float64(n)*(hi-lo)
			costs[k] = p.screen(y, g.group)
		}
		for k, c := range costs {
			if math.IsInf(c, 1) || k > 0 && costs[k-1] < c || k < n-1 && costs[k+1] < c {
				continue
			}
			z := append([]float64(nil), y...)
			z[fine] = lo + (float64(k)+0.5)/float64(n)*(hi-lo)
			out = append(out, start{z, c})
		}
	}
	sort.SliceStable(out, func(a, b int) bool { return out[a].cost < out[b].cost })
	var kept []start
	for _, s := range out {
		near := false
		for _, k := range kept {
			close := math.Abs(k.x[fine]-s.x[fine]) < 0.06
			for _, i := range coarse {
				close = close && math.Abs(k.x[i]-s.x[i]) < 0.7
			}
			near = near || close
		}
		if !near && len(kept) < p.size().keep {
			kept = append(kept, s)
		}
	}
	return kept
}

// fineSteps is how many values of the unknown that moves most are tried. Where
// every reading has its number, any start finds its way.
func (p *Problem) fineSteps(i, group int) int {
	paired := false
	for k := range p.lists {
		l := &p.lists[k]
		paired = paired || len(l.obs) > 0 && p.configs[p.obs[l.obs[0]].config].group == group
	}
	if !paired || !p.unknowns[i].log {
		return 12
	}
	lo, hi := p.unknowns[i].bounds()
	return min(max(int(math.Ceil((hi-lo)/math.Log(p.size().ratio))), 4), mostFine)
}

// screen is the widened cost of a group's readings: that of the pairing for
// lists, and one that grows slowly for readings with a number.
func (p *Problem) screen(x []float64, group int) float64 {
	values, err := p.values(x)
	if err != nil {
		return math.Inf(1)
	}
	q := make([]prediction, len(p.configs))
	for i, c := range p.configs {
		if c.group == group {
			if q[i] = c.predict(values, p.detail); q[i].err != nil {
				return math.Inf(1)
			}
		}
	}
	widen := p.size().widen
	cost := 0.0
	modes := make(pairing, len(p.obs))
	for l := range p.lists {
		if o := p.lists[l].obs; len(o) > 0 && p.configs[p.obs[o[0]].config].group == group {
			cost += p.pairList(&p.lists[l], q, widen, modes)
		}
	}
	for i := range p.obs {
		o := &p.obs[i]
		if o.list >= 0 || o.peak >= 0 || p.configs[o.config].group != group {
			continue
		}
		r := p.residual(i, x, q, o.order, widen)
		if math.IsNaN(r) {
			return math.Inf(1)
		}
		cost += strangerCost * math.Log1p(r*r/strangerCost)
	}
	return cost
}

// combine puts the groups' best together, and for each group in turn its other
// minima beside the best of the rest.
func combine(x []float64, options [][]start, private []own) []start {
	total := 0.0
	best := append([]float64(nil), x...)
	put := func(to []float64, g int, s start) {
		for _, i := range private[g].unknowns {
			to[i] = s.x[i]
		}
	}
	for g := range options {
		if len(options[g]) == 0 {
			return nil // no point of this group has a model
		}
		total += options[g][0].cost
		put(best, g, options[g][0])
	}
	out := []start{{best, total}}
	for g := range options {
		for _, s := range options[g][1:] {
			y := append([]float64(nil), best...)
			put(y, g, s)
			out = append(out, start{y, total - options[g][0].cost + s.cost})
		}
	}
	return out
}

// diverse keeps the best starts that differ: in the fine unknown of some group
// by 6 %, or in any other by a factor of 2.
func (p *Problem) diverse(all []start, private []own) []start {
	fine := make([]bool, len(p.unknowns))
	for _, g := range private {
		if len(g.unknowns) > 0 {
			fine[g.unknowns[0]] = true
		}
	}
	var kept []start
	for _, s := range all {
		if math.IsInf(s.cost, 1) {
			break
		}
		near := false
		for _, k := range kept {
			close := true
			for _, i := range p.sought {
				limit := 0.7
				if fine[i] {
					limit = 0.06
				}
				close = close && math.Abs(k.x[i]-s.x[i]) < limit
			}
			near = near || close
		}
		if !near {
			kept = append(kept, s)
		}
		if len(kept) == p.size().follow {
			break
		}
	}
	return kept
}
