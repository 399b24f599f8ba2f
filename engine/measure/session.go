package measure

import (
	"context"
	"fmt"
	"math"
	"strconv"
	"sync"

	"github.com/tautspan/tautspan/engine/compare"
	"github.com/tautspan/tautspan/engine/doubt"
	"github.com/tautspan/tautspan/engine/formula"
	"github.com/tautspan/tautspan/engine/mesh"
	"github.com/tautspan/tautspan/engine/scenario"
)

// Options say how doubt is propagated.
type Options struct {
	Workers      int    // points at once; 0: one
	ExactSamples int    // where first order fails and all measures are exact; 0: 1000
	RunSamples   int    // where first order fails and a run is needed; 0: 100
	Seed         uint64 // of samples
	Sample       bool   // sample every answer
	// WorkOut turns loads of plugins into forces; nil: there are none.
	WorkOut func(*scenario.Network) error
	// Joint, if not nil, is the doubt of lets that hang together, as a fit leaves
	// them. It takes the place of what those lets say themselves.
	Joint Joint
}

// Joint is the doubt of lets that hang together, over independent directions,
// each in its standard uncertainties.
type Joint interface {
	// Directions names where the doubt of each comes from.
	Directions() []string
	// Covers tells whether the doubt of a let is in the directions.
	Covers(let int) bool
	// Values are all lets for values of the directions; override gives lets that
	// are not covered values of their own.
	Values(z []float64, override map[string]float64) ([]float64, error)
}

// Session is one scenario with its questions.
type Session struct {
	template *scenario.Template
	override map[string]float64
	options  Options
	centre   *Point
	inputs   []doubt.Input // doubtful lets
	exact    []bool        // per let: taken as exact, and an input
	leaves   []*leaf
	requires []*expression
	collects []*expression
	asked    []compare.Asked

	lock   sync.Mutex
	points map[string]*Point
	frozen *frozen // solver that shows changes of a run; nil: none
}

// Point is the scenario at one set of values of its lets.
type Point struct {
	Values  []float64
	Network *scenario.Network
	Mesh    *mesh.Mesh

	lock  sync.Mutex
	modes map[wantModes]*modesFound
	trace *traced
	sway  *swayed
	runs  *runFigures
}

// New prepares a scenario: values of its lets, network and mesh at the centre,
// and the questions. Overrides are as in Template.Values.
func New(t *scenario.Template, override map[string]float64, options Options) (*Session, error) {
	if options.ExactSamples == 0 {
		options.ExactSamples = 1000
	}
	if options.RunSamples == 0 {
		options.RunSamples = 100
	}
	s := &Session{template: t, override: override, options: options, points: map[string]*Point{}}
	values, err := s.values(nil)
	if err != nil {
		return nil, err
	}
	if s.centre, err = s.build(values); err != nil {
		return nil, err
	}
	if j := options.Joint; j != nil {
		for _, name := range j.Directions() {
			s.inputs = append(s.inputs, doubt.Input{Name: name, U: 1})
		}
	}
	for i, u := range t.StandardU(values) {
		switch {
		case options.Joint != nil && options.Joint.Covers(i):
		case math.IsNaN(u) || math.IsInf(u, 0):
			return nil, &scenario.PathError{Path: "let." + t.Lets[i].Name, What: "its doubt has no finite value"}
		case u > 0:
			s.inputs = append(s.inputs, doubt.Input{Name: t.Lets[i].Name, Value: values[i], U: u, Rectangular: t.Lets[i].Doubt.Rectangular})
		}
	}
	s.points[key(s.inputs, nil)] = s.centre
	s.exact = exactInputs(t, override)
	for i := range s.exact {
		s.exact[i] = s.exact[i] && !(options.Joint != nil && options.Joint.Covers(i))
	}
	for i := range t.Requires {
		s.requires = append(s.requires, s.require(&t.Requires[i]))
	}
	for i := range t.Collects {
		c := &t.Collects[i]
		s.collects = append(s.collects, s.expression([]formula.Program{c.Value}, c.Measures, c.Unit))
	}
	return s, s.ask()
}

// WatchPeaks are statements that ask for the peak of every quantity of every
// watch, in the order of a mesh's channels, for whoever wants those with the
// doubt of the lets beside the numerical bound: append them to a template's
// Collects before New.
func WatchPeaks(t *scenario.Template) []scenario.Collect {
	var out []scenario.Collect
	for i := range t.Model.Watches {
		w := &t.Model.Watches[i]
		for _, q := range w.Quantities {
			source := "peak(" + w.Name + "." + q.String() + ")"
			m := scenario.MeasureOf[formula.Program]{Kind: scenario.Peak, Source: source, Watch: i, Quantity: q, Line: -1, Segment: -1}
			out = append(out, scenario.Collect{Source: source, Unit: q.Unit(), Value: formula.Arg(0), Measures: []scenario.MeasureOf[formula.Program]{m}})
		}
	}
	return out
}

// Centre is the scenario at the values of its lets as they stand.
func (s *Session) Centre() *Point { return s.centre }

// Doubtful are the lets whose doubt is carried to the answers.
func (s *Session) Doubtful() []doubt.Input { return s.inputs }

// Asked is what a comparison must bring within the share asked for beside the
// figures of every watch, and whether it needs the energy left. The outcome of
// a comparison with these options is what Answer takes.
func (s *Session) Asked() (asked []compare.Asked, energyLeft bool) {
	for _, l := range s.leaves {
		energyLeft = energyLeft || l.of.Kind == scenario.EnergyLeft
	}
	return s.asked, energyLeft
}

// NeedsRun tells whether any question needs the records of a run.
func (s *Session) NeedsRun() bool {
	for _, l := range s.leaves {
		if l.ofRun() {
			return true
		}
	}
	return false
}

func (s *Session) build(values []float64) (*Point, error) {
	net, err := s.template.Bind(values)
	if err != nil {
		return nil, err
	}
	if s.options.WorkOut != nil {
		if err := s.options.WorkOut(net); err != nil {
			return nil, err
		}
	}
	m, err := mesh.Build(net)
	if err != nil {
		return nil, err
	}
	if s.centre != nil {
		// The output grid is frozen, also where the scenario left it open and it
		// would follow the lets.
		m.Timing = s.centre.Mesh.Timing
		if len(m.Channels) != len(s.centre.Mesh.Channels) {
			return nil, fmt.Errorf("measure: the watches change with the lets")
		}
		for c := range m.Channels {
			m.Channels[c].Means = s.centre.Mesh.Channels[c].Means
		}
	}
	return &Point{Values: values, Network: net, Mesh: m}, nil
}

// at is the scenario at values of the doubtful lets; lets that read them follow.
func (s *Session) at(values []float64) (*Point, error) {
	k := key(s.inputs, values)
	s.lock.Lock()
	p := s.points[k]
	s.lock.Unlock()
	if p != nil {
		return p, nil
	}
	all, err := s.values(values)
	if err != nil {
		return nil, err
	}
	if p, err = s.build(all); err != nil {
		return nil, err
	}
	s.lock.Lock()
	defer s.lock.Unlock()
	if earlier := s.points[k]; earlier != nil {
		return earlier, nil
	}
	if len(s.points) < mostPoints {
		s.points[k] = p
	}
	return p, nil
}

// mostPoints is how many points are kept for the questions that come to them
// again; a long sampling goes on without. Chosen: some 100 MB for a long line.
const mostPoints = 5000

// values are all lets for values of the inputs; nil for the centre.
func (s *Session) values(inputs []float64) ([]float64, error) {
	override := make(map[string]float64, len(s.override)+len(inputs))
	for name, v := range s.override {
		override[name] = v
	}
	joint := 0
	if s.options.Joint != nil {
		joint = len(s.options.Joint.Directions())
	}
	for i := joint; i < len(inputs); i++ {
		if in := &s.inputs[i]; inputs[i] != in.Value {
			override[in.Name] = inputs[i]
		}
	}
	if s.options.Joint == nil {
		return s.template.Values(override)
	}
	z := make([]float64, joint)
	copy(z, inputs)
	return s.options.Joint.Values(z, override)
}

// key names a point; nil values name the centre.
func key(inputs []doubt.Input, values []float64) string {
	var b []byte
	for i, in := range inputs {
		v := in.Value
		if values != nil {
			v = values[i]
		}
		b = strconv.AppendUint(append(b, ' '), math.Float64bits(v), 36)
	}
	return string(b)
}

// figure is a leaf's value at a point, and the event that it tells of, such as
// the number of the swing in which a peak lies: two values of different events
// do not make a slope.
type figure struct {
	value float64
	event int
}

// figures are the values of leaves at a point. A value that does not exist is NaN.
func (s *Session) figures(ctx context.Context, p *Point, leaves []*leaf) ([]figure, error) {
	out := make([]figure, len(leaves))
	for i, l := range leaves {
		var err error
		switch {
		case l.of.Kind == scenario.SolverDifference:
			// A figure of the comparison itself; it has no doubt of inputs.
		case l.ofRun():
			out[i], err = s.runFigure(ctx, p, l)
		default:
			out[i], err = s.exactFigure(p, l)
		}
		if err != nil {
			return nil, err
		}
	}
	return out, nil
}
