package app

import (
	"fmt"
	"math"
	"math/cmplx"
	"strings"

	"github.com/tautspan/tautspan/dsl/diag"
	"github.com/tautspan/tautspan/engine/mesh"
	"github.com/tautspan/tautspan/engine/modal"
	"github.com/tautspan/tautspan/engine/scenario"
)

// Hints look at a scenario's vibrations for what decides a job: a watch that
// cannot see one of them, and a drive that meets one. The bounds are chosen.
const (
	hintModes  = 6    // of each group, held against the watches
	stillShare = 0.02 // of the largest displacement, below which a place is still
	nearShare  = 0.1  // of a natural frequency, within which a drive is near it
	mostDriven = 60   // vibrations held against the drives
)

// placeOf is the place of a path in the text, or the file as a whole.
func (l *loaded) placeOf(path string) diag.Span {
	if span, ok := l.compiled.PathSpans.Find(path); ok {
		return span
	}
	return diag.Span{File: l.compiled.Sources[0].File}
}

func (l *loaded) hint(path, code, summary, found string) {
	l.note(diag.List{{Code: code, Severity: diag.Warning, Span: l.placeOf(path), Summary: summary, Found: found}})
}

// hintStill remarks on watches that lie near a place where one of the first
// vibrations does not move.
func (l *loaded) hintStill() {
	res, err := modal.Find(l.mesh, modal.Want{Count: hintModes, Shapes: true})
	if err != nil {
		return // said where the vibrations are asked for
	}
	seen := map[string]bool{}
	for i := range l.mesh.Channels {
		c := &l.mesh.Channels[i]
		if c.Along || seen[c.Watch] || c.Quantity > scenario.Acceleration {
			continue
		}
		seen[c.Watch] = true
		if n := c.Spots[0].Node; n >= 0 && l.mesh.Nodes[n].Support {
			continue
		}
		var still []string
		for k := range res.Modes {
			m := &res.Modes[k]
			if (m.Line == c.Line || m.Line < 0) && m.Multiplicity == 1 && m.Shape != nil && cmplx.Abs(m.Shape.At(c.Spots[0])) < stillShare {
				still = append(still, fmt.Sprint(m.Number))
			}
		}
		if len(still) > 0 {
			l.hint("watch."+c.Watch+".at", "watch-at-node", fmt.Sprintf("%s hardly sees %s", c.Watch, listed("mode", still)),
				fmt.Sprintf("the place moves there by less than %.0f %% of the line's largest displacement", 100*stillShare))
		}
	}
}

// listed is "mode 2" or "modes 2, 4".
func listed(word string, list []string) string {
	if len(list) > 1 {
		word += "s"
	}
	return word + " " + strings.Join(list, ", ")
}

// hintDriven remarks on drives whose frequency lies near a natural one.
func (l *loaded) hintDriven() {
	type drive struct {
		name string
		f    float64
	}
	var drives []drive
	top := 0.0
	add := func(name string, h scenario.History) {
		for _, f := range h.Value.Sines() {
			if f > 0 && !math.IsInf(f, 0) {
				drives = append(drives, drive{name, f})
				top = math.Max(top, f)
			}
		}
	}
	for _, p := range l.net.Pushes {
		add(p.Name, p.Force)
	}
	for _, p := range l.net.Presses {
		add(p.Name, p.Force)
	}
	for _, p := range l.net.Moves {
		add(p.Name, p.Motion)
	}
	if len(drives) == 0 || l.mesh.Features()&(mesh.NonLinear|mesh.BenchDamper) != 0 {
		return
	}
	res, err := modal.Find(l.mesh, modal.Want{Below: top / (1 - nearShare), Count: mostDriven})
	if err != nil {
		return
	}
	seen := map[drive]bool{}
	for _, d := range drives {
		best := -1
		for k := range res.Modes {
			if off := math.Abs(d.f/res.Modes[k].DampedFrequency - 1); off < nearShare && (best < 0 || off < math.Abs(d.f/res.Modes[best].DampedFrequency-1)) {
				best = k
			}
		}
		if best < 0 || seen[d] {
			continue
		}
		seen[d] = true
		m := &res.Modes[best]
		of := "the tied lines"
		if m.Line >= 0 {
			of = l.net.Lines[m.Line].Name
		}
		damped := "nothing damps it"
		if m.DampingRatio > 0 {
			damped = fmt.Sprintf("its damping ratio is %.3g %%", 100*m.DampingRatio)
		}
		l.hint("excite."+d.name+".with", "near-resonance", fmt.Sprintf("%s at %.4g Hz lies within 10 %% of mode %d of %s", d.name, d.f, m.Number, of),
			fmt.Sprintf("that is at %.4g Hz, and %s", m.DampedFrequency, damped))
	}
}
