package resolve

import (
	"encoding/csv"
	"errors"
	"fmt"
	"io"
	"math"
	"path"
	"strconv"
	"strings"

	"github.com/tautspan/tautspan/dsl/diag"
	"github.com/tautspan/tautspan/dsl/syntax"
	"github.com/tautspan/tautspan/dsl/unit"
	"github.com/tautspan/tautspan/engine/formula"
)

// maxTableRows bounds a table. Chosen: half an hour of record at 500 Hz.
const maxTableRows = 1_000_000

// byteOrderMark may stand before a table's first line.
const byteOrderMark = "\ufeff"

// csvFile is a table as read, with the place of every field.
type csvFile struct {
	file   *diag.File
	header []string
	rows   [][]string
	lines  []int   // line of each row
	starts [][]int // byte offset in the file of each field of each row
	bad    bool
}

// csvReader walks a table and knows where it is.
type csvReader struct {
	r     *resolver
	out   *csvFile
	shift int // bytes before the text given to the reader
	call  diag.Span
}

func (c *csvReader) fault(offset, length int, code, summary, found, hint string) {
	c.out.bad = true
	start := min(max(offset, 0), len(c.out.file.Text()))
	end := min(start+max(length, 1), len(c.out.file.Text()))
	c.r.errorAt(diag.Span{File: c.out.file, Start: start, End: end}, code, summary, found, hint, related(c.call, "read for this table"))
}

// table reads a CSV file once; nil where that was refused.
func (r *resolver) table(s *syntax.String) *csvFile {
	name, ok := r.beside(s)
	if !ok {
		return nil
	}
	if t, ok := r.tables[name]; ok {
		if t.bad {
			return nil
		}
		return t
	}
	t := &csvFile{}
	r.tables[name] = t
	text, problem := readFile(r.fsys, name, maxTableBytes)
	t.file = diag.NewFile(name, text)
	if problem != nil {
		t.bad = true
		r.errorAt(s.Span, problem.code, "the table cannot be read", problem.why, "")
		return nil
	}
	c := &csvReader{r: r, out: t, call: s.Span}
	c.read(text)
	if t.bad {
		return nil
	}
	return t
}

// beside is the path of a file named in a statement.
func (r *resolver) beside(s *syntax.String) (string, bool) {
	p := s.Text
	name := path.Join(path.Dir(s.Span.File.Name()), p)
	switch {
	case p == "":
		r.errorAt(s.Span, "unreadable-file", "here stands the name of a file", "this text is empty", "")
	case strings.Contains(p, `\`):
		r.errorAt(s.Span, "use-outside", "a path is written with / between folders", "", quoted(strings.ReplaceAll(p, `\`, "/")))
	case strings.HasPrefix(p, "/") || strings.Contains(p, ":") || name == ".." || strings.HasPrefix(name, "../"):
		r.errorAt(s.Span, "use-outside", "a file lies in the scenario's folder or below it", "this path leads out of it", "")
	default:
		return name, true
	}
	return "", false
}

// read takes the table apart.
func (c *csvReader) read(text string) {
	if at := invalidUTF8(text); at >= 0 {
		c.fault(at, 1, "bad-bytes", "the table is not UTF-8 text", fmt.Sprintf("this byte is 0x%02x", text[at]), "")
		return
	}
	if strings.HasPrefix(text, byteOrderMark) {
		c.shift = len(byteOrderMark)
		text = text[c.shift:]
	}
	if strings.TrimSpace(text) == "" {
		c.fault(0, 0, "table-empty", "the table is empty", "", "")
		return
	}
	if first, _, _ := strings.Cut(text, "\n"); !strings.Contains(first, ",") && strings.ContainsAny(first, ";\t") {
		c.fault(c.shift, len(strings.TrimRight(first, "\r")), "table-form", "the columns of a table are separated by commas", "this line has none", "")
		return
	}
	in := csv.NewReader(strings.NewReader(text))
	in.FieldsPerRecord = -1
	in.TrimLeadingSpace = true
	for {
		row, err := in.Read()
		if errors.Is(err, io.EOF) {
			break
		}
		if err != nil {
			c.unreadable(err)
			return
		}
		if !c.row(in, row) {
			return
		}
	}
	c.separateHeader()
}

// unreadable reports a row that is no CSV.
func (c *csvReader) unreadable(err error) {
	var p *csv.ParseError
	if !errors.As(err, &p) {
		c.fault(0, 0, "table-form", "this table cannot be read", err.Error(), "")
		return
	}
	c.fault(c.offset(p.Line, p.Column), 1, "table-form", "this row cannot be read", "a quotation mark stands where none may", "")
}

// offset is the place in the file of a line and byte column of the reader.
func (c *csvReader) offset(line, column int) int {
	at := c.out.file.LineSpan(line).Start + column - 1
	if line == 1 {
		at += c.shift
	}
	return at
}

// row enters one row; false where the table is refused.
func (c *csvReader) row(in *csv.Reader, row []string) bool {
	t := c.out
	line, _ := in.FieldPos(0)
	if len(t.rows) > maxTableRows {
		c.fault(c.offset(line, 1), 1, "too-many-rows", fmt.Sprintf("a table has at most %d rows", maxTableRows), "", "")
		return false
	}
	if len(t.rows) > 0 && len(row) != len(t.rows[0]) {
		span := t.file.LineSpan(line)
		c.fault(span.Start, span.End-span.Start, "table-ragged", "every row of a table has as many fields as its first", fmt.Sprintf("this one has %d, the first %d", len(row), len(t.rows[0])), "")
		return false
	}
	starts := make([]int, len(row))
	for i := range row {
		l, col := in.FieldPos(i)
		starts[i] = c.offset(l, col)
		row[i] = strings.TrimSpace(row[i])
	}
	t.rows = append(t.rows, row)
	t.lines = append(t.lines, line)
	t.starts = append(t.starts, starts)
	return true
}

// separateHeader takes the first row as the names of the columns where any
// field of it is no number.
func (c *csvReader) separateHeader() {
	t := c.out
	for _, f := range t.rows[0] {
		if _, err := strconv.ParseFloat(f, 64); err != nil {
			t.header, t.rows, t.lines, t.starts = t.rows[0], t.rows[1:], t.lines[1:], t.starts[1:]
			return
		}
	}
}

// tableHistory compiles table("file.csv", "time" unit s, "push" unit kN).
func (r *resolver) tableHistory(c *syntax.Call, sc *scope) value {
	const form = `table("file.csv", "time" unit s, "push" unit kN)`
	if len(c.Args) != 3 {
		r.errorAt(c.Span, "wrong-arguments", "a table takes a file and two columns", fmt.Sprintf("here stand %d values", len(c.Args)), form)
		return badValue
	}
	file, ok := c.Args[0].Value.(*syntax.String)
	if !ok || c.Args[0].Key != nil || c.Args[0].Unit != nil {
		r.errorAt(c.Args[0].Span, "wrong-arguments", "a table begins with the name of its file in quotes", "", form)
		return badValue
	}
	var units [2]unit.Unit
	for i, a := range c.Args[1:] {
		if a.Unit == nil {
			r.errorAt(a.Span, "missing-unit", "a column of a table says its unit", "", clip(a.Value)+" unit "+[]string{"s", "kN"}[i])
			return badValue
		}
		u, uok := r.unit(a.Unit, "")
		if !uok {
			return badValue
		}
		units[i] = u
	}
	if units[0].Dim != unit.Time.Dim {
		r.errorAt(c.Args[1].Unit.Span, "wants-time", "the first column of a history is the time", "this is "+units[0].Dim.Name(), "unit s")
		return badValue
	}
	t := r.table(file)
	if t == nil {
		return badValue
	}
	x, xok := r.column(t, c.Args[1].Value)
	y, yok := r.column(t, c.Args[2].Value)
	if !xok || !yok {
		return badValue
	}
	read := &csvReader{r: r, out: t, call: file.Span}
	xs, ys := read.numbers(x, units[0]), read.numbers(y, units[1])
	if xs == nil || ys == nil || !read.rising(x, xs) {
		return badValue
	}
	breaks := xs
	if len(xs) > maxTableBreaks {
		breaks = []float64{xs[0], xs[len(xs)-1]}
	}
	for _, b := range breaks {
		sc.addBreak(formula.Const(b))
	}
	table := &formula.Table{Name: t.file.Name(), X: xs, Y: ys}
	return value{prog: formula.Lookup(table, *sc.time), dim: units[1].Dim, angle: units[1].Angle}
}

// column finds a column by its name in quotes or by its number from 1.
func (r *resolver) column(t *csvFile, e syntax.Expr) (int, bool) {
	width := len(t.header)
	if len(t.rows) > 0 {
		width = len(t.rows[0])
	}
	switch e := e.(type) {
	case *syntax.String:
		found := -1
		for i, h := range t.header {
			if h != strings.TrimSpace(e.Text) {
				continue
			}
			if found >= 0 {
				r.errorAt(e.Span, "ambiguous-name", "several columns are called "+e.Text, "", "say the number of the column")
				return 0, false
			}
			found = i
		}
		if found >= 0 {
			return found, true
		}
		known := "the table's first row holds no names"
		if t.header != nil {
			known = "there are " + strings.Join(t.header, ", ")
		}
		hint := diag.Nearest(e.Text, t.header)
		if hint != "" {
			hint = quoted(hint)
		}
		r.errorAt(e.Span, "unknown-column", "no column is called "+e.Text, shortText(known), hint)
	case *syntax.Number:
		if e.Unit == nil && e.Value >= 1 && e.Value <= float64(width) && e.Value == math.Trunc(e.Value) {
			return int(e.Value) - 1, true
		}
		r.errorAt(e.Span, "unknown-column", fmt.Sprintf("the columns are numbered from 1 to %d", width), "", "")
	default:
		r.errorAt(e.Place(), "unknown-column", "a column is its name in quotes or its number", "", "")
	}
	return 0, false
}

func shortText(s string) string {
	if r := []rune(s); len(r) > 120 {
		return string(r[:119]) + "…"
	}
	return s
}

// numbers reads a column in SI; nil where a field is no finite number.
func (c *csvReader) numbers(column int, u unit.Unit) []float64 {
	t := c.out
	if len(t.rows) < 2 {
		c.fault(0, 0, "table-empty", "a table wants two rows of numbers at least", fmt.Sprintf("this one has %d", len(t.rows)), "")
		return nil
	}
	out := make([]float64, len(t.rows))
	for i, row := range t.rows {
		f := row[column]
		v, err := strconv.ParseFloat(f, 64)
		v = u.SI(v)
		switch {
		case f == "":
			c.fault(t.starts[i][column], 1, "table-number", "a number is missing here", "", "")
			return nil
		case err != nil && !errors.Is(err, strconv.ErrRange) || strings.ContainsAny(f, "_xXpP"):
			c.fault(t.starts[i][column], len(f), "table-number", "this is no number", "", "")
			return nil
		case math.IsNaN(v) || math.IsInf(v, 0):
			c.fault(t.starts[i][column], len(f), "table-number", "this number is not finite", "", "")
			return nil
		}
		out[i] = v
	}
	return out
}

// rising wants the times of a table in order.
func (c *csvReader) rising(column int, xs []float64) bool {
	for i := 1; i < len(xs); i++ {
		if xs[i] > xs[i-1] {
			continue
		}
		found := "this time is earlier than the one before"
		if xs[i] == xs[i-1] {
			found = "this time is the same as the one before"
		}
		c.fault(c.out.starts[i][column], len(c.out.rows[i][column]), "table-order", "the times of a table rise from row to row", found, "")
		return false
	}
	return true
}
