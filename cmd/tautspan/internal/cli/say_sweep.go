package cli

import (
	"fmt"
	"math"
	"strconv"
	"strings"

	"github.com/tautspan/tautspan/cmd/tautspan/internal/app"
	"github.com/tautspan/tautspan/dsl/unit"
	"github.com/tautspan/tautspan/engine/doubt"
)

// mostCaseRows is the largest number of cases that are listed; more are only
// summed up.
const mostCaseRows = 24

// saySweep prints the answer of a sweep.
func (p *printer) saySweep(d *app.SweepDoc, cautions bool) {
	p.heading(&d.Head)
	p.sayMeetings(d)
	for i := range d.Best {
		p.sayBest(&d.Best[i])
	}
	p.sayCases(d)
	p.sayRequirements(d.Requirements)
	p.sayCollected(d.Collected)
	for _, n := range d.Notes {
		p.prose("note: ", n)
	}
	if cautions {
		p.sayCautions(d.Cautions)
	}
	verdict := d.Verdict
	if d.Cut {
		verdict += " (cut short)"
	}
	p.line("\n%s", verdictLine(verdict, d.ResultDir))
}

// place writes a value of a let in the unit in which its range is written.
func (p *printer) place(v float64, si, shown string, digits int) string {
	u, err := unit.Parse(shown)
	if shown == "" || err != nil || u.Scale || u.Dim != dimOf(si) {
		return p.show(v, si, digits)
	}
	return trimNumber(v/u.Factor(), digits) + " " + shown
}

func (p *printer) sayMeetings(d *app.SweepDoc) {
	if len(d.Searches) == 0 {
		return
	}
	p.line("\nmeetings")
	t := newTable()
	var apart []string // those that never meet, those of one value together
	last := ""
	for i := range d.Searches {
		s := &d.Searches[i]
		switch {
		case s.Found > 0:
		case s.What == last:
			apart[len(apart)-1] += ", " + s.With
		default:
			apart = append(apart, s.What+" with "+s.With)
			last = s.What
		}
	}
	for i := range d.Crossings {
		c := &d.Crossings[i]
		at := c.At
		remark := p.because(&at)
		if c.Touches {
			remark = "only touches: a small change may take it away"
		}
		value := ""
		if c.Value != nil {
			value = "at " + p.show(*c.Value, c.Unit, 5)
		}
		t.add(c.What, "meets "+c.With, c.Over+" = "+p.inUnit(&at, c.Shown), value, remark)
	}
	p.table(t)
	if len(apart) > 0 {
		p.prose("  ", "no meeting of "+strings.Join(apart, "; "))
	}
	for i := range d.Searches {
		s := &d.Searches[i]
		where := fmt.Sprintf("%s from %s to %s", s.Over, p.place(s.From, s.Unit, s.Shown, 6), p.place(s.To, s.Unit, s.Shown, 6))
		if i == 0 || s.Over != d.Searches[i-1].Over || s.From != d.Searches[i-1].From || s.To != d.Searches[i-1].To {
			p.prose("  ", "searched: "+where+", at steps of "+p.place(s.Step, s.Unit, s.Shown, 4)+"; two meetings closer than a step may be missed")
		}
		for _, x := range s.Jumps {
			p.prose("  ", s.What+" passes "+s.With+" by a jump at "+p.place(x, s.Unit, s.Shown, 5))
		}
		for _, g := range s.Gaps {
			p.prose("  ", fmt.Sprintf("%s and %s are not both known for %s from %s to %s", s.What, s.With, s.Over, p.place(g[0], s.Unit, s.Shown, 5), p.place(g[1], s.Unit, s.Shown, 5)))
		}
	}
}

func (p *printer) sayBest(b *app.SweepBest) {
	p.line("")
	if b.At == nil {
		p.prose("", fmt.Sprintf("%s has no value for any %s looked at from %s to %s", b.Measure, b.Over, p.place(b.From, b.OverUnit, b.Shown, 5), p.place(b.To, b.OverUnit, b.Shown, 5)))
		return
	}
	at := p.place(*b.At, b.OverUnit, b.Shown, 4)
	p.prose("", fmt.Sprintf("%s is %s at %s = %s: %s", b.Measure, b.Goal, b.Over, at, p.doubtful(&b.Value)))
	if !b.Inside {
		end := "upper"
		if *b.At == b.From {
			end = "lower"
		}
		p.prose("  ", "that is the "+end+" end of the range: for all that is known it is better beyond, so there is no best inside")
	} else if b.FlatFrom != nil && b.FlatTo != nil {
		p.prose("  ", fmt.Sprintf("within 2 %% of that from %s to %s, by steps of %s", p.place(*b.FlatFrom, b.OverUnit, b.Shown, 4), p.place(*b.FlatTo, b.OverUnit, b.Shown, 4), p.place(b.Step, b.OverUnit, b.Shown, 3)))
	}
	t := newTable("one u of", "it is there", "best at", "with").flush(1, 2, 3)
	for _, d := range b.Drift {
		cell := func(v *float64, si, shown string) string {
			if v == nil {
				return "-"
			}
			return p.place(*v, si, shown, 4)
		}
		sign := "+"
		if d.Sign < 0 {
			sign = "-"
		}
		t.add(sign+d.Let, cell(d.Kept, b.Value.Unit, ""), cell(d.At, b.OverUnit, b.Shown), cell(d.Reached, b.Value.Unit, ""))
	}
	if len(b.Drift) > 0 {
		p.table(t)
	}
	if c := b.Curve; len(c.Over) > 1 {
		p.sayCurve(b)
	}
}

// sayCurve draws the curve of a best value as a few numbers.
func (p *printer) sayCurve(b *app.SweepBest) {
	t := newTable(b.Over, b.Measure).flush(0, 1)
	every := max(1, (len(b.Curve.Over)-1)/10)
	for k := 0; k < len(b.Curve.Over); k += every {
		value := "-"
		if v := b.Curve.Value[k]; v != nil {
			value = p.show(*v, b.Value.Unit, 4)
		}
		t.add(p.place(b.Curve.Over[k], b.OverUnit, b.Shown, 4), value)
	}
	p.table(t)
}

func (p *printer) sayCases(d *app.SweepDoc) {
	if d.Cases == 0 {
		return
	}
	p.line("\n%d cases: %d done, %d failed", d.Cases, d.Done, d.Failed)
	if len(d.Rows) == d.Done && d.Done <= mostCaseRows && d.Done > 0 {
		t := newTable(caseHeads(d.Columns)...)
		for _, row := range d.Rows {
			var cells []string
			for c, v := range row {
				if keep, verdict := shownColumn(d.Columns, c); keep {
					cells = append(cells, caseCell(v, verdict))
				}
			}
			t.add(cells...)
		}
		p.table(t)
	} else {
		t := newTable("column", "least", "5 %", "median", "95 %", "most").flush(1, 2, 3, 4, 5)
		for _, c := range d.Summary.Columns {
			t.add(c.Name, caseCell(c.Least, false), caseCell(c.P05, false), caseCell(c.Median, false), caseCell(c.P95, false), caseCell(c.Most, false))
		}
		p.table(t)
	}
	for _, v := range d.Summary.Verdicts {
		p.prose("  ", fmt.Sprintf("%s: met in %d, undecided in %d, not met in %d", v.Text, v.Met, v.Undecided, v.NotMet))
	}
	for i, f := range d.Failures {
		if i == 3 {
			p.line("  … %d more failed", len(d.Failures)-i)
			break
		}
		p.prose("  ", "case "+strconv.Itoa(f.Case)+" failed: "+f.Reason)
	}
}

// shownColumn keeps intervals and margins to the files.
func shownColumn(columns []string, c int) (keep, verdict bool) {
	name := columns[c]
	for _, part := range []string{" low95", " high95", " margin"} {
		if containsWord(name, part) {
			return false, false
		}
	}
	return true, containsWord(name, " verdict")
}

func containsWord(name, part string) bool {
	for i := 0; i+len(part) <= len(name); i++ {
		if name[i:i+len(part)] == part {
			rest := name[i+len(part):]
			return rest == "" || rest[0] == ' '
		}
	}
	return false
}

func caseHeads(columns []string) []string {
	var out []string
	for c, name := range columns {
		if keep, verdict := shownColumn(columns, c); verdict {
			out = append(out, "")
		} else if keep {
			out = append(out, name)
		}
	}
	return out
}

func caseCell(v *float64, verdict bool) string {
	switch {
	case v == nil || math.IsNaN(*v):
		return "-"
	case verdict && *v > 0:
		return string(doubt.Met)
	case verdict && *v < 0:
		return string(doubt.NotMet)
	case verdict:
		return string(doubt.Undecided)
	}
	return trimNumber(*v, 6)
}
