package mesh

import (
	"fmt"
	"math"

	"github.com/tautspan/tautspan/engine/formula"
	"github.com/tautspan/tautspan/engine/scenario"
)

// loads carries over everything that acts after t = 0.
func (b *builder) loads() error {
	if err := b.finiteHistories(); err != nil {
		return err
	}
	for i, p := range b.net.Plucks {
		b.m.Drawn = append(b.m.Drawn, Drawn{At: b.spot(p.At), Force: b.rest.Plucks[i].Force})
		if p.Until <= 0 {
			continue
		}
		// Held with the static force until it is let go: nothing else changes,
		// and the start shape stays in balance until then.
		held := formula.Sub(formula.Const(1), formula.Apply(formula.OpStep, formula.Arg(formula.ArgT), formula.Const(1), formula.Const(p.Until)))
		force := formula.Mul(formula.Const(b.rest.Plucks[i].Force), held)
		b.push(p.Name, p.At, scenario.History{Value: force, Breaks: []float64{p.Until}})
	}
	for _, p := range b.net.Pushes {
		b.push(p.Name, p.At, p.Force)
	}
	for _, p := range b.net.Presses {
		parts := b.along(p.Along)
		if p.To > 0 {
			parts = b.clip(parts, p.From, p.To)
		}
		b.m.Presses = append(b.m.Presses, Press{Name: p.Name, Parts: parts, Force: p.Force})
	}
	for _, r := range b.net.Rolls {
		from := b.net.Travel(r.From)
		b.mark(b.spot(r.From), MarkEdge)
		b.m.Rolls = append(b.m.Rolls, Roll{Name: r.Name, Line: r.Line, Speed: r.Speed, Force: r.Force, From: from, Starting: r.Starting, Mass: r.Mass, Spring: r.Spring, Dashpot: r.Dashpot})
	}
	return b.moves()
}

// clip keeps what of the parts of a stretch lies between two places on its own x
// axis, and marks the edges.
func (b *builder) clip(parts []Part, from, to float64) []Part {
	first := parts[0].Origin
	var out []Part
	for _, q := range parts {
		length := b.m.Pieces[q.Piece].Length
		q.From, q.To = math.Max(0, from-(q.Origin-first)), math.Min(length, to-(q.Origin-first))
		if q.From >= q.To {
			continue
		}
		for _, at := range []float64{q.From, q.To} {
			if at > 0 && at < length {
				b.mark(Spot{Node: -1, Piece: q.Piece, At: at}, MarkEdge)
			}
		}
		out = append(out, q)
	}
	return out
}

// finiteHistories refuses a history that has no finite value somewhere in the
// run, as far as a few thousand looks can tell.
func (b *builder) finiteHistories() error {
	const looks = 4000
	end := b.m.Timing.End()
	check := func(name string, h scenario.History, x float64) error {
		for i := 0; i <= looks; i++ {
			t := end * float64(i) / looks
			if v := h.At(t, x); math.IsNaN(v) || math.IsInf(v, 0) {
				return &scenario.PathError{Path: "excite." + name + ".with", What: fmt.Sprintf("has no finite value at t = %.4g s", t)}
			}
		}
		return nil
	}
	for _, p := range b.net.Pushes {
		if err := check(p.Name, p.Force, 0); err != nil {
			return err
		}
	}
	for _, p := range b.net.Presses {
		parts := b.along(p.Along)
		last := parts[len(parts)-1]
		for _, x := range []float64{0, (last.Origin + b.m.Pieces[last.Piece].Length) / 2} {
			if err := check(p.Name, p.Force, x); err != nil {
				return err
			}
		}
	}
	for _, mv := range b.net.Moves {
		if err := check(mv.Name, mv.Motion, 0); err != nil {
			return err
		}
	}
	return nil
}

func (b *builder) push(name string, at scenario.Place, force scenario.History) {
	spot := b.spot(at)
	b.mark(spot, MarkLoad)
	b.m.Pushes = append(b.m.Pushes, Push{Name: name, At: spot, Force: force})
}

func (b *builder) watches() {
	for _, w := range b.net.Watches {
		for _, q := range w.Quantities {
			c := Channel{Watch: w.Name, Quantity: q, Line: w.At.Line, Along: w.Along}
			if w.Along {
				c.Line = w.Span.Line
				c.X = b.places(w.Span)
				for _, x := range c.X {
					c.Spots = append(c.Spots, b.spotAt(c.Line, x))
				}
			} else {
				spot := b.spot(w.At)
				b.mark(spot, MarkWatch)
				c.Spots, c.X = []Spot{spot}, []float64{b.net.Travel(w.At)}
			}
			b.m.Channels = append(b.m.Channels, c)
		}
	}
}

// places spreads the points of a picture evenly over a stretch.
func (b *builder) places(s scenario.SpanOf) []float64 {
	parts := b.along(s)
	first, last := &b.m.Pieces[parts[0].Piece], &b.m.Pieces[parts[len(parts)-1].Piece]
	from, to := first.X0, b.m.Nodes[last.To].X
	x := make([]float64, maxFieldPlaces)
	for i := range x {
		x[i] = from + (to-from)*float64(i)/float64(len(x)-1)
	}
	x[len(x)-1] = to
	return x
}

// moves makes the prescribed motions of supports, several on one support added up.
func (b *builder) moves() error {
	for _, mv := range b.net.Moves {
		n := &b.m.Nodes[b.node(scenario.Place{Line: mv.Line, Node: mv.Node})]
		motion := newMotion(mv, b.m.Timing.End()+b.m.Timing.Every)
		if v := motion.Displacement(b.m.Timing.End()); math.IsNaN(v) || math.IsInf(v, 0) {
			return &scenario.PathError{Path: "excite." + mv.Name + ".with", What: "leads to no finite motion"}
		}
		if n.Motion != nil {
			motion = sum(n.Motion, motion)
		}
		n.Motion = motion
		n.Start, n.StartRate = motion.Displacement(0), motion.Velocity(0)
	}
	return nil
}

func sum(a, c *Motion) *Motion {
	return &Motion{
		Displacement: func(t float64) float64 { return a.Displacement(t) + c.Displacement(t) },
		Velocity:     func(t float64) float64 { return a.Velocity(t) + c.Velocity(t) },
		Breaks:       append(append([]float64(nil), a.Breaks...), c.Breaks...),
	}
}
