package spectral

import (
	"fmt"
	"math"

	"github.com/tautspan/tautspan/engine/formula"
	"github.com/tautspan/tautspan/engine/mesh"
	"github.com/tautspan/tautspan/engine/solver"
)

func fault(format string, args ...any) error {
	return &solver.FaultError{Solver: name, What: fmt.Sprintf(format, args...)}
}

func finite(v ...float64) bool {
	for _, x := range v {
		if math.IsNaN(x) || math.IsInf(x, 0) {
			return false
		}
	}
	return true
}

// validate checks what the assembly relies on.
func validate(m *mesh.Mesh) error {
	if m.Timing.Rows < 1 || m.Timing.Rows > 1 && !(m.Timing.Every > 0) || !finite(m.Timing.Every, m.Timing.End(), m.Band) {
		return fault("time grid of %d rows every %g s", m.Timing.Rows, m.Timing.Every)
	}
	for i := range m.Nodes {
		n := &m.Nodes[i]
		if !finite(n.Mass, n.Spring, n.Dashpot, n.Start, n.StartRate) || n.Mass < 0 || n.Spring < 0 || n.Dashpot < 0 {
			return fault("node %q: mass %g kg, spring %g N/m, dashpot %g N s/m", n.Name, n.Mass, n.Spring, n.Dashpot)
		}
		if !finite(n.Rotary, n.Inertia) || n.Rotary < 0 || n.Inertia < 0 {
			return fault("node %q: %g N m/rad against turning, inertia %g kg m^2", n.Name, n.Rotary, n.Inertia)
		}
		for k := range n.Laws {
			if err := validateLaw(&n.Laws[k], n.Name); err != nil {
				return err
			}
		}
		for _, b := range n.Brackets {
			if !finite(b.K, b.C, b.Start) || b.K < 0 || b.C < 0 {
				return fault("node %q: bracket %g N/m, %g N s/m", n.Name, b.K, b.C)
			}
		}
	}
	for i := range m.Pieces {
		if err := validatePiece(m, i); err != nil {
			return err
		}
	}
	for _, l := range m.Links {
		if !within(l.A, m.Nodes) || !within(l.B, m.Nodes) || !finite(l.Spring, l.Dashpot, l.Through) || l.Spring < 0 || l.Dashpot < 0 || l.Through < 0 {
			return fault("link %q: %g N/m, %g N s/m", l.Name, l.Spring, l.Dashpot)
		}
	}
	return validateActions(m)
}

func within[T any](i int, of []T) bool { return i >= 0 && i < len(of) }

func validatePiece(m *mesh.Mesh, i int) error {
	p := &m.Pieces[i]
	if !within(p.From, m.Nodes) || !within(p.To, m.Nodes) || p.From == p.To {
		return fault("piece %d joins nodes %d and %d", i, p.From, p.To)
	}
	if !finite(p.Length, p.MassPerLength, p.Tension, p.Viscous) ||
		!(p.Length > 0) || !(p.MassPerLength > 0) || p.Tension < 0 || p.Tension == 0 && !(p.TensionRise > 0) || p.Viscous < 0 ||
		!finite(travelTime(p), 1/travelTime(p), p.Impedance()) {
		return fault("piece %d: %g m, %g kg/m, %g N, %g N s/m^2", i, p.Length, p.MassPerLength, p.Tension, p.Viscous)
	}
	end := endTension(p)
	if !finite(end, p.Bending, p.Internal) || end < 0 || p.Tension+end == 0 || p.Bending < 0 || p.Internal < 0 {
		return fault("piece %d: %g N at its end, bending %g N m^2, internal loss %g s", i, end, p.Bending, p.Internal)
	}
	if p.Law != nil {
		if err := validateLaw(p.Law, fmt.Sprintf("piece %d", i)); err != nil {
			return err
		}
	}
	last := 0.0
	for _, k := range p.Marks {
		if !(k.At >= last) || !(k.At <= p.Length) {
			return fault("piece %d: mark at %g m", i, k.At)
		}
		last = k.At
	}
	return nil
}

// validateLaw checks the numbers of a law and what its formulas read.
func validateLaw(l *mesh.Law, where string) error {
	kinds := 0
	if f := l.Friction; f != nil {
		kinds++
		if !finite(f.Force, f.Through) || f.Force < 0 || f.Through < 0 {
			return fault("%s: friction %g, through %g", where, f.Force, f.Through)
		}
	}
	if s := l.Stop; s != nil {
		kinds++
		if !finite(s.Gap, s.Spring) || s.Spring < 0 {
			return fault("%s: stop at %g m, %g N/m", where, s.Gap, s.Spring)
		}
	}
	if w := l.Written; w != nil {
		kinds++
		if len(w.Rates) != len(w.Starts) || !finite(w.Starts...) {
			return fault("%s: law %q has %d states and %d rates", where, l.Name, len(w.Starts), len(w.Rates))
		}
		for _, p := range append([]formula.Program{w.Force}, w.Rates...) {
			for _, in := range p.Code {
				if in.Op == formula.OpLet || in.Op == formula.OpArg && in.Index >= mesh.ArgState+len(w.Starts) {
					return fault("%s: law %q reads what it has not", where, l.Name)
				}
			}
		}
	}
	if kinds != 1 {
		return fault("%s: law %q is %d laws", where, l.Name, kinds)
	}
	return nil
}

// validateActions checks the places and numbers of loads and channels.
func validateActions(m *mesh.Mesh) error {
	spot := func(s mesh.Spot) bool {
		if s.Node >= 0 {
			return within(s.Node, m.Nodes)
		}
		return within(s.Piece, m.Pieces) && s.At >= 0 && s.At <= m.Pieces[s.Piece].Length
	}
	for _, p := range m.Pushes {
		if !spot(p.At) || !finite(p.Force.Breaks...) {
			return fault("push %q: place or breaks", p.Name)
		}
	}
	for _, p := range m.Presses {
		for _, part := range p.Parts {
			if !within(part.Piece, m.Pieces) || !finite(part.From, part.To, part.Origin) {
				return fault("press %q: stretch", p.Name)
			}
		}
		if !finite(p.Force.Breaks...) {
			return fault("press %q: breaks", p.Name)
		}
	}
	for _, r := range m.Rolls {
		if !within(r.Line, m.Lines) || len(m.Lines[r.Line].Pieces) == 0 || !finite(r.Speed, r.Force, r.From, r.Starting, r.Mass, r.Spring, r.Dashpot) ||
			r.Mass < 0 || r.Spring < 0 || r.Dashpot < 0 {
			return fault("roll %q", r.Name)
		}
	}
	for _, l := range m.Lines {
		for _, p := range l.Pieces {
			if !within(p, m.Pieces) {
				return fault("line %q has piece %d", l.Name, p)
			}
		}
		if l.Stretch != nil && (!finite(l.Stretch.Stiffness) || l.Stretch.Stiffness < 0) {
			return fault("line %q: stretch stiffness %g N/m", l.Name, l.Stretch.Stiffness)
		}
		if l.Sag != nil && (len(l.Sag.Pieces) != len(l.Pieces) || !finite(l.Sag.Stiffness) || !finite(l.Sag.Pieces...) || l.Sag.Stiffness < 0) {
			return fault("line %q: sag", l.Name)
		}
	}
	for c := range m.Channels {
		for _, s := range m.Channels[c].Spots {
			if !spot(s) {
				return fault("channel %q: place", m.Channels[c].Name())
			}
		}
	}
	return nil
}

// refuses lists what has no equation of motion here.
func refuses(m *mesh.Mesh) []string {
	if beyond := m.Unknown(framed | lawful | mesh.TieBracket); len(beyond) > 0 {
		return beyond
	}
	var out []string
	for _, r := range m.Rolls {
		if r.Mass > 0 && r.Spring == 0 {
			out = append(out, fmt.Sprintf("does not represent a rolling mass without a spring under it (%s)", r.Name))
		}
	}
	for _, l := range m.Links {
		if l.Through > 0 && within(l.A, m.Nodes) && within(l.B, m.Nodes) && (m.Nodes[l.A].Motion != nil || m.Nodes[l.B].Motion != nil) {
			out = append(out, fmt.Sprintf("does not represent a bracket that gives in a tie to a moved support (%s)", l.Name))
		}
	}
	attached := m.Attached()
	for i := range m.Nodes {
		n := &m.Nodes[i]
		if len(attached[i]) == 0 && !n.Fixed && n.Motion == nil && n.Mass == 0 {
			out = append(out, fmt.Sprintf("%s hangs free and has no mass", n.Name))
		}
	}
	return out
}
