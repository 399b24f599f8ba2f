package syntax

// Stock is `stock NAME { ... }`: what a segment is made of.
type Stock struct {
	At
	Name       Label
	Properties []StockProperty
	Incomplete bool // part of the block could not be read
}

// StockProperty is one statement of a stock block. Word tells which: `mass
// axial bending density young area diameter strength expansion` set Value;
// `wires N of D` sets Value to N and Of to D; `loss` sets Loss.
type StockProperty struct {
	At
	Word  Word
	Value Expr
	Of    Expr
	Loss  *Loss
}

// Loss is `loss KIND ...`, in a stock or along a segment: `viscous C`,
// `ratio Z [at F]`, `internal TAU`, `hysteretic ETA [of bending]` set Value;
// `law NAME(...)` sets Law.
type Loss struct {
	At
	Kind      Word
	Value     Expr
	AtF       Expr // F of `ratio Z at F`, else nil
	OfBending bool
	Law       *Call // Name.Quoted for a law from a plugin
}

// Line is `line NAME { ... }`: properties, then elements in walking order.
type Line struct {
	At
	Name       Label
	Items      []LineItem // in the order of the text
	Incomplete bool       // part of the block could not be read
}

// LineItem is one statement of a line block: *LineProperty *Support *Segment
// *Joint or *About.
type LineItem interface {
	Node
	lineItem()
}

// LineProperty is a property of a line. Word tells which: `tension T [at
// PLACE]` sets Value and Spot; `incline ANGLE` and `at TEMPERATURE` set Value;
// `sag included`, `stretch included` and `plane vertical|sideways` set Choice.
type LineProperty struct {
	At
	Word   Word
	Value  Expr
	Spot   *Spot // nil if no place is said; `mean` is a Spot whose name is mean
	Choice Word
}

// Support is `support NAME KIND, ...`.
type Support struct {
	At
	Name       Label
	Properties []Property // at least one
}

// Segment is `segment NAME STOCK LENGTH [, tension T] [, loss ...] [, every ...]`.
type Segment struct {
	At
	Name    Label
	Stock   *Name
	Length  Expr
	Tension Expr    // nil if not said; a repeated one is an error of the parser
	Losses  []*Loss // in order
	Every   []*Every
}

// Every is `every SPACING [from FIRST] PROPERTY, ...` along a segment. Joint
// properties that follow after a comma belong to the same Every.
type Every struct {
	At
	Spacing    Expr
	First      Expr // nil if not said
	Properties []Property
}

// Joint is `joint NAME [PROPERTY, ...]`. Without a property it names a splice.
type Joint struct {
	At
	Name       Label
	Properties []Property
}

// Property is one property of a support, a joint, an every or a tie. Word
// tells which, and with it which fields may be set:
//
//	fixed free absorbing pinned clamped turning guided weighted hinge holds slack   nothing
//	mass M, rotary KR, inertia J, axial KA    Value
//	spring K [loss ETA]                       Value, Loss
//	dashpot C [through K]                     Value, Through
//	friction F [through K]                    Value, Through
//	tuned M K C, tuned M K loss ETA           Value M, Stiffness K, and Dashpot C or Loss ETA
//	stop GAP K up|down|both                   Value GAP, Stiffness K, Side
//	impedance table(...)                      Call
//	law NAME(...)                             Call
//
// Which property may stand where is judged by resolve, except that the parser
// knows the words allowed at a support, a joint and a tie.
type Property struct {
	At
	Word      Word
	Value     Expr
	Through   Expr
	Loss      Expr
	Stiffness Expr
	Dashpot   Expr
	Side      Word
	Call      *Call
}

// Tie is `tie NAME from PLACE to PLACE [spring K] [, dashpot C] [, mass M] [, slack]`.
type Tie struct {
	At
	Name       Label
	From, To   *Spot
	Properties []Property
}

// Law is `law NAME { takes ...; state z = EXPR rate EXPR; force = EXPR }`.
type Law struct {
	At
	Name       Label
	Takes      []Take
	States     []State
	Forces     []LawForce // a sound law has exactly one
	Incomplete bool       // part of the block could not be read
}

// Take is one parameter of a law. Unit is nil where none was said (a pure
// number); its Text is "1" for `unit 1`.
type Take struct {
	At
	Name Label
	Unit *Unit
}

// State is `state z = INITIAL rate RATE`.
type State struct {
	At
	Name    Label
	Initial Expr
	Rate    Expr
}

// LawForce is `force = VALUE`.
type LawForce struct {
	At
	Value Expr
}

func (*LineProperty) lineItem() {}
func (*Support) lineItem()      {}
func (*Segment) lineItem()      {}
func (*Joint) lineItem()        {}
func (*About) lineItem()        {}
