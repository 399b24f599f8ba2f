package transform

import (
	"fmt"
	"math"

	"github.com/tautspan/tautspan/engine/mesh"
	"github.com/tautspan/tautspan/engine/solver"
)

// grid is the time grid of the inversion and its contour.
type grid struct {
	sub     int     // steps of one output interval; even, so that half intervals are on it
	step    float64 // s
	samples int     // N, a power of two
	window  float64 // s
	sigma   float64 // 1/s
	rows    int     // time steps that are read, past the last row by an interval
}

// Limits of one solution.
const (
	samplesMost = 1 << 24
	bytesMost   = int64(3e9)
)

// newGrid chooses the step: eight samples of the highest note of the loads, and
// at least so many of a fundamental period, halved from level to level.
func newGrid(m *mesh.Mesh, req solver.Request) (*grid, error) {
	period := 0.0
	for i := range m.Lines {
		sum := 0.0
		for _, p := range m.Lines[i].Pieces {
			sum += travel(&m.Pieces[p])
		}
		period = math.Max(period, 2*sum)
	}
	coarse := period / float64(int(100)<<req.Effort)
	if m.Band > 0 {
		coarse = math.Min(coarse, 1/(8*m.Band))
	}
	g := &grid{}
	every := m.Timing.Every
	sub := 2 * math.Ceil(every/(2*coarse)) * math.Pow(2, float64(req.Level))
	end := m.Timing.End() + 2*every
	if n := 2 * end / every * sub; req.Level > 20 || !(n < samplesMost) {
		return nil, fmt.Errorf("%s: level %d needs %.2g frequencies, %d are the most: %w", name, req.Level, n/2, samplesMost/2, solver.ErrBudget)
	}
	g.sub, g.step = int(sub), every/sub
	for g.samples = 64; float64(g.samples)*g.step < 2*end; g.samples *= 2 {
	}
	if g.samples > samplesMost {
		return nil, fmt.Errorf("%s: level %d needs %d frequencies: %w", name, req.Level, g.samples/2, solver.ErrBudget)
	}
	g.window = float64(g.samples) * g.step
	g.sigma = (23 + 1.5*float64(req.Level%2)) / g.window // e^-23 = 1e-10
	g.rows = (m.Timing.Rows+1)*g.sub + 1
	return g, nil
}

// travel is the travel time along a piece, also where its tension rises.
func travel(p *mesh.Piece) float64 {
	end := math.Max(p.Tension+p.TensionRise*p.Length, 0)
	return 2 * p.Length * math.Sqrt(p.MassPerLength) / (math.Sqrt(p.Tension) + math.Sqrt(end))
}

// at is s of frequency k.
func (g *grid) at(k int) complex128 {
	return complex(g.sigma, 2*math.Pi*float64(k)/g.window)
}
