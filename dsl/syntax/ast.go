package syntax

import "github.com/tautspan/tautspan/dsl/diag"

// Node is anything in the tree that has a place in the text.
type Node interface {
	// Place returns the span of the text that the node was read from.
	Place() diag.Span
}

// At is embedded in every node and holds its span.
type At struct {
	Span diag.Span
}

// Place returns the span of the text that the node was read from.
func (a At) Place() diag.Span { return a.Span }

// Tree is one parsed file. Parse always returns one, however broken the text.
type Tree struct {
	File       *diag.File
	Statements []Statement // in the order of the text
	Comments   []Comment   // in the order of the text

	tokens, remarks []Token
	chunks          []chunk
	signs           map[int]bool
}

// Comment is the text from "#" to the end of its line.
type Comment struct {
	At
	Text string // with the "#", without the line end
}

// Statement is one statement at the top of a file or in an each block:
// *Version *Title *Note *About *Let *Use *Stock *Line *Each *Tie *Law *Excite
// *Watch *Run *Require *Record *Reading *Seek *Fit *Vary *Sample *Collect
// *Best *Meet, or *Broken for one that could not be read.
type Statement interface {
	Node
	statement()
}

// Word is one bare word of the text: a keyword that was a choice, or a name.
type Word struct {
	At
	Text string
}

// String is a text in double quotes. The language has no escapes in texts, so
// Text is what stands between the quotes.
type String struct {
	At
	Text string // without the quotes
}

// Label is a name where it is given (`let NAME`, `line NAME`, `joint NAME`)
// and one part of a name where it is used. Index is set for `hanger[ROW.mark]`
// and nil otherwise. Quoted is set for the second part of `ROW."L [m]"`; a part
// that is a whole number (`upper.3`) is kept as its digits.
type Label struct {
	At
	Text   string
	Quoted bool
	Index  Expr
}

// Broken stands for a statement that could not be read; a diagnostic says why.
// Name helps to keep follow-on errors away: a use of that name is no mistake.
type Broken struct {
	At
	Word Word   // the first word of the statement, may be empty
	Name string // the word behind it where that is a plain name, else empty
}

// Version is `tautspan 1` or `tautspan 1.3`.
type Version struct {
	At
	Number Number
}

// Title is `title TEXT`.
type Title struct {
	At
	Text String
}

// Note is `note TEXT`.
type Note struct {
	At
	Text String
}

// About is `about { KEY TEXT; ... }`. It is also an item of line, reading and
// record blocks.
type About struct {
	At
	Entries    []AboutEntry
	Incomplete bool // part of the block could not be read
}

// AboutEntry is one `KEY TEXT` of an about block.
type AboutEntry struct {
	At
	Key  Word
	Text String
}

// Use is `use "file.taut"`.
type Use struct {
	At
	Path String
}

// Let is `let NAME = VALUE [DOUBT] [at ...]`. Value is nil where only
// `between A and B` was said, whose middle is then the value.
type Let struct {
	At
	Name  Label
	Value Expr
	Doubt *Doubt   // nil: taken as exact
	Where []AtPart // temperatures and places after the value; a level is in Doubt
}

// Doubt is what stands behind a value: `+- Q [of it] [at 95 %]` or
// `between A and B`.
type Doubt struct {
	At
	Between   bool // `between Low and High`; otherwise `+- Spread`
	Spread    Expr // Q of `+- Q`, nil for between
	OfIt      bool // `+- 7 % of it`
	Low, High Expr // the ends of between, nil otherwise
	Level     Expr // Q of `at Q` where its unit is written `%`, else nil
}

// AtPart is one `at ...` behind a value. Where a name follows, Spot is set
// (resolve decides whether it names a place or a let that is a temperature);
// where a number or a bracket follows, Value is set.
type AtPart struct {
	At
	Spot  *Spot
	Value Expr
}

// Spot is a PLACE: `NAME`, `SEGMENT LENGTH` or `SEGMENT PERCENT`. Offset is
// nil for a bare name; otherwise it is a Number or a bracketed expression.
// Inside a call's brackets a Spot with an Offset stands as an Expr of its own
// (`tension(upper 12 m)`); a bare name there is a Name.
type Spot struct {
	At
	Name   *Name
	Offset Expr
}

// Require is `require VALUE < LIMIT`, or with `<= > >=`, or
// `require VALUE within LOW .. HIGH`, `outside LOW .. HIGH`.
type Require struct {
	At
	Value     Expr
	Test      Word    // Text is one of < <= > >= within outside
	Limit     Expr    // nil for within and outside
	Low, High Expr    // nil unless within or outside
	Text      *String // nil if not said
	Clause    *String // `clause TEXT`, nil if not said
}

// Seek is `seek NAME from A to B`.
type Seek struct {
	At
	Name     *Name
	From, To Expr
}

// Fit is `fit { to NAME, NAME; using frequencies 1..6, returns, history }`.
// Both lists are joined over all statements of that word.
type Fit struct {
	At
	To         []*Name
	Using      []FitUse
	Incomplete bool // part of the block could not be read
}

// FitUse is one entry of `using`: a word (frequencies, peaks, returns, swings,
// decays, history, ...) and optionally the orders that it is limited to.
type FitUse struct {
	At
	What  Word
	Which Expr // Range or another value; nil for all
}

// Vary is one of the forms of `vary`; exactly one of Steps, Through and Draw
// is set.
type Vary struct {
	At
	Name      *Name
	From, To  Expr // `from A to B, N steps [, geometric]`
	Steps     Expr
	Geometric bool
	Through   []Expr // `through A, B, ...`; the unit of the last holds for all
	Draw      *Call  // `normal(MEAN, SD)`, `uniform(A, B)`, `lognormal(...)`, `one_of(...)`
}

// Sample is `sample N, seed S`. Seed is nil if not said.
type Sample struct {
	At
	Count Expr
	Seed  Expr
}

// Collect is `collect EXPR, ...`.
type Collect struct {
	At
	Values []Expr
}

// Best is `best EXPR largest|smallest over NAME from A to B`.
type Best struct {
	At
	Value    Expr
	Goal     Word // largest or smallest
	Over     *Name
	From, To Expr
}

// Meet is `meet EXPR with EXPR, ... over NAME from A to B`.
type Meet struct {
	At
	Value    Expr
	With     []Expr
	Over     *Name
	From, To Expr
}

// Each is `each ROW of "hangers.csv" { ... }`.
type Each struct {
	At
	Row        Label
	Table      String
	Statements []Statement
	Incomplete bool // part of the block could not be read
}

// Run is the block `run { ... }`.
type Run struct {
	At
	Items      []RunItem
	Incomplete bool // part of the block could not be read
}

// RunItem is one statement of a run block. Word tells which: `for`, `every`
// and `agree` set Value; `solvers` sets Solvers; `effort` sets Choice (quick,
// normal, thorough); `limit` sets Choice (memory, work, time) and Value.
type RunItem struct {
	At
	Word    Word
	Value   Expr
	Choice  Word
	Solvers []Label // Quoted for a solver from a plugin
}

func (*Broken) statement()  {}
func (*Version) statement() {}
func (*Title) statement()   {}
func (*Note) statement()    {}
func (*About) statement()   {}
func (*Let) statement()     {}
func (*Use) statement()     {}
func (*Stock) statement()   {}
func (*Line) statement()    {}
func (*Each) statement()    {}
func (*Tie) statement()     {}
func (*Law) statement()     {}
func (*Excite) statement()  {}
func (*Watch) statement()   {}
func (*Run) statement()     {}
func (*Require) statement() {}
func (*Record) statement()  {}
func (*Reading) statement() {}
func (*Seek) statement()    {}
func (*Fit) statement()     {}
func (*Vary) statement()    {}
func (*Sample) statement()  {}
func (*Collect) statement() {}
func (*Best) statement()    {}
func (*Meet) statement()    {}
