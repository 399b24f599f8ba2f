package author

import (
	"fmt"
	"math"
	"regexp"
)

// About is what a plugin says of itself.
type About struct {
	Name    string // as scenarios call it: letters, digits, _ and -
	Version string // changes whenever answers may change
	Says    string // what it is, one sentence
	Formula string // for people; of a load or a law
	Source  string // of the formula
	// Parameters are what a scenario says in brackets behind the name of a load
	// or a law. They are checked against this before anything runs.
	Parameters []Parameter
	Cannot     []string // what it does not represent, in the user's words
	// Dissipates promises of a law that it never gives back more energy than it
	// took; tautspan keeps an account and reports a law that breaks the promise.
	Dissipates bool
}

// Parameter is one number that a load or a law takes.
type Parameter struct {
	Name string
	Unit string // such as "N" or "m/s"; "1" for a pure number
	Says string // what it is
	// Least and Most bound it, ends included, in the unit; both 0: any number.
	Least, Most float64
	Preset      float64 // taken where the scenario does not say it, if HasPreset
	HasPreset   bool
}

var nameShape = regexp.MustCompile(`^[A-Za-z][A-Za-z0-9_-]{0,63}$`)

// Check says what is wrong with a description, or nil.
func (a *About) Check() error {
	if !nameShape.MatchString(a.Name) {
		return fmt.Errorf("a plugin's name is made of letters, digits, _ and -, and this is %q", a.Name)
	}
	if a.Version == "" {
		return fmt.Errorf("plugin %s names no version", a.Name)
	}
	seen := map[string]bool{}
	for _, p := range a.Parameters {
		switch {
		case !nameShape.MatchString(p.Name) || seen[p.Name]:
			return fmt.Errorf("plugin %s: parameter %q is named twice or not by letters, digits and _", a.Name, p.Name)
		case p.Unit == "":
			return fmt.Errorf("plugin %s: parameter %s has no unit (say \"1\" for a pure number)", a.Name, p.Name)
		case math.IsNaN(p.Least) || math.IsNaN(p.Most) || p.Least > p.Most:
			return fmt.Errorf("plugin %s: the range of %s ends before it begins", a.Name, p.Name)
		case p.HasPreset && !p.Allows(p.Preset):
			return fmt.Errorf("plugin %s: the preset of %s lies outside its range", a.Name, p.Name)
		}
		seen[p.Name] = true
	}
	return nil
}

// Allows tells whether a value, in the parameter's unit, lies in its range.
func (p *Parameter) Allows(v float64) bool {
	if p.Least == 0 && p.Most == 0 {
		return !math.IsNaN(v) && !math.IsInf(v, 0)
	}
	return v >= p.Least && v <= p.Most
}
