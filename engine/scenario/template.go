package scenario

import "github.com/tautspan/tautspan/engine/formula"

// Template is a scenario whose numbers are programs over its lets.
type Template struct {
	Title string
	Notes []string
	About []Pair
	Lets  []Let // in an order in which each reads only earlier ones
	Model ModelOf[formula.Program]

	Requires []Require
	Collects []Collect
	Bests    []Best
	Meets    []Meet
	Varies   []Vary
	Sample   *Sample // nil: doubts are carried to first order

	Readings []ReadingOf[formula.Program]
	Records  []Record
	Seeks    []Seek
	Fit      *Fit // nil where the scenario has none
}

// Pair is one entry of an about block.
type Pair struct{ Key, Text string }

// Let is one named number.
type Let struct {
	Name  string
	Value formula.Program // over earlier lets
	Unit  string          // SI unit, "1" for a pure number
	Doubt *Doubt          // nil: taken as exact
}

// Doubt is the standard uncertainty of a let, as the language's forms give it.
type Doubt struct {
	StandardU   formula.Program // standard uncertainty in the let's SI unit, over lets
	Rectangular bool            // drawn from a rectangle when sampled, else normal
	AsTaken     string          // the doubt in words, for check to repeat
}

// Relation is how a requirement compares.
type Relation uint8

// The relations of the language.
const (
	Less Relation = iota
	LessEq
	Greater
	GreaterEq
	Within
	Outside
)

// Require is one requirement: Value REL Limit, or Value within/outside Limit .. Upper.
// Its programs read lets, and as argument number i the value of Measures[i].
type Require struct {
	Source   string // as written, from the expression to the limits
	Text     string
	Clause   string
	Unit     string // SI unit of value and limits
	Shown    string // unit in which the limit is written, for people; "": none
	Relation Relation
	Value    formula.Program
	Limit    formula.Program
	Upper    formula.Program // of Within and Outside
	Measures []MeasureOf[formula.Program]
}

// Collect is one value asked for without a verdict.
type Collect struct {
	Source   string
	Unit     string
	Value    formula.Program // as in Require
	Measures []MeasureOf[formula.Program]
}

// MeasureKind names a measure of the language.
type MeasureKind uint8

// The measures that this engine knows.
const (
	Peak             MeasureKind = iota // of a watch's quantity
	RMS                                 // of a watch's quantity
	Final                               // of a watch's quantity
	Highest                             // of a watch's quantity
	Lowest                              // of a watch's quantity
	TimeOfPeak                          // s
	Settle                              // s; Args[0] the share
	Reach                               // s; Args[0] the level
	Frequency                           // Hz; of mode ModeFrom .. ModeTo (the lowest of them)
	DampingRatio                        // lowest of modes ModeFrom .. ModeTo, or below Args[0] Hz
	LineTension                         // N; at Place, or the mean of Line where Place.Line < 0
	WaveSpeed                           // m/s; of Line, Segment
	StoredEnergy                        // J; of Line
	Arrival                             // s; of Watch, number Args[0]
	EnergyLeft                          // share of the most energy held
	SolverDifference                    // largest disagreement of the solvers on a watch's quantity
	LowEnd                              // the lower one-sided 95 % end of Inner
	HighEnd                             // the upper one
	Reflected                           // share of displacement; of the joint at Place, Args[0] the frequency, Hz
	Passed                              // share of displacement; likewise
	Absorbed                            // share of power; likewise
	Taken                               // share of power; of the support at Place, Args[0] the frequency, Hz
	SteadyResponse                      // amplitude of a watch's quantity per unit of Excite; Args[0] the frequency, Hz
	Sag                                 // m; at Place, or the deepest of Line
	SagPlace                            // m from the start of Line
	TakeUp                              // m; of Line, Args[0] the tension, N
	WarmTension                         // N; as LineTension, Args[0] the temperature, K
	Scruton                             // of Line, mode ModeFrom; Args[0] the density, kg/m^3
)

// MeasureOf is one measure with what it is taken of.
type MeasureOf[V any] struct {
	Kind     MeasureKind
	Source   string // as written, such as peak(mid.displacement)
	Watch    int    // -1 where none
	Quantity Quantity
	Line     int // -1: not said
	Segment  int // -1: not said
	HasPlace bool
	Place    PlaceOf[V]
	ModeFrom int // 1-based; 0 with Below
	ModeTo   int
	Below    bool   // modes below Args[0] Hz
	Excite   string // of SteadyResponse
	After    bool   // of the shares of a joint: the wave comes from after it
	Args     []V
	Inner    *InnerOf[V] // of LowEnd and HighEnd
}

// InnerOf is the expression inside low(...) or high(...); its argument number i
// is the value of its own Measures[i].
type InnerOf[V any] struct {
	Value    formula.Program
	Measures []MeasureOf[V]
}

// Measure is a bound measure.
type Measure = MeasureOf[float64]

// Network is a scenario in SI numbers for one set of values of the lets.
type Network struct {
	Model
	Values []float64 // of the lets, in the template's order
}
