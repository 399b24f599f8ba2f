package app

import (
	"context"
	"math"

	"github.com/tautspan/tautspan/dsl/diag"
	"github.com/tautspan/tautspan/dsl/unit"
	"github.com/tautspan/tautspan/engine/mesh"
	"github.com/tautspan/tautspan/engine/modal"
	"github.com/tautspan/tautspan/engine/scenario"
	"github.com/tautspan/tautspan/engine/solver"
	"github.com/tautspan/tautspan/engine/statics"
)

// gravity is standard gravity, m/s^2, exact by definition (CGPM 1901).
const gravity = 9.80665

// Check reads and judges a scenario without running it.
func (a *App) Check(in Input) (*CheckDoc, Status, error) {
	l, err := a.load("check", in)
	if err != nil {
		return nil, Outside, err
	}
	l.bind()
	if !l.failed() && l.net != nil {
		l.tryLoads()
	}
	doc := &CheckDoc{Solvers: []SolverCan{}, Lines: []LineFacts{}, Lets: []LetFacts{}, Plucks: []PluckFacts{}, Stocks: []StockFacts{}, Cautions: []CautionNote{}, Readings: []ReadingFacts{}, Sought: []SoughtFacts{}}
	if !l.failed() && l.net != nil {
		l.facts(doc)
	}
	doc.Head = l.head
	doc.Diagnostics = append(append(diag.List{}, l.head.Errors...), l.head.Warnings...)
	if l.failed() {
		return doc, BadInput, nil
	}
	return doc, Done, nil
}

func (l *loaded) facts(doc *CheckDoc) {
	doc.Lets = l.letFacts()
	doc.Readings, doc.Sought = l.surveyFacts()
	if len(l.net.Lines) == 0 {
		return
	}
	doc.Run, doc.Plucks = l.runFacts(), l.pluckFacts()
	doc.Cautions = cautions(l.net, formatEnergy)
	frequencies := l.firstFrequencies(6)
	l.hintStill()
	l.hintDriven()
	for _, s := range l.compiled.Stocks {
		if s.BendingHigh > 0 {
			doc.Stocks = append(doc.Stocks, StockFacts{Name: s.Name, Bending: s.Bending, Low: s.BendingLow, High: s.BendingHigh})
		}
	}
	for i := range l.net.Lines {
		doc.Lines = append(doc.Lines, lineFacts(&l.net.Lines[i], frequencies[i]))
	}
	for _, s := range builtin() {
		doc.Solvers = append(doc.Solvers, solverCan(s, l))
	}
}

func formatEnergy(j float64) string {
	u, _ := unit.Parse("J")
	return unit.Format(j, u.Dim, unit.SI, 2)
}

func lineFacts(line *scenario.Line, frequencies []float64) LineFacts {
	f := LineFacts{
		Name: line.Name, Length: statics.Length(line), TravelTime: statics.TravelTime(line),
		StoredEnergy: finite(statics.StoredEnergy(line)), Frequencies: frequencies, Holds: []HoldFacts{},
		StartTension: line.Segments[0].Tension, EndTension: statics.EndTension(&line.Segments[len(line.Segments)-1]),
		Lambda2: sagParameter(line), Xi: bendingParameter(line), Strength: shareOfStrength(line),
	}
	for i := range line.Segments {
		s := &line.Segments[i]
		seg := SegmentFacts{
			Name: s.Name, Length: s.Length, MassPerLength: s.MassPerLength, Tension: s.Tension,
			WaveSpeed: statics.WaveSpeed(s), Impedance: s.MassPerLength * statics.WaveSpeed(s), Bending: s.Bending,
		}
		if s.Axial > 0 {
			seg.Axial = finite(s.Axial)
		}
		f.Segments = append(f.Segments, seg)
		if i > 0 && line.Nodes[i].Holds {
			f.Holds = append(f.Holds, HoldFacts{Joint: line.Nodes[i].Name, Force: s.Tension - statics.EndTension(&line.Segments[i-1])})
		}
	}
	return f
}

// sagParameter is lambda^2 = (m g L cos/T)^2 L EA/(T Le) of Irvine and Caughey,
// with the mean mass of a line, its joints counted, its mean tension, the axial
// stiffnesses of segments and of ends that give in series, and Le = L (1 + (m g
// L/T)^2/8). Source: Irvine, Caughey, Proc. R. Soc. Lond. A 341 (1974), from
// memory. nil where EA is not known; 0 with an end that keeps its tension.
func sagParameter(line *scenario.Line) *float64 {
	length, mass, give := statics.Length(line), 0.0, 0.0
	for _, s := range line.Segments {
		if s.Axial <= 0 {
			return nil
		}
		mass += s.MassPerLength * s.Length / length
		give += s.Length / s.Axial
	}
	for i := range line.Segments {
		if i > 0 {
			mass += line.Nodes[i].Mass / length
		}
		for _, row := range scenario.Rows(&line.Segments[i]) {
			mass += row.Joint.Mass / length
		}
	}
	for _, n := range []*scenario.Node{&line.Nodes[0], &line.Nodes[len(line.Nodes)-1]} {
		if n.AxialGive > 0 {
			give += 1 / n.AxialGive
		}
	}
	if line.Weighted {
		return finite(0)
	}
	tension := statics.MeanTension(line)
	slope := mass * gravity * length * math.Cos(line.Incline) / tension
	return finite(slope * slope * length / give * length / (tension * length * (1 + slope*slope/8)))
}

// bendingParameter is xi = L sqrt(T/EI) by the mean tension and the largest
// bending stiffness of the line, nil on a string.
func bendingParameter(line *scenario.Line) *float64 {
	stiffest := 0.0
	for _, s := range line.Segments {
		stiffest = math.Max(stiffest, s.Bending)
	}
	if stiffest == 0 {
		return nil
	}
	return finite(statics.Length(line) * math.Sqrt(statics.MeanTension(line)/stiffest))
}

func shareOfStrength(line *scenario.Line) *float64 {
	worst := 0.0
	for i := range line.Segments {
		s := &line.Segments[i]
		if s.Strength > 0 {
			worst = math.Max(worst, math.Max(s.Tension, statics.EndTension(s))/s.Strength)
		}
	}
	if worst == 0 {
		return nil
	}
	return &worst
}

// firstFrequencies are the first natural frequencies of each line, Hz; of tied
// lines those of all together stand with each.
func (l *loaded) firstFrequencies(count int) [][]float64 {
	out := make([][]float64, len(l.net.Lines))
	for i := range out {
		out[i] = []float64{}
	}
	if l.mesh.Features()&(mesh.NonLinear|mesh.BenchDamper) != 0 {
		return out // there are none, and nobody asked for them
	}
	res, err := modal.Find(l.mesh, modal.Want{Count: count})
	if err != nil {
		l.warn("no-modes", err.Error())
		return out
	}
	for _, m := range res.Modes {
		for i := range out {
			if (m.Line == i || m.Line < 0) && len(out[i]) < count {
				out[i] = append(out[i], m.Frequency)
			}
		}
	}
	return out
}

func (l *loaded) letFacts() []LetFacts {
	out := []LetFacts{}
	u := l.compiled.Template.StandardU(l.values)
	for i, let := range l.compiled.Template.Lets {
		f := LetFacts{Name: let.Name, Value: l.values[i], Unit: let.Unit, StandardU: u[i]}
		if let.Doubt != nil {
			f.AsTaken = let.Doubt.AsTaken
		}
		out = append(out, f)
	}
	return out
}

// surveyFacts are the readings with their doubts as they were taken, and what is
// sought in them.
func (l *loaded) surveyFacts() ([]ReadingFacts, []SoughtFacts) {
	readings, sought := []ReadingFacts{}, []SoughtFacts{}
	t := l.compiled.Template
	blocks, err := t.BindReadings(l.net)
	if err != nil {
		l.refuse(err)
		return readings, sought
	}
	for i := range blocks {
		for k := range blocks[i].Items {
			it := &blocks[i].Items[k]
			f := ReadingFacts{
				Reading: blocks[i].Name, Line: l.net.Lines[blocks[i].Line].Name, Kind: it.Kind.String(), Plane: planeWord(it.Sideways), Unit: it.Kind.Unit(),
				Values: it.Values, StandardU: it.U, SharedU: it.Shared, AsTaken: it.AsTaken, SharedAsTaken: it.SharedAsTaken,
			}
			if it.Order > 0 {
				f.Number = &it.Order
			}
			if it.Warm {
				f.Temperature = &it.Temperature
			}
			readings = append(readings, f)
		}
	}
	for _, s := range t.Seeks {
		sought = append(sought, SoughtFacts{Name: t.Lets[s.Let].Name, From: s.From.Eval(l.values, nil), To: s.To.Eval(l.values, nil), Unit: t.Lets[s.Let].Unit})
	}
	return readings, sought
}

func (l *loaded) runFacts() *RunFacts {
	r := &l.net.Run
	f := &RunFacts{For: r.For, Every: r.Every, Rows: l.mesh.Timing.Rows, Agree: r.Agree, Assumed: []string{}}
	for _, a := range []struct {
		word  string
		given bool
	}{{"for", r.ForGiven}, {"every", r.EveryGiven}, {"agree", r.AgreeGiven}} {
		if !a.given {
			f.Assumed = append(f.Assumed, a.word)
		}
	}
	return f
}

func (l *loaded) pluckFacts() []PluckFacts {
	out := []PluckFacts{}
	rest, err := statics.Hold(l.net)
	if err != nil {
		return out
	}
	for _, p := range rest.Plucks {
		out = append(out, PluckFacts(p))
	}
	return out
}

// solverCan asks a solver whether it can, and what three levels cost.
func solverCan(s solver.Solver, l *loaded) SolverCan {
	c := SolverCan{Name: s.Name(), Reasons: s.Refuses(l.mesh)}
	if c.Reasons == nil {
		c.Reasons = []string{}
	}
	c.Can = len(c.Reasons) == 0
	if !c.Can {
		return c
	}
	work := 0.0
	for level := range 3 {
		p, err := s.Plan(l.mesh, solver.Request{Level: level, Effort: 1})
		if err != nil {
			return c
		}
		work += float64(p.Work)
	}
	c.Cost = &work
	return c
}

// finite is a pointer to v, or nil where it does not exist.
func finite(v float64) *float64 {
	if math.IsNaN(v) || math.IsInf(v, 0) {
		return nil
	}
	return &v
}

// tryLoads works out the loads of plugins, so that what they refuse is said here.
func (l *loaded) tryLoads() {
	if len(l.net.Loads) == 0 {
		return
	}
	var set forceSet
	defer set.close()
	net := *l.net
	net.Loads = append([]scenario.LoadOf[float64](nil), l.net.Loads...)
	if err := set.workOut(context.Background())(&net); err != nil {
		l.refuse(err)
		return
	}
	m, err := mesh.Build(&net)
	if err != nil {
		l.refuse(err)
		return
	}
	l.net, l.mesh = &net, m
}
