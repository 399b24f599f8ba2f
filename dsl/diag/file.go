package diag

import (
	"sort"
	"unicode/utf8"
)

// File is one source text together with the offsets at which its lines begin.
// It is not changed after NewFile and may be shared between goroutines.
type File struct {
	name  string
	text  string
	lines []int // byte offset of the first byte of each line
	above int   // lines of the file that stand before the text
}

// NewFile makes a File from its display name and its text. The text may hold
// any bytes; a line ends at "\n" (a "\r" before it belongs to the line's end).
func NewFile(name, text string) *File {
	lines := []int{0}
	for i := 0; i < len(text); i++ {
		if text[i] == '\n' {
			lines = append(lines, i+1)
		}
	}
	return &File{name: name, text: text, lines: lines}
}

// NewExcerpt makes a File of one line of a file that is too long to be held; line
// counts from 1.
func NewExcerpt(name, text string, line int) *File {
	f := NewFile(name, text)
	f.above = max(0, line-1)
	return f
}

// Name returns the display name of the file.
func (f *File) Name() string { return f.name }

// Text returns the whole text.
func (f *File) Text() string { return f.text }

// Lines returns the number of lines; an empty text has one.
func (f *File) Lines() int { return len(f.lines) }

// Position returns line and column of a byte offset, both counted from 1, the
// column in code points. An offset outside the text is moved to its nearest end.
func (f *File) Position(offset int) (line, column int) {
	offset = min(max(offset, 0), len(f.text))
	line = sort.SearchInts(f.lines, offset+1)
	start := f.lines[line-1]
	return f.above + line, utf8.RuneCountInString(f.text[start:offset]) + 1
}

// LineSpan returns the span of a line counted from 1, without its line end.
func (f *File) LineSpan(line int) Span {
	line = min(max(line-f.above, 1), len(f.lines))
	start, end := f.lines[line-1], len(f.text)
	if line < len(f.lines) {
		end = f.lines[line] - 1
	}
	if end > start && f.text[end-1] == '\r' {
		end--
	}
	return Span{File: f, Start: start, End: end}
}

// Offset returns the byte offset of a line and column, both counted from 1,
// the column in code points. What lies outside is moved to the nearest place.
func (f *File) Offset(line, column int) int {
	s := f.LineSpan(line)
	at := s.Start
	for ; column > 1 && at < s.End; column-- {
		_, n := utf8.DecodeRuneInString(f.text[at:s.End])
		at += n
	}
	return at
}

// Span is a half-open range of byte offsets in a file. The zero Span belongs
// to no file and means "no place".
type Span struct {
	File       *File
	Start, End int
}

// IsZero says whether the span belongs to no file.
func (s Span) IsZero() bool { return s.File == nil }

// Text returns the bytes that the span covers; empty for the zero Span.
func (s Span) Text() string {
	if s.File == nil || s.Start < 0 || s.End > len(s.File.text) || s.Start > s.End {
		return ""
	}
	return s.File.text[s.Start:s.End]
}

// Position returns line and column of the span's start (0, 0 for the zero Span).
func (s Span) Position() (line, column int) {
	if s.File == nil {
		return 0, 0
	}
	return s.File.Position(s.Start)
}

// To returns the span from the start of s to the end of t; where one of them
// is zero or they lie in different files, the one that is not zero, else s.
func (s Span) To(t Span) Span {
	switch {
	case s.File == nil:
		return t
	case t.File != s.File || t.End < s.Start:
		return s
	}
	return Span{File: s.File, Start: s.Start, End: t.End}
}

// Covers says whether the byte offset lies in the span or just behind it.
func (s Span) Covers(offset int) bool {
	return s.File != nil && s.Start <= offset && offset <= s.End
}
