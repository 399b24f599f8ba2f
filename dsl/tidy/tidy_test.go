package tidy

import (
	"flag"
	"math/rand/v2"
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

// TestBlanksDoNotMatter: whatever the number of blanks between tokens, before
// statements and at the ends of lines, the layout comes out the same.
func TestBlanksDoNotMatter(t *testing.T) {
	for _, golden := range []string{"testdata/footbridge.golden", "testdata/statements.golden"} {
		want, err := os.ReadFile(golden)
		if err != nil {
			t.Fatal(err)
		}
		text := string(want)
		tokens, _ := syntax.Scan(diag.NewFile("x", text))
		random := rand.New(rand.NewPCG(1, 2))
		for range 50 {
			var b strings.Builder
			end := 0
			for _, k := range tokens {
				for _, c := range text[end:k.Start] {
					switch {
					case c == '\n':
						b.WriteString(strings.Repeat(" ", random.IntN(3)) + "\n")
					case random.IntN(2) == 0:
						b.WriteString(strings.Repeat("\t ", random.IntN(2)) + " ")
					}
				}
				// Where blanks stood, one must stay: it may tell tokens apart.
				if k.Start > end && !strings.Contains(text[end:k.Start], "\n") {
					b.WriteByte(' ')
				}
				b.WriteString(k.Text)
				end = k.End
			}
			got, list := Source(diag.NewFile("y", b.String()))
			if len(list) > 0 || got != text {
				t.Fatalf("%s: from\n%s\ngot\n%s%s", golden, b.String(), got, list.Text(0))
			}
		}
	}
}

// TestTidySamples lays out every right sample of the grammar.
func TestTidySamples(t *testing.T) {
	data, err := os.ReadFile("../testdata/grammar-samples.txt")
	if err != nil {
		t.Fatal(err)
	}
	frames, count := map[string]string{}, 0
	for _, section := range strings.Split("\n"+string(data), "\n== ")[1:] {
		head, body, _ := strings.Cut(section, "\n")
		kind, name, _ := strings.Cut(head, " ")
		if kind == "frame" {
			frames[name] = body
		}
		if kind != "production" {
			continue
		}
		_, body, _ = strings.Cut(body, "frame ")
		frame, body, _ := strings.Cut(body, "\n")
		right, _, _ := strings.Cut(body, "\nwrong")
		right = strings.ReplaceAll(strings.TrimPrefix(right, "right\n"), "| ", "")
		var b strings.Builder
		for _, l := range strings.SplitAfter(frames[frame], "\n") {
			if strings.TrimSpace(l) == "%%" {
				l = right + "\n"
			}
			b.WriteString(l)
		}
		got, list := Source(diag.NewFile("s.taut", b.String()))
		if len(list) > 0 {
			t.Errorf("%s: %s", name, list.Text(0))
		}
		sound(t, b.String(), got)
		count++
	}
	if count < 70 {
		t.Errorf("only %d samples", count)
	}
}

// TestLayoutRules: what the rules of the package's comment say, case by case.
func TestLayoutRules(t *testing.T) {
	for name, c := range map[string]struct{ text, want string }{
		"power behind a unit": {"let a = 3 m ^ 2 + 3 m^2 + x ^ - 2", "let a = 3 m ^ 2 + 3 m^2 + x^-2"},
		"signs":               {"let a = - x - - y * ( + 2 )", "let a = -x - -y * (+2)"},
		"ranges":              {"require damping( 1 .. 4 ) within 1 %..2 %", "require damping(1..4) within 1 % .. 2 %"},
		"doubt":               {"let a=3 N+-2 %of it", "let a = 3 N +- 2 % of it"},
		"places":              {"excite e pluck at upper ( reach+2 m )by 3 mm", "excite e pluck at upper (reach + 2 m) by 3 mm"},
		"paths":               {`let a = hanger[ ROW.mark ].upper + ROW."L [m]"`, `let a = hanger[ROW.mark].upper + ROW."L [m]"`},
		"columns":             {`let a = table( "f.csv","t"unit s )`, `let a = table("f.csv", "t" unit s)`},
		"empty block":         {"run { }", "run {\n}"},
		"block in one line":   {"run { for 3 s }  # x", "run {\n    for  3 s\n}  # x"},
		"empty lines":         {"\n\n\nlet a = 1\n\n\n\nlet b = 2\nrun {\n\n\n for 3 s\n\n}\n\n\n", "\nlet a = 1\n\nlet b = 2\nrun {\n    for  3 s\n}"},
		"watches apart":       {"watch a at b force\nlet a = 1\nwatch long at c force", "watch a at b  force\nlet a = 1\nwatch long at c  force"},
		"texts":               {"require a < 1 \"x\"\nrequire abc < 1 clause \"y\"", "require a < 1     \"x\"\nrequire abc < 1   clause \"y\""},
		"comment, continued":  {"collect a , # one\n# two\nb", "collect a,  # one\n    # two\n    b"},
	} {
		got, list := Source(diag.NewFile("r.taut", "tautspan 1\n"+c.text))
		if want := "tautspan 1\n" + c.want + "\n"; len(list) > 0 || got != want {
			t.Errorf("%s: got\n%s%s", name, got, list.Text(0))
		}
	}
}

// TestBrokenTextStays: a text with errors comes back as it was.
func TestBrokenTextStays(t *testing.T) {
	text := "tautspan 1\nlet  a 3\n"
	if got, list := Source(diag.NewFile("b.taut", text)); got != text || !list.HasErrors() {
		t.Errorf("%q %v", got, list)
	}
}
