package main

import (
	"context"
	"io/fs"
	"math"
	"testing"

	"github.com/tautspan/tautspan/dsl"
	"github.com/tautspan/tautspan/engine/compare"
	"github.com/tautspan/tautspan/engine/mesh"
	"github.com/tautspan/tautspan/engine/scenario"
	"github.com/tautspan/tautspan/engine/solver"
	"github.com/tautspan/tautspan/engine/statics"
	"github.com/tautspan/tautspan/plugins/characteristic"
	"github.com/tautspan/tautspan/plugins/conform"
	"github.com/tautspan/tautspan/plugins/differences"
	"github.com/tautspan/tautspan/plugins/laws"
	"github.com/tautspan/tautspan/plugins/spectral"
	"github.com/tautspan/tautspan/scenarios"
)

// standingTransits is how many travel times of its slowest line a scenario is
// run for here: enough for every joint to be met from both sides.
const standingTransits = 3

// bound is a shipped scenario as a network, shortened.
func bound(t *testing.T, name string) *scenario.Network {
	t.Helper()
	c := dsl.Compile(scenarios.Files, name, dsl.Options{Plugins: builtInLaws()})
	if c.Diagnostics.HasErrors() {
		t.Fatal(c.Diagnostics.Text(3))
	}
	values, err := c.Template.Values(nil)
	if err != nil {
		t.Fatal(err)
	}
	net, err := c.Template.Bind(values)
	if err != nil {
		t.Fatal(err)
	}
	longest := 0.0
	for i := range net.Lines {
		longest = math.Max(longest, statics.TravelTime(&net.Lines[i]))
	}
	rows := math.Ceil(standingTransits * longest / net.Run.Every)
	net.Run.For = math.Min(net.Run.For, rows*net.Run.Every)
	return net
}

func outcomeOf(t *testing.T, net *scenario.Network) *compare.Outcome {
	t.Helper()
	m, err := mesh.Build(net)
	if err != nil {
		t.Fatal(err)
	}
	all := []solver.Solver{differences.New(), spectral.New(), characteristic.New()}
	out, err := compare.Run(context.Background(), m, all, compare.Options{Agree: math.Max(net.Run.Agree, 0.01), Effort: scenario.Quick})
	if err != nil {
		t.Fatal(err)
	}
	return out
}

// same holds peak and rms of every channel against one another; lengths of the
// second network are scale times as large where the quantity is one.
func same(t *testing.T, what string, a, b *compare.Outcome, factor func(unit string) float64) {
	t.Helper()
	for c := range a.Channels {
		for _, kind := range []compare.Kind{compare.Peak, compare.RMS} {
			p, q := &a.Channels[c].Observables[kind], &b.Channels[c].Observables[kind]
			f := factor(a.Channels[c].Unit)
			// Both bars, and rounding; a picture's places move with a splice, so
			// its peak may fall between them by a share of a place's width.
			allowed := p.Numerical*f + q.Numerical + 1e-9*p.Scale*f
			if off := math.Abs(p.Value*f - q.Value); !(off <= allowed) {
				t.Errorf("%s: %s of %s is %.9g, was %.9g, off by %.2g with bars of %.2g", what, kind, a.Channels[c].Name, q.Value, p.Value*f, off, allowed)
			}
		}
	}
}

// What must not change an answer does not: walking the line from the other end,
// cutting a segment by a bare splice, other units of length, time and mass.
func TestStandingChecks(t *testing.T) {
	names, err := fs.Glob(scenarios.Files, "*.taut")
	if err != nil || len(names) < 8 {
		t.Fatal(names, err)
	}
	const length, duration, mass = 3, 0.5, 7
	inUnits := func(unit string) float64 {
		switch unit {
		case "m":
			return length
		case "m/s":
			return length / duration
		case "m/s^2":
			return length / duration / duration
		case "N":
			return mass * length / duration / duration
		}
		return 1
	}
	one := func(string) float64 { return 1 }
	for i, name := range names {
		if testing.Short() && i%4 != 0 {
			continue // every fourth
		}
		t.Run(name, func(t *testing.T) {
			net := bound(t, name)
			if len(net.Watches) == 0 {
				return // nothing is recorded: its answers are exact, and tested so
			}
			base := outcomeOf(t, net)
			if turned, ok := conform.Reversed(net); ok {
				same(t, "walked from the other end", base, outcomeOf(t, turned), one)
			} else {
				t.Log("has a travelling load, which has a direction: not walked from the other end")
			}
			if cut, ok := conform.Spliced(net, 0.37); ok {
				same(t, "cut by a splice", base, outcomeOf(t, cut), one)
			} else {
				t.Log("has something along the segment that would be cut: not spliced")
			}
			same(t, "in other units", base, outcomeOf(t, conform.Rescaled(net, length, duration, mass)), inUnits)
		})
	}
}

// builtInLaws tells the language of the laws that the program carries.
func builtInLaws() []dsl.Plugin {
	var out []dsl.Plugin
	for _, l := range laws.BuiltIn() {
		p := dsl.Plugin{Name: l.Is.Name, Kind: "law", Body: l.Text}
		for _, q := range l.Is.Parameters {
			p.Parameters = append(p.Parameters, dsl.Parameter{Name: q.Name, Unit: q.Unit, Least: q.Least, Most: q.Most, Preset: q.Preset, HasPreset: q.HasPreset})
		}
		out = append(out, p)
	}
	return out
}
