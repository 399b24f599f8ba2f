package syntax_test

import (
	"testing"

	"github.com/tautspan/tautspan/dsl/diag"
	"github.com/tautspan/tautspan/dsl/syntax"
	"github.com/tautspan/tautspan/dsl/unit"
)

// TestKeywordsAreNoUnits: the two lists are disjoint, prefixes included.
func TestKeywordsAreNoUnits(t *testing.T) {
	for _, w := range syntax.Keywords() {
		if u, err := unit.Parse(w); err == nil {
			t.Errorf("%q is a keyword and the unit %v", w, u)
		}
	}
}

// TestUnitsAreScanned: every word of the table of units, alone and composed,
// is one unit behind a number and behind the word `unit`.
func TestUnitsAreScanned(t *testing.T) {
	words := unit.Words()
	if len(words) < 20 {
		t.Fatalf("only %d units", len(words))
	}
	for _, w := range words {
		for _, u := range []string{w, "1/" + w, w + "*m", w + "·m^2", "N*" + w + "^-1", "N/" + w + "²", "N/(m*" + w + ")"} {
			for _, text := range []string{"3 " + u + " + 4", "2.5e3 " + u + "\n", "unit " + u + ", 3", "(3 " + u + ")"} {
				tokens, list := syntax.Scan(diag.NewFile("u.taut", text))
				found := false
				for _, k := range tokens {
					found = found || k.Kind == syntax.UnitTok && k.Text == u
				}
				if !found || len(list) > 0 {
					t.Errorf("%q: no unit %q in %v", text, u, tokens)
				}
			}
		}
	}
}
