package app

import (
	"fmt"
	"runtime"
	"strings"

	"github.com/tautspan/tautspan/engine/solver"
	"github.com/tautspan/tautspan/plugins/characteristic"
	"github.com/tautspan/tautspan/plugins/differences"
	"github.com/tautspan/tautspan/plugins/spectral"
)

// builtin lists the solvers that the program carries, in the order in which
// they are named everywhere.
func builtin() []solver.Solver {
	return []solver.Solver{differences.New(), spectral.New(), characteristic.New()}
}

// engineOf says who computes, for a document's head.
func engineOf() Engine {
	e := Engine{Platform: runtime.GOOS + "/" + runtime.GOARCH, Solvers: map[string]string{}}
	for _, s := range builtin() {
		e.Solvers[s.Name()] = s.Version()
	}
	return e
}

// chosen picks solvers by name; with no names it is all of them.
func chosen(names []string) ([]solver.Solver, error) {
	all := builtin()
	if len(names) == 0 {
		return all, nil
	}
	var out []solver.Solver
	var known []string
	for _, s := range all {
		known = append(known, s.Name())
	}
	for _, name := range names {
		found := false
		for _, s := range all {
			if s.Name() == name {
				out = append(out, s)
				found = true
			}
		}
		if !found {
			return nil, fmt.Errorf("there is no solver %q; there are %s", name, strings.Join(known, ", "))
		}
	}
	return out, nil
}
