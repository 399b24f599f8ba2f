package characteristic

import (
	"math"

	"github.com/tautspan/tautspan/engine/mesh"
)

// cells is an independent integration of a mesh for tests: every piece in n
// equal cells, lumped masses, classical Runge-Kutta steps. Second order in the
// cells; reference() extrapolates two of them.
type cells struct {
	m        *mesh.Mesh
	n        []int // cells of each piece
	at       [][]int
	mass     []float64
	u, v     []float64
	held     []bool
	q        []float64 // brackets, in order of nodes
	maxwells []struct {
		i    int
		k, c float64
	}
	loads  []func(t float64, f []float64)
	motion map[int]*mesh.Motion
}

func newCells(m *mesh.Mesh, n []int) *cells {
	c := &cells{m: m, n: n, motion: map[int]*mesh.Motion{}}
	total := len(m.Nodes)
	for i, p := range m.Pieces {
		ids := []int{p.From}
		for k := 1; k < n[i]; k++ {
			ids = append(ids, total)
			total++
		}
		c.at = append(c.at, append(ids, p.To))
	}
	c.mass, c.u, c.v, c.held = make([]float64, total), make([]float64, total), make([]float64, total), make([]bool, total)
	for i, nd := range m.Nodes {
		c.mass[i], c.u[i], c.v[i] = nd.Mass, nd.Start, nd.StartRate
		c.held[i] = nd.Fixed || nd.Motion != nil
		if nd.Motion != nil {
			c.motion[i] = nd.Motion
		}
		for _, b := range nd.Brackets {
			c.maxwells = append(c.maxwells, struct {
				i    int
				k, c float64
			}{i, b.K, b.C})
			c.q = append(c.q, b.Start)
		}
	}
	for i := range m.Pieces {
		p := &m.Pieces[i]
		h := p.Length / float64(n[i])
		for k, id := range c.at[i] {
			share := 1.0
			if k == 0 || k == n[i] {
				share = 0.5
			}
			c.mass[id] += share * p.MassPerLength * h
			if k > 0 && k < n[i] {
				c.u[id], c.v[id] = startShape(p, float64(k)*h), startRate(p, float64(k)*h)
			}
		}
	}
	for i := range m.Pushes {
		p := &m.Pushes[i]
		id := c.place(p.At)
		c.loads = append(c.loads, func(t float64, f []float64) {
			if t >= 0 {
				f[id] += p.Force.Value.At(t, 0)
			}
		})
	}
	for i := range m.Presses {
		p := &m.Presses[i]
		for _, part := range p.Parts {
			pc := &m.Pieces[part.Piece]
			nn := n[part.Piece]
			h := pc.Length / float64(nn)
			c.loads = append(c.loads, func(t float64, f []float64) {
				for k, id := range c.at[part.Piece] {
					share, x := cover(k, nn, pc.Length, part.From, part.To)
					own := h
					if k == 0 || k == nn {
						own = h / 2
					}
					if share > 0 {
						f[id] += share * own * p.Force.Value.At(t, part.Origin+x)
					}
				}
			})
		}
	}
	return c
}

func (c *cells) place(s mesh.Spot) int {
	if s.Node >= 0 {
		return s.Node
	}
	pos := s.At / c.m.Pieces[s.Piece].Length * float64(c.n[s.Piece])
	if math.Abs(pos-math.Round(pos)) > 1e-9 {
		panic("cells: place is not on the grid")
	}
	return c.at[s.Piece][int(math.Round(pos))]
}

func (c *cells) rates(t float64, u, v, q, a, dq []float64) {
	for i := range a {
		a[i] = 0
	}
	for i, mo := range c.motion {
		u[i], v[i] = mo.Displacement(t), mo.Velocity(t)
	}
	for _, l := range c.loads {
		l(t, a)
	}
	for i := range c.m.Pieces {
		p := &c.m.Pieces[i]
		h := p.Length / float64(c.n[i])
		k := p.Tension / h
		ids := c.at[i]
		for j := 1; j < len(ids); j++ {
			f := k * (u[ids[j]] - u[ids[j-1]])
			a[ids[j-1]] += f
			a[ids[j]] -= f
			w := 0.5 * h * p.Viscous
			a[ids[j-1]] -= w * v[ids[j-1]]
			a[ids[j]] -= w * v[ids[j]]
		}
	}
	for i, nd := range c.m.Nodes {
		a[i] -= nd.Spring*u[i] + nd.Dashpot*v[i]
	}
	for _, l := range c.m.Links {
		f := l.Spring*(u[l.B]-u[l.A]) + l.Dashpot*(v[l.B]-v[l.A])
		a[l.A] += f
		a[l.B] -= f
	}
	for s, w := range c.maxwells {
		f := w.k * (u[w.i] - q[s])
		a[w.i] -= f
		dq[s] = f / w.c
	}
	for i := range a {
		if c.held[i] {
			a[i] = 0
		} else {
			a[i] /= c.mass[i]
		}
	}
}

// run records displacement at spots on the mesh's rows, sub steps to a row.
func (c *cells) run(spots []mesh.Spot, sub int) [][]float64 {
	rows := c.m.Timing.Rows
	out := make([][]float64, len(spots))
	for k := range out {
		out[k] = make([]float64, rows)
	}
	n, nq := len(c.u), len(c.q)
	h := c.m.Timing.Every / float64(sub)
	var ka, kv, kq [4][]float64
	for i := range ka {
		ka[i], kv[i], kq[i] = make([]float64, n), make([]float64, n), make([]float64, nq)
	}
	u, v, q := make([]float64, n), make([]float64, n), make([]float64, nq)
	for row := 0; row < rows; row++ {
		for i, mo := range c.motion {
			c.u[i] = mo.Displacement(float64(row) * c.m.Timing.Every)
		}
		for k, s := range spots {
			out[k][row] = c.u[c.place(s)]
		}
		for s := 0; s < sub; s++ {
			t := float64(row)*c.m.Timing.Every + float64(s)*h
			for stage, w := range [4]float64{0, 0.5, 0.5, 1} {
				p := max(0, stage-1)
				for i := range u {
					u[i], v[i] = c.u[i]+w*h*kv[p][i], c.v[i]+w*h*ka[p][i]
				}
				for i := range q {
					q[i] = c.q[i] + w*h*kq[p][i]
				}
				c.rates(t+w*h, u, v, q, ka[stage], kq[stage])
				copy(kv[stage], v)
			}
			for i := range u {
				c.u[i] += h / 6 * (kv[0][i] + 2*kv[1][i] + 2*kv[2][i] + kv[3][i])
				c.v[i] += h / 6 * (ka[0][i] + 2*ka[1][i] + 2*ka[2][i] + ka[3][i])
			}
			for i := range q {
				c.q[i] += h / 6 * (kq[0][i] + 2*kq[1][i] + 2*kq[2][i] + kq[3][i])
			}
		}
	}
	return out
}

// reference is the extrapolation of cells n and 2n, and its own difference from
// the extrapolation of n/2 and n as a measure of its error (relative L2).
func reference(m *mesh.Mesh, n []int, spots []mesh.Spot) (ref [][]float64, doubt float64) {
	scaled := func(f float64) [][]float64 {
		k := make([]int, len(n))
		fastest := 0.0
		for i := range n {
			k[i] = int(math.Round(f * float64(n[i])))
			fastest = math.Max(fastest, float64(k[i])/m.Pieces[i].TravelTime())
		}
		// Runge-Kutta is stable to 2.8 of step times 2 c/h.
		sub := int(math.Ceil(m.Timing.Every * fastest * 2 / 1.4))
		return newCells(m, k).run(spots, sub)
	}
	a, b, c := scaled(0.5), scaled(1), scaled(2)
	for s := range spots {
		early := make([]float64, len(a[s]))
		for i := range a[s] {
			early[i] = (4*b[s][i] - a[s][i]) / 3
			c[s][i] = (4*c[s][i] - b[s][i]) / 3
		}
		doubt = math.Max(doubt, relative(early, c[s])/16)
	}
	return c, doubt
}
