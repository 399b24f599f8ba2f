// A load plugin to start from: a gust front that comes up, stays and goes, the
// same along the stretch. Build it, then: tautspan plugins add ./load
package main

import (
	"context"
	"errors"
	"math"

	"github.com/tautspan/tautspan/plugins/author"
)

func main() { author.Serve(gust{}) }

type gust struct{}

func (gust) About() author.About {
	return author.About{
		Name: "gust", Version: "1", Says: "a single gust of cosine flanks, an example",
		Formula: "f = peak * (1 - cos(pi (t - begin)/rise))/2 while it rises, then peak, then the same downward",
		Source:  "an invented shape",
		Parameters: []author.Parameter{
			{Name: "peak", Unit: "N/m", Says: "force per length at its strongest"},
			{Name: "begin", Unit: "s", Says: "when it begins", HasPreset: true, Least: 0, Most: 1e6},
			{Name: "rise", Unit: "s", Says: "time to come up, and to go", Least: 1e-3, Most: 1e6},
			{Name: "hold", Unit: "s", Says: "time at full strength", HasPreset: true, Least: 0, Most: 1e6},
		},
	}
}

// Prepare: a hundred points a flank make straight lines between them good to 2e-4.
func (gust) Prepare(q author.LoadWant) (step, spacing float64, err error) {
	if !q.Along {
		return 0, 0, errors.New("a gust acts along a line or segment")
	}
	return q.Parameters["rise"] / 100, q.Length, nil
}

func (gust) Evaluate(_ context.Context, q author.LoadWant, t []float64, force [][]float64) error {
	peak, begin, rise, hold := q.Parameters["peak"], q.Parameters["begin"], q.Parameters["rise"], q.Parameters["hold"]
	for i, now := range t {
		share := 0.0
		switch s := now - begin; {
		case s <= 0 || s >= 2*rise+hold:
		case s < rise:
			share = (1 - math.Cos(math.Pi*s/rise)) / 2
		case s <= rise+hold:
			share = 1
		default:
			share = (1 + math.Cos(math.Pi*(s-rise-hold)/rise)) / 2
		}
		for k := range force {
			force[k][i] = peak * share
		}
	}
	return nil
}
