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

// TestMarks: the place marked and the hint given are those that a user needs.
func TestMarks(t *testing.T) {
	for text, want := range map[string]string{
		"titel \"x\"":                                  "unknown-statement|titel|title",
		"let pull 412 kN":                              "missing-equals|412|let pull = 412 kN",
		"let a = (3 + 4":                               "open-bracket|(|",
		"let a = 3 + 4)":                               "stray-bracket|)|",
		"let a = 3 W/m^2*K":                            "unit-shape|W/m^2*K|W/(m^2*K)",
		"let a = 3 N/m/s":                              "unit-shape|N/m/s|N/(m*s)",
		"let a = .5 m":                                 "bare-point|.5|0.5",
		"let a = 3 − 4":                                "strange-sign|−|-",
		"let a = \"b":                                  "open-text|\"b|\"b\"",
		"let a = max(1, 2":                             "open-bracket|(|",
		"watch m at upper displacment":                 "unknown-word|displacment|displacement",
		"watch m at upper reach force":                 "unknown-word|reach|upper (reach)",
		"excite e pluck at a reach by 3":               "needs-brackets|reach|(reach)",
		"excite e pluk at a by 3 mm":                   "unknown-word|pluk|pluck",
		"run {\n efort quick\n}":                       "unknown-statement|efort|effort",
		"run {\n effort quik\n}":                       "unknown-word|quik|quick",
		"line l {\n support a fixd\n}":                 "unknown-word|fixd|fixed",
		"line l {\n joint a mass 3 kg,\n}":             "trailing-comma|,|",
		"line l {\n joint a mass 3 kg spring 2 N/m\n}": "missing-comma|spring|, spring",
		"require tension(upper reach) < 3 N":           "side-by-side|reach|upper (reach)",
		"let a = 3 #\xff":                              "bad-bytes|#\xff|",
	} {
		_, list := Parse(diag.NewFile("m.taut", "tautspan 1\n"+text+"\n"))
		var got []string
		for _, d := range list {
			got = append(got, d.Code+"|"+d.Span.Text()+"|"+d.Hint)
		}
		if s := strings.Join(got, "\n"); s != want {
			t.Errorf("%s: got %s, want %s", text, s, want)
		}
	}
}
