package app

import (
	"fmt"
	"math"
	"strings"
	"testing/fstest"

	"github.com/tautspan/tautspan/dsl"
	"github.com/tautspan/tautspan/engine/scenario"
	"github.com/tautspan/tautspan/plugins/author"
	"github.com/tautspan/tautspan/plugins/tryout"
)

// tryWritten uses an installed law in a small scenario and, where it promises to
// take energy, swings it.
func tryWritten(a *author.About) []tryout.Check {
	values := tryout.Presets(a)
	var args []string
	for _, p := range a.Parameters {
		u := " " + p.Unit
		if p.Unit == "1" {
			u = ""
		}
		args = append(args, fmt.Sprintf("%s = %.9g%s", p.Name, values[p.Name], u))
	}
	use := fmt.Sprintf("law %q(%s)", a.Name, strings.Join(args, ", "))
	var last string
	for _, place := range [][2]string{{"joint j " + use, ""}, {"joint j mass 1 kg", ", loss " + use}} {
		text := "tautspan 1\nstock w {\n    mass 1 kg/m\n}\nline l {\n    tension 1 kN\n    support a fixed\n    segment s w 5 m" + place[1] + "\n    " + place[0] + "\n    segment u w 5 m\n    support b fixed\n}\n"
		c := dsl.Compile(fstest.MapFS{"try.taut": {Data: []byte(text)}}, "try.taut", dsl.Options{Plugins: installed()})
		if errs := c.Diagnostics.Errors(); len(errs) > 0 {
			last = errs[0].Summary
			continue
		}
		values, err := c.Template.Values(nil)
		if err != nil {
			last = err.Error()
			continue
		}
		net, err := c.Template.Bind(values)
		if err != nil {
			last = err.Error()
			continue
		}
		out := []tryout.Check{{Name: "stands in a scenario", Outcome: tryout.Holds, Detail: use}}
		return append(out, swings(net, a.Dissipates)...)
	}
	return []tryout.Check{{Name: "stands in a scenario", Outcome: tryout.Fails, Detail: last}}
}

// swings moves each written law of a network through cycles of three sizes.
func swings(net *scenario.Network, dissipates bool) []tryout.Check {
	var out []tryout.Check
	eachWritten(net, func(_ string, w *scenario.WrittenOf[float64]) {
		for _, size := range []float64{1e-4, 1e-2, 1} {
			taken, gross := lawTakes(w, size)
			c := tryout.Check{Name: "a swing", Outcome: tryout.Holds, Detail: fmt.Sprintf("three cycles of %g m at 1 Hz take %.3g J", size, taken)}
			if math.IsNaN(taken) || dissipates && taken < -givesBack*gross {
				c.Outcome = tryout.Fails
			}
			out = append(out, c)
		}
	})
	return out
}

// eachWritten visits the written laws of a network with the names that use them.
func eachWritten(net *scenario.Network, visit func(name string, w *scenario.WrittenOf[float64])) {
	eachLaw(net, func(l *scenario.LawOf[float64]) {
		if l.Written != nil {
			visit(l.Name, l.Written)
		}
	})
}

// givesBack is the share of the energy that went to and fro below which a law is
// not said to give any: the swing is integrated to about that.
const givesBack = 1e-3

// lawTakes swings a law through three cycles of a size at 1 Hz, from rest, and
// gives the energy that it took and what went to and fro, J.
func lawTakes(w *scenario.WrittenOf[float64], size float64) (taken, gross float64) {
	const omega, steps = 2 * math.Pi, 4000
	state := append([]float64(nil), w.Starts...)
	args := make([]float64, scenario.StateArg+len(state))
	at := func(t float64, z []float64) []float64 {
		args[0], args[1] = t, 0
		args[scenario.StateArg-2], args[scenario.StateArg-1] = size*math.Sin(omega*t), size*omega*math.Cos(omega*t)
		copy(args[scenario.StateArg:], z)
		return args
	}
	rate := func(t float64, z []float64) []float64 {
		out := make([]float64, len(z))
		a := at(t, z)
		for i := range w.Rates {
			out[i] = w.Rates[i].Eval(nil, a)
		}
		return out
	}
	power := func(t float64) float64 {
		a := at(t, state)
		return -w.Force.Eval(nil, a) * size * omega * math.Cos(omega*t)
	}
	h := 1.0 / steps
	before := power(0)
	for i := range 3 * steps {
		t := float64(i) * h
		// Heun's rule; states of damping laws are stiff only far below a swing.
		k1 := rate(t, state)
		trial := make([]float64, len(state))
		for j := range state {
			trial[j] = state[j] + h*k1[j]
		}
		k2 := rate(t+h, trial)
		for j := range state {
			state[j] += h / 2 * (k1[j] + k2[j])
		}
		now := power(t + h)
		taken += h / 2 * (before + now)
		gross += h / 2 * math.Abs(before+now)
		before = now
	}
	return taken, gross
}
