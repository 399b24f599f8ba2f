package doubt

import (
	"context"
	"fmt"
	"math"
	"math/rand/v2"
	"sync"
)

// Input is one doubtful number that answers depend on.
type Input struct {
	Name        string
	Value       float64
	U           float64 // standard uncertainty
	Rectangular bool    // drawn from a rectangle when sampled, else normal
}

// Func gives answers for values of the inputs, in their order. An answer that
// does not exist is NaN. It is called from several goroutines.
type Func func(ctx context.Context, values []float64) (answers []float64, err error)

// Options say how Propagate works.
type Options struct {
	Workers int    // calls at once; below 1: one
	Samples int    // of the sampling that replaces first order where that fails; below 2: none is done
	Seed    uint64 // of the sampling
	Always  bool   // sample every answer
	// Numerical is the bound of each answer; nil: 0.
	Numerical []float64
	// Jumped, if not nil, tells that an answer at the shifted inputs is another
	// event than at the centre (a peak at another time), so that a difference
	// of the two is not a slope. It is asked after all calls have been made.
	Jumped func(answer, input int) bool
}

// Propagated is one answer's doubt before it is given a unit.
type Propagated struct {
	Value         float64
	Parts         []Contribution
	NotFirstOrder string    // why first order was not enough; ""
	Samples       []float64 // drawn answers, where sampling was needed or asked for
}

// curveLimit is the share of f(+)-f(-) that f(+)-2f(0)+f(-) may reach before an
// answer counts as not of first order.
const curveLimit = 0.2

// materialCurve is the share of an answer's whole doubt below which a curve does
// not matter, so that an input without influence, whose two differences are
// both rounding, does not set off sampling. Chosen: a tenth, which changes the
// interval by less than the two figures that an uncertainty is given to.
const materialCurve = 0.1

// Propagate carries the doubt of independent inputs to answers: symmetric
// differences at plus and minus one standard uncertainty,
//
//	c_i = (f(x_i + u_i) - f(x_i - u_i))/2,   u(f)^2 = sum of c_i^2,
//
// which is first order in the inputs with the second-order part of f removed.
// Where |f(+) - 2f(0) + f(-)| > 0.2 |f(+) - f(-)| and the curve matters, an
// answer does not exist on one side, or an event jumped, the answer is sampled.
//
// Source: JCGM 100:2008, 5.1.3 note 2 (from memory).
func Propagate(ctx context.Context, inputs []Input, f Func, o Options) ([]Propagated, error) {
	centre := make([]float64, len(inputs))
	for i, in := range inputs {
		centre[i] = in.Value
	}
	points := [][]float64{centre}
	var moved []int
	for i, in := range inputs {
		if in.U == 0 {
			continue
		}
		moved = append(moved, i)
		for _, sign := range []float64{1, -1} {
			p := append([]float64(nil), centre...)
			p[i] += sign * in.U
			points = append(points, p)
		}
	}
	got, err := callAll(ctx, points, f, o.Workers)
	if err != nil {
		return nil, err
	}
	out := make([]Propagated, len(got[0]))
	sample := false
	for a := range out {
		out[a].Value = got[0][a]
		for k, i := range moved {
			out[a].Parts = append(out[a].Parts, part(inputs[i].Name, got[1+2*k][a], got[0][a], got[2+2*k][a]))
		}
		bound := 0.0
		if o.Numerical != nil {
			bound = o.Numerical[a]
		}
		out[a].NotFirstOrder = notFirstOrder(out[a].Parts, bound)
		for _, i := range moved {
			if out[a].NotFirstOrder == "" && o.Jumped != nil && o.Jumped(a, i) {
				out[a].NotFirstOrder = fmt.Sprintf("the event moves to another time with %s", inputs[i].Name)
			}
		}
		sample = sample || out[a].NotFirstOrder != "" || o.Always
	}
	if !sample || o.Samples < 2 || len(moved) == 0 {
		return out, nil
	}
	drawn, err := callAll(ctx, Draw(inputs, o.Samples, o.Seed), f, o.Workers)
	if err != nil {
		return nil, err
	}
	for a := range out {
		if out[a].NotFirstOrder == "" && !o.Always {
			continue
		}
		for _, answers := range drawn {
			out[a].Samples = append(out[a].Samples, answers[a])
		}
	}
	return out, nil
}

// Number gives an answer its unit and numerical bound.
func (p *Propagated) Number(unit string, numerical float64, exactInputs ...string) Number {
	if math.IsNaN(p.Value) {
		return Missing(unit, exactInputs...)
	}
	if p.Samples != nil {
		return FromSamples(p.Value, unit, numerical, p.Samples, p.Parts, exactInputs...)
	}
	n := Combine(p.Value, unit, numerical, p.Parts, exactInputs...)
	for _, c := range p.Parts {
		if math.IsNaN(c.Change) { // no answer on one side, and not sampled
			n.InputU, n.LeadingInput = math.NaN(), c.Input
			n.Low95, n.High95, n.LowEnd, n.HighEnd = math.Inf(-1), math.Inf(1), math.Inf(-1), math.Inf(1)
		}
	}
	return n
}

func part(name string, plus, centre, minus float64) Contribution {
	c := Contribution{Input: name, Change: (plus - minus) / 2, Curve: plus - 2*centre + minus}
	if math.IsInf(plus, 0) || math.IsInf(minus, 0) || math.IsInf(centre, 0) {
		c.Change, c.Curve = math.NaN(), math.NaN()
		if plus == minus && plus == centre { // infinite throughout: the input does nothing
			c.Change, c.Curve = 0, 0
		}
	}
	return c
}

func notFirstOrder(parts []Contribution, numerical float64) string {
	squares := 0.0
	for _, c := range parts {
		if math.IsNaN(c.Change) {
			return fmt.Sprintf("there is no answer at one standard uncertainty of %s", c.Input)
		}
		squares += c.Change*c.Change + c.Curve*c.Curve/4
	}
	whole := math.Max(math.Sqrt(squares), numerical)
	for _, c := range parts {
		if math.Abs(c.Curve) > curveLimit*2*math.Abs(c.Change) && math.Abs(c.Curve)/2 > materialCurve*whole {
			return fmt.Sprintf("the answer bends with %s", c.Input)
		}
	}
	return ""
}

// callAll calls f at every point, at most workers at once; the answers do not
// depend on how many. The first error, in the order of the points, is returned.
func callAll(ctx context.Context, points [][]float64, f Func, workers int) ([][]float64, error) {
	out := make([][]float64, len(points))
	errs := make([]error, len(points))
	next := make(chan int, len(points))
	for i := range points {
		next <- i
	}
	close(next)
	var wait sync.WaitGroup
	for range min(max(workers, 1), len(points)) {
		wait.Add(1)
		go func() {
			defer wait.Done()
			for i := range next {
				if errs[i] = ctx.Err(); errs[i] == nil {
					out[i], errs[i] = guarded(ctx, points[i], f)
				}
			}
		}()
	}
	wait.Wait()
	for i := range points {
		if errs[i] != nil {
			return nil, errs[i]
		}
		if len(out[i]) != len(out[0]) {
			return nil, fmt.Errorf("doubt: %d answers at one point, %d at another", len(out[i]), len(out[0]))
		}
	}
	return out, nil
}

func guarded(ctx context.Context, values []float64, f Func) (answers []float64, err error) {
	defer func() {
		if r := recover(); r != nil {
			err = fmt.Errorf("doubt: panic while inputs were varied: %v", r)
		}
	}()
	return f(ctx, values)
}

// Draw gives n sets of values of the inputs as a Latin hypercube: each input
// takes n values that split its distribution into equal shares, one from each
// share, and the inputs are paired at random. The same seed gives the same sets.
//
// Source: McKay, Beckman, Conover, Technometrics 21 (1979) 239-245 (from memory).
func Draw(inputs []Input, n int, seed uint64) [][]float64 {
	random := rand.New(rand.NewPCG(seed, 0x9e3779b97f4a7c15))
	out := make([][]float64, n)
	for k := range out {
		out[k] = make([]float64, len(inputs))
	}
	for i, in := range inputs {
		order := random.Perm(n)
		for k := range out {
			share := (float64(order[k]) + random.Float64()) / float64(n)
			out[k][i] = in.at(share)
		}
	}
	return out
}

// at is the value below which a share of the input's distribution lies.
func (in Input) at(share float64) float64 {
	if in.U == 0 {
		return in.Value
	}
	if in.Rectangular {
		return in.Value + in.U*math.Sqrt(3)*(2*share-1)
	}
	share = math.Min(math.Max(share, 1e-12), 1-1e-12)
	return in.Value + in.U*math.Sqrt2*math.Erfinv(2*share-1)
}
