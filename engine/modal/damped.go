package modal

import (
	"fmt"
	"math"
)

// dampedModes finds the roots of a damped group, one more than asked where there
// is one, and proves the list complete up to the frequency it returns.
func (w *network) dampedModes(want Want) (found, error) {
	f := found{notes: w.notes}
	most := want.Count + 1
	if len(w.elements) == 0 {
		most = min(most, len(w.nodes))
	}
	top, gamma, err := w.top(most, 2*math.Pi*want.Below)
	if err != nil {
		return f, err
	}
	l := &list{e: newEvaluator(w)}
	if w.lossy {
		l.floor = w.floor(top)
		f.notes = append(f.notes, fmt.Sprintf("%s has a loss factor, which is defined for motions that oscillate: those that creep are not listed.", w.name()))
	}
	limit := 2 * math.Pi * want.Below
	for try := 0; ; try++ {
		for _, s := range w.starts(1.15 * math.Hypot(top, gamma)) {
			if imag(s) > 1.25*top || s == 0 || l.floor > 0 && imag(s) <= l.floor {
				continue
			}
			if z, ok := l.e.newton(s, nil); ok {
				l.offer(z)
			}
		}
		edge, left, short, proved := l.prove(top, gamma)
		osc, re := l.within(edge, left)
		enough := len(osc) >= most || (limit > 0 && edge >= limit)
		if !enough && try < 4 && len(w.elements) > 0 {
			top *= 1.6
			continue
		}
		f.osc, f.real, f.complete = osc, re, edge
		if proved && short {
			f.notes = append(f.notes, fmt.Sprintf("the list of modes of %s is proved complete for decays below %.4g 1/s only.", w.name(), left))
		}
		if !proved {
			f.complete = 0
			f.notes = append(f.notes, fmt.Sprintf("the list of modes of %s could not be proved complete.", w.name()))
		} else if !enough && want.Below == 0 {
			f.notes = append(f.notes, fmt.Sprintf("%s has only %d modes below %.6g Hz that die away at less than %.6g 1/s; dashpots take the rest.",
				w.name(), len(osc), edge/(2*math.Pi), left))
		}
		return f, nil
	}
}

// top estimates the damped frequency, rad/s, below which `most` modes lie, from
// the undamped network; a limit, rad/s, caps it. gamma is the largest c/(2m).
func (w *network) top(most int, limit float64) (top, gamma float64, err error) {
	for _, el := range w.elements {
		gamma = math.Max(gamma, el.c/(2*el.m))
	}
	if len(w.elements) == 0 {
		return w.fastest(), 0, nil
	}
	c := newCounter(w)
	spare := len(w.brackets) + 1
	for _, d := range w.dashpot {
		if d > 0 {
			spare++
		}
	}
	slow := 0
	if gamma > 0 {
		if gamma*w.travel > math.Pi*mostModes {
			return 0, 0, fmt.Errorf("modal: the viscous loss of %s is so heavy that more than %d modes do not oscillate", w.name(), mostModes)
		}
		slow = c.below(gamma)
	}
	reach := 0.0
	if limit > 0 {
		reach = math.Hypot(limit, gamma)
	}
	_, hi, _, err := c.reach(most+spare+slow, reach)
	if err != nil {
		return 0, 0, err
	}
	top = math.Sqrt(math.Max(hi*hi-gamma*gamma, 0))
	if w.travel > 0 {
		top = math.Max(top, math.Pi/w.travel)
	}
	if limit > 0 {
		top = math.Min(top, limit)
	}
	return top, gamma, nil
}

// floor is a fiftieth of the lowest angular frequency without loss, rad/s: below
// it lie no vibrations to speak of, and the region that is proved keeps off the
// real axis, across which a network with loss factors is not analytic.
func (w *network) floor(top float64) float64 {
	c := newCounter(w)
	lo, hi := w.slow(top), top
	for k := 0; c.below(hi) <= w.rigid && k < 40; k++ {
		hi *= 2
	}
	for hi > 1.01*lo && c.below(lo) <= w.rigid {
		mid := math.Sqrt(lo * hi)
		if c.below(mid) <= w.rigid {
			lo = mid
		} else {
			hi = mid
		}
	}
	return lo / 50
}

// fastest bounds the damped frequency, rad/s, of a group without pieces from
// above: no mass swings faster than the lightest would on all springs at once,
// their far ends moving as far against it; dashpots only slow it down or make
// springs act together.
func (w *network) fastest() float64 {
	k, least := 0.0, math.Inf(1)
	for _, v := range w.spring {
		k += v
	}
	for _, l := range w.links {
		k += l.k
	}
	for _, b := range w.brackets {
		k += b.k
	}
	for _, m := range w.mass {
		if m > 0 {
			least = math.Min(least, m)
		}
	}
	if k == 0 || math.IsInf(least, 1) {
		return 1 // nothing swings; any frequency will do
	}
	return 1.1 * math.Sqrt(2*k/least)
}

// prove completes the list in the region up to a damped frequency of about top,
// an edge that keeps away from the roots, and says how far left it reaches. That
// is so far that the shortest piece has died out over one way (12 travel times'
// worth of decay), or a thousand times its height. Where a dashpot matches its
// line Delta vanishes to rounding that far left; then the region ends where the
// longest piece still tells.
func (l *list) prove(top, gamma float64) (edge, left float64, short, proved bool) {
	w := l.e.w
	right := 0.1 * top
	left = math.Max(10*top, 4*gamma)
	lefts := []float64{left, 1.13 * left}
	if w.travel > 0 {
		right = 0.5 / w.travel
		left = math.Max(left, math.Min(12/w.briefst, 1000*top))
		lefts = []float64{left, 1.13 * left}
		for _, f := range [...]float64{12, 8, 5, 3} {
			if x := 2*gamma + f/w.longest; x < 0.9*left {
				lefts = append(lefts, x)
			}
		}
	}
	lefts, limited := w.reachLeft(lefts, top, gamma)
	for i := range lefts {
		left = lefts[i]
		edge = l.edge(top)
		r := region{x0: -left, x1: right, y0: l.floor, y1: edge}
		l.work = 400 + 4*int(edge*w.travel) // cuts; a network needs some tens, or a few a root
		if l.complete(r) {
			return edge, left, i > 1 || limited, true
		}
		top *= 1.01
	}
	return edge, left, false, false
}

// reachLeft limits how far left a general group is searched: internal loss has
// infinitely many motions that creep at about 1/tau, where bending stiffness
// vanishes, and a piece of varying tension costs more the further left.
func (w *network) reachLeft(lefts []float64, top, gamma float64) ([]float64, bool) {
	most := math.Inf(1)
	if w.loss > 0 {
		most = 0.4 / w.loss
	}
	for _, el := range w.elements {
		if w.sys != nil && w.m.Pieces[el.piece].TensionRise != 0 {
			most = math.Min(most, 10*top+4*gamma)
		}
	}
	if most >= lefts[0] {
		return lefts, false
	}
	return []float64{most, 0.93 * most, 0.5 * most, 0.2 * most}, true
}

// edge is the middle of the widest gap between the damped frequencies known just
// above top.
func (l *list) edge(top float64) float64 {
	osc, _ := sortRoots(l.roots)
	hi := 1.15 * top
	if w := l.e.w; w.travel > 0 {
		hi = math.Max(hi, top+2*math.Pi/w.travel)
	}
	best, width := 0.5*(top+hi), 0.0
	last := top
	for _, s := range osc {
		y := math.Min(imag(s), hi)
		if y <= top {
			continue
		}
		if y-last > width {
			best, width = 0.5*(last+y), y-last
		}
		last = y
	}
	if hi-last > width {
		best = 0.5 * (last + hi)
	}
	return best
}

// within picks the roots of the region that was proved.
func (l *list) within(edge, left float64) ([]complex128, []float64) {
	var in []complex128
	for _, s := range l.roots {
		if imag(s) < edge && real(s) > -left {
			in = append(in, s)
		}
	}
	return sortRoots(in)
}
