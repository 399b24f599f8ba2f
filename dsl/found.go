package dsl

import (
	"math"
	"strings"

	"github.com/tautspan/tautspan/dsl/diag"
	"github.com/tautspan/tautspan/dsl/syntax"
	"github.com/tautspan/tautspan/dsl/unit"
)

// Found is a let's value that was found, with its standard uncertainty, SI.
type Found struct {
	Name      string
	Value     float64
	StandardU float64
}

// PutIn is the text of the scenario with values that were found in the place of
// those of its lets, each in the unit in which it was written. The seek
// statements of these lets become comments; nothing else in the text changes. It
// returns the names of the lets that were written: those of used files are not.
func (c *Compiled) PutIn(found []Found) (text string, written []string) {
	src := &c.Sources[0]
	var changes []change
	for _, f := range found {
		let, seek := statementsOf(src.Tree, f.Name)
		if let == nil {
			continue
		}
		span := letValue(let)
		changes = append(changes, change{span, foundText(let, f, c.siOf(f.Name))})
		if seek != nil {
			changes = append(changes, change{seek.Span, "# " + strings.ReplaceAll(seek.Span.Text(), "\n", "\n# ")})
		}
		written = append(written, f.Name)
	}
	return apply(src.File.Text(), changes), written
}

// WrittenUnit is the unit in which the value of a let is written, "" where that
// is no plain quantity.
func (c *Compiled) WrittenUnit(name string) string {
	for i := range c.Sources {
		let, _ := statementsOf(c.Sources[i].Tree, name)
		if let == nil {
			continue
		}
		if n, ok := plainNumber(let); ok && n.Unit != nil {
			return n.Unit.Text
		}
	}
	return ""
}

func (c *Compiled) siOf(name string) string {
	if i := c.Template.LetNamed(name); i >= 0 && c.Template.Lets[i].Unit != "1" {
		return c.Template.Lets[i].Unit
	}
	return ""
}

// statementsOf finds a let and its seek statement at the top of a file.
func statementsOf(tree *syntax.Tree, name string) (let *syntax.Let, seek *syntax.Seek) {
	for _, s := range tree.Statements {
		switch s := s.(type) {
		case *syntax.Let:
			if s.Name.Text == name {
				let = s
			}
		case *syntax.Seek:
			if text, ok := s.Name.Plain(); ok && text == name {
				seek = s
			}
		}
	}
	return let, seek
}

// letValue is the part of a let behind its equals sign.
func letValue(let *syntax.Let) diag.Span {
	switch {
	case let.Value == nil && let.Doubt != nil:
		return let.Doubt.Span
	case let.Doubt != nil:
		return let.Value.Place().To(let.Doubt.Span)
	case let.Value != nil:
		return let.Value.Place()
	}
	return diag.Span{}
}

// foundText is a value with its standard uncertainty. An expression that it
// takes the place of is kept in a comment.
func foundText(let *syntax.Let, f Found, si string) string {
	word, factor := si, 1.0
	n, plain := plainNumber(let)
	if plain && n.Unit != nil {
		if read, err := unit.Parse(n.Unit.Text); err == nil && !read.Scale {
			word, factor = n.Unit.Text, read.Factor()
		}
	}
	if word != "" {
		word = " " + word
	}
	text := figures(f.Value/factor, f.StandardU/factor) + word + " +- " + unit.Digits(f.StandardU/factor, 2) + word
	if !plain && let.Value != nil {
		text += "  # was " + strings.Join(strings.Fields(let.Value.Place().Text()), " ")
	}
	return text
}

// plainNumber is the number that a let's value consists of.
func plainNumber(let *syntax.Let) (*syntax.Number, bool) {
	e := let.Value
	if e == nil && let.Doubt != nil && let.Doubt.Between {
		e = let.Doubt.High
	}
	n, ok := e.(*syntax.Number)
	return n, ok
}

// figures writes a value to a tenth of its uncertainty or finer.
func figures(value, u float64) string {
	if value == 0 || !(u > 0) {
		return unit.Digits(value, 8)
	}
	digits := int(math.Ceil(math.Log10(math.Abs(value)/u))) + 1
	return unit.Digits(value, min(max(digits, 3), 15))
}
