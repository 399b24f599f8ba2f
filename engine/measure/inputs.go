package measure

import (
	"sort"

	"github.com/tautspan/tautspan/engine/formula"
	"github.com/tautspan/tautspan/engine/scenario"
)

// reads collects the lets that programs read.
type reads map[int]bool

func (r reads) see(programs ...formula.Program) {
	for _, p := range programs {
		p.LetsUsed(r)
	}
}

func (r reads) place(p scenario.PlaceOf[formula.Program]) { r.see(p.Offset) }

// structure sees what stands there: lines, ties and the mass of sensors.
func (r reads) structure(m *scenario.ModelOf[formula.Program]) {
	for i := range m.Lines {
		r.see(m.Lines[i].Incline)
		for k := range m.Lines[i].Nodes {
			r.node(&m.Lines[i].Nodes[k])
		}
		for k := range m.Lines[i].Segments {
			r.segment(&m.Lines[i].Segments[k])
		}
	}
	for _, t := range m.Ties {
		r.place(t.From)
		r.place(t.To)
		r.see(t.Spring, t.Dashpot, t.Mass, t.SpringLoss, t.Through)
	}
	for _, w := range m.Watches {
		r.see(w.Mass)
		if w.Mass.Code != nil {
			r.place(w.At)
		}
	}
}

func (r reads) node(n *scenario.NodeOf[formula.Program]) {
	r.see(n.Mass, n.Spring, n.Rotary, n.Inertia, n.SpringLoss)
	for _, d := range n.Dashpots {
		r.see(d.C, d.Through)
	}
	for _, t := range n.Tuned {
		r.see(t.Mass, t.Spring, t.Dashpot, t.Loss)
	}
	for i := range n.Laws {
		r.law(&n.Laws[i])
	}
}

func (r reads) segment(s *scenario.SegmentOf[formula.Program]) {
	r.see(s.Length, s.MassPerLength, s.Tension, s.TensionRise, s.Axial, s.Viscous, s.Bending, s.Internal, s.TensionLoss, s.BendingLoss)
	if s.Law != nil {
		r.law(s.Law)
	}
	for i := range s.Every {
		r.see(s.Every[i].Spacing, s.Every[i].First)
		r.node(&s.Every[i].Joint)
	}
}

func (r reads) law(l *scenario.LawOf[formula.Program]) {
	if f := l.Friction; f != nil {
		r.see(f.Force, f.Through)
	}
	if s := l.Stop; s != nil {
		r.see(s.Gap, s.Spring)
	}
	if f := l.Followed; f != nil {
		for _, p := range f.Parameters {
			r.see(p.Value)
		}
	}
	if w := l.Written; w != nil {
		r.see(w.Force)
		r.see(w.Starts...)
		r.see(w.Rates...)
	}
}

// happenings sees what happens and where it is watched.
func (r reads) happenings(m *scenario.ModelOf[formula.Program]) {
	history := func(h scenario.HistoryOf[formula.Program]) { r.see(h.Value) }
	for _, p := range m.Plucks {
		r.place(p.At)
		r.see(p.Length, p.Force, p.Until)
	}
	for _, s := range m.Starts {
		r.see(s.Shape)
	}
	for _, p := range m.Pushes {
		r.place(p.At)
		history(p.Force)
	}
	for _, p := range m.Presses {
		history(p.Force)
	}
	for _, v := range m.Moves {
		history(v.Motion)
	}
	for _, l := range m.Rolls {
		r.place(l.From)
		r.see(l.Speed, l.Force, l.Starting, l.Mass, l.Spring, l.Dashpot)
	}
	for _, l := range m.Loads {
		r.place(l.At)
		for _, p := range l.Parameters {
			r.see(p.Value)
		}
	}
	for _, w := range m.Watches {
		r.place(w.At)
	}
	r.see(m.Run.For, m.Run.Every)
}

// places sees where something acts and where it is watched.
func (r reads) places(m *scenario.ModelOf[formula.Program]) {
	for _, p := range m.Pushes {
		r.place(p.At)
	}
	for _, w := range m.Watches {
		r.place(w.At)
	}
}

// matter sees what only statics and the flow of air ask of a line.
func (r reads) matter(m *scenario.ModelOf[formula.Program]) {
	for i := range m.Lines {
		r.see(m.Lines[i].SaidTension, m.Lines[i].Temperature)
		for _, n := range m.Lines[i].Nodes {
			r.see(n.AxialGive)
		}
		for _, s := range m.Lines[i].Segments {
			r.see(s.Diameter, s.Expansion)
		}
	}
}

// exactInputs tells of each let whether it is an input without a doubt: a number
// given, not worked out from other lets.
func exactInputs(t *scenario.Template, override map[string]float64) []bool {
	out := make([]bool, len(t.Lets))
	for i := range t.Lets {
		below := reads{}
		below.see(t.Lets[i].Value)
		_, given := override[t.Lets[i].Name]
		out[i] = t.Lets[i].Doubt == nil && (given || len(below) == 0)
	}
	return out
}

// exactNames are the inputs taken as exact on which an expression rests, sorted.
func (s *Session) exactNames(e *expression) []string {
	used := reads{}
	s.seeExpression(e, used)
	for changed := true; changed; { // lets that lets read
		before := len(used)
		for i := range s.template.Lets {
			if _, given := s.override[s.template.Lets[i].Name]; used[i] && !given {
				used.see(s.template.Lets[i].Value)
			}
		}
		changed = len(used) != before
	}
	names := []string{}
	for i := range used {
		if s.exact[i] {
			names = append(names, s.template.Lets[i].Name)
		}
	}
	sort.Strings(names)
	return names
}

func (s *Session) seeExpression(e *expression, used reads) {
	used.see(e.programs...)
	for _, t := range e.terms {
		if t.inner != nil {
			s.seeExpression(t.inner, used)
			continue
		}
		l := s.leaves[t.leaf]
		used.see(l.of.Args...)
		used.place(l.of.Place)
		used.structure(&s.template.Model)
		switch {
		case l.ofRun() || l.of.Kind == scenario.Arrival:
			used.happenings(&s.template.Model)
		case l.of.Kind == scenario.SteadyResponse:
			used.places(&s.template.Model)
		case l.of.Kind == scenario.WarmTension || l.of.Kind == scenario.TakeUp || l.of.Kind == scenario.Scruton:
			used.matter(&s.template.Model)
		}
	}
}
