package tidy

import (
	"strings"

	"github.com/tautspan/tautspan/dsl/diag"
	"github.com/tautspan/tautspan/dsl/syntax"
)

// Source lays out the text of a file. A text with errors comes back as it is,
// with the diagnostics that the parser gave.
func Source(f *diag.File) (string, diag.List) {
	tree, list := syntax.Parse(f)
	if list.HasErrors() {
		return f.Text(), list
	}
	return Tree(tree), list
}

// Tree lays out a tree that was parsed without errors. The layout of a tree
// with errors keeps all its tokens, but its lines may not be in good order.
func Tree(tree *syntax.Tree) string {
	w := &writer{out: tree.Outline()}
	w.statements(w.out.Pieces, tree.Statements, 0)
	w.remarksBefore(len(w.out.Tokens), 0)
	align(w.rows)
	return render(w.rows)
}

// row is one statement's head, one closing brace or one comment line.
type row struct {
	indent  int
	kind    rowKind
	group   int      // rows of one group are aligned together; 0 for none
	cells   []string // first line, divided where columns begin
	lines   []line   // lines[0] has the comment of the first line only
	from    int      // line of the source it begins on, 0 if it makes a line of its own
	to      int      // line of the source it ends on
	tight   bool     // no empty line before it
	opening bool     // it opens a block
}

// line is one line of output: its text and the comment behind it.
type line struct {
	text, remark string
}

type rowKind int

const (
	plainRow rowKind = iota
	remarkRow
	watchRow
	requireRow
	blockRow
)

// writer collects rows.
type writer struct {
	out    syntax.Outline
	rows   []row
	remark int // next comment to be placed
	groups int // groups given out so far
}

// statements adds the rows of statements at the margin or in an each block.
func (w *writer) statements(pieces []syntax.Piece, trees []syntax.Statement, indent int) {
	for i, p := range pieces {
		var s syntax.Statement
		if len(trees) == len(pieces) {
			s = trees[i]
		}
		kind, starts := plainRow, []int(nil)
		switch s := s.(type) {
		case *syntax.Watch:
			kind, starts = watchRow, w.watchCells(p, s)
		case *syntax.Require:
			kind, starts = requireRow, w.requireCells(p, s)
		}
		w.piece(p, indent, kind, 0, starts)
		if !p.Block {
			continue
		}
		if e, ok := s.(*syntax.Each); ok {
			w.statements(p.Items, e.Statements, indent+1)
		} else {
			w.block(p, indent+1)
		}
		w.closing(p, indent)
	}
}

// block adds the rows of a block other than each.
func (w *writer) block(p syntax.Piece, indent int) {
	w.groups++
	group := w.groups
	for _, item := range p.Items {
		if item.Block {
			w.piece(item, indent, plainRow, 0, nil)
			w.block(item, indent+1)
			w.closing(item, indent)
			continue
		}
		starts := []int{item.Lo + 1}
		switch w.out.Tokens[item.Lo].Text {
		case "support", "segment", "joint":
			starts = append(starts, w.labelEnd(item.Lo+1, item.Hi))
		}
		w.piece(item, indent, blockRow, group, starts)
	}
}

// closing adds the row of a closing brace.
func (w *writer) closing(p syntax.Piece, indent int) {
	if p.Close < 0 {
		return
	}
	w.remarksBefore(p.Close, indent+1)
	t := w.out.Tokens[p.Close]
	r := row{indent: indent, cells: []string{"}"}, lines: []line{{}}, from: t.Line, to: t.Line, tight: true}
	r.lines[0].remark = w.remarkBehind(p.Close)
	w.rows = append(w.rows, r)
}

// labelEnd returns the token behind the name that begins at token i.
func (w *writer) labelEnd(i, end int) int {
	i++
	if i < end && w.out.Tokens[i].Text == "[" {
		for depth := 0; i < end; i++ {
			switch w.out.Tokens[i].Text {
			case "[":
				depth++
			case "]":
				depth--
			}
			if depth == 0 {
				return i + 1
			}
		}
	}
	return min(i, end)
}

// watchCells returns the tokens at which the place and the quantities begin.
func (w *writer) watchCells(p syntax.Piece, s *syntax.Watch) []int {
	place := w.labelEnd(p.Lo+1, p.Hi)
	i := place
	for i < p.Hi && w.out.Tokens[i].Start < s.Spot.Span.End {
		i++
	}
	return []int{place, i}
}

// requireCells returns the token at which text or clause begins, if any.
func (w *writer) requireCells(p syntax.Piece, s *syntax.Require) []int {
	for i := p.Lo; i < p.Hi; i++ {
		at := w.out.Tokens[i].Start
		if s.Text != nil && at == s.Text.Span.Start {
			return []int{i}
		}
		if s.Text == nil && s.Clause != nil && i+1 < p.Hi && w.out.Tokens[i+1].Start == s.Clause.Span.Start {
			return []int{i}
		}
	}
	return nil
}

// piece adds the row of one statement's head, the comments before it first.
// starts are the tokens at which its further cells begin.
func (w *writer) piece(p syntax.Piece, indent int, kind rowKind, group int, starts []int) {
	w.remarksBefore(p.Lo, indent)
	tokens := w.out.Tokens
	r := row{indent: indent, kind: kind, group: group, from: tokens[p.Lo].Line, to: tokens[p.Hi-1].Line, opening: p.Block}
	if p.Lo > 0 && tokens[p.Lo-1].Line == r.from {
		r.from = 0
	}
	first := p.Lo // first token of the current line
	for i := p.Lo + 1; i <= p.Hi; i++ {
		if i < p.Hi && tokens[i].Line == tokens[i-1].Line {
			continue
		}
		l := line{text: w.join(first, i), remark: w.remarkBehind(i - 1)}
		if len(r.lines) == 0 {
			r.cells = w.cells(first, i, starts)
		}
		r.lines = append(r.lines, l)
		if i < p.Hi {
			for w.remark < len(w.out.Remarks) && w.out.Remarks[w.remark].Start < tokens[i].Start {
				r.lines = append(r.lines, line{remark: w.out.Remarks[w.remark].Text})
				w.remark++
			}
		}
		first = i
	}
	w.rows = append(w.rows, r)
}

// cells divides the first line of a statement. Where it ends before its last
// cell begins, it is one cell.
func (w *writer) cells(lo, hi int, starts []int) []string {
	var out []string
	for _, s := range starts {
		if s > hi {
			return []string{w.join(lo, hi)}
		}
	}
	at := lo
	for _, s := range append(starts, hi) {
		if s > at {
			out = append(out, w.join(at, s))
			at = s
		}
	}
	return out
}

// remarksBefore adds the comments that stand before a token as rows.
func (w *writer) remarksBefore(token, indent int) {
	for w.remark < len(w.out.Remarks) {
		m := w.out.Remarks[w.remark]
		if token < len(w.out.Tokens) && m.Start > w.out.Tokens[token].Start {
			return
		}
		w.rows = append(w.rows, row{indent: indent, kind: remarkRow, cells: []string{""},
			lines: []line{{remark: m.Text}}, from: m.Line, to: m.Line})
		w.remark++
	}
}

// remarkBehind takes the comment that stands behind a token in its line.
func (w *writer) remarkBehind(token int) string {
	if w.remark >= len(w.out.Remarks) {
		return ""
	}
	m, t := w.out.Remarks[w.remark], w.out.Tokens[token]
	if m.Line != t.Line || m.Start < t.Start {
		return ""
	}
	if token+1 < len(w.out.Tokens) && w.out.Tokens[token+1].Start < m.Start {
		return ""
	}
	w.remark++
	return m.Text
}

// join writes tokens[lo:hi] in one line.
func (w *writer) join(lo, hi int) string {
	var b strings.Builder
	for i := lo; i < hi; i++ {
		if i > lo && w.blank(i) {
			b.WriteByte(' ')
		}
		b.WriteString(w.out.Tokens[i].Text)
	}
	return b.String()
}

// blank says whether a blank stands before token i, which is not the first of
// its line.
func (w *writer) blank(i int) bool {
	t, before := w.out.Tokens[i], w.out.Tokens[i-1]
	switch t.Text {
	case ")", "]", ",", ".", "[":
		if t.Kind == syntax.Mark {
			return false
		}
	case "..":
		return w.spaced(i)
	case "^":
		// Behind a unit the blank tells an operator from the unit's power.
		return before.Kind == syntax.UnitTok
	}
	if t.Kind == syntax.Open {
		return false
	}
	switch before.Text {
	case "(", "[", ".":
		return before.Kind != syntax.Open && before.Kind != syntax.Mark
	case "..":
		return w.spaced(i - 1)
	case "^":
		return i > 1 && w.out.Tokens[i-2].Kind == syntax.UnitTok
	case "+", "-":
		return !w.out.Signs[before.Start]
	}
	return true
}

// spaced says whether the `..` at token i stands between the ends of `within`
// or `outside` and not in a call.
func (w *writer) spaced(i int) bool {
	for depth := 0; i >= 0; i-- {
		switch t := w.out.Tokens[i]; {
		case t.Text == ")" || t.Text == "]":
			depth++
		case t.Text == "(" || t.Text == "[":
			depth--
		case t.Kind == syntax.Ident && depth == 0 && (t.Text == "within" || t.Text == "outside"):
			return true
		case t.Kind == syntax.Block || t.Text == "}" || t.Kind == syntax.Ident && depth == 0 && (t.Text == "using" || t.Text == "require"):
			return false
		}
		if depth < 0 {
			return false
		}
	}
	return false
}
