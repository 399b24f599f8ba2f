// A law plugin that is asked step by step: for laws that cannot be written in the
// scenario language. It costs some 50 us a step; write a law where you can. Build
// it, then: tautspan plugins add ./stepped
package main

import (
	"math"

	"github.com/tautspan/tautspan/plugins/author"
)

func main() { author.Serve(memory{}) }

// memory is a slider with smoothed dry friction that counts the way it has gone.
type memory struct{}

func (memory) About() author.About {
	return author.About{
		Name: "memory", Version: "1", Says: "a slider with smoothed dry friction, followed step by step, an example",
		Formula:    "F = -hold * v / sqrt(v^2 + soft^2)",
		Source:     "an invented smoothing of dry friction (Coulomb)",
		Dissipates: true,
		Parameters: []author.Parameter{
			{Name: "hold", Unit: "N", Says: "largest force", Least: 0, Most: 1e9},
			{Name: "soft", Unit: "m/s", Says: "speed at which it has come to 0.7 of that", Least: 1e-9, Most: 1e3, Preset: 0.005, HasPreset: true},
		},
	}
}

// Written: it is not.
func (memory) Written(map[string]float64) (string, error) { return "", nil }

// Follow begins one use of the law.
func (memory) Follow(p map[string]float64) (author.Follower, error) {
	return &use{hold: p["hold"], soft: p["soft"]}, nil
}

// use is the law at one joint, with what it remembers.
type use struct {
	hold, soft float64
	last, way  float64 // m
}

// Force answers trials and, once a step, the settled motion, with which what is
// remembered moves on.
func (u *use) Force(_, x, v float64, settled bool) (float64, error) {
	if settled {
		u.way += math.Abs(x - u.last)
		u.last = x
	}
	return -u.hold * v / math.Sqrt(v*v+u.soft*u.soft), nil
}
