package fit

import "math"

// What a pairing costs beside its residuals: a reading that no vibration of the
// line explains, and a vibration that nothing was read of though one above it
// was. Nine is three standard uncertainties; passing over is cheap because a
// sensor near a node, or a blow there, misses vibrations all the time.
const (
	strangerCost = 9.0
	missingCost  = 0.5
)

// pairing gives each observation its mode: 0 for a stranger.
type pairing []int

// align pairs frequencies that were read, rising, with those of the model,
// rising, in order: the pairs that cost least, counting ((read - model)/u)^2 for
// a pair, strangerCost for a reading left over and missingCost for a vibration
// passed over below the highest that is paired; dear is what pairing with each
// vibration costs beside its residual, nil for nothing. It returns for each reading the
// index of its vibration, -1 for a stranger, and the cost.
//
// Method: dynamic programming over prefixes of both lists, as sequences are
// aligned; exact, in len(read)*len(model) steps.
func align(read, u, model, dear []float64) (mode []int, cost float64) {
	pair := func(i, j int) float64 {
		d := (read[i-1] - model[j-1]) / u[i-1]
		if dear == nil {
			return d * d
		}
		return d*d + dear[j-1]
	}
	n, m := len(read), len(model)
	best := make([]float64, (n+1)*(m+1))
	for j := 1; j <= m; j++ {
		best[j] = float64(j) * missingCost
	}
	for i := 1; i <= n; i++ {
		row, above := best[i*(m+1):(i+1)*(m+1)], best[(i-1)*(m+1):i*(m+1)]
		row[0] = above[0] + strangerCost
		for j := 1; j <= m; j++ {
			row[j] = math.Min(above[j-1]+pair(i, j), math.Min(above[j]+strangerCost, row[j-1]+missingCost))
		}
	}
	last := best[n*(m+1):]
	at := 0
	for j := range last {
		if last[j] < last[at] {
			at = j
		}
	}
	mode = make([]int, n)
	for i, j := n, at; i > 0; {
		here := best[i*(m+1)+j]
		if j > 0 {
			if here == best[(i-1)*(m+1)+j-1]+pair(i, j) {
				i, j = i-1, j-1
				mode[i] = j
				continue
			}
			if here == best[i*(m+1)+j-1]+missingCost {
				j--
				continue
			}
		}
		i--
		mode[i] = -1
	}
	return mode, last[at]
}

// pair gives every observation its mode for predictions, with uncertainties
// widened by a share of the value, and the cost without that of priors.
func (p *Problem) pair(x []float64, q []prediction, widen float64) (pairing, float64) {
	modes := make(pairing, len(p.obs))
	cost := 0.0
	for l := range p.lists {
		cost += p.pairList(&p.lists[l], q, widen, modes)
	}
	for i := range p.obs {
		o := &p.obs[i]
		if o.list >= 0 {
			continue
		}
		modes[i] = max(o.order, 1)
		if o.peak >= 0 { // goes with its peak, or falls with it
			if modes[i] = modes[o.peak]; modes[i] == 0 {
				continue
			}
		}
		r := p.residual(i, x, q, modes[i], widen)
		if math.IsNaN(r) {
			return modes, math.Inf(1)
		}
		r /= p.slack
		if p.droppable(i) && r*r > strangerCost {
			modes[i] = 0
			cost += strangerCost
			continue
		}
		cost += r * r
	}
	return modes, cost
}

// telling is how much it tells that a peak lies within a share of vibration n:
// twice the logarithm of how seldom that is by chance, vibrations lying f/n apart,
//
//	-2 ln(root(2 pi) share n),
//
// at most what a stranger costs. While uncertainties are widened, a pairing costs
// what it does not tell: within three per cent of the twentieth vibration lies
// anything, so that high peaks wait until low ones have narrowed the search.
func telling(n int, share float64) float64 {
	return math.Min(math.Max(-2*math.Log(math.Sqrt(2*math.Pi)*share*float64(n)), 0), strangerCost)
}

// pairList pairs one list of peaks.
func (p *Problem) pairList(l *list, q []prediction, widen float64, modes pairing) float64 {
	if len(l.obs) == 0 {
		return 0
	}
	pred := &q[p.obs[l.obs[0]].config]
	if pred.err != nil {
		return math.Inf(1)
	}
	model := pred.frequency
	first := 0
	if l.from > 0 {
		first = min(l.from-1, len(model))
		model = model[first:min(max(l.to, first), len(model))]
	}
	read, u := make([]float64, len(l.obs)), make([]float64, len(l.obs))
	for k, i := range l.obs {
		read[k], u[k] = p.obs[i].value, p.slack*math.Hypot(p.obs[i].u, widen*p.obs[i].value)
	}
	var dear []float64
	if widen > 0 {
		dear = make([]float64, len(model))
		for j := range dear {
			dear[j] = strangerCost - telling(first+j+1, widen)
		}
	}
	at, cost := align(read, u, model, dear)
	for k, i := range l.obs {
		modes[i] = at[k] + 1
		if at[k] >= 0 {
			modes[i] += first
		}
	}
	return cost
}

// shift is what the shared error adds to an observation.
func (o *observation) shift(x []float64) float64 {
	if o.shared < 0 {
		return 0
	}
	return o.sharedU * x[o.shared]
}

// droppable tells whether a frequency with a number may be taken for a stranger:
// only where enough others of its config remain to outvote it.
func (p *Problem) droppable(i int) bool { return p.mayDrop[i] }

// drops settles which numbered frequencies may be dropped: those of configs
// with at least three more numbered frequencies than unknowns that move them.
func (p *Problem) drops() {
	p.mayDrop = make([]bool, len(p.obs))
	for c := range p.configs {
		moving := 0
		for i := range p.unknowns {
			for _, k := range p.unknowns[i].configs {
				if k == c && p.unknowns[i].sought {
					moving++
				}
			}
		}
		var own []int
		for i := range p.obs {
			if o := &p.obs[i]; o.config == c && o.list < 0 && o.kind.Unit() == "Hz" {
				own = append(own, i)
			}
		}
		for _, i := range own {
			p.mayDrop[i] = len(own) >= moving+3
		}
	}
}

// extras is the part of the cost that does not come from residuals: strangers,
// and vibrations passed over.
func (p *Problem) extras(modes pairing) float64 {
	cost := 0.0
	for i := range p.obs {
		if modes[i] == 0 && p.obs[i].peak < 0 {
			cost += strangerCost
		}
	}
	for l := range p.lists {
		cost += missingCost * float64(len(p.passedOver(&p.lists[l], modes)))
	}
	return cost
}

// passedOver are the modes below the highest paired one of a list that nothing
// was paired with.
func (p *Problem) passedOver(l *list, modes pairing) []int {
	paired := map[int]bool{}
	top := 0
	for _, i := range l.obs {
		if modes[i] > 0 {
			paired[modes[i]] = true
			top = max(top, modes[i])
		}
	}
	var out []int
	for m := max(l.from, 1); m < top; m++ {
		if !paired[m] {
			out = append(out, m)
		}
	}
	return out
}
