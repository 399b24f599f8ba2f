package diag

import "sort"

// Severity tells an error, which stops everything, from a warning.
type Severity int

// The severities, the graver first.
const (
	Error Severity = iota
	Warning
)

// String returns the word that JSON uses: "error" or "warning".
func (s Severity) String() string {
	if s == Warning {
		return "warning"
	}
	return "error"
}

// Diagnostic is one thing said about one place. It must carry a code and a
// summary; everything else may be empty.
type Diagnostic struct {
	Code     string    // stable word code such as "wants-force"
	Severity Severity  // the zero value is Error
	Span     Span      // the tight place; the zero Span for none
	Summary  string    // what is wrong, one sentence without full stop
	Found    string    // said behind the mark: "this is a mass"
	Hint     string    // what the user may type instead: "4.04 kN"
	Related  []Related // further places, such as a first definition
}

// Related is a further place that a diagnostic speaks of.
type Related struct {
	Span    Span
	Message string // "first said here"
}

// List is a collection of diagnostics.
type List []Diagnostic

// Add appends a diagnostic.
func (l *List) Add(d Diagnostic) { *l = append(*l, d) }

// HasErrors says whether any diagnostic in the list is an error.
func (l List) HasErrors() bool {
	for _, d := range l {
		if d.Severity == Error {
			return true
		}
	}
	return false
}

// Errors returns the errors of the list, in order.
func (l List) Errors() List { return l.of(Error) }

// Warnings returns the warnings of the list, in order.
func (l List) Warnings() List { return l.of(Warning) }

func (l List) of(s Severity) List {
	var out List
	for _, d := range l {
		if d.Severity == s {
			out = append(out, d)
		}
	}
	return out
}

// Sort orders the list by place: diagnostics without a place first, then by
// file in the order in which files first appear in the list, then by offset;
// at one place errors before warnings, then as they were added.
func (l List) Sort() {
	rank := map[*File]int{nil: -1}
	for _, d := range l {
		if _, ok := rank[d.Span.File]; !ok {
			rank[d.Span.File] = len(rank)
		}
	}
	sort.SliceStable(l, func(i, j int) bool {
		a, b := l[i], l[j]
		switch {
		case a.Span.File != b.Span.File:
			return rank[a.Span.File] < rank[b.Span.File]
		case a.Span.Start != b.Span.Start:
			return a.Span.Start < b.Span.Start
		}
		return a.Severity < b.Severity
	})
}

// OnePerLine returns the list with at most one error for each line of text:
// the first in the list. Warnings and diagnostics without a place all stay.
func (l List) OnePerLine() List {
	type place struct {
		file *File
		line int
	}
	seen := map[place]bool{}
	var out List
	for _, d := range l {
		if d.Severity == Error && !d.Span.IsZero() {
			line, _ := d.Span.Position()
			p := place{d.Span.File, line}
			if seen[p] {
				continue
			}
			seen[p] = true
		}
		out = append(out, d)
	}
	return out
}
