package resolve

import (
	"fmt"
	"reflect"
	"sort"
	"strconv"
	"strings"

	"github.com/tautspan/tautspan/dsl/diag"
	"github.com/tautspan/tautspan/dsl/syntax"
	"github.com/tautspan/tautspan/dsl/unit"
)

// Limits of what one each block may make. Chosen: a bridge has hundreds of
// hangers; the text made is bounded like a scenario.
const (
	maxEachRows  = 5000
	maxEachBytes = syntax.MaxBytes
)

// made is the text that a block came to for one row of its table, and where
// its parts came from.
type made struct {
	from   *diag.File
	pieces []madePiece // in order, without gaps
}

// madePiece is a run of the made text that was copied, or that stands in the
// place of a name of the row.
type madePiece struct {
	start  int // in the made text
	origin int // in the file
	length int // of what stood there
	copied bool
}

// origin is the place in the file of a place in the made text.
func (m *made) origin(s diag.Span) diag.Span {
	at := func(offset int, end bool) int {
		i := sort.Search(len(m.pieces), func(i int) bool { return m.pieces[i].start > offset }) - 1
		if end && i > 0 && m.pieces[i].start == offset {
			i--
		}
		if i < 0 {
			return 0
		}
		p := m.pieces[i]
		switch {
		case p.copied:
			return p.origin + min(offset-p.start, p.length)
		case end:
			return p.origin + p.length
		}
		return p.origin
	}
	start := at(s.Start, false)
	return diag.Span{File: m.from, Start: start, End: max(at(s.End, true), start)}
}

// rowUse is a part of a block that says something of the row.
type rowUse struct {
	span  diag.Span
	label *syntax.Label // hanger[ROW.mark]; nil for a value
	name  *syntax.Name  // ROW.column
}

// each repeats a block for every row of its table: names of the row are put
// into the text of the block, which is then read like any other.
func (r *resolver) each(e *syntax.Each) {
	whole := func() { r.incomplete, r.partsUnsure = true, true }
	if len(e.Statements) == 0 && !e.Incomplete {
		return
	}
	if e.Incomplete || e.Row.Index != nil || e.Row.Text == "" {
		whole()
		return
	}
	for _, s := range e.Statements {
		switch s := s.(type) {
		case *syntax.Each, *syntax.Use, *syntax.Version, *syntax.Title, *syntax.Run, *syntax.Fit, *syntax.Sample:
			r.errorAt(firstWord(s.Place()), "misplaced", "this cannot be repeated for every row of a table", "it stands outside the block", "")
			whole()
			return
		}
	}
	t := r.table(&e.Table)
	if t == nil {
		whole()
		return
	}
	switch {
	case t.header == nil:
		r.errorAt(e.Table.Span, "table-form", "a table that is gone through by rows names its columns in its first row", "this one begins with numbers", "")
		whole()
		return
	case len(t.rows) == 0:
		r.errorAt(e.Table.Span, "table-empty", "the table has no rows", "", "")
		whole()
		return
	case len(t.rows) > maxEachRows:
		r.errorAt(e.Table.Span, "too-many-rows", fmt.Sprintf("a block is repeated for at most %d rows", maxEachRows), fmt.Sprintf("this table has %d", len(t.rows)), "")
		whole()
		return
	}
	uses := rowUses(e)
	for row := range t.rows {
		if !r.eachRow(e, t, row, uses) {
			whole()
			return
		}
	}
}

// rowUses finds what a block says of the row, in order.
func rowUses(e *syntax.Each) []rowUse {
	var out []rowUse
	var walk func(v reflect.Value)
	walk = func(v reflect.Value) {
		switch v.Kind() {
		case reflect.Pointer, reflect.Interface:
			if v.IsNil() || v.Type() == reflect.TypeFor[*diag.File]() {
				return
			}
			if n, ok := v.Interface().(*syntax.Name); ok && n.Parts[0].Text == e.Row.Text && n.Parts[0].Index == nil {
				out = append(out, rowUse{span: n.Span, name: n})
				return
			}
			walk(v.Elem())
		case reflect.Slice:
			for i := range v.Len() {
				walk(v.Index(i))
			}
		case reflect.Struct:
			if v.Type() == reflect.TypeFor[diag.Span]() {
				return
			}
			if v.Type() == reflect.TypeFor[syntax.Label]() {
				l := v.Interface().(syntax.Label)
				if n, ok := l.Index.(*syntax.Name); ok {
					out = append(out, rowUse{span: l.Span, label: &l, name: n})
					return
				}
			}
			for i := range v.NumField() {
				if v.Type().Field(i).IsExported() {
					walk(v.Field(i))
				}
			}
		}
	}
	for _, s := range e.Statements {
		walk(reflect.ValueOf(s))
	}
	sort.SliceStable(out, func(a, b int) bool { return out[a].span.Start < out[b].span.Start })
	return out
}

// eachRow makes the text of a block for one row and takes its statements in.
func (r *resolver) eachRow(e *syntax.Each, t *csvFile, row int, uses []rowUse) bool {
	file := e.Span.File
	first, last := e.Statements[0].Place(), e.Statements[len(e.Statements)-1].Place()
	source := file.Text()
	m := &made{from: file}
	var b strings.Builder
	put := func(text string, origin, length int, copied bool) {
		m.pieces = append(m.pieces, madePiece{start: b.Len(), origin: origin, length: length, copied: copied})
		b.WriteString(text)
	}
	put(setHead, first.Start, 0, false)
	at := first.Start
	for _, u := range uses {
		text, ok := r.rowText(e, t, row, u)
		if !ok {
			return false
		}
		put(source[at:u.span.Start], at, u.span.Start-at, true)
		put(text, u.span.Start, u.span.End-u.span.Start, false)
		at = u.span.End
	}
	put(source[at:last.End]+"\n", at, last.End-at, true)
	if r.made += b.Len(); r.made > maxEachBytes {
		r.errorAt(e.Table.Span, "too-many", "the rows of this table make more text than is read", "", "")
		return false
	}
	text := diag.NewFile(file.Name(), b.String())
	r.mades[text] = m
	tree, diags := syntax.Parse(text)
	r.diags = append(r.diags, diags...)
	r.statements = append(r.statements, tree.Statements[1:]...)
	return !diags.HasErrors()
}

// rowText is what stands in the place of one use of the row.
func (r *resolver) rowText(e *syntax.Each, t *csvFile, row int, u rowUse) (string, bool) {
	if u.name.Parts[0].Text != e.Row.Text {
		r.errorAt(u.name.Span, "unknown-name", "a name in square brackets is made from the row", "the row is called "+e.Row.Text, e.Row.Text+".mark")
		return "", false
	}
	if len(u.name.Parts) != 2 || u.name.Parts[1].Index != nil {
		r.errorAt(u.span, "unknown-column", "a column of the row is written "+e.Row.Text+".NAME", "", e.Row.Text+`."`+t.header[0]+`"`)
		return "", false
	}
	column, word, ok := r.rowColumn(t, &u.name.Parts[1])
	if !ok {
		return "", false
	}
	cell := t.rows[row][column]
	c := &csvReader{r: r, out: t, call: e.Table.Span}
	if cell == "" {
		c.fault(t.starts[row][column], 1, "table-number", "a value is missing here", "the column is read by "+clip(u.name), "")
		return "", false
	}
	if u.label != nil {
		return u.label.Text + "_" + nameOf(cell), true
	}
	if _, err := strconv.ParseFloat(cell, 64); err != nil || strings.ContainsAny(cell, "_xXpPiIN") {
		c.fault(t.starts[row][column], len(cell), "table-number", "this is no number", "the column is read by "+clip(u.name), "")
		return "", false
	}
	if word != "" {
		cell += " " + word
	}
	if cell[0] == '-' || cell[0] == '+' {
		cell = "(" + cell + ")"
	}
	return cell, true
}

// rowColumn finds a column by its heading, whole or without the unit in square
// brackets at its end, and that unit.
func (r *resolver) rowColumn(t *csvFile, l *syntax.Label) (column int, word string, ok bool) {
	found := -1
	bare := make([]string, len(t.header))
	units := make([]string, len(t.header))
	for i, h := range t.header {
		bare[i], units[i] = heading(h)
		if h == strings.TrimSpace(l.Text) {
			found = i
		}
	}
	for i := range bare {
		if found < 0 && bare[i] == l.Text {
			found = i
		} else if bare[i] == l.Text && t.header[found] != strings.TrimSpace(l.Text) {
			r.errorAt(l.Span, "ambiguous-name", "several columns are called "+l.Text, "", quoted(t.header[i]))
			return 0, "", false
		}
	}
	if found < 0 {
		hint := diag.Nearest(l.Text, append(append([]string{}, t.header...), bare...))
		if hint != "" && !plainWord(hint) {
			hint = quoted(hint)
		}
		r.errorAt(l.Span, "unknown-column", "no column is called "+l.Text, shortText("there are "+strings.Join(t.header, ", ")), hint)
		return 0, "", false
	}
	if units[found] != "" {
		if _, err := unit.Parse(units[found]); err != nil {
			r.errorAt(l.Span, "unknown-unit", "the heading "+t.header[found]+" has no unit that is known in its brackets", err.Error(), "")
			return 0, "", false
		}
	}
	return found, units[found], true
}

// heading parts a heading like `L [m]` into name and unit.
func heading(h string) (name, word string) {
	open := strings.LastIndexByte(h, '[')
	if open < 0 || !strings.HasSuffix(h, "]") {
		return h, ""
	}
	return strings.TrimSpace(h[:open]), strings.TrimSpace(h[open+1 : len(h)-1])
}

func plainWord(s string) bool {
	return s != "" && nameOf(s) == s && (s[0] < '0' || s[0] > '9')
}

// nameOf makes the part of a name out of a cell: letters and digits stay, all
// else becomes a low line.
func nameOf(cell string) string {
	return strings.Map(func(c rune) rune {
		if c >= 'a' && c <= 'z' || c >= 'A' && c <= 'Z' || c >= '0' && c <= '9' {
			return c
		}
		return '_'
	}, cell)
}
