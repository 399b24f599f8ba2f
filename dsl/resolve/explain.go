package resolve

import (
	"sort"
	"strings"

	"github.com/tautspan/tautspan/dsl/unit"
)

// wanted are the kinds of which a diagnostic may say that they are wanted; the
// code is wants- with the kind's word.
var wanted = []unit.Kind{
	unit.Number, unit.Angle, unit.Share, unit.Length, unit.Area, unit.Mass, unit.Time, unit.Temperature, unit.Memory, unit.Frequency, unit.Speed,
	unit.Acceleration, unit.Force, unit.Stress, unit.Energy, unit.MassPerLength, unit.Density, unit.ForcePerLength, unit.Spring, unit.Dashpot, unit.Viscous,
	unit.Bending, unit.Rotary, unit.Inertia, unit.Expansion,
}

// Explain is the longer text about a code; false for an unknown one.
func Explain(code string) (string, bool) {
	if text, ok := explanations[code]; ok {
		return strings.TrimSpace(text) + "\n", true
	}
	for _, k := range wanted {
		if "wants-"+k.Word == code {
			return wantsText(k), true
		}
	}
	return "", false
}

// Codes lists every code that Explain knows, in alphabetical order.
func Codes() []string {
	out := known(explanations)
	for _, k := range wanted {
		if _, ok := explanations["wants-"+k.Word]; !ok {
			out = append(out, "wants-"+k.Word)
		}
	}
	sort.Strings(out)
	return out
}

// wantsText explains a dimension that is wanted.
func wantsText(k unit.Kind) string {
	var b strings.Builder
	b.WriteString("What stands here must be " + k.Name + ", and has another dimension.\n\n")
	if k.SI != "1" {
		b.WriteString("Its SI unit is " + k.SI + "; any unit of the same dimension will do, with a prefix or from the US customary system.\n")
	} else {
		b.WriteString("It is written without a unit, or with % where a share is meant.\n")
	}
	switch k {
	case unit.Force:
		b.WriteString("A mass is not a force: 412 kg pulls with 4.04 kN under standard gravity, and lb is a mass where lbf is a force.\n")
	case unit.MassPerLength, unit.Mass:
		b.WriteString("A weight is a force: divide it by standard gravity (g0) to have the mass, and write lb where lbf was written.\n")
	case unit.Frequency:
		b.WriteString("Frequencies are in cycles, Hz. An angular rate in rad/s is divided by 2*pi first.\n")
	case unit.Angle:
		b.WriteString("Angles are written in deg or rad.\n")
	}
	b.WriteString("The whole expression is checked: write units at its numbers and look at what a product or a quotient of them makes.\n")
	return b.String()
}
