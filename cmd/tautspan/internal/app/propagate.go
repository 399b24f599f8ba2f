package app

import (
	"context"
	"math"
	"math/cmplx"

	"github.com/tautspan/tautspan/engine/doubt"
	"github.com/tautspan/tautspan/engine/measure"
	"github.com/tautspan/tautspan/engine/mesh"
	"github.com/tautspan/tautspan/engine/modal"
)

// samples is how many draws replace first order where an answer is not straight
// in a doubtful input; 400 give a 95 % end to about a tenth of the interval.
const samples = 400

// seed of the draws, fixed so that the same scenario gives the same answer.
const seed = 1

// measuring is how doubt is carried to the answers of a scenario: to first order
// and drawn only where that fails, or drawn throughout where it says `sample`.
func (l *loaded) measuring() measure.Options {
	o := measure.Options{Workers: workers(), Seed: seed, ExactSamples: samples, RunSamples: noSamples}
	if s := l.compiled.Template.Sample; s != nil {
		o.Sample, o.Seed, o.ExactSamples, o.RunSamples = true, s.Seed, s.Count, s.Count
	}
	return o
}

// leftToSweep says which statements only a sweep answers.
func (l *loaded) leftToSweep() []string {
	t := l.compiled.Template
	if len(t.Bests)+len(t.Meets)+len(t.Varies) == 0 {
		return nil
	}
	return []string{"best, meet and vary are answered by `tautspan sweep`"}
}

// propagate carries the doubtful lets to exact answers of the mesh. Where it
// fails the answers stand without input doubt of their own and the failure is
// noted as a warning by the caller's document.
func (l *loaded) propagate(ctx context.Context, centre []float64, units []string, answers func(context.Context, *mesh.Mesh) ([]float64, error)) []doubt.Number {
	out := make([]doubt.Number, len(centre))
	session, err := measure.New(l.compiled.Template, nil, l.measuring())
	var exact []string
	if err == nil {
		exact = session.Exact()
		var carried []doubt.Propagated
		carried, err = session.Carry(ctx, centre, func(ctx context.Context, p *measure.Point) ([]float64, error) { return answers(ctx, p.Mesh) })
		if err == nil {
			for i := range out {
				out[i] = carried[i].Number(units[i], 0, exact...)
			}
			return out
		}
	}
	l.warn("doubt-not-carried", "the doubt of the inputs could not be carried to these answers: "+err.Error())
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
