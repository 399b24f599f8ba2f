package fronts

import (
	"fmt"
	"math"
	"strings"

	"github.com/tautspan/tautspan/engine/mesh"
)

// Options say how far a trace goes.
type Options struct {
	// End is the last time of interest, s; 0: the end of the mesh's time grid.
	End float64
	// Prune is the share of the largest amplitude that an excitation starts below
	// which its fronts are dropped; 0 follows everything down to rounding.
	Prune float64
	// Most limits the number of meetings (fronts at a node at one instant);
	// 0: DefaultMost.
	Most int
	// StartName is the name under which fronts of the start shape and start
	// velocity are listed; "": the word start.
	StartName string
}

// The limits of a trace; common practice, no source. A meeting with shapes costs
// about 1 kB, so that MostMeetings stays within a few GB at the very worst.
const (
	DefaultPrune = 1e-3      // share of the largest amplitude
	DefaultMost  = 20_000    // meetings
	MostMeetings = 1_000_000 // largest Options.Most
)

// Ledger is the result of a trace.
type Ledger struct {
	Arrivals []Arrival // by watch in the order of the mesh's channels, then by time
	Accounts []Account // one per excitation and quantity

	PrunedBelow   float64 // share of the largest amplitude of the excitation
	LostAmplitude float64 // largest over the accounts of dropped amplitude / largest amplitude
	ReachedTime   float64 // s; every front up to here is listed; Options.End unless the limit came first
	Meetings      int     // scattered or dropped
	Window        float64 // s, length of the shapes of smeared fronts; 0 where nothing smears
	Blur          float64 // s, over which the amplitude of a smeared front is a mean
	Notes         []string
}

// Arrival is one front at one watched place, or several that come at one instant.
type Arrival struct {
	Watch    string
	Excite   string
	Number   int // from 1, per watch in order of time
	Time     float64
	Quantity string // displacement, velocity, acceleration; impulse, force, force rate at a held place
	Unit     string
	// Amplitude is the jump, after less before, in Unit; see the package comment
	// for smeared fronts. At a held place nothing moves and it is the jump of the
	// force that the line exerts on the support: force for a velocity front, its
	// time integral (impulse) for a displacement front, its rate for an
	// acceleration front.
	Amplitude float64
	Sign      int // of Amplitude
	// Path names the excitation, the nodes met in order and the watch; of merged
	// fronts it is that of the strongest. Long paths are shortened in the middle.
	Path      []string
	Merged    int // number of paths that came together, at least 1; saturates at 2^30
	Smeared   bool
	Onset     float64 // Unit, the jump at the very edge
	Settled   float64 // Unit, at the end of the window
	PeakAfter float64 // s after Time, when it first comes to 99 % of Amplitude
}

// Account is the energy account of the fronts of one excitation in one quantity
// q: sums of Z q^2 over the fronts' edges, in N s/m times the square of the
// quantity's unit (for velocity fronts the power that their steps carry, W).
// Edges scatter without smear, so that it closes on every network:
//
//	Input = Absorbed + Damped + Lost + Travelling.
type Account struct {
	Excite   string
	Quantity string
	Unit     string

	Largest       float64 // largest amplitude started
	PrunedBelow   float64 // Prune * Largest, at least 1e-12 * Largest (rounding)
	LostAmplitude float64 // sum of the dropped |a|

	Input      float64 // started; where a launch joins a passing front, with what both make together
	Absorbed   float64 // by dashpots
	Damped     float64 // by viscous loss on the way
	Lost       float64 // dropped
	Travelling float64 // on its way when the trace ended
}

// Gap is what the account does not explain, of rounding size.
func (a Account) Gap() float64 { return a.Input - a.Absorbed - a.Damped - a.Lost - a.Travelling }

// At is the k-th arrival at a watch, counted from 1, among those at least as
// strong as share times the first of the same excitation and quantity there.
func (l *Ledger) At(watch string, k int, share float64) (Arrival, bool) {
	type series struct{ excite, quantity string }
	first := map[series]float64{}
	n := 0
	for _, a := range l.Arrivals {
		if a.Watch != watch {
			continue
		}
		key := series{a.Excite, a.Quantity}
		f, seen := first[key]
		if !seen {
			f = math.Abs(a.Amplitude)
			first[key] = f
		}
		if math.Abs(a.Amplitude) < share*f {
			continue
		}
		if n++; n == k {
			return a, true
		}
	}
	return Arrival{}, false
}

// Trace follows every front of the mesh's excitations to every place that is
// watched (watches along a stretch are left out) and lists its arrivals. The
// mesh is not changed. Errors: options out of range, a mesh without travel
// times, or a hung node that neither mass, dashpot nor line holds.
func Trace(m *mesh.Mesh, opt Options) (*Ledger, error) {
	if opt.End == 0 {
		opt.End = m.Timing.End()
	}
	if opt.Most == 0 {
		opt.Most = DefaultMost
	}
	if opt.StartName == "" {
		opt.StartName = "start"
	}
	if beyond := m.Unknown(0); len(beyond) > 0 {
		return nil, fmt.Errorf("the pulse ledger %s", strings.Join(beyond, "; "))
	}
	switch {
	case !(opt.End >= 0) || math.IsInf(opt.End, 0):
		return nil, fmt.Errorf("fronts: end time %v s", opt.End)
	case !(opt.Prune >= 0 && opt.Prune < 1):
		return nil, fmt.Errorf("fronts: pruning share %v is not in 0 .. 1", opt.Prune)
	case opt.Most < 0 || opt.Most > MostMeetings:
		return nil, fmt.Errorf("fronts: limit of %d meetings is not in 1 .. %d", opt.Most, MostMeetings)
	}
	net, err := newNetwork(m, opt.End)
	if err != nil {
		return nil, err
	}
	src := collect(net, opt)
	if len(net.watches) == 0 {
		net.note("no place is watched: there is nothing to list")
	}
	t := newTrace(net, src, opt)
	t.run()
	return t.ledger(), nil
}

// orders of fronts: the time derivative of the displacement that jumps.
const (
	ofDisplacement = iota
	ofVelocity
	ofAcceleration
	orders
)

var frontNames = [orders][2]string{{"displacement", "m"}, {"velocity", "m/s"}, {"acceleration", "m/s^2"}}
var heldNames = [orders][2]string{{"impulse", "N*s"}, {"force", "N"}, {"force rate", "N/s"}}
