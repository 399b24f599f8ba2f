package spectral

import (
	"math"

	"gonum.org/v1/gonum/mat"
)

// material is what makes an element that is more than an ideal string. Two elements
// of the same material share one body.
type material struct {
	degree  int
	h       float64 // m
	mass    float64 // kg/m
	tension float64 // N, at its start
	rise    float64 // N/m
	rate    float64 // 1/s, viscous loss over mass
	bending float64 // N m^2; 0: a string
	eta     float64 // s, internal loss of the bending
	stretch bool    // its tension grows
}

// body is an element in coordinates of its own: inner coordinates, which are the
// vibrations between clamped ends (unit mass), and outer ones, which are the values
// at the two ends and, where it bends, the slopes there. The shape that belongs to an
// outer one is the static one, so that the two kinds share mass and no stiffness,
//
//	xi'' + g xi' + omega^2 xi + sum_a drag_a (u_a'' + g u_a') + loss = f,
//	sum_b (m_ab u_b'' + c_ab u_b' + k_ab u_b) + drag_a (xi'' + g xi') + loss = F_a.
//
// It spans the same functions as the element's basis: nothing is lost. (Shapes free
// of the inner ones' mass, as arrow has them, are as stiff as the highest vibrations
// where the element bends, and their rounding drowns the line's own stiffness.)
// Source: Craig and Bampton 1968, AIAA J. 6 (from memory).
type body struct {
	material
	ref   *reference // its basis: one of the two
	beam  *beam
	n     int         // functions of the basis
	ni    int         // inner coordinates
	outer []int       // functions of the basis of the outer coordinates: values, then slopes
	shape [][]float64 // [ni+outer][n] what a coordinate is in the basis
	// omega2 and the terms of the outer coordinates among each other.
	omega2  []float64
	drag    [][]float64 // [outer][ni] kg^(1/2), and times m for slopes
	k, c, m [4][4]float64
	cii     []float64   // [ni*ni] internal loss; nil without
	cio     [][]float64 // [outer][ni]
	area    []float64   // [ni+outer] integral of each coordinate's shape, m
	unitK   []float64   // [(ni+outer)^2] stiffness of a unit tension, 1/m; nil where it is not needed
}

// newBody builds one. It reports false when the eigenvalue problem fails.
func newBody(mt material, ref *reference, bm *beam) (*body, bool) {
	b := &body{material: mt, ref: ref, beam: bm, n: mt.degree + 1}
	p := mt.degree
	b.outer = []int{0, p}
	if bm != nil {
		b.outer = append(b.outer, p-2, p-1)
	}
	b.ni = b.n - len(b.outer)
	mass, tens, bend, area := b.raw()
	stiff := square(b.n)
	for i := range stiff {
		for j := range stiff[i] {
			stiff[i][j] = tens[i][j] + bend[i][j]
		}
	}
	if !b.vibrations(mass, stiff) {
		return nil, false
	}
	b.couple(mass, stiff, bend)
	b.area = make([]float64, b.ni+len(b.outer))
	for c, s := range b.shape {
		b.area[c] = dot(s, area)
	}
	if mt.stretch && (mt.rise != 0 || mt.bending > 0) {
		b.stretching()
	}
	return b, true
}

// stretching works out the stiffness of a unit tension.
func (b *body) stretching() {
	one := *b
	one.tension, one.rise = 1, 0
	_, unit, _, _ := one.raw()
	size := len(b.shape)
	b.unitK = make([]float64, size*size)
	work := make([]float64, b.n)
	for i, s := range b.shape {
		for r := range unit {
			work[r] = dot(unit[r], s)
		}
		for j, o := range b.shape {
			b.unitK[j*size+i] = dot(work, o)
		}
	}
}

// unit is the factor by which an outer coordinate multiplies its function: slopes are
// taken with respect to metres.
func (b *body) unit(a int) float64 {
	if a >= 2 {
		return b.h / 2
	}
	return 1
}

// raw are mass, stiffness of the tension and of the bending, and the integrals of the
// basis, by quadrature that is exact: on the points of the string's element, whose
// mass it makes diagonal, or on p+2 Gauss points.
func (b *body) raw() (mass, tens, bend [][]float64, area []float64) {
	n := b.n
	mass, tens, bend, area = square(n), square(n), square(n), make([]float64, n)
	half := b.h / 2
	if b.beam == nil {
		for q, w := range b.ref.w {
			mass[q][q], area[q] = b.mass*half*w, half*w
			t := (b.tension + b.rise*half*(b.ref.x[q]+1)) * w / half
			for i := range tens {
				for j := range tens {
					tens[i][j] += t * b.ref.d[q][i] * b.ref.d[q][j]
				}
			}
		}
		return mass, tens, bend, area
	}
	for q, w := range b.beam.gw {
		m := b.mass * half * w
		t := (b.tension + b.rise*half*(b.beam.gx[q]+1)) * w / half
		e := b.bending * w / (half * half * half)
		f, d, c := b.beam.at[0][q*n:(q+1)*n], b.beam.at[1][q*n:(q+1)*n], b.beam.at[2][q*n:(q+1)*n]
		for i := range f {
			area[i] += half * w * f[i]
			for j := 0; j <= i; j++ {
				mass[i][j] += m * f[i] * f[j]
				tens[i][j] += t * d[i] * d[j]
				bend[i][j] += e * c[i] * c[j]
			}
		}
	}
	for _, a := range [][][]float64{mass, tens, bend} {
		for i := range a {
			for j := 0; j < i; j++ {
				a[j][i] = a[i][j]
			}
		}
	}
	return mass, tens, bend, area
}

// vibrations finds those between clamped ends from the stiffness's factor,
//
//	(L^-1 M L^-T) z = mu z,  omega^2 = 1/mu,  v = L^-T z / sqrt mu,
//
// which leaves the rounding with the highest ones, where it harms nobody: M of the
// bubbles has a far worse condition than K.
func (b *body) vibrations(mass, stiff [][]float64) bool {
	ni := b.ni
	b.shape = rectangle(ni+len(b.outer), b.n)
	for a, fn := range b.outer {
		b.shape[ni+a][fn] = b.unit(a)
	}
	b.omega2 = make([]float64, ni)
	if ni == 0 {
		return true
	}
	k := mat.NewSymDense(ni, nil)
	m := mat.NewDense(ni, ni, nil)
	for i := 0; i < ni; i++ {
		for j := 0; j < ni; j++ {
			m.Set(i, j, mass[i+1][j+1])
			if j >= i {
				k.SetSym(i, j, stiff[i+1][j+1])
			}
		}
	}
	var chol mat.Cholesky
	if !chol.Factorize(k) {
		return false
	}
	b.lifts(&chol, stiff)
	mu, v, ok := againstFactor(&chol, m)
	if !ok {
		return false
	}
	for c := 0; c < ni; c++ {
		at := ni - 1 - c // lowest vibration first
		u := math.Max(mu[at], 1e-17*mu[ni-1])
		b.omega2[c] = 1 / u
		for i := 0; i < ni; i++ {
			b.shape[c][i+1] = v.At(i, at) / math.Sqrt(u)
		}
	}
	return true
}

// lifts makes the outer shapes those of least energy.
func (b *body) lifts(chol *mat.Cholesky, stiff [][]float64) {
	rhs, out := mat.NewVecDense(b.ni, nil), mat.NewVecDense(b.ni, nil)
	for a, fn := range b.outer {
		for i := 0; i < b.ni; i++ {
			rhs.SetVec(i, -b.unit(a)*stiff[i+1][fn])
		}
		if chol.SolveVecTo(out, rhs) != nil {
			continue // so badly conditioned that it says so; the shape stays what it was
		}
		for i := 0; i < b.ni; i++ {
			b.shape[b.ni+a][i+1] = out.AtVec(i)
		}
	}
}

// couple works out the terms between coordinates.
func (b *body) couple(mass, stiff, bend [][]float64) {
	form := func(a [][]float64, x, y []float64) float64 {
		sum := 0.0
		for i, xi := range x {
			if xi != 0 {
				sum += xi * dot(a[i], y)
			}
		}
		return sum
	}
	no, loss := len(b.outer), b.eta > 0 && b.bending > 0
	b.drag = make([][]float64, no)
	if loss {
		b.cii, b.cio = make([]float64, b.ni*b.ni), make([][]float64, no)
		for i := 0; i < b.ni; i++ {
			for j := 0; j <= i; j++ {
				v := b.eta * form(bend, b.shape[i], b.shape[j])
				b.cii[i*b.ni+j], b.cii[j*b.ni+i] = v, v
			}
		}
	}
	for a := range b.outer {
		la := b.shape[b.ni+a]
		b.drag[a] = make([]float64, b.ni)
		for c := range b.drag[a] {
			b.drag[a][c] = form(mass, b.shape[c], la)
		}
		if loss {
			b.cio[a] = make([]float64, b.ni)
			for c := range b.cio[a] {
				b.cio[a][c] = b.eta * form(bend, b.shape[c], la)
			}
		}
		for d := 0; d <= a; d++ {
			ld := b.shape[b.ni+d]
			m := form(mass, la, ld)
			c := b.rate * m
			if loss {
				c += b.eta * form(bend, la, ld)
			}
			b.k[a][d], b.c[a][d], b.m[a][d] = form(stiff, la, ld), c, m
			b.k[d][a], b.c[d][a], b.m[d][a] = b.k[a][d], b.c[a][d], b.m[a][d]
		}
	}
}

// basis writes the derivative of order d with respect to metres of every function of
// the basis at x, -1 .. 1, into dst. A string's element knows values and slopes.
func (b *body) basis(dst []float64, x float64, d int) {
	scale := 1.0
	for i := 0; i < d; i++ {
		scale *= 2 / b.h
	}
	switch {
	case b.beam != nil:
		b.beam.values(dst, x, d)
	case d == 0:
		b.ref.shape(dst, x)
	case d == 1:
		b.ref.slope(dst, make([]float64, b.n), x)
	default:
		clear(dst)
	}
	for i := range dst {
		dst[i] *= scale
	}
}

// tensionAt is the tension at x, -1 .. 1.
func (b *body) tensionAt(x float64) float64 { return b.tension + b.rise*b.h/2*(x+1) }
