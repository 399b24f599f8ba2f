package conform_test

import (
	"context"
	"math/rand/v2"
	"testing"

	"github.com/tautspan/tautspan/engine/compare"
	"github.com/tautspan/tautspan/engine/compare/trial"
	"github.com/tautspan/tautspan/engine/scenario"
	"github.com/tautspan/tautspan/engine/solver"
	"github.com/tautspan/tautspan/plugins/characteristic"
	"github.com/tautspan/tautspan/plugins/differences"
	"github.com/tautspan/tautspan/plugins/spectral"
)

func TestTmp(t *testing.T) {
	solvers := []solver.Solver{differences.New(), spectral.New(), characteristic.New()}
	for _, agree := range []float64{0.01, 0.001} {
		count := map[compare.Verdict]int{}
		for seed := uint64(100); seed < 104; seed++ {
			random := rand.New(rand.NewPCG(seed, 1))
			for n := range 50 {
				m, _ := trial.Line(random, 3)
				out, err := compare.Run(context.Background(), m, solvers, compare.Options{Agree: agree, Effort: scenario.Quick, LimitWork: 60_000_000})
				if err != nil {
					t.Fatal(err)
				}
				count[out.Verdict]++
				if out.Verdict == compare.Differ {
					for _, ch := range out.Channels {
						for _, o := range ch.Observables {
							for _, p := range o.Pairs {
								if p.Ratio > 2 && !p.Unbacked && !p.Immaterial {
									t.Logf("agree %g seed %d line %d jump %d %s %v: %d-%d ratio %.2f values %v bars %v levels %v %v", agree, seed, n, m.Jump, ch.Name, o.Kind, p.A, p.B, p.Ratio, o.Values, o.Bars, out.Voices[0].Levels, out.Voices[2].Levels)
								}
							}
						}
					}
				}
			}
		}
		t.Log(agree, count)
	}
}
