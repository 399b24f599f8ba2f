package seek

import (
	"context"
	"math"
	"sort"
)

// Optimum is the place at which a function is best.
type Optimum struct {
	At, Value float64
	// Inside: it lies between the ends of the range. Else the function is best at
	// an end, and better beyond it for all that is known.
	Inside bool
	Step   float64
	X, Y   []float64 // the curve looked at
	// FlatFrom and FlatTo hold all places, as far as the looks tell, about the best
	// one at which the function is within FlatShare of its best value.
	FlatFrom, FlatTo float64
	Drift            []Drift
}

// FlatShare is the share by which a value may be worse and still count as good.
const FlatShare = 0.02

// Drift is what becomes of an optimum when one input is off by a standard
// uncertainty: the function where it was to be best, and where it is best now.
type Drift struct {
	Input       string
	Sign        int     // -1 or +1 standard uncertainties
	Kept        float64 // value at the old place
	At, Reached float64 // new place, and value there
}

// candidates is how many of the best looks are followed.
const candidates = 3

// Best finds the largest (or smallest) value of function 0 on the range: the
// looks that are no worse than their neighbours, best first, are each followed by
// golden sections over the two steps about them. Nil where no look has a value.
func Best(ctx context.Context, p *Problem, largest bool) (*Optimum, error) {
	looks, err := p.look(ctx, []int{0})
	if err != nil {
		return nil, err
	}
	sign := 1.0 // what is made small
	if largest {
		sign = -1
	}
	out := &Optimum{Step: p.step()}
	var peaks []int
	for k := range looks {
		out.X, out.Y = append(out.X, p.at(k)), append(out.Y, looks[k][0])
	}
	cost := func(k int) float64 {
		if k < 0 || k >= len(out.Y) || math.IsNaN(out.Y[k]) {
			return math.Inf(1)
		}
		return sign * out.Y[k]
	}
	for k := range out.Y {
		if c := cost(k); !math.IsInf(c, 1) && c <= cost(k-1) && c <= cost(k+1) {
			peaks = append(peaks, k)
		}
	}
	if len(peaks) == 0 {
		return nil, nil
	}
	sort.SliceStable(peaks, func(i, j int) bool { return cost(peaks[i]) < cost(peaks[j]) })
	f := p.one(ctx, 0, nil)
	best := math.Inf(1)
	for _, k := range peaks[:min(candidates, len(peaks))] {
		x, c := p.follow(f, sign, k, cost(k))
		if c < best {
			best, out.At = c, x
		}
	}
	if f.err != nil {
		return nil, f.err
	}
	out.Value = sign * best
	out.Inside = out.At > p.From && out.At < p.To
	out.flat(sign)
	return out, p.drift(ctx, out, sign)
}

// follow refines the best look k over the steps beside it.
func (p *Problem) follow(f *one, sign float64, k int, known float64) (x, cost float64) {
	a, b := p.at(max(k-1, 0)), p.at(min(k+1, p.Steps))
	x, cost = golden(func(x float64) float64 { return sign * f.value(x) }, a, b, nil)
	if !(cost < known) {
		return p.at(k), known
	}
	return x, cost
}

// flat finds how far the good stretch reaches.
func (o *Optimum) flat(sign float64) {
	worst := sign*o.Value + FlatShare*math.Abs(o.Value)
	o.FlatFrom, o.FlatTo = o.At, o.At
	good := func(k int) bool { return sign*o.Y[k] <= worst }
	first := sort.SearchFloat64s(o.X, o.At)
	for k := first; k < len(o.X) && good(k); k++ {
		o.FlatTo = o.X[k]
	}
	for k := first - 1; k >= 0 && good(k); k-- {
		o.FlatFrom = o.X[k]
	}
}

// drift moves each input by a standard uncertainty to either side.
func (p *Problem) drift(ctx context.Context, out *Optimum, sign float64) error {
	centre := make([]float64, len(p.Inputs))
	for i, in := range p.Inputs {
		centre[i] = in.Value
	}
	out.Drift = make([]Drift, 2*len(p.Inputs))
	return Each(ctx, len(out.Drift), p.Workers, func(k int) error {
		in := &p.Inputs[k/2]
		d := Drift{Input: in.Name, Sign: 2*(k%2) - 1}
		moved := append([]float64(nil), centre...)
		moved[k/2] += float64(d.Sign) * in.U
		f := p.one(ctx, 0, moved)
		d.Kept = f.value(out.At)
		d.At, d.Reached = out.At, d.Kept
		// The new place lies nearby, or the search widens to the whole range.
		for width := 2 * p.step(); ; width *= 4 {
			a, b := math.Max(p.From, out.At-width), math.Min(p.To, out.At+width)
			x, cost := golden(func(x float64) float64 { return sign * f.value(x) }, a, b, nil)
			for _, end := range []float64{a, b} {
				if c := sign * f.value(end); c <= cost {
					x, cost = end, c
				}
			}
			if cost <= sign*d.Reached || math.IsNaN(d.Reached) {
				d.At, d.Reached = x, sign*cost
			}
			if x > a && x < b || a == p.From && b == p.To || f.err != nil {
				break
			}
		}
		out.Drift[k] = d
		return f.err
	})
}
