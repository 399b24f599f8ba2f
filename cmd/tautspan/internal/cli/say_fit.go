package cli

import (
	"fmt"
	"math"
	"strings"

	"github.com/tautspan/tautspan/cmd/tautspan/internal/app"
	"github.com/tautspan/tautspan/dsl/unit"
)

// sayFit prints what a fit found.
func (p *printer) sayFit(d *app.FitDoc, cautions bool) {
	p.heading(&d.Head)
	p.line("\nfound, with the interval that holds it with 95 %%")
	p.unknowns(d.Unknowns, true)
	if len(d.Knowns) > 0 {
		p.line("\nknown beforehand, and what the readings make of it")
		p.unknowns(d.Knowns, false)
	}
	if len(d.Exact) > 0 {
		p.prose("taken as exact: ", strings.Join(d.Exact, ", "))
	}
	p.sayForces(d.Lines)
	p.sayRequirements(d.Requirements)
	p.sayCollected(d.Collected)
	p.sayReadings(d)
	p.sayAlternatives(d)
	if len(d.Open) > 0 {
		p.line("\nwhat the readings cannot decide")
		for _, o := range d.Open {
			p.prose("  ", o)
		}
	}
	if n := d.Next; n != nil {
		p.line("")
		p.prose("next: ", p.nextText(n))
	}
	for _, n := range d.Notes {
		p.prose("note: ", n)
	}
	if cautions {
		p.sayCautions(d.Cautions)
	}
	if len(d.Written) > 0 {
		p.line("\nWritten into %s: %s.", d.Scenario.File, strings.Join(d.Written, ", "))
	}
	p.line("\n%s", verdictLine(d.Verdict, d.ResultDir))
}

func (p *printer) unknowns(list []app.FitUnknown, sought bool) {
	t := newTable("", "value", "from", "to", "").flush(1, 2, 3)
	for i := range list {
		u := &list[i]
		var words []string
		switch {
		case !u.Decided:
			words = append(words, "no reading decides it")
		case u.AtBound:
			words = append(words, "at an end of its range")
		case sought && u.From != nil && u.Low95 != nil && u.High95 != nil && (*u.Low95 <= *u.From*(1+1e-9) || *u.High95 >= *u.To*(1-1e-9)):
			words = append(words, "its interval reaches an end of its range")
		}
		if u.Stated != nil && u.StatedU != nil {
			words = append(words, fmt.Sprintf("said to be %s, moved by %.1f u", p.as(*u.Stated, u, 5), (u.Value-*u.Stated)/(*u.StatedU)))
		}
		t.add(u.Name, p.as(u.Value, u, 5), p.endAs(u.Low95, u), p.endAs(u.High95, u), strings.Join(words, "; "))
	}
	p.table(t)
}

// as writes a value in the unit in which its let is written, so that a table
// reads like the text.
func (p *printer) as(v float64, u *app.FitUnknown, digits int) string {
	read, err := unit.Parse(u.Shown)
	if u.Shown == "" || err != nil || read.Scale || p.system != unit.SI && read.Dim == dimOf(u.Unit) {
		return p.show(v, u.Unit, digits)
	}
	return trimNumber(v/read.Factor(), digits) + " " + u.Shown
}

func (p *printer) endAs(v *float64, u *app.FitUnknown) string {
	if v == nil {
		return "-"
	}
	return p.as(*v, u, 4)
}

func (p *printer) end(v *float64, unit string) string {
	if v == nil {
		return "-"
	}
	return p.show(*v, unit, 4)
}

// sayForces prints the force table.
func (p *printer) sayForces(lines []app.FitLine) {
	if len(lines) == 0 {
		return
	}
	p.line("\nforces")
	t := newTable("line", "length", "modes", "tension", "from", "to", "at", "design", "ratio", "verdict", "next action").flush(1, 2, 3, 4, 5, 7, 8)
	for i := range lines {
		l := &lines[i]
		ratio := "-"
		if l.Ratio != nil {
			ratio = fmt.Sprintf("%.3f", *l.Ratio)
		}
		verdict := l.Verdict
		if verdict == "" {
			verdict = "-"
		}
		t.add(l.Mark, p.show(l.Length, "m", 5), fmt.Sprint(l.Modes), p.end(l.Tension, "N"), p.end(l.Low95, "N"), p.end(l.High95, "N"), l.Where, p.end(l.Design, "N"), ratio, verdict, l.Action)
	}
	p.table(t)
}

// sayReadings prints the residuals, the strangers and the vibrations passed over.
func (p *printer) sayReadings(d *app.FitDoc) {
	p.line("\nreadings")
	t := newTable("reading", "what", "read", "fitted", "off by u").flush(2, 3, 4)
	for i := range d.Residuals {
		r := &d.Residuals[i]
		what := ""
		switch {
		case r.Stranger:
			what = "a stranger"
		case r.Count != nil:
			what = fmt.Sprintf("%d %s", *r.Count, r.Kind)
		case r.Mode != nil && r.Kind == "decay":
			what = fmt.Sprintf("damping %d", *r.Mode)
		case r.Mode != nil:
			what = fmt.Sprintf("mode %d", *r.Mode)
		}
		off := "-"
		if r.Normalized != nil {
			off = fmt.Sprintf("%+.1f", *r.Normalized)
		}
		t.add(r.Reading, what, p.read(r.Observed, r.Unit), p.fittedText(r), off)
	}
	p.table(t)
	for _, m := range d.Missing {
		p.line("  mode %d of %s is missing; it would lie at %s", m.Mode, m.Line, p.show(m.Frequency, "Hz", 5))
	}
	if d.Chi2 != nil {
		words := ""
		if d.Factor != nil && *d.Factor > 1 {
			words = fmt.Sprintf("; the readings count with %.2f times their doubt", *d.Factor)
		}
		p.line("  sum of squares %s with %d to spare%s", trimNumber(*d.Chi2, 3), d.Freedom, words)
	}
}

func (p *printer) read(v float64, unit string) string {
	if unit == "1" {
		return percent(v)
	}
	return p.show(v, unit, 5)
}

func (p *printer) fittedText(r *app.FitResidual) string {
	if r.Computed == nil {
		return "-"
	}
	return p.read(*r.Computed, r.Unit)
}

func (p *printer) sayAlternatives(d *app.FitDoc) {
	if len(d.Alternatives) == 0 {
		return
	}
	p.line("\nother solutions that explain the readings about as well (cost within 9 of %s)", trimNumber(*d.Cost, 3))
	for i := range d.Alternatives {
		a := &d.Alternatives[i]
		var words []string
		for k := range a.Unknowns {
			u := &a.Unknowns[k]
			words = append(words, u.Name+" "+p.as(u.Value, u, 4))
		}
		p.prose("  ", fmt.Sprintf("cost %s: %s; modes %s", trimNumber(a.Cost, 3), strings.Join(words, ", "), modeList(a.Modes)))
	}
}

func modeList(modes []int) string {
	words := make([]string, len(modes))
	for i, m := range modes {
		if words[i] = fmt.Sprint(m); m == 0 {
			words[i] = "-"
		}
	}
	return strings.Join(words, " ")
}

func (p *printer) nextText(n *app.FitNext) string {
	what := n.What
	if n.Kind == "frequency" {
		what += fmt.Sprintf(" (about %s), read to %s,", p.show(n.Value, n.Unit, 4), percent(n.Uncertainty/n.Value))
	}
	return fmt.Sprintf("%s would narrow %s most, from ± %s to ± %s", what, n.Unknown, percent(round3(n.From)), percent(round3(n.To)))
}

func round3(v float64) float64 {
	if v == 0 {
		return 0
	}
	p := math.Pow(10, 2-math.Floor(math.Log10(math.Abs(v))))
	return math.Round(v*p) / p
}
