package main

import (
	"fmt"
	"go/parser"
	"go/token"
	"io/fs"
	"os"
	"path/filepath"
	"sort"
	"strconv"
	"strings"
	"testing"
)

const module = "github.com/tautspan/tautspan"

// layers is the layer table: what each package may import.
type layers struct {
	order   []string
	allowed map[string]map[string]bool
}

// readLayers reads the table and reports rows that name a package not above them.
func readLayers(text string) (*layers, []string) {
	l := &layers{allowed: map[string]map[string]bool{}}
	var faults []string
	for n, line := range strings.Split(text, "\n") {
		line = strings.TrimSpace(line)
		if line == "" || strings.HasPrefix(line, "#") {
			continue
		}
		name, rest, found := strings.Cut(line, ":")
		if !found {
			faults = append(faults, fmt.Sprintf("line %d has no colon", n+1))
			continue
		}
		allowed := map[string]bool{}
		for _, word := range strings.Fields(rest) {
			matched := false
			for _, above := range l.order {
				if above == word || strings.HasSuffix(word, "/*") && strings.HasPrefix(above, strings.TrimSuffix(word, "*")) {
					allowed[above] = true
					matched = true
				}
			}
			if !matched {
				faults = append(faults, fmt.Sprintf("%s names %s, which is no row above it", name, word))
			}
		}
		l.order = append(l.order, name)
		l.allowed[name] = allowed
	}
	return l, faults
}

// check reports what is wrong with one import.
func (l *layers) check(from, to string) string {
	allowed, known := l.allowed[from]
	switch {
	case !known:
		return from + " is not in the layer table"
	case !allowed[to]:
		return from + " may not import " + to
	}
	return ""
}

// banned lists imports that belong in one place only.
func banned(from, path string) string {
	pure := strings.HasPrefix(from, "engine/") || from == "dsl" || strings.HasPrefix(from, "dsl/")
	switch {
	case pure && path == "os":
		return from + " imports os: files are handed in"
	case path == "net/http":
		return from + " imports net/http"
	case strings.HasPrefix(path, "google.golang.org/grpc") && !strings.HasPrefix(from, "plugins/"):
		return from + " imports gRPC"
	}
	return ""
}

func TestLayers(t *testing.T) {
	text, err := os.ReadFile("testdata/layers.txt")
	if err != nil {
		t.Fatal(err)
	}
	table, faults := readLayers(string(text))
	for _, f := range faults {
		t.Error(f)
	}
	root := filepath.Join("..", "..")
	seen := 0
	err = filepath.WalkDir(root, func(path string, d fs.DirEntry, err error) error {
		if err != nil {
			return err
		}
		if d.IsDir() && (strings.HasPrefix(d.Name(), ".") && d.Name() != ".." || d.Name() == "testdata") {
			return filepath.SkipDir
		}
		if d.IsDir() || !strings.HasSuffix(path, ".go") {
			return nil
		}
		rel, err := filepath.Rel(root, filepath.Dir(path))
		if err != nil {
			return err
		}
		from := filepath.ToSlash(rel)
		file, err := parser.ParseFile(token.NewFileSet(), path, nil, parser.ImportsOnly)
		if err != nil {
			return err
		}
		test := strings.HasSuffix(path, "_test.go")
		for _, spec := range file.Imports {
			name, err := strconv.Unquote(spec.Path.Value)
			if err != nil {
				return err
			}
			seen++
			to, own := strings.CutPrefix(name, module+"/")
			if fault := importFault(table, from, name, to, own, test); fault != "" {
				t.Errorf("%s: %s", path, fault)
			}
		}
		return nil
	})
	if err != nil {
		t.Fatal(err)
	}
	if seen < 100 {
		t.Errorf("only %d imports were looked at: the walk missed the tree", seen)
	}
}

var solvers = map[string]bool{"plugins/differences": true, "plugins/spectral": true, "plugins/characteristic": true}

func importFault(table *layers, from, name, to string, own, test bool) string {
	switch {
	case !own && !test:
		return banned(from, name)
	case !own:
		return ""
	case test && solvers[from] && solvers[to] && from != to:
		return from + "'s tests import another solver"
	case test || from == to:
		return ""
	}
	return table.check(from, to)
}

// The check itself must be able to fail.
func TestLayersCatchPlantedFaults(t *testing.T) {
	table, faults := readLayers("a:\nb: a\nc: a b\n")
	if len(faults) != 0 {
		t.Fatal(faults)
	}
	for _, c := range []struct{ from, to, want string }{
		{"b", "a", ""}, {"a", "b", "a may not import b"}, {"x", "a", "x is not in the layer table"},
	} {
		if got := table.check(c.from, c.to); got != c.want {
			t.Errorf("%s -> %s: %q, want %q", c.from, c.to, got, c.want)
		}
	}
	if _, faults := readLayers("b: a\na:\n"); len(faults) != 1 {
		t.Errorf("a row before its own dependency gave %v", faults)
	}
	if banned("engine/mesh", "os") == "" || banned("dsl/unit", "net/http") == "" {
		t.Error("a banned import was let through")
	}
	if importFault(table, "plugins/spectral", "", "plugins/differences", true, true) == "" {
		t.Error("one solver's tests may not import another solver")
	}
}

func TestLayerTableNamesRealPackages(t *testing.T) {
	text, err := os.ReadFile("testdata/layers.txt")
	if err != nil {
		t.Fatal(err)
	}
	table, _ := readLayers(string(text))
	sort.Strings(table.order)
	for _, name := range table.order {
		files, _ := filepath.Glob(filepath.Join("..", "..", filepath.FromSlash(name), "*.go"))
		if len(files) == 0 {
			t.Errorf("the layer table names %s, which has no Go file", name)
		}
	}
}
