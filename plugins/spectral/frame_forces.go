package spectral

// inertia writes M v.
func (s *system) inertia(dst, v []float64) {
	n := s.inner
	copy(dst[:n], v[:n])
	for i, m := range s.mass {
		sum := m * v[n+i]
		for _, t := range s.rows[i] {
			sum += t.m * v[n+t.col]
		}
		dst[n+i] = sum
	}
	for e := range s.elements {
		el := &s.elements[e]
		b := el.body
		in, out := v[el.first:el.first+b.ni], dst[el.first:el.first+b.ni]
		for a, end := range el.out {
			if end >= 0 {
				u := v[n+end]
				for k, d := range b.drag[a] {
					out[k] += d * u
				}
				dst[n+end] += dot(b.drag[a], in)
			}
		}
	}
}

// stiffness writes K x, without brackets.
func (f *frame) stiffness(dst, x []float64) {
	n := f.inner
	for i, row := range f.rows {
		sum := 0.0
		for _, t := range row {
			sum += t.k * x[n+t.col]
		}
		dst[n+i] = sum
	}
	for e := range f.elements {
		el := &f.elements[e]
		b := el.body
		in, out := x[el.first:el.first+b.ni], dst[el.first:el.first+b.ni]
		for k, w2 := range b.omega2 {
			out[k] = w2 * in[k]
		}
	}
	for i := range f.sags {
		sg := &f.sags[i]
		h := sg.g * dot(sg.w, x)
		for k, v := range sg.w {
			dst[k] += v * h
		}
	}
}

func (f *frame) lossForce(dst, v []float64) {
	n := f.inner
	for i, row := range f.rows {
		sum := 0.0
		for _, t := range row {
			sum += t.c * v[n+t.col]
		}
		dst[n+i] = sum
	}
	for e := range f.elements {
		el := &f.elements[e]
		b := el.body
		in, out := v[el.first:el.first+b.ni], dst[el.first:el.first+b.ni]
		for k := range out {
			out[k] = b.rate * in[k]
		}
		for a, end := range el.out {
			if end < 0 {
				continue
			}
			u := v[n+end]
			for k, d := range b.drag[a] {
				out[k] += b.rate * d * u
			}
			dst[n+end] += b.rate * dot(b.drag[a], in)
			if b.cii != nil {
				for k, c := range b.cio[a] {
					out[k] += c * u
				}
				dst[n+end] += dot(b.cio[a], in)
			}
		}
		if b.cii != nil {
			for k := range out {
				out[k] += dot(b.cii[k*b.ni:(k+1)*b.ni], in)
			}
		}
	}
}

func (f *frame) accel(dst, x, v, r, load []float64) {
	n := f.size()
	f.stiffness(f.fx, x)
	f.lossForce(dst, v)
	for i, k := range f.fx {
		dst[i] = -dst[i] - k
	}
	for b := range f.brackets {
		k := &f.brackets[b]
		pull := k.k * (k.across(x, f.inner) - r[b])
		dst[f.inner+k.end] -= pull
		if k.other >= 0 {
			dst[f.inner+k.other] += pull
		}
	}
	if load != nil {
		for k := range dst[:n] {
			dst[k] += load[k]
		}
	}
	f.settle(dst)
}

// settle replaces x by M^-1 x.
func (f *frame) settle(x []float64) {
	n := f.inner
	for i, at := range f.place {
		f.real[at] = x[n+i]
	}
	each := func(do func(end int, in, drag []float64)) {
		for e := range f.elements {
			el := &f.elements[e]
			for a, end := range el.out {
				if end >= 0 {
					do(f.place[end], x[el.first:el.first+el.body.ni], el.body.drag[a])
				}
			}
		}
	}
	each(func(end int, in, drag []float64) { f.real[end] -= dot(drag, in) })
	f.mass.solve(f.real)
	each(func(end int, in, drag []float64) {
		for k, d := range drag {
			in[k] -= d * f.real[end]
		}
	})
	for i, at := range f.place {
		x[n+i] = f.real[at]
	}
}

func (f *frame) stored(x, v, r []float64) float64 {
	f.stiffness(f.fx, x)
	sum := dot(f.fx, x[:f.size()])
	f.inertia(f.fx, v)
	sum += dot(f.fx, v[:f.size()])
	for b := range f.brackets {
		k := &f.brackets[b]
		d := k.across(x, f.inner) - r[b]
		sum += k.k * d * d
	}
	return sum / 2
}

func (f *frame) row(arrow []float64) []float64   { return arrow }
func (f *frame) enter(arrow []float64) []float64 { return arrow }
