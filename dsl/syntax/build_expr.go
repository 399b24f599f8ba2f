package syntax

import (
	"strconv"
	"strings"

	"github.com/alecthomas/participle/v2/lexer"
	"github.com/tautspan/tautspan/dsl/diag"
)

// at returns the place of a run of tokens.
func (p *parser) at(m mark) At {
	if len(m.Tokens) == 0 {
		return At{diag.Span{File: p.file}}
	}
	return At{p.tokenAt(m.Tokens[0]).Span.To(p.tokenAt(m.Tokens[len(m.Tokens)-1]).Span)}
}

// tokenAt returns the place of one token.
func (p *parser) tokenAt(t lexer.Token) At {
	return At{diag.Span{File: p.file, Start: t.Pos.Offset, End: t.Pos.Offset + len(t.Value)}}
}

func (p *parser) word(t lexer.Token) Word { return Word{p.tokenAt(t), t.Value} }

func (p *parser) optWord(t *lexer.Token) Word {
	if t == nil {
		return Word{}
	}
	return p.word(*t)
}

func (p *parser) text(t lexer.Token) String { return String{p.tokenAt(t), unquote(t.Value)} }

func (p *parser) optText(t *lexer.Token) *String {
	if t == nil {
		return nil
	}
	s := p.text(*t)
	return &s
}

func unquote(s string) string { return strings.TrimSuffix(strings.TrimPrefix(s, `"`), `"`) }

func (p *parser) unit(t *lexer.Token) *Unit {
	if t == nil {
		return nil
	}
	return &Unit{p.tokenAt(*t), t.Value}
}

func (p *parser) label(r *labelRule) Label {
	if r == nil {
		return Label{}
	}
	return Label{At: p.at(r.mark), Text: r.Word.Value, Index: p.expr(r.Index)}
}

// quoted makes a label of a word or of a text in quotes.
func (p *parser) quoted(t lexer.Token) Label {
	return Label{At: p.tokenAt(t), Text: unquote(t.Value), Quoted: strings.HasPrefix(t.Value, `"`)}
}

func (p *parser) name(r *nameRule) *Name {
	if r == nil {
		return nil
	}
	n := &Name{At: p.at(r.mark), Parts: []Label{p.label(r.First)}}
	for _, part := range r.Rest {
		if part.Text != nil {
			n.Parts = append(n.Parts, p.quoted(*part.Text))
		} else {
			n.Parts = append(n.Parts, p.label(part.Label))
		}
	}
	return n
}

func (p *parser) names(rs []*nameRule) []*Name {
	var out []*Name
	for _, r := range rs {
		out = append(out, p.name(r))
	}
	return out
}

func (p *parser) number(t lexer.Token, unit *lexer.Token) *Number {
	n := &Number{At: p.tokenAt(t), Text: t.Value, Unit: p.unit(unit)}
	n.Value, _ = strconv.ParseFloat(t.Value, 64) // out of range: infinite, for resolve to refuse
	if n.Unit != nil {
		n.Span = n.Span.To(n.Unit.Span)
	}
	return n
}

func (p *parser) exprs(rs []*exprRule) []Expr {
	var out []Expr
	for _, r := range rs {
		out = append(out, p.expr(r))
	}
	return out
}

// expr makes the tree of an expression; nil for nil.
func (p *parser) expr(r *exprRule) Expr {
	if r == nil {
		return nil
	}
	if len(r.Rest) == 0 {
		return p.operand(r.First)
	}
	c := climber{p: p, operands: append([]*operandRule{r.First}, r.Rest...)}
	at := len(r.First.Tokens)
	for _, x := range r.Rest {
		c.ops = append(c.ops, r.Tokens[at])
		at += 1 + len(x.Tokens)
	}
	return c.bind(1)
}

// climber makes a tree of a flat row of operands by precedence climbing.
type climber struct {
	p        *parser
	operands []*operandRule
	ops      []lexer.Token // ops[i] stands between operands i and i+1
	next     int           // the next operator
}

// strength says how tightly an operator binds.
func strength(op string) int {
	switch op {
	case "+", "-":
		return 1
	case "*", "/":
		return 2
	}
	return 4
}

// signStrength lies between products and powers: -x^2 is -(x^2), -x*y is (-x)*y.
const signStrength = 3

// bind takes operands as long as the operators bind at least as tightly as
// least. Powers group to the right, the others to the left. A sign takes the
// powers of its operand with it.
func (c *climber) bind(least int) Expr {
	r := c.operands[c.next]
	x := c.p.atom(r)
	if r.Sign != nil {
		x = c.p.sign(r.Sign, c.powers(x))
	}
	for c.next < len(c.ops) {
		op := c.ops[c.next]
		s := strength(op.Value)
		if s < least {
			break
		}
		if s > signStrength {
			x = c.powers(x)
			continue
		}
		c.next++
		x = binary(c.p.word(op), x, c.bind(s+1))
	}
	return x
}

// powers raises x to the row of powers that follows, from the right.
func (c *climber) powers(x Expr) Expr {
	lo := c.next
	for c.next < len(c.ops) && strength(c.ops[c.next].Value) > signStrength {
		c.next++
	}
	hi := c.next
	if lo == hi {
		return x
	}
	y := c.p.operand(c.operands[hi])
	for i := hi - 1; i > lo; i-- {
		base := c.operands[i]
		y = c.p.sign(base.Sign, binary(c.p.word(c.ops[i]), c.p.atom(base), y))
	}
	return binary(c.p.word(c.ops[lo]), x, y)
}

func (p *parser) sign(t *lexer.Token, x Expr) Expr {
	if t == nil {
		return x
	}
	p.signs[t.Pos.Offset] = true
	return &Unary{At: At{p.tokenAt(*t).Span.To(x.Place())}, Op: t.Value, X: x}
}

func binary(op Word, x, y Expr) Expr {
	return &Binary{At: At{x.Place().To(y.Place())}, Op: op, X: x, Y: y}
}

// operand makes an operand with its sign, atom one without it.
func (p *parser) operand(r *operandRule) Expr { return p.sign(r.Sign, p.atom(r)) }

func (p *parser) atom(r *operandRule) Expr {
	switch {
	case r.Number != nil:
		return p.number(*r.Number, r.Unit)
	case r.Call != nil:
		return p.call(r.Call)
	case r.Name != nil:
		return p.name(r.Name)
	}
	return p.group(r.Group)
}

func (p *parser) group(r *groupRule) Expr { return &Group{At: p.at(r.mark), X: p.expr(r.X)} }

func (p *parser) beside(r *besideRule) Expr {
	switch {
	case r == nil:
		return nil
	case r.Number != nil:
		return p.number(r.Number.Number, r.Number.Unit)
	}
	return p.group(r.Group)
}

func (p *parser) spot(r *spotRule) *Spot {
	if r == nil {
		return nil
	}
	return &Spot{At: p.at(r.mark), Name: p.name(r.Name), Offset: p.beside(r.Offset)}
}

func (p *parser) call(r *callRule) *Call {
	if r == nil {
		return nil
	}
	return &Call{At: p.at(r.mark), Name: p.quoted(r.Name), Args: p.args(r.Args)}
}

func (p *parser) args(rs []*argRule) []Arg {
	var out []Arg
	for _, r := range rs {
		out = append(out, p.arg(r))
	}
	return out
}

func (p *parser) arg(r *argRule) Arg {
	a := Arg{At: p.at(r.mark), Unit: p.unit(r.Unit)}
	if r.Key != nil {
		k := p.word(*r.Key)
		a.Key = &k
	}
	if r.Text != nil {
		s := p.text(*r.Text)
		a.Value, a.Unit = &s, p.unit(r.TextUnit)
		return a
	}
	a.Value = p.expr(r.Value)
	switch {
	case r.Op != nil:
		y := p.expr(r.Right)
		a.Value = &Compare{At: At{a.Value.Place().To(y.Place())}, Op: p.word(*r.Op), X: a.Value, Y: y}
	case r.High != nil:
		y := p.expr(r.High)
		a.Value = &Range{At: At{a.Value.Place().To(y.Place())}, Low: a.Value, High: y}
	case r.Beside != nil:
		p.besideArg(&a, p.expr(r.Beside))
	}
	return a
}

// besideArg judges two values side by side in an argument: `from before` and
// `below 3 Hz` are a word with its value, otherwise it is a place.
func (p *parser) besideArg(a *Arg, second Expr) {
	n, _ := a.Value.(*Name)
	w, _ := n.Plain()
	if w == "from" || w == "below" {
		a.Mark, a.Value = &Word{n.At, w}, second
		return
	}
	span := a.Value.Place().To(second.Place())
	switch second.(type) {
	case *Number, *Group:
		if n != nil {
			a.Value = &Spot{At: At{span}, Name: n, Offset: second}
			return
		}
	}
	d := diag.Diagnostic{Code: "side-by-side", Span: second.Place(), Summary: "two values stand side by side", Found: "an operator or a comma is missing before this"}
	if n != nil {
		d.Summary, d.Found = "a value beside another stands in brackets unless it is a quantity", "this is more than a quantity"
		d.Hint = n.Span.Text() + " (" + second.Place().Text() + ")"
		a.Value = &Spot{At: At{span}, Name: n, Offset: second}
	}
	p.diags.Add(d)
}
