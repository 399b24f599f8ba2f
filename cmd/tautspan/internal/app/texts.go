package app

import (
	"errors"
	"fmt"
	"io/fs"
	"os"
	"path/filepath"
	"strings"

	"github.com/tautspan/tautspan/dsl"
	"github.com/tautspan/tautspan/dsl/diag"
	"github.com/tautspan/tautspan/scenarios"
)

// TidyDoc is a scenario in its canonical layout.
type TidyDoc struct {
	Head
	Text    string `json:"text"`
	Changed bool   `json:"changed"`
	Diff    string `json:"diff"`
}

// Tidy lays a scenario out. A text with syntax errors is left as it is.
func (a *App) Tidy(in Input) (*TidyDoc, Status, error) {
	before, err := readText(in)
	if err != nil {
		return nil, Outside, err
	}
	head := Head{Format: Format, Version: Version, Command: "tidy", Engine: engineOf(), Scenario: Source{File: in.File}, Errors: diag.List{}, Warnings: diag.List{}}
	tidied, list := dsl.Tidy(in.File, before)
	head.Errors = append(head.Errors, list.Errors()...)
	doc := &TidyDoc{Head: head, Text: tidied}
	if len(head.Errors) > 0 {
		doc.Text = before
		return doc, BadInput, nil
	}
	doc.Changed = tidied != before
	doc.Diff = lineDiff(in.File, before, tidied)
	return doc, Done, nil
}

// lineDiff shows changed lines in the unified form. Tidying changes white space
// inside lines and drops or adds blank ones, so lines are matched by their words.
func lineDiff(name, before, after string) string {
	if before == after {
		return ""
	}
	a, b := strings.Split(before, "\n"), strings.Split(after, "\n")
	words := func(s string) string { return strings.Join(strings.Fields(s), " ") }
	var out strings.Builder
	fmt.Fprintf(&out, "--- %s\n+++ %s (tidy)\n", name, name)
	i, j := 0, 0
	for i < len(a) || j < len(b) {
		switch {
		case i < len(a) && j < len(b) && a[i] == b[j]:
			i++
			j++
		case i < len(a) && j < len(b) && words(a[i]) == words(b[j]):
			fmt.Fprintf(&out, "@@ line %d @@\n-%s\n+%s\n", i+1, a[i], b[j])
			i++
			j++
		case i < len(a) && (j >= len(b) || words(a[i]) == ""):
			fmt.Fprintf(&out, "@@ line %d @@\n-%s\n", i+1, a[i])
			i++
		case j < len(b) && (i >= len(a) || words(b[j]) == ""):
			fmt.Fprintf(&out, "@@ line %d @@\n+%s\n", i+1, b[j])
			j++
		default:
			fmt.Fprintf(&out, "@@ line %d @@\n-%s\n+%s\n", i+1, a[i], b[j])
			i++
			j++
		}
	}
	return out.String()
}

// WhyDoc is the explanation of a diagnostic.
type WhyDoc struct {
	Head
	Code string `json:"code"`
	Text string `json:"text"`
}

// Why explains a diagnostic's code, or lists the codes where none is given.
func (a *App) Why(code string) (*WhyDoc, Status) {
	head := Head{Format: Format, Version: Version, Command: "why", Engine: engineOf(), Errors: diag.List{}, Warnings: diag.List{}}
	if code == "" {
		return &WhyDoc{Head: head, Text: "Codes that can be explained:\n" + strings.Join(codes(), "\n")}, Done
	}
	text, ok := explain(code)
	if !ok {
		hint := ""
		if near := diag.Nearest(code, codes()); near != "" {
			hint = near
		}
		head.Errors = append(head.Errors, diag.Diagnostic{Code: "unknown-code", Span: diag.Span{File: diag.NewFile("command line", code)}, Summary: fmt.Sprintf("no diagnostic has the code %q", code), Hint: hint})
		return &WhyDoc{Head: head, Code: code}, BadInput
	}
	return &WhyDoc{Head: head, Code: code, Text: text}, Done
}

// ScenariosDoc lists the shipped scenarios or names the file written.
type ScenariosDoc struct {
	Head
	Scenarios []Shipped `json:"scenarios"`
	Written   string    `json:"written"`
}

// Shipped is one shipped scenario.
type Shipped struct {
	Name  string `json:"name"`
	Title string `json:"title"`
	Note  string `json:"note"`
}

// Scenarios lists the shipped scenarios, or writes the named one into dir.
func (a *App) Scenarios(name, dir string, force bool) (*ScenariosDoc, Status, error) {
	doc := &ScenariosDoc{Head: Head{Format: Format, Version: Version, Command: "scenarios", Engine: engineOf(), Errors: diag.List{}, Warnings: diag.List{}}, Scenarios: []Shipped{}}
	files, err := fs.Glob(scenarios.Files, "*.taut")
	if err != nil {
		return nil, Defect, err
	}
	var names []string
	for _, f := range files {
		t := dsl.Compile(scenarios.Files, f, dsl.Options{}).Template
		entry := Shipped{Name: strings.TrimSuffix(f, ".taut"), Title: t.Title, Note: strings.Join(t.Notes, " ")}
		doc.Scenarios = append(doc.Scenarios, entry)
		names = append(names, entry.Name)
	}
	if name == "" {
		return doc, Done, nil
	}
	name = strings.TrimSuffix(name, ".taut")
	text, err := fs.ReadFile(scenarios.Files, name+".taut")
	if err != nil {
		doc.Errors = append(doc.Errors, diag.Diagnostic{Code: "unknown-scenario", Span: diag.Span{File: diag.NewFile("command line", name)}, Summary: fmt.Sprintf("no shipped scenario is called %q", name), Hint: diag.Nearest(name, names)})
		return doc, BadInput, nil
	}
	target := filepath.Join(dir, name+".taut")
	if _, err := os.Lstat(target); err == nil && !force {
		return doc, Outside, fmt.Errorf("%s stands there already; say --force to replace it", target)
	} else if err != nil && !errors.Is(err, fs.ErrNotExist) {
		return doc, Outside, err
	}
	if dir != "" {
		if err := os.MkdirAll(dir, 0o755); err != nil {
			return doc, Outside, err
		}
	}
	if err := os.WriteFile(target, text, 0o644); err != nil {
		return doc, Outside, err
	}
	doc.Written = target
	return doc, Done, nil
}
