package measure

import (
	"fmt"
	"hash/fnv"
	"math"
	"sort"
	"strings"

	"github.com/tautspan/tautspan/engine/fronts"
	"github.com/tautspan/tautspan/engine/modal"
	"github.com/tautspan/tautspan/engine/scenario"
	"github.com/tautspan/tautspan/engine/statics"
)

// wantModes is one call for modes.
type wantModes struct {
	count int
	below float64
}

type modesFound struct {
	result *modal.Result
	err    error
}

type traced struct {
	ledger *fronts.Ledger
	err    error
}

// bound is a leaf's measure with its arguments at a point.
func (l *leaf) bound(p *Point) *scenario.Measure {
	m := l.of
	out := &scenario.Measure{
		Kind: m.Kind, Source: m.Source, Watch: m.Watch, Quantity: m.Quantity, Line: m.Line, Segment: m.Segment,
		HasPlace: m.HasPlace, Excite: m.Excite, After: m.After, ModeFrom: m.ModeFrom, ModeTo: m.ModeTo, Below: m.Below,
	}
	out.Place = scenario.Place{Line: m.Place.Line, Node: m.Place.Node, Segment: m.Place.Segment, Offset: m.Place.Offset.Eval(p.Values, nil)}
	for _, a := range m.Args {
		out.Args = append(out.Args, a.Eval(p.Values, nil))
	}
	return out
}

// exactFigure answers a measure that needs no run.
func (s *Session) exactFigure(p *Point, l *leaf) (figure, error) {
	m := l.bound(p)
	switch m.Kind {
	case scenario.Frequency, scenario.DampingRatio:
		return s.modeFigure(p, m)
	case scenario.LineTension:
		if m.HasPlace {
			return figure{value: statics.TensionAt(p.Network, m.Place)}, nil
		}
		return figure{value: statics.MeanTension(&p.Network.Lines[m.Line])}, nil
	case scenario.WaveSpeed:
		seg := &p.Network.Lines[m.Line].Segments[m.Segment]
		return figure{value: statics.WaveSpeed(seg)}, nil
	case scenario.StoredEnergy:
		return figure{value: statics.StoredEnergy(&p.Network.Lines[m.Line])}, nil
	case scenario.Arrival:
		return p.arrival(m)
	case scenario.Reflected, scenario.Passed, scenario.Absorbed, scenario.Taken:
		return p.share(m)
	case scenario.SteadyResponse:
		return p.response(m)
	case scenario.Sag, scenario.SagPlace:
		return p.sag(m), nil
	case scenario.TakeUp:
		return figure{value: statics.TakeUp(p.Network, m.Line, m.Args[0])}, nil
	case scenario.WarmTension:
		return p.warmTension(m), nil
	case scenario.Scruton:
		return s.scruton(p, m)
	}
	return figure{}, fmt.Errorf("measure: %s is not known here", m.Source)
}

// firstShare is the share of the first front below which fronts are not counted.
const firstShare = 0.01

func (p *Point) arrival(m *scenario.Measure) (figure, error) {
	p.lock.Lock()
	defer p.lock.Unlock()
	if p.trace == nil {
		ledger, err := fronts.Trace(p.Mesh, fronts.Options{Prune: fronts.DefaultPrune})
		p.trace = &traced{ledger, err}
	}
	if p.trace.err != nil {
		return figure{}, p.trace.err
	}
	a, ok := p.trace.ledger.At(p.Network.Watches[m.Watch].Name, int(math.Round(m.Args[0])), firstShare)
	if !ok {
		return figure{value: math.NaN()}, nil
	}
	h := fnv.New32a()
	h.Write([]byte(a.Excite + "\n" + strings.Join(a.Path, "\n")))
	return figure{a.Time, int(h.Sum32())}, nil
}

// modesOf finds modes once a point and call.
func (p *Point) modesOf(want wantModes) (*modal.Result, error) {
	p.lock.Lock()
	defer p.lock.Unlock()
	found := p.modes[want]
	if found == nil {
		if p.modes == nil {
			p.modes = map[wantModes]*modesFound{}
		}
		found = &modesFound{}
		found.result, found.err = modal.Find(p.Mesh, modal.Want{Count: want.count, Below: want.below})
		p.modes[want] = found
	}
	return found.result, found.err
}

// modeFigure is the frequency of a mode, the lowest frequency of a range, or the
// lowest damping ratio of a range or below a frequency. The event is the mode.
func (s *Session) modeFigure(p *Point, m *scenario.Measure) (figure, error) {
	want := wantModes{count: s.mostModes()}
	if m.Below {
		want = wantModes{below: m.Args[0]}
		if !(want.below > 0) {
			return figure{value: math.NaN()}, nil
		}
	}
	found, err := p.modesOf(want)
	if err != nil {
		return figure{}, err
	}
	modes := ofLine(found.Modes, m.Line)
	out := figure{value: math.NaN()}
	for i := range modes {
		n := i + 1
		if !m.Below && (n < m.ModeFrom || n > m.ModeTo) {
			continue
		}
		v := modes[i].Frequency
		if m.Kind == scenario.DampingRatio {
			v = modes[i].DampingRatio
		}
		if math.IsNaN(out.value) || v < out.value {
			out = figure{v, n}
		}
	}
	if !m.Below && len(modes) < m.ModeTo {
		out.value = math.NaN() // the range reaches beyond the modes that there are
	}
	return out, nil
}

// mostModes is the highest mode number asked for, so that one call serves all.
func (s *Session) mostModes() int {
	most := 1
	for _, l := range s.leaves {
		most = max(most, l.of.ModeTo)
	}
	return most
}

// ofLine picks the modes of a line in order of damped frequency: its own, or
// where it is tied to others those of the tied lines; all modes together where
// no line is said.
func ofLine(modes []modal.Mode, line int) []modal.Mode {
	own := make([]modal.Mode, 0, len(modes))
	for _, w := range []int{line, -1} {
		for _, m := range modes {
			if line < 0 || m.Line == w {
				own = append(own, m)
			}
		}
		if len(own) > 0 {
			break
		}
	}
	sort.SliceStable(own, func(a, b int) bool { return own[a].DampedFrequency < own[b].DampedFrequency })
	return own
}
