package spectral

// snapshot is all that a record can read at one instant.
type snapshot struct {
	x, v, a    []float64
	up, vp, ap []float64 // of the prescribed nodes
	share      []float64 // distributed loads on watched nodes, N
	extra      []float64 // [line] tension beyond the one at rest, N: of sag and stretch
}

func newSnapshot(n, moved, watched, lines int) *snapshot {
	return &snapshot{extra: make([]float64, lines), x: make([]float64, n), v: make([]float64, n), a: make([]float64, n),
		up: make([]float64, moved), vp: make([]float64, moved), ap: make([]float64, moved), share: make([]float64, watched)}
}

// basis is the integrals over one base step, of length h from t0: i0 of a
// quantity, i1 of (t-t0) times it.
type basis struct {
	h            float64
	z, y         []float64 // int x, and the integral of that
	up0, up1     []float64 // int u_p, int (t-t0) u_p
	share0, shr1 []float64
}

// sample is a tap's value at an instant.
func (t *tap) sample(s *snapshot) float64 {
	v := t.fixed + t.f[0].on(s.x) + t.f[1].on(s.v) + t.f[2].on(s.a) +
		t.f[0].prescribed(s.up) + t.f[1].prescribed(s.vp) + t.f[2].prescribed(s.ap)
	if t.share >= 0 {
		v += s.share[t.share]
	}
	return v + t.tightened(s)
}

// tightened is what a line's extra tension adds to its tension, or to a force.
func (t *tap) tightened(s *snapshot) float64 {
	switch {
	case t.line < 0:
		return 0
	case t.pull:
		return s.extra[t.line]
	}
	return s.extra[t.line] * (t.steep.on(s.x) + t.steep.prescribed(s.up))
}

// integrals are int q dt and int (t-t0) q dt over a base step between two
// instants: of a velocity from displacements, of an acceleration from velocities,
// of a displacement from the integral states.
func (t *tap) integrals(b *basis, from, to *snapshot) (i0, i1 float64) {
	h := b.h
	i0, i1 = t.fixed*h, t.fixed*h*h/2
	if f := &t.f[0]; !f.empty() {
		if b.z != nil {
			z := f.on(b.z)
			i0, i1 = i0+z, i1+h*z-f.on(b.y)
		}
		i0, i1 = i0+f.prescribed(b.up0), i1+f.prescribed(b.up1)
	}
	if f := &t.f[1]; !f.empty() {
		x1 := f.on(to.x) + f.prescribed(to.up)
		i0 += x1 - f.on(from.x) - f.prescribed(from.up)
		i1 += h*x1 - f.prescribed(b.up0)
		if b.z != nil {
			i1 -= f.on(b.z)
		}
	}
	if f := &t.f[2]; !f.empty() {
		v1 := f.on(to.v) + f.prescribed(to.vp)
		i0 += v1 - f.on(from.v) - f.prescribed(from.vp)
		i1 += h*v1 - (f.on(to.x) + f.prescribed(to.up) - f.on(from.x) - f.prescribed(from.up))
	}
	if t.share >= 0 {
		i0 += b.share0[t.share]
		i1 += b.shr1[t.share]
	}
	if t.line >= 0 { // by the trapezoidal rule
		a, z := t.tightened(from), t.tightened(to)
		i0 += h * (a + z) / 2
		i1 += h * h * (a + 2*z) / 6
	}
	return i0, i1
}

// before are the integrals over an interval h that ends at t = 0, with the
// motion going on as it starts: a displacement straight, velocity, slope and
// force constant, acceleration zero. i1 is weighted from the interval's start.
func (t *tap) before(s *snapshot, h float64) (i0, i1 float64) {
	q := t.fixed + t.f[0].on(s.x) + t.f[0].prescribed(s.up) + t.f[1].on(s.v) + t.f[1].prescribed(s.vp)
	if t.share >= 0 {
		q += s.share[t.share]
	}
	q += t.tightened(s)
	i0, i1 = q*h, q*h*h/2
	if t.straight {
		v := t.f[0].on(s.v) + t.f[0].prescribed(s.vp)
		i0 -= v * h * h / 2
		i1 -= v * h * h * h / 6
	}
	return i0, i1
}

// recorder writes the records as base steps complete.
type recorder struct {
	taps  []*tap
	sub   int     // base steps of one interval
	every float64 // s
}

// start fills what lies before and at t = 0.
func (r *recorder) start(s *snapshot) {
	for _, t := range r.taps {
		switch t.means {
		case 0:
			t.out[0] = t.sample(s)
		case 1:
			i0, _ := t.before(s, r.every/2)
			t.out[0] += i0 / r.every
		default:
			_, i1 := t.before(s, r.every)
			t.out[0] += i1 / (r.every * r.every)
		}
	}
}

// put adds a share to the row at grid index i, where the record has one.
func (t *tap) put(i int, v float64) {
	if i%t.stride == 0 && i/t.stride < len(t.out) {
		t.out[i/t.stride] += v
	}
}

// wants tells whether a tap has a row at grid index i.
func (t *tap) wants(i int) bool { return i%t.stride == 0 && i/t.stride < len(t.out) }

// step takes base step number k, which ran between two instants.
func (r *recorder) step(k int, b *basis, from, to *snapshot) {
	w := r.every
	for _, t := range r.taps {
		switch t.means {
		case 0:
			if (k+1)%r.sub == 0 && t.wants((k+1)/r.sub) {
				t.out[(k+1)/r.sub/t.stride] = t.sample(to)
			}
		case 1:
			// With two base steps an interval, row i reaches from half step 2i-1 to 2i.
			if i := (k + 1) / 2; t.wants(i) {
				i0, _ := t.integrals(b, from, to)
				t.put(i, i0/w)
			}
		default:
			i := k / r.sub
			if !t.wants(i) && !t.wants(i+1) {
				continue
			}
			i0, i1 := t.integrals(b, from, to)
			up := float64(k%r.sub)*b.h*i0 + i1
			t.put(i+1, up/(w*w))
			t.put(i, (w*i0-up)/(w*w))
		}
	}
}

// needs says what the records ask for beyond displacement and velocity: integral
// states, accelerations at the rows.
func (r *recorder) needs() (integrals, accelerations bool) {
	for _, t := range r.taps {
		integrals = integrals || t.means >= 1 && !t.f[0].empty() || t.means >= 2 && !t.f[1].empty()
		accelerations = accelerations || t.means == 0 && !t.f[2].empty()
	}
	return integrals, accelerations
}
