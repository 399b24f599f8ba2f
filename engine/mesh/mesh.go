package mesh

import (
	"math"

	"github.com/tautspan/tautspan/engine/scenario"
)

// Mesh is the network in SI numbers.
type Mesh struct {
	Nodes    []Node
	Pieces   []Piece
	Links    []Link
	Drawn    []Drawn
	Pushes   []Push
	Presses  []Press
	Rolls    []Roll
	Channels []Channel
	Lines    []Line
	Timing   Timing
	// Jump is the lowest order of time or space derivative of the displacement
	// that may jump somewhere (0: the displacement itself, 1: velocity and
	// slope, as after a pluck, 2: acceleration, ...; SmoothJump: none).
	// It follows from the excitations alone. On a stiff line a released pluck
	// leaves velocity and moment continuous: 2.
	Jump int
	// Band is an estimate of the highest frequency of note that the
	// excitations feed in, Hz; 0 where they have none of their own (a pluck).
	Band float64
	// BandCut tells that the excitations reach above Band: they are shorter than
	// level 0 is asked to resolve.
	BandCut bool
	// Source is what the mesh was built from, for whoever must build it again in
	// another process.
	Source *scenario.Network
}

// SmoothJump is the value of Mesh.Jump for data without jumps.
const SmoothJump = 9

// Timing is the time grid that all solvers report on: t_i = i*Every for
// i = 0 .. Rows-1.
type Timing struct {
	Every float64 // s
	Rows  int
}

// End is the last time of the grid, s.
func (t Timing) End() float64 { return t.Every * float64(t.Rows-1) }

// Node is a point of the network. Mass, Spring and Dashpot act to ground.
// A node without pieces (a hung mass) is reached by links only.
type Node struct {
	Name      string  // path such as line.stay.clamp
	Line      int     // index into Lines; -1 for a hung mass
	X         float64 // m along its line
	Fixed     bool
	Motion    *Motion // prescribed displacement; nil: none
	Mass      float64 // kg
	Spring    float64 // N/m
	Dashpot   float64 // N s/m, without bracket; absorbing ends are counted in
	Brackets  []Maxwell
	Absorbing bool    // the end's Dashpot holds exactly the impedance of its piece
	Fitting   bool    // carries something: a watched force is then that on the fitting
	Start     float64 // m, displacement at t = 0
	StartRate float64 // m/s, velocity at t = 0 (of the pieces that meet there)
	Support   bool
	Clamped   bool    // does not turn; only where a piece that meets here has bending
	Rotary    float64 // N m/rad, to ground, against turning; likewise
	Hinge     bool    // the pieces that meet here turn each on their own, without moment
	Inertia   float64 // kg m^2, against turning; only where a piece that meets here has bending
	// SpringLoss is the loss factor of Spring: K(1+i eta) at positive frequencies.
	SpringLoss float64
	Benches    []*Bench
	Laws       []Law // to ground, not linear
}

// Maxwell is a spring and a dashpot in series, to ground: a dashpot behind a
// bracket that gives. Force on the node -K(u-q), with C q' = K(u-q).
type Maxwell struct {
	K     float64 // N/m
	C     float64 // N s/m
	Start float64 // m, q at t = 0 (relaxed: equal to the node's Start)
}

// Motion is a prescribed displacement of a node with its first two derivatives.
type Motion struct {
	Displacement func(t float64) float64 // m
	Velocity     func(t float64) float64 // m/s
	Breaks       []float64               // s
}

// Piece is a uniform stretch of line between two nodes.
type Piece struct {
	Line, Segment int
	From, To      int     // nodes, in walking order
	X0            float64 // m, where it starts along its line
	S0            float64 // m, where it starts in its segment
	Length        float64 // m
	MassPerLength float64 // kg/m
	Tension       float64 // N
	Viscous       float64 // N s/m^2
	TensionRise   float64 // N/m, dT/dx; Tension is that at the piece's start
	Bending       float64 // EI, N m^2
	Internal      float64 // s, Kelvin-Voigt loss of the bending
	// TensionLoss and BendingLoss are hysteretic loss factors: T(1+i eta) and
	// EI(1+i eta) at positive frequencies.
	TensionLoss float64
	BendingLoss float64
	Law         *Law // per length; nil: none
	// Start is the displacement at t = 0 and StartRate the velocity, as
	// functions of the distance from the piece's start, m; nil means 0.
	Start func(s float64) float64
	// Given is the part of Start that is no static shape: that of `start`
	// statements; nil means 0.
	Given     func(s float64) float64
	StartRate func(s float64) float64
	Marks     []Mark // sorted by At
}

// WaveSpeed is sqrt(T/m), m/s.
func (p *Piece) WaveSpeed() float64 { return math.Sqrt(p.Tension / p.MassPerLength) }

// Impedance is sqrt(T m), N s/m.
func (p *Piece) Impedance() float64 { return math.Sqrt(p.Tension * p.MassPerLength) }

// TravelTime is L/c, s.
func (p *Piece) TravelTime() float64 { return p.Length / p.WaveSpeed() }

// MarkKind says why a place inside a piece matters.
type MarkKind uint8

// A kink is a jump in slope of the start shape, a load a point force, a watch a
// place that is only read, an edge the border of a stretch that something acts
// along.
const (
	MarkWatch MarkKind = iota
	MarkKink
	MarkLoad
	MarkEdge
)

// Mark is a place inside a piece.
type Mark struct {
	Kind MarkKind
	At   float64 // m from the piece's start, strictly inside
}

// Spot is a place of the network: a node, or a distance into a piece.
type Spot struct {
	Node  int     // -1: inside a piece
	Piece int     // -1: at a node
	At    float64 // m from the piece's start
}

// Link is a spring and a dashpot side by side between two nodes: a tie, or the
// hanger of a tuned mass. Force on A is K(u_B-u_A) + C(v_B-v_A).
type Link struct {
	Name       string
	A, B       int
	Spring     float64 // N/m
	Dashpot    float64 // N s/m
	SpringLoss float64 // loss factor of Spring
	// Through is the give of a bracket in series with the dashpot, N/m; 0: rigid.
	Through float64
	// Slack tells that the link pulls, never pushes. A is its upper end: it acts
	// only while u_A > u_B, spring and dashpot alike, and its force on A is never
	// upward.
	Slack bool
}

// Drawn is a force with which a pluck holds the line in the static part of the
// start shapes; all of them end at t = 0 (a pluck that is held on is a Push from
// then).
type Drawn struct {
	At    Spot
	Force float64 // N
}

// Push is a point force.
type Push struct {
	Name  string
	At    Spot
	Force scenario.History // N
}

// Press is a force per length on consecutive pieces or part of one.
type Press struct {
	Name  string
	Parts []Part
	Force scenario.History // N/m; its x is measured from the stretch's start
}

// Part is a stretch of one piece. X of a point s in the piece is Origin + s.
type Part struct {
	Piece    int
	From, To float64 // m from the piece's start
	Origin   float64 // m, place of the piece's start on the stretch's own x axis
}

// Roll is a constant force that travels along a line in walking order. It acts
// while it is on the line.
type Roll struct {
	Name     string
	Line     int
	Speed    float64 // m/s
	Force    float64 // N, positive upward
	From     float64 // m along the line
	Starting float64 // s
	// A load with a mass of its own rides on a spring and a dashpot; Force is then
	// its weight and what else it carries. All 0: a constant force.
	Mass    float64 // kg
	Spring  float64 // N/m
	Dashpot float64 // N s/m
}

// Line says which pieces make a line.
type Line struct {
	Name    string
	Pieces  []int // in walking order
	Length  float64
	Sag     *Sag     // nil: none
	Stretch *Stretch // nil: none
}

// Sag is the shallow-cable term: the line's own stretch between its ends makes
// an extra tension
//
//	h = G (sum over pieces of w_p * integral of u dx + sum over nodes of w_j u_j),
//
// the same along the line, which pulls back by w_p h per length and w_j h at
// nodes; G = 1/(sum of Le/EA over the segments + sum of 1/KA over supports that
// give along the line), w_p = m g cos(incline)/H,
// w_j = M g cos(incline)/H. Stored energy h^2/(2G). For a uniform line
// G w^2 = kappa = (EA/Le)(m g/H)^2 and lambda^2 = kappa L^3/H.
//
// Source: Irvine, Caughey, Proc. R. Soc. Lond. A 341 (1974) 299-315 (from
// memory); several segments and masses derived by the same equilibrium.
type Sag struct {
	Stiffness float64         // G, N/m
	Pieces    []float64       // w_p, 1/m, in the order of Line.Pieces
	Nodes     map[int]float64 // w_j by node, 1
}

// Channel is one recorded quantity: at one spot, or along a line at several.
type Channel struct {
	Watch    string
	Quantity scenario.Quantity
	Spots    []Spot
	X        []float64 // m along the line, of each spot
	Line     int
	Along    bool // a picture over x and t: recorded every FieldStride rows
	// Means is how often the record is averaged over one output interval
	// (see the package solver): 0 where the quantity is continuous, 1 where it
	// may jump, 2 where it may be a jump's derivative.
	Means int
}

// Name is the channel's name in results, watch.quantity.
func (c *Channel) Name() string { return c.Watch + "." + c.Quantity.String() }

// FieldRows is the number of rows of a picture over x and t, and its stride in
// rows of the time grid.
func (m *Mesh) FieldRows() (rows, stride int) {
	stride = max(1, (m.Timing.Rows-1+maxFieldRows-2)/(maxFieldRows-1))
	return (m.Timing.Rows-1)/stride + 1, stride
}

// A picture is for looking at: more rows and places than a page has dots tell nothing.
const (
	maxFieldRows   = 1200
	maxFieldPlaces = 161
)

// Attached lists for each node the pieces that start or end there.
func (m *Mesh) Attached() [][]Attachment {
	out := make([][]Attachment, len(m.Nodes))
	for i, p := range m.Pieces {
		out[p.From] = append(out[p.From], Attachment{Piece: i})
		out[p.To] = append(out[p.To], Attachment{Piece: i, End: true})
	}
	return out
}

// Attachment is one end of a piece at a node.
type Attachment struct {
	Piece int
	End   bool // the node is the piece's To
}
