package loads

import (
	"context"
	"math"

	"github.com/tautspan/tautspan/plugins/author"
)

// iceDrop is the loss of a weight: what hung on the line lets go at once.
type iceDrop struct{}

// About is the description.
func (iceDrop) About() author.About {
	return author.About{
		Name: "ice-drop", Version: "1", Says: "ice (or any weight) that falls off at once; displacements count from the rest position with it",
		Formula: "q = +weight from the time of the drop on, within 1 ms; at a place: the weight itself",
		Source:  "statics: the loss of a load is a step of the opposite force",
		Cannot:  []string{"change of mass: the line is taken as bare all the time", "tension of the loaded line: say the tension that holds after the drop"},
		Parameters: []author.Parameter{
			{Name: "weight", Unit: "N/m", Says: "of the ice per length (at a place: newtons)", Least: 0, Most: 1e6},
			{Name: "when", Unit: "s", Says: "time of the drop", Least: 0, Most: 1e6, Preset: 0.1, HasPreset: true},
		},
	}
}

// Prepare asks for steps of a millisecond.
func (iceDrop) Prepare(q author.LoadWant) (step, spacing float64, err error) {
	return 1e-3, math.Max(q.Length, 1), nil
}

// Evaluate is the step.
func (iceDrop) Evaluate(_ context.Context, q author.LoadWant, t []float64, force [][]float64) error {
	for k := range force {
		for i, now := range t {
			if force[k][i] = 0; now >= q.Parameters["when"] {
				force[k][i] = q.Parameters["weight"]
			}
		}
	}
	return nil
}
