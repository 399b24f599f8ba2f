package app

import (
	"context"
	"fmt"
	"math"
	"slices"
	"sync/atomic"

	"github.com/tautspan/tautspan/engine/doubt"
	"github.com/tautspan/tautspan/engine/measure"
	"github.com/tautspan/tautspan/engine/scenario"
	"github.com/tautspan/tautspan/engine/seek"
)

// mostNumbers bounds the table of a sweep; chosen: 160 MB.
const mostNumbers = 20_000_000

// drawnCases is how many cases are drawn where no `sample` says it.
const drawnCases = 200

// shownRows is how many cases stand in the document; all are in the files.
const shownRows = 200

// plan is what the cases of a sweep vary.
type plan struct {
	lets   []int // into the template's lets, in the order of the columns
	values [][]float64
}

// cases works out every case of what is varied, in order, several at once.
func (s *sweeper) cases(ctx context.Context) error {
	t := s.compiled.Template
	if len(t.Varies) == 0 && t.Sample == nil {
		return nil
	}
	width := len(t.Varies) + 3*len(t.Collects) + 3*len(t.Requires) + 1
	p, count := s.plan(mostNumbers / width)
	if p == nil {
		s.refuseWhole("too-many-cases", fmt.Sprintf("a sweep of %.4g cases with %d columns is more than a table of %d numbers holds", count, width, mostNumbers))
		return nil
	}
	s.doc.Cases = len(p.values)
	rows := make([][]float64, len(p.values))
	reasons := make([]string, len(p.values))
	verdicts := make([][]string, len(p.values))
	var done atomic.Int64
	_ = seek.Each(ctx, len(rows), s.want.Workers, func(k int) error { // what fails is told case by case
		row, verdict, err := s.guardedCase(ctx, p, k)
		switch {
		case err != nil && ctx.Err() != nil:
			return nil
		case err != nil:
			reasons[k] = err.Error()
		default:
			rows[k], verdicts[k] = row, verdict
		}
		if n := int(done.Add(1)); s.want.Progress != nil {
			s.want.Progress(n, len(rows))
		}
		return nil
	})
	s.gather(p, rows, reasons, verdicts)
	return ctx.Err()
}

// plan lists the cases, nil where they are more than most: a grid of all values
// that stand side by side, each point with as many draws as are asked for.
func (s *sweeper) plan(most int) (*plan, float64) {
	t := s.compiled.Template
	p := &plan{}
	grid, drawn := []int{}, []int{}
	points := 1.0
	for i := range t.Varies {
		p.lets = append(p.lets, t.Varies[i].Let)
		if t.Varies[i].Draw == scenario.Grid {
			grid = append(grid, i)
			points *= float64(len(t.Varies[i].Values))
		} else {
			drawn = append(drawn, i)
		}
	}
	draws, seedOf := 1, uint64(seed)
	var inputs []doubt.Input
	if t.Sample != nil {
		draws, seedOf = t.Sample.Count, t.Sample.Seed
		if len(t.Varies) == 0 { // the doubts themselves are what varies
			u := t.StandardU(s.values)
			for i := range t.Lets {
				if u[i] > 0 {
					p.lets = append(p.lets, i)
					inputs = append(inputs, doubt.Input{Name: t.Lets[i].Name, Value: s.values[i], U: u[i], Rectangular: t.Lets[i].Doubt.Rectangular})
				}
			}
		}
	} else if len(drawn) > 0 {
		draws = drawnCases
		s.doc.Notes = append(s.doc.Notes, fmt.Sprintf("%d cases are drawn, with seed %d; say `sample N, seed S` for another number", draws, seed))
	}
	if len(drawn) == 0 && len(inputs) == 0 {
		draws = 1
	}
	if total := points * float64(draws); total > float64(most) {
		return nil, total
	}
	var shares [][]float64
	if len(inputs) > 0 {
		shares = doubt.Draw(inputs, draws, seedOf)
	} else if len(drawn) > 0 {
		unit := make([]doubt.Input, len(drawn))
		for i := range unit {
			unit[i] = doubt.Input{Value: 0.5, U: 0.5 / math.Sqrt(3), Rectangular: true}
		}
		shares = doubt.Draw(unit, draws, seedOf)
	}
	at := make([]int, len(grid))
	for {
		for d := range draws {
			row := make([]float64, len(p.lets))
			for k, i := range grid {
				row[i] = t.Varies[i].Values[at[k]]
			}
			for k, i := range drawn {
				row[i] = quantile(&t.Varies[i], shares[d][k])
			}
			if len(inputs) > 0 {
				copy(row, shares[d])
			}
			p.values = append(p.values, row)
		}
		k := len(at) - 1
		for ; k >= 0; k-- { // the last one said changes fastest
			if at[k]++; at[k] < len(t.Varies[grid[k]].Values) {
				break
			}
			at[k] = 0
		}
		if k < 0 {
			return p, points * float64(draws)
		}
	}
}

// quantile is the value below which a share of a distribution lies.
func quantile(v *scenario.Vary, share float64) float64 {
	a := v.Values
	normal := math.Sqrt2 * math.Erfinv(2*math.Min(math.Max(share, 1e-12), 1-1e-12)-1)
	switch v.Draw {
	case scenario.DrawNormal:
		return a[0] + a[1]*normal
	case scenario.DrawLognormal:
		variance := math.Log1p(a[1] * a[1] / (a[0] * a[0])) // of the logarithm
		return a[0] * math.Exp(math.Sqrt(variance)*normal-variance/2)
	case scenario.DrawUniform:
		return a[0] + share*(a[1]-a[0])
	}
	return a[min(int(share*float64(len(a))), len(a)-1)]
}

// guardedCase turns a panic of one case into its failure.
func (s *sweeper) guardedCase(ctx context.Context, p *plan, k int) (row []float64, verdicts []string, err error) {
	defer func() {
		if r := recover(); r != nil {
			err = fmt.Errorf("a defect in this program: %v", r)
		}
	}()
	return s.oneCase(ctx, p.lets, p.values[k])
}

// oneCase answers the scenario at one set of values; the lets varied have no
// doubt of their own.
func (s *sweeper) oneCase(ctx context.Context, lets []int, values []float64) ([]float64, []string, error) {
	t := *s.compiled.Template
	t.Lets = append([]scenario.Let(nil), t.Lets...)
	override := make(map[string]float64, len(lets))
	row := slices.Clone(values)
	for i, let := range lets {
		t.Lets[let].Doubt = nil
		override[t.Lets[let].Name] = values[i]
	}
	session, err := measure.New(&t, override, s.options(ctx, 1))
	if err != nil {
		return nil, nil, err
	}
	outcome, err := s.outcome(ctx, session, 1)
	if err != nil {
		return nil, nil, err
	}
	answers, err := session.Answer(ctx, outcome)
	if err != nil {
		return nil, nil, err
	}
	for i := range answers.Collected {
		n := &answers.Collected[i].Value
		row = append(row, n.Value, n.Low95, n.High95)
	}
	var verdicts []string
	for i := range answers.Requirements {
		q := &answers.Requirements[i]
		row = append(row, q.Value.Value, q.Judgement.Margin, verdictNumber[string(q.Verdict)])
		verdicts = append(verdicts, string(q.Verdict))
	}
	return row, verdicts, nil
}
