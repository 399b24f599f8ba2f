// A solver plugin to start from: central differences of order 2 on one taut
// string between two held supports, with viscous loss, point forces and any
// start. Build it, then: tautspan plugins add ./solver
package main

import (
	"context"
	"fmt"
	"math"

	"github.com/tautspan/tautspan/plugins/author"
)

func main() { author.Serve(leapfrog{}) }

type leapfrog struct{}

func (leapfrog) About() author.About {
	return author.About{
		Name: "leapfrog", Version: "1", Says: "central differences on one taut string, an example",
		Cannot: []string{"more than one piece of line", "fittings", "anything but displacement"},
	}
}

// Refuses says in the user's words what this solver cannot do.
func (leapfrog) Refuses(p *author.Problem) []string {
	out := p.Beyond() // bending, sag and so on: none of them is known here
	if len(p.Pieces) != 1 || len(p.Nodes) != 2 {
		return append(out, "takes one segment without joints only")
	}
	for _, n := range p.Nodes {
		if !n.Fixed || n.Moved {
			out = append(out, "wants both supports held")
		}
	}
	if len(p.Presses)+len(p.Rolls) > 0 {
		out = append(out, "takes point forces only")
	}
	for _, c := range p.Channels {
		if c.Quantity != "displacement" || c.Means != 0 {
			out = append(out, "answers for displacement only, not for "+c.Quantity)
		}
	}
	return out
}

// grid is one level's discretisation: cells of equal length at a Courant number
// just below 1, the step a whole part of the output interval. A level halves both,
// so that errors of successive levels show the order.
func grid(p *author.Problem, w author.Want) (cells, sub int) {
	q := p.Pieces[0]
	speed := math.Sqrt(q.Tension / q.MassPerLength)
	sub = int(math.Ceil(p.Every * speed * float64(int(40)<<w.Effort) / q.Length))
	cells = int(q.Length / speed * float64(sub) / p.Every * (1 + 1e-9))
	return cells << w.Level, sub << w.Level
}

// spread are the four grid points around a place and their shares, a cubic:
// straight shares would leave an error that jumps from level to level.
func spread(at, h float64, cells int) (first int, w [4]float64) {
	first = max(0, min(int(at/h)-1, cells-3))
	s := at/h - float64(first)
	return first, [4]float64{
		-(s - 1) * (s - 2) * (s - 3) / 6, s * (s - 2) * (s - 3) / 2, -s * (s - 1) * (s - 3) / 2, s * (s - 1) * (s - 2) / 6,
	}
}

func (leapfrog) Plan(p *author.Problem, w author.Want) (author.Plan, error) {
	if w.Level > 12 {
		return author.Plan{}, fmt.Errorf("level %d %w", w.Level, author.ErrBudget)
	}
	cells, sub := grid(p, w)
	steps := (p.Rows - 1) * sub
	return author.Plan{Cells: cells, Steps: steps, Work: int64(cells) * int64(steps), Bytes: int64(cells)*24 + int64(p.Rows)*8}, nil
}

// Solve steps m u_tt + c u_t = T u_xx + F.
func (s leapfrog) Solve(ctx context.Context, p *author.Problem, w author.Want, out *author.Records, progress func(float64)) (author.Outcome, error) {
	plan, err := s.Plan(p, w)
	if err != nil {
		return author.Outcome{}, err
	}
	cells, sub := grid(p, w)
	q := p.Pieces[0]
	h, dt := q.Length/float64(cells), p.Every/float64(sub)
	r, g := q.Tension/q.MassPerLength*dt*dt/(h*h), q.Viscous/q.MassPerLength*dt/2

	at := make([]float64, cells+1)
	for i := range at {
		at[i] = float64(i) * h
	}
	now, err := values(q.HasStart, len(at), func() ([]float64, error) { return p.Start(0, at) })
	if err != nil {
		return author.Outcome{}, err
	}
	rate, err := values(q.HasStartRate, len(at), func() ([]float64, error) { return p.StartRate(0, at) })
	if err != nil {
		return author.Outcome{}, err
	}
	forces, err := pushes(p, plan.Steps, dt)
	if err != nil {
		return author.Outcome{}, err
	}
	energy := func(a, b []float64) float64 { // between two steps, J
		e := 0.0
		for i := range a[:cells] {
			v, du, dv := (b[i]-a[i])/dt, (a[i+1]-a[i])/h, (b[i+1]-b[i])/h
			e += h / 2 * (q.MassPerLength*v*v + q.Tension*du*dv)
		}
		return e
	}
	old, next := make([]float64, cells+1), make([]float64, cells+1)
	var e author.Energy
	for n := 0; n <= plan.Steps; n++ {
		if n%1000 == 0 {
			if ctx.Err() != nil {
				return author.Outcome{}, ctx.Err()
			}
			progress(float64(n) / float64(plan.Steps+1))
		}
		if n%sub == 0 {
			for c := range p.Channels {
				for k, spot := range p.Channels[c].Spots {
					if row, rows := out.Row(c, k), n/sub; !p.Channels[c].Along {
						row[rows] = read(spot, now, h)
					} else if rows%p.FieldStride == 0 {
						row[rows/p.FieldStride] = read(spot, now, h)
					}
				}
			}
		}
		step(next, now, old, rate, r, g, dt, n == 0)
		for k, f := range p.Pushes {
			first, shares := spread(f.At.At, h, cells)
			share := dt * dt / (q.MassPerLength * h) / (1 + g) * forces[k][n]
			if n == 0 {
				share /= 2
			}
			for i, part := range shares {
				if cell := first + i; cell > 0 && cell < cells {
					next[cell] += share * part
					e.Work += forces[k][n] * part * (next[cell] - old[cell]) / 2
				}
			}
		}
		for i := range now {
			v := (next[i] - old[i]) / (2 * dt)
			e.Lost += q.Viscous * h * dt * v * v
		}
		if n == 0 {
			e.Start = energy(now, next)
		}
		e.End = energy(now, next)
		e.Most = math.Max(e.Most, e.End)
		old, now, next = now, next, old
	}
	return author.Outcome{Plan: plan, Order: 2, Ratio: 2, Energy: e}, nil
}

// step fills next; at the start the step before it follows from the velocity.
func step(next, now, old, rate []float64, r, g, dt float64, first bool) {
	for i := 1; i < len(now)-1; i++ {
		bend := r * (now[i+1] - 2*now[i] + now[i-1])
		if first {
			next[i] = now[i] + dt*rate[i]*(1-g) + bend/2
			old[i] = next[i] - 2*dt*rate[i]
			continue
		}
		next[i] = (2*now[i] - (1-g)*old[i] + bend) / (1 + g)
	}
}

// values are those of a function, or rest.
func values(has bool, n int, ask func() ([]float64, error)) ([]float64, error) {
	if !has {
		return make([]float64, n), nil
	}
	return ask()
}

// pushes asks for every point force at every step, all at once.
func pushes(p *author.Problem, steps int, dt float64) ([][]float64, error) {
	times := make([]float64, steps+1)
	for i := range times {
		times[i] = float64(i) * dt
	}
	var out [][]float64
	for k := range p.Pushes {
		f, err := p.PushForce(k, times)
		if err != nil {
			return nil, err
		}
		out = append(out, f)
	}
	return out, nil
}

// read is the displacement at a spot.
func read(s author.Spot, u []float64, h float64) float64 {
	if s.Node >= 0 {
		return 0 // both nodes are held
	}
	first, shares := spread(s.At, h, len(u)-1)
	sum := 0.0
	for i, part := range shares {
		sum += part * u[first+i]
	}
	return sum
}
