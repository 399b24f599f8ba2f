package measure

import (
	"math"

	"github.com/tautspan/tautspan/engine/mesh"
	"github.com/tautspan/tautspan/engine/scenario"
	"github.com/tautspan/tautspan/engine/statics"
)

// constantShare is the share of a history's largest magnitude within which it
// counts as having come to its last value.
const constantShare = 1e-6

// historySamples is the number of looks at a history over the run, beside its
// breaks.
const historySamples = 4000

// historyEnd is the time after which a history keeps its value, over a run of
// the given length; +Inf where it does not come to rest before 99 % of it. The
// value is looked at at a place of a stretch of the given length.
func historyEnd(h scenario.History, run, x float64) float64 {
	last := h.At(run, x)
	scale := math.Abs(last)
	times := make([]float64, 0, historySamples+1)
	for i := 0; i <= historySamples; i++ {
		t := run * float64(i) / historySamples
		times = append(times, t)
		scale = math.Max(scale, math.Abs(h.At(t, x)))
	}
	for _, b := range h.Breaks {
		for _, t := range []float64{b, b * (1 - 1e-12)} {
			if t >= 0 && t <= run {
				scale = math.Max(scale, math.Abs(h.At(t, x)))
			}
		}
	}
	end := 0.0
	for i := historySamples; i >= 0; i-- {
		if math.Abs(h.At(times[i], x)-last) > constantShare*scale {
			end = times[min(i+1, historySamples)]
			if i >= historySamples*99/100 {
				return math.Inf(1)
			}
			break
		}
	}
	// A break at hand tells the end exactly; one that the looks missed counts too.
	step := run / historySamples
	best := end
	for _, b := range h.Breaks {
		if b > run {
			continue
		}
		changes := math.Abs(h.At(b*(1-1e-12), x)-last) > constantShare*scale || math.Abs(h.At(b*(1-1e-6), x)-last) > constantShare*scale
		if b <= end && b > end-step-1e-12*run && settledFrom(h, b, end, last, x, scale) {
			best = math.Min(best, b)
		} else if b > end && changes {
			best = math.Max(best, b)
		}
	}
	return best
}

func settledFrom(h scenario.History, from, to, last, x, scale float64) bool {
	for i := 0; i <= 8; i++ {
		t := from + (to-from)*float64(i)/8
		if math.Abs(h.At(t, x)-last) > constantShare*scale {
			return false
		}
	}
	return true
}

// ExcitationEnd is when the last excitation has ended or keeps a constant value,
// s; +Inf where one goes on for the whole run.
func ExcitationEnd(net *scenario.Network) float64 {
	run := net.Run.For
	end := 0.0
	for _, p := range net.Plucks {
		end = math.Max(end, p.Until)
	}
	for _, p := range net.Pushes {
		end = math.Max(end, historyEnd(p.Force, run, 0))
	}
	for _, p := range net.Presses {
		length := spanLength(net, p.Along)
		for _, share := range []float64{0, 0.25, 0.5, 0.75, 1} {
			end = math.Max(end, historyEnd(p.Force, run, share*length))
		}
	}
	for _, m := range net.Moves {
		end = math.Max(end, historyEnd(m.Motion, run, 0))
	}
	for _, r := range net.Rolls {
		line := &net.Lines[r.Line]
		end = math.Max(end, r.Starting+(statics.Length(line)-net.Travel(r.From))/r.Speed)
	}
	return end
}

func spanLength(net *scenario.Network, s scenario.SpanOf) float64 {
	if s.Segment >= 0 {
		return net.Lines[s.Line].Segments[s.Segment].Length
	}
	return statics.Length(&net.Lines[s.Line])
}

// pressPoints is the number of point forces that stand for a press when its
// static shape is asked for; the midpoint rule is of second order, 6e-6 of the
// shape here.
const pressPoints = 200

// StaticValue is the value to which a channel comes in the long run: 0 unless
// constant loads remain. Then it is that of the static shape under them, for
// displacements; other quantities, supports that stay moved and lines that
// nothing holds sideways have none here, and the value is NaN.
func StaticValue(net *scenario.Network, m *mesh.Mesh, channel int) float64 {
	c := &m.Channels[channel]
	run := net.Run.For
	held := *net
	held.Plucks = nil
	for _, p := range net.Pushes {
		if f := p.Force.At(run, 0); f != 0 {
			held.Plucks = append(held.Plucks, scenario.PluckOf[float64]{Name: p.Name, At: p.At, Force: f})
		}
	}
	for _, p := range net.Presses {
		held.Plucks = append(held.Plucks, pressed(net, p, run)...)
	}
	moved := false
	for _, mv := range net.Moves {
		moved = moved || mv.Kind != scenario.MotionDisplacement || mv.Motion.At(run, 0) != 0
	}
	switch {
	case c.Quantity == scenario.Velocity || c.Quantity == scenario.Acceleration:
		return 0
	case moved:
		return math.NaN()
	case len(held.Plucks) == 0:
		return 0
	case c.Quantity != scenario.Displacement:
		return math.NaN()
	}
	rest, err := statics.Hold(&held)
	if err != nil {
		return math.NaN()
	}
	return rest.Displacement(c.Line, c.X[0])
}

// pressed stands point forces for what is left of a press at the end of a run.
func pressed(net *scenario.Network, p scenario.PressOf[float64], run float64) []scenario.PluckOf[float64] {
	line := &net.Lines[p.Along.Line]
	length := spanLength(net, p.Along)
	segment, start := p.Along.Segment, 0.0 // start of the segment on the stretch's axis
	if segment < 0 {
		segment = 0
	}
	var out []scenario.PluckOf[float64]
	for i := range pressPoints {
		x := (float64(i) + 0.5) * length / pressPoints
		f := p.Force.At(run, x) * length / pressPoints
		if f == 0 {
			continue
		}
		for p.Along.Segment < 0 && x-start > line.Segments[segment].Length && segment < len(line.Segments)-1 {
			start += line.Segments[segment].Length
			segment++
		}
		at := scenario.Place{Line: p.Along.Line, Node: -1, Segment: segment, Offset: x - start}
		out = append(out, scenario.PluckOf[float64]{Name: p.Name, At: at, Force: f})
	}
	return out
}
