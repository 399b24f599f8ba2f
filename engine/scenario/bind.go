package scenario

import (
	"fmt"
	"math"

	"github.com/tautspan/tautspan/engine/formula"
)

// PathError is a value that cannot stand, told by the path of the thing it
// belongs to, such as line.stay.lower.length. The language side turns the path
// into a place in the text.
type PathError struct {
	Path string
	What string
}

// Error says what is wrong and where.
func (e *PathError) Error() string { return e.Path + ": " + e.What }

// Values evaluates the lets. An override replaces a let's own expression, and
// lets that read it follow. An override of a name that is no let, or a let whose
// value does not exist, is a *PathError.
func (t *Template) Values(override map[string]float64) ([]float64, error) {
	values := make([]float64, len(t.Lets))
	used := 0
	for i := range t.Lets {
		let := &t.Lets[i]
		if v, ok := override[let.Name]; ok {
			values[i] = v
			used++
		} else {
			values[i] = let.Value.Eval(values, nil)
		}
		if math.IsNaN(values[i]) || math.IsInf(values[i], 0) {
			return nil, &PathError{"let." + let.Name, "has no finite value"}
		}
	}
	if used != len(override) {
		for name := range override {
			if t.LetNamed(name) < 0 {
				return nil, &PathError{"let." + name, "is no let of this scenario"}
			}
		}
	}
	return values, nil
}

// LetNamed is the index of a let, or -1.
func (t *Template) LetNamed(name string) int {
	for i := range t.Lets {
		if t.Lets[i].Name == name {
			return i
		}
	}
	return -1
}

// StandardU is the standard uncertainty of each let at the given values, 0
// where it is taken as exact.
func (t *Template) StandardU(values []float64) []float64 {
	u := make([]float64, len(t.Lets))
	for i := range t.Lets {
		if d := t.Lets[i].Doubt; d != nil {
			u[i] = math.Abs(d.StandardU.Eval(values, nil))
		}
	}
	return u
}

// binder evaluates template numbers and keeps the first fault.
type binder struct {
	values []float64
	err    *PathError
	rows   int // joints made by `every`
}

func (b *binder) fail(path, what string) {
	if b.err == nil {
		b.err = &PathError{path, what}
	}
}

// num is a number that may be anything finite.
func (b *binder) num(p formula.Program, path string) float64 {
	v := p.Eval(b.values, nil)
	if math.IsNaN(v) || math.IsInf(v, 0) {
		b.fail(path, "has no finite value")
		return 0
	}
	return v
}

// pos is a number that must be greater than 0.
func (b *binder) pos(p formula.Program, path string) float64 {
	v := b.num(p, path)
	if v <= 0 {
		b.fail(path, fmt.Sprintf("must be greater than zero, and is %g", v))
	}
	return v
}

// nonneg is a number that must not be negative.
func (b *binder) nonneg(p formula.Program, path string) float64 {
	v := b.num(p, path)
	if v < 0 {
		b.fail(path, fmt.Sprintf("must not be negative, and is %g", v))
	}
	return v
}

// Bind gives the network for values of the lets (from Values, or moved from
// there). Every number is checked again, since a let may have moved it out of
// its range: a *PathError names the first that cannot stand.
func (t *Template) Bind(values []float64) (*Network, error) {
	b := &binder{values: values}
	net := &Network{Values: values}
	net.Lines = make([]Line, len(t.Model.Lines))
	for i := range t.Model.Lines {
		net.Lines[i] = b.line(&t.Model.Lines[i])
	}
	if b.err != nil {
		return nil, b.err
	}
	for i := range t.Model.Ties {
		tie := &t.Model.Ties[i]
		path := "tie." + tie.Name
		net.Ties = append(net.Ties, TieOf[float64]{
			Name: tie.Name,
			From: b.place(net, tie.From, path+".from"), To: b.place(net, tie.To, path+".to"),
			Spring: b.nonneg(tie.Spring, path+".spring"), Dashpot: b.nonneg(tie.Dashpot, path+".dashpot"), Mass: b.nonneg(tie.Mass, path+".mass"),
			SpringLoss: b.nonneg(tie.SpringLoss, path+".spring"), Slack: tie.Slack, Bracket: tie.Bracket, Through: b.through(tie.Bracket, tie.Through, path),
		})
	}
	for i := range net.Ties {
		if tie := &net.Ties[i]; b.err == nil && tie.From == tie.To {
			b.fail("tie."+tie.Name, "joins a place to itself")
		}
	}
	b.excitations(net, &t.Model)
	for i := range t.Model.Watches {
		w := &t.Model.Watches[i]
		out := Watch{Name: w.Name, Along: w.Along, Span: w.Span, Quantities: w.Quantities, Mass: b.nonneg(w.Mass, "watch."+w.Name+".mass")}
		if !w.Along {
			out.At = b.place(net, w.At, "watch."+w.Name+".at")
		}
		net.Watches = append(net.Watches, out)
	}
	b.run(net, &t.Model.Run)
	if b.err != nil {
		return nil, b.err
	}
	return net, nil
}

func (b *binder) line(l *LineOf[formula.Program]) Line {
	out := Line{Name: l.Name, Sag: l.Sag, TensionSaid: l.TensionSaid, Warm: l.Warm, Weighted: l.Weighted, Stretch: l.Stretch, Incline: b.num(l.Incline, "line."+l.Name+".incline"), Nodes: make([]Node, len(l.Nodes)), Segments: make([]Segment, len(l.Segments))}
	base := "line." + l.Name + "."
	out.SaidTension, out.Temperature = b.num(l.SaidTension, base+"tension"), b.nonneg(l.Temperature, base+"at")
	for i := range l.Nodes { // in walking order, so that the first fault is the first in the text
		out.Nodes[i] = b.node(&l.Nodes[i], base)
		if i < len(l.Segments) {
			out.Segments[i] = b.segment(&l.Segments[i], base)
		}
	}
	return out
}

func (b *binder) segment(s *SegmentOf[formula.Program], base string) Segment {
	path := base + s.Name + "."
	out := Segment{
		Name: s.Name, Stock: s.Stock,
		Length:        b.pos(s.Length, path+"length"),
		MassPerLength: b.pos(s.MassPerLength, path+"mass"),
		Tension:       b.num(s.Tension, path+"tension"),
		TensionRise:   b.num(s.TensionRise, path+"tension"),
		Bending:       b.nonneg(s.Bending, path+"bending"),
		Internal:      b.nonneg(s.Internal, path+"loss"),
		Axial:         b.nonneg(s.Axial, path+"axial"),
		Viscous:       b.nonneg(s.Viscous, path+"loss"),
		Strength:      b.nonneg(s.Strength, path+"strength"),
		Diameter:      b.nonneg(s.Diameter, path+"diameter"),
		Expansion:     b.num(s.Expansion, path+"expansion"),
		TensionLoss:   b.nonneg(s.TensionLoss, path+"loss"),
		BendingLoss:   b.nonneg(s.BendingLoss, path+"loss"),
	}
	if s.Law != nil {
		law := b.law(s.Law, path)
		out.Law = &law
	}
	b.every(s, &out, path)
	b.tension(&out, path+"tension")
	return out
}

// tension checks that the tension is a pull all along a segment. An inclined
// line may come down to none at an end (a rope that hangs free), which rounding
// must not turn into a push.
func (b *binder) tension(s *Segment, path string) {
	start, end := s.Tension, s.Tension+s.TensionRise*s.Length
	if s.TensionRise == 0 {
		if start <= 0 {
			b.fail(path, fmt.Sprintf("must be greater than zero, and is %g", start))
		}
		return
	}
	none := placeSlack * math.Max(math.Abs(start), math.Abs(end))
	if math.Abs(start) <= none {
		s.Tension = 0
	}
	switch {
	case start < -none:
		b.fail(path, fmt.Sprintf("must be greater than zero all along, and is %g at the segment's start", start))
	case end < -none:
		b.fail(path, fmt.Sprintf("must be greater than zero all along, and is %g at the segment's end", end))
	}
}

func (b *binder) node(n *NodeOf[formula.Program], base string) Node {
	path := base + n.Name + "."
	out := Node{
		Name: n.Name, Kind: n.Kind, Fixed: n.Fixed, Absorbing: n.Absorbing, Holds: n.Holds,
		Mass: b.nonneg(n.Mass, path+"mass"), Spring: b.nonneg(n.Spring, path+"spring"),
		Clamped: n.Clamped, Rotary: b.nonneg(n.Rotary, path+"rotary"), Hinge: n.Hinge, Inertia: b.nonneg(n.Inertia, path+"inertia"),
		SpringLoss: b.nonneg(n.SpringLoss, path+"spring"), AxialGive: b.nonneg(n.AxialGive, path+"axial"), Laws: b.laws(n.Laws, path), Benches: n.Benches,
	}
	for _, d := range n.Dashpots {
		bound := DashpotOf[float64]{C: b.nonneg(d.C, path+"dashpot"), Bracket: d.Bracket}
		if d.Bracket {
			bound.Through = b.pos(d.Through, path+"through")
		}
		out.Dashpots = append(out.Dashpots, bound)
	}
	for _, td := range n.Tuned {
		out.Tuned = append(out.Tuned, TunedOf[float64]{
			Mass: b.pos(td.Mass, path+"tuned"), Spring: b.pos(td.Spring, path+"tuned"), Dashpot: b.nonneg(td.Dashpot, path+"tuned"), Loss: b.nonneg(td.Loss, path+"tuned"),
		})
	}
	return out
}

// through is the give of a bracket, 0 where there is none.
func (b *binder) through(bracket bool, p formula.Program, path string) float64 {
	if !bracket {
		return 0
	}
	return b.pos(p, path+".through")
}

// placeSlack is the share of a segment's length within which a place counts as
// at its end, so that rounding in sums of lengths neither refuses a place nor
// makes a sliver. Chosen: a thousand times the rounding of a sum of a thousand lengths.
const placeSlack = 1e-9

func (b *binder) place(net *Network, p PlaceOf[formula.Program], path string) Place {
	out := Place{Line: p.Line, Node: p.Node, Segment: p.Segment}
	if p.Node >= 0 || b.err != nil {
		return out
	}
	seg := &net.Lines[p.Line].Segments[p.Segment]
	at := b.num(p.Offset, path)
	switch {
	case at < -placeSlack*seg.Length || at > seg.Length*(1+placeSlack):
		b.fail(path, fmt.Sprintf("%g m lies outside segment %s, which is %g m long", at, seg.Name, seg.Length))
	case at <= placeSlack*seg.Length:
		out.Node = p.Segment
	case at >= seg.Length*(1-placeSlack):
		out.Node = p.Segment + 1
	default:
		out.Offset = onRow(seg, len(seg.Every), at)
	}
	return out
}

func (b *binder) history(h HistoryOf[formula.Program], path string) History {
	out := History{Value: h.Value.Bind(b.values)}
	for _, p := range h.Breaks {
		out.Breaks = append(out.Breaks, b.num(p, path))
	}
	if v := out.At(0, 0); math.IsNaN(v) || math.IsInf(v, 0) {
		b.fail(path, "has no finite value at the start")
	}
	return out
}

// At is the history's value at time t and place x; 0 before t = 0.
func (h HistoryOf[V]) At(t, x float64) float64 {
	if t < 0 {
		return 0
	}
	return h.Value.At(t, x)
}

func (b *binder) excitations(net *Network, m *ModelOf[formula.Program]) {
	for _, p := range m.Plucks {
		path := "excite." + p.Name
		net.Plucks = append(net.Plucks, PluckOf[float64]{
			Name: p.Name, At: b.place(net, p.At, path+".at"), ByLength: p.ByLength,
			Length: b.num(p.Length, path+".by"), Force: b.num(p.Force, path+".with"), Until: b.nonneg(p.Until, path+".until"),
		})
	}
	for _, s := range m.Starts {
		net.Starts = append(net.Starts, StartOf[float64]{Name: s.Name, Along: s.Along, Velocity: s.Velocity, Shape: s.Shape.Bind(b.values)})
	}
	for _, p := range m.Pushes {
		path := "excite." + p.Name
		net.Pushes = append(net.Pushes, PushOf[float64]{Name: p.Name, At: b.place(net, p.At, path+".at"), Force: b.history(p.Force, path+".with")})
	}
	for _, p := range m.Presses {
		net.Presses = append(net.Presses, PressOf[float64]{Name: p.Name, Along: p.Along, Force: b.history(p.Force, "excite."+p.Name+".with")})
	}
	for _, mv := range m.Moves {
		net.Moves = append(net.Moves, MoveOf[float64]{Name: mv.Name, Line: mv.Line, Node: mv.Node, Kind: mv.Kind, Motion: b.history(mv.Motion, "excite."+mv.Name+".with")})
	}
	for _, l := range m.Loads {
		path := "excite." + l.Name
		out := LoadOf[float64]{Name: l.Name, Plugin: l.Plugin, Along: l.Along, Span: l.Span}
		if !l.Along {
			out.At = b.place(net, l.At, path+".at")
		}
		for _, p := range l.Parameters {
			out.Parameters = append(out.Parameters, ParameterOf[float64]{Name: p.Name, Value: b.num(p.Value, path+"."+p.Name), Factor: p.Factor})
		}
		net.Loads = append(net.Loads, out)
	}
	for _, r := range m.Rolls {
		path := "excite." + r.Name
		net.Rolls = append(net.Rolls, RollOf[float64]{
			Name: r.Name, Line: r.Line, Speed: b.pos(r.Speed, path+".speed"), Force: b.num(r.Force, path+".load"),
			From: b.place(net, r.From, path+".from"), Starting: b.nonneg(r.Starting, path+".starting"),
			Mass: b.nonneg(r.Mass, path+".mass"), Spring: b.nonneg(r.Spring, path+".spring"), Dashpot: b.nonneg(r.Dashpot, path+".dashpot"),
		})
	}
}

// MaxRows is the largest number of output rows that a run may ask for.
const MaxRows = 2_000_000

func (b *binder) run(net *Network, r *RunOf[formula.Program]) {
	out := RunOf[float64]{
		ForGiven: r.ForGiven, EveryGiven: r.EveryGiven, AgreeGiven: r.AgreeGiven, Solvers: r.Solvers, Foreign: r.Foreign, Effort: r.Effort,
		LimitMemory: b.nonneg(r.LimitMemory, "run.limit"), LimitWork: b.nonneg(r.LimitWork, "run.limit"), LimitTime: b.nonneg(r.LimitTime, "run.limit"),
		For: defaultDuration(net), Agree: defaultAgree,
	}
	if r.ForGiven {
		out.For = b.pos(r.For, "run.for")
	}
	out.Every = roundStep(out.For / defaultRows)
	if r.EveryGiven {
		out.Every = b.pos(r.Every, "run.every")
	}
	if r.AgreeGiven {
		out.Agree = b.pos(r.Agree, "run.agree")
	}
	if rows := out.For/out.Every + 1; b.err == nil && rows > MaxRows {
		b.fail("run.every", fmt.Sprintf("asks for %.4g rows, and %d is the most; make `every` longer or `for` shorter", rows, MaxRows))
	} else if b.err == nil && rows < 2 {
		b.fail("run.every", "is longer than `for`: there would be no record")
	}
	net.Run = out
}

// What a run does when the scenario does not say: twenty round trips of the
// slowest line, four thousand rows, agreement to one per cent.
const (
	defaultRoundTrips = 20
	defaultRows       = 4000
	defaultAgree      = 0.01
)

func defaultDuration(net *Network) float64 {
	longest := 0.0
	for i := range net.Lines {
		travel := 0.0
		for _, s := range net.Lines[i].Segments {
			end := math.Max(0, s.Tension+s.TensionRise*s.Length)
			travel += 2 * s.Length * math.Sqrt(s.MassPerLength) / (math.Sqrt(s.Tension) + math.Sqrt(end))
		}
		longest = math.Max(longest, travel)
	}
	if longest <= 0 || math.IsInf(longest, 0) || math.IsNaN(longest) {
		return 1
	}
	return roundStep(2 * defaultRoundTrips * longest)
}

// roundStep rounds down to 1, 2 or 5 times a power of ten.
func roundStep(v float64) float64 {
	exp := math.Floor(math.Log10(v) + 1e-12)
	base := math.Pow(10, exp)
	if exp < 0 {
		base = 1 / math.Pow(10, -exp) // 1/10^n is the nearest number to 10^-n
	}
	for _, f := range []float64{5, 2} {
		if v >= f*base*(1-1e-12) {
			return f * base
		}
	}
	return base
}

// Travel is the distance in metres of a bound place from the start of its line.
func (n *Network) Travel(p Place) float64 {
	line := &n.Lines[p.Line]
	last := p.Segment
	if p.Node >= 0 {
		last = p.Node
	}
	x := 0.0
	for i := 0; i < last; i++ {
		x += line.Segments[i].Length
	}
	if p.Node >= 0 {
		return x
	}
	return x + p.Offset
}
