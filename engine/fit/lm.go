package fit

import (
	"math"

	"gonum.org/v1/gonum/mat"

	"github.com/tautspan/tautspan/engine/scenario"
)

// residuals are the weighted differences of a pairing at x: one for each paired
// observation, one for each let or shared error that is known beforehand. nil
// where the model has no value.
func (p *Problem) residuals(x []float64, q []prediction, modes pairing, widen float64) []float64 {
	out := make([]float64, 0, len(p.obs)+len(p.unknowns))
	for i := range p.obs {
		if modes[i] == 0 {
			continue
		}
		r := p.residual(i, x, q, modes[i], widen)
		if math.IsNaN(r) || math.IsInf(r, 0) {
			return nil
		}
		out = append(out, r)
	}
	return p.priors(x, out)
}

// residual is one weighted difference; 0 for a damping ratio while losses are
// left out.
func (p *Problem) residual(i int, x []float64, q []prediction, mode int, widen float64) float64 {
	o := &p.obs[i]
	if p.detail == rough && o.kind == scenario.DecayReading {
		return 0
	}
	return (o.value - o.shift(x) - q[o.config].of(o, mode)) / math.Hypot(o.u, widen*o.value)
}

// priors appends the residuals of what is known beforehand.
func (p *Problem) priors(x, out []float64) []float64 {
	var values []float64
	for i := range p.unknowns {
		u := &p.unknowns[i]
		switch {
		case !u.prior:
		case !u.sought:
			out = append(out, x[i])
		default:
			if values == nil {
				var err error
				if values, err = p.values(x); err != nil {
					return nil
				}
			}
			out = append(out, (u.value(x[i])-p.template.Lets[u.let].Value.Eval(values, nil))/u.u)
		}
	}
	return out
}

// difference is the step of the central differences, in the logarithm of a let
// (or in its half range, or its standard uncertainty): the model is exact to
// about 1e-13, so that a slope is good to 1e-8, and its third derivative adds
// 1e-10 of itself.
const difference = 1e-5

// jacobian is the matrix of slopes of the residuals, one column an unknown.
// Only the configs that an unknown moves are evaluated again. nil where the
// model has no value nearby. The slopes are those of the level model. Columns of fixed unknowns are left at 0.
func (p *Problem) jacobian(x []float64, q []prediction, modes pairing, widen, step float64, fixed []bool) *mat.Dense {
	rows := len(p.residuals(x, q, modes, widen))
	if rows == 0 {
		return nil
	}
	j := mat.NewDense(rows, len(x), nil)
	if p.detail == exact { // what a rise of tension changes of a stiff line's slopes is small, and slow
		p.detail = level
		defer func() { p.detail = exact }()
	}
	moved := append([]float64(nil), x...)
	for k := range x {
		if fixed != nil && fixed[k] {
			continue
		}
		var ends [2][]float64
		for side, sign := range []float64{1, -1} {
			moved[k] = x[k] + sign*step
			ends[side] = p.residuals(moved, p.again(moved, k, q), modes, widen)
			if ends[side] == nil {
				return nil
			}
		}
		moved[k] = x[k]
		for i := range rows {
			j.Set(i, k, (ends[0][i]-ends[1][i])/(2*step))
		}
	}
	return j
}

// again evaluates the configs that one unknown moves and keeps the others.
func (p *Problem) again(x []float64, k int, q []prediction) []prediction {
	out := append([]prediction(nil), q...)
	if len(p.unknowns[k].configs) == 0 {
		return out
	}
	values, err := p.values(x)
	for _, c := range p.unknowns[k].configs {
		if err != nil {
			out[c] = prediction{err: err}
			continue
		}
		out[c] = p.configs[c].predict(values, p.detail)
	}
	return out
}

// most steps of one descent, and the share of the cost below which a step is
// the last. Chosen: a cost is used to a hundredth at most.
const (
	mostSteps = 60
	lastGain  = 1e-10
	leadGain  = 1e-2 // while a start is led to a minimum
)

// descend lowers the cost of a pairing by Levenberg and Marquardt's method with
// Marquardt's scaling and Nielsen's rule for the damping,
//
//	(J'J + mu diag(J'J)) step = -J'r,  mu *= max(1/3, 1 - (2 gain - 1)^3),
//
// each coordinate by at most 1 (a factor e of a let) a step and within its
// range; a coordinate at an end of its range that is pushed outward stands
// still. fixed coordinates are not moved. It returns where it came to, the
// predictions and the sum of squares there.
func (p *Problem) descend(x []float64, q []prediction, modes pairing, widen float64, steps int, fixed []bool) ([]float64, []prediction, float64) {
	r := p.residuals(x, q, modes, widen)
	if r == nil {
		return x, q, math.Inf(1)
	}
	f := square(r)
	mu, nu := 1e-3, 2.0
	var j *mat.Dense
	for step := 0; step < steps; step++ {
		if j == nil {
			if j = p.jacobian(x, q, modes, widen, difference, fixed); j == nil {
				break
			}
		}
		to, predicted := p.step(j, r, x, mu, fixed)
		if to == nil {
			break
		}
		nq := p.predict(to)
		nr := p.residuals(to, nq, modes, widen)
		nf := math.Inf(1)
		if nr != nil {
			nf = square(nr)
		}
		if !(nf <= f) { // also where there is no value
			if mu *= nu; mu > 1e12 {
				break
			}
			nu *= 2
			continue
		}
		gain := (f - nf) / math.Max(predicted, math.SmallestNonzeroFloat64)
		mu *= math.Max(1.0/3, 1-math.Pow(2*math.Min(gain, 1)-1, 3))
		nu = 2
		enough := lastGain
		if p.leading {
			enough = leadGain
		}
		small := f-nf <= enough*(1e-3+f)
		x, q, r, f, j = to, nq, nr, nf, nil
		if small {
			break
		}
	}
	return x, q, f
}

// step solves for one step and gives where it leads and the fall of the cost
// that the slopes promise; nil where nothing is left to move.
func (p *Problem) step(j *mat.Dense, r, x []float64, mu float64, fixed []bool) ([]float64, float64) {
	n := len(x)
	gradient := make([]float64, n)
	for k := range n {
		for i, v := range r {
			gradient[k] += j.At(i, k) * v
		}
	}
	var free []int
	for k := range n {
		lo, hi := p.unknowns[k].bounds()
		held := fixed != nil && fixed[k] || x[k] <= lo && gradient[k] > 0 || x[k] >= hi && gradient[k] < 0
		if !held {
			free = append(free, k)
		}
	}
	if len(free) == 0 {
		return nil, 0
	}
	a := mat.NewSymDense(len(free), nil)
	b := mat.NewVecDense(len(free), nil)
	for s, k := range free {
		for t := s; t < len(free); t++ {
			sum := 0.0
			for i := range r {
				sum += j.At(i, k) * j.At(i, free[t])
			}
			if t == s {
				sum = sum*(1+mu) + 1e-300
			}
			a.SetSym(s, t, sum)
		}
		b.SetVec(s, -gradient[k])
	}
	var chol mat.Cholesky
	if !chol.Factorize(a) {
		return nil, 0
	}
	var d mat.VecDense
	if err := chol.SolveVecTo(&d, b); err != nil && math.IsNaN(d.AtVec(0)) {
		return nil, 0
	}
	longest := 0.0
	for s := range free {
		longest = math.Max(longest, math.Abs(d.AtVec(s)))
	}
	if math.IsNaN(longest) {
		return nil, 0
	}
	share := math.Min(1, 1/math.Max(longest, 1e-300))
	to := append([]float64(nil), x...)
	predicted := 0.0
	for s, k := range free {
		move := share * d.AtVec(s)
		lo, hi := p.unknowns[k].bounds()
		to[k] = math.Min(math.Max(x[k]+move, lo), hi)
		predicted -= move * gradient[k]
	}
	return to, predicted
}

func square(r []float64) float64 {
	sum := 0.0
	for _, v := range r {
		sum += v * v
	}
	return sum
}
