package syntax

import (
	"os"
	"strings"
	"testing"

	"github.com/tautspan/tautspan/dsl/diag"
)

// FuzzParse: whatever the text, the parser ends without a panic (one that it
// caught would show as "unreadable"), gives a tree, and all spans lie inside
// the file and in order.
func FuzzParse(f *testing.F) {
	if b, err := os.ReadFile("testdata/wrong.txt"); err == nil {
		for _, c := range strings.Split(string(b), "===\n") {
			f.Add(c)
		}
	}
	if b, err := os.ReadFile("../tidy/testdata/statements.taut"); err == nil {
		f.Add(string(b))
	}
	f.Fuzz(func(t *testing.T, text string) {
		tree, list := Parse(diag.NewFile("f.taut", text))
		lines := map[int]bool{}
		for _, d := range list {
			if d.Code == "unreadable" {
				t.Fatal("the parser panicked")
			}
			inside(t, tree, d.Span)
			line, _ := d.Span.Position()
			if lines[line] {
				t.Fatalf("two errors in line %d\n%s", line, list.Text(0))
			}
			lines[line] = true
			if d.Text() == "" {
				t.Fatal("no text")
			}
		}
		end := 0
		for _, s := range tree.Statements {
			inside(t, tree, s.Place())
			if s.Place().Start < end {
				t.Fatalf("a statement begins at %d, before the end of the one before it", s.Place().Start)
			}
			end = s.Place().Start
			if b, ok := s.(*Broken); ok && len(list) == 0 {
				t.Fatalf("%v is broken and nobody says why", b)
			}
		}
		tokens, _ := Scan(tree.File)
		end = 0
		for _, k := range tokens {
			if k.Start < end || k.End <= k.Start || text[k.Start:k.End] != k.Text || strings.Contains(k.Text, "\n") {
				t.Fatalf("token %+v", k)
			}
			end = k.End
		}
	})
}
