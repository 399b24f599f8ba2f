package app

import (
	"fmt"

	"github.com/tautspan/tautspan/engine/scenario"
	"github.com/tautspan/tautspan/engine/statics"
)

// cautions lists the safety notes that apply to a scenario. They print with
// every answer that could send somebody to a line; local codes and licensed
// practice come before them.
func cautions(net *scenario.Network, energy func(j float64) string) []CautionNote {
	var notes []CautionNote
	add := func(code, format string, args ...any) {
		notes = append(notes, CautionNote{code, fmt.Sprintf(format, args...)})
	}
	for i := range net.Lines {
		line := &net.Lines[i]
		if e := statics.StoredEnergy(line); e == e {
			add("stored-energy", "Line %s holds about %s of stretch. If it parts or an anchor slips, ends and fittings fly: keep everyone out of the line of pull, out of bights, and off the sides that an end can whip through.", line.Name, energy(e))
		} else {
			add("stored-energy", "Line %s holds energy of stretch (say its axial stiffness and the figure prints here). If it parts or an anchor slips, ends and fittings fly: keep everyone out of the line of pull, out of bights, and off the sides that an end can whip through.", line.Name)
		}
	}
	if len(net.Plucks)+len(net.Pushes)+len(net.Starts) > 0 {
		add("striking", "When this is tried on a real line: lock out any drive and secure the load first; a soft mallet and small taps, away from sockets, insulators, sheathing and fibre; never hit brittle cast iron or corroded wires.")
	}
	if hasFittings(net) {
		add("clamps", "Dampers and clamps can cut strands, loosen or slip: follow their torque and rod instructions and inspect for fretting. A broken damper is a sign that the vibration was not controlled.")
	}
	if len(net.Rolls) > 0 {
		add("live-parts", "Treat a conductor or contact wire as energised until authorised people have switched, tested and grounded it; parallel and crossing lines can carry induced voltage. No metal tape, rope or sensor lead near live parts.")
	}
	if stringLike(net) {
		add("small-wire", "Small wires under high stress whip: wear eye protection.")
	}
	add("limits", "Computed for small motion in one plane with the inputs listed; corrosion, broken wires, creep and twist are not seen.")
	add("authority", "Results are an aid. A licensed engineer has to check them; local codes, owner rules and the certificate of the rope govern. `undecided` is not a pass.")
	return notes
}

func hasFittings(net *scenario.Network) bool {
	for i := range net.Lines {
		for k := range net.Lines[i].Nodes {
			n := &net.Lines[i].Nodes[k]
			if len(n.Dashpots) > 0 || len(n.Tuned) > 0 || n.Kind == scenario.Joint && n.Mass > 0 {
				return true
			}
		}
	}
	return false
}

// stringLike tells a thin wire or string by its mass per length.
func stringLike(net *scenario.Network) bool {
	for i := range net.Lines {
		for _, s := range net.Lines[i].Segments {
			if s.MassPerLength < 0.02 {
				return true
			}
		}
	}
	return false
}
