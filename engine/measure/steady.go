package measure

import (
	"fmt"
	"math"
	"math/cmplx"

	"github.com/tautspan/tautspan/engine/scatter"
	"github.com/tautspan/tautspan/engine/scenario"
	"github.com/tautspan/tautspan/engine/statics"
)

// swayed is the exact steady motion of a point's network, prepared once.
type swayed struct {
	network *scatter.Network
	drives  []scatter.Drive
	err     error
}

// meshNode is the node of a mesh at a support or a joint.
func (p *Point) meshNode(at scenario.Place) (int, error) {
	line := &p.Network.Lines[at.Line]
	name := "line." + line.Name + "." + line.Nodes[at.Node].Name
	for i := range p.Mesh.Nodes {
		if p.Mesh.Nodes[i].Name == name {
			return i, nil
		}
	}
	return 0, fmt.Errorf("measure: the network has no node %s", name)
}

// share is what becomes of a steady wave that meets a joint or an end.
func (p *Point) share(m *scenario.Measure) (figure, error) {
	node, err := p.meshNode(m.Place)
	if err != nil {
		return figure{}, err
	}
	if m.Kind == scenario.Taken {
		_, taken, err := scatter.EndAt(p.Mesh, node, m.Args[0])
		return figure{value: taken}, err
	}
	amplitude := 1.0 // which a joint that answers in proportion does not ask for
	if len(m.Args) > 1 {
		amplitude = m.Args[1]
	}
	s, err := scatter.JointAtAmplitude(p.Mesh, node, m.Args[0], amplitude, m.After)
	if err != nil && len(p.Mesh.Nodes[node].Laws) > 0 {
		return figure{value: math.NaN()}, nil // no steady motion, or several: there is no such value
	}
	switch m.Kind {
	case scenario.Reflected:
		return figure{value: s.Reflected}, err
	case scenario.Passed:
		return figure{value: s.Passed}, err
	}
	return figure{value: s.Absorbed}, err
}

// response is a steady amplitude per unit of an excitation; there is none at a
// resonance that nothing damps.
func (p *Point) response(m *scenario.Measure) (figure, error) {
	p.lock.Lock()
	defer p.lock.Unlock()
	if p.sway == nil {
		p.sway = &swayed{}
		p.sway.drives, _ = scatter.Drives(p.Network, p.Mesh)
		p.sway.network, p.sway.err = scatter.NewNetwork(p.Mesh)
	}
	if p.sway.err != nil {
		return figure{}, p.sway.err
	}
	watch := p.Network.Watches[m.Watch].Name
	for c := range p.Mesh.Channels {
		channel := &p.Mesh.Channels[c]
		if channel.Watch != watch || channel.Quantity != m.Quantity {
			continue
		}
		for d := range p.sway.drives {
			if p.sway.drives[d].Name != m.Excite {
				continue
			}
			v, err := p.sway.network.ResponseAt(channel, &p.sway.drives[d], m.Args[0])
			if err != nil {
				return figure{value: math.NaN()}, nil
			}
			return figure{value: cmplx.Abs(v)}, nil
		}
		return figure{}, fmt.Errorf("measure: %s drives no steady vibration", m.Excite)
	}
	return figure{}, fmt.Errorf("measure: nothing records what %s asks for", m.Source)
}

// sag is a drop below the chord, or the place of the deepest.
func (p *Point) sag(m *scenario.Measure) figure {
	h, ok := statics.Hang(p.Network, m.Line, 0)
	if !ok {
		return figure{value: math.NaN()}
	}
	if m.HasPlace {
		return figure{value: h.Drop(p.Network.Travel(m.Place))}
	}
	at, drop := h.Deepest()
	if m.Kind == scenario.SagPlace {
		return figure{value: at}
	}
	return figure{value: drop}
}

// warmTension is a tension at another temperature.
func (p *Point) warmTension(m *scenario.Measure) figure {
	line := &p.Network.Lines[m.Line]
	at := statics.MeanTension(line)
	if m.HasPlace {
		at = statics.TensionAt(p.Network, m.Place)
	}
	return figure{value: at + statics.ChangeOfTension(p.Network, m.Line, m.Args[0]-line.Temperature)}
}

// scruton is m zeta/(rho D^2) of the least damped mode asked for, with the mass
// per length and the square of the diameter as means along the line.
func (s *Session) scruton(p *Point, m *scenario.Measure) (figure, error) {
	damping := *m
	damping.Kind = scenario.DampingRatio
	f, err := s.modeFigure(p, &damping)
	mass, square := 0.0, 0.0
	line := &p.Network.Lines[m.Line]
	for i := range line.Segments {
		seg := &line.Segments[i]
		mass += seg.MassPerLength * seg.Length
		square += seg.Diameter * seg.Diameter * seg.Length
	}
	f.value *= mass / (m.Args[0] * square)
	return f, err
}

// scrutonFormula stands beside every Scruton number: definitions differ by 2 and 4 pi.
const scrutonFormula = "scruton is m zeta/(rho D^2)"
