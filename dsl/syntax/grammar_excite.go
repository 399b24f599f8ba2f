package syntax

import "github.com/alecthomas/participle/v2/lexer"

type exciteRule struct {
	mark
	Name  *labelRule `parser:"'excite' @@"`
	Pluck *pluckRule `parser:"( @@"`
	Start *startRule `parser:"| @@"`
	Push  *pushRule  `parser:"| @@"`
	Press *pressRule `parser:"| @@"`
	Move  *moveRule  `parser:"| @@"`
	Roll  *rollRule  `parser:"| @@"`
	Load  *loadRule  `parser:"| @@ )"`
}

type pluckRule struct {
	mark
	Spot  *spotRule `parser:"'pluck' 'at' @@"`
	By    *exprRule `parser:"( 'by' @@"`
	With  *exprRule `parser:"| 'with' @@ )"`
	Until *exprRule `parser:"( 'until' @@ )?"`
}

type startRule struct {
	mark
	Quantity lexer.Token `parser:"'start' @('displacement' | 'velocity')"`
	Along    *spotRule   `parser:"'along' @@"`
	Shape    *exprRule   `parser:"'=' @@"`
}

type pushRule struct {
	mark
	Spot *spotRule `parser:"'push' 'at' @@"`
	With *exprRule `parser:"'with' @@"`
}

type pressRule struct {
	mark
	Along *spotRule `parser:"'press' 'along' @@"`
	With  *exprRule `parser:"'with' @@"`
}

type moveRule struct {
	mark
	Support *spotRule `parser:"'move' @@"`
	With    *exprRule `parser:"'with' @@"`
}

type rollRule struct {
	mark
	Along *spotRule   `parser:"'roll' 'along' @@"`
	Speed *exprRule   `parser:"'at' @@"`
	Load  *exprRule   `parser:"'load' @@"`
	Parts []*rollPart `parser:"@@*"`
}

type rollPart struct {
	mark
	Word     *lexer.Token `parser:"','? ( @('mass' | 'spring' | 'dashpot')"`
	Value    *exprRule    `parser:"  @@"`
	From     *spotRule    `parser:"| 'from' @@"`
	Starting *exprRule    `parser:"| 'starting' @@ )"`
}

type loadRule struct {
	mark
	Plugin lexer.Token `parser:"'load' @Text"`
	Args   []*argRule  `parser:"( Open ( @@ ( ',' @@ )* )? ')' )?"`
	Along  bool        `parser:"( @'along' | 'at' )"`
	Spot   *spotRule   `parser:"@@"`
}

type watchRule struct {
	mark
	Name  *labelRule   `parser:"'watch' @@"`
	Along bool         `parser:"( @'along' | 'at' )"`
	Spot  *spotRule    `parser:"@@"`
	Parts []*watchTail `parser:"@@+"`
}

type watchTail struct {
	mark
	Comma    bool         `parser:"@','?"`
	Mass     *exprRule    `parser:"( 'mass' @@"`
	Quantity *lexer.Token `parser:"| @Word )"`
}

type recordRule struct {
	mark
	Name  *labelRule  `parser:"'record' @@"`
	Path  lexer.Token `parser:"@Text"`
	Block lexer.Token `parser:"@Block"`
}

type columnRule struct {
	mark
	Text   *lexer.Token  `parser:"  @Text"`
	Number *quantityRule `parser:"| @@"`
}

type recordTimeRule struct {
	mark
	Column *columnRule `parser:"'time' @@"`
	Unit   lexer.Token `parser:"'unit' @Unit"`
}

type recordChannelRule struct {
	mark
	Column       *columnRule  `parser:"'channel' @@"`
	Unit         *lexer.Token `parser:"( 'unit' @Unit"`
	Uncalibrated bool         `parser:"| @'uncalibrated' )"`
	For          *nameRule    `parser:"'for' @@"`
}

type readingRule struct {
	mark
	Name  *labelRule  `parser:"'reading' @@"`
	Of    *nameRule   `parser:"'of' @@"`
	Block lexer.Token `parser:"@Block"`
}

type readingItemRule struct {
	mark
	Mode    *lexer.Token   `parser:"( @('frequency' | 'decay')"`
	Unknown bool           `parser:"  ( @'?'"`
	Number  *exprRule      `parser:"  | @@ ) '='"`
	Value   *exprRule      `parser:"  @@"`
	Trips   *lexer.Token   `parser:"| @('returns' | 'swings')"`
	Count   *exprRule      `parser:"  @@ 'took'"`
	Took    *exprRule      `parser:"  @@"`
	Peaks   []*exprRule    `parser:"| 'peaks' @@ ( ',' @@ )* )"`
	Parts   []*readingTail `parser:"@@*"`
}

type readingTail struct {
	mark
	Shared bool         `parser:"  @'shared'?"`
	Doubt  *doubtRule   `parser:"  @@"`
	Plane  *lexer.Token `parser:"| @('vertical' | 'sideways')"`
	Where  *atPartRule  `parser:"| @@"`
}
