package spectral

// frame propagates networks of bodies: whatever bends, hangs in varying tension or
// sags. It runs the same Padé factors as arrow, in the same increment form, but
// elements have up to four outer coordinates, their losses may couple the inner
// ones, outer ones share mass, and the sag of a line couples all of it by
//
//	K = K_0 + sum over lines of G w w',
//
// which each solution takes in by Sherman and Morrison's formula. The outer
// coordinates' system is banded.
type frame struct {
	*system
	place   []int // of each outer coordinate in the banded order
	width   int
	mass    *band[float64] // of the outer coordinates without what the inner ones carry, factored
	factors map[int][]factor
	plans   []*framePlan
	hot     float64
	degree  int          // of the factors; 0: by the step
	sum     []complex128 // [size]
	outs    []complex128 // [ends], banded order
	real    []float64    // [ends], banded order
	fx      []float64    // [size]
	fl      []complex128 // [size]
}

type framePlan struct {
	h     float64
	poles []framePole
}

// framePole is one factor at one step length.
type framePole struct {
	s, c  complex128
	w     [loadDegree + 1]complex128 // as in arrow
	cells map[*body]*cell
	outer *band[complex128]
	sag   [][]complex128 // Z^-1 w of each sagging line
	gain  []complex128   // [sags*sags] (1/G + W' Z^-1 W)^-1
}

// cell is the inner part of an element at one shift: Z_ii^-1 (its diagonal alone
// without internal loss) and Z_ii^-1 Z_io.
type cell struct {
	diagonal []complex128
	inverse  []complex128
	cross    [][]complex128 // [outer][ni] Z_io
	reach    [][]complex128 // [outer][ni] Z_ii^-1 Z_io
}

func newFrame(s *system, hot float64) *frame {
	f := &frame{system: s, hot: hot, factors: map[int][]factor{}, sum: make([]complex128, s.size()),
		outs: make([]complex128, s.ends), real: make([]float64, s.ends), fx: make([]float64, s.size()), fl: make([]complex128, s.size())}
	near := make([][]int, s.ends)
	for i, row := range s.rows {
		for _, t := range row {
			if t.col != i {
				near[i] = append(near[i], t.col)
			}
		}
	}
	f.place, f.width = narrow(near)
	f.mass = newBand[float64](s.ends, f.width)
	for i, m := range s.mass {
		f.mass.add(f.place[i], f.place[i], m)
		for _, t := range s.rows[i] {
			if t.col < i && t.m != 0 {
				f.mass.add(f.place[i], f.place[t.col], t.m)
			}
		}
	}
	for e := range s.elements {
		b, out := s.elements[e].body, s.elements[e].out
		for a, ea := range out {
			for d := 0; d <= a; d++ {
				if ed := out[d]; ea >= 0 && ed >= 0 {
					f.mass.add(f.place[ea], f.place[ed], -dot(b.drag[a], b.drag[d]))
				}
			}
		}
	}
	f.mass.factor()
	return f
}

// planFor prepares a step length, or finds it prepared.
func (f *frame) planFor(h float64) *framePlan {
	for i, p := range f.plans {
		if p.h == h {
			copy(f.plans[1:i+1], f.plans[:i])
			f.plans[0] = p
			return p
		}
	}
	m := f.degree
	if m == 0 {
		m = padeDegree(f.hot * h)
	}
	if f.factors[m] == nil {
		f.factors[m] = pade(m)
	}
	p := &framePlan{h: h}
	var w [loadDegree + 1]float64
	w[0] = 1
	for _, fc := range f.factors[m] {
		p.poles = append(p.poles, f.shift(fc, h, &w))
	}
	if len(f.plans) < keptPlans {
		f.plans = append(f.plans, nil)
	}
	copy(f.plans[1:], f.plans)
	f.plans[0] = p
	return p
}

// shift prepares one factor.
func (f *frame) shift(fc factor, h float64, w *[loadDegree + 1]float64) framePole {
	ih := complex(1/h, 0)
	p := framePole{s: fc.pole * ih, c: 2 * fc.res / fc.pole, cells: map[*body]*cell{}}
	if fc.single {
		p.c /= 2
	}
	p.w = loadWeights(p.s, p.c, ih, w)
	p.outer = newBand[complex128](f.ends, f.width)
	for i, row := range f.rows {
		at := f.place[i]
		p.outer.add(at, at, p.s*p.s*complex(f.system.mass[i], 0))
		for _, t := range row {
			if t.col <= i {
				p.outer.add(at, f.place[t.col], complex(t.k, 0)+p.s*(complex(t.c, 0)+p.s*complex(t.m, 0)))
			}
		}
	}
	for _, b := range f.brackets {
		z := complex(b.k, 0) * p.s / (p.s + complex(b.k/b.c, 0))
		p.outer.add(f.place[b.end], f.place[b.end], z)
		if b.other >= 0 {
			p.outer.add(f.place[b.other], f.place[b.other], z)
			p.outer.add(f.place[b.end], f.place[b.other], -z)
		}
	}
	for e := range f.elements {
		el := &f.elements[e]
		c := p.cells[el.body]
		if c == nil {
			c = newCell(el.body, p.s)
			p.cells[el.body] = c
		}
		for a, ea := range el.out {
			for d := 0; d <= a && ea >= 0; d++ {
				if ed := el.out[d]; ed >= 0 {
					p.outer.add(f.place[ea], f.place[ed], -product(c.cross[a], c.reach[d]))
				}
			}
		}
	}
	p.outer.factor()
	f.borders(&p)
	return p
}

// borders prepares the sagging lines' terms.
func (f *frame) borders(p *framePole) {
	n := len(f.sags)
	for _, sg := range f.sags {
		y := make([]complex128, f.size())
		for i, v := range sg.w {
			y[i] = complex(v, 0)
		}
		f.solve(p, y)
		p.sag = append(p.sag, y)
	}
	p.gain = make([]complex128, n*n)
	for i := range f.sags {
		p.gain[i*n+i] = complex(1/f.sags[i].g, 0)
		for j := range f.sags {
			for k, v := range f.sags[i].w {
				p.gain[i*n+j] += complex(v, 0) * p.sag[j][k]
			}
		}
	}
	invert(p.gain, n)
}

// loadWeights are the weights with which a factor sees the powers of a load, and
// takes those powers through the factor; see arrow.shift.
func loadWeights(s, c, ih complex128, w *[loadDegree + 1]float64) (out [loadDegree + 1]complex128) {
	var before complex128
	for j := range w {
		out[j] = before*ih - complex(w[j], 0)
		w[j] += real(c * before * ih)
		before = out[j] / s
	}
	return out
}

func newCell(b *body, s complex128) *cell {
	c := &cell{}
	for a := range b.outer {
		row := make([]complex128, b.ni)
		for k, v := range b.drag[a] {
			row[k] = (s*complex(b.rate, 0) + s*s) * complex(v, 0)
			if b.cio != nil {
				row[k] += s * complex(b.cio[a][k], 0)
			}
		}
		c.cross = append(c.cross, row)
	}
	base := s*complex(b.rate, 0) + s*s
	if b.cii == nil {
		c.diagonal = make([]complex128, b.ni)
		for k, w2 := range b.omega2 {
			c.diagonal[k] = 1 / (complex(w2, 0) + base)
		}
	} else {
		c.inverse = make([]complex128, b.ni*b.ni)
		for i, v := range b.cii {
			c.inverse[i] = s * complex(v, 0)
		}
		for k, w2 := range b.omega2 {
			c.inverse[k*b.ni+k] += complex(w2, 0) + base
		}
		invert(c.inverse, b.ni)
	}
	for _, row := range c.cross {
		reach := append([]complex128(nil), row...)
		c.apply(reach, make([]complex128, b.ni))
		c.reach = append(c.reach, reach)
	}
	return c
}

// apply replaces t by Z_ii^-1 t.
func (c *cell) apply(t, work []complex128) {
	if c.inverse == nil {
		for k, d := range c.diagonal {
			t[k] *= d
		}
		return
	}
	for i := range t {
		work[i] = product(c.inverse[i*len(t):(i+1)*len(t)], t)
	}
	copy(t, work[:len(t)])
}

func product(a, b []complex128) complex128 {
	var sum complex128
	for i, v := range a {
		sum += v * b[i]
	}
	return sum
}

// apply replaces the state y by y + Re c A (A - s)^-1 y; see arrow.
func (f *frame) apply(p *framePole, st *state, ld *load) {
	t := f.fl
	f.stiffness(f.fx, st.x)
	for i, v := range f.fx {
		t[i] = complex(v, 0)
	}
	f.inertia(f.fx, st.v)
	for i, v := range f.fx {
		t[i] -= p.s * complex(v, 0)
	}
	for b := range f.brackets {
		k := &f.brackets[b]
		pull := complex(k.k*(k.across(st.x, f.inner)-st.r[b]), 0) * p.s / (complex(k.k/k.c, 0) + p.s)
		t[f.inner+k.end] += pull
		if k.other >= 0 {
			t[f.inner+k.other] -= pull
		}
	}
	if ld != nil && ld.active {
		for j := range ld.at {
			for k, v := range ld.at[j][ld.lo:f.size()] {
				t[ld.lo+k] += p.w[j] * complex(v, 0)
			}
		}
	}
	f.solve(p, t)
	f.unbend(p, t)
	f.update(p, st, t)
}
