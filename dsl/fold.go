package dsl

import (
	"path"
	"sort"
	"strings"

	"github.com/tautspan/tautspan/dsl/diag"
	"github.com/tautspan/tautspan/dsl/resolve"
	"github.com/tautspan/tautspan/dsl/syntax"
)

// Fold is the scenario as compiled in one text: used files stand in the place
// of their first `use`, and values that came from outside stand in their lets.
// Comments are kept. A scenario with errors comes back as it is.
func (c *Compiled) Fold() string {
	if len(c.Sources) == 0 {
		return ""
	}
	main := c.Sources[0].File.Text()
	if c.Diagnostics.HasErrors() {
		return main
	}
	f := &folder{set: c.set, byPath: map[string]*resolve.Source{}, taken: map[string]bool{}}
	for i := range c.Sources {
		f.byPath[c.Sources[i].Path] = &c.Sources[i]
	}
	return f.file(c.Sources[0].Path, false)
}

// folder replaces parts of texts.
type folder struct {
	set    map[string]string
	byPath map[string]*resolve.Source
	taken  map[string]bool
}

// change is a part of a text with what takes its place.
type change struct {
	span diag.Span
	with string
}

// file is the text of one file with its uses folded in. Of a used file only
// what `use` takes remains, and its comments.
func (f *folder) file(name string, used bool) string {
	f.taken[name] = true
	src := f.byPath[name]
	var changes []change
	for _, s := range src.Tree.Statements {
		switch s := s.(type) {
		case *syntax.Use:
			changes = append(changes, change{s.Span, f.use(s, name)})
		case *syntax.Let:
			if text, ok := f.set[s.Name.Text]; ok {
				changes = append(changes, change{s.Span, "let " + s.Name.Text + " = " + text})
			}
		case *syntax.Stock, *syntax.Law:
		default:
			if used {
				changes = append(changes, change{s.Place(), ""})
			}
		}
	}
	return apply(src.File.Text(), changes)
}

func (f *folder) use(u *syntax.Use, from string) string {
	name := path.Join(path.Dir(from), u.Path.Text)
	if f.taken[name] || f.byPath[name] == nil {
		return "# " + u.Path.Text + " stands above"
	}
	text := strings.Trim(f.file(name, true), "\r\n")
	return "# from " + u.Path.Text + "\n" + text + "\n# end of " + u.Path.Text
}

// apply makes the changes from the end of the text to its start.
func apply(text string, changes []change) string {
	sort.Slice(changes, func(i, j int) bool { return changes[i].span.Start > changes[j].span.Start })
	for _, c := range changes {
		text = text[:c.span.Start] + c.with + text[c.span.End:]
	}
	return text
}
