package seek

import (
	"context"
	"fmt"
	"math"
	"sync"

	"github.com/tautspan/tautspan/engine/doubt"
)

// Problem is what is sought in: functions of x on [From, To].
type Problem struct {
	From, To float64
	Steps    int           // looks at the range, in equal steps; at least 4
	Inputs   []doubt.Input // other doubtful numbers
	// Values gives the functions numbered in which, at x, for values of the inputs
	// (nil: as they stand). What does not exist is NaN. It is called from several
	// goroutines.
	Values  func(ctx context.Context, which []int, x float64, inputs []float64) ([]float64, error)
	Workers int
}

// step is the distance of two looks.
func (p *Problem) step() float64 { return (p.To - p.From) / float64(p.Steps) }

// at is the place of look k.
func (p *Problem) at(k int) float64 {
	if k == p.Steps {
		return p.To
	}
	return p.From + (p.To-p.From)*float64(k)/float64(p.Steps)
}

// look works out functions at every place of the range; [place][function].
func (p *Problem) look(ctx context.Context, which []int) ([][]float64, error) {
	if p.Steps < 4 || !(p.From < p.To) || math.IsInf(p.To-p.From, 0) {
		return nil, fmt.Errorf("seek: %d steps from %g to %g are no search", p.Steps, p.From, p.To)
	}
	out := make([][]float64, p.Steps+1)
	err := Each(ctx, len(out), p.Workers, func(k int) (err error) {
		out[k], err = p.Values(ctx, which, p.at(k), nil)
		if err == nil && len(out[k]) != len(which) {
			err = fmt.Errorf("seek: %d values for %d functions", len(out[k]), len(which))
		}
		return err
	})
	return out, err
}

// one is a single function of x with the first error kept.
type one struct {
	ctx    context.Context
	p      *Problem
	which  []int
	inputs []float64
	err    error
}

func (p *Problem) one(ctx context.Context, which int, inputs []float64) *one {
	return &one{ctx: ctx, p: p, which: []int{which}, inputs: inputs}
}

func (o *one) value(x float64) float64 {
	if o.err != nil {
		return math.NaN()
	}
	if o.err = o.ctx.Err(); o.err != nil {
		return math.NaN()
	}
	v, err := o.p.Values(o.ctx, o.which, x, o.inputs)
	if err != nil {
		o.err = err
		return math.NaN()
	}
	return v[0]
}

// Each calls f for 0 to n-1, at most workers at once, and returns the error of
// the lowest number that failed. Numbers are taken in order; once the context
// ends no more are begun. A panic of f becomes an error.
func Each(ctx context.Context, n, workers int, f func(k int) error) error {
	errs := make([]error, n)
	next := make(chan int)
	var wait sync.WaitGroup
	for range min(max(workers, 1), max(n, 1)) {
		wait.Add(1)
		go func() {
			defer wait.Done()
			for k := range next {
				errs[k] = guarded(k, f)
			}
		}()
	}
	begun := 0
	for ; begun < n && ctx.Err() == nil; begun++ {
		next <- begun
	}
	close(next)
	wait.Wait()
	for _, err := range errs {
		if err != nil {
			return err
		}
	}
	if begun < n {
		return ctx.Err()
	}
	return nil
}

func guarded(k int, f func(int) error) (err error) {
	defer func() {
		if r := recover(); r != nil {
			err = fmt.Errorf("panic in case %d: %v", k+1, r)
		}
	}()
	return f(k)
}
