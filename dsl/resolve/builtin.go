package resolve

import (
	"github.com/tautspan/tautspan/dsl/diag"
	"github.com/tautspan/tautspan/dsl/syntax"
	"github.com/tautspan/tautspan/engine/formula"
	"github.com/tautspan/tautspan/engine/stock"
)

// builtinStock is the built-in stock of a name, nil where there is none. It is
// an ideal string: the bounds of its bending stiffness are only for remarks.
func (r *resolver) builtinStock(name string, used diag.Span) *stockEntry {
	if e, ok := r.builtin[name]; ok {
		return e
	}
	s, ok := stock.Find(name)
	if !ok {
		return nil
	}
	e := &stockEntry{
		stmt: &syntax.Stock{At: syntax.At{Span: used}, Name: syntax.Label{At: syntax.At{Span: used}, Text: name}},
		mass: formula.Const(s.Mass.SI), axial: formula.Const(s.Axial()), strength: formula.Const(s.Strength.SI), diameter: formula.Const(s.Diameter.SI),
	}
	area, young := formula.Const(s.Area.SI), formula.Const(s.Young.SI)
	e.area, e.young = &area, &young
	low, high := s.BendingBounds()
	solid := formula.Const(high)
	e.bendHigh = &solid
	if low > 0 {
		loose := formula.Const(low)
		e.bendLow = &loose
	}
	r.builtin[name] = e
	switch s.Mass.Origin {
	case stock.Memory:
		r.warnAt(used, "stock-unseen", "the built-in mass of "+name+" was not read from its source", "it is remembered: hold it against the certificate", "")
	case stock.Computed:
		r.warnAt(used, "stock-unseen", "the built-in mass of "+name+" was not read from its source", "it is worked out: hold it against the certificate", "")
	}
	return e
}

// builtinNames are the names of the built-in stocks, for hints.
func builtinNames() map[string]bool {
	out := map[string]bool{}
	for _, s := range stock.List() {
		out[s.Name] = true
	}
	return out
}
