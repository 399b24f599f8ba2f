package scenario

import "github.com/tautspan/tautspan/engine/formula"

// Over is a let and the range over which something is sought, in its SI unit.
type Over struct {
	Let      int
	From, To float64
	Shown    string // unit in which the range is written, for people; "": none
}

// Best asks at which value of a let an expression is largest or smallest.
type Best struct {
	Source   string // the expression as written
	Unit     string
	Largest  bool
	Over     Over
	Value    formula.Program // as in Require
	Measures []MeasureOf[formula.Program]
}

// Meet asks at which values of a let two expressions are equal.
type Meet struct {
	Source, With string // as written, with the number that was picked from a range
	Unit         string
	Over         Over
	Value, Other formula.Program // over the same Measures
	Measures     []MeasureOf[formula.Program]
}

// Distribution says how a varied let is drawn.
type Distribution uint8

// A grid is not drawn: each of its values is a case. Values of a drawn let are
// mean and standard deviation (DrawNormal; DrawLognormal likewise, of the let itself),
// the ends (DrawUniform), or what it may be, each as likely (DrawOneOf).
const (
	Grid Distribution = iota
	DrawNormal
	DrawUniform
	DrawLognormal
	DrawOneOf
)

// Vary makes a let take several values.
type Vary struct {
	Let    int
	Draw   Distribution
	Values []float64
	Shown  string // unit in which they are written; "": none
}

// Sample asks for drawn doubts, or says how many cases are drawn.
type Sample struct {
	Count int
	Seed  uint64
}
