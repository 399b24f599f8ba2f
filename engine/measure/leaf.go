package measure

import (
	"fmt"

	"github.com/tautspan/tautspan/engine/compare"
	"github.com/tautspan/tautspan/engine/formula"
	"github.com/tautspan/tautspan/engine/scenario"
)

// leaf is one measure that is answered by itself; the same measure in several
// statements is one leaf.
type leaf struct {
	of      *scenario.MeasureOf[formula.Program]
	channel int // of the mesh; -1 where none
	asked   int // index into Session.asked; -1 where none
	index   int // into Session.leaves
}

// ofRun tells whether the leaf needs the records of a run.
func (l *leaf) ofRun() bool {
	switch l.of.Kind {
	case scenario.Peak, scenario.RMS, scenario.Final, scenario.Highest, scenario.Lowest, scenario.TimeOfPeak,
		scenario.Settle, scenario.Reach, scenario.EnergyLeft, scenario.SolverDifference:
		return true
	}
	return false
}

// moves tells whether the leaf is of a run and changes with the lets; the
// solvers' difference is a figure of the comparison itself.
func (l *leaf) moves() bool { return l.ofRun() && l.of.Kind != scenario.SolverDifference }

// term is one argument of an expression: a leaf, or the low or high end of an
// expression of its own.
type term struct {
	leaf  int // index into Session.leaves; -1: inner
	inner *expression
	high  bool
}

// expression is what one statement asks: programs over the lets and the same
// terms as arguments.
type expression struct {
	programs []formula.Program
	terms    []term
	unit     string
	relation scenario.Relation
}

// The programs of a requirement's expression.
const (
	atValue = iota
	atLimit
	atUpper
	atMargin  // distance from the limit, positive to the good; of within and outside, from the lower
	atMargin2 // of within and outside, from the upper
)

func (s *Session) expression(programs []formula.Program, measures []scenario.MeasureOf[formula.Program], unit string) *expression {
	e := &expression{programs: programs, unit: unit}
	for i := range measures {
		m := &measures[i]
		if m.Kind == scenario.LowEnd || m.Kind == scenario.HighEnd {
			inner := s.expression([]formula.Program{m.Inner.Value}, m.Inner.Measures, "")
			e.terms = append(e.terms, term{leaf: -1, inner: inner, high: m.Kind == scenario.HighEnd})
			continue
		}
		e.terms = append(e.terms, term{leaf: s.leaf(m)})
	}
	return e
}

func (s *Session) leaf(m *scenario.MeasureOf[formula.Program]) int {
	for i, l := range s.leaves {
		if l.of.Kind == m.Kind && l.of.Source == m.Source && m.Source != "" {
			return i
		}
	}
	s.leaves = append(s.leaves, &leaf{of: m, channel: -1, asked: -1, index: len(s.leaves)})
	return len(s.leaves) - 1
}

// require makes the expression of a requirement with its margins, so that the
// doubt of value and limit is that of their difference.
func (s *Session) require(q *scenario.Require) *expression {
	value, limit, upper := q.Value, q.Limit, q.Upper
	above, below := formula.Sub(value, limit), formula.Sub(limit, value)
	margins := []formula.Program{below}
	switch q.Relation {
	case scenario.Greater, scenario.GreaterEq:
		margins = []formula.Program{above}
	case scenario.Within:
		margins = []formula.Program{above, formula.Sub(upper, value)}
	case scenario.Outside:
		margins = []formula.Program{below, formula.Sub(value, upper)}
	}
	e := s.expression(append([]formula.Program{value, limit, upper}, margins...), q.Measures, q.Unit)
	e.relation = q.Relation
	return e
}

// ask finds each leaf's channel and what a comparison must settle for it.
func (s *Session) ask() error {
	m := s.centre.Mesh
	for _, l := range s.leaves {
		if w := l.of.Watch; w >= 0 && l.ofRun() && l.of.Kind != scenario.EnergyLeft {
			name := s.centre.Network.Watches[w].Name
			for c := range m.Channels {
				if m.Channels[c].Watch == name && m.Channels[c].Quantity == l.of.Quantity {
					l.channel = c
				}
			}
			if l.channel < 0 {
				return fmt.Errorf("measure: watch %s does not record %s, which %s asks for", name, l.of.Quantity, l.of.Source)
			}
		}
		ask := compare.Asked{Channel: l.channel}
		switch l.of.Kind {
		case scenario.Highest:
			ask.Kind = compare.Highest
		case scenario.Lowest:
			ask.Kind = compare.Lowest
		case scenario.TimeOfPeak, scenario.Settle, scenario.Reach:
			read, err := s.reader(s.centre, l)
			if err != nil {
				return err
			}
			ask.Reading = read
		default:
			continue
		}
		l.asked = len(s.asked)
		s.asked = append(s.asked, ask)
	}
	return nil
}

// ofRun tells whether an expression, inner ones included, needs a run.
func (s *Session) ofRun(e *expression) bool {
	for _, t := range e.terms {
		if t.inner != nil && s.ofRun(t.inner) || t.inner == nil && s.leaves[t.leaf].ofRun() {
			return true
		}
	}
	return false
}

// own are the leaves that stand in the expression itself.
func (s *Session) own(e *expression) []*leaf {
	var out []*leaf
	for _, t := range e.terms {
		if t.inner == nil {
			out = append(out, s.leaves[t.leaf])
		}
	}
	return out
}
