package modal

import (
	"math"
	"math/cmplx"
)

// A piece whose tension rises along it has no simple closed solution (a string
// has Bessel functions, a beam none). It is cut into short steps; in each the
// power series about the middle, summed to rounding, gives the stiffness, and
// the places between are eliminated one by one. That is stable however fast
// solutions grow, and exact to rounding for any complex s.
//
// Source: Frobenius' method for the series; elimination of inner freedoms is
// standard (Guyan's, exact here since every step is). The count of vibrations
// with held ends is the sum of the signs of the pivots, by Wittrick and Williams.

// taper is the stiffness of the stretch x0 .. x1 of a piece of varying tension.
// Grids are tried until no pivot is small.
func (v *wave) taper(x0, x1 float64) stiff {
	var best stiff
	for i, f := range [...]float64{1, 0.87, 0.79, 0.71} {
		k := v.sweep(x0, x1, f)
		if i == 0 || k.size < best.size {
			best = k
		}
		if best.size < poor {
			break
		}
	}
	return best
}

// step is how long a stretch with tension t at its start (where it bends: the
// larger one) may be for one series: at most a quarter of the radius of
// convergence to each side, and less than half a wave.
func (v *wave) step(t float64) float64 {
	g := math.Abs(v.p.TensionRise)
	if !v.bends {
		h := 0.5 * t / g // a quarter of the radius of convergence to each side
		return math.Min(h, 1.5*math.Sqrt(t/cmplx.Abs(v.b.v)))
	}
	e := cmplx.Abs(v.e.v)
	r := math.Sqrt(t/e + math.Sqrt(cmplx.Abs(v.b.v)/e))
	return math.Min(1.5/r, math.Cbrt(2*e/g))
}

// sweep joins steps, each f times as long as allowed.
func (v *wave) sweep(x0, x1, f float64) stiff {
	length := v.p.Length
	slack := 1e-12 * (v.p.Tension + math.Abs(v.p.TensionRise)*length)
	down := !v.bends && v.tension(x1) <= slack*2 && v.p.TensionRise < 0
	var k stiff
	x, started := x0, false
	if !v.bends && v.tension(x0) <= slack && v.p.TensionRise > 0 {
		x = x0 + v.reach(x1-x0, f)
		k, started = v.openEnd(x-x0, 0), true
	}
	last := x1
	if down {
		last = x1 - v.reach(x1-x, f)
	}
	for x < last {
		h := f * v.step(v.tension(x))
		if t := v.tension(x + h); v.bends && t > v.tension(x) {
			h = f * v.step(t)
		}
		next := x + h
		if next > last-0.2*h {
			next = last
		}
		one := v.series(0.5*(x+next), next-x)
		if started {
			k = k.then(one, v.bends)
		} else {
			k, started = one, true
		}
		x = next
	}
	if down {
		tail := v.openEnd(x1-last, 2)
		if started {
			tail = k.then(tail, false)
		}
		k = tail
	}
	return k
}

// reach is how far from an end without tension its series is used: over less
// than a quarter turn of the slowest held vibration.
func (v *wave) reach(most, f float64) float64 {
	return f * math.Min(most, math.Abs(v.p.TensionRise)/cmplx.Abs(v.b.v))
}

// openEnd is the stretch of length h of a string next to an end without tension,
// at its start (0) or end (2). The regular solution is sum (b y/g)^n/n!^2, y from
// that end; the other one is infinite there.
func (v *wave) openEnd(h float64, end int) stiff {
	g := math.Abs(v.p.TensionRise)
	z := v.b.times(h / g)
	u, du, term := constant(1), constant(0), constant(1)
	for n := 1; n < 40; n++ {
		term = term.mul(z).times(1 / float64(n*n))
		u = u.add(term)
		du = du.add(term.times(float64(n))) // h du/dy
	}
	k := stiff{open: end, tip: 1 / u.v, w: u.log(), size: 1}
	k.d[2-end][2-end] = du.div(u).times(g) // T du/dy = g h du/dy
	return k
}

// series is the stiffness of a step of length h about the middle x.
func (v *wave) series(x, h float64) stiff {
	y := h / 2
	t, g := v.tension(x), v.p.TensionRise
	if !v.bends {
		// (n+2)(n+1) T a_{n+2} = b a_n - g (n+1)^2 a_{n+1}, lengths in y.
		var end [2][2][2]dual // solution, end, displacement and tension times slope
		tl, tr := v.tension(x-y)/y, v.tension(x+y)/y
		b := v.b.times(y * y / t)
		q := g * y / t
		for k := range end {
			a0, a1 := constant(float64(1-k)), constant(float64(k))
			ul, ur, dl, dr := a0.sub(a1), a0.add(a1), a1, a1
			sign := 1.0
			for n := 0; n < 60; n++ {
				fn := float64(n)
				a2 := b.mul(a0).times(1 / ((fn + 2) * (fn + 1))).sub(a1.times(q * (fn + 1) / (fn + 2)))
				ul, ur = ul.add(a2.times(sign)), ur.add(a2)
				dl, dr = dl.sub(a2.times(sign*(fn+2))), dr.add(a2.times(fn+2))
				a0, a1 = a1, a2
				sign = -sign
			}
			end[k] = [2][2]dual{{ul, dl.times(tl)}, {ur, dr.times(tr)}}
		}
		return stringStep(end, y, t)
	}
	// E (n+4)(n+3)(n+2)(n+1) a_{n+4} = T (n+2)(n+1) a_{n+2} + g (n+1)^2 a_{n+1} - b a_n.
	inv := constant(1).div(v.e)
	tq, gq, bq := inv.times(t*y*y), inv.times(g*y*y*y), inv.mul(v.b).times(y*y*y*y)
	var xm, fm [4][4]dual // row: start u, h u', end u, h u'; column: solution
	e1, e3 := v.e.times(1/(y*y)), v.e.times(1/(y*y*y))
	tl, tr := v.tension(x-y)/y, v.tension(x+y)/y
	for k := 0; k < 4; k++ {
		var a [44]dual
		a[k] = constant(1)
		var l, r [4]dual // derivatives 0 to 3 at -1 and 1
		for n := range a {
			if n >= 4 {
				i := float64(n - 4)
				a[n] = tq.mul(a[n-2]).times((i + 2) * (i + 1)).add(gq.mul(a[n-3]).times((i + 1) * (i + 1))).sub(bq.mul(a[n-4])).
					times(1 / ((i + 4) * (i + 3) * (i + 2) * (i + 1)))
			}
			c := 1.0
			for d := 0; d < 4 && d <= n; d++ {
				term := a[n].times(c)
				r[d] = r[d].add(term)
				if (n-d)%2 == 1 {
					term = term.neg()
				}
				l[d] = l[d].add(term)
				c *= float64(n - d)
			}
		}
		xm[0][k], xm[1][k], xm[2][k], xm[3][k] = l[0], l[1], r[0], r[1]
		fm[0][k] = e3.mul(l[3]).sub(l[1].times(tl))
		fm[1][k] = e1.mul(l[2]).neg()
		fm[2][k] = r[1].times(tr).sub(e3.mul(r[3]))
		fm[3][k] = e1.mul(r[2])
	}
	return v.beamStep(xm, fm, y)
}

// stringStep makes the stiffness of a string's step from two solutions about its
// middle with tension t.
func stringStep(end [2][2][2]dual, y, t float64) stiff {
	p, q := end[0], end[1]
	det := p[0][0].mul(q[1][0]).sub(p[1][0].mul(q[0][0]))
	inv := constant(1).div(det)
	k := stiff{open: -1, size: 1}
	k.d[0][0] = p[0][1].mul(q[1][0]).sub(q[0][1].mul(p[1][0])).mul(inv).neg()
	k.d[2][2] = q[1][1].mul(p[0][0]).sub(p[1][1].mul(q[0][0])).mul(inv)
	a := q[0][1].mul(p[0][0]).sub(p[0][1].mul(q[0][0])).mul(inv).neg()
	b := p[1][1].mul(q[1][0]).sub(q[1][1].mul(p[1][0])).mul(inv)
	off := a.add(b).times(0.5) // equal but for rounding
	k.d[0][2], k.d[2][0] = off, off
	k.w = det.log()
	k.w.v += complex(math.Log(y/t), 0)
	return k
}

// beamStep solves D = F X^{-1}.
func (v *wave) beamStep(x, f [4][4]dual, y float64) stiff {
	// Elimination on the columns of the transposed system X^T D^T = F^T.
	var a [4][8]dual
	for i := range a {
		for j := 0; j < 4; j++ {
			a[i][j], a[i][4+j] = x[j][i], f[j][i]
		}
	}
	det := constant(1)
	for c := 0; c < 4; c++ {
		at := c
		for i := c + 1; i < 4; i++ {
			if cmplx.Abs(a[i][c].v) > cmplx.Abs(a[at][c].v) {
				at = i
			}
		}
		if at != c {
			a[c], a[at] = a[at], a[c]
			det = det.neg()
		}
		det = det.mul(a[c][c])
		inv := constant(1).div(a[c][c])
		for j := c + 1; j < 8; j++ {
			a[c][j] = a[c][j].mul(inv)
		}
		for i := 0; i < 4; i++ {
			if i == c {
				continue
			}
			l := a[i][c]
			for j := c + 1; j < 8; j++ {
				a[i][j] = a[i][j].sub(l.mul(a[c][j]))
			}
		}
	}
	k := stiff{open: -1, size: 1}
	unit := [4]float64{1, y, 1, y} // of the unknowns u, h u'
	for i := 0; i < 4; i++ {
		for j := 0; j < 4; j++ { // equal but for rounding
			k.d[i][j] = a[j][4+i].times(unit[j]).add(a[i][4+j].times(unit[i])).times(0.5)
		}
	}
	le := v.e.log()
	k.w = det.log().sub(le).sub(le)
	// Solutions x^k/k! in place of (x/y)^k, slopes in place of y u'.
	k.w.v += complex(4*math.Log(y)-math.Log(12), 0)
	return k
}

// then joins a stretch with the one after it and eliminates the place between.
func (k stiff) then(n stiff, bends bool) stiff {
	out := stiff{open: -1, w: k.w.add(n.w), inner: k.inner + n.inner, size: math.Max(k.size, n.size)}
	if !bends {
		p := k.d[2][2].add(n.d[0][0])
		inv := constant(1).div(p)
		out.d[0][0] = k.d[0][0].sub(k.d[0][2].mul(k.d[2][0]).mul(inv))
		out.d[2][2] = n.d[2][2].sub(n.d[2][0].mul(n.d[0][2]).mul(inv))
		off := k.d[0][2].mul(n.d[0][2]).mul(inv).neg()
		out.d[0][2], out.d[2][0] = off, off
		out.w = out.w.add(p.log())
		if real(p.v) < 0 {
			out.inner++
		}
		out.size = math.Max(out.size, (cmplx.Abs(k.d[2][2].v)+cmplx.Abs(n.d[0][0].v))/cmplx.Abs(p.v))
		switch {
		case k.open == 0:
			out.open, out.tip = 0, k.tip*-n.d[0][2].v*inv.v
		case n.open == 2:
			out.open, out.tip = 2, n.tip*-k.d[2][0].v*inv.v
		}
		return out
	}
	a, b, c := k.d[2][2].add(n.d[0][0]), k.d[2][3].add(n.d[0][1]), k.d[3][3].add(n.d[1][1])
	det := a.mul(c).sub(b.mul(b))
	inv := constant(1).div(det)
	ia, ib, ic := c.mul(inv), b.mul(inv).neg(), a.mul(inv) // the inverse
	var left, right [2][2]dual                             // couplings of the place: by its freedom, then the outer one
	for i := 0; i < 2; i++ {
		for j := 0; j < 2; j++ {
			left[i][j], right[i][j] = k.d[2+i][j], n.d[i][2+j]
		}
	}
	apply := func(x [2][2]dual) (y [2][2]dual) {
		for j := 0; j < 2; j++ {
			y[0][j] = ia.mul(x[0][j]).add(ib.mul(x[1][j]))
			y[1][j] = ib.mul(x[0][j]).add(ic.mul(x[1][j]))
		}
		return y
	}
	yl, yr := apply(left), apply(right)
	for i := 0; i < 2; i++ {
		for j := 0; j < 2; j++ {
			out.d[i][j] = k.d[i][j].sub(left[0][i].mul(yl[0][j])).sub(left[1][i].mul(yl[1][j]))
			out.d[2+i][2+j] = n.d[2+i][2+j].sub(right[0][i].mul(yr[0][j])).sub(right[1][i].mul(yr[1][j]))
			off := left[0][i].mul(yr[0][j]).add(left[1][i].mul(yr[1][j])).neg()
			out.d[i][2+j], out.d[2+j][i] = off, off
		}
	}
	out.w = out.w.add(det.log())
	if real(det.v) < 0 {
		out.inner++
	} else if real(a.v) < 0 {
		out.inner += 2
	}
	out.size = math.Max(out.size, 0.25*cmplx.Abs(a.v)*cmplx.Abs(c.v)/cmplx.Abs(det.v))
	return out
}
