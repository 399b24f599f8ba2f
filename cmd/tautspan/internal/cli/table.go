package cli

import (
	"strings"
	"unicode/utf8"
)

// table lays cells out in columns two blanks apart. Columns named in right are
// set flush right, so that figures stand under figures.
type table struct {
	head  []string
	right map[int]bool
	rows  [][]string
}

func newTable(head ...string) *table { return &table{head: head, right: map[int]bool{}} }

// flush sets columns flush right.
func (t *table) flush(columns ...int) *table {
	for _, c := range columns {
		t.right[c] = true
	}
	return t
}

func (t *table) add(cells ...string) { t.rows = append(t.rows, cells) }

// lines is the table as text, each line indented by two blanks and without
// blanks at its end.
func (t *table) lines() []string {
	all := t.rows
	if len(t.head) > 0 {
		all = append([][]string{t.head}, t.rows...)
	}
	var width []int
	for _, row := range all {
		for i, c := range row {
			if i == len(width) {
				width = append(width, 0)
			}
			width[i] = max(width[i], utf8.RuneCountInString(c))
		}
	}
	var out []string
	for _, row := range all {
		var b strings.Builder
		b.WriteString("  ")
		for i, c := range row {
			pad := strings.Repeat(" ", width[i]-utf8.RuneCountInString(c))
			if i > 0 {
				b.WriteString("  ")
			}
			if t.right[i] {
				b.WriteString(pad + c)
			} else {
				b.WriteString(c + pad)
			}
		}
		out = append(out, strings.TrimRight(b.String(), " "))
	}
	return out
}

// wrap breaks prose at blanks to width columns, with an indent before each line
// after the first.
func wrap(text string, width int, indent string) []string {
	var lines []string
	line := ""
	for _, word := range strings.Fields(text) {
		switch {
		case line == "":
			line = word
		case utf8.RuneCountInString(line)+1+utf8.RuneCountInString(word) > width:
			lines = append(lines, line)
			line = indent + word
		default:
			line += " " + word
		}
	}
	if line != "" {
		lines = append(lines, line)
	}
	return lines
}
