package fronts

import (
	"math"
	"sort"
)

// trace is one run of the ledger.
type trace struct {
	net      *network
	opt      Options
	accounts []Account
	orders   []int // of each account
	launches []launch
	started  int // launches made
	queue    queue
	seen     []passage
	meetings int
	reached  float64
	cut      float64 // s, from which on launches were not collected
	blur     float64
}

// launch is what one break of an excitation sends out at one instant.
type launch struct {
	account int
	time    float64
	out     []outgoing
	own     []passage // at the place itself; time, account and path are filled in later
	word    string    // start of the path
}

// outgoing is one wave that sets out along a piece from a distance s.
type outgoing struct {
	piece   int
	s       float64 // m from the piece's start
	forward bool    // towards the piece's To
	wave    []float64
}

// passage is a wave at a watched place.
type passage struct {
	watch   int
	account int
	when    instant
	wave    []float64
	factor  float64
	held    bool // wave is a force on a support
	path    *step
	merged  int
}

// dust is the share of the loudest arrival at a meeting below which an outgoing
// wave is rounding (an absorbing end reflects Z - C, which need not be 0.0):
// a few hundred units in the last place.
const dust = 1e-13

// leastPrune is the share of an account's largest amplitude below which a front
// is rounding, left over where others cancel.
const leastPrune = 1e-12

// mergedMost is where the number of merged paths saturates.
const mergedMost = 1 << 30

func newTrace(net *network, src *sources, opt Options) *trace {
	t := &trace{net: net, opt: opt, accounts: src.accounts, orders: src.orders, launches: src.launches, cut: src.cut}
	t.queue = queue{find: map[key]*meeting{}, unit: 1e-9 * net.short}
	sort.SliceStable(t.launches, func(i, j int) bool { return t.launches[i].time < t.launches[j].time })
	for i := range t.launches {
		a := &t.accounts[t.launches[i].account]
		for _, o := range t.launches[i].out {
			a.Largest = math.Max(a.Largest, largest(o.wave))
		}
	}
	for i := range t.accounts {
		t.accounts[i].PrunedBelow = math.Max(opt.Prune, leastPrune) * t.accounts[i].Largest
	}
	if net.grid != nil {
		window := net.grid[samples-1]
		t.blur = math.Min(math.Max(net.m.Timing.Every, src.longestKnock), window/4)
	}
	return t
}

// run takes launches and meetings in order of time until the end or a limit.
func (t *trace) run() {
	t.reached = t.opt.End
	for {
		next := math.Inf(1)
		if len(t.queue.heap) > 0 {
			next = t.queue.heap[0].when.hi
		}
		launch := t.started < len(t.launches) && t.launches[t.started].time <= next
		if launch {
			next = t.launches[t.started].time
		}
		if next > math.Min(t.opt.End, t.cut) {
			if t.cut < t.opt.End {
				t.stop(t.cut)
			}
			break
		}
		if t.meetings >= t.opt.Most || len(t.seen) > 8*t.opt.Most+1000 {
			t.stop(next)
			break
		}
		if launch {
			t.launch(&t.launches[t.started])
			t.started++
			continue
		}
		t.scatter(t.queue.pop())
	}
	for _, e := range t.queue.heap {
		for p, w := range e.in {
			if w != nil {
				t.accounts[e.account].Travelling += t.z(e.joint, p) * w[0] * w[0]
			}
		}
	}
}

// stop notes that the trace ends early.
func (t *trace) stop(at float64) {
	t.reached = at
	t.net.note("the limit of %d meetings was reached at %.6g s: later arrivals are not listed", t.opt.Most, at)
}

func (t *trace) z(joint, p int) float64 { return t.net.pieces[t.net.joints[joint].ports[p].piece].z }

// launch sends out what one break starts, unless all of it is below the pruning
// level.
func (t *trace) launch(l *launch) {
	acc, loud := &t.accounts[l.account], 0.0
	for _, o := range l.out {
		loud = math.Max(loud, largest(o.wave))
	}
	if loud < acc.PrunedBelow {
		for _, o := range l.out {
			e := t.net.pieces[o.piece].z * o.wave[0] * o.wave[0]
			acc.Input += e
			acc.Lost += e
			acc.LostAmplitude += largest(o.wave)
		}
		return
	}
	when := instant{hi: l.time}
	path := (*step)(nil).then(l.word)
	for _, p := range l.own {
		p.account, p.when, p.path, p.merged, p.factor = l.account, when, path, 1, 1
		t.seen = append(t.seen, p)
	}
	for _, o := range l.out {
		if largest(o.wave) == 0 {
			continue
		}
		acc.Input += t.net.pieces[o.piece].z * o.wave[0] * o.wave[0]
		t.emit(l.account, o, when, path, 1)
	}
}

// emit sends a wave along a piece: past the watches ahead of it and into the
// meeting at the end.
func (t *trace) emit(account int, o outgoing, when instant, path *step, merged int) {
	p := &t.net.pieces[o.piece]
	for _, w := range p.watched {
		d := t.net.watches[w].spot.At - o.s
		if !o.forward {
			d = -d
		}
		if d <= 0 {
			continue
		}
		delay := d / p.c
		at := when.add(delay)
		if at.hi <= t.opt.End {
			t.seen = append(t.seen, passage{watch: w, account: account, when: at, wave: o.wave, factor: math.Exp(-p.gamma * delay), path: path, merged: merged})
		}
	}
	e, delay := p.ends[0], o.s/p.c
	if o.forward {
		e, delay = p.ends[1], (p.Length-o.s)/p.c
	}
	if (o.forward && o.s == 0) || (!o.forward && o.s == p.Length) {
		delay = p.tau
	}
	factor := math.Exp(-p.gamma * delay)
	first := o.wave[0]
	t.accounts[account].Damped += p.z * first * first * -math.Expm1(-2*p.gamma*delay)
	m := t.queue.at(when.add(delay), e.joint, account, len(t.net.joints[e.joint].ports))
	if a := m.in[e.port]; a != nil {
		// A launch sets out where and when another front passes: they travel on as
		// one, and the excitation works on both.
		t.accounts[account].Input += 2 * p.z * a[0] * factor * first
	}
	m.in[e.port] = plus(m.in[e.port], o.wave, factor)
	if m.merged += merged; m.merged > mergedMost {
		m.merged = mergedMost
	}
	if loud := factor * largest(o.wave); loud > m.loudest || m.path == nil {
		m.loudest, m.path = loud, path
	}
}

// scatter lets a meeting answer: v = Y (2 sum Z a), b = v - a at every port.
func (t *trace) scatter(m *meeting) {
	t.meetings++
	j, acc := &t.net.joints[m.joint], &t.accounts[m.account]
	loud, width := 0.0, 1
	for _, w := range m.in {
		loud = math.Max(loud, largest(w))
		if len(w) > width {
			width = len(w)
		}
	}
	if loud < acc.PrunedBelow || loud == 0 {
		for p, w := range m.in {
			if w != nil {
				acc.Lost += t.z(m.joint, p) * w[0] * w[0]
				acc.LostAmplitude += largest(w)
			}
		}
		return
	}
	force := make([][]float64, len(j.nodes)) // 2 sum Z a of each node
	for p, w := range m.in {
		if w != nil {
			n := j.ports[p].node
			force[n] = plus(force[n], w, 2*t.z(m.joint, p))
		}
	}
	v := j.answer(force)
	t.atNodes(m, j, v, force)
	for _, d := range j.dashpots {
		rate := edge(v[d.a])
		if d.b >= 0 {
			rate -= edge(v[d.b])
		}
		acc.Absorbed += d.c * rate * rate
	}
	for p := range j.ports {
		out := plus(nil, []float64{0}, 0)
		n := j.ports[p].node
		if v[n] != nil {
			out = plus(out, v[n], 1)
		}
		if m.in[p] != nil {
			out = plus(out, m.in[p], -1)
		}
		top := largest(out)
		if top <= dust*loud {
			acc.Lost += t.z(m.joint, p) * out[0] * out[0]
			acc.LostAmplitude += top
			continue
		}
		piece := j.ports[p].piece
		o := outgoing{piece: piece, forward: j.ports[p].end == 0, wave: out}
		if !o.forward {
			o.s = t.net.pieces[piece].Length
		}
		t.emit(m.account, o, m.when, m.path.then(j.name[n]), m.merged)
	}
}

// edge is the jump at the front's very edge.
func edge(w []float64) float64 {
	if len(w) == 0 {
		return 0
	}
	return w[0]
}

// atNodes lists a meeting at the watches that stand at its nodes.
func (t *trace) atNodes(m *meeting, j *joint, v, force [][]float64) {
	for k, node := range j.nodes {
		for _, w := range t.net.atNode[node] {
			p := passage{watch: w, account: m.account, when: m.when, factor: 1, path: m.path, merged: m.merged, wave: v[k]}
			if j.held {
				p.held, p.wave = true, force[k]
			}
			if p.wave != nil {
				t.seen = append(t.seen, p)
			}
		}
	}
}

// answer is the joint's velocities under forces that step by the waves given
// (nil: none). A held joint does not move.
func (j *joint) answer(force [][]float64) [][]float64 {
	v := make([][]float64, len(j.nodes))
	if j.held {
		return v
	}
	for b, f := range force {
		if len(f) == 0 {
			continue
		}
		for a := range v {
			switch {
			case j.smear == nil:
				if y := j.instant[a][b]; y != 0 {
					v[a] = plus(v[a], f, y)
				}
			case len(f) == 1:
				v[a] = plus(v[a], j.smear.step[a][b], f[0])
			default:
				if v[a] == nil {
					v[a] = make([]float64, samples)
				}
				op := j.smear.op[a][b]
				for k := 0; k < samples; k++ {
					sum := 0.0
					for i, h := range f[:k+1] {
						sum += op[k*samples+i] * h
					}
					v[a][k] += sum
				}
			}
		}
	}
	return v
}

// ledger merges what was seen at one watch at one instant and writes it out.
func (t *trace) ledger() *Ledger {
	l := &Ledger{Accounts: t.accounts, PrunedBelow: t.opt.Prune, ReachedTime: t.reached, Meetings: t.meetings, Blur: t.blur, Notes: t.net.notes}
	if t.net.grid != nil {
		l.Window = t.net.grid[samples-1]
	}
	for _, a := range t.accounts {
		if a.Largest > 0 {
			l.LostAmplitude = math.Max(l.LostAmplitude, a.LostAmplitude/a.Largest)
		}
	}
	s := t.seen
	sort.SliceStable(s, func(i, j int) bool {
		a, b := &s[i], &s[j]
		switch {
		case a.watch != b.watch:
			return a.watch < b.watch
		case a.account != b.account:
			return a.account < b.account
		case a.when.hi != b.when.hi:
			return a.when.hi < b.when.hi
		}
		return a.when.lo < b.when.lo
	})
	for i := 0; i < len(s); {
		n := i + 1
		for n < len(s) && s[n].watch == s[i].watch && s[n].account == s[i].account && s[n].held == s[i].held && s[n].when.hi-s[i].when.hi <= 2*t.queue.unit {
			n++
		}
		if s[i].when.hi <= t.reached {
			if a, ok := t.arrival(s[i:n]); ok {
				l.Arrivals = append(l.Arrivals, a)
			}
		}
		i = n
	}
	t.number(l.Arrivals)
	return l
}

// number orders the arrivals of each watch by time.
func (t *trace) number(as []Arrival) {
	order := map[string]int{}
	for i, w := range t.net.watches {
		order[w.name] = i
	}
	sort.SliceStable(as, func(i, j int) bool {
		if as[i].Watch != as[j].Watch {
			return order[as[i].Watch] < order[as[j].Watch]
		}
		return as[i].Time < as[j].Time
	})
	for i := range as {
		as[i].Number = 1
		if i > 0 && as[i-1].Watch == as[i].Watch {
			as[i].Number = as[i-1].Number + 1
		}
	}
}

// arrival adds up the passages of one instant; ok is false where they are below
// the pruning level or cancel.
func (t *trace) arrival(ps []passage) (Arrival, bool) {
	var sum []float64
	loudest, parts, merged := ps[0], 0.0, 0
	for _, p := range ps {
		sum = plus(sum, p.wave, p.factor)
		loud := p.factor * largest(p.wave)
		parts = math.Max(parts, loud)
		if loud > loudest.factor*largest(loudest.wave) {
			loudest = p
		}
		if merged += p.merged; merged > mergedMost {
			merged = mergedMost
		}
	}
	first := ps[0]
	level := t.accounts[first.account].PrunedBelow
	if first.held { // the force of a wave a is 2 Z a
		level *= 2 * t.net.watches[first.watch].z
	}
	amplitude, after := t.strength(sum)
	if math.Abs(amplitude) < level || largest(sum) <= dust*parts {
		return Arrival{}, false
	}
	acc, order := &t.accounts[first.account], t.orders[first.account]
	a := Arrival{
		Watch: t.net.watches[first.watch].name, Excite: acc.Excite, Time: first.when.hi,
		Quantity: frontNames[order][0], Unit: frontNames[order][1],
		Merged: merged, Smeared: len(sum) > 1, Onset: sum[0], Settled: sum[len(sum)-1],
	}
	if first.held {
		a.Quantity, a.Unit = heldNames[order][0], heldNames[order][1]
	}
	a.Amplitude, a.PeakAfter, a.Sign = amplitude, after, 1
	if a.Amplitude < 0 {
		a.Sign = -1
	}
	a.Path = loudest.path.then(a.Watch).words()
	return a, true
}

// nearPeak is the share of the peak at which a shape counts as having come there;
// common practice for approaches that end nowhere, no source.
const nearPeak = 0.99

// strength is the largest mean of a shape over the blur time, and the start of
// the first such interval that comes to 99 % of it. The means are taken at
// intervals that start or end at a time of the grid.
func (t *trace) strength(w []float64) (amplitude, after float64) {
	if len(w) == 1 {
		return w[0], 0
	}
	grid, last := t.net.grid, t.net.grid[samples-1]
	starts := append([]float64(nil), grid...)
	if t.blur > 0 {
		for _, x := range grid {
			starts = append(starts, x-t.blur)
		}
		sort.Float64s(starts)
	}
	mean := t.means(w)
	for _, x := range starts {
		if x < 0 || x+t.blur > last*(1+1e-12) {
			continue
		}
		if m := mean(x); math.Abs(m) > math.Abs(amplitude) {
			amplitude = m
		}
	}
	for _, x := range starts {
		if x >= 0 && x+t.blur <= last*(1+1e-12) && mean(x)/amplitude >= nearPeak {
			return amplitude, x
		}
	}
	return amplitude, 0
}

// means is the running mean of a shape over x .. x + blur, or without a blur the
// shape itself at the grid times. The shape is straight between these.
func (t *trace) means(w []float64) func(x float64) float64 {
	grid := t.net.grid
	if t.blur <= 0 {
		return func(x float64) float64 { return w[sort.SearchFloat64s(grid, x)] }
	}
	area := make([]float64, samples) // integral of the shape
	for k := 1; k < samples; k++ {
		area[k] = area[k-1] + (grid[k]-grid[k-1])*(w[k]+w[k-1])/2
	}
	upTo := func(x float64) float64 {
		k := sort.SearchFloat64s(grid, x)
		switch {
		case k == 0:
			return 0
		case k == samples:
			return area[samples-1] + (x-grid[samples-1])*w[samples-1]
		}
		d, h := x-grid[k-1], grid[k]-grid[k-1]
		return area[k-1] + d*(w[k-1]+(w[k]-w[k-1])*d/(2*h))
	}
	return func(x float64) float64 { return (upTo(x+t.blur) - upTo(x)) / t.blur }
}
