package host

import (
	"fmt"

	"github.com/tautspan/tautspan/engine/mesh"
)

// functions answers a solver's questions about a mesh.
type functions struct{ mesh *mesh.Mesh }

// Values are those of a function at places or times.
func (f functions) Values(what string, index int, at, time []float64) ([]float64, error) {
	m := f.mesh
	out := make([]float64, len(at))
	each := func(value func(x float64) float64) ([]float64, error) {
		if value == nil {
			return out, nil // rest
		}
		for i, x := range at {
			out[i] = value(x)
		}
		return out, nil
	}
	within := func(n int) bool { return index >= 0 && index < n }
	switch {
	case what == "start" && within(len(m.Pieces)):
		return each(m.Pieces[index].Start)
	case what == "start_rate" && within(len(m.Pieces)):
		return each(m.Pieces[index].StartRate)
	case what == "motion" && within(len(m.Nodes)) && m.Nodes[index].Motion != nil:
		return each(m.Nodes[index].Motion.Displacement)
	case what == "motion_rate" && within(len(m.Nodes)) && m.Nodes[index].Motion != nil:
		return each(m.Nodes[index].Motion.Velocity)
	case what == "push" && within(len(m.Pushes)):
		return each(func(t float64) float64 { return m.Pushes[index].Force.At(t, 0) })
	case what == "press" && within(len(m.Presses)) && len(time) == len(at):
		for i := range at {
			out[i] = m.Presses[index].Force.At(time[i], at[i])
		}
		return out, nil
	}
	return nil, fmt.Errorf("the problem has no %s %d", what, index)
}
