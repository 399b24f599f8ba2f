package syntax

import "strings"

// usage returns the form of a statement, with capitals for what the user puts
// in; "" for an unknown word.
func usage(c Context, word string) string {
	switch c {
	case Top, InEach:
		return topUsage(word)
	case InAbout:
		return `KEY "TEXT"`
	}
	if word == "about" {
		return topUsage(word)
	}
	switch string(c) + " " + word {
	case "stock wires":
		return "wires N of D"
	case "stock loss":
		return "loss viscous C"
	case "line tension":
		return "tension T at PLACE"
	case "line incline":
		return "incline ANGLE"
	case "line sag":
		return "sag included"
	case "line stretch":
		return "stretch included"
	case "line plane":
		return "plane vertical"
	case "line at":
		return "at TEMPERATURE"
	case "line support":
		return "support NAME fixed"
	case "line segment":
		return "segment NAME STOCK LENGTH"
	case "line joint":
		return "joint NAME mass M, dashpot C"
	case "law takes":
		return "takes NAME unit UNIT, NAME unit UNIT"
	case "law state":
		return "state NAME = VALUE rate VALUE"
	case "law force":
		return "force = VALUE"
	case "run for", "run every":
		return word + " TIME"
	case "run agree":
		return "agree PERCENT"
	case "run solvers":
		return "solvers NAME, NAME"
	case "run effort":
		return "effort normal"
	case "run limit":
		return "limit memory QUANTITY"
	case "record time":
		return `time "COLUMN" unit UNIT`
	case "record channel":
		return `channel "COLUMN" unit UNIT for WATCH.QUANTITY`
	case "reading frequency", "reading decay":
		return word + " N = VALUE +- DOUBT"
	case "reading peaks":
		return "peaks VALUE, VALUE +- DOUBT"
	case "reading returns":
		return "returns N took TIME +- DOUBT shared +- DOUBT at PLACE"
	case "reading swings":
		return "swings N took TIME +- DOUBT"
	case "fit to":
		return "to NAME, NAME"
	case "fit using":
		return "using frequencies 1..6, returns, history"
	}
	if c == InStock {
		return word + " VALUE"
	}
	return ""
}

// topUsage is usage at the top of a file.
func topUsage(word string) string {
	switch word {
	case "tautspan":
		return "tautspan 1"
	case "title", "note":
		return word + ` "TEXT"`
	case "about":
		return `about { KEY "TEXT" }`
	case "let":
		return "let NAME = VALUE +- DOUBT"
	case "use":
		return `use "FILE.taut"`
	case "stock", "line", "law":
		return word + " NAME { ... }"
	case "each":
		return `each ROW of "TABLE.csv" { ... }`
	case "tie":
		return "tie NAME from PLACE to PLACE spring K, dashpot C, mass M, slack"
	case "excite":
		return "excite NAME pluck at PLACE with FORCE"
	case "watch":
		return "watch NAME at PLACE QUANTITY, QUANTITY"
	case "run", "fit":
		return word + " { ... }"
	case "require":
		return `require VALUE < LIMIT "TEXT"`
	case "record":
		return `record NAME "FILE" { ... }`
	case "reading":
		return "reading NAME of LINE { ... }"
	case "seek":
		return "seek NAME from A to B"
	case "vary":
		return "vary NAME from A to B, N steps"
	case "sample":
		return "sample N, seed S"
	case "collect":
		return "collect VALUE, VALUE"
	case "best":
		return "best VALUE largest over NAME from A to B"
	case "meet":
		return "meet VALUE with VALUE over NAME from A to B"
	}
	return ""
}

// usageWords returns the keywords that may stand in a statement, for near misses.
func usageWords(c Context, word string) []string {
	words := usage(c, word)
	switch word {
	case "excite":
		words += " start push press move roll load at along by with until displacement velocity from starting mass spring dashpot"
	case "let":
		words += " between and at of it"
	case "require":
		words += " within outside clause"
	case "segment":
		words += " tension loss every from " + jointWords
	case "support":
		words += " loss through " + supportWords
	case "joint":
		words += " loss through up down both " + jointWords
	case "tie":
		words += " through loss " + tieWords
	case "watch":
		words += " along mass"
	case "loss":
		words += " ratio internal hysteretic law at of bending"
	case "vary":
		words += " geometric through"
	case "best":
		words += " smallest"
	case "plane":
		words += " sideways"
	case "channel":
		words += " uncalibrated"
	case "frequency", "decay", "peaks", "returns", "swings":
		words += " shared vertical sideways at between and took"
	}
	var out []string
	for _, w := range strings.FieldsFunc(words, func(r rune) bool { return !(r >= 'a' && r <= 'z' || r >= 'A' && r <= 'Z') }) {
		if IsKeyword(w) {
			out = append(out, w)
		}
	}
	return out
}
