package fit

import (
	"fmt"

	"github.com/tautspan/tautspan/engine/doubt"
	"github.com/tautspan/tautspan/engine/formula"
	"github.com/tautspan/tautspan/engine/scenario"
)

// Expected is what a survey of so many vibrations of each line would tell of the
// sought lets.
type Expected struct {
	Peaks     int       // vibrations 1 .. Peaks of every line
	HalfWidth []float64 // of 95 %, of each sought let in the order of the seek statements; relative where the let is sought in its logarithm
	Relative  []bool
	Open      []string // what these readings could not decide
}

// Expect tells what surveys of 2 .. most vibrations of the lines named would say
// of the sought lets, each frequency read to a share of itself, if the lets are
// what they are said to be: the intervals that the curvature of the cost gives.
// Lines are indices into the template's.
func Expect(t *scenario.Template, lines []int, most int, share float64) ([]Expected, error) {
	var out []Expected
	for peaks := 2; peaks <= most; peaks++ {
		p, x, err := imagined(t, lines, peaks, share)
		if err != nil {
			return nil, err
		}
		s := &solution{x: x, q: p.predict(x), modes: make(pairing, len(p.obs))}
		for i := range p.obs {
			o := &p.obs[i]
			s.modes[i] = o.order
			if o.value = s.q[o.config].of(o, o.order); !(o.value > 0) {
				return nil, fmt.Errorf("fit: line %s has no vibration %d", t.Model.Lines[p.configs[o.config].line].Name, o.order)
			}
			o.u = share * o.value
		}
		c, err := p.cover(s)
		if err != nil {
			return nil, err
		}
		e := Expected{Peaks: peaks}
		for _, i := range p.sought {
			half := doubt.TwoSided * c.sd(i)
			if !p.unknowns[i].log {
				half *= p.unknowns[i].scale
			}
			e.HalfWidth, e.Relative = append(e.HalfWidth, half), append(e.Relative, p.unknowns[i].log)
		}
		for _, d := range c.open {
			e.Open = append(e.Open, c.words(d))
		}
		out = append(out, e)
	}
	return out, nil
}

// imagined is the fit of a survey that is yet to be made, with the coordinates of
// the lets as they are said.
func imagined(t *scenario.Template, lines []int, peaks int, share float64) (*Problem, []float64, error) {
	plan := *t
	plan.Fit, plan.Readings, plan.Records = nil, nil, nil
	for _, l := range lines {
		r := scenario.ReadingOf[formula.Program]{Name: t.Model.Lines[l].Name, Line: l}
		for n := 1; n <= peaks; n++ {
			r.Items = append(r.Items, scenario.ReadingItemOf[formula.Program]{
				Kind: scenario.FrequencyReading, Order: n, Sag: t.Model.Lines[l].Sag, Values: []formula.Program{formula.Const(1)}, U: []formula.Program{formula.Const(share)},
			})
		}
		plan.Readings = append(plan.Readings, r)
	}
	p, err := New(&plan)
	if err != nil {
		return nil, nil, err
	}
	x := make([]float64, len(p.unknowns))
	for _, i := range p.sought {
		u := &p.unknowns[i]
		lo, hi := u.bounds()
		x[i] = min(max(u.at(p.start[u.let]), lo), hi)
		if u.log && p.start[u.let] <= 0 {
			x[i] = lo
		}
	}
	return p, x, nil
}
