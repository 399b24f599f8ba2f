package dsl

import (
	"errors"
	"io/fs"

	"github.com/tautspan/tautspan/dsl/diag"
	"github.com/tautspan/tautspan/dsl/resolve"
	"github.com/tautspan/tautspan/dsl/tidy"
	"github.com/tautspan/tautspan/engine/scenario"
)

// Options say what comes from outside the scenario: values of lets by name
// (Set: the text of a quantity, with its doubt if it has one) and the names
// that `solvers` may list (nil: the built-in ones).
type Options = resolve.Options

// Plugin and Parameter are what the language must know of an installed plugin.
type (
	// Plugin is a solver, load or law that a scenario may name in quotes.
	Plugin = resolve.Plugin
	// Parameter is a number that a load or a law takes.
	Parameter = resolve.Parameter
)

// Compiled is a scenario as compiled. Template is never nil; where Diagnostics
// holds an error it must not be run.
type Compiled struct {
	Template    *scenario.Template
	Diagnostics diag.List         // in order of place, at most one error a line
	PathSpans   resolve.Paths     // the text behind a path such as line.stay.lower.length
	Sources     []resolve.Source  // the scenario first, then used files
	Lets        []resolve.LetInfo // in the order of the text
	Stocks      []resolve.StockInfo
	set         map[string]string
}

// Compile reads the scenario at name in fsys, a slash-separated path, and
// everything that it uses. Nothing above the root of fsys is read.
func Compile(fsys fs.FS, name string, opts Options) *Compiled {
	res := resolve.Resolve(fsys, name, opts)
	c := &Compiled{Template: res.Template, Diagnostics: res.Diags, PathSpans: res.Paths, Sources: res.Sources, Lets: res.Lets, Stocks: res.Stocks, set: opts.Set}
	if !c.Diagnostics.HasErrors() {
		c.bindOnce()
	}
	return c
}

// bindOnce binds the nominal values, so that whatever the engine would refuse
// is a diagnostic of the text.
func (c *Compiled) bindOnce() {
	values, err := c.Template.Values(nil)
	if err == nil {
		var net *scenario.Network
		if net, err = c.Template.Bind(values); err == nil {
			_, err = c.Template.BindReadings(net)
		}
	}
	if err != nil {
		c.Diagnostics.Add(c.Diagnose(err))
		c.Diagnostics.Sort()
	}
}

// Diagnose turns an error of Template.Values or Bind into a diagnostic with its
// place in the text.
func (c *Compiled) Diagnose(err error) diag.Diagnostic {
	var p *scenario.PathError
	if !errors.As(err, &p) {
		return diag.Diagnostic{Code: "cannot-bind", Summary: err.Error()}
	}
	span, _ := c.PathSpans.Find(p.Path)
	return diag.Diagnostic{Code: "cannot-bind", Span: span, Summary: "this value cannot stand", Found: p.What}
}

// Tidy returns the text in its one canonical layout; where it cannot be read it
// comes back unchanged with the reasons.
func Tidy(name, text string) (string, diag.List) {
	return tidy.Source(diag.NewFile(name, text))
}
