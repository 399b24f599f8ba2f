package author

import "fmt"

// Problem is a network of lines whose motion a solver is to compute: pieces of
// uniform line between nodes, and what sits at the nodes.
//
// On a piece, with c viscous loss per length,
//
//	m u_tt + c u_t = (T u_x)_x - (EI (u_xx + tau u_xxt))_xx + q
//
// and at a node M u_tt + C u_t + K u equals the outer forces and what the pieces
// exert. Displacement u is transverse, in one direction for the whole network.
type Problem struct {
	Nodes    []Node
	Pieces   []Piece
	Links    []Link
	Pushes   []Push
	Presses  []Press
	Rolls    []Roll
	Channels []Channel
	Lines    []Line
	Every    float64 // s; records have Rows rows at 0, Every, 2 Every, ...
	Rows     int
	// A channel along a line has FieldRows rows, one every FieldStride rows.
	FieldRows, FieldStride int
	// Jump is the lowest order of derivative of u that may jump (1: velocity and
	// slope, as after a pluck; 9: none).
	Jump int
	Band float64 // Hz, the highest frequency of note that the loads feed in; 0: not known
	// Features are what the problem has beyond taut strings with point fittings:
	// bending, varying-tension, sag, internal-loss, and names that later versions
	// add. A solver must refuse those that it does not know: see Beyond.
	Features []string

	source Source
}

// Beyond lists the features of the problem that are not among those known, in
// words for Refuses.
func (p *Problem) Beyond(known ...string) []string {
	var out []string
	for _, f := range p.Features {
		found := false
		for _, k := range known {
			found = found || k == f
		}
		if !found {
			out = append(out, "does not represent "+f)
		}
	}
	return out
}

// Node is a point of the network.
type Node struct {
	Name      string
	Line      int     // -1: a hung mass, reached by links only
	X         float64 // m along its line
	Fixed     bool
	Moved     bool      // by a prescribed displacement: ask Motion
	Breaks    []float64 // s, at which that motion or a derivative may jump
	Mass      float64   // kg
	Spring    float64   // N/m, to ground
	Dashpot   float64   // N s/m, to ground; of an absorbing end: its impedance
	Brackets  []Bracket
	Absorbing bool
	Fitting   bool    // a watched force here is that on the fitting
	Support   bool    // an end of a line
	Start     float64 // m, displacement at t = 0
	StartRate float64 // m/s
	Clamped   bool    // does not turn; where a piece has bending
	Rotary    float64 // N m/rad, to ground
	Hinge     bool
	Inertia   float64 // kg m^2
}

// Bracket is a spring and a dashpot in series, to ground.
type Bracket struct {
	Spring, Dashpot float64 // N/m, N s/m
	Start           float64 // m, of the point between them at t = 0
}

// Piece is a uniform stretch of line.
type Piece struct {
	Line, From, To int // nodes in walking order
	X0, Length     float64
	MassPerLength  float64 // kg/m
	Tension        float64 // N, at its start
	TensionRise    float64 // N/m
	Viscous        float64 // N s/m^2
	Bending        float64 // EI, N m^2
	Internal       float64 // s
	HasStart       bool    // it starts displaced: ask Start
	HasStartRate   bool    // it starts in motion: ask StartRate
	Marks          []Mark
}

// Mark is a place inside a piece that matters: a kink of the start shape, a
// point load, a watch, the edge of a stretch that is pressed.
type Mark struct {
	Kind string  // kink, load, watch, edge
	At   float64 // m from the piece's start
}

// Link is a spring and a dashpot side by side between two nodes.
type Link struct {
	Name            string
	A, B            int
	Spring, Dashpot float64
}

// Spot is a node, or a place inside a piece.
type Spot struct {
	Node, Piece int     // one of them is -1
	At          float64 // m from the piece's start
}

// Push is a point force; ask PushForce.
type Push struct {
	Name   string
	At     Spot
	Breaks []float64 // s
}

// Press is a force per length; ask PressForce.
type Press struct {
	Name   string
	Parts  []Part
	Breaks []float64 // s
}

// Part is the stretch of one piece that a press acts on. The force at a distance
// s from the piece's start is asked at the place Origin + s.
type Part struct {
	Piece            int
	From, To, Origin float64
}

// Roll is a constant force that travels along a line in walking order.
type Roll struct {
	Name           string
	Line           int
	Speed          float64 // m/s
	Force          float64 // N
	From, Starting float64 // m along the line, s
}

// Line says which pieces make a line, in walking order.
type Line struct {
	Name   string
	Pieces []int
	Length float64
	// The sag term, where SagStiffness is above zero: the line's stretch makes an
	// extra tension h = SagStiffness * (sum of SagPieces[i] * integral of u over
	// piece i + sum of SagNodes[n] * u_n), which pulls back by the same weights.
	SagStiffness float64
	SagPieces    []float64
	SagNodes     map[int]float64
}

// Channel is one recorded quantity at one spot, or along a line at several.
type Channel struct {
	Watch    string
	Quantity string // displacement velocity acceleration slope force moment tension
	Spots    []Spot
	X        []float64
	Line     int
	Along    bool
	// Means is how often the record is averaged over one output interval: 0 a
	// sample at the row's time; 1 the mean over Every around it; 2 the mean of
	// such means. Before t = 0 the line goes on as it starts.
	Means int
}

// Source answers for the functions of a problem.
type Source interface {
	// Values are those of a function named by what ("start", "start_rate",
	// "motion", "motion_rate", "push", "press") and an index, at places or times;
	// of "press" the place at[i] goes with time[i].
	Values(what string, index int, at, time []float64) ([]float64, error)
}

// NewProblem joins a problem's data and the source of its functions. Authors get
// problems ready made; tests may build their own.
func NewProblem(p Problem, s Source) *Problem {
	p.source = s
	return &p
}

// Start is the displacement of a piece at t = 0, m, at distances from its start.
// Ask for many places at once: each call crosses to another process.
func (p *Problem) Start(piece int, at []float64) ([]float64, error) {
	return p.ask("start", piece, at, nil)
}

// StartRate is the velocity at t = 0, m/s.
func (p *Problem) StartRate(piece int, at []float64) ([]float64, error) {
	return p.ask("start_rate", piece, at, nil)
}

// Motion is the prescribed displacement of a node, m, at times.
func (p *Problem) Motion(node int, times []float64) ([]float64, error) {
	return p.ask("motion", node, times, nil)
}

// MotionRate is its velocity, m/s.
func (p *Problem) MotionRate(node int, times []float64) ([]float64, error) {
	return p.ask("motion_rate", node, times, nil)
}

// PushForce is a point force, N, at times.
func (p *Problem) PushForce(push int, times []float64) ([]float64, error) {
	return p.ask("push", push, times, nil)
}

// PressForce is a force per length, N/m, at place at[i] and time times[i].
func (p *Problem) PressForce(press int, at, times []float64) ([]float64, error) {
	if len(at) != len(times) {
		return nil, fmt.Errorf("%d places and %d times", len(at), len(times))
	}
	return p.ask("press", press, at, times)
}

func (p *Problem) ask(what string, index int, at, time []float64) ([]float64, error) {
	if p.source == nil {
		return nil, fmt.Errorf("this problem has no functions")
	}
	if len(at) == 0 {
		return nil, nil
	}
	v, err := p.source.Values(what, index, at, time)
	if err == nil && len(v) != len(at) {
		return nil, fmt.Errorf("asked for %d values of %s and got %d", len(at), what, len(v))
	}
	return v, err
}
