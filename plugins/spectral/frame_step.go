package spectral

// solve replaces x by Z^-1 x, Z = K_0 + s C + s^2 M with the brackets taken in.
func (f *frame) solve(p *framePole, x []complex128) {
	for i, at := range f.place {
		f.outs[at] = x[f.inner+i]
	}
	for e := range f.elements {
		el := &f.elements[e]
		c, b := p.cells[el.body], el.body
		t := x[el.first : el.first+b.ni]
		c.apply(t, f.sum)
		for a, end := range el.out {
			if end >= 0 {
				f.outs[f.place[end]] -= product(c.cross[a], t)
			}
		}
	}
	p.outer.solve(f.outs)
	for e := range f.elements {
		el := &f.elements[e]
		c, b := p.cells[el.body], el.body
		t := x[el.first : el.first+b.ni]
		for a, end := range el.out {
			if end < 0 {
				continue
			}
			u := f.outs[f.place[end]]
			for k, v := range c.reach[a] {
				t[k] -= u * v
			}
		}
	}
	for i, at := range f.place {
		x[f.inner+i] = f.outs[at]
	}
}

// step runs the state through all factors of the step length.
func (f *frame) step(st *state, h float64, ld *load) {
	p := f.planFor(h)
	for i := range p.poles {
		f.apply(&p.poles[i], st, ld)
	}
}

// unbend takes the sagging lines' stiffness into a solution made without.
func (f *frame) unbend(p *framePole, t []complex128) {
	n := len(f.sags)
	if n == 0 {
		return
	}
	h := make([]complex128, n)
	for i := range f.sags {
		for k, v := range f.sags[i].w {
			h[i] += complex(v, 0) * t[k]
		}
	}
	for i := range f.sags {
		c := product(p.gain[i*n:(i+1)*n], h)
		for k, v := range p.sag[i] {
			t[k] -= c * v
		}
	}
}

// update adds the increments to the state.
func (f *frame) update(p *framePole, st *state, t []complex128) {
	for b := range f.brackets {
		k := &f.brackets[b]
		rho := complex(k.k/k.c, 0)
		u := t[f.inner+k.end]
		if k.other >= 0 {
			u -= t[f.inner+k.other]
		}
		q := rho * (u - complex(k.across(st.x, f.inner)-st.r[b], 0)) / (rho + p.s)
		st.r[b] += real(p.c * q)
	}
	cs := p.c * p.s
	for i, u := range t {
		x, v := st.x[i], st.v[i]
		if st.z != nil {
			q := (u - complex(x, 0)) / p.s
			st.y[i] += real(p.c * (q - complex(st.z[i], 0)) / p.s)
			st.z[i] += real(p.c * q)
		}
		st.x[i] = x + real(p.c*u)
		st.v[i] = v + real(p.c)*v + real(cs*u)
	}
}
