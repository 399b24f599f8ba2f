// A law plugin to start from: a friction slider whose grip grows with speed up
// to a limit, written in the scenario language. Build it, then: tautspan plugins add ./law
package main

import "github.com/tautspan/tautspan/plugins/author"

func main() {
	author.Serve(author.WrittenLaw{
		Is: author.About{
			Name: "grip", Version: "1", Says: "a slider that holds with a smoothed dry friction, an example",
			Formula:    "F = -hold * v / sqrt(v^2 + soft^2)",
			Source:     "an invented smoothing of dry friction (Coulomb)",
			Dissipates: true,
			Parameters: []author.Parameter{
				{Name: "hold", Unit: "N", Says: "largest force", Least: 0, Most: 1e9},
				{Name: "soft", Unit: "m/s", Says: "speed at which it has come to 0.7 of that", Least: 1e-6, Most: 1e3, Preset: 0.005, HasPreset: true},
			},
		},
		Text: "force = -hold * v / sqrt(v^2 + soft^2)",
	})
}
