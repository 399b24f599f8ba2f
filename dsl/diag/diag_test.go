package diag

import (
	"encoding/json"
	"strings"
	"testing"
)

// stay is the text of which the sample in the design of the language speaks.
const stay = "tautspan 1\n\n\n\n\n\n\n\n\n\n    tension  412 kg\n"

func at(f *File, text string) Span {
	i := strings.Index(f.Text(), text)
	return Span{File: f, Start: i, End: i + len(text)}
}

// TestText holds the rendering against the sample in the design of the language.
func TestText(t *testing.T) {
	f := NewFile("S7.taut", stay)
	d := Diagnostic{Code: "wants-force", Span: at(f, "412 kg"), Summary: "tension wants a force", Found: "this is a mass", Hint: "4.04 kN"}
	want := `S7.taut 11:14  tension wants a force
    tension  412 kg
             ~~~~~~  this is a mass
    perhaps  4.04 kN                                    [wants-force]
`
	if got := d.Text(); got != want {
		t.Errorf("got\n%swant\n%s", got, want)
	}
}

func TestTextForms(t *testing.T) {
	f := NewFile("a.taut", "let ü = \"x\ty\"\nlet ü = 2\n")
	for name, c := range map[string]struct {
		d    Diagnostic
		want string
	}{
		"tab and letters beyond ASCII": {
			Diagnostic{Code: "c", Span: at(f, `y"`), Summary: "s", Found: "f"},
			"a.taut 1:12  s\n    let ü = \"x y\"\n               ~~  f" + strings.Repeat(" ", 36) + "[c]\n",
		},
		"nothing wide": {
			Diagnostic{Code: "c", Span: Span{File: f, Start: 15, End: 15}, Summary: "s"},
			"a.taut 2:1  s\n    let ü = 2\n    ~" + strings.Repeat(" ", 51) + "[c]\n",
		},
		"no place": {
			Diagnostic{Code: "c", Summary: "s", Found: "f"},
			"s\n    f" + strings.Repeat(" ", 51) + "[c]\n",
		},
		"further place": {
			Diagnostic{Code: "c", Span: at(f, "2"), Summary: "s", Related: []Related{{at(f, "ü"), "first given here"}}},
			"a.taut 2:9  s\n    let ü = 2\n            ~\n    a.taut 1:5  first given here" + strings.Repeat(" ", 24) + "[c]\n",
		},
		"long hint": {
			Diagnostic{Code: "c", Summary: "s", Hint: strings.Repeat("h", 60)},
			"s\n    perhaps  " + strings.Repeat("h", 60) + "  [c]\n",
		},
	} {
		if got := c.d.Text(); got != c.want {
			t.Errorf("%s: got\n%s\nwant\n%s", name, got, c.want)
		}
	}
}

// TestLongLine: a place far out in a long line is still shown, marked right.
func TestLongLine(t *testing.T) {
	f := NewFile("a.taut", strings.Repeat("a", 5000)+"X"+strings.Repeat("b", 5000))
	lines := strings.Split(Diagnostic{Code: "c", Span: at(f, "X"), Summary: "s"}.Text(), "\n")
	if len(lines[1]) > 200 {
		t.Errorf("%d columns", len(lines[1]))
	}
	column := strings.Index(lines[2], "~")
	if r := []rune(lines[1]); r[column] != 'X' {
		t.Errorf("marked %q", r[column])
	}
}

func TestPositions(t *testing.T) {
	f := NewFile("a.taut", "aü€b\r\n\nx")
	for _, c := range []struct{ offset, line, column int }{
		{0, 1, 1}, {1, 1, 2}, {3, 1, 3}, {6, 1, 4}, {7, 1, 5}, {9, 2, 1}, {10, 3, 1}, {11, 3, 2}, {99, 3, 2}, {-1, 1, 1},
	} {
		line, column := f.Position(c.offset)
		if line != c.line || column != c.column {
			t.Errorf("offset %d: %d:%d, want %d:%d", c.offset, line, column, c.line, c.column)
		}
		if c.offset >= 0 && c.offset < 12 && f.Offset(line, column) != c.offset {
			t.Errorf("%d:%d is offset %d, want %d", line, column, f.Offset(line, column), c.offset)
		}
	}
	if s := f.LineSpan(1).Text(); s != "aü€b" {
		t.Errorf("line 1 is %q", s)
	}
	if f.Lines() != 3 || NewFile("", "").Lines() != 1 {
		t.Error("count of lines")
	}
	a, b := Span{f, 0, 1}, Span{f, 3, 6}
	if a.To(b) != (Span{f, 0, 6}) || (Span{}).To(b) != b || a.To(Span{}) != a {
		t.Error("joined spans")
	}
}

// TestExcerpt: one line of a file that is not held whole.
func TestExcerpt(t *testing.T) {
	f := NewExcerpt("long.csv", "1.5,x", 70_000)
	got := Diagnostic{Code: "broken-row", Span: Span{f, 4, 5}, Summary: "no number"}.Text()
	want := "long.csv 70000:5  no number\n    1.5,x\n        ~" + strings.Repeat(" ", 47) + "[broken-row]\n"
	if got != want {
		t.Errorf("got\n%s\nwant\n%s", got, want)
	}
}

func TestList(t *testing.T) {
	f, g := NewFile("f", "a\nb\n"), NewFile("g", "c\n")
	var l List
	l.Add(Diagnostic{Code: "g", Span: Span{g, 0, 1}})
	l.Add(Diagnostic{Code: "f2", Span: Span{f, 2, 3}})
	l.Add(Diagnostic{Code: "w", Severity: Warning, Span: Span{f, 0, 1}})
	l.Add(Diagnostic{Code: "f1", Span: Span{f, 0, 1}})
	l.Add(Diagnostic{Code: "again", Span: Span{f, 1, 1}})
	l.Add(Diagnostic{Code: "none"})
	l.Sort()
	codes := func(l List) string {
		var s []string
		for _, d := range l {
			s = append(s, d.Code)
		}
		return strings.Join(s, " ")
	}
	if got := codes(l); got != "none g f1 w again f2" {
		t.Errorf("sorted: %s", got)
	}
	if got := codes(l.OnePerLine()); got != "none g f1 w f2" {
		t.Errorf("one a line: %s", got)
	}
	if !l.HasErrors() || l.Warnings().HasErrors() || codes(l.Warnings()) != "w" || len(l.Errors()) != 5 {
		t.Error("severities")
	}
	if got := l.Text(2); !strings.HasSuffix(got, "and 4 more\n") {
		t.Errorf("cut short: %s", got)
	}
	if strings.Contains(l.Text(0), "more") {
		t.Error("whole list")
	}
}

func TestJSON(t *testing.T) {
	f := NewFile("S7.taut", stay)
	for _, c := range []struct {
		d    Diagnostic
		want string
	}{
		{Diagnostic{Code: "wants-force", Span: at(f, "412 kg"), Summary: "tension wants a force", Found: "this is a mass", Hint: "4.04 kN"},
			`{"code":"wants-force","severity":"error","file":"S7.taut","line":11,"column":14,"message":"tension wants a force: this is a mass","hint":"4.04 kN"}`},
		{Diagnostic{Code: "c", Severity: Warning, Summary: "s"},
			`{"code":"c","severity":"warning","file":null,"line":null,"column":null,"message":"s","hint":null}`},
	} {
		b, err := json.Marshal(c.d)
		if err != nil || string(b) != c.want {
			t.Errorf("got %s %v", b, err)
		}
	}
	if b, err := json.Marshal(List(nil)); err != nil || string(b) != "[]" {
		t.Errorf("empty list: %s %v", b, err)
	}
}

func TestNearest(t *testing.T) {
	known := []string{"mass", "axial", "tension", "segment", "support", "lbf", "kN"}
	for word, want := range map[string]string{
		"mas": "mass", "masss": "mass", "tnesion": "tension", "Tension": "tension", "KN": "kN", "suport": "support",
		"zzz": "", "": "", "q": "", "mass": "", "completely": "",
	} {
		if got := Nearest(word, known); got != want {
			t.Errorf("%q: got %q, want %q", word, got, want)
		}
	}
}

// TestDistance: pairs whose edits can be counted by hand.
func TestDistance(t *testing.T) {
	for _, c := range []struct {
		a, b string
		want int
	}{{"", "abc", 3}, {"abc", "abc", 0}, {"abc", "acb", 1}, {"abc", "bc", 1}, {"abc", "xbc", 1}, {"abcd", "badc", 2}, {"kitten", "sitting", 3}} {
		if got := distance([]rune(c.a), []rune(c.b)); got != c.want {
			t.Errorf("%q %q: %d, want %d", c.a, c.b, got, c.want)
		}
	}
}
