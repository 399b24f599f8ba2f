package syntax

import "github.com/alecthomas/participle/v2/lexer"

type stockRule struct {
	mark
	Name  *labelRule  `parser:"'stock' @@"`
	Block lexer.Token `parser:"@Block"`
}

type stockValueRule struct {
	mark
	Word  lexer.Token `parser:"@('mass' | 'axial' | 'bending' | 'density' | 'young' | 'area' | 'diameter' | 'strength' | 'expansion')"`
	Value *exprRule   `parser:"@@"`
}

type wiresRule struct {
	mark
	Count    *exprRule `parser:"'wires' @@"`
	Diameter *exprRule `parser:"'of' @@"`
}

type lossRule struct {
	mark
	Kind    *lexer.Token `parser:"'loss' ( @('viscous' | 'internal')"`
	Value   *exprRule    `parser:"  @@"`
	Ratio   *exprRule    `parser:"| 'ratio' @@"`
	AtF     *exprRule    `parser:"  ( 'at' @@ )?"`
	Eta     *exprRule    `parser:"| 'hysteretic' @@"`
	Bending bool         `parser:"  ( 'of' @'bending' )?"`
	Law     *callRule    `parser:"| 'law' @@ )"`
}

type lineRule struct {
	mark
	Name  *labelRule  `parser:"'line' @@"`
	Block lexer.Token `parser:"@Block"`
}

type linePropertyRule struct {
	mark
	Tension *exprRule    `parser:"  'tension' @@"`
	Spot    *spotRule    `parser:"  ( 'at' @@ )?"`
	Word    *lexer.Token `parser:"| @('incline' | 'at')"`
	Value   *exprRule    `parser:"  @@"`
	Effect  *lexer.Token `parser:"| @('sag' | 'stretch')"`
	With    *lexer.Token `parser:"  @'included'"`
	Plane   *lexer.Token `parser:"| 'plane' @('vertical' | 'sideways')"`
}

type supportRule struct {
	mark
	Name       *labelRule      `parser:"'support' @@"`
	Properties []*propertyTail `parser:"@@+"`
}

type jointRule struct {
	mark
	Name       *labelRule      `parser:"'joint' @@"`
	Properties []*propertyTail `parser:"@@*"`
}

// propertyTail takes the comma as it comes; that one is missing is said in
// better words than a grammar has.
type propertyTail struct {
	mark
	Comma    bool          `parser:"(?! EOF) @','?"`
	Property *propertyRule `parser:"@@"`
}

type segmentRule struct {
	mark
	Name   *labelRule     `parser:"'segment' @@"`
	Stock  *nameRule      `parser:"@@"`
	Length *exprRule      `parser:"@@"`
	Parts  []*segmentTail `parser:"@@*"`
}

type segmentTail struct {
	mark
	Comma    bool          `parser:"(?! EOF) @','?"`
	Tension  *exprRule     `parser:"( 'tension' @@"`
	Loss     *lossRule     `parser:"| @@"`
	Every    *everyRule    `parser:"| @@"`
	Property *propertyRule `parser:"| @@ )"`
}

type everyRule struct {
	mark
	Spacing  *exprRule     `parser:"'every' @@"`
	First    *exprRule     `parser:"( 'from' @@ )?"`
	Property *propertyRule `parser:"@@"`
}

type propertyRule struct {
	mark
	Word     *lexer.Token `parser:"  @('mass' | 'rotary' | 'inertia' | 'axial')"`
	Value    *exprRule    `parser:"  @@"`
	Through  *throughRule `parser:"| @@"`
	Spring   *springRule  `parser:"| @@"`
	Bare     *lexer.Token `parser:"| @('fixed' | 'free' | 'absorbing' | 'pinned' | 'clamped' | 'turning' | 'guided' | 'weighted' | 'hinge' | 'holds' | 'slack')"`
	Tuned    *tunedRule   `parser:"| @@"`
	Stop     *stopRule    `parser:"| @@"`
	CallWord *lexer.Token `parser:"| @('impedance' | 'law')"`
	Call     *callRule    `parser:"  @@"`
}

type springRule struct {
	mark
	Value *exprRule `parser:"'spring' @@"`
	Loss  *exprRule `parser:"( 'loss' @@ )?"`
}

type throughRule struct {
	mark
	Word    lexer.Token `parser:"@('dashpot' | 'friction')"`
	Value   *exprRule   `parser:"@@"`
	Through *exprRule   `parser:"( 'through' @@ )?"`
}

type tunedRule struct {
	mark
	Mass    *besideRule `parser:"'tuned' @@"`
	Spring  *besideRule `parser:"@@"`
	Dashpot *besideRule `parser:"( @@"`
	Loss    *exprRule   `parser:"| 'loss' @@ )"`
}

type stopRule struct {
	mark
	Gap    *besideRule `parser:"'stop' @@"`
	Spring *besideRule `parser:"@@"`
	Side   lexer.Token `parser:"@('up' | 'down' | 'both')"`
}

type tieRule struct {
	mark
	Name       *labelRule      `parser:"'tie' @@"`
	From       *spotRule       `parser:"'from' @@"`
	To         *spotRule       `parser:"'to' @@"`
	Properties []*propertyTail `parser:"@@*"`
}

type lawRule struct {
	mark
	Name  *labelRule  `parser:"'law' @@"`
	Block lexer.Token `parser:"@Block"`
}

type takesRule struct {
	mark
	Takes []*takeRule `parser:"'takes' @@ ( ',' @@ )*"`
}

type takeRule struct {
	mark
	Name *labelRule   `parser:"@@"`
	Unit *lexer.Token `parser:"( 'unit' @Unit )?"`
}

type stateRule struct {
	mark
	Name    *labelRule `parser:"'state' @@"`
	Initial *exprRule  `parser:"'=' @@"`
	Rate    *exprRule  `parser:"'rate' @@"`
}

type forceRule struct {
	mark
	Value *exprRule `parser:"'force' '=' @@"`
}
