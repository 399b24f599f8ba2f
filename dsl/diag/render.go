package diag

import (
	"encoding/json"
	"fmt"
	"strings"
	"unicode/utf8"
)

// Layout of the text form, in columns counted from 0: where the code stands,
// how far excerpts are indented, and how much of a long line is shown.
const (
	codeColumn   = 56
	indent       = "    "
	excerptLimit = 120
)

// Text renders one diagnostic: file, line, column and summary; the line with
// the place marked and what was found; the hint; and the code at the end. It
// ends with a line end.
func (d Diagnostic) Text() string {
	var b strings.Builder
	head := d.Summary
	if !d.Span.IsZero() {
		line, col := d.Span.Position()
		head = fmt.Sprintf("%s %d:%d  %s", d.Span.File.name, line, col, d.Summary)
	}
	lines := append([]string{head}, excerpt(d.Span, d.Found)...)
	if d.Span.IsZero() && d.Found != "" {
		lines = append(lines, indent+d.Found)
	}
	for _, r := range d.Related {
		line, col := r.Span.Position()
		if !r.Span.IsZero() {
			lines = append(lines, fmt.Sprintf("%s%s %d:%d  %s", indent, r.Span.File.name, line, col, r.Message))
		}
	}
	if d.Hint != "" {
		lines = append(lines, indent+"perhaps  "+d.Hint)
	}
	last := lines[len(lines)-1]
	pad := max(codeColumn-utf8.RuneCountInString(last), 2)
	lines[len(lines)-1] = last + strings.Repeat(" ", pad) + "[" + d.Code + "]"
	for _, s := range lines {
		b.WriteString(s)
		b.WriteByte('\n')
	}
	return b.String()
}

// excerpt returns the first line that the span touches and the marks below it.
func excerpt(s Span, found string) []string {
	if s.IsZero() {
		return nil
	}
	line, _ := s.Position()
	whole := s.File.LineSpan(line)
	text := whole.Text()
	from := min(max(s.Start-whole.Start, 0), len(text))
	to := min(max(s.End-whole.Start, from), len(text))
	lead := len(text) - len(strings.TrimLeft(text, " \t"))
	lead = min(lead, from)
	before, marked, after := shown(text[lead:from]), shown(text[from:to]), shown(text[to:])
	if n := len(before); n > excerptLimit/2 {
		before = append([]rune("… "), before[n-excerptLimit/2:]...)
	}
	if len(marked) > excerptLimit {
		marked, after = marked[:excerptLimit], []rune("…")
	}
	if room := max(excerptLimit-len(before)-len(marked), 20); len(after) > room {
		after = append(after[:room:room], []rune(" …")...)
	}
	mark := indent + strings.Repeat(" ", len(before)) + strings.Repeat("~", max(len(marked), 1))
	if found != "" {
		mark += "  " + found
	}
	return []string{strings.TrimRight(indent+string(before)+string(marked)+string(after), " "), mark}
}

// shown replaces what would break the alignment of marks or disturb a
// terminal: control characters become blanks, bad bytes a replacement sign.
func shown(s string) []rune {
	out := make([]rune, 0, len(s))
	for _, r := range s {
		if r < 0x20 || r == 0x7f || (r >= 0x80 && r < 0xa0) {
			r = ' '
		}
		out = append(out, r)
	}
	return out
}

// Text renders the list in its order. With limit > 0 at most that many
// diagnostics are rendered, and a last line says how many remain.
func (l List) Text(limit int) string {
	var b strings.Builder
	for i, d := range l {
		if limit > 0 && i == limit {
			fmt.Fprintf(&b, "and %d more\n", len(l)-i)
			break
		}
		b.WriteString(d.Text())
	}
	return b.String()
}

// diagnosticJSON is the promised machine-readable form of a diagnostic.
type diagnosticJSON struct {
	Code     string  `json:"code"`
	Severity string  `json:"severity"`
	File     *string `json:"file"`
	Line     *int    `json:"line"`
	Column   *int    `json:"column"`
	Message  string  `json:"message"`
	Hint     *string `json:"hint"`
}

// MarshalJSON writes the keys code, severity, file, line, column, message and
// hint; line and column count from 1, columns in code points. What does not
// exist is null. The message is the summary, with what was found behind a colon.
func (d Diagnostic) MarshalJSON() ([]byte, error) {
	out := diagnosticJSON{Code: d.Code, Severity: d.Severity.String(), Message: d.Summary}
	if d.Found != "" {
		out.Message += ": " + d.Found
	}
	if !d.Span.IsZero() {
		name := d.Span.File.name
		line, col := d.Span.Position()
		out.File, out.Line, out.Column = &name, &line, &col
	}
	if d.Hint != "" {
		out.Hint = &d.Hint
	}
	return json.Marshal(out)
}

// MarshalJSON writes an array, [] for an empty list.
func (l List) MarshalJSON() ([]byte, error) {
	return json.Marshal(append([]Diagnostic{}, l...))
}
