package tidy

import (
	"strings"
	"unicode/utf8"
)

// Gaps between columns, in blanks.
const (
	blockGap   = 2 // behind the first word and the name in a block
	placeGap   = 1 // between a watch's name and its place
	quantGap   = 2 // between a watch's place and its quantities
	requireGap = 3 // between a requirement and its text
	remarkGap  = 2 // between a statement and the comment behind it
)

// align pads the cells of rows that belong together.
func align(rows []row) {
	blocks := map[int][]*row{}
	var run []*row
	flush := func() {
		if len(run) > 0 {
			pad(run)
		}
		run = nil
	}
	end := 0
	for i := range rows {
		r := &rows[i]
		if r.kind == remarkRow {
			if r.from > end+1 {
				flush()
			}
			end = r.to
			continue
		}
		if r.group > 0 {
			blocks[r.group] = append(blocks[r.group], r)
		}
		inRun := r.kind == watchRow || r.kind == requireRow
		if !inRun || len(run) > 0 && (run[0].kind != r.kind || r.from > end+1) {
			flush()
		}
		if inRun {
			run = append(run, r)
		}
		end = r.to
	}
	flush()
	for _, b := range blocks {
		pad(b)
	}
}

// gap returns the blanks behind column i of a row.
func gap(kind rowKind, i int) int {
	switch {
	case kind == requireRow:
		return requireGap
	case kind == watchRow && i == 0:
		return placeGap
	case kind == watchRow:
		return quantGap
	}
	return blockGap
}

// pad makes the cells of each column but the last of a row equally wide. The
// width of a column is that of its widest cell with another behind it; among
// requirements also of one without a text.
func pad(rows []*row) {
	var widths []int
	for _, r := range rows {
		for i, c := range r.cells {
			if i == len(r.cells)-1 && r.kind != requireRow {
				break
			}
			if i == len(widths) {
				widths = append(widths, 0)
			}
			widths[i] = max(widths[i], utf8.RuneCountInString(c))
		}
	}
	for _, r := range rows {
		for i := range r.cells[:len(r.cells)-1] {
			n := widths[i] - utf8.RuneCountInString(r.cells[i]) + gap(r.kind, i)
			r.cells[i] += strings.Repeat(" ", n)
		}
	}
}

// render writes the rows with their empty lines.
func render(rows []row) string {
	var b strings.Builder
	end, opened := 0, true
	for _, r := range rows {
		if !opened && !r.tight && r.from > end+1 {
			b.WriteByte('\n')
		}
		indent := strings.Repeat("    ", r.indent)
		write(&b, indent, strings.Join(r.cells, ""), r.lines[0].remark)
		for _, l := range r.lines[1:] {
			write(&b, indent+"    ", l.text, l.remark)
		}
		end, opened = r.to, r.opening
	}
	return b.String()
}

// write writes one line.
func write(b *strings.Builder, indent, text, remark string) {
	b.WriteString(indent)
	b.WriteString(text)
	if remark != "" {
		if text != "" {
			b.WriteString(strings.Repeat(" ", remarkGap))
		}
		b.WriteString(remark)
	}
	b.WriteByte('\n')
}
