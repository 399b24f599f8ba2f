package compare

import (
	"math"
	"sort"
)

// Ratios of a difference to the sum of two bars: up to the first the solvers
// agree, beyond the second they differ, between the two nothing is said unless
// difference and bars together stay within the share asked for.
const (
	ratioAgree  = 1
	ratioDiffer = 2
)

// differs tells whether a pair's difference is a finding.
func (p *Pair) differs() bool { return p.Ratio > ratioDiffer && !p.Unbacked && !p.Immaterial }

// unbacked tells whether a figure's ratio stands without its record: the records
// agree, or do not differ and the figure is not plainly apart either.
func unbacked(figure, record float64) bool {
	return record <= ratioAgree || record <= ratioDiffer && figure <= plainDifference
}

// immaterialShare is the part of the share asked for below which a difference is
// not a finding. Bars cover 95 % of cases, not all, and refinement makes them as
// small as one likes: without this, solvers could be called at odds over a
// hundredth of what anybody asked. Chosen: a tenth.
const immaterialShare = 0.1

// ruling is what the pairs of one observable say.
type ruling struct {
	verdict   Verdict
	odd       int     // voice that stands against the rest, or -1
	resolving float64 // share
}

// rule judges the pairs of n voices. alone is the bar of the single voice as a
// share of the scale, where n is 1. With an odd one out, the verdict is Differ
// all the same: a difference is a finding.
func rule(n int, pairs []Pair, agree, alone float64) ruling {
	if n == 1 {
		out := ruling{verdict: Alone, odd: -1, resolving: alone}
		if alone > agree {
			out.verdict = Unsettled
		}
		return out
	}
	out := ruling{verdict: Unsettled, odd: -1, resolving: math.Inf(1)}
	differing, open := 0, false
	for _, p := range pairs {
		switch {
		case p.differs():
			differing++
		case p.Ratio > ratioAgree && (1+p.Ratio)*p.Resolving > agree:
			open = true
		case p.Ratio > ratioAgree:
			// The bars are a little small, but difference and bars together stay
			// within the share asked for, which is then what the pair resolves.
			out.resolving = math.Min(out.resolving, (1+p.Ratio)*p.Resolving)
		default:
			out.resolving = math.Min(out.resolving, p.Resolving)
		}
	}
	if math.IsInf(out.resolving, 1) {
		for _, p := range pairs { // none agrees: what the sharpest pair could have told
			out.resolving = math.Min(out.resolving, p.Resolving)
		}
	}
	switch {
	case differing > 0:
		out.verdict = Differ
		out.odd = oddOneOut(n, pairs, differing)
	case !open && out.resolving <= agree:
		out.verdict = Agree
	}
	return out
}

// oddOneOut is the voice that is in every differing pair while all pairs
// without it agree, and agree more closely than the differences: that two voices
// with wide bars agree speaks for neither. It is -1 where no single voice is
// that, or where only two speak.
func oddOneOut(n int, pairs []Pair, differing int) int {
	if n < 3 {
		return -1
	}
	in := map[int]int{}
	least := math.Inf(1) // smallest difference that is a finding, as a share
	for _, p := range pairs {
		if p.differs() {
			in[p.A]++
			in[p.B]++
			least = math.Min(least, p.Ratio*p.Resolving)
		}
	}
	candidates := make([]int, 0, len(in))
	for v := range in {
		candidates = append(candidates, v)
	}
	sort.Ints(candidates)
	found := -1
	for _, v := range candidates {
		if in[v] != differing {
			continue
		}
		rest := true
		for _, p := range pairs {
			rest = rest && (p.A == v || p.B == v || p.Ratio <= ratioAgree && p.Resolving < least)
		}
		if !rest {
			continue
		}
		if found >= 0 {
			return -1
		}
		found = v
	}
	return found
}

// judge compares all observables of all channels.
func (r *runner) judge() [][]Observable {
	s := newScales(r.mesh, r.voices)
	out := make([][]Observable, len(r.mesh.Channels))
	for c := range out {
		out[c] = make([]Observable, kindCount)
		for k := Kind(0); k < kindCount; k++ { // Record is the first
			out[c][k] = r.observable(c, k, s, out[c][Record].Pairs)
		}
	}
	return out
}

func (r *runner) observable(c int, k Kind, s scales, records []Pair) Observable {
	o := Observable{Kind: k, Scale: s.of(c, k, r.voices), Governed: k.governed() || r.asked[askedKind{c, k}]}
	for _, v := range r.voices {
		value, bar := math.NaN(), Bar{Order: math.NaN(), Bound: math.NaN()}
		if v.usable() {
			value, bar = v.top().figures[c].of[k], v.bar(c, k, s, r.voices)
		}
		o.Values, o.Bars, o.Orders = append(o.Values, value), append(o.Bars, bar.Bound), append(o.Orders, bar.Order)
	}
	r.compare(&o, records, func(a, b int) float64 {
		if k == Record {
			return distance(r.voices[a].series(c), r.voices[b].series(c))
		}
		return math.Abs(o.Values[a] - o.Values[b])
	})
	return o
}

// compare fills in the pairs, the verdict and the reported value. records are
// the pairs of the whole records; nil where there are none to go by.
func (r *runner) compare(o *Observable, records []Pair, difference func(a, b int) float64) {
	n, single := 0, 0.0
	for a := range r.voices {
		if !r.voices[a].usable() {
			continue
		}
		n++
		single = share(o.Bars[a], o.Scale)
		for b := a + 1; b < len(r.voices); b++ {
			if !r.voices[b].usable() {
				continue
			}
			p := Pair{A: a, B: b, Difference: difference(a, b), Resolving: share(o.Bars[a]+o.Bars[b], o.Scale)}
			if p.Difference > 0 {
				p.Ratio = p.Difference / (o.Bars[a] + o.Bars[b])
			}
			if at := len(o.Pairs); at < len(records) {
				p.Unbacked = unbacked(p.Ratio, records[at].Ratio)
			}
			p.Immaterial = (1+p.Ratio)*p.Resolving <= immaterialShare*r.options.Agree
			o.Pairs = append(o.Pairs, p)
		}
	}
	ruled := rule(n, o.Pairs, r.options.Agree, single)
	o.Verdict, o.OddOneOut, o.ResolvingPower = ruled.verdict, ruled.odd, ruled.resolving
	o.Best, o.Value, o.Numerical = r.report(o)
}

// report is the value to report and its bound: the voice with the smallest bar,
// not the odd one; its bar, widened to reach the value of every other voice (but
// the odd one) that lies further away than the two bars explain.
func (r *runner) report(o *Observable) (best int, value, bound float64) {
	best = -1
	for i, v := range r.voices {
		if v.usable() && i != o.OddOneOut && (best < 0 || o.Bars[i] < o.Bars[best]) {
			best = i
		}
	}
	if best < 0 {
		return -1, math.NaN(), math.NaN()
	}
	value, bound = o.Values[best], o.Bars[best]
	for _, p := range o.Pairs {
		other := p.A
		if p.A == best {
			other = p.B
		} else if p.B != best {
			continue
		}
		if other == o.OddOneOut {
			continue
		}
		reach := p.Difference - o.Bars[other]
		if p.Ratio > ratioAgree {
			reach = p.Difference
		}
		bound = math.Max(bound, reach)
	}
	return best, value, bound
}

// band is the pointwise error band of the reported record: the best voice's own
// band, the spread to the voice with the next smallest bar in full, and the
// spread to every other beyond its own band (in full where the solvers differ
// and no odd one can be told).
func (r *runner) band(c int, o *Observable) [][]float64 {
	best := r.voices[o.Best]
	next := -1
	for i, v := range r.voices {
		if v.usable() && i != o.Best && i != o.OddOneOut && (next < 0 || o.Bars[i] < o.Bars[next]) {
			next = i
		}
	}
	out := make([][]float64, len(best.series(c)))
	for k := range out {
		out[k] = best.band(c, k)
		for j := range out[k] {
			out[k][j] = math.Max(out[k][j], roundOff*o.Scale)
		}
		for i, v := range r.voices {
			if !v.usable() || i == o.Best || i == o.OddOneOut {
				continue
			}
			split := o.Verdict == Differ && o.OddOneOut < 0
			var own []float64
			if !split {
				own = v.band(c, k)
			}
			mine, theirs := best.series(c)[k], v.series(c)[k]
			for j := range out[k] {
				spread := math.Abs(mine[j] - theirs[j])
				switch {
				case split:
				case i == next:
					// The truth may lie beyond the second solver as well, by its own
					// band; no further than it stands off, or it would not be second.
					spread += math.Min(own[j], spread)
				default:
					spread -= own[j]
				}
				out[k][j] = math.Max(out[k][j], spread)
			}
		}
	}
	return out
}

// energyLeft compares the energy at the end as a share of the most held.
func (r *runner) energyLeft() Observable {
	o := Observable{Kind: Final, Scale: 1, Governed: r.options.EnergyLeft}
	left := func(run *levelRun) float64 {
		if run.energy.Most <= 0 {
			return 0
		}
		return run.energy.End / run.energy.Most
	}
	for _, v := range r.voices {
		value, bar := math.NaN(), Bar{Order: math.NaN(), Bound: math.NaN()}
		if v.usable() && !v.top().energy.Unkept {
			n := len(v.runs)
			a, b, c := left(&v.runs[n-3]), left(&v.runs[n-2]), left(&v.runs[n-1])
			order, ratio := v.theory()
			value, bar = c, NewBar(math.Abs(b-a), math.Abs(c-b), ratio, order)
			bar.Bound = math.Max(bar.Bound, roundOff)
			if e := v.top().energy; e.Most > 0 {
				// What the account cannot explain is not known to be there or gone.
				bar.Bound = math.Max(bar.Bound, floorShare*math.Abs(e.Unaccounted())/e.Most)
			}
		}
		o.Values, o.Bars, o.Orders = append(o.Values, value), append(o.Bars, bar.Bound), append(o.Orders, bar.Order)
	}
	r.compare(&o, nil, func(a, b int) float64 { return math.Abs(o.Values[a] - o.Values[b]) })
	return o
}
