package main

import (
	"bytes"
	"os"
	"path/filepath"
	"regexp"
	"strings"
	"testing"

	"github.com/tautspan/tautspan/cmd/tautspan/internal/cli"
)

// fences are the code blocks of a page, without their fences.
func fences(text string) []string {
	var out []string
	for i, part := range strings.Split(text, "\n```") {
		if i%2 == 1 {
			_, body, _ := strings.Cut(part, "\n")
			out = append(out, strings.TrimRight(body, "\n"))
		}
	}
	return out
}

// shape is a line with its figures, pictures and units of scale taken out:
// what must stay when numbers move in their last digits.
func shape(line string) string {
	line = regexp.MustCompile(`[\x{2800}-\x{28ff}].*$`).ReplaceAllString(line, "")
	line = regexp.MustCompile(`[0-9][0-9.e+-]*`).ReplaceAllString(line, "#")
	return strings.Join(strings.Fields(line), " ")
}

// The README's first scenario is the shipped one, and what it prints has the
// lines that the README shows.
func TestReadmeShowsWhatIsPrinted(t *testing.T) {
	page, err := os.ReadFile(filepath.Join("..", "..", "README.md"))
	if err != nil {
		t.Fatal(err)
	}
	shipped, err := os.ReadFile(filepath.Join("..", "..", "scenarios", "stay-release.taut"))
	if err != nil {
		t.Fatal(err)
	}
	var scenario, printed string
	for _, f := range fences("\n" + string(page)) {
		switch {
		case strings.HasPrefix(f, "tautspan 1\n"):
			scenario = f
		case strings.Contains(f, "\nrequired\n"):
			printed = f
		}
	}
	if scenario != strings.TrimRight(string(shipped), "\n") {
		t.Error("the README's first scenario is not scenarios/stay-release.taut")
	}
	dir := t.TempDir()
	file := filepath.Join(dir, "stay-release.taut")
	if err := os.WriteFile(file, shipped, 0o644); err != nil {
		t.Fatal(err)
	}
	var out, errs bytes.Buffer
	if code := cli.Main([]string{"run", file}, cli.Streams{In: strings.NewReader(""), Out: &out, Err: &errs}); code != 0 {
		t.Fatalf("exit %d: %s", code, errs.String())
	}
	have := map[string]bool{}
	for _, l := range strings.Split(errs.String()+out.String(), "\n") {
		have[shape(strings.ReplaceAll(l, dir+string(filepath.Separator), "scenarios/"))] = true
	}
	lines := strings.Split(printed, "\n")
	if len(lines) < 30 {
		t.Fatalf("the README shows only %d lines of output", len(lines))
	}
	for _, l := range lines {
		if s := shape(l); !have[s] && !strings.HasPrefix(l, "  (the notes on") {
			t.Errorf("the README shows a line that is not printed: %q", l)
		}
	}
}
