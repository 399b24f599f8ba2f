package measure

import (
	"context"

	"github.com/tautspan/tautspan/engine/compare"
	"github.com/tautspan/tautspan/engine/doubt"
)

// Nominal gives the values of what is collected at the lets as they stand,
// without their doubt; NaN where a value does not exist, or needs a run and
// outcome is nil.
func (s *Session) Nominal(ctx context.Context, outcome *compare.Outcome) ([]float64, error) {
	values, err := s.nominals(ctx, outcome)
	if err != nil {
		return nil, err
	}
	out := make([]float64, len(s.collects))
	for i, e := range s.collects {
		args := make([]float64, len(e.terms))
		for k, t := range e.terms {
			if t.inner == nil {
				args[k] = values[t.leaf].value
				continue
			}
			inner, _, err := s.numbers(ctx, t.inner, values)
			if err != nil {
				return nil, err
			}
			if args[k] = inner[atValue].LowEnd; t.high {
				args[k] = inner[atValue].HighEnd
			}
		}
		out[i] = e.programs[atValue].Eval(s.centre.Values, args)
	}
	return out, nil
}

// Carry carries the doubt of the lets to answers that somebody else works out at
// a point, such as all natural frequencies of a network. centre are the answers
// at the centre.
func (s *Session) Carry(ctx context.Context, centre []float64, answers func(context.Context, *Point) ([]float64, error)) ([]doubt.Propagated, error) {
	if len(s.inputs) == 0 {
		out := make([]doubt.Propagated, len(centre))
		for i, v := range centre {
			out[i].Value = v
		}
		return out, nil
	}
	f := func(ctx context.Context, values []float64) ([]float64, error) {
		p, err := s.at(values)
		if err != nil {
			return nil, err
		}
		return answers(ctx, p)
	}
	return doubt.Propagate(ctx, s.inputs, f, doubt.Options{Workers: s.options.Workers, Samples: s.options.ExactSamples, Seed: s.options.Seed, Always: s.options.Sample})
}

// Exact are the names of all lets that are inputs taken as exact.
func (s *Session) Exact() []string {
	var out []string
	for i, exact := range s.exact {
		if exact {
			out = append(out, s.template.Lets[i].Name)
		}
	}
	return out
}
