package app

import (
	"os"
	"path/filepath"
	"regexp"
	"testing"
)

// Every code that a command raises can be explained, and no explanation is left
// of a code that nothing raises.
func TestCodesAreExplained(t *testing.T) {
	files, err := filepath.Glob("*.go")
	if err != nil || len(files) < 5 {
		t.Fatal(files, err)
	}
	raised := map[string]bool{}
	code := regexp.MustCompile(`(?:Code: |warn\(|refuseWhole\(|wrong\(|refusal\()"([a-z-]+)"`)
	for _, f := range files {
		text, err := os.ReadFile(f)
		if err != nil {
			t.Fatal(err)
		}
		for _, m := range code.FindAllStringSubmatch(string(text), -1) {
			raised[m[1]] = true
		}
	}
	for c := range raised {
		if _, ok := explain(c); !ok {
			t.Errorf("%s is raised and not explained", c)
		}
	}
	if len(raised) < 8 {
		t.Errorf("only %d codes were found: %v", len(raised), raised)
	}
}

// What the reading of records and the looking at them say can be explained, and
// nothing is explained that neither says.
func TestCodesOfRecordsAreExplained(t *testing.T) {
	files, err := filepath.Glob("../../../../engine/record/*.go")
	if err != nil || len(files) < 5 {
		t.Fatal(files, err)
	}
	raised := map[string]bool{}
	code := regexp.MustCompile(`(?:Code: |note\(|fieldError\(|warn\(|refuse\(|say\()"([a-z-]+)"`)
	for _, f := range append(files, "peaks.go") {
		text, err := os.ReadFile(f)
		if err != nil {
			t.Fatal(err)
		}
		for _, m := range code.FindAllStringSubmatch(string(text), -1) {
			raised[m[1]] = true
		}
	}
	for c := range raised {
		if _, ok := explain(c); !ok {
			t.Errorf("%s is raised and not explained", c)
		}
	}
	for c := range recordExplanations() {
		if !raised[c] {
			t.Errorf("%s is explained and never raised", c)
		}
	}
}
