// Package laws holds the damping laws that tautspan carries. They are written in
// the scenario language, as an author's would be (author.WrittenLaw), and can be
// used without installing anything.
package laws

import "github.com/tautspan/tautspan/plugins/author"

// BuiltIn lists the laws that the program carries.
func BuiltIn() []author.WrittenLaw {
	return []author.WrittenLaw{powerDashpot, slider, hysteretic, airDrag}
}

// still keeps a formula in v/|v| finite at rest, m/s. Far below any speed that
// a damper feels.
const still = "1e-12 m/s"

var powerDashpot = author.WrittenLaw{
	Is: author.About{
		Name: "power-dashpot", Version: "1", Says: "a damper whose force grows with a power of the speed",
		Formula:    "F = -hold (|v|/speed)^power sign(v)",
		Source:     "the usual form for fluid dampers with power 0.2 to 2 (common practice, no source)",
		Dissipates: true,
		Cannot:     []string{"frequencies and damping ratios: it is not linear"},
		Parameters: []author.Parameter{
			{Name: "hold", Unit: "N", Says: "force at the speed named", Least: 0, Most: 1e9},
			{Name: "speed", Unit: "m/s", Says: "speed at which it is that", Least: 1e-9, Most: 1e3},
			{Name: "power", Unit: "1", Says: "1: a linear dashpot", Least: 0.1, Most: 3},
		},
	},
	Text: "force = -hold * (abs(v) / speed) ^ power * v / max(abs(v), " + still + ")",
}

var slider = author.WrittenLaw{
	Is: author.About{
		Name: "slider", Version: "1", Says: "dry friction, smoothed at low speed",
		Formula:    "F = -hold v/sqrt(v^2 + soft^2)",
		Source:     "Coulomb's friction with a common smoothing (common practice, no source)",
		Dissipates: true,
		Cannot:     []string{"true sticking: below `soft` it creeps; `friction` at a joint sticks"},
		Parameters: []author.Parameter{
			{Name: "hold", Unit: "N", Says: "largest force", Least: 0, Most: 1e9},
			{Name: "soft", Unit: "m/s", Says: "speed at which it has come to 0.7 of that", Least: 1e-9, Most: 1e3, Preset: 0.005, HasPreset: true},
		},
	},
	Text: "force = -hold * v / sqrt(v ^ 2 + soft ^ 2)",
}

var hysteretic = author.WrittenLaw{
	Is: author.About{
		Name: "hysteretic", Version: "1", Says: "a spring that yields: stiff at first, a constant force after, with a loss in every cycle that does not depend on frequency",
		Formula:    "F = -stiff z, dz/dt = v - |v| z stiff/hold",
		Source:     "Dahl 1968, A solid friction model, Aerospace Corporation TOR-0158 (from memory)",
		Dissipates: true,
		Cannot:     []string{"frequencies and damping ratios: it is not linear"},
		Parameters: []author.Parameter{
			{Name: "stiff", Unit: "N/m", Says: "of the first push", Least: 1e-6, Most: 1e12},
			{Name: "hold", Unit: "N", Says: "force that it comes to", Least: 1e-6, Most: 1e9},
		},
	},
	Text: "state z = 0 m rate v - abs(v) * z * stiff / hold\nforce = -stiff * z",
}

var airDrag = author.WrittenLaw{
	Is: author.About{
		Name: "air-drag", Version: "1", Says: "drag of still air along a segment, with the square of its speed",
		Formula:    "q = -0.5 density diameter drag |v| v",
		Source:     "drag of a cylinder across the flow, coefficient about 1.2 below 3e5 Reynolds (common practice, no source)",
		Dissipates: true,
		Parameters: []author.Parameter{
			{Name: "diameter", Unit: "m", Says: "of the line", Least: 1e-6, Most: 10},
			{Name: "density", Unit: "kg/m^3", Says: "of air", Least: 0.01, Most: 2000, Preset: 1.225, HasPreset: true},
			{Name: "drag", Unit: "1", Says: "coefficient", Least: 0, Most: 10, Preset: 1.2, HasPreset: true},
		},
	},
	Text: "force = -0.5 * density * diameter * drag * abs(v) * v",
}
