package syntax

import (
	"flag"
	"fmt"
	"os"
	"slices"
	"strings"
	"testing"

	"github.com/tautspan/tautspan/dsl/diag"
)

//go:generate go test . -run TestGrammarDocument -update

var update = flag.Bool("update", false, "write GRAMMAR.md again")

// Where the document stands and what it is made of.
const (
	documentPath = "../../GRAMMAR.md"
	samplesPath  = "../testdata/grammar-samples.txt"
)

// sample is one section of the samples' file.
type sample struct {
	kind, name   string
	means, frame string
	right, wrong string
	code, who    string
	text         string // of a file or a frame
}

// readSamples reads the file of samples; its head tells the format.
func readSamples(t *testing.T) []sample {
	t.Helper()
	data, err := os.ReadFile(samplesPath)
	if err != nil {
		t.Fatal(err)
	}
	var out []sample
	for _, section := range strings.Split("\n"+string(data), "\n== ")[1:] {
		head, body, _ := strings.Cut(section, "\n")
		kind, name, _ := strings.Cut(head, " ")
		s := sample{kind: kind, name: name}
		if kind == "file" || kind == "frame" {
			s.text = strings.TrimRight(body, "\n") + "\n"
			out = append(out, s)
			continue
		}
		into := &s.right
		for _, l := range strings.Split(body, "\n") {
			word, rest, _ := strings.Cut(l, " ")
			switch word {
			case "":
			case "means":
				s.means = rest
			case "frame":
				s.frame = rest
			case "right":
				into = &s.right
			case "wrong":
				into = &s.wrong
				s.code, s.who, _ = strings.Cut(rest, " ")
			case "|":
				*into += rest + "\n"
			default:
				t.Fatalf("%s: line %q", s.name, l)
			}
		}
		out = append(out, s)
	}
	return out
}

// framed puts a sample into its frame.
func framed(frame, text string) string {
	var b strings.Builder
	for _, l := range strings.SplitAfter(frame, "\n") {
		if strings.TrimSpace(l) == "%%" {
			b.WriteString(text)
		} else {
			b.WriteString(l)
		}
	}
	return b.String()
}

// TestGrammarSamples runs every sample through the parser.
func TestGrammarSamples(t *testing.T) {
	frames := map[string]string{}
	asked := 0
	for _, s := range readSamples(t) {
		switch s.kind {
		case "frame":
			frames[s.name] = s.text
			continue
		case "production", "sample":
		default:
			continue
		}
		frame, ok := frames[s.frame]
		if !ok || s.means == "" || s.wrong == "" || s.kind == "production" && s.right == "" {
			t.Errorf("%s: an entry is missing", s.name)
			continue
		}
		asked++
		if _, list := Parse(diag.NewFile("right.taut", framed(frame, s.right))); len(list) > 0 {
			t.Errorf("%s: the right sample raises\n%s", s.name, list.Text(0))
		}
		_, list := Parse(diag.NewFile("wrong.taut", framed(frame, s.wrong)))
		codes := []string{}
		for _, d := range list {
			codes = append(codes, d.Code)
		}
		want := []string{s.code}
		if s.who == "resolve" {
			want = []string{}
		} else if s.who != "syntax" {
			t.Errorf("%s: who is %q?", s.name, s.who)
		}
		if !slices.Equal(codes, want) {
			t.Errorf("%s: the wrong sample raises %v, want %v\n%s", s.name, codes, want, list.Text(0))
		}
	}
	if asked < 70 {
		t.Errorf("only %d samples", asked)
	}
}

// TestGrammarDocument holds GRAMMAR.md against what would be written now.
func TestGrammarDocument(t *testing.T) {
	want := document(t)
	if *update {
		if err := os.WriteFile(documentPath, []byte(want), 0o644); err != nil {
			t.Fatal(err)
		}
	}
	got, err := os.ReadFile(documentPath)
	if err != nil {
		t.Fatal(err)
	}
	if string(got) != want {
		t.Error("GRAMMAR.md is stale: go test ./dsl/syntax -run TestGrammarDocument -update")
	}
}

// document makes the text of GRAMMAR.md.
func document(t *testing.T) string {
	t.Helper()
	rules := productions(t)
	var b strings.Builder
	part := func(name string) {
		text, err := os.ReadFile("testdata/" + name)
		if err != nil {
			t.Fatal(err)
		}
		b.Write(text)
	}
	part("grammar-head.md")
	contexts(&b)
	told := map[string]bool{}
	for _, s := range readSamples(t) {
		switch s.kind {
		case "heading":
			fmt.Fprintf(&b, "## %s\n\n", s.name)
		case "production":
			rule, ok := rules[s.name]
			if !ok || told[s.name] {
				t.Errorf("the grammar has no production %s, or it is told twice", s.name)
			}
			told[s.name] = true
			fmt.Fprintf(&b, "### %s\n\n%s\n\n```ebnf\n%s\n```\n\n", s.name, s.means, rule)
			fmt.Fprintf(&b, "Right:\n\n```taut\n%s```\n\nWrong, raises `%s`:\n\n```taut\n%s```\n\n", s.right, s.code, s.wrong)
		case "sample":
			fmt.Fprintf(&b, "%s Raises `%s`:\n\n```taut\n%s```\n\n", s.means, s.code, s.wrong)
		}
	}
	for name := range rules {
		if !told[name] {
			t.Errorf("the production %s has no sample", name)
		}
	}
	part("grammar-decisions.md")
	return b.String()
}

// productions returns the grammar's productions by name, each broken into
// lines at its outermost choices where it is long.
func productions(t *testing.T) map[string]string {
	t.Helper()
	rules := map[string]string{}
	for _, l := range strings.Split(Grammar(), "\n") {
		name, rule, ok := strings.Cut(strings.ReplaceAll(l, "Rule", ""), " = ")
		if !ok {
			t.Fatalf("production %q", l)
		}
		rules[name] = wrap(name + " = " + rule)
	}
	return rules
}

// wrap breaks a long production before the choices that stand outside of
// brackets, or else at blanks.
func wrap(rule string) string {
	const width = 110
	if len(rule) <= width {
		return rule
	}
	var b strings.Builder
	column := 0
	for _, w := range strings.Split(rule, " ") {
		if column > 0 && column+1+len(w) > width {
			b.WriteString("\n   ")
			column = 3
		}
		if column > 0 {
			b.WriteByte(' ')
		}
		b.WriteString(w)
		column += 1 + len(w)
	}
	return b.String()
}

// contexts writes which statements stand where, and the keywords.
func contexts(b *strings.Builder) {
	b.WriteString("## Which statements stand where\n\n| block | statements that may stand in it begin with |\n| --- | --- |\n")
	for _, c := range []Context{Top, InEach, InAbout, InStock, InLine, InLaw, InRun, InRecord, InReading, InFit} {
		where := "`" + string(c) + " { ... }`"
		if c == Top {
			where = "the file itself"
		}
		words := "`" + strings.Join(StatementWords(c), "` `") + "`"
		switch c {
		case InAbout:
			words = "any word: the keys are free"
		case InEach:
			words = "the same words; `line`, `watch` and `reading` make sense there"
		}
		fmt.Fprintf(b, "| %s | %s |\n", where, words)
	}
	b.WriteString("\nThe keywords, none of which is read as a unit:\n\n")
	line := ""
	for _, w := range Keywords() {
		if len(line)+len(w) > 120 {
			b.WriteString(strings.TrimSpace(line) + "\n")
			line = ""
		}
		line += w + " "
	}
	b.WriteString(strings.TrimSpace(line) + "\n\n")
}
