package characteristic

import "math"

// advance moves the cluster by one step of its own, stopping at every break
// that arrives or starts in it.
func (c *cluster) advance() {
	t := float64(c.step) * c.delta
	end := float64(c.step+1) * c.delta
	whole := true
	for {
		te := c.nextEvent()
		if te > end+c.tol {
			if end-t > c.tol {
				c.part(t, end, whole)
			}
			break
		}
		switch {
		case te < t+c.tol:
			te = t
		case te > end-c.tol:
			te = end
		}
		if te > t {
			c.part(t, te, whole && te == end)
			whole = false
		}
		c.meet(te)
		t = te
	}
	c.step++
	for i := range c.joints {
		j := &c.joints[i]
		for p := range j.ports {
			j.ports[p].out.push(j.u - j.ports[p].a - j.ports[p].half)
		}
		if j.own != nil {
			j.own.push(j.u)
		}
	}
}

// nextEvent is the time of the next break that reaches one of the joints.
func (c *cluster) nextEvent() float64 {
	first := math.Inf(1)
	for i := range c.joints {
		j := &c.joints[i]
		if j.next < len(j.breaks) {
			first = math.Min(first, j.breaks[j.next])
		}
		for p := range j.ports {
			q := &j.ports[p]
			t, _ := q.far.next()
			first = math.Min(first, t)
			for s := range q.sources {
				t, _ = q.sources[s].next()
				first = math.Min(first, t)
			}
		}
	}
	return first
}

// meet lets the breaks that arrive at time t scatter: the states go on, what
// jumps in the waves jumps in u and in what leaves.
func (c *cluster) meet(t float64) {
	order, total := c.gather(t)
	for i := range c.joints {
		j := &c.joints[i]
		j.before = j.u
		for p := range j.ports {
			j.ports[p].before = j.ports[p].a
		}
	}
	c.listen(t, false, 0, 1)
	switch {
	case !c.simple:
		c.waves(c.in[0])
		c.shape(c.in[0])
	case c.joints[0].kind == instant:
		c.joints[0].u = c.answer()
	case c.joints[0].kind == moved:
		c.joints[0].u = c.joints[0].motion.Displacement(math.Max(t+c.tol, 0))
	}
	c.last = 0
	for i := range c.joints {
		c.scatter(&c.joints[i], t, order, total)
	}
}

// gather takes the breaks that arrive by t off their queues, and finds the
// lowest order among them and their strength in all.
func (c *cluster) gather(t float64) (order int, total float64) {
	order = math.MaxInt
	take := func(w float64, o int) {
		total += w
		order = min(order, o)
	}
	for i := range c.joints {
		j := &c.joints[i]
		j.weight, j.order = 0, math.MaxInt
		for j.next < len(j.breaks) && j.breaks[j.next] <= t+c.tol {
			j.weight, j.order = 1, min(j.order, j.orders[j.next])
			take(1, j.order)
			j.next++
		}
		for p := range j.ports {
			q := &j.ports[p]
			q.bring, q.level = 0, math.MaxInt
			c.arrive(q, &q.far, t)
			for s := range q.sources {
				c.arrive(q, &q.sources[s], t)
			}
			if q.bring > 0 {
				take(q.bring, q.level)
			}
		}
	}
	return order, total
}

func (c *cluster) arrive(q *port, r *reader, t float64) {
	for {
		te, b := r.next()
		if te > t+c.tol {
			return
		}
		q.bring += b.weight * r.factor
		q.level = min(q.level, b.order)
		r.event++
	}
}

// Strengths below weak, in shares of what set out times (step/longest travel
// time)^(order-1), and orders above rounded are left to the interpolation.
// Chosen; a cubic
// beside a jump of the fourth derivative would do no better than a quintic
// across it.
const (
	weak    = 1e-7
	rounded = 3
)

// scatter marks the break in what leaves a joint. A mass turns back a break as
// it comes and lets through what it makes of it, one order smoother.
func (c *cluster) scatter(j *joint, t float64, order int, total float64) {
	for p := range j.ports {
		q := &j.ports[p]
		w, o := 0.0, order
		switch {
		case j.kind == fixed || j.kind == moved:
			w, o = q.bring+j.weight, min(q.level, j.order)
		case j.mass > 0:
			w, o = total, order+1
			if q.bring > 0 && q.level <= order {
				w, o = q.bring, q.level
			}
			if j.weight > 0 && j.order+1 < o {
				w, o = j.weight, j.order+1
			}
		case j.r > 0 && (c.simple || len(c.joints) == 1):
			w = j.weight + math.Abs(2*q.z/j.r-1)*q.bring
			for k := range j.ports {
				if k != p {
					w += 2 * j.ports[k].z / j.r * j.ports[k].bring
				}
			}
		default:
			w = total
			if !c.light && j.weight == 0 && len(c.joints) > 1 && !j.brought() {
				o++
			}
		}
		left, right := j.ports[p].before, q.a
		b := breakpoint{t: t, left: j.before - left - q.half, right: j.u - right - q.half, weight: w, order: o}
		strength := w * math.Pow(c.hrel, float64(o-1))
		if o > rounded || strength < weak {
			continue
		}
		q.out.mark(b) // where there is no room, the interpolation copes
	}
	if j.own != nil && order <= rounded && total*math.Pow(c.hrel, float64(order-1)) >= weak {
		j.own.mark(breakpoint{t: t, left: j.before, right: j.u, weight: total, order: order})
	}
}

func (j *joint) brought() bool {
	for p := range j.ports {
		if j.ports[p].bring > 0 {
			return true
		}
	}
	return false
}

// energy is a running account, J.
type energy struct{ work, lost float64 }

// mean is the mean over a part step of the product of two rates whose means
// over this part and the one before are given: each runs straight through its
// own mean, so its square's share is a twelfth of the change.
func mean(p, dp, q, dq float64) float64 { return p*q + dp*dq/12 }

// settle books the part step of length h that has just been done (third order).
func (c *cluster) settle(h float64) {
	bend := 0.0
	if c.last > 0 && math.Abs(c.last-h) <= c.tol {
		bend = 1
	}
	c.last = h
	for i := range c.joints {
		j := &c.joints[i]
		v := (j.u - j.before) / h
		dv := bend * (v - j.rate)
		j.rate = v
		switch j.kind {
		case moved:
			c.drive(j, v, dv, bend, h)
		case instant, dynamic:
			c.account.lost += j.dashpot * h * mean(v, dv, v, dv)
			c.account.work += h * (j.pushed[0]*v + j.pushed[1]*dv/6)
		}
		for p := range j.ports {
			j.ports[p].rate = (j.ports[p].a - j.ports[p].before) / h
		}
	}
	for i := range c.ties {
		c.settleTie(&c.ties[i], bend, h)
	}
	first := len(c.x) - len(c.brackets)
	for i, q := range c.brackets {
		v := (c.x[first+i] - c.oldQ[i]) / h
		dv := bend * (v - c.rateQ[i])
		c.account.lost += q.c * h * mean(v, dv, v, dv)
		c.oldQ[i], c.rateQ[i] = c.x[first+i], v
	}
}

// drive books the work of whoever moves a node against the line.
func (c *cluster) drive(j *joint, v, dv, bend, h float64) {
	for p := range j.ports {
		q := &j.ports[p]
		ra := (q.a - q.before) / h
		da := bend * (ra - q.rate)
		pull := q.z * (2*ra - v)
		dpull := q.z * (2*da - dv)
		rest := q.p.gamma * q.z * (q.a + q.before - 0.5*(j.u+j.before))
		c.account.work -= h * (mean(pull, dpull, v, dv) + rest*v)
	}
}

func (c *cluster) settleTie(t *tie, bend, h float64) {
	a := &c.joints[t.a]
	gap := a.rate
	if t.b >= 0 {
		gap -= c.joints[t.b].rate
	}
	if t.other != nil {
		v := (t.other.u - t.before) / h
		dv := bend * (v - t.rate)
		t.rate = v
		gap -= v
		stretch := 0.5 * (a.u + a.before - t.other.u - t.before)
		pull := t.k*stretch + t.c*gap
		dpull := bend * (t.k*gap*h + t.c*(gap-t.gap))
		c.account.work -= h * mean(pull, dpull, v, dv)
	}
	d := bend * (gap - t.gap)
	c.account.lost += t.c * h * mean(gap, d, gap, d)
	t.gap = gap
}
