package app

import (
	"context"
	"math"
	"math/cmplx"
	"runtime"

	"github.com/tautspan/tautspan/engine/doubt"
	"github.com/tautspan/tautspan/engine/mesh"
	"github.com/tautspan/tautspan/engine/modal"
	"github.com/tautspan/tautspan/engine/scenario"
)

// samples is how many draws replace first order where an answer is not straight
// in a doubtful input; 400 give a 95 % end to about a tenth of the interval.
const samples = 400

// seed of the draws, fixed so that the same scenario gives the same answer.
const seed = 1

// inputs are the doubtful lets, and the names of those taken as exact.
func (l *loaded) inputs() (doubtful []doubt.Input, exact []string) {
	t := l.compiled.Template
	u := t.StandardU(l.values)
	for i := range t.Lets {
		let := &t.Lets[i]
		switch {
		case let.Doubt != nil:
			doubtful = append(doubtful, doubt.Input{Name: let.Name, Value: l.values[i], U: u[i], Rectangular: let.Doubt.Rectangular})
		case independent(let):
			exact = append(exact, let.Name)
		}
	}
	return doubtful, exact
}

// independent tells whether a let is a number of its own, not made of others.
func independent(let *scenario.Let) bool {
	used := map[int]bool{}
	let.Value.LetsUsed(used)
	return len(used) == 0
}

// at builds the mesh for moved doubtful lets. The output grid stays as it was,
// so that a default that depends on a let does not move with it.
func (l *loaded) at(doubtful []doubt.Input, values []float64) (*scenario.Network, *mesh.Mesh, error) {
	override := map[string]float64{}
	for i := range doubtful {
		override[doubtful[i].Name] = values[i]
	}
	t := l.compiled.Template
	all, err := t.Values(override)
	if err != nil {
		return nil, nil, err
	}
	net, err := t.Bind(all)
	if err != nil {
		return nil, nil, err
	}
	net.Run = l.net.Run
	m, err := mesh.Build(net)
	return net, m, err
}

// propagate carries the doubtful lets to exact answers of the mesh. Where it
// fails the answers stand without input doubt of their own and the failure is
// noted as a warning by the caller's document.
func (l *loaded) propagate(ctx context.Context, centre []float64, units []string, answers func(context.Context, *mesh.Mesh) ([]float64, error)) []doubt.Number {
	doubtful, exact := l.inputs()
	out := make([]doubt.Number, len(centre))
	if len(doubtful) > 0 {
		f := func(ctx context.Context, values []float64) ([]float64, error) {
			_, m, err := l.at(doubtful, values)
			if err != nil {
				return nil, err
			}
			return answers(ctx, m)
		}
		got, err := doubt.Propagate(ctx, doubtful, f, doubt.Options{Workers: runtime.GOMAXPROCS(0), Samples: samples, Seed: seed})
		if err == nil {
			for i := range out {
				out[i] = got[i].Number(units[i], 0, exact...)
			}
			return out
		}
		l.warn("doubt-not-carried", "the doubt of the inputs could not be carried to these answers: "+err.Error())
	}
	for i, v := range centre {
		if math.IsNaN(v) {
			out[i] = doubt.Missing(units[i], exact...)
		} else {
			out[i] = doubt.Exact(v, units[i], exact...)
		}
	}
	return out
}

// shapePlaces is the number of places at which a mode's shape is listed.
const shapePlaces = 129

func shapeLines(m *mesh.Mesh, s *modal.Shape) []ShapeLine {
	var out []ShapeLine
	for i := range m.Lines {
		line := &m.Lines[i]
		sl := ShapeLine{Line: line.Name}
		largest := 0.0
		k := 0
		for p := range shapePlaces {
			x := line.Length * float64(p) / (shapePlaces - 1)
			for k+1 < len(line.Pieces) && x > m.Pieces[line.Pieces[k+1]].X0 {
				k++
			}
			piece := &m.Pieces[line.Pieces[k]]
			u := s.At(mesh.Spot{Node: -1, Piece: line.Pieces[k], At: math.Min(x-piece.X0, piece.Length)})
			largest = math.Max(largest, cmplx.Abs(u))
			sl.X = append(sl.X, x)
			sl.Amplitude = append(sl.Amplitude, cmplx.Abs(u))
			sl.Phase = append(sl.Phase, cmplx.Phase(u))
		}
		if largest > 0 {
			out = append(out, sl)
		}
	}
	return out
}
