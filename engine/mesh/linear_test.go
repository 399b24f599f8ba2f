package mesh

import (
	"testing"

	"github.com/tautspan/tautspan/engine/formula"
	"github.com/tautspan/tautspan/engine/scenario"
)

func TestLinearLaw(t *testing.T) {
	u, v, c := formula.Arg(formula.ArgU), formula.Arg(formula.ArgV), formula.Const
	for _, k := range []struct {
		what string
		f    formula.Program
		k, c float64
		ok   bool
	}{
		{"dashpot", formula.Mul(c(-7), v), 0, 7, true},
		{"spring and dashpot", formula.Sub(formula.Mul(c(-3), u), formula.Mul(v, c(0.2))), 3, 0.2, true},
		{"drive", formula.Mul(c(7), v), 0, 0, false},
		{"drag", formula.Mul(c(-1), formula.Mul(v, formula.Apply(formula.OpAbs, v))), 0, 0, false},
		{"a little bent", formula.Sub(formula.Mul(c(-7), v), formula.Mul(c(1e-9), formula.Mul(v, formula.Mul(v, v)))), 0, 0, false},
		{"with time", formula.Mul(c(-7), formula.Mul(v, formula.Arg(formula.ArgT))), 0, 0, false},
		{"with a push", formula.Sub(c(1), v), 0, 0, false},
	} {
		kk, cc, ok := linearLaw(&scenario.WrittenOf[float64]{Force: k.f})
		if ok != k.ok || ok && (kk != k.k || cc != k.c) {
			t.Errorf("%s: %g %g %t", k.what, kk, cc, ok)
		}
	}
}
