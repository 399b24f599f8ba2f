package resolve

import (
	"fmt"
	"strings"

	"github.com/tautspan/tautspan/dsl/diag"
	"github.com/tautspan/tautspan/dsl/syntax"
	"github.com/tautspan/tautspan/dsl/unit"
	"github.com/tautspan/tautspan/engine/formula"
	"github.com/tautspan/tautspan/engine/scenario"
)

// Plugin is what the language must know of a solver, load or law that a scenario
// may name in quotes.
type Plugin struct {
	Name, Kind string // Kind: solver, load or law
	Parameters []Parameter
	Body       string // of a law: that of its law statement, without takes; "": it cannot be written
}

// Parameter is a number that a load or a law takes.
type Parameter struct {
	Name, Unit          string  // "1" for a pure number
	Least, Most, Preset float64 // in the unit; both bounds 0: any
	HasPreset           bool
}

// plugin finds an installed plugin, or says that there is none.
func (r *resolver) plugin(at diag.Span, name, kind string) (*Plugin, bool) {
	var known []string
	for i := range r.opts.Plugins {
		p := &r.opts.Plugins[i]
		if p.Name == name && p.Kind == kind {
			return p, true
		}
		if p.Kind == kind {
			known = append(known, p.Name)
		}
	}
	for i := range r.opts.Plugins {
		if p := &r.opts.Plugins[i]; p.Name == name {
			r.errorAt(at, "unknown-plugin", fmt.Sprintf("%s is a plugin, but a %s and not a %s", name, p.Kind, kind), "", "")
			return nil, false
		}
	}
	mend := diag.Nearest(name, known)
	if mend != "" {
		mend = `"` + mend + `"`
	}
	r.errorAt(at, "unknown-plugin", fmt.Sprintf("no %s called %s is installed", kind, name), "`tautspan plugins list` shows what is", mend)
	return nil, false
}

// pluginLoad resolves `load "name"(key = value, ...) along|at PLACE`.
func (r *resolver) pluginLoad(a *syntax.Load, name, path string) {
	load := scenario.LoadOf[formula.Program]{Name: name, Plugin: a.Plugin.Name.Text, Along: a.Along}
	var ok bool
	if a.Along {
		load.Span, ok = r.span(a.Spot, "a load", false)
	} else if load.At, ok = r.place(a.Spot, "a load"); ok {
		r.warnHeld(load.At, a.Spot.Span, "load")
	}
	r.path(path+".at", a.Spot.Span)
	p, known := r.plugin(a.Plugin.Name.Span, load.Plugin, "load")
	if !known {
		return
	}
	list, pok := r.parameters(p, &a.Plugin, path)
	if load.Parameters = list; ok && pok {
		r.tmpl.Model.Loads = append(r.tmpl.Model.Loads, load)
	}
}

// parameters checks what stands in brackets behind a plugin's name against what
// it takes.
func (r *resolver) parameters(p *Plugin, c *syntax.Call, path string) ([]scenario.ParameterOf[formula.Program], bool) {
	said := map[string]*syntax.Arg{}
	ok := true
	for i := range c.Args {
		arg := &c.Args[i]
		switch {
		case arg.Key == nil:
			r.errorAt(arg.Span, "wrong-arguments", "a plugin takes its parameters by name", "", p.example())
			ok = false
		case said[arg.Key.Text] != nil:
			r.errorAt(arg.Span, "said-twice", arg.Key.Text+" is said already", "", "", related(said[arg.Key.Text].Span, "said here"))
			ok = false
		default:
			said[arg.Key.Text] = arg
		}
	}
	var out []scenario.ParameterOf[formula.Program]
	for i := range p.Parameters {
		q := &p.Parameters[i]
		u, err := unit.Parse(q.Unit)
		if q.Unit == "1" {
			u, err = unit.None(), nil
		}
		if err != nil {
			r.errorAt(c.Name.Span, "unknown-plugin", fmt.Sprintf("%s says it takes %s in %q, which is no unit", p.Name, q.Name, q.Unit), "the plugin is at fault", "")
			return nil, false
		}
		factor := u.SI(1) - u.SI(0)
		param := scenario.ParameterOf[formula.Program]{Name: q.Name, Factor: factor}
		arg := said[q.Name]
		delete(said, q.Name)
		switch {
		case arg != nil:
			prog, good := r.parameter(q, arg, u, path)
			param.Value = prog
			ok = ok && good
		case q.HasPreset:
			param.Value = formula.Const(q.Preset * factor)
		default:
			r.errorAt(c.Span, "missing-parameter", fmt.Sprintf("%s wants %s, in %s", p.Name, q.Name, q.Unit), "", p.example())
			ok = false
		}
		out = append(out, param)
	}
	var names []string
	for i := range p.Parameters {
		names = append(names, p.Parameters[i].Name)
	}
	for i := range c.Args { // in the order of the text
		if key := c.Args[i].Key; key != nil && said[key.Text] != nil {
			r.errorAt(key.Span, "unknown-parameter", fmt.Sprintf("%s takes no %s", p.Name, key.Text), p.takes(), diag.Nearest(key.Text, names))
			ok = false
		}
	}
	return out, ok
}

// parameter compiles one value and checks dimension and range.
func (r *resolver) parameter(q *Parameter, arg *syntax.Arg, u unit.Unit, path string) (formula.Program, bool) {
	kind := unit.Kind{Word: "parameter", Name: u.Dim.Name(), Dim: u.Dim, SI: q.Unit}
	if !named(u.Dim) {
		kind.Name = "a quantity in " + q.Unit // as its author says it
	}
	v := r.want(arg.Value, plain, kind, q.Name)
	r.path(path+"."+q.Name, arg.Value.Place())
	if v.bad {
		return formula.Program{}, false
	}
	told := r.num(v.prog) / (u.SI(1) - u.SI(0))
	if (q.Least != 0 || q.Most != 0) && !(told >= q.Least && told <= q.Most) {
		r.errorAt(arg.Value.Place(), "out-of-range", fmt.Sprintf("%s lies between %g and %g %s", q.Name, q.Least, q.Most, q.Unit), "", "")
		return formula.Program{}, false
	}
	return v.prog, true
}

// named tells whether a dimension has a name of its own.
func named(d unit.Dim) bool { return !strings.HasPrefix(d.Name(), "a quantity in ") }

// takes lists the parameters for a message.
func (p *Plugin) takes() string {
	text := "it takes"
	for i, q := range p.Parameters {
		if i > 0 {
			text += ","
		}
		text += " " + q.Name
	}
	if len(p.Parameters) == 0 {
		text += " nothing"
	}
	return text
}

// example shows how the plugin's parameters are said.
func (p *Plugin) example() string {
	text := `"` + p.Name + `"(`
	for i, q := range p.Parameters {
		if i > 0 {
			text += ", "
		}
		text += q.Name + " = … " + q.Unit
	}
	return text + ")"
}

// pluginLaw reads the law that a plugin has written, as if it stood in the file.
// What is wrong in it is said at the place that names the plugin.
func (r *resolver) pluginLaw(p *Plugin, c *syntax.Call) *lawEntry {
	if e, known := r.pluginLaws[p.Name]; known {
		return e
	}
	if r.pluginLaws == nil {
		r.pluginLaws = map[string]*lawEntry{}
	}
	bad := &lawEntry{bad: true}
	r.pluginLaws[p.Name] = bad
	text := setHead + "law plugin_law {\n"
	for i, q := range p.Parameters {
		lead := "    takes "
		if i > 0 {
			lead = ",\n        "
		}
		text += lead + q.Name
		if q.Unit != "1" {
			text += " unit " + q.Unit
		}
	}
	if len(p.Parameters) > 0 {
		text += "\n"
	}
	for _, line := range strings.Split(strings.TrimSpace(p.Body), "\n") {
		text += "    " + strings.TrimSpace(line) + "\n"
	}
	file := diag.NewFile("law of "+p.Name, text+"}\n")
	at := c.Name.Span
	r.mades[file] = &made{from: at.File, pieces: []madePiece{{origin: at.Start, length: at.End - at.Start}}}
	tree, diags := syntax.Parse(file)
	r.diags = append(r.diags, diags...)
	for _, s := range tree.Statements {
		if law, ok := s.(*syntax.Law); ok && !diags.HasErrors() {
			e := &lawEntry{stmt: law}
			r.resolveLaw(e)
			r.pluginLaws[p.Name] = e
			return e
		}
	}
	if !diags.HasErrors() {
		r.errorAt(at, "unknown-plugin", p.Name+" hands over a text that is no law", "the plugin is at fault", "")
	}
	return bad
}

// pluginParameters are the values of a plugin's parameters as a law's formulas
// read them.
func (r *resolver) pluginParameters(p *Plugin, c *syntax.Call, path string) (map[string]value, bool) {
	list, ok := r.parameters(p, c, path)
	if !ok {
		return nil, false
	}
	out := map[string]value{}
	for i := range list {
		dim := unit.None()
		if u, err := unit.Parse(p.Parameters[i].Unit); err == nil && p.Parameters[i].Unit != "1" {
			dim = u
		}
		out[list[i].Name] = value{prog: list[i].Value, dim: dim.Dim, angle: dim.Angle}
	}
	return out, true
}

// followedLaw is a law that its plugin answers step by step. Whether it gives a
// force or a force per length is the plugin's to know.
func (r *resolver) followedLaw(p *Plugin, c *syntax.Call, path string) (*lawOf, bool) {
	list, ok := r.parameters(p, c, path)
	if !ok {
		return nil, false
	}
	return &lawOf{Name: p.Name, Followed: &scenario.FollowedOf[formula.Program]{Plugin: p.Name, Parameters: list}}, true
}
