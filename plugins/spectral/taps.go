package spectral

import (
	"math"

	"github.com/tautspan/tautspan/engine/mesh"
	"github.com/tautspan/tautspan/engine/scenario"
)

// run is a stretch of coordinates with its coefficients.
type run struct {
	lo int
	c  []float64
}

// preTerm is a prescribed node's share of a functional.
type preTerm struct {
	moved int
	c     float64
}

// functional is a linear form on coordinates and prescribed displacements.
type functional struct {
	runs []run
	pre  []preTerm
}

func (f *functional) on(x []float64) float64 {
	sum := 0.0
	for _, r := range f.runs {
		s := x[r.lo : r.lo+len(r.c)]
		for k, c := range r.c {
			sum += c * s[k]
		}
	}
	return sum
}

func (f *functional) prescribed(u []float64) float64 {
	sum := 0.0
	for _, p := range f.pre {
		sum += p.c * u[p.moved]
	}
	return sum
}

func (f *functional) empty() bool { return len(f.runs) == 0 && len(f.pre) == 0 }

// compress keeps the runs of a row that are not zero.
func compress(row []float64) []run {
	const gap = 8
	var out []run
	for i := 0; i < len(row); {
		if row[i] == 0 {
			i++
			continue
		}
		hi, j := i+1, i+1
		for j < len(row) && j-hi < gap {
			if row[j] != 0 {
				hi = j + 1
			}
			j++
		}
		out = append(out, run{lo: i, c: append([]float64(nil), row[i:hi]...)})
		i = hi
	}
	return out
}

// tap is one record in the making: f[0] acts on the displacement, f[1] on the
// velocity, f[2] on the acceleration.
type tap struct {
	f        [3]functional
	share    int     // the watched node whose loads count in; -1: none
	fixed    float64 // a constant that is added
	means    int
	straight bool // before t = 0 it goes on with its start velocity
	stride   int  // rows of the time grid per row of the record
	// line, where not -1, is the one whose extra tension counts in: itself (pull), or
	// times steep.
	line  int
	pull  bool
	steep functional
	out   []float64
}

// reaction tells whether a channel's spot records the line's force on a fitting.
func reaction(m *mesh.Mesh, ch *mesh.Channel, sp mesh.Spot) bool {
	return ch.Quantity == scenario.Force && sp.Node >= 0 && m.Nodes[sp.Node].Fitting
}

// newTaps prepares all records.
func newTaps(s *system, op operator, series [][][]float64) []*tap {
	attached := s.m.Attached()
	_, stride := s.m.FieldRows()
	var out []*tap
	for c := range s.m.Channels {
		ch := &s.m.Channels[c]
		for k, sp := range ch.Spots {
			t := s.tapFor(op, ch, sp, attached)
			t.out, t.means, t.stride = series[c][k], ch.Means, 1
			if ch.Along {
				t.stride = stride
			}
			out = append(out, t)
		}
	}
	return out
}

// tapFor translates a quantity at a spot.
func (s *system) tapFor(op operator, ch *mesh.Channel, sp mesh.Spot, attached [][]mesh.Attachment) *tap {
	t := &tap{share: -1, line: -1}
	switch ch.Quantity {
	case scenario.Displacement:
		t.f[0], t.straight = s.valueAt(op, sp, attached), true
	case scenario.Velocity:
		t.f[1] = s.valueAt(op, sp, attached)
	case scenario.Acceleration:
		t.f[2] = s.valueAt(op, sp, attached)
	case scenario.Slope:
		t.f[0], _ = s.slopeAt(op, sp, attached, false)
	case scenario.Force:
		if reaction(s.m, ch, sp) {
			s.reactionAt(op, t, sp.Node, attached)
			s.steepAtNode(op, t, sp.Node, attached)
			break
		}
		t.f[0], _ = s.slopeAt(op, sp, attached, true)
		s.inLoss(op, t, sp, attached, 3)
		if e, x := s.elementAt(sp, attached); e != nil && s.stretches(&s.m.Pieces[e.piece]) {
			t.line = s.m.Pieces[e.piece].Line
			t.steep = s.nodal(op, e, e.values(make([]float64, e.ref.p+1), x, 1), 1)
		}
	case scenario.Moment:
		s.momentAt(op, t, sp, attached)
	case scenario.Tension:
		_, t.fixed = s.slopeAt(op, sp, attached, false)
		if e, _ := s.elementAt(sp, attached); e != nil && s.tightens(&s.m.Pieces[e.piece]) {
			t.line, t.pull = s.m.Pieces[e.piece].Line, true
		}
	}
	return t
}

// elementAt is the element of a spot, and the place in it; at a node the one
// after it, at a line's end the one before. Nil at a node without pieces.
func (s *system) elementAt(sp mesh.Spot, attached [][]mesh.Attachment) (*element, float64) {
	if sp.Node < 0 {
		return s.find(sp.Piece, sp.At)
	}
	for _, want := range []bool{false, true} {
		for _, a := range attached[sp.Node] {
			if a.End == want {
				list := s.byPiece[a.Piece]
				if want {
					return &s.elements[list[len(list)-1]], 1
				}
				return &s.elements[list[0]], -1
			}
		}
	}
	return nil, 0
}

// valueAt is the displacement at a spot as a functional.
func (s *system) valueAt(op operator, sp mesh.Spot, attached [][]mesh.Attachment) functional {
	if sp.Node >= 0 {
		end := s.nodeEnd[sp.Node]
		row := make([]float64, s.size())
		f := functional{}
		if end >= 0 {
			row[s.inner+end] = 1
			f.runs = compress(op.row(row))
		} else if end < endFixed {
			f.pre = []preTerm{{moved: -2 - end, c: 1}}
		}
		return f
	}
	e, x := s.find(sp.Piece, sp.At)
	return s.nodal(op, e, e.values(make([]float64, e.ref.p+1), x, 0), 1)
}

// slopeAt is du/dx at a spot, or the tension times it, and the tension there.
func (s *system) slopeAt(op operator, sp mesh.Spot, attached [][]mesh.Attachment, force bool) (functional, float64) {
	e, x := s.elementAt(sp, attached)
	if e == nil {
		return functional{}, 0
	}
	g := e.values(make([]float64, e.ref.p+1), x, 1)
	if e.body != nil {
		return s.bodySlope(op, e, g, x, force), e.body.tensionAt(x)
	}
	scale := 1.0
	if force {
		scale = e.tension
	}
	return s.nodal(op, e, g, scale), e.tension
}

// nodal turns a form on an element's nodal displacements into a functional.
func (s *system) nodal(op operator, e *element, g []float64, scale float64) functional {
	row := make([]float64, s.size())
	var f functional
	s.addNodal(row, &f, e, g, scale)
	f.runs = compress(op.row(row))
	return f
}

func (s *system) addNodal(row []float64, f *functional, e *element, g []float64, scale float64) {
	if e.body != nil {
		s.addNodalBody(row, f, e, g, scale)
		return
	}
	p := e.ref.p
	root := scale / math.Sqrt(e.mass)
	for i := 1; i < p; i++ {
		if c := g[i] * root; c != 0 {
			for k, v := range e.ref.v[(i-1)*(p-1) : i*(p-1)] {
				row[e.first+k] += c * v
			}
		}
	}
	for a, i := range [2]int{0, p} {
		if end := e.end[a]; end >= 0 {
			row[s.inner+end] += scale * g[i]
		} else if end < endFixed {
			f.pre = append(f.pre, preTerm{moved: -2 - end, c: scale * g[i]})
		}
	}
}

// reactionAt is what the line exerts on a node: of each element that ends there,
//
//	f - (K u)_node - C_node v - M_node a,
//
// the discrete form of T u_x that closes the energy account exactly and converges
// as fast as the displacement.
func (s *system) reactionAt(op operator, t *tap, node int, attached [][]mesh.Attachment) {
	if s.frame {
		s.reactionFramed(op, t, node, attached)
		return
	}
	row := make([]float64, s.size())
	loss, mass := 0.0, 0.0
	for _, a := range attached[node] {
		list := s.byPiece[a.Piece]
		e, at := &s.elements[list[0]], 0
		if a.End {
			e = &s.elements[list[len(list)-1]]
			at = e.ref.p
		}
		s.addNodal(row, &t.f[0], e, e.ref.k[at], -2*e.tension/e.h)
		m := e.mass * e.ref.w[at]
		mass += m
		loss += m * e.rate
	}
	t.f[0].runs = compress(op.row(row))
	own := s.valueAt(op, mesh.Spot{Node: node}, attached)
	t.f[1], t.f[2] = own.scaled(-loss), own.scaled(-mass)
	t.share = s.watched[node]
}

func (f functional) scaled(c float64) functional {
	out := functional{}
	if c == 0 {
		return out
	}
	for _, r := range f.runs {
		v := make([]float64, len(r.c))
		for i := range v {
			v[i] = c * r.c[i]
		}
		out.runs = append(out.runs, run{lo: r.lo, c: v})
	}
	for _, p := range f.pre {
		out.pre = append(out.pre, preTerm{moved: p.moved, c: c * p.c})
	}
	return out
}
