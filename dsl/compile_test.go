package dsl

import (
	"os"
	"path/filepath"
	"reflect"
	"strings"
	"testing"
	"testing/fstest"
)

// read is the text of a file of testdata.
func read(t *testing.T, name string) string {
	t.Helper()
	data, err := os.ReadFile(filepath.Join("testdata", name))
	if err != nil {
		t.Fatal(err)
	}
	return string(data)
}

func compileText(text string, opts Options) *Compiled {
	return Compile(fstest.MapFS{"case.taut": {Data: []byte(text)}}, "case.taut", opts)
}

func TestExampleCompilesAndIsTidy(t *testing.T) {
	text := read(t, "stay.taut")
	c := compileText(text, Options{})
	if c.Diagnostics.HasErrors() {
		t.Fatal(c.Diagnostics.Text(0))
	}
	if tidied, list := Tidy("case.taut", text); tidied != text || len(list) != 0 {
		t.Errorf("tidy changes the example:\n%s", tidied)
	}
	if len(c.Lets) != 2 || c.Lets[0].Name != "pull" || c.Lets[0].Kind != "a force" || c.Lets[0].Value != 412e3 {
		t.Errorf("lets: %+v", c.Lets)
	}
}

// Short faulty scenarios that everybody tries first; each has one error at the
// place that is named.
func TestPlainMistakes(t *testing.T) {
	line := "line l {\n tension 1 kN\n support a fixed\n segment s w 1 m\n support b fixed\n}\n"
	for name, c := range map[string]struct {
		text, code   string
		line, column int
	}{
		"dimension":       {"let a = 3 m + 2 s\n", "unit-mismatch", 2, 9},
		"word":            {"stok w {\n mass 1 kg/m\n}\n", "unknown-statement", 2, 1},
		"capitals":        {"stock w {\n mass 1 KG/m\n}\n", "unknown-unit", 3, 9},
		"negative mass":   {"stock w {\n mass -1 kg/m\n}\n" + line, "not-positive", 3, 7},
		"place outside":   {"stock w {\n mass 1 kg/m\n}\n" + line + "watch q at s 2 m displacement\n", "place-outside", 11, 14},
		"circle":          {"let a = b\nlet b = a\n", "circular-lets", 2, 5},
		"missing support": {"stock w {\n mass 1 kg/m\n}\nline l {\n tension 1 kN\n segment s w 1 m\n support b fixed\n}\n", "line-ends", 7, 2},
	} {
		c2 := compileText("tautspan 1\n"+c.text, Options{})
		e := c2.Diagnostics.Errors()
		if len(e) != 1 {
			t.Errorf("%s: %d errors\n%s", name, len(e), c2.Diagnostics.Text(0))
			continue
		}
		if l, col := e[0].Span.Position(); e[0].Code != c.code || l != c.line || col != c.column {
			t.Errorf("%s: %s at %d:%d, want %s at %d:%d", name, e[0].Code, l, col, c.code, c.line, c.column)
		}
	}
}

// The message of the language's own page, letter by letter.
func TestMessage(t *testing.T) {
	text := strings.Replace(read(t, "stay.taut"), "tension  pull", "tension  412 kg", 1)
	c := compileText(text, Options{})
	want := `case.taut 14:14  tension wants a force
    tension  412 kg
             ~~~~~~  this is a mass
    perhaps  4.04 kN                                    [wants-force]
`
	if got := c.Diagnostics.Errors().Text(0); got != want {
		t.Errorf("got\n%s\nwant\n%s", got, want)
	}
}

// folding is a scenario in three files.
func folding() fstest.MapFS {
	return fstest.MapFS{
		"case.taut": {Data: []byte(`tautspan 1
# the stay
use "lib/pulls.taut"   # its tension
use "lib/strands.taut"

line stay {
    tension pull  # from the library
    plane sideways
    support a fixed
    segment s strand 100 m
    support b fixed
}
watch q at s 30 m displacement
require peak(q.displacement) < most
`)},
		"lib/pulls.taut": {Data: []byte(`tautspan 1
title "pulls"
# measured in spring
let pull = 412 kN +- 2 %
use "strands.taut"
let most = 3 * thin
`)},
		"lib/strands.taut": {Data: []byte(`tautspan 1
let thin = 10 mm
stock strand {
    mass 18.4 kg/m  # weighed
}
`)},
	}
}

// A folded scenario stands alone and says the same.
func TestFold(t *testing.T) {
	for name, set := range map[string]map[string]string{"plain": nil, "with values": {"pull": "300 kN +- 1 %", "thin": "12 mm"}} {
		c := Compile(folding(), "case.taut", Options{Set: set})
		if c.Diagnostics.HasErrors() {
			t.Fatal(c.Diagnostics.Text(0))
		}
		text := c.Fold()
		alone := compileText(text, Options{})
		if alone.Diagnostics.HasErrors() {
			t.Fatalf("%s: the folded text does not compile:\n%s\n%s", name, text, alone.Diagnostics.Text(0))
		}
		if !reflect.DeepEqual(c.Template, alone.Template) {
			t.Errorf("%s: folding changes the template:\n%s\n%+v\n%+v", name, text, c.Template, alone.Template)
		}
		for _, keep := range []string{"# the stay", "# its tension", "# measured in spring", "# weighed"} {
			if !strings.Contains(text, keep) {
				t.Errorf("%s: the comment %q is lost:\n%s", name, keep, text)
			}
		}
		if strings.Contains(text, "use \"") || strings.Count(text, "tautspan 1") != 1 {
			t.Errorf("%s: not folded:\n%s", name, text)
		}
		if again := alone.Fold(); again != text {
			t.Errorf("%s: folding twice changes the text", name)
		}
	}
}

func TestFoldOfAFaultyScenario(t *testing.T) {
	c := compileText("tautspan 1\nlet a = b\n", Options{})
	if got := c.Fold(); got != "tautspan 1\nlet a = b\n" {
		t.Errorf("%q", got)
	}
	if got := Compile(fstest.MapFS{}, "case.taut", Options{}).Fold(); got != "" {
		t.Errorf("%q", got)
	}
}

// What only binding can see is told with its place.
func TestDiagnose(t *testing.T) {
	c := compileText(read(t, "stay.taut"), Options{})
	values, err := c.Template.Values(map[string]float64{"knob": -3})
	if err != nil {
		t.Fatal(err)
	}
	_, err = c.Template.Bind(values)
	if err == nil {
		t.Fatal("a negative dashpot binds")
	}
	d := c.Diagnose(err)
	if line, _ := d.Span.Position(); d.Code != "cannot-bind" || line != 17 || d.Span.Text() != "knob" {
		t.Errorf("%s", d.Text())
	}
}

// A value that stands against a default is told when the scenario is compiled.
func TestBindingIsPartOfCompiling(t *testing.T) {
	text := strings.Replace(read(t, "stay.taut"), "    for    40 s\n    every  5 ms\n", "    every  1e6 s\n", 1)
	c := compileText(text, Options{})
	e := c.Diagnostics.Errors()
	if len(e) != 1 || e[0].Code != "cannot-bind" || e[0].Span.Text() != "1e6 s" {
		t.Errorf("%s", c.Diagnostics.Text(0))
	}
}

func TestScope(t *testing.T) {
	text, ok := Explain("scope")
	for _, word := range []string{"galloping", "parametric", "torsion", "creep", "whirling", "lengthwise", "not-yet"} {
		if !ok || !strings.Contains(text, word) {
			t.Errorf("scope does not speak of %s", word)
		}
	}
	if codes := Codes(); len(codes) < 50 || codes[0] > codes[1] {
		t.Errorf("codes: %v", codes)
	}
}

// Folding never changes what a scenario says.
func FuzzFold(f *testing.F) {
	files := folding()
	f.Add(string(files["case.taut"].Data), string(files["lib/pulls.taut"].Data), string(files["lib/strands.taut"].Data), "300 kN")
	f.Add("tautspan 1\nuse \"lib/pulls.taut\"\nlet a = pull # c\n", "tautspan 1\nlet pull = # c\n  3 kN\nrun {\n  for 3 s\n}\n", "tautspan 1\n", "between 1 kN and 2 kN")
	f.Add("tautspan 1\r\nuse \"lib/pulls.taut\"\r\n", "tautspan 1\r\nlet pull = 3 kN", "tautspan 1", "3 +- 4")
	f.Fuzz(func(t *testing.T, text, pulls, strands, value string) {
		files := fstest.MapFS{"case.taut": {Data: []byte(text)}, "lib/pulls.taut": {Data: []byte(pulls)}, "lib/strands.taut": {Data: []byte(strands)}}
		for _, set := range []map[string]string{nil, {"pull": value}} {
			c := Compile(files, "case.taut", Options{Set: set})
			if c.Diagnostics.HasErrors() {
				continue
			}
			folded := c.Fold()
			alone := compileText(folded, Options{})
			if alone.Diagnostics.HasErrors() {
				t.Fatalf("the folded text does not compile:\n%s\n%s", folded, alone.Diagnostics.Text(0))
			}
			if !reflect.DeepEqual(c.Template, alone.Template) {
				t.Fatalf("folding changes the template:\n%q", folded)
			}
		}
	})
}
