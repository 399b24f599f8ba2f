package transform

import (
	"math"

	"gonum.org/v1/gonum/mat"

	"github.com/tautspan/tautspan/engine/scenario"
)

// placed is a force per length f(x, t) as a sum of products: with places x_s and
// times t_r chosen so that C = f(x_s, t_r) is well conditioned,
//
//	f(x, t) = sum over s of g_s(x) f(x_s, t),  g_s(x) = sum over r of f(x, t_r) C^-1.
//
// It is exact for a sum of as many products, and good to the last pivot for others
// (adaptive cross approximation, full pivoting on samples).
type placed struct {
	of    []*series // f(x_s, t)
	force *scenario.History
	x0    float64
	times []float64
	inv   *mat.Dense // C^-1, times by places
}

// What a force by place is sampled at to find the products, and how many there
// may be: a wave that travels needs one for each half wave or so.
const (
	crossPlaces = 129
	crossTimes  = 385
	crossMost   = 96
	crossGood   = 1e-11
)

// place finds the products.
func (g *grid) place(h *scenario.History, x0, length float64) *placed {
	end := float64(g.rows) * g.step
	x, t := make([]float64, crossPlaces), make([]float64, crossTimes)
	for i := range x {
		x[i] = length * (1 - math.Cos(math.Pi*(float64(i)+0.5)/crossPlaces)) / 2
	}
	for j := range t {
		// Spread by the golden ratio: no load of even period hides between.
		t[j] = end * math.Mod(0.6180339887498949*float64(j+1), 1)
	}
	a := make([][]float64, len(x))
	most := 0.0
	for i := range a {
		a[i] = make([]float64, len(t))
		for j := range a[i] {
			a[i][j] = h.At(t[j], x0+x[i])
			most = math.Max(most, math.Abs(a[i][j]))
		}
	}
	var places, times []int
	for len(places) < crossMost {
		pi, pj, best := 0, 0, 0.0
		for i := range a {
			for j, v := range a[i] {
				if math.Abs(v) > best {
					pi, pj, best = i, j, math.Abs(v)
				}
			}
		}
		if best <= crossGood*most {
			break
		}
		places, times = append(places, pi), append(times, pj)
		row := append([]float64(nil), a[pi]...)
		for i := range a {
			f := a[i][pj] / row[pj]
			if f == 0 {
				continue
			}
			for j := range a[i] {
				a[i][j] -= f * row[j]
			}
		}
	}
	p := &placed{force: h, x0: x0}
	n := len(places)
	if n == 0 {
		return p
	}
	c := mat.NewDense(n, n, nil)
	for s, i := range places {
		for r, j := range times {
			c.Set(s, r, h.At(t[j], x0+x[i]))
		}
	}
	p.inv = mat.NewDense(n, n, nil)
	// The pivots bound how badly conditioned C can be; gonum warns beyond that and
	// the product sum is then as good as the samples are.
	_ = p.inv.Inverse(c)
	for _, i := range places {
		at := x0 + x[i]
		p.of = append(p.of, g.transform(func(t float64) float64 { return h.At(t, at) }, h.Breaks))
	}
	for _, j := range times {
		p.times = append(p.times, t[j])
	}
	return p
}

// from are the functions g_s of the distance from a place of the stretch.
func (p *placed) from(start float64) []func(float64) float64 {
	out := make([]func(float64) float64, len(p.of))
	for s := range out {
		out[s] = func(x float64) float64 {
			sum := 0.0
			for r, t := range p.times {
				sum += p.force.At(t, p.x0+start+x) * p.inv.At(r, s)
			}
			return sum
		}
	}
	return out
}
