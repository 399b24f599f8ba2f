package fit

import (
	"fmt"
	"math"

	"github.com/tautspan/tautspan/engine/formula"
	"github.com/tautspan/tautspan/engine/scenario"
	"github.com/tautspan/tautspan/engine/statics"
)

// config is one way in which lines are looked at: the lines that hang together
// with the one that is read, in a plane (with or without the sag term), with
// what is asked of them.
type config struct {
	line     int // of the whole template
	own      int // the same among the lines of part
	group    int
	sag      bool
	sideways bool
	warm     *formula.Program // K; nil: at the line's own temperature
	part     *scenario.Template
	reads    map[int]bool

	modes  int     // highest mode number asked for
	below  float64 // Hz; peaks up to here are to be paired; 0: none
	decays bool
	travel bool // round trips are asked for, of the segments first .. last
	first  int
	last   int
}

// config finds or makes the config of a reading's statement.
func (p *Problem) config(r *scenario.Reading, it *scenario.ReadingItem, path string) (int, error) {
	warm, err := p.warmth(r, it, path)
	if err != nil {
		return 0, err
	}
	first, last, err := p.stretch(r, it, path)
	if err != nil {
		return 0, err
	}
	for i, c := range p.configs {
		if c.line == r.Line && c.sag == it.Sag && c.sideways == it.Sideways && c.first == first && c.last == last && c.warmth() == text(warm) {
			return i, nil
		}
	}
	c := &config{line: r.Line, sag: it.Sag, sideways: it.Sideways, first: first, last: last, warm: warm, reads: map[int]bool{}}
	if warm != nil {
		warm.LetsUsed(c.reads)
	}
	c.cut(p)
	p.configs = append(p.configs, c)
	return len(p.configs) - 1, nil
}

// text tells one temperature from another.
func text(p *formula.Program) string {
	if p == nil {
		return ""
	}
	return p.String()
}

func (c *config) warmth() string { return text(c.warm) }

// warmth is the temperature of a statement, nil where it says none or that of its
// line. What the tension at that temperature follows from must be known.
func (p *Problem) warmth(r *scenario.Reading, it *scenario.ReadingItem, path string) (*formula.Program, error) {
	if !it.Warm {
		return nil, nil
	}
	own := p.template.Model.Lines[r.Line].Temperature
	for i := range p.template.Readings {
		block := &p.template.Readings[i]
		for k := range block.Items {
			if path != fmt.Sprintf("reading.%s.%d", block.Name, k) {
				continue
			}
			at := block.Items[k].Temperature
			if p.template.Model.Lines[r.Line].Warm && at.String() == own.String() {
				return nil, nil
			}
			net, err := p.template.Bind(p.start)
			if err == nil {
				_, err = statics.AtTemperature(&net.Lines[r.Line], it.Temperature)
			}
			return &at, err
		}
	}
	return nil, nil
}

// stretch is the part of a line that a pulse runs up and down: between the held
// places around the one that is said.
func (p *Problem) stretch(r *scenario.Reading, it *scenario.ReadingItem, path string) (first, last int, err error) {
	nodes := p.template.Model.Lines[r.Line].Nodes
	last = len(nodes) - 2
	inner := false
	for _, n := range nodes[1 : len(nodes)-1] {
		inner = inner || n.Fixed
	}
	if it.Kind != scenario.ReturnsReading || !inner {
		return 0, last, nil
	}
	at := it.Place.Segment
	if it.HasPlace && it.Place.Node >= 0 {
		if at = it.Place.Node; nodes[at].Fixed && at > 0 && at <= last {
			it.HasPlace = false // at an inner support: which side is not known
		}
		at = min(at, last)
	}
	if !it.HasPlace {
		return 0, 0, &Error{Code: "wants-place", Path: path, What: "a joint holds this line between its ends, so that returns say on which side they were timed", Hint: "returns 5 took 4.4 s +- 0.1 s at SEGMENT 2 m"}
	}
	first = at
	for first > 0 && !nodes[first].Fixed {
		first--
	}
	for last = at; !nodes[last+1].Fixed && last < len(nodes)-2; last++ {
	}
	return first, last, nil
}

// need notes what a statement asks of its config.
func (p *Problem) need(index int, it *scenario.ReadingItem) {
	c := p.configs[index]
	switch it.Kind {
	case scenario.FrequencyReading, scenario.PeaksReading:
		c.modes = max(c.modes, it.Order)
		if it.Order == 0 {
			for _, v := range it.Values {
				c.below = math.Max(c.below, peakHeadroom*v)
			}
		}
	case scenario.DecayReading:
		c.modes, c.decays = max(c.modes, it.Order), true
	case scenario.SwingsReading:
		c.modes = max(c.modes, 1)
	case scenario.ReturnsReading:
		c.travel = true
	}
}

// peakHeadroom is how far above the highest peak the model is computed, so that
// a search that starts too stiff still finds a vibration for it. Chosen: a tenth
// of frequency is a fifth of tension.
const peakHeadroom = 1.15

// cut takes the lines that hang together with the config's line out of the
// template, with nothing that happens to them.
func (c *config) cut(p *Problem) {
	t := p.template
	n := len(t.Model.Lines)
	root := make([]int, n)
	for i := range root {
		root[i] = i
	}
	find := func(i int) int {
		for root[i] != i {
			i = root[i]
		}
		return i
	}
	for _, tie := range t.Model.Ties {
		a, b := find(tie.From.Line), find(tie.To.Line)
		root[max(a, b)] = min(a, b)
	}
	c.group = find(c.line)
	index := make([]int, n)
	part := *t
	part.Requires, part.Collects, part.Readings = nil, nil, nil
	part.Model = scenario.ModelOf[formula.Program]{}
	for i := range t.Model.Lines {
		index[i] = -1
		if find(i) != c.group {
			continue
		}
		index[i] = len(part.Model.Lines)
		l := t.Model.Lines[i]
		if i == c.line {
			c.own = index[i]
			l.Sag = c.sag
		}
		lineReads(&l, c.reads)
		part.Model.Lines = append(part.Model.Lines, l)
	}
	for _, tie := range t.Model.Ties {
		if index[tie.From.Line] < 0 {
			continue
		}
		tie.From.Line, tie.To.Line = index[tie.From.Line], index[tie.To.Line]
		for _, q := range []formula.Program{tie.Spring, tie.SpringLoss, tie.Dashpot, tie.Through, tie.Mass, tie.From.Offset, tie.To.Offset} {
			q.LetsUsed(c.reads)
		}
		part.Model.Ties = append(part.Model.Ties, tie)
	}
	for _, w := range t.Model.Watches {
		if m, fixed := w.Mass.IsConst(); w.Along || fixed && m == 0 || index[w.At.Line] < 0 {
			continue // only the mass of a sensor rides on the line
		}
		w.At.Line = index[w.At.Line]
		w.Mass.LetsUsed(c.reads)
		w.At.Offset.LetsUsed(c.reads)
		part.Model.Watches = append(part.Model.Watches, w)
	}
	spread(t, c.reads)
	c.part = &part
}

// quick tells whether the vibrations of the config follow from the closed
// equation of a single span.
func (c *config) quick() bool {
	if len(c.part.Model.Lines) != 1 || len(c.part.Model.Watches) > 0 {
		return false
	}
	l := &c.part.Model.Lines[0]
	if len(l.Segments) != 1 || len(l.Segments[0].Every) > 0 || l.Sag || c.decays {
		return false
	}
	rise, level := l.Segments[0].TensionRise.IsConst()
	return level && rise == 0 && l.Nodes[0].Fixed && l.Nodes[1].Fixed
}

// lossy tells whether the vibrations of the config wait for complex roots: it is
// asked for damping, or something on its lines beside the viscous and internal
// losses of segments takes energy.
func (c *config) lossy() bool {
	if c.decays {
		return true
	}
	none := func(programs ...formula.Program) bool {
		for _, p := range programs {
			if v, constant := p.IsConst(); !constant || v != 0 {
				return false
			}
		}
		return true
	}
	node := func(n *scenario.NodeOf[formula.Program]) bool {
		for _, t := range n.Tuned {
			if !none(t.Dashpot, t.Loss) {
				return true
			}
		}
		return len(n.Dashpots) > 0 || len(n.Benches) > 0 || n.Absorbing || !none(n.SpringLoss)
	}
	for i := range c.part.Model.Lines {
		l := &c.part.Model.Lines[i]
		for k := range l.Nodes {
			if node(&l.Nodes[k]) {
				return true
			}
		}
		for k := range l.Segments {
			s := &l.Segments[k]
			for e := range s.Every {
				if node(&s.Every[e].Joint) {
					return true
				}
			}
			if !none(s.TensionLoss, s.BendingLoss) {
				return true
			}
		}
	}
	for _, t := range c.part.Model.Ties {
		if !none(t.Dashpot, t.SpringLoss) {
			return true
		}
	}
	return false
}

// strip takes every loss away.
func strip(net *scenario.Network) {
	node := func(n *scenario.Node) {
		n.Dashpots, n.Benches, n.Absorbing, n.SpringLoss = nil, nil, false, 0
		n.Tuned = append([]scenario.TunedOf[float64](nil), n.Tuned...)
		for t := range n.Tuned {
			n.Tuned[t].Dashpot, n.Tuned[t].Loss = 0, 0
		}
	}
	for i := range net.Lines {
		line := &net.Lines[i]
		for k := range line.Segments {
			s := &line.Segments[k]
			s.Viscous, s.Internal, s.TensionLoss, s.BendingLoss = 0, 0, 0, 0
			for e := range s.Every {
				node(&s.Every[e].Joint)
			}
		}
		for k := range line.Nodes {
			node(&line.Nodes[k])
		}
	}
	for i := range net.Ties {
		net.Ties[i].Dashpot, net.Ties[i].SpringLoss = 0, 0
	}
}

// bendingOfTrips is the share by which clamped ends shorten the round trips that a
// config is asked for: the bending length root(EI/T) off the span at each.
// Source: the boundary layer of a tensioned beam; for a line clamped at both ends
// this is the 2/xi by which its frequencies rise.
func (c *config) bendingOfTrips(values []float64) float64 {
	if !c.travel {
		return 0
	}
	net, err := c.part.Bind(values)
	if err != nil {
		return 0
	}
	line := &net.Lines[c.own]
	off, length := 0.0, 0.0
	for i := c.first; i <= c.last; i++ {
		s := &line.Segments[i]
		length += s.Length
		for k, n := range []*scenario.Node{&line.Nodes[i], &line.Nodes[i+1]} {
			end := k == 0 && i == c.first || k == 1 && i == c.last
			if end && s.Bending > 0 && (n.Clamped || n.Rotary > 0) {
				off += math.Sqrt(s.Bending / (s.Tension + s.TensionRise*s.Length/2))
			}
		}
	}
	return off / length
}

// rises tells whether the tension rises along a segment that bends.
func (c *config) rises() bool {
	for i := range c.part.Model.Lines {
		for k := range c.part.Model.Lines[i].Segments {
			s := &c.part.Model.Lines[i].Segments[k]
			rise, flat := s.TensionRise.IsConst()
			stiff, limp := s.Bending.IsConst()
			if !(flat && rise == 0) && !(limp && stiff == 0) {
				return true
			}
		}
	}
	return false
}

// lightLoss is the damping ratio below which losses spread along a line are left
// out of frequencies: they lower them by half its square, 5e-5.
const lightLoss = 0.01

// lighten takes light losses along the segments away, with which a network
// without dashpots is undamped and a hundred times faster. Dashpots stay: near
// an end they shift frequencies to first order.
func (c *config) lighten(net *scenario.Network) {
	for i := range net.Lines {
		line := &net.Lines[i]
		first := math.Pi / statics.TravelTime(line) // rad/s, first vibration as a string
		for k := range line.Segments {
			s := &line.Segments[k]
			if s.Viscous/(2*s.MassPerLength*first) < lightLoss {
				s.Viscous = 0
			}
			if top := 2 * math.Pi * c.below; s.Internal*math.Max(top, first*float64(c.modes))/2 < lightLoss {
				s.Internal = 0
			}
		}
	}
}
