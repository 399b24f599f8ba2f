package spectral

import "math"

// lawful runs the time from t of a given length, without breaks, in equal steps; t0
// is the start of the base step.
func (w *walk) lawful(t, t0, length float64) error {
	n := math.Max(1, math.Ceil(length/w.lay.law-1e-9))
	d := length / n
	for i := 0.0; i < n; i++ {
		at := t + i*d
		if err := w.lawStep(at, t0, d); err != nil {
			return err
		}
	}
	return nil
}

func (w *walk) lawStep(at, t0, d float64) error {
	x := w.laws.stretch
	if x == nil {
		return w.flow(at, t0, d)
	}
	w.kick(x, at, 1.0/6, d, false)
	if err := w.flow(at, t0, d/2); err != nil {
		return err
	}
	w.kick(x, at+d/2, 2.0/3, d, true)
	if err := w.flow(at+d/2, t0, d/2); err != nil {
		return err
	}
	w.kick(x, at+d, 1.0/6, d, false)
	return x.steady(d)
}

func (w *walk) kick(x *stretches, t, share, d float64, modified bool) {
	x.tell(t)
	w.meter.acct.Work += share * d * x.kick(w.st, share, d, modified)
}

// flow advances the linear network by d, with the contacts' forces.
func (w *walk) flow(at, t0, d float64) error {
	l := w.laws
	w.win = window{at, at + d}
	room := math.Inf(1)
	if w.next < len(w.ex.breaks) {
		room = w.ex.breaks[w.next] - at
	}
	w.ex.slice(at, d, math.Min(w.lay.loaded, room))
	copy(w.pieces, w.ex.up)
	w.meter.held = false
	if len(l.contacts)+len(l.rides) == 0 {
		w.meter.open(w.st, d)
		w.op.step(w.st, d, &w.ex.total)
	} else {
		l.trial.copyFrom(w.st)
		w.op.step(l.trial, d, &w.ex.total)
		s := step{at, d}
		for _, r := range l.rides {
			work, lost := r.move(l, &w.ex.total, w.st, s)
			w.meter.acct.Work += work
			w.meter.acct.Lost += lost
		}
		if err := l.find(s); err != nil {
			return err
		}
		a := l.answerFor(d)
		for i, f := range l.forces {
			w.ex.total.push(f, l.contacts[i].dir)
			l.trial.addScaled(f, a.by[i])
		}
		w.meter.open(w.st, d)
		w.st.copyFrom(l.trial)
		for i, f := range l.forces {
			c := &l.contacts[i]
			w.meter.acct.Lost += c.settle(dot(c.dir, w.st.x), f, s)
		}
	}
	w.meter.close(w.st, d)
	w.gather(&w.ex.total, at-t0, d)
	return nil
}

// tensions sets the lines' extra tensions: of sag, and where the line stretches also
// of that. s has its displacements.
func (w *walk) tensions(s *snapshot) {
	if !w.tight {
		return
	}
	clear(s.extra)
	for i := range w.sagRows {
		sg := &w.sys.sags[i]
		s.extra[sg.line] = sg.g * (dot(w.sagRows[i], s.x) + dot(sg.moved, s.up))
	}
	if w.laws == nil || w.laws.stretch == nil {
		return
	}
	x := w.laws.stretch
	copy(x.up, s.up)
	for i := range x.lines {
		l := &x.lines[i]
		alone, _ := x.pull(l, s.x, nil)
		s.extra[l.line] += alone
	}
	if w.accel {
		x.gradient(s.x)
		copy(x.turn, x.force)
		x.frame.settle(x.turn)
		for k, a := range x.turn[:len(s.a)] {
			s.a[k] -= a
		}
	}
}

// push adds a constant force along a direction.
func (l *load) push(f float64, dir []float64) {
	if f == 0 {
		return
	}
	l.active, l.lo = true, 0
	for k, v := range dir {
		l.at[0][k] += f * v
	}
}
