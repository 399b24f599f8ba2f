package fit

import (
	"fmt"
	"math"
	"sort"

	"github.com/tautspan/tautspan/engine/mesh"
	"github.com/tautspan/tautspan/engine/modal"
	"github.com/tautspan/tautspan/engine/scenario"
	"github.com/tautspan/tautspan/engine/statics"
)

// prediction is what a config comes to for one set of lets.
type prediction struct {
	frequency []float64 // Hz, by mode number from 1 at [0]
	damping   []float64
	trip      float64 // s, one round trip
	err       error
}

// mostModes bounds the vibrations of one evaluation.
const mostModes = 120

// detail is how much of a line the model takes in.
type detail uint8

// The exact model; one in which the tension of a segment that bends does not rise
// along it (which is slow to compute), for slopes; and one without losses as well,
// while a search is far from its end.
const (
	exact detail = iota
	level
	rough
)

// flatten gives segments that bend their mean tension all along.
func flatten(net *scenario.Network) {
	for i := range net.Lines {
		for k := range net.Lines[i].Segments {
			if s := &net.Lines[i].Segments[k]; s.Bending > 0 && s.TensionRise != 0 {
				s.Tension, s.TensionRise = s.Tension+s.TensionRise*s.Length/2, 0
			}
		}
	}
}

// predict evaluates the config at values of all lets.
func (c *config) predict(values []float64, d detail) prediction {
	net, err := c.part.Bind(values)
	if err != nil {
		return prediction{err: err}
	}
	out := prediction{}
	if c.warm != nil {
		if net.Lines[c.own], err = statics.AtTemperature(&net.Lines[c.own], c.warm.Eval(values, nil)); err != nil {
			return prediction{err: err}
		}
	}
	line := &net.Lines[c.own]
	if c.travel {
		between := *line
		between.Segments = line.Segments[c.first : c.last+1]
		out.trip = 2 * statics.TravelTime(&between)
	}
	if c.modes == 0 && c.below == 0 {
		return out
	}
	if d != exact {
		flatten(net)
	}
	switch {
	case d == rough:
		strip(net)
	case !c.decays:
		c.lighten(net)
	}
	m, err := mesh.Build(net)
	if err != nil {
		return prediction{err: err}
	}
	out.frequency, out.damping, out.err = c.vibrations(m)
	return out
}

// vibrations are the frequencies and damping ratios of the config's line, by
// mode number; where it is tied to others, those of all together.
func (c *config) vibrations(m *mesh.Mesh) (frequency, damping []float64, err error) {
	want := modal.Want{Count: max(c.modes, 1)}
	if c.below > 0 {
		want = modal.Want{Count: mostModes, Below: c.below}
	}
	res, err := modal.Find(m, want)
	if err == nil && c.below > 0 && count(res.Modes, c.own) < c.modes {
		res, err = modal.Find(m, modal.Want{Count: c.modes})
	}
	if err != nil {
		return nil, nil, err
	}
	modes := res.Modes
	sort.SliceStable(modes, func(a, b int) bool { return modes[a].DampedFrequency < modes[b].DampedFrequency })
	for _, mode := range modes {
		if mode.Line == c.own || mode.Line < 0 {
			frequency, damping = append(frequency, mode.DampedFrequency), append(damping, mode.DampingRatio)
		}
	}
	return frequency, damping, nil
}

func count(modes []modal.Mode, line int) int {
	n := 0
	for i := range modes {
		if modes[i].Line == line || modes[i].Line < 0 {
			n++
		}
	}
	return n
}

// of is the value that the model gives for an observation as mode `mode`; NaN
// where it has none.
func (q *prediction) of(o *observation, mode int) float64 {
	if q.err != nil {
		return math.NaN()
	}
	switch o.kind {
	case scenario.FrequencyReading, scenario.PeaksReading:
		if mode >= 1 && mode <= len(q.frequency) {
			return q.frequency[mode-1]
		}
	case scenario.DecayReading:
		if mode >= 1 && mode <= len(q.damping) {
			return q.damping[mode-1]
		}
	case scenario.SwingsReading:
		if len(q.frequency) > 0 {
			return float64(o.order) / q.frequency[0]
		}
	case scenario.ReturnsReading:
		return float64(o.order) * q.trip
	}
	return math.NaN()
}

// values are the lets for coordinates of the unknowns.
func (p *Problem) values(x []float64) ([]float64, error) { return p.valuesWith(x, nil) }

// valuesWith gives lets that are no unknowns values of their own.
func (p *Problem) valuesWith(x []float64, override map[string]float64) ([]float64, error) {
	t := p.template
	values := make([]float64, len(t.Lets))
	coordinate := make([]int, len(t.Lets))
	for i := range p.unknowns {
		if let := p.unknowns[i].let; let >= 0 {
			coordinate[let] = i + 1
		}
	}
	for i := range t.Lets {
		k := coordinate[i] - 1
		switch {
		case k < 0:
			values[i] = t.Lets[i].Value.Eval(values, nil)
			if v, given := override[t.Lets[i].Name]; given {
				values[i] = v
			}
		case p.unknowns[k].sought:
			values[i] = p.unknowns[k].value(x[k])
		default:
			values[i] = t.Lets[i].Value.Eval(values, nil) + p.unknowns[k].value(x[k])
		}
		if math.IsNaN(values[i]) || math.IsInf(values[i], 0) {
			return nil, fmt.Errorf("fit: the let %s has no finite value", t.Lets[i].Name)
		}
	}
	return values, nil
}

// predict evaluates every config.
func (p *Problem) predict(x []float64) []prediction {
	out := make([]prediction, len(p.configs))
	values, err := p.values(x)
	for i, c := range p.configs {
		if err != nil {
			out[i].err = err
			continue
		}
		out[i] = c.predict(values, p.detail)
	}
	return out
}
