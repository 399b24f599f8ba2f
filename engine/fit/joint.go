package fit

import (
	"math"

	"gonum.org/v1/gonum/mat"
)

// Joint is the doubt of a solution carried to the lets: every let for
// independent directions, each in its standard uncertainties.
type Joint struct {
	names   []string
	covered []bool
	p       *Problem
	x       []float64
	d       [][]float64
}

// Directions names where the doubt of each direction comes from: a let, or the
// readings of a block.
func (j *Joint) Directions() []string { return j.names }

// Covers tells whether the doubt of a let is in the directions.
func (j *Joint) Covers(let int) bool { return j.covered[let] }

// Joint splits the doubt of a solution by where it comes from.
func (s *Solution) Joint() *Joint {
	c, p := s.cover, s.cover.p
	out := &Joint{p: p, x: c.s.x, covered: make([]bool, len(p.template.Lets))}
	for i := range p.unknowns {
		if let := p.unknowns[i].let; let >= 0 {
			out.covered[let] = true
		}
	}
	rows, n := c.j.Dims()
	of := p.sources(c.s.modes)
	var names []string
	byName := map[string][]int{}
	for i := range rows {
		if _, seen := byName[of[i]]; !seen {
			names = append(names, of[i])
		}
		byName[of[i]] = append(byName[of[i]], i)
	}
	for _, name := range names {
		list := byName[name]
		if len(list) == 1 { // with its sign: what an error upward does
			d := mat.Col(nil, list[0], c.gain)
			out.names, out.d = append(out.names, name), append(out.d, d)
			continue
		}
		part := mat.NewDense(n, len(list), nil)
		for k, i := range list {
			for a := range n {
				part.Set(a, k, c.gain.At(a, i))
			}
		}
		var svd mat.SVD
		if !svd.Factorize(part, mat.SVDThin) {
			continue
		}
		var u mat.Dense
		svd.UTo(&u)
		values := svd.Values(nil)
		for k, v := range values {
			if v <= 1e-9*values[0] || v == 0 {
				break
			}
			d := make([]float64, n)
			for a := range n {
				d[a] = v * u.At(a, k)
			}
			out.names, out.d = append(out.names, name), append(out.d, d)
		}
	}
	for _, open := range c.open {
		d := make([]float64, n)
		for a := range n {
			d[a] = open.u * open.v[a]
		}
		out.names, out.d = append(out.names, "what the readings leave open"), append(out.d, d)
	}
	return out
}

// sources names where each residual comes from, in their order.
func (p *Problem) sources(modes pairing) []string {
	var out []string
	for i := range p.obs {
		if modes[i] != 0 {
			out = append(out, "readings "+p.obs[i].reading)
		}
	}
	for i := range p.unknowns {
		if p.unknowns[i].prior {
			out = append(out, p.unknowns[i].name)
		}
	}
	return out
}

// Values are all lets for values of the directions; override gives other lets
// values of their own. It is called from several goroutines.
func (j *Joint) Values(z []float64, override map[string]float64) ([]float64, error) {
	x := append([]float64(nil), j.x...)
	for k, v := range z {
		for a := range x {
			x[a] += v * j.d[k][a]
		}
	}
	for a := range x {
		lo, hi := j.p.unknowns[a].bounds()
		x[a] = math.Min(math.Max(x[a], lo), hi)
	}
	return j.p.valuesWith(x, override)
}
