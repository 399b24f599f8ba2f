package scenario

import "github.com/tautspan/tautspan/engine/formula"

// ModelOf is everything that is physically there and happens.
type ModelOf[V any] struct {
	Lines   []LineOf[V]
	Ties    []TieOf[V]
	Plucks  []PluckOf[V]
	Starts  []StartOf[V]
	Pushes  []PushOf[V]
	Presses []PressOf[V]
	Moves   []MoveOf[V]
	Rolls   []RollOf[V]
	Loads   []LoadOf[V]
	Watches []WatchOf[V]
	Run     RunOf[V]
}

// LineOf is one line in walking order: len(Nodes) == len(Segments)+1, segment i
// lies between nodes i and i+1, the first and the last node are supports.
type LineOf[V any] struct {
	Name     string
	Nodes    []NodeOf[V]
	Segments []SegmentOf[V]
	Incline  V    // rad, positive where the line rises in walking order
	Sag      bool // with the shallow-cable term of Irvine and Caughey, vertical plane
	Sideways bool // looked at across its vertical plane
	// SaidTension is the tension that the line says, N, at the place that it says;
	// only with TensionSaid, else each segment says its own.
	TensionSaid bool
	SaidTension V
	// Temperature at which the tension holds, K; only with Warm.
	Warm        bool
	Temperature V
	Weighted    bool // an end keeps the tension constant along the line
	Stretch     bool // the tension grows with amplitude (Kirchhoff, Carrier)
}

// NodeKind says what stands at a node.
type NodeKind uint8

// A node is a support at an end, a named joint, or a bare splice between two
// segments that follow one another.
const (
	Support NodeKind = iota
	Joint
	Splice
)

// NodeOf is a support, joint or bare splice. Everything acts to ground. A free
// support has neither Fixed nor Absorbing nor any property.
type NodeOf[V any] struct {
	Name      string // "" for a bare splice
	Kind      NodeKind
	Fixed     bool // held in place
	Absorbing bool // a matched dashpot: the line goes on for ever
	Holds     bool // the tension may change here; the joint holds the difference
	Mass      V    // kg
	Spring    V    // N/m
	Dashpots  []DashpotOf[V]
	Tuned     []TunedOf[V]
	// On a line with bending a node also says how it turns: freely, not at all
	// (Clamped), or against a rotary spring to ground.
	Clamped bool
	Rotary  V    // N m/rad
	Hinge   bool // the segments that meet here turn each on their own
	Inertia V    // kg m^2, against turning
	// SpringLoss is the loss factor of Spring: K(1+i eta) at positive frequencies.
	SpringLoss V
	AxialGive  V // N/m, spring of an end that gives along the line; 0: held
	Laws       []LawOf[V]
	Benches    []Bench
}

// DashpotOf is a dashpot to ground, perhaps through a bracket that gives.
type DashpotOf[V any] struct {
	C       V    // N s/m
	Bracket bool // false: rigid
	Through V    // N/m, give of the bracket in series; only with Bracket
}

// TunedOf is a mass hung from a joint on a spring and a dashpot.
type TunedOf[V any] struct {
	Mass    V // kg
	Spring  V // N/m
	Dashpot V // N s/m
	Loss    V // loss factor of Spring
}

// SegmentOf is a uniform piece of line.
type SegmentOf[V any] struct {
	Name          string
	Stock         string
	Length        V // m
	MassPerLength V // kg/m
	Tension       V // N; where it rises along the segment, that at its start
	TensionRise   V // N/m, dT/dx of an inclined line: m g sin(incline)
	Bending       V // EI, N m^2; 0: an ideal string
	Internal      V // s, Kelvin-Voigt: bending moment EI (u'' + Internal u''_t)
	Axial         V // EA, N; 0 where not said
	Viscous       V // N s/m^2: force per length and velocity
	Strength      V // N; 0 where not said
	Diameter      V // m, of its outside; 0 where not said
	Expansion     V // 1/K; 0 where not said
	// TensionLoss and BendingLoss are hysteretic loss factors: T(1+i eta) and
	// EI(1+i eta) at positive frequencies.
	TensionLoss V
	BendingLoss V
	Law         *LawOf[V] // per length; nil: none
	Every       []EveryOf[V]
}

// PlaceOf is a point of a line: a node, or a distance into a segment.
type PlaceOf[V any] struct {
	Line    int
	Node    int // -1: inside Segment
	Segment int
	Offset  V // m from the segment's start
}

// SpanOf is a stretch of line: a whole line (Segment -1) or one segment.
type SpanOf struct {
	Line    int
	Segment int // -1: the whole line
}

// TieOf joins two places by a spring and a dashpot side by side; its mass is
// shared half and half by the two places.
type TieOf[V any] struct {
	Name     string
	From, To PlaceOf[V]
	Spring   V // N/m
	Dashpot  V // N s/m
	Mass     V // kg
	// SpringLoss is the loss factor of Spring.
	SpringLoss V
	Bracket    bool // the dashpot stands behind a bracket that gives
	Through    V    // N/m, in series with the dashpot; only with Bracket
	Slack      bool // pulls, never pushes: acts only while u at From is above u at To
}

// HistoryOf is a number that changes with time: a bound or unbound program over
// time (formula.ArgT) and, along a stretch, place (formula.ArgX, from the start
// of the segment or line named). It is 0 for t < 0. Breaks are the times at
// which it, or a derivative, may jump.
type HistoryOf[V any] struct {
	Value  formula.Program
	Breaks []V // s
}

// PluckOf draws the whole line aside quasi-statically by a force at a place and
// lets go at Until (0: at the start).
type PluckOf[V any] struct {
	Name     string
	At       PlaceOf[V]
	ByLength bool
	Length   V // m, displacement of the place; with ByLength
	Force    V // N; without
	Until    V // s
}

// StartOf gives an initial displacement or velocity along a stretch.
type StartOf[V any] struct {
	Name     string
	Along    SpanOf
	Velocity bool            // false: displacement
	Shape    formula.Program // of ArgX, from the start of the stretch; m or m/s
}

// PushOf is a point force, N.
type PushOf[V any] struct {
	Name  string
	At    PlaceOf[V]
	Force HistoryOf[V]
}

// PressOf is a force per length, N/m.
type PressOf[V any] struct {
	Name  string
	Along SpanOf
	Force HistoryOf[V]
	// From and To, where To is above zero, are the part of the stretch where it
	// is not nothing, m from the stretch's start.
	From, To float64
}

// MotionKind says what a prescribed motion prescribes.
type MotionKind uint8

// A support's motion is given as displacement (m), velocity (m/s) or
// acceleration (m/s^2); the latter two start from rest in place.
const (
	MotionDisplacement MotionKind = iota
	MotionVelocity
	MotionAcceleration
)

// MoveOf moves a support as told, whatever the line does.
type MoveOf[V any] struct {
	Name   string
	Line   int
	Node   int
	Kind   MotionKind
	Motion HistoryOf[V]
}

// RollOf is a force that travels along a line in walking order; with a Mass
// that rides on a spring and a dashpot, whose weight is part of Force.
type RollOf[V any] struct {
	Name     string
	Line     int
	Speed    V // m/s
	Force    V // N, positive upward
	From     PlaceOf[V]
	Starting V // s
	Mass     V // kg; 0: a constant force
	Spring   V // N/m
	Dashpot  V // N s/m
}

// LoadOf is a load of a plugin, or of the built-in ones, by name. Before a mesh
// with it is solved it is worked out: turned into pushes or presses.
type LoadOf[V any] struct {
	Name       string
	Plugin     string
	Parameters []ParameterOf[V]
	Along      bool
	At         PlaceOf[V] // of a load at a place
	Span       SpanOf     // of a load along a stretch
}

// ParameterOf is a parameter of a plugin. The plugin is told Value/Factor: the
// number in the unit that it asked for.
type ParameterOf[V any] struct {
	Name   string
	Value  V // SI
	Factor float64
}

// Quantity is what a watch records.
type Quantity uint8

// The quantities of the language.
const (
	Displacement Quantity = iota // m
	Velocity                     // m/s
	Acceleration                 // m/s^2
	Slope                        // du/dx, rad
	Force                        // N
	Moment                       // N m
	Tension                      // N
)

var quantityNames = [...]string{"displacement", "velocity", "acceleration", "slope", "force", "moment", "tension"}
var quantityUnits = [...]string{"m", "m/s", "m/s^2", "rad", "N", "N*m", "N"}

// String is the quantity's word in the language.
func (q Quantity) String() string { return quantityNames[q] }

// Unit is the quantity's SI unit.
func (q Quantity) Unit() string { return quantityUnits[q] }

// QuantityNamed is the quantity of a word.
func QuantityNamed(word string) (Quantity, bool) {
	for i, n := range quantityNames {
		if n == word {
			return Quantity(i), true
		}
	}
	return 0, false
}

// WatchOf records quantities at a place, or along a whole line or segment for
// the picture over x and t.
type WatchOf[V any] struct {
	Name       string
	Along      bool
	At         PlaceOf[V] // of a watch at a place
	Span       SpanOf     // of a watch along a stretch
	Quantities []Quantity
	Mass       V // kg, the sensor's own mass, rides on the line
}

// Effort is how hard the cross-check tries before it gives up.
type Effort uint8

// The efforts of the language.
const (
	Normal Effort = iota
	Quick
	Thorough
)

// RunOf is what the run statement asks. In a template a value that was left out
// is told by its Given flag; Bind puts a sensible value in its place.
type RunOf[V any] struct {
	ForGiven, EveryGiven, AgreeGiven bool
	For                              V        // s
	Every                            V        // s
	Agree                            V        // share
	Solvers                          []string // built-in ones by name; none and no Foreign: all
	Foreign                          []string // those of plugins
	Effort                           Effort
	LimitMemory                      V // bytes; 0: default
	LimitWork                        V // cell-steps; 0: default
	LimitTime                        V // s; 0: none
}

// The bound structures, in SI numbers.
type (
	// Line is a bound line.
	Line = LineOf[float64]
	// Node is a bound support, joint or splice.
	Node = NodeOf[float64]
	// Segment is a bound segment.
	Segment = SegmentOf[float64]
	// Place is a bound place.
	Place = PlaceOf[float64]
	// History is a bound history; At evaluates it.
	History = HistoryOf[float64]
	// Watch is a bound watch.
	Watch = WatchOf[float64]
	// Model is a bound model.
	Model = ModelOf[float64]
)
