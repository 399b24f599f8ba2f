package syntax

// Expr is an expression: *Number *String *Name *Call *Unary *Binary *Compare
// *Range *Group or *Spot. Compare stands only as a call's argument (the first
// of `if`); Range and Spot only as a call's argument or where a statement says
// so; String only as a call's argument or as a column.
type Expr interface {
	Node
	expr()
}

// Number is a number as written, with its unit if one stands behind it.
type Number struct {
	At
	Text  string  // the digits: "11.5e-6"
	Value float64 // Text read as a float64; may be infinite for "1e999"
	Unit  *Unit   // nil for a pure number
}

// Unit is a unit as written behind a number or behind the word `unit`:
// "kN*m^2", "1/K", "%". Its Span covers just the unit. Only its shape is
// known to be right; which words are units is not known here.
type Unit struct {
	At
	Text string
}

// Name is a dotted path: `pull`, `mid.displacement`, `hanger.upper`,
// `upper.3`, `ROW."L [m]"`, `hanger[ROW.mark].upper`. It has at least one part.
type Name struct {
	At
	Parts []Label
}

// Call is `NAME(ARG, ...)`: a function, a measure, a history, a law or a
// table. Name.Quoted is set for `"plugin name"(...)`.
type Call struct {
	At
	Name Label
	Args []Arg
}

// Arg is one argument of a call. Besides a plain value these forms exist:
// `hold = 200 N` sets Key; `from before`, `below 3 Hz` set Mark to the word;
// `"push" unit kN` sets Unit. Words such as `before` are a Name in Value.
type Arg struct {
	At
	Key   *Word
	Mark  *Word // from or below
	Value Expr
	Unit  *Unit
}

// Unary is `-X` or `+X`.
type Unary struct {
	At
	Op string
	X  Expr
}

// Binary is `X OP Y` with OP one of + - * / ^. The tree already holds the
// precedence: -x^2 is -(x^2), a^b^c is a^(b^c), the others group to the left.
type Binary struct {
	At
	Op   Word // Text is the operator, Span its place
	X, Y Expr
}

// Compare is `X OP Y` with OP one of < <= > >=.
type Compare struct {
	At
	Op   Word
	X, Y Expr
}

// Range is `LOW .. HIGH`.
type Range struct {
	At
	Low, High Expr
}

// Group is an expression in round brackets. It means what X means; Ungroup
// takes brackets away.
type Group struct {
	At
	X Expr
}

func (*Number) expr()  {}
func (*String) expr()  {}
func (*Name) expr()    {}
func (*Call) expr()    {}
func (*Unary) expr()   {}
func (*Binary) expr()  {}
func (*Compare) expr() {}
func (*Range) expr()   {}
func (*Group) expr()   {}
func (*Spot) expr()    {}

// Ungroup returns the expression without the round brackets around it.
func Ungroup(e Expr) Expr {
	for {
		g, ok := e.(*Group)
		if !ok {
			return e
		}
		e = g.X
	}
}

// Plain returns the single word that a name consists of, and whether it is one
// (no dots, no index, no quotes).
func (n *Name) Plain() (string, bool) {
	if n == nil || len(n.Parts) != 1 || n.Parts[0].Quoted || n.Parts[0].Index != nil {
		return "", false
	}
	return n.Parts[0].Text, true
}

// SharedUnit returns the unit that the last of several values carries for all
// of them: the unit of the last Number where every Number before it is pure
// (a sign before a number is looked through). Otherwise it returns nil, and
// each value speaks for itself.
func SharedUnit(values ...Expr) *Unit {
	if len(values) < 2 {
		return nil
	}
	for i, v := range values {
		n := signedNumber(v)
		last := i == len(values)-1
		switch {
		case n == nil:
			return nil
		case last:
			return n.Unit
		case n.Unit != nil:
			return nil
		}
	}
	return nil
}

// signedNumber returns the number in e, looking through one sign.
func signedNumber(e Expr) *Number {
	if u, ok := e.(*Unary); ok {
		e = u.X
	}
	n, _ := e.(*Number)
	return n
}
