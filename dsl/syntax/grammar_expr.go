package syntax

import "github.com/alecthomas/participle/v2/lexer"

// exprRule is a row of operands with operators between them. What binds
// tighter is settled when the tree is made (bind), which keeps the reflective
// part of the parsing shallow: it costs most of the time.
type exprRule struct {
	mark
	First *operandRule   `parser:"@@"`
	Ops   []string       `parser:"( @( Sign | Times )"`
	Rest  []*operandRule `parser:"  @@ )*"`
}

type operandRule struct {
	mark
	Sign   *lexer.Token `parser:"@Sign?"`
	Number *lexer.Token `parser:"( @Number"`
	Unit   *lexer.Token `parser:"  @Unit?"`
	Call   *callRule    `parser:"| @@"`
	Name   *nameRule    `parser:"| @@"`
	Group  *groupRule   `parser:"| @@ )"`
}

// groupRule is an expression in brackets; behind a word that it touches the
// bracket would begin a call instead.
type groupRule struct {
	mark
	X *exprRule `parser:"'(':Mark @@ ')'"`
}

type quantityRule struct {
	mark
	Number lexer.Token  `parser:"@Number"`
	Unit   *lexer.Token `parser:"@Unit?"`
}

type nameRule struct {
	mark
	First *labelRule  `parser:"@@"`
	Rest  []*partRule `parser:"( '.' @@ )*"`
}

type labelRule struct {
	mark
	Word  lexer.Token `parser:"@Word"`
	Index *exprRule   `parser:"( '[' @@ ']' )?"`
}

type partRule struct {
	mark
	Label *labelRule   `parser:"  @@"`
	Text  *lexer.Token `parser:"| @Text"`
}

type callRule struct {
	mark
	Name lexer.Token `parser:"( @Word | @Text )"`
	Args []*argRule  `parser:"Open ( @@ ( ',' @@ )* )? ')'"`
}

// argRule takes a text with its unit, or a value that may be compared, be a
// range, or have a second value beside it (a place, `from before`, `below 3 Hz`).
type argRule struct {
	mark
	Text     *lexer.Token `parser:"  @Text"`
	TextUnit *lexer.Token `parser:"  ( 'unit' @Unit )?"`
	Key      *lexer.Token `parser:"| ( @Word '=' )?"`
	Value    *exprRule    `parser:"  @@"`
	Unit     *lexer.Token `parser:"  ( 'unit' @Unit"`
	Op       *lexer.Token `parser:"  | @('<' | '<=' | '>' | '>=')"`
	Right    *exprRule    `parser:"    @@"`
	High     *exprRule    `parser:"  | '..' @@"`
	Beside   *exprRule    `parser:"  | @@ )?"`
}

// spotRule is a place: a name, and where on it.
type spotRule struct {
	mark
	Name   *nameRule   `parser:"@@"`
	Offset *besideRule `parser:"@@?"`
}

// besideRule is a value that stands beside another without a comma.
type besideRule struct {
	mark
	Number *quantityRule `parser:"  @@"`
	Group  *groupRule    `parser:"| @@"`
}
