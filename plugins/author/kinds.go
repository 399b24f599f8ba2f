package author

import (
	"context"
	"errors"
	"fmt"
)

// Solver computes the motion of a problem.
type Solver interface {
	About() About
	// Refuses lists in the user's words what of the problem the solver cannot
	// represent; empty: it can.
	Refuses(p *Problem) []string
	// Plan says what a level costs, without computing; wrap ErrBudget where it
	// cannot be done at all.
	Plan(p *Problem, w Want) (Plan, error)
	// Solve fills the records. It ends soon after ctx does. progress may be
	// called from the same goroutine with the share done.
	Solve(ctx context.Context, p *Problem, w Want, out *Records, progress func(share float64)) (Outcome, error)
}

// ErrBudget says that a level does not fit.
var ErrBudget = errors.New("does not fit")

// Want asks for one solution. Each level, from 0, divides the solver's step by
// Outcome.Ratio with everything else alike: that is how tautspan tells its error.
type Want struct {
	Level  int
	Effort int // 0 quick, 1 normal, 2 thorough: scales level 0
}

// Plan is what a solution costs.
type Plan struct {
	Cells int
	Steps int
	Work  int64 // cell-steps, about 1 ns each
	Bytes int64
}

// Outcome is what goes with the records.
type Outcome struct {
	Plan   Plan
	Order  float64 // order of the error expected on smooth data; 0: faster than any
	Ratio  float64 // of steps between levels; above 1
	Energy Energy
	Notes  []string
}

// Energy is the account of a solution, J. Start + Work - Lost - End is what the
// solver cannot explain, and is shown.
type Energy struct{ Start, End, Work, Lost, Most float64 }

// Records are the answers: one row of numbers for every spot of every channel.
type Records struct {
	rows func(channel, spot int) []float64
}

// Row is the record to fill of a spot of a channel: Rows values, or FieldRows for
// a channel along a line.
func (r *Records) Row(channel, spot int) []float64 { return r.rows(channel, spot) }

// NewRecords makes the empty records of a problem.
func NewRecords(p *Problem) *Records {
	all := make([][][]float64, len(p.Channels))
	for i, c := range p.Channels {
		rows := p.Rows
		if c.Along {
			rows = p.FieldRows
		}
		for range c.Spots {
			all[i] = append(all[i], make([]float64, rows))
		}
	}
	return &Records{rows: func(channel, spot int) []float64 { return all[channel][spot] }}
}

// Load is a force that depends on time and place only.
type Load interface {
	About() About
	// Prepare says how finely the load must be sampled: the step between
	// instants, s, and, along a stretch, the spacing of places, m. Between them
	// it is taken as straight.
	Prepare(q LoadWant) (step, spacing float64, err error)
	// Evaluate fills force[place] at the instants t, s: N at one place, N/m along
	// a stretch. Instants come in order, in blocks; the same want gives the same
	// forces.
	Evaluate(ctx context.Context, q LoadWant, t []float64, force [][]float64) error
}

// LoadWant is the use of a load in a scenario.
type LoadWant struct {
	Parameters map[string]float64 // in the units that About names
	Along      bool               // along a stretch, else at one place
	Length     float64            // m, of the stretch
	Duration   float64            // s, of the run
	Places     []float64          // m from the stretch's start; of Evaluate
}

// Law is a force on the line from its own displacement and velocity at a joint,
// or per length along a segment.
type Law interface {
	About() About
	// Written gives the law, for these values of its parameters, as the body of a
	// law statement of the scenario language without its takes clause, such as
	//
	//	force = -hold * v / sqrt(v^2 + soft^2)
	//
	// with the parameters as names. "" : it cannot be written, and is followed step by step.
	Written(parameters map[string]float64) (string, error)
	// Follow starts one use of the law from rest.
	Follow(parameters map[string]float64) (Follower, error)
}

// Follower is one use of a law, step by step.
type Follower interface {
	// Force is that on the line, N or N/m, at time t with displacement u and
	// velocity v. accepted tells that the step is settled and states move on;
	// else it is a trial from the last accepted step.
	Force(t, u, v float64, accepted bool) (float64, error)
}

// WrittenLaw is a law that needs no steps: its text does.
type WrittenLaw struct {
	Is   About
	Text string // body of a law statement; a state stands on a line of its own
}

// About is the description.
func (w WrittenLaw) About() About { return w.Is }

// Written is the text.
func (w WrittenLaw) Written(map[string]float64) (string, error) { return w.Text, nil }

// Follow is refused.
func (w WrittenLaw) Follow(map[string]float64) (Follower, error) {
	return nil, fmt.Errorf("law %s is written and not followed step by step", w.Is.Name)
}
