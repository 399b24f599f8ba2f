package tidy

import (
	"flag"
	"os"
	"path/filepath"
	"reflect"
	"strings"
	"testing"

	"github.com/tautspan/tautspan/dsl/diag"
	"github.com/tautspan/tautspan/dsl/syntax"
)

// TestExample holds the layout against the language's own example, which must
// come out as it stands, also when its blanks are taken away first.
func TestExample(t *testing.T) {
	want, err := os.ReadFile("testdata/footbridge.golden")
	if err != nil {
		t.Fatal(err)
	}
	for name, text := range map[string]string{"as it stands": string(want), "squeezed": squeeze(string(want)), "crlf": crlf(string(want))} {
		got, list := Source(diag.NewFile("footbridge.taut", text))
		if len(list) > 0 || got != string(want) {
			t.Errorf("%s: got\n%s\n%s", name, got, list.Text(0))
		}
	}
}

// TestGolden lays out the inputs in testdata; run with -update after a change
// of layout that is wanted, and read the difference.
func TestGolden(t *testing.T) {
	inputs, err := filepath.Glob("testdata/*.taut")
	if err != nil || len(inputs) == 0 {
		t.Fatal("no inputs", err)
	}
	for _, in := range inputs {
		text, err := os.ReadFile(in)
		if err != nil {
			t.Fatal(err)
		}
		got, list := Source(diag.NewFile(filepath.Base(in), string(text)))
		if len(list) > 0 {
			t.Errorf("%s: %s", in, list.Text(0))
			continue
		}
		golden := strings.TrimSuffix(in, ".taut") + ".golden"
		if *update {
			if err := os.WriteFile(golden, []byte(got), 0o644); err != nil {
				t.Fatal(err)
			}
		}
		want, err := os.ReadFile(golden)
		if err != nil {
			t.Fatal(err)
		}
		if got != string(want) {
			t.Errorf("%s: got\n%s", in, got)
		}
		sound(t, string(text), got)
	}
}

var update = flag.Bool("update", false, "rewrite the golden files")

// sound checks what holds for every layout: nothing but blanks changed, and
// it would be written again.
func sound(t *testing.T, text, got string) {
	t.Helper()
	a, _ := syntax.Scan(diag.NewFile("a", text))
	b, _ := syntax.Scan(diag.NewFile("b", got))
	if len(a) != len(b) {
		t.Fatalf("%d tokens became %d:\n%s", len(a), len(b), got)
	}
	for i := range a {
		if a[i].Kind != b[i].Kind || a[i].Text != b[i].Text {
			t.Fatalf("token %q became %q:\n%s", a[i].Text, b[i].Text, got)
		}
	}
	before, _ := syntax.Parse(diag.NewFile("a", text))
	after, _ := syntax.Parse(diag.NewFile("b", got))
	if !reflect.DeepEqual(before.Outline().Pieces, after.Outline().Pieces) {
		t.Fatalf("statements are divided differently:\n%s", got)
	}
	again, list := Source(diag.NewFile("b", got))
	if list.HasErrors() || again != got {
		t.Fatalf("laid out twice:\n%s\nthen\n%s\n%s", got, again, list.Text(0))
	}
}

// squeeze takes away indentation and every second of two neighbouring blanks.
func squeeze(s string) string {
	lines := strings.Split(s, "\n")
	for i, l := range lines {
		l = strings.TrimSpace(l)
		for strings.Contains(l, "  ") {
			l = strings.ReplaceAll(l, "  ", " ")
		}
		lines[i] = l
	}
	return strings.Join(lines, "\n")
}

func crlf(s string) string { return strings.ReplaceAll(s, "\n", "\r\n") }

// FuzzTidy checks on any sound text that the layout is sound.
func FuzzTidy(f *testing.F) {
	inputs, _ := filepath.Glob("testdata/*.taut")
	for _, in := range inputs {
		if b, err := os.ReadFile(in); err == nil {
			f.Add(string(b))
		}
	}
	f.Add("tautspan 1\nlet a = 3 m ^ 2 + -2^-1 # c\n# d\nlet b = (1 +\n# e\n2)\nrun { for 3 s } # f\n")
	f.Fuzz(func(t *testing.T, text string) {
		got, list := Source(diag.NewFile("f.taut", text))
		if !list.HasErrors() {
			sound(t, text, got)
		}
	})
}
