package syntax

import (
	"sync"

	"github.com/alecthomas/participle/v2"
	"github.com/alecthomas/participle/v2/lexer"
)

// This file and its neighbours grammar_*.go are the grammar: one production a
// type, the type's name without "Rule" being the production's. GRAMMAR.md is
// generated from them. A <block> stands for `{`, statements, `}`; which
// statements may stand in it follows from the first word (StatementWords).

// mark is embedded in every production; participle fills in its tokens.
type mark struct {
	Tokens []lexer.Token
}

// statementRule is the root: every statement of every context.
type statementRule struct {
	Version *versionRule `parser:"  @@"`
	Text    *textRule    `parser:"| @@"`
	About   *aboutRule   `parser:"| @@"`
	Let     *letRule     `parser:"| @@"`
	Use     *useRule     `parser:"| @@"`
	Stock   *stockRule   `parser:"| @@"`
	Line    *lineRule    `parser:"| @@"`
	Each    *eachRule    `parser:"| @@"`
	Tie     *tieRule     `parser:"| @@"`
	Law     *lawRule     `parser:"| @@"`
	Excite  *exciteRule  `parser:"| @@"`
	Watch   *watchRule   `parser:"| @@"`
	Run     *runRule     `parser:"| @@"`
	Require *requireRule `parser:"| @@"`
	Record  *recordRule  `parser:"| @@"`
	Reading *readingRule `parser:"| @@"`
	Seek    *seekRule    `parser:"| @@"`
	Fit     *fitRule     `parser:"| @@"`
	Vary    *varyRule    `parser:"| @@"`
	Sample  *sampleRule  `parser:"| @@"`
	Collect *collectRule `parser:"| @@"`
	Best    *bestRule    `parser:"| @@"`
	Meet    *meetRule    `parser:"| @@"`
	Inner   *innerRule   `parser:"| @@"`
}

// innerRule is every statement that stands inside a block.
type innerRule struct {
	AboutEntry    *aboutEntryRule    `parser:"  @@"`
	StockValue    *stockValueRule    `parser:"| @@"`
	Wires         *wiresRule         `parser:"| @@"`
	Loss          *lossRule          `parser:"| @@"`
	LineProperty  *linePropertyRule  `parser:"| @@"`
	Support       *supportRule       `parser:"| @@"`
	Segment       *segmentRule       `parser:"| @@"`
	Joint         *jointRule         `parser:"| @@"`
	Takes         *takesRule         `parser:"| @@"`
	State         *stateRule         `parser:"| @@"`
	Force         *forceRule         `parser:"| @@"`
	RunItem       *runItemRule       `parser:"| @@"`
	RecordTime    *recordTimeRule    `parser:"| @@"`
	RecordChannel *recordChannelRule `parser:"| @@"`
	ReadingItem   *readingItemRule   `parser:"| @@"`
	FitTo         *fitToRule         `parser:"| @@"`
	FitUsing      *fitUsingRule      `parser:"| @@"`
}

// The statements at the top of a file that are not in a file of their own.

type versionRule struct {
	mark
	Number lexer.Token `parser:"'tautspan' @Number"`
}

type textRule struct {
	mark
	Word lexer.Token `parser:"@('title' | 'note')"`
	Text lexer.Token `parser:"@Text"`
}

type aboutRule struct {
	mark
	Block lexer.Token `parser:"'about' @Block"`
}

type aboutEntryRule struct {
	mark
	Key  lexer.Token `parser:"@Word"`
	Text lexer.Token `parser:"@Text"`
}

type letRule struct {
	mark
	Name    *labelRule    `parser:"'let' @@ '='"`
	Between *betweenRule  `parser:"( @@"`
	Value   *exprRule     `parser:"| @@"`
	Doubt   *doubtRule    `parser:"  @@? )"`
	Where   []*atPartRule `parser:"@@*"`
}

type doubtRule struct {
	mark
	Spread  *exprRule    `parser:"  ('+-' | '±') @@"`
	OfIt    bool         `parser:"  ( @'of' 'it' )?"`
	Between *betweenRule `parser:"| @@"`
}

type betweenRule struct {
	mark
	Low  *exprRule `parser:"'between' @@"`
	High *exprRule `parser:"'and' @@"`
}

type atPartRule struct {
	mark
	Spot  *spotRule   `parser:"'at' ( @@"`
	Value *besideRule `parser:"| @@ )"`
}

type useRule struct {
	mark
	Path lexer.Token `parser:"'use' @Text"`
}

type eachRule struct {
	mark
	Row   *labelRule  `parser:"'each' @@"`
	Table lexer.Token `parser:"'of' @Text"`
	Block lexer.Token `parser:"@Block"`
}

type runRule struct {
	mark
	Block lexer.Token `parser:"'run' @Block"`
}

type runItemRule struct {
	mark
	Word    lexer.Token   `parser:"  @('for' | 'every' | 'agree')"`
	Value   *exprRule     `parser:"  @@"`
	Solvers []*solverRule `parser:"| 'solvers' @@ ( ',' @@ )*"`
	Effort  *lexer.Token  `parser:"| 'effort' @Word"`
	Limit   *lexer.Token  `parser:"| 'limit' @Word"`
	Most    *exprRule     `parser:"  @@"`
}

type solverRule struct {
	mark
	Name lexer.Token `parser:"@Word | @Text"`
}

type requireRule struct {
	mark
	Value  *exprRule    `parser:"'require' @@"`
	Op     *lexer.Token `parser:"( @('<' | '<=' | '>' | '>=')"`
	Limit  *exprRule    `parser:"  @@"`
	Sides  *lexer.Token `parser:"| @('within' | 'outside')"`
	Low    *exprRule    `parser:"  @@"`
	High   *exprRule    `parser:"  '..' @@ )"`
	Text   *lexer.Token `parser:"@Text?"`
	Clause *lexer.Token `parser:"( 'clause' @Text )?"`
}

type seekRule struct {
	mark
	Name *nameRule `parser:"'seek' @@"`
	Span *spanRule `parser:"@@"`
}

// spanRule is the stretch that a let is sought, varied or searched over.
type spanRule struct {
	mark
	From *exprRule `parser:"'from' @@"`
	To   *exprRule `parser:"'to' @@"`
}

type fitRule struct {
	mark
	Block lexer.Token `parser:"'fit' @Block"`
}

type fitToRule struct {
	mark
	Names []*nameRule `parser:"'to' @@ ( ',' @@ )*"`
}

type fitUsingRule struct {
	mark
	Uses []*fitUseRule `parser:"'using' @@ ( ',' @@ )*"`
}

type fitUseRule struct {
	mark
	What lexer.Token `parser:"@Word"`
	Low  *exprRule   `parser:"( @@"`
	High *exprRule   `parser:"  ( '..' @@ )? )?"`
}

type varyRule struct {
	mark
	Name      *nameRule   `parser:"'vary' @@"`
	Span      *spanRule   `parser:"( @@"`
	Steps     *exprRule   `parser:"  ',' @@ 'steps'"`
	Geometric bool        `parser:"  ( ',' @'geometric' )?"`
	Through   []*exprRule `parser:"| 'through' @@ ( ',' @@ )*"`
	Draw      *callRule   `parser:"| @@ )"`
}

type sampleRule struct {
	mark
	Count *exprRule `parser:"'sample' @@"`
	Seed  *exprRule `parser:"( ',' 'seed' @@ )?"`
}

type collectRule struct {
	mark
	Values []*exprRule `parser:"'collect' @@ ( ',' @@ )*"`
}

type bestRule struct {
	mark
	Value *exprRule   `parser:"'best' @@"`
	Goal  lexer.Token `parser:"@('largest' | 'smallest')"`
	Over  *nameRule   `parser:"'over' @@"`
	Span  *spanRule   `parser:"@@"`
}

type meetRule struct {
	mark
	Value *exprRule   `parser:"'meet' @@"`
	With  []*exprRule `parser:"'with' @@ ( ',' @@ )*"`
	Over  *nameRule   `parser:"'over' @@"`
	Span  *spanRule   `parser:"@@"`
}

// lookahead is how far participle may go into a branch and still come back:
// `NAME (` against `NAME` needs one token, `KEY =` two.
const lookahead = 2

// rootParser builds the grammar once; it is never changed afterwards.
var rootParser = sync.OnceValue(func() *participle.Parser[statementRule] {
	return participle.MustBuild[statementRule](
		participle.Lexer(definition{}),
		participle.UseLookahead(lookahead),
	)
})

// Grammar returns the productions of the grammar in EBNF as participle prints
// them, one a line.
func Grammar() string { return rootParser().String() }
