package loads

import (
	"context"
	"errors"
	"math"

	"github.com/tautspan/tautspan/plugins/author"
)

// walker is one person who walks on the spot where the line is tied.
type walker struct{}

// About is the description.
func (walker) About() author.About {
	return author.About{
		Name: "walker", Version: "1", Says: "the changing part of a walking person's weight at one place",
		Formula: "F = -weight (first sin(2 pi pace t) + second sin(4 pi pace t - pi/2) + third sin(6 pi pace t - pi/2))",
		Source:  "Bachmann and Ammann 1987, Vibrations in Structures, IABSE (0.4, 0.1, 0.1 at 2 Hz; from memory)",
		Cannot:  []string{"the weight at rest, which is part of the rest position", "several people in or out of step"},
		Parameters: []author.Parameter{
			{Name: "weight", Unit: "N", Says: "of the person", Least: 0, Most: 1e4, Preset: 800, HasPreset: true},
			{Name: "pace", Unit: "Hz", Says: "steps a second", Least: 0.5, Most: 4, Preset: 2, HasPreset: true},
			{Name: "first", Unit: "1", Says: "share of the first harmonic", Least: 0, Most: 2, Preset: 0.4, HasPreset: true},
			{Name: "second", Unit: "1", Says: "of the second", Least: 0, Most: 2, Preset: 0.1, HasPreset: true},
			{Name: "third", Unit: "1", Says: "of the third", Least: 0, Most: 2, Preset: 0.1, HasPreset: true},
		},
	}
}

// Prepare: 200 instants a cycle of the third harmonic.
func (walker) Prepare(q author.LoadWant) (step, spacing float64, err error) {
	if q.Along {
		return 0, 0, errors.New("a walker acts at a place; a load that travels is `roll`")
	}
	return 1 / (600 * q.Parameters["pace"]), 1, nil
}

// Evaluate sums the harmonics.
func (walker) Evaluate(_ context.Context, q author.LoadWant, t []float64, force [][]float64) error {
	p := q.Parameters
	for k := range force {
		for i, now := range t {
			_, turn := math.Modf(p["pace"] * now)
			a := 2 * math.Pi * turn
			force[k][i] = -p["weight"] * (p["first"]*math.Sin(a) + p["second"]*math.Sin(2*a-math.Pi/2) + p["third"]*math.Sin(3*a-math.Pi/2))
		}
	}
	return nil
}
