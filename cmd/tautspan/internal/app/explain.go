package app

import (
	"sort"

	"github.com/tautspan/tautspan/dsl"
)

// explanations are the texts of the diagnostics that commands raise themselves;
// those of the language stand with the language.
func explanations() map[string]string {
	return map[string]string{
		"doubt-not-carried": `The doubt of the inputs could not be carried to these answers: at one standard uncertainty from its value a let leads to a scenario that cannot be solved.

The answers stand as if their inputs were exact. Make the doubt smaller, or see what the scenario says at the moved value with --set.`,
		"empty-range":                 `A range runs from its lower to its higher end. Ends that are computed from lets must keep that order.`,
		"more-unknowns-than-readings": `More lets are sought than there are readings, so that whole families of values explain them equally well. Take further readings, or say what is known of a let with its doubt: in a fit that is knowledge and counts like a reading.`,
		"not-identifiable":            `No reading of the fit depends on this let, so that none can tell its value. Take it out of what is sought, or add a reading of the line that it belongs to.`,
		"nothing-read":                `A fit needs readings: reading NAME of LINE { frequency 1 = 1.012 Hz +- 0.4 % }. A fit statement may have left out all that there are, by "to" or by "using".`,
		"nothing-sought":              `A fit moves the lets that a seek statement makes unknown: seek NAME from A to B. None is said.`,
		"no-solution":                 `Over the whole ranges of the sought lets no point was found at which the lines can be computed and held against every reading. Look at the ranges first: a range in another unit, or one that leaves no tension at an end of an inclined line.`,
		"wants-place":                 `A joint holds the line between its ends, so that a pulse runs up and down a part of it only. Say a place inside that part behind "at".`,
		"unreadable-record":           `A record that the fit names cannot be read, or holds nothing that could be fitted. The message says why; 'tautspan peaks FILE' looks at the file alone.`,
		"no-survey":                   `A change is between two results of 'tautspan fit': result folders written with --out, or documents printed with --json. The message says what is wrong with this one.`,
		"failed":                      `Something outside the scenario failed: a file that cannot be read or written, a limit on memory or work, no solver that can answer. The message says what.`,
		"no-fronts":                   `The pulse ledger follows fronts on taut strings only. The message names what it cannot follow.`,
		"law-gives-energy":            `A law was swung through three cycles of a few sizes and gave the line more energy than it took. A damper takes; a law that gives drives the line, and a run with it may grow without end. Turn the sign of its force, or leave it so if it is meant to drive.`,
		"no-line": `There is no line in the scenario, so there is nothing to answer for. A line begins and ends with a support:

line NAME { tension ...; support ...; segment ...; support ... }`,
		"watch-at-node": `The watch stands where one of the first vibrations of its line does not move, so its record holds next to nothing of that vibration: a requirement on settling, or a peak picked from a record taken there, does not see it.

In the middle of a line that is every even one. Move the watch off the middle, a third or two fifths along, or set a second one.`,
		"near-resonance": `A drive repeats itself at a frequency within 10 % of a natural one (common practice, no source). The steady motion there is set by damping alone, and a few per cent of tension move it by a large factor.

'tautspan respond' shows the steady motion against frequency; meet and vary ask for the tension or length at which the two part.`,
		"no-modes":        `The natural vibrations of this scenario cannot be given; the message says why.`,
		"no-response":     `The steady response at the watches cannot be given; the message says why. Shares at joints and ends, which need no more than what stands there, are given all the same.`,
		"no-frequencies":  `The range of frequencies is empty or cannot be: give --from and --to in Hz, the second above the first.`,
		"too-many-points": `So many frequencies would make a document that nobody can read or hold. Ask for fewer points, or for a narrower range.`,
		"nothing-to-sweep": `A sweep answers best, meet, vary and sample, and this scenario says none of them:

best damping(1..4) largest over knob from 40 kN*s/m to 300 kN*s/m`,
		"no-answer":        `What is asked cannot be answered exactly for this scenario; the message says what stands in the way.`,
		"too-many-cases":   `Several vary statements make a grid: their numbers of values multiply, and so does the number of draws. Take fewer steps, or draw from distributions instead of a grid.`,
		"no-solver":        `A case needs a run, and no solver can answer this scenario; the message says why each cannot.`,
		"nothing-happens":  `Records are watched, and the scenario says nothing that would move the line: no pluck, push, press, move, roll or start. Every record is zero.`,
		"unknown-code":     `Diagnostics carry a word in square brackets at their end; 'tautspan why WORD' explains it. 'tautspan why' lists them all.`,
		"unknown-scenario": `No shipped scenario has that name. 'tautspan scenarios' lists them.`,
		"unknown-solver":   `The solvers are differences (finite differences), spectral (Gauss-Lobatto-Legendre elements) and characteristic (travelling waves followed along their characteristics).`,
		"usage":            `The command line cannot be read: an unknown command or flag, or a value that a flag cannot take. 'tautspan COMMAND --help' says what it takes.`,
	}
}

// explain is the text for a code, of the language or of a command.
func explain(code string) (string, bool) {
	if text, ok := dsl.Explain(code); ok {
		return text, true
	}
	if text, ok := explanations()[code]; ok {
		return text, true
	}
	text, ok := recordExplanations()[code]
	return text, ok
}

// codes lists every code that can be explained.
func codes() []string {
	list := append([]string(nil), dsl.Codes()...)
	for code := range explanations() {
		list = append(list, code)
	}
	for code := range recordExplanations() {
		list = append(list, code)
	}
	sort.Strings(list)
	return list
}
