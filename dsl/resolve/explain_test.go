package resolve

import (
	"go/ast"
	"go/parser"
	"go/token"
	"os"
	"path/filepath"
	"regexp"
	"strconv"
	"strings"
	"testing"
)

var kebab = regexp.MustCompile(`^[a-z]+(-[a-z0-9]+)+$`)

// literals lists every string literal of the sources in a folder, tests apart.
func literals(t *testing.T, dir string) map[string]bool {
	t.Helper()
	out := map[string]bool{}
	files, err := filepath.Glob(filepath.Join(dir, "*.go"))
	if err != nil || len(files) == 0 {
		t.Fatal("no sources in", dir)
	}
	for _, path := range files {
		if base := filepath.Base(path); strings.HasSuffix(base, "_test.go") || base == "explanations.go" {
			continue
		}
		src, err := os.ReadFile(path)
		if err != nil {
			t.Fatal(err)
		}
		f, err := parser.ParseFile(token.NewFileSet(), path, src, 0)
		if err != nil {
			t.Fatal(err)
		}
		ast.Inspect(f, func(n ast.Node) bool {
			if l, ok := n.(*ast.BasicLit); ok && l.Kind == token.STRING {
				if s, err := strconv.Unquote(l.Value); err == nil {
					out[s] = true
				}
			}
			return true
		})
	}
	return out
}

// Every code in the sources is explained, and every explanation is of a code
// that some source can give.
func TestCodesAndExplanations(t *testing.T) {
	said := literals(t, ".")
	for _, dir := range []string{"../syntax", ".."} {
		for s := range literals(t, dir) {
			said[s] = true
		}
	}
	for s := range said {
		// A unit kind's word is part of a code and no code itself.
		if !kebab.MatchString(s) || strings.HasSuffix(s, "-") {
			continue
		}
		if _, ok := Explain(s); !ok {
			t.Errorf("the code %q has no explanation", s)
		}
	}
	for code := range explanations {
		if code == "scope" || said[code] {
			continue
		}
		if word, isWant := strings.CutPrefix(code, "wants-"); isWant && (said[word] || said["a "+word]) {
			continue
		}
		t.Errorf("no source gives the code %q", code)
	}
	for _, c := range Codes() {
		if text, ok := Explain(c); !ok || len(strings.Fields(text)) < 6 {
			t.Errorf("%s: explanation %q", c, text)
		}
	}
	if _, ok := Explain("nonsense"); ok {
		t.Error("an unknown code is explained")
	}
}
