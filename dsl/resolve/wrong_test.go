package resolve

import (
	"fmt"
	"os"
	"path/filepath"
	"regexp"
	"strings"
	"testing"
	"testing/fstest"

	"github.com/tautspan/tautspan/dsl/diag"
)

// base is a sound rest of a scenario that a case may ask for; it stands behind
// the case, so that line numbers are those of the case.
const base = `
stock w {
    mass 1 kg/m
}
line l {
    tension 1 kN
    support a fixed
    segment s w 10 m
    joint j mass 1 kg
    segment z w 20 m
    support b fixed
}
watch q at s 2 m displacement, force
`

// wrongCase is one scenario with the diagnostics that it must have, and no others.
type wrongCase struct {
	name  string
	files fstest.MapFS
	want  []string // "file line code [| part of the text]"
}

var mark = regexp.MustCompile(`#!([^#]*)`)

// readCases reads a file of cases. A case begins with `== NAME [+base]`, a
// further file with `-- NAME`. A diagnostic is expected by a comment on its
// line: `#! code`, optionally `| part` of what the text must say. In a table,
// which has no comments, `#! @FILE:LINE:COLUMN code` on any line of the scenario
// expects it there.
func readCases(t *testing.T, path string) []wrongCase {
	t.Helper()
	data, err := os.ReadFile(path)
	if err != nil {
		t.Fatal(err)
	}
	var cases []wrongCase
	for _, chunk := range strings.Split("\n"+string(data), "\n== ")[1:] {
		head, body, _ := strings.Cut(chunk, "\n")
		c := wrongCase{files: fstest.MapFS{}}
		withBase := strings.HasSuffix(head, " +base")
		c.name = strings.TrimSuffix(head, " +base")
		for i, part := range strings.Split("\n"+body, "\n-- ") {
			name, text := "case.taut", strings.TrimPrefix(part, "\n")
			if i > 0 {
				name, text, _ = strings.Cut(part, "\n")
			}
			if !strings.HasSuffix(text, "\n") {
				text += "\n"
			}
			if i == 0 && withBase {
				text = strings.TrimSuffix(text, "\n") + base
			}
			if strings.HasSuffix(name, ".taut") {
				if !strings.HasPrefix(text, "tautspan") {
					text = "tautspan 1\n" + text
				}
				c.want = append(c.want, expected(name, text)...)
			}
			c.files[name] = &fstest.MapFile{Data: []byte(text)}
		}
		cases = append(cases, c)
	}
	return cases
}

// expected lists what the comments of a text expect.
func expected(name, text string) []string {
	var out []string
	for n, line := range strings.Split(text, "\n") {
		for _, m := range mark.FindAllStringSubmatch(line, -1) {
			what := strings.TrimSpace(m[1])
			if strings.HasPrefix(what, "@") {
				at, code, _ := strings.Cut(what[1:], " ")
				out = append(out, at+" "+code)
				continue
			}
			out = append(out, fmt.Sprintf("%s:%d %s", name, n+1, what))
		}
	}
	return out
}

// matches tells whether a diagnostic is what an expectation says.
func matches(d diag.Diagnostic, want string) bool {
	want, part, _ := strings.Cut(want, " | ")
	line, col := d.Span.Position()
	file := ""
	if d.Span.File != nil {
		file = d.Span.File.Name()
	}
	at := fmt.Sprintf("%s:%d", file, line)
	if strings.HasPrefix(want, at+":") {
		at += fmt.Sprintf(":%d", col)
	}
	return want == at+" "+d.Code && strings.Contains(d.Text(), strings.TrimSpace(part))
}

func TestWrongPrograms(t *testing.T) {
	paths, err := filepath.Glob("testdata/*.cases")
	if err != nil || len(paths) == 0 {
		t.Fatal("no cases", err)
	}
	total := 0
	for _, path := range paths {
		for _, c := range readCases(t, path) {
			total++
			t.Run(filepath.Base(path)+"/"+c.name, func(t *testing.T) { holdCase(t, c) })
		}
	}
	t.Logf("%d cases", total)
}

func holdCase(t *testing.T, c wrongCase) {
	res := Resolve(c.files, "case.taut", Options{})
	left := append([]string{}, c.want...)
	for _, d := range res.Diags {
		found := false
		for i, w := range left {
			if matches(d, w) {
				left = append(left[:i], left[i+1:]...)
				found = true
				break
			}
		}
		if !found {
			t.Errorf("not expected:\n%s", d.Text())
		}
		if _, ok := Explain(d.Code); !ok {
			t.Errorf("the code %s has no explanation", d.Code)
		}
	}
	for _, w := range left {
		t.Errorf("missing: %s", w)
	}
}
