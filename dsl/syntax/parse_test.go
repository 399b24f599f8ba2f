package syntax

import (
	"fmt"
	"os"
	"strings"
	"testing"

	"github.com/tautspan/tautspan/dsl/diag"
)

// TestWrongPrograms runs the catalogue: the codes beside the lines are all the
// errors there are.
func TestWrongPrograms(t *testing.T) {
	text, err := os.ReadFile("testdata/wrong.txt")
	if err != nil {
		t.Fatal(err)
	}
	cases := strings.Split(string(text), "===\n")
	if len(cases) < 10 {
		t.Fatal("the catalogue is short")
	}
	for n, c := range cases[1:] {
		if c == "" {
			continue
		}
		var want, program strings.Builder
		for i, l := range strings.Split(c, "\n") {
			code, wrong, found := strings.Cut(l, "#!")
			if found {
				fmt.Fprintf(&want, "%d %s\n", i+1, strings.TrimSpace(wrong))
			}
			program.WriteString(strings.TrimRight(code, " ") + "\n")
		}
		tree, list := Parse(diag.NewFile("wrong.taut", program.String()))
		var got strings.Builder
		for _, d := range list {
			line, _ := d.Span.Position()
			fmt.Fprintf(&got, "%d %s\n", line, d.Code)
			inside(t, tree, d.Span)
			if d.Summary == "" || strings.HasSuffix(d.Summary, ".") {
				t.Errorf("%s: summary %q", d.Code, d.Summary)
			}
		}
		if got.String() != want.String() {
			t.Errorf("case %d:\n%s\nwant\n%sgot\n%s%s", n+1, program.String(), want.String(), got.String(), list.Text(0))
		}
	}
}

// inside checks that a span lies in its file.
func inside(t *testing.T, tree *Tree, s diag.Span) {
	t.Helper()
	if s.File != tree.File || s.Start < 0 || s.Start > s.End || s.End > len(tree.File.Text()) {
		t.Fatalf("span %d..%d of a text of %d bytes", s.Start, s.End, len(tree.File.Text()))
	}
}
