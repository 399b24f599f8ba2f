package loads

import (
	"context"
	"math"

	"github.com/tautspan/tautspan/plugins/author"
)

// vortex is the alternating lift of shed vortices, in step along the stretch.
type vortex struct{}

// About is the description.
func (vortex) About() author.About {
	return author.About{
		Name: "vortex", Version: "1", Says: "harmonic lift of vortices shed in a steady cross wind, with a band in which they keep to one frequency",
		Formula: "q = 0.5 density speed^2 diameter lift sin(2 pi f t); f = strouhal speed/diameter, or lock where that lies within lock (1 - band) .. lock (1 + band)",
		Source:  "Strouhal 1878 for f; the lift coefficient and the band are the user's, from tests or codes (common practice, no source)",
		Cannot:  []string{"growth of the lift with the motion", "loss of step along the line: the whole stretch swings together, which is an upper bound"},
		Parameters: []author.Parameter{
			{Name: "speed", Unit: "m/s", Says: "wind across the line", Least: 0.01, Most: 100},
			{Name: "diameter", Unit: "m", Says: "of the line", Least: 1e-5, Most: 10},
			{Name: "density", Unit: "kg/m^3", Says: "of air", Least: 0.1, Most: 2000, Preset: 1.225, HasPreset: true},
			{Name: "strouhal", Unit: "1", Says: "Strouhal number", Least: 0.05, Most: 0.5, Preset: 0.2, HasPreset: true},
			{Name: "lift", Unit: "1", Says: "lift coefficient, amplitude", Least: 0, Most: 10, Preset: 0.3, HasPreset: true},
			{Name: "lock", Unit: "Hz", Says: "natural frequency to which shedding may lock; 0: none", Least: 0, Most: 1e6, HasPreset: true},
			{Name: "band", Unit: "1", Says: "half width of the lock-in band, share of lock", Least: 0, Most: 0.5, Preset: 0.2, HasPreset: true},
		},
	}
}

// frequency is that of shedding, Hz.
func (vortex) frequency(p map[string]float64) float64 {
	f := p["strouhal"] * p["speed"] / p["diameter"]
	if lock := p["lock"]; lock > 0 && math.Abs(f-lock) <= p["band"]*lock {
		return lock
	}
	return f
}

// Prepare: 200 instants a cycle keep straight lines good to 1e-4 of the force.
func (v vortex) Prepare(q author.LoadWant) (step, spacing float64, err error) {
	return 1 / (200 * v.frequency(q.Parameters)), math.Max(q.Length, 1), nil
}

// Evaluate fills in the sine; at a place it is the lift of a metre of line.
func (v vortex) Evaluate(_ context.Context, q author.LoadWant, t []float64, force [][]float64) error {
	p := q.Parameters
	peak := 0.5 * p["density"] * p["speed"] * p["speed"] * p["diameter"] * p["lift"]
	f := v.frequency(p)
	for k := range force {
		for i, now := range t {
			_, turn := math.Modf(f * now)
			force[k][i] = peak * math.Sin(2*math.Pi*turn)
		}
	}
	return nil
}
