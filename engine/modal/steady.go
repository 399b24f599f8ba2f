package modal

import (
	"math"
	"math/cmplx"
	"sort"

	"github.com/tautspan/tautspan/engine/mesh"
	"github.com/tautspan/tautspan/engine/numeric"
)

// motion is u(x) e^{st} over a system whose places hold their values.
type motion struct {
	y *system
	s complex128
	h []complex128 // extra tension of each sagging line
}

// state is what is known at one place: displacement, slope (strings: 0 here),
// transverse force T u' - E u”' and moment E u”.
type state struct{ u, t, force, moment complex128 }

// solve gives the steady motion under loads; false where there is none.
func (y *system) solve(s complex128, loads []Load) (*motion, bool) {
	for _, l := range loads {
		if l.Spot.Node < 0 {
			y.cuts[l.Spot.Piece] = append(y.cuts[l.Spot.Piece], l.Spot.At)
		}
	}
	for k, list := range y.cuts {
		sort.Float64s(list)
		apart := list[:0]
		for _, x := range list {
			if x > 0 && x < y.m.Pieces[k].Length && (len(apart) == 0 || x > apart[len(apart)-1]) {
				apart = append(apart, x)
			}
		}
		y.cuts[k] = apart
	}
	y.assemble(s)
	for _, l := range loads {
		if at := y.loaded(l.Spot); at.row >= 0 {
			y.rhs[at.row] += l.Force
		}
	}
	x := append([]complex128(nil), y.rhs...)
	n := y.n
	scale := y.scales(0)
	for i := 0; i < n; i++ {
		x[i] *= complex(scale[i], 0)
		for j := 0; j < n; j++ {
			y.a[i*n+j] *= complex(scale[i]*scale[j], 0)
		}
	}
	if !numeric.Solve(y.a, x, n, 1) {
		return nil, false
	}
	for i := range x {
		x[i] *= complex(scale[i], 0)
		if cmplx.IsNaN(x[i]) || cmplx.IsInf(x[i]) {
			return nil, false
		}
	}
	return y.moving(s, x), true
}

// loaded is the unknown that a load acts on; row -1 where it meets a held place.
func (y *system) loaded(at mesh.Spot) port {
	if at.Node >= 0 {
		return y.places[at.Node].u
	}
	p := &y.m.Pieces[at.Piece]
	switch {
	case at.At <= 0:
		return y.places[p.From].u
	case at.At >= p.Length:
		return y.places[p.To].u
	}
	for i := range y.spans {
		if sp := &y.spans[i]; sp.piece == at.Piece && sp.x1 == at.At {
			return y.places[sp.b].u
		}
	}
	return port{row: -1}
}

// scales are factors of rows and columns that bring the unknowns to one size;
// with s, the slope of the matrix counts as well.
func (y *system) scales(s complex128) []float64 {
	out := make([]float64, y.n)
	for i := range out {
		top := cmplx.Abs(y.a[i*y.n+i]) + cmplx.Abs(s)*cmplx.Abs(y.da[i*y.n+i])
		for j := 0; j < y.n && top == 0; j++ {
			top = cmplx.Abs(y.a[i*y.n+j])
		}
		out[i] = 1
		if top > 0 {
			out[i] = math.Exp2(-math.Round(0.5 * math.Log2(top)))
		}
	}
	return out
}

// moving puts the solution x into a copy of the places.
func (y *system) moving(s complex128, x []complex128) *motion {
	z := *y
	z.a, z.da, z.rhs, z.real = nil, nil, nil, nil
	z.places = append([]place(nil), y.places...)
	z.spans = append([]stretch(nil), y.spans...)
	for i := range z.places {
		for _, at := range []*port{&z.places[i].u, &z.places[i].t} {
			if at.row >= 0 {
				at.value = x[at.row]
			}
		}
	}
	for i := range z.spans {
		for _, at := range []*port{&z.spans[i].ta, &z.spans[i].tb} {
			if at.row >= 0 {
				at.value = x[at.row]
			}
		}
	}
	f := &motion{y: &z, s: s}
	for _, row := range y.sagRow {
		f.h = append(f.h, x[row])
	}
	for i := range z.spans { // an end without tension follows
		sp := &z.spans[i]
		switch sp.k.open {
		case 0:
			z.places[sp.a].u.value = sp.k.tip * z.places[sp.b].u.value
		case 2:
			z.places[sp.b].u.value = sp.k.tip * z.places[sp.a].u.value
		}
	}
	return f
}

// pull is the load per length that sag puts on a piece, over the factor in
// stiff.load.
func (f *motion) pull(piece int) complex128 {
	if l := f.y.sagOf[piece]; l >= 0 {
		return f.h[l] * complex(f.y.weight[piece], 0)
	}
	return 0
}

// ends are the states at both ends of a stretch from its end values.
func (k *stiff) ends(u [4]complex128, pull complex128) (a, b state) {
	var f [4]complex128
	for i := range f {
		for j := range u {
			f[i] += k.d[i][j].v * u[j]
		}
		f[i] += k.load[i].v * pull
	}
	return state{u[0], u[1], -f[0], -f[1]}, state{u[2], u[3], f[2], f[3]}
}

func (f *motion) values(sp *stretch) [4]complex128 {
	return [4]complex128{f.y.places[sp.a].u.value, sp.ta.value, f.y.places[sp.b].u.value, sp.tb.value}
}

// at is the state at x of a piece; at a load that after it.
func (f *motion) at(piece int, x float64) state {
	var sp *stretch
	for i := range f.y.spans {
		if c := &f.y.spans[i]; c.piece == piece && (sp == nil || c.x0 <= x) {
			sp = c
		}
	}
	if x <= sp.x0 || x >= sp.x1 {
		a, b := sp.k.ends(f.values(sp), f.pull(piece))
		if x <= sp.x0 {
			return a
		}
		return b
	}
	v := newWave(&f.y.m.Pieces[piece], f.s)
	return f.inside(&v, sp, x)
}

// inside finds the state at x by cutting the stretch there, and nearby on both
// sides so that the two parts that meet at x are shorter than half a wave and
// their stiffness is far from poles.
func (f *motion) inside(v *wave, sp *stretch, x float64) state {
	var best []stretch
	least := math.Inf(1)
	for _, share := range [...]float64{0.9, 0.63, 0.41} {
		cuts := []float64{sp.x0}
		d := share * v.radian(x)
		if x-d > sp.x0+0.2*d {
			cuts = append(cuts, x-d)
		}
		cuts = append(cuts, x)
		if x+d < sp.x1-0.2*d {
			cuts = append(cuts, x+d)
		}
		cuts = append(cuts, sp.x1)
		var parts []stretch
		size := 0.0
		for i := 1; i < len(cuts); i++ {
			k := v.between(cuts[i-1], cuts[i], f.y.sagOf[sp.piece] >= 0)
			size = math.Max(size, k.size)
			parts = append(parts, stretch{x0: cuts[i-1], x1: cuts[i], k: k})
		}
		if best == nil || size < least {
			best, least = parts, size
		}
		if least < poor {
			break
		}
	}
	return f.chain(sp, best, x)
}

// radian is the length over which the phase of a wave at x changes by one.
func (v *wave) radian(x float64) float64 {
	b := cmplx.Abs(v.b.v)
	d := math.Sqrt(math.Max(v.tension(x), 0) / b)
	if v.bends {
		d = math.Max(d, math.Sqrt(math.Sqrt(cmplx.Abs(v.e.v)/b)))
	}
	return d
}

// chain solves for the places between the parts of a stretch and gives the state
// at the start of the part that begins at x.
func (f *motion) chain(sp *stretch, parts []stretch, x float64) state {
	per := 1
	if parts[0].k.bends {
		per = 2
	}
	n := per * (len(parts) - 1)
	a, b := make([]complex128, n*n), make([]complex128, n)
	outer, pull := f.values(sp), f.pull(sp.piece)
	// row of freedom i (0 or 1) at place q, -1 at the stretch's own ends.
	row := func(q, i int) int {
		if q == 0 || q == len(parts) {
			return -1
		}
		return (q-1)*per + i
	}
	end := func(q, i int) complex128 {
		if q == 0 {
			return outer[i]
		}
		return outer[2+i]
	}
	for q := range parts {
		k := &parts[q].k
		for i := 0; i < 4; i++ {
			r := row(q+i/2, i%2)
			if r < 0 || i%2 >= per {
				continue
			}
			b[r] -= k.load[i].v * pull
			for j := 0; j < 4; j++ {
				if j%2 >= per {
					continue
				}
				if c := row(q+j/2, j%2); c >= 0 {
					a[r*n+c] += k.d[i][j].v
				} else {
					b[r] -= k.d[i][j].v * end(q+j/2, j%2)
				}
			}
		}
	}
	numeric.Solve(a, b, n, 1)
	value := func(q, i int) complex128 {
		if i >= per {
			return 0
		}
		if r := row(q, i); r >= 0 {
			return b[r]
		}
		return end(q, i)
	}
	for q := range parts {
		if parts[q].x0 == x {
			s, _ := parts[q].k.ends([4]complex128{value(q, 0), value(q, 1), value(q+1, 0), value(q+1, 1)}, pull)
			return s
		}
	}
	return state{}
}

// displacement at a spot, m.
func (f *motion) displacement(at mesh.Spot) complex128 {
	if at.Node >= 0 {
		return f.y.places[at.Node].u.value
	}
	if !f.y.in(f.y.m.Pieces[at.Piece].From) {
		return 0
	}
	return f.at(at.Piece, at.At).u
}

// slope at x of a piece.
func (f *motion) slope(piece int, x float64) complex128 {
	p := &f.y.m.Pieces[piece]
	if p.Bending > 0 {
		return f.at(piece, x).t
	}
	if start, end := slackEnds(p); start && x <= 0 || end && x >= p.Length {
		// T u' = 0 there, and (T u')' = b u gives u' = b u/T'.
		v := newWave(p, f.s)
		u := f.y.places[p.From].u.value
		if end {
			u = f.y.places[p.To].u.value
		}
		return v.b.v * u / (complex(p.TensionRise, 0) * v.f)
	}
	v := newWave(p, f.s)
	return f.at(piece, x).force / (complex(p.Tension+p.TensionRise*x, 0) * v.f)
}
