package fit

import (
	"fmt"
	"math"
	"sort"

	"github.com/tautspan/tautspan/engine/doubt"
	"github.com/tautspan/tautspan/engine/scenario"
)

// Next is the further reading that would shrink the intervals most.
type Next struct {
	What      string  // in words
	Line      int     // -1: not of a line
	Mode      int     // 0: none
	Value     float64 // to be expected, in Unit
	Unit      string
	U         float64 // standard uncertainty it is reckoned with
	Let       string  // the sought let that gains most
	From, To  float64 // its relative 95 % half width, before and after
	Candidate string  // frequency, returns, or let
}

// candidate is a reading that could be taken, as one more row of slopes.
type candidate struct {
	next Next
	row  []float64
}

// beyond is how many modes above the highest that was read are offered. Chosen:
// what a second blow nearer to an end would show.
const beyond = 4

// next weighs every reading that could be added by what it would do to the
// covariance, for the lets that a requirement reads, or the forces among the
// sought lets, or all of them:
//
//	C' = C - C j j'C/(1 + j'C j),
//
// with j the slopes of the new reading over its uncertainty.
func (p *Problem) next(s *Solution) *Next {
	c := s.cover
	targets := p.targets()
	var best *Next
	gainBest := 0.02 // less is not worth a climb
	for _, cand := range p.candidates(s) {
		v := make([]float64, len(cand.row))
		sum := 1.0
		for a := range v {
			for b := range v {
				v[a] += c.covariance.At(a, b) * cand.row[b]
			}
			sum += cand.row[a] * v[a]
		}
		gain, most := 0.0, 0.0
		n := cand.next
		for _, i := range targets {
			before := c.covariance.At(i, i)
			after := before - v[i]*v[i]/sum
			if !(before > 0) || !(after > 0) {
				continue
			}
			part := 0.5 * math.Log(before/after)
			gain += part / float64(len(targets))
			if part > most {
				most = part
				n.Let = p.unknowns[i].name
				n.From, n.To = c.relative(i, before), c.relative(i, after)
			}
		}
		if gain > gainBest && n.Let != "" && !math.IsInf(n.From, 0) && !math.IsNaN(n.To) {
			gainBest, best = gain, &n
		}
	}
	return best
}

// relative is the relative half width of 95 % that a variance of a coordinate
// comes to.
func (c *cover) relative(i int, variance float64) float64 {
	u := &c.p.unknowns[i]
	half := doubt.TwoSided * math.Sqrt(variance)
	if !u.log {
		half *= u.scale / math.Max(math.Abs(u.value(c.s.x[i])), 1e-300)
	}
	return half
}

// targets are the unknowns whose intervals matter.
func (p *Problem) targets() []int {
	asked := map[int]bool{}
	for i := range p.template.Requires {
		r := &p.template.Requires[i]
		r.Value.LetsUsed(asked)
		for _, m := range r.Measures {
			if m.Line >= 0 && m.Line < len(p.template.Model.Lines) {
				for _, seg := range p.template.Model.Lines[m.Line].Segments {
					seg.Tension.LetsUsed(asked)
				}
			}
		}
	}
	spread(p.template, asked)
	var named, forces []int
	for _, i := range p.sought {
		if asked[p.unknowns[i].let] {
			named = append(named, i)
		}
		if p.template.Lets[p.unknowns[i].let].Unit == "N" {
			forces = append(forces, i)
		}
	}
	switch {
	case len(named) > 0:
		return named
	case len(forces) > 0:
		return forces
	}
	return p.sought
}

// candidates are further frequencies of every line that was read, another time
// of what was timed, and a better figure of every let that was known beforehand.
func (p *Problem) candidates(s *Solution) []candidate {
	var out []candidate
	share := p.usualShare()
	for c, cfg := range p.configs {
		if share > 0 && (cfg.modes > 0 || cfg.below > 0) && !cfg.decays {
			out = append(out, p.furtherModes(s, c, share)...)
		}
	}
	seen := map[[3]int]bool{}
	for i := range p.obs {
		o := &p.obs[i]
		key := [3]int{o.config, int(o.kind), o.order}
		if o.kind.Unit() != "s" || seen[key] {
			continue
		}
		seen[key] = true
		cfg := p.configs[o.config]
		what := fmt.Sprintf("%d returns of %s timed once more", o.order, p.lineName(cfg.line))
		if o.kind == scenario.SwingsReading {
			what = fmt.Sprintf("%d swings of %s timed once more", o.order, p.lineName(cfg.line))
		}
		row := p.slopes(s, o.config, func(q *prediction) float64 { return q.of(o, o.order) }, o.u)
		if row == nil {
			continue
		}
		if o.shared >= 0 {
			row[o.shared] = o.sharedU / o.u
		}
		out = append(out, candidate{Next{What: what, Line: cfg.line, Value: o.value, Unit: "s", U: o.u, Candidate: o.kind.String()}, row})
	}
	for i := range p.unknowns {
		u := &p.unknowns[i]
		if !u.prior || u.let < 0 {
			continue
		}
		row := make([]float64, len(p.unknowns))
		row[i] = math.Sqrt(3) // with what is known: half its uncertainty
		if u.sought {
			row[i] *= s.Values[u.let] / u.u // coordinate: logarithm
			if !u.log {
				row[i] = math.Sqrt(3) * u.scale / u.u
			}
		}
		let := &p.template.Lets[u.let]
		out = append(out, candidate{Next{What: "half the doubt of " + u.name, Line: -1, Value: s.Values[u.let], Unit: let.Unit, U: u.u / 2, Candidate: "let"}, row})
	}
	return out
}

func (p *Problem) lineName(i int) string { return p.template.Model.Lines[i].Name }

// usualShare is the middle of the relative uncertainties of the frequencies that
// were read, 0 where there are none.
func (p *Problem) usualShare() float64 {
	var all []float64
	for i := range p.obs {
		if o := &p.obs[i]; o.kind.Unit() == "Hz" {
			all = append(all, o.u/o.value)
		}
	}
	if len(all) == 0 {
		return 0
	}
	sort.Float64s(all)
	return all[len(all)/2]
}

// furtherModes are the vibrations of a config that were not read.
func (p *Problem) furtherModes(s *Solution, c int, share float64) []candidate {
	cfg := *p.configs[c]
	read := map[int]bool{}
	top := 0
	for i := range p.obs {
		o := &p.obs[i]
		if o.config == c && o.kind.Unit() == "Hz" && s.cover.s.modes[i] > 0 {
			read[s.cover.s.modes[i]] = true
			top = max(top, s.cover.s.modes[i])
		}
	}
	cfg.modes, cfg.below = min(top+beyond, mostModes), 0
	at := cfg.predict(s.Values, level)
	if at.err != nil {
		return nil
	}
	var out []candidate
	rows := p.slopesOf(s, &cfg, func(q *prediction) []float64 { return q.frequency })
	for n := 1; n <= len(at.frequency); n++ {
		if read[n] || rows == nil {
			continue
		}
		f := at.frequency[n-1]
		row := make([]float64, len(p.unknowns))
		for k := range row {
			row[k] = rows[k][n-1] / (share * f)
		}
		what := fmt.Sprintf("frequency %d of %s", n, p.lineName(cfg.line))
		out = append(out, candidate{Next{What: what, Line: cfg.line, Mode: n, Value: f, Unit: "Hz", U: share * f, Candidate: "frequency"}, row})
	}
	return out
}

// slopes are those of one value of a config over an uncertainty.
func (p *Problem) slopes(s *Solution, c int, value func(*prediction) float64, u float64) []float64 {
	rows := p.slopesOf(s, p.configs[c], func(q *prediction) []float64 { return []float64{value(q)} })
	if rows == nil {
		return nil
	}
	out := make([]float64, len(rows))
	for k := range rows {
		out[k] = rows[k][0] / u
	}
	return out
}

// slopesOf are the slopes of values of a config in every unknown; nil where one
// does not exist.
func (p *Problem) slopesOf(s *Solution, cfg *config, of func(*prediction) []float64) [][]float64 {
	x := append([]float64(nil), s.cover.s.x...)
	out := make([][]float64, len(x))
	width := -1
	for k := range x {
		var ends [2][]float64
		for side, sign := range []float64{1, -1} {
			x[k] = s.cover.s.x[k] + sign*difference
			values, err := p.values(x)
			if err != nil {
				return nil
			}
			q := cfg.predict(values, level)
			if q.err != nil {
				return nil
			}
			ends[side] = of(&q)
		}
		x[k] = s.cover.s.x[k]
		if width < 0 {
			width = len(ends[0])
		}
		if len(ends[0]) != width || len(ends[1]) != width {
			return nil
		}
		out[k] = make([]float64, width)
		for i := range width {
			if out[k][i] = (ends[0][i] - ends[1][i]) / (2 * difference); math.IsNaN(out[k][i]) {
				return nil
			}
		}
	}
	return out
}
