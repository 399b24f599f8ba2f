package spectral

import "github.com/tautspan/tautspan/engine/mesh"

// reactionFramed is what the line exerts on a node; see reactionAt. Of a sagging
// line's pull only what acts along the line counts, not that on the fitting itself.
func (s *system) reactionFramed(op operator, t *tap, node int, attached [][]mesh.Attachment) {
	n := s.size()
	var rows [3][]float64
	for i := range rows {
		rows[i] = make([]float64, n)
	}
	put := func(q, end int, v float64) {
		if end >= 0 {
			rows[q][s.inner+end] -= v
		} else if end < endFixed && v != 0 {
			t.f[q].pre = append(t.f[q].pre, preTerm{moved: -2 - end, c: -v})
		}
	}
	for _, at := range attached[node] {
		list, a := s.byPiece[at.Piece], 0
		e := &s.elements[list[0]]
		if at.End {
			e, a = &s.elements[list[len(list)-1]], 1
		}
		b := e.body
		for c, v := range b.drag[a] {
			rows[1][e.first+c] -= b.rate * v
			rows[2][e.first+c] -= v
		}
		if b.cio != nil {
			for c, v := range b.cio[a] {
				rows[1][e.first+c] -= v
			}
		}
		for d, end := range e.out {
			put(0, end, b.k[a][d])
			put(1, end, b.c[a][d])
			put(2, end, b.m[a][d])
		}
		s.sagShare(rows[0], &t.f[0], e, a)
	}
	for q := range rows {
		t.f[q].runs = compress(op.row(rows[q]))
	}
	t.share = s.watched[node]
}

// steepAtNode sets what extra tension multiplies in the line's force on a node: the
// node's row of a unit tension's stiffness, as in reactionAt.
func (s *system) steepAtNode(op operator, t *tap, node int, attached [][]mesh.Attachment) {
	row := make([]float64, s.size())
	for _, at := range attached[node] {
		p := &s.m.Pieces[at.Piece]
		if !s.stretches(p) {
			continue
		}
		t.line = p.Line
		list, a := s.byPiece[at.Piece], 0
		e := &s.elements[list[0]]
		if at.End {
			e, a = &s.elements[list[len(list)-1]], 1
		}
		b := e.body
		size := len(b.shape)
		for d, end := range e.out {
			v := b.k[a][d] / b.tension
			if b.unitK != nil {
				v = b.unitK[(b.ni+a)*size+b.ni+d]
			}
			if end >= 0 {
				row[s.inner+end] -= v
			} else if end < endFixed {
				t.steep.pre = append(t.steep.pre, preTerm{moved: -2 - end, c: -v})
			}
		}
		for c := 0; c < b.ni && b.unitK != nil; c++ {
			row[e.first+c] -= b.unitK[(b.ni+a)*size+c]
		}
	}
	t.steep.runs = compress(op.row(row))
}

// sagShare subtracts the sag's pull on an element's outer coordinate a from a row.
func (s *system) sagShare(row []float64, f *functional, e *element, a int) {
	for _, sg := range s.sags {
		line := &s.m.Lines[sg.line]
		for k, pi := range line.Pieces {
			if pi != e.piece {
				continue
			}
			own := line.Sag.Pieces[k] * e.body.area[e.body.ni+a] * sg.g
			for i, w := range sg.w {
				row[i] -= own * w
			}
			for i, w := range sg.moved {
				if w != 0 {
					f.pre = append(f.pre, preTerm{moved: i, c: -own * w})
				}
			}
		}
	}
}
