package spectral

import "math"

// over sets the loads of the window from t to t+h.
func (x *excitation) over(t, h float64) {
	n := x.sys.size() + len(x.sys.watched)
	reset := func(l *load) {
		if l.active {
			for j := range l.at {
				clear(l.at[j])
			}
		}
		l.active, l.lo = false, n
	}
	reset(&x.total)
	if x.apart {
		reset(&x.forces)
	}
	for i := range x.sources {
		src := &x.sources[i]
		tau, active := x.sample(src.at, t, h)
		if !active {
			continue
		}
		if src.accelerates {
			for j := range tau {
				tau[j] = polyAt(&tau, 0, h, j+1) * math.Pow(h, float64(j))
			}
		}
		src.add(&x.total, &tau)
		if !src.moved && x.apart {
			src.add(&x.forces, &tau)
		}
	}
	for _, f := range x.fields {
		x.addField(f, t, h)
	}
	if !x.apart {
		x.forces = x.total
		return
	}
	for i := range x.motions {
		x.up[i], _ = x.sample(x.motions[i].Displacement, t, h)
		x.vp[i], _ = x.sample(x.motions[i].Velocity, t, h)
	}
}

// wide is a window of loads from which short steps take their parts.
type wide struct {
	window
	total, forces load
	up, vp        [][loadDegree + 1]float64
}

// slice sets the loads of a step from t to t+h as part of a window that is evaluated
// once for many steps and reaches on for up to reach.
func (x *excitation) slice(t, h, reach float64) {
	tiny := 1e-9 * h
	if x.wide == nil {
		x.wide = &wide{window: window{-1, -1}}
	}
	w := x.wide
	if t < w.from-tiny || t+h > w.to+tiny {
		x.over(t, math.Max(h, reach))
		w.window = window{t, t + math.Max(h, reach)}
		w.total.copyFrom(&x.total)
		w.forces.copyFrom(&x.forces)
		w.up, w.vp = append(w.up[:0], x.up...), append(w.vp[:0], x.vp...)
	}
	tau, share := w.tau(t), h/w.length()
	for _, l := range [2][2]*load{{&w.total, &x.total}, {&w.forces, &x.forces}} {
		for j := range l[1].at {
			clear(l[1].at[j]) // contacts have pushed at it
		}
		l[0].cut(l[1], tau, share)
	}
	for i := range w.up {
		x.up[i], x.vp[i] = cutPoly(&w.up[i], tau, share), cutPoly(&w.vp[i], tau, share)
	}
}

func (l *load) copyFrom(o *load) {
	l.active, l.lo = o.active, o.lo
	for j := range l.at {
		l.at[j] = append(l.at[j][:0], o.at[j]...)
	}
}

// sample is the polynomial through the values at the Gauss points, as
// derivatives with respect to tau at the substep's start.
func (x *excitation) sample(f func(float64) float64, t, h float64) (tau [loadDegree + 1]float64, active bool) {
	for i, u := range x.times {
		v := f(t + u*h)
		if v == 0 {
			continue
		}
		active = true
		for j := range tau {
			tau[j] += x.toTau[j][i] * v
		}
	}
	return tau, active
}

// addField samples a changing pattern at the Gauss points.
func (x *excitation) addField(f field, t, h float64) {
	any := false
	for i, u := range x.times {
		clear(x.values[i])
		f(t+u*h, func(e *element, nodal []float64) {
			any = true
			x.sys.spread(x.values[i], e, nodal)
		})
	}
	if !any {
		return
	}
	loads := []*load{&x.total}
	if x.apart {
		loads = append(loads, &x.forces)
	}
	for i := range x.values {
		v := x.op.row(x.values[i])
		for _, l := range loads {
			l.active, l.lo = true, 0
			for j := range l.at {
				c, dst := x.toTau[j][i], l.at[j]
				for k, f := range v {
					dst[k] += c * f
				}
			}
		}
	}
}

// cut writes the part of a window's load from tau on, of length share, into dst.
func (l *load) cut(dst *load, tau, share float64) {
	dst.active, dst.lo = l.active, l.lo
	if !l.active {
		return
	}
	scale := 1.0
	for j := range dst.at {
		out := dst.at[j]
		clear(out[:l.lo])
		c := scale
		for i := j; i <= loadDegree; i++ {
			src := l.at[i]
			if i == j {
				for k := l.lo; k < len(out); k++ {
					out[k] = c * src[k]
				}
			} else {
				for k := l.lo; k < len(out); k++ {
					out[k] += c * src[k]
				}
			}
			c *= tau / float64(i-j+1)
		}
		scale *= share
	}
}

// cutPoly is the same for one polynomial.
func cutPoly(p *[loadDegree + 1]float64, tau, share float64) (out [loadDegree + 1]float64) {
	scale := 1.0
	for j := range out {
		c := scale
		for i := j; i <= loadDegree; i++ {
			out[j] += c * p[i]
			c *= tau / float64(i-j+1)
		}
		scale *= share
	}
	return out
}

// value writes the load's q-th derivative in time at tau into dst.
func (l *load) value(dst []float64, tau, h float64, q int) {
	clear(dst)
	c := math.Pow(h, -float64(q))
	for j := q; j <= loadDegree; j++ {
		src := l.at[j]
		for k := range dst {
			dst[k] += c * src[k]
		}
		c *= tau / float64(j-q+1)
		if c == 0 {
			return
		}
	}
}
