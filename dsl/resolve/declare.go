package resolve

import (
	"fmt"

	"github.com/tautspan/tautspan/dsl/diag"
	"github.com/tautspan/tautspan/dsl/syntax"
	"github.com/tautspan/tautspan/engine/scenario"
)

// reserved are names with a meaning of their own in expressions.
var reserved = map[string]string{
	"x": "the place along a stretch", "t": "the time", "u": "a displacement", "v": "a velocity", "pi": "3.14159...", "g0": "standard gravity",
}

// declare enters every name that a statement gives, so that the order of
// statements does not matter.
func (r *resolver) declare() {
	for _, s := range r.statements {
		switch s := s.(type) {
		case *syntax.Broken:
			r.incomplete = true
			if s.Name != "" {
				r.broken[s.Name] = true
			}
		case *syntax.Let:
			r.declareLet(s)
		case *syntax.Stock:
			if r.enter(s.Name, "stock") {
				e := &stockEntry{stmt: s}
				r.stocks[s.Name.Text] = e
				r.stockOrder = append(r.stockOrder, e)
			}
		case *syntax.Line:
			r.partsUnsure = r.partsUnsure || s.Incomplete
			if r.enter(s.Name, "line") {
				e := &lineEntry{stmt: s, name: s.Name.Text}
				r.lines[e.name] = e
				r.lineOrder = append(r.lineOrder, e)
				r.declareParts(s)
			} else {
				r.partsUnsure = true
			}
		case *syntax.Watch:
			if r.enter(s.Name, "watch") {
				r.watches[s.Name.Text] = -1
			}
		case *syntax.Tie:
			r.enter(s.Name, "tie")
		case *syntax.Law:
			if r.enter(s.Name, "law") {
				r.laws[s.Name.Text] = &lawEntry{stmt: s}
			}
		case *syntax.Excite:
			r.enter(s.Name, "excite")
		case *syntax.Record:
			r.enter(s.Name, "record")
		case *syntax.Reading:
			r.enter(s.Name, "reading")
		}
	}
	r.headings()
}

// enter gives a name at the top of the file; false where it is taken.
func (r *resolver) enter(name syntax.Label, kind string) bool {
	if name.Index != nil {
		r.notYet(name.Span, "a name made from a row outside the block that goes through the rows", "inside it hanger[ROW.mark] makes hanger_H1 of a row with the mark H1; write that")
		return false
	}
	if name.Text == "" {
		return false
	}
	if before, ok := r.top[name.Text]; ok {
		hint := ""
		for i := 2; i < 100 && hint == ""; i++ {
			if n := fmt.Sprint(name.Text, i); r.top[n].kind == "" {
				hint = n
			}
		}
		r.errorAt(name.Span, "duplicate-name", fmt.Sprintf("%s is the name of %s already", name.Text, article(before.kind)), "", hint, related(before.span, "first said here"))
		r.broken[name.Text] = r.broken[name.Text] || before.kind != kind // uses of it may mean either
		return false
	}
	r.top[name.Text] = symbol{kind, name.Span}
	return true
}

// declareParts remembers what the parts of a line are called, for messages.
func (r *resolver) declareParts(l *syntax.Line) {
	for _, item := range l.Items {
		switch s := item.(type) {
		case *syntax.Support:
			r.parts[s.Name.Text] = "support"
		case *syntax.Segment:
			r.parts[s.Name.Text] = "segment"
		case *syntax.Joint:
			r.parts[s.Name.Text] = "joint"
		}
	}
}

// headings takes over title, notes and about.
func (r *resolver) headings() {
	var first diag.Span
	for _, s := range r.statements {
		switch s := s.(type) {
		case *syntax.Title:
			if !first.IsZero() {
				r.errorAt(s.Span, "said-twice", "a scenario has one title", "", "", related(first, "first said here"))
				continue
			}
			first = s.Span
			r.tmpl.Title = s.Text.Text
		case *syntax.Note:
			r.tmpl.Notes = append(r.tmpl.Notes, s.Text.Text)
		case *syntax.About:
			for _, e := range s.Entries {
				r.tmpl.About = append(r.tmpl.About, scenario.Pair{Key: e.Key.Text, Text: e.Text.Text})
			}
		}
	}
}
