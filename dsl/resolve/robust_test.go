package resolve

import (
	"errors"
	"fmt"
	"io/fs"
	"math"
	"os"
	"path/filepath"
	"strings"
	"testing"
	"testing/fstest"

	"github.com/tautspan/tautspan/dsl/diag"
	"github.com/tautspan/tautspan/engine/scenario"
)

// codes lists the codes of the errors of a scenario.
func codes(files fstest.MapFS, opts Options) string {
	res := Resolve(files, "case.taut", opts)
	var out []string
	for _, d := range res.Diags.Errors() {
		out = append(out, d.Code)
	}
	return strings.Join(out, " ")
}

func one(text string) fstest.MapFS { return fstest.MapFS{"case.taut": {Data: []byte(text)}} }

// longLine is a scenario of n segments on one line, with a let each.
func longLine(n int) string {
	var b strings.Builder
	b.WriteString("tautspan 1\nlet pull = 10 kN\nstock w {\n    mass 1 kg/m\n}\n")
	for i := range n {
		fmt.Fprintf(&b, "let m%d = %d g\n", i, i+1)
	}
	b.WriteString("line l {\n    tension pull\n    support a fixed\n")
	for i := range n {
		fmt.Fprintf(&b, "    segment s%d w 1.5 m\n    joint j%d mass m%d\n", i, i, i)
	}
	b.WriteString("    segment last w 1 m\n    support b fixed\n}\nwatch q at last 0.5 m displacement\n")
	return b.String()
}

func TestTenThousandSegments(t *testing.T) {
	var b strings.Builder
	b.WriteString("tautspan 1\nstock w {\n mass 10 g/m\n}\nline l {\n tension 1 kN\n support a fixed\n")
	for i := range 10_000 {
		fmt.Fprintf(&b, " segment s%d w 1 m\n", i)
	}
	b.WriteString(" support b fixed\n}\nwatch q at s9999 50 % displacement\n")
	res := Resolve(one(b.String()), "case.taut", Options{})
	if len(res.Diags) != 0 {
		t.Fatal(res.Diags.Text(3))
	}
	if got := len(res.Template.Model.Lines[0].Segments); got != 10_000 {
		t.Errorf("%d segments", got)
	}
}

func TestTooManySegments(t *testing.T) {
	text := "tautspan 1\nstock w {\n mass 1 kg/m\n}\nline l {\n tension 1 kN\n support a fixed\n" +
		strings.Repeat(" segment s w 1 m\n", 20_001) + " support b fixed\n}\n"
	if got := codes(one(text), Options{}); !strings.Contains(got, "too-many") {
		t.Error(got)
	}
}

func TestLimitsOfExpressions(t *testing.T) {
	chain := "tautspan 1\nlet a = 1" + strings.Repeat(" + 1", 400) + "\n"
	if got := codes(one(chain), Options{}); got != "" {
		t.Errorf("a sum of 400: %s", got)
	}
	for name, text := range map[string]string{
		"sum":      "let a = 1" + strings.Repeat(" + 1", 40_000),
		"power":    "let a = 1" + strings.Repeat("^1", 50_000),
		"signs":    "let a = " + strings.Repeat("-", 50_000) + "1",
		"brackets": "let a = " + strings.Repeat("(", 10_000) + "1" + strings.Repeat(")", 10_000),
		"calls":    "let a = " + strings.Repeat("abs(", 1_000) + "1" + strings.Repeat(")", 1_000),
		"values":   "let a = max(1" + strings.Repeat(", 1", 20_000) + ")",
	} {
		got := codes(one("tautspan 1\n"+text+"\n"), Options{})
		if got != "too-long" && got != "too-deep" {
			t.Errorf("%s: %q", name, got)
		}
	}
	// A chain of lets is no deep expression.
	var b strings.Builder
	b.WriteString("tautspan 1\nlet a0 = 1 m\n")
	for i := range 5_000 {
		fmt.Fprintf(&b, "let a%d = a%d + 1 m\n", i+1, i)
	}
	if got := codes(one(b.String()), Options{}); got != "" {
		t.Errorf("a chain of lets: %s", got)
	}
	// Read backwards it is a recursion over 20,000 lets.
	b.Reset()
	b.WriteString("tautspan 1\n")
	for i := range 5_000 {
		fmt.Fprintf(&b, "let a%d = a%d + 1 m\n", i, i+1)
	}
	b.WriteString("let a5000 = 1 m\n")
	if got := codes(one(b.String()), Options{}); got != "" {
		t.Errorf("a chain of lets backwards: %s", got)
	}
}

// bigFile is a file that claims a size and fails the test when it is read.
type bigFile struct {
	t    *testing.T
	size int64
}

func (b bigFile) Open(string) (fs.File, error) { return bigOpen{b}, nil }

type bigOpen struct{ bigFile }

func (b bigOpen) Stat() (fs.FileInfo, error) {
	info, err := fstest.MapFS{"f": {Data: []byte("x")}}.Stat("f")
	return sized{info, b.size}, err
}
func (b bigOpen) Read([]byte) (int, error) {
	b.t.Error("a file that is too large was read")
	return 0, fs.ErrInvalid
}
func (b bigOpen) Close() error { return nil }

type sized struct {
	fs.FileInfo
	size int64
}

func (s sized) Size() int64 { return s.size }

// A file of 100 MB is refused by its size, before it is read.
func TestHugeScenario(t *testing.T) {
	res := Resolve(bigFile{t, 100 << 20}, "case.taut", Options{})
	if e := res.Diags.Errors(); len(e) != 1 || e[0].Code != "file-too-large" {
		t.Error(res.Diags.Text(0))
	}
}

// bigTable serves a scenario, and a table whose size is too large.
type bigTable struct {
	bigFile
	rest fstest.MapFS
}

func (b bigTable) Open(name string) (fs.File, error) {
	if name == "p.csv" {
		return b.bigFile.Open(name)
	}
	return b.rest.Open(name)
}

func TestHugeTable(t *testing.T) {
	text := "tautspan 1\n" + base + "excite a push at j with table(\"p.csv\", 1 unit s, 2 unit N)\n"
	res := Resolve(bigTable{bigFile{t, 10 << 30}, one(text)}, "case.taut", Options{})
	if e := res.Diags.Errors(); len(e) != 1 || e[0].Code != "file-too-large" {
		t.Error(res.Diags.Text(0))
	}
}

func TestOddFiles(t *testing.T) {
	for name, c := range map[string]struct {
		text, want string
	}{
		"empty":            {"", "missing-version"},
		"only a comment":   {"# nothing\n", "missing-version"},
		"no version":       {"let a = 3 m\n", "missing-version"},
		"another version":  {"tautspan 2\n", "unknown-version"},
		"not UTF-8":        {"tautspan 1\nlet a = 3 m\xff\n", "bad-bytes"},
		"windows lines":    {"tautspan 1\r\nlet a = 3 m\r\nlet b = a + 2 s\r\n", "unit-mismatch"},
		"no last line end": {"tautspan 1\nlet a = 3 m", ""},
	} {
		if got := codes(one(c.text), Options{}); got != c.want {
			t.Errorf("%s: %q, want %q", name, got, c.want)
		}
	}
	for name, want := range map[string]string{"nothing.taut": "unreadable-file", "../x": "unreadable-file", "": "unreadable-file", ".": "unreadable-file", "/x": "unreadable-file"} {
		res := Resolve(one(""), name, Options{})
		if e := res.Diags.Errors(); len(e) != 1 || e[0].Code != want {
			t.Errorf("%q: %s", name, res.Diags.Text(0))
		}
	}
}

func TestTableBytes(t *testing.T) {
	text := "tautspan 1\n" + base + "excite a push at j with table(\"p.csv\", 1 unit s, 2 unit N)\n"
	files := one(text)
	files["p.csv"] = &fstest.MapFile{Data: []byte("t,p\n1,2\n3,\xff4\n")}
	res := Resolve(files, "case.taut", Options{})
	if e := res.Diags.Errors(); len(e) != 1 || !matches(e[0], "p.csv:3:3 bad-bytes") {
		t.Error(res.Diags.Text(0))
	}
}

// Many tables of many rows.
func TestLongTable(t *testing.T) {
	var b strings.Builder
	for i := range 50_000 {
		fmt.Fprintf(&b, "%d,%d\n", i, i%7)
	}
	files := one("tautspan 1\n" + base + "excite a push at j with table(\"p.csv\", 1 unit ms, 2 unit N)\n")
	files["p.csv"] = &fstest.MapFile{Data: []byte(b.String())}
	res := Resolve(files, "case.taut", Options{})
	if res.Diags.HasErrors() {
		t.Fatal(res.Diags.Text(0))
	}
	h := bind(t, res).Pushes[0].Force
	// Rows 49998 and 49999 hold 4 and 5: 49998 = 7*7142 + 4.
	if got := h.At(49.9985, 0); math.Abs(got-4.5) > 1e-9 {
		t.Errorf("half way between the last rows: %v, want 4.5", got)
	}
	if len(h.Breaks) > 4 {
		t.Errorf("%d breaks of a table of 50,000 rows", len(h.Breaks))
	}
}

// Texts that are wrong all over are refused quickly; each of these would take
// minutes if hints or circles cost as much as they can.
func TestHostileTexts(t *testing.T) {
	many := func(n int, line func(i int) string) string {
		var b strings.Builder
		b.WriteString("tautspan 1\n")
		for i := range n {
			b.WriteString(line(i))
		}
		return b.String()
	}
	const n = 2_000
	for name, c := range map[string]struct{ text, first string }{
		"unknown names":     {many(n, func(i int) string { return fmt.Sprintf("let a%d = b%d\n", i, i) }), "unknown-name"},
		"circles in circle": {many(n, func(i int) string { return fmt.Sprintf("let a%d = a%d + a0\n", i, (i+1)%n) }), "circular-lets"},
		"one circle":        {many(n, func(i int) string { return fmt.Sprintf("let a%d = a%d\n", i, (i+1)%n) }), "circular-lets"},
		"a chain":           {many(20_100, func(i int) string { return fmt.Sprintf("let a%d = a%d\n", i, i+1) }), "too-long"},
		"places":            {many(n, func(i int) string { return fmt.Sprintf("watch w%d at p%d force\n", i, i) }), "unknown-name"},
	} {
		res := Resolve(one(c.text), "case.taut", Options{})
		found := false
		for _, d := range res.Diags {
			found = found || d.Code == c.first
		}
		if !found {
			t.Errorf("%s: no %s among %d", name, c.first, len(res.Diags))
		}
	}
}

func TestManyErrors(t *testing.T) {
	text := "tautspan 1\n" + strings.Repeat("let a = 3 KN + nothing\n", 3000)
	res := Resolve(one(text), "case.taut", Options{})
	if got := len(res.Diags.Errors()); got != 3000 {
		t.Errorf("%d errors, want one a line", got)
	}
}

func FuzzResolve(f *testing.F) {
	f.Add(example, "time,push\n1,2\n3,4\n")
	paths, _ := filepath.Glob("testdata/*.cases")
	for _, path := range paths {
		data, err := os.ReadFile(path)
		if err != nil {
			f.Fatal(err)
		}
		for _, chunk := range strings.Split(string(data), "\n== ") {
			_, body, _ := strings.Cut(chunk, "\n")
			body, table, _ := strings.Cut(body, "\n-- p.csv\n")
			f.Add("tautspan 1\n"+body+base, table)
		}
	}
	f.Fuzz(func(t *testing.T, text, table string) {
		files := one(text)
		files["p.csv"] = &fstest.MapFile{Data: []byte(table)}
		files["a.taut"] = &fstest.MapFile{Data: []byte("tautspan 1\nlet a = 3 m\n")}
		res := Resolve(files, "case.taut", Options{Set: map[string]string{"pull": table}})
		lines := map[string]bool{}
		for _, d := range res.Diags {
			s := d.Span
			if s.File == nil && d.Code == "" || s.File != nil && (s.Start < 0 || s.End > len(s.File.Text()) || s.Start > s.End) {
				t.Fatalf("span outside its file: %+v", d)
			}
			if d.Severity != diag.Error || s.File == nil {
				continue
			}
			line, _ := s.Position()
			key := fmt.Sprint(s.File.Name(), line)
			if lines[key] {
				t.Fatalf("two errors on line %s", key)
			}
			lines[key] = true
			_ = d.Text()
		}
		if !res.Diags.HasErrors() {
			values, err := res.Template.Values(nil)
			if err != nil {
				t.Fatalf("no error, and no values: %v", err)
			}
			// What only binding sees (a default against a value, say) must have a place.
			var p *scenario.PathError
			if _, err := res.Template.Bind(values); err != nil && !errors.As(err, &p) {
				t.Fatalf("binding says no path: %v", err)
			} else if p != nil {
				if _, ok := res.Paths.Find(p.Path); !ok {
					t.Fatalf("the path %s has no place", p.Path)
				}
			}
		}
	})
}

// A scenario of five thousand lines.
func BenchmarkFiveThousandLines(b *testing.B) {
	text := longLine(1663)
	files := one(text)
	b.SetBytes(int64(len(text)))
	b.ReportMetric(float64(strings.Count(text, "\n")), "lines")
	for b.Loop() {
		if res := Resolve(files, "case.taut", Options{}); len(res.Diags) != 0 {
			b.Fatal(res.Diags.Text(3))
		}
	}
}
