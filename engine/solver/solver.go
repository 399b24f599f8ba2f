package solver

import (
	"context"
	"errors"
	"fmt"

	"github.com/tautspan/tautspan/engine/mesh"
)

// Solver computes the motion of a network.
type Solver interface {
	// Name is the word used in scenarios and results.
	Name() string
	// Version changes whenever answers may change.
	Version() string
	// Refuses lists in the user's terms what the solver cannot represent of the
	// mesh; empty means it can.
	Refuses(m *mesh.Mesh) []string
	// Plan says what solving at a level costs, without solving.
	Plan(m *mesh.Mesh, req Request) (Plan, error)
	// Solve computes the records. It stops within a fraction of a second when
	// ctx ends and returns ctx.Err(). progress may be nil; it takes the share
	// done, 0 to 1, from the calling goroutine only. m is not changed.
	Solve(ctx context.Context, m *mesh.Mesh, req Request, progress func(share float64)) (*Result, error)
}

// Request asks for one solution.
type Request struct {
	// Level is the refinement: 0, 1, 2, ... Each level divides the solver's
	// step by Result.Ratio with everything else alike, so that successive levels
	// show the order.
	Level int
	// Effort scales level 0: 0 quick, 1 normal, 2 thorough.
	Effort int
	// Freeze, where not nil, is the Layout of an earlier result of the same
	// solver on a mesh of the same topology: the same discretisation is to be
	// used again, so that a change of the answer is a change of the input's
	// making. Solvers that cannot freeze ignore it and say so in Result.Frozen.
	Freeze any
}

// Plan is what a solution costs.
type Plan struct {
	Cells int   // or degrees of freedom, or stored samples
	Steps int   // time steps
	Work  int64 // cell-steps, or their like: about 1 ns to 2 ns each on one core
	Bytes int64 // memory held while solving, results included
}

// Result is one solution.
type Result struct {
	Plan   Plan
	Order  float64 // order expected on smooth data; 0: faster than any order (spectral)
	Ratio  float64 // step ratio between successive levels
	Layout any     // discretisation, for Request.Freeze
	Frozen bool
	// Series[c][k] is the record of spot k of channel c: Timing.Rows values, or
	// for channels along a line FieldRows values.
	Series [][][]float64
	Energy Energy
	// Neglect is a share of every record's size by which it may be off for what the
	// solver knowingly leaves out of the mesh, whatever the level: it is added to
	// the error bars. 0: nothing is left out.
	Neglect float64
	// Notes are remarks for the log and the report (a floor on accuracy, a
	// refused fourth order, ...), each one sentence.
	Notes []string
}

// Energy is the account of one run, J. What the solver cannot explain is
// Start + Work - Lost - End.
type Energy struct {
	Start float64 // stored at t = 0
	End   float64 // stored at the end
	Work  float64 // done by loads and moving supports
	Lost  float64 // taken by dashpots, losses and absorbing ends
	Most  float64 // largest stored at any time
	// Unkept tells that the solver keeps no account: only Start is meant, and Most
	// is no less than it.
	Unkept bool
}

// Unaccounted is the account's gap, J.
func (e Energy) Unaccounted() float64 { return e.Start + e.Work - e.Lost - e.End }

// ErrBudget is wrapped by errors that say a level does not fit a limit.
var ErrBudget = errors.New("does not fit the limits")

// FaultError says that a solution went wrong (not finite, unstable); it names
// the solver.
type FaultError struct {
	Solver string
	What   string
}

// Error says what went wrong.
func (e *FaultError) Error() string { return fmt.Sprintf("solver %s: %s", e.Solver, e.What) }

// NewSeries allocates the records of a mesh.
func NewSeries(m *mesh.Mesh) [][][]float64 {
	out := make([][][]float64, len(m.Channels))
	fieldRows, _ := m.FieldRows()
	for c := range m.Channels {
		ch := &m.Channels[c]
		rows := m.Timing.Rows
		if ch.Along {
			rows = fieldRows
		}
		flat := make([]float64, rows*len(ch.Spots))
		out[c] = make([][]float64, len(ch.Spots))
		for k := range ch.Spots {
			out[c][k] = flat[k*rows : (k+1)*rows : (k+1)*rows]
		}
	}
	return out
}
