package syntax

// Excite is `excite NAME ACTION`.
type Excite struct {
	At
	Name   Label
	Action Action
}

// Action is what an excite does: *Pluck *Start *Push *Press *Move *Roll *Load.
type Action interface {
	Node
	action()
}

// Pluck is `pluck at PLACE by LENGTH | with FORCE [until TIME]`.
type Pluck struct {
	At
	Spot  *Spot
	By    Expr // a length; nil where With is set
	With  Expr // a force; nil where By is set
	Until Expr // nil: let go at t = 0
}

// Start is `start displacement|velocity along PLACE = EXPR`, EXPR in `x`.
type Start struct {
	At
	Quantity Word // displacement or velocity
	Along    *Spot
	Shape    Expr
}

// Push is `push at PLACE with HISTORY`. A history is an Expr in `t`, with the
// history functions as calls.
type Push struct {
	At
	Spot *Spot
	With Expr
}

// Press is `press along PLACE with HISTORY`.
type Press struct {
	At
	Along *Spot
	With  Expr
}

// Move is `move SUPPORT with HISTORY`.
type Move struct {
	At
	Support *Spot // never with an Offset in a sound file
	With    Expr
}

// Roll is `roll along LINE at SPEED load FORCE [mass M] [spring K] [dashpot C]
// [from PLACE] [starting TIME]`.
type Roll struct {
	At
	Along    *Spot
	Speed    Expr
	Load     Expr
	Mass     Expr // nil if not said
	Spring   Expr // nil if not said
	Dashpot  Expr // nil if not said
	From     *Spot
	Starting Expr // nil if not said
}

// Load is `load "plugin name"(key = value, ...) along|at PLACE`.
type Load struct {
	At
	Plugin Call // Name.Quoted; no arguments where no bracket stands
	Along  bool // `along`; otherwise `at`
	Spot   *Spot
}

// Watch is `watch NAME at PLACE QUANTITY, ... [mass M]`, or `along LINE`.
type Watch struct {
	At
	Name       Label
	Along      bool // `along`; otherwise `at`
	Spot       *Spot
	Quantities []Word
	Mass       Expr // nil if not said
}

// Record is `record NAME "file" { time ...; channel ... }`.
type Record struct {
	At
	Name       Label
	Path       String
	Times      []RecordTime // a CSV file needs one, a WAV file has none
	Channels   []RecordChannel
	Abouts     []*About
	Incomplete bool // part of the block could not be read
}

// RecordTime is `time COLUMN unit UNIT`.
type RecordTime struct {
	At
	Column Expr // *String or *Number
	Unit   *Unit
}

// RecordChannel is `channel COLUMN unit UNIT|uncalibrated for WATCH.QUANTITY`.
type RecordChannel struct {
	At
	Column       Expr  // *String or *Number
	Unit         *Unit // nil where Uncalibrated is set
	Uncalibrated bool
	For          *Name
}

// Reading is `reading NAME of LINE { ... }`.
type Reading struct {
	At
	Name       Label
	Of         *Name
	Items      []ReadingItem
	Abouts     []*About
	Incomplete bool // part of the block could not be read
}

// ReadingItem is one statement of a reading block. Word tells which:
//
//	frequency N = VALUE, frequency ? = VALUE   Order (nil for ?), Values[0]
//	decay N = VALUE                            Order, Values[0]
//	peaks VALUE, VALUE, ...                    Values; the unit of the last holds for all
//	returns N took VALUE                       Order (how many round trips), Values[0]
//	swings N took VALUE                        Order (how many swings), Values[0]
//
// with `shared +- Q` in Shared, `vertical|sideways` in Plane (Text empty if
// not said), and every `at ...` that is not the level of a doubt in Where.
type ReadingItem struct {
	At
	Word   Word
	Order  Expr
	Values []Expr
	Doubt  *Doubt
	Shared *Doubt
	Plane  Word
	Where  []AtPart
}

func (*Pluck) action() {}
func (*Start) action() {}
func (*Push) action()  {}
func (*Press) action() {}
func (*Move) action()  {}
func (*Roll) action()  {}
func (*Load) action()  {}
