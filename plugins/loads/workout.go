package loads

import (
	"context"
	"errors"
	"fmt"
	"math"

	"github.com/tautspan/tautspan/engine/formula"
	"github.com/tautspan/tautspan/engine/scenario"
	"github.com/tautspan/tautspan/plugins/author"
)

// What one load may be sampled to: instants, places, and numbers in all.
const (
	instantsMost = 4_000_000
	placesMost   = 200
	numbersMost  = 40_000_000
)

// WorkOut turns the loads of a network into pushes and presses: forces sampled
// as finely as each load asks, straight between instants and between places.
// find gives a load by its name. Faults are *scenario.PathError at the load.
func WorkOut(ctx context.Context, net *scenario.Network, find func(name string) (author.Load, error)) error {
	for i := range net.Loads {
		l := &net.Loads[i]
		if err := workOut(ctx, net, l, find); err != nil {
			var p *scenario.PathError
			if errors.As(err, &p) || ctx.Err() != nil {
				return err
			}
			return &scenario.PathError{Path: "excite." + l.Name, What: err.Error()}
		}
	}
	net.Loads = nil
	return nil
}

func workOut(ctx context.Context, net *scenario.Network, l *scenario.LoadOf[float64], find func(string) (author.Load, error)) error {
	load, err := find(l.Plugin)
	if err != nil {
		return err
	}
	about := load.About()
	want := author.LoadWant{Parameters: map[string]float64{}, Along: l.Along, Duration: net.Run.For}
	for _, p := range l.Parameters {
		want.Parameters[p.Name] = p.Value / p.Factor
	}
	for i := range about.Parameters {
		q := &about.Parameters[i]
		if v, ok := want.Parameters[q.Name]; !ok || !q.Allows(v) {
			return &scenario.PathError{Path: "excite." + l.Name + "." + q.Name, What: fmt.Sprintf("must lie between %g and %g %s, and is %g", q.Least, q.Most, q.Unit, v)}
		}
	}
	if l.Along {
		want.Length = length(net, l.Span)
	}
	step, spacing, err := load.Prepare(want)
	if err != nil {
		return err
	}
	grid, err := sampling(l, want, step, spacing)
	if err != nil {
		return err
	}
	want.Places = grid.places
	force := make([][]float64, len(grid.places))
	for k := range force {
		force[k] = make([]float64, len(grid.times))
	}
	if err := load.Evaluate(ctx, want, grid.times, force); err != nil {
		return err
	}
	grid.act(net, l, force)
	return nil
}

func length(net *scenario.Network, s scenario.SpanOf) float64 {
	line := &net.Lines[s.Line]
	if s.Segment >= 0 {
		return line.Segments[s.Segment].Length
	}
	sum := 0.0
	for i := range line.Segments {
		sum += line.Segments[i].Length
	}
	return sum
}

// sampled is where and when a load is sampled.
type sampled struct {
	times  []float64 // s
	places []float64 // m from the stretch's start; one of no account at a place
}

// sampling follows the load's wishes as far as memory allows.
func sampling(l *scenario.LoadOf[float64], want author.LoadWant, step, spacing float64) (*sampled, error) {
	if !(step > 0) || math.IsInf(step, 0) || l.Along && !(spacing > 0) {
		return nil, fmt.Errorf("%s wants a step of %g s and a spacing of %g m", l.Plugin, step, spacing)
	}
	instants := math.Ceil(want.Duration/step) + 2
	places := 1.0
	if l.Along && spacing < want.Length {
		places = math.Ceil(want.Length/spacing) + 1
	}
	switch {
	case instants > instantsMost:
		return nil, fmt.Errorf("%s wants %.3g instants over the run, and %d is the most", l.Plugin, instants, instantsMost)
	case places > placesMost:
		return nil, fmt.Errorf("%s wants %.3g places along the stretch, and %d is the most", l.Plugin, places, placesMost)
	case instants*places > numbersMost:
		return nil, fmt.Errorf("%s wants %.3g forces, and %.0e is the most", l.Plugin, instants*places, float64(numbersMost))
	}
	s := &sampled{times: make([]float64, int(instants)), places: make([]float64, int(places))}
	for i := range s.times {
		s.times[i] = float64(i) * step
	}
	for k := range s.places {
		if len(s.places) == 1 {
			s.places[0] = want.Length / 2
			break
		}
		s.places[k] = want.Length * float64(k) / (places - 1)
	}
	return s, nil
}

// act adds the forces to the network. Along a stretch the force at a place rises
// from nothing at the place before and falls to nothing at the place after.
func (s *sampled) act(net *scenario.Network, l *scenario.LoadOf[float64], force [][]float64) {
	for k := range force {
		over := formula.Lookup(&formula.Table{Name: l.Name, X: s.times, Y: force[k]}, formula.Arg(formula.ArgT))
		if !l.Along {
			net.Pushes = append(net.Pushes, scenario.PushOf[float64]{Name: l.Name, At: l.At, Force: scenario.History{Value: over, Breaks: []float64{0}}})
			return
		}
		press := scenario.PressOf[float64]{Name: l.Name, Along: l.Span}
		if len(s.places) > 1 {
			over = formula.Mul(formula.Lookup(s.hat(k), formula.Arg(formula.ArgX)), over)
			press.From, press.To = s.places[max(0, k-1)], s.places[min(k+1, len(s.places)-1)]
		}
		press.Force = scenario.History{Value: over, Breaks: []float64{0}}
		net.Presses = append(net.Presses, press)
	}
}

// hat is 1 at place k and 0 at its neighbours.
func (s *sampled) hat(k int) *formula.Table {
	t := &formula.Table{Name: "place"}
	if k > 0 {
		t.X, t.Y = append(t.X, s.places[k-1]), append(t.Y, 0)
	}
	t.X, t.Y = append(t.X, s.places[k]), append(t.Y, 1)
	if k < len(s.places)-1 {
		t.X, t.Y = append(t.X, s.places[k+1]), append(t.Y, 0)
	} else {
		// The end of the stretch is a sum of lengths and may round past this.
		t.X, t.Y = append(t.X, s.places[k]*(1+1e-9)), append(t.Y, 1)
	}
	return t
}
