package mesh

import (
	"github.com/tautspan/tautspan/engine/formula"
	"github.com/tautspan/tautspan/engine/scenario"
)

// Law is a force that the line feels from its own motion and that is not
// linear in it: friction, a stop, or a law written out. At a node it acts to
// ground; along a piece it is a force per length.
type Law struct {
	Name     string
	Friction *Friction // one of the three is not nil
	Stop     *Stop
	Written  *Written
}

// Open tells whether the law can be solved: one that is followed step by step
// needs its plugin to run.
func (l *Law) Open() bool {
	return l.Written == nil || l.Written.Start != nil || l.Written.Force.Depth() > 0
}

// Friction is dry friction: at most Force against the motion, sticking where
// less is needed. Through is the give of its bracket, in series.
type Friction struct {
	Force   float64 // N, or N/m along a piece
	Through float64 // N/m; 0: rigid
}

// Stop is a spring that the line meets after a gap: above (Up) at u = Gap, below
// (Down) at u = -Gap, or both.
type Stop struct {
	Gap      float64 // m
	Spring   float64 // N/m
	Up, Down bool
}

// Written is a law in formulas. Its programs are bound and read, beside time
// (formula.ArgT) and place (formula.ArgX), the arguments below; state k is
// argument ArgState+k.
type Written struct {
	Force  formula.Program // N, or N/m along a piece: the force on the line
	Starts []float64       // of the states, at t = 0
	Rates  []formula.Program
	// Start, where not nil, begins a law that is followed step by step; the
	// formulas are then empty.
	Start func() (scenario.Follow, error)
}

// The arguments of a written law.
const (
	ArgU     = 2 // displacement, m
	ArgV     = 3 // velocity, m/s
	ArgState = 4 // first state
)

// Stretch makes the tension of a line grow with its motion, the same along the
// line (Kirchhoff; Carrier 1945): by Stiffness * 1/2 * integral of (du/dx)^2 dx,
// with Stiffness = 1/(sum of Le/EA). Stored beside the tension's own energy:
// Stiffness * e^2/2 with e = 1/2 * integral of (du/dx)^2 dx.
type Stretch struct {
	Stiffness float64 // N/m
}

// Bench is a damper as a bench measured it: force per velocity against
// frequency. It answers by frequency only and never beyond the table's ends.
type Bench struct {
	Name      string
	Frequency []float64    // Hz, increasing
	Impedance []complex128 // N s/m
}
