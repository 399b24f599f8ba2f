package cli

import (
	"fmt"
	"math"
	"strings"

	"github.com/tautspan/tautspan/cmd/tautspan/internal/app"
)

// record is one history to be drawn.
type record struct {
	name, unit string
	every      float64
	values     []float64
}

// sayRun prints the answer of a run.
func (p *printer) sayRun(d *app.RunDoc, records []record) {
	p.heading(&d.Head)
	if d.Run != nil && len(d.Watches) > 0 {
		assumed := ""
		if len(d.Run.Assumed) > 0 {
			assumed = " (assumed: " + strings.Join(d.Run.Assumed, ", ") + ")"
		}
		p.line("%s at a row every %s, to agree within %s%s", p.show(d.Run.For, "s", 4), p.show(d.Run.Every, "s", 4), percent(d.Run.Agree), assumed)
	}
	for _, pl := range d.Plucks {
		p.line("pluck %s: %s holds %s aside", pl.Name, p.show(pl.Force, "N", 4), p.show(pl.Drawn, "m", 4))
	}
	p.sayRequirements(d.Requirements)
	p.sayCollected(d.Collected)
	p.sayWatches(d)
	p.sayRecords(records)
	p.saySolvers(d)
	for _, n := range d.Notes {
		p.prose("note: ", n)
	}
	p.sayCautions(d.Cautions)
	verdict := d.Verdict
	if d.Cut {
		verdict += " (cut short)"
	}
	p.line("\n%s", verdictLine(verdict, d.ResultDir))
}

func verdictLine(verdict, dir string) string {
	if dir == "" {
		return "In all: " + verdict + "."
	}
	return "In all: " + verdict + ". Everything is in " + dir + "."
}

func (p *printer) sayRequirements(list []app.RequirementRow) {
	if len(list) == 0 {
		return
	}
	p.line("\nrequired")
	t := newTable()
	var more []string
	for i := range list {
		r := &list[i]
		remark := r.Remark
		if r.Clause != "" {
			remark = strings.TrimSpace(remark + " [" + r.Clause + "]")
		}
		t.add(r.Verdict, r.Text, p.inUnit(&r.Value, r.Shown), remark)
		if r.Verdict != "met" && r.Settle != "" {
			more = append(more, r.Text+": "+r.Settle)
		}
	}
	p.table(t)
	for _, m := range more {
		p.prose("  ", m)
	}
}

func (p *printer) sayWatches(d *app.RunDoc) {
	if len(d.Watches) == 0 {
		return
	}
	p.line("\nwatched (± is the solvers' own bound)")
	t := newTable("quantity", "peak", "at", "rms", "verdict", "resolves").flush(1, 2, 3, 5)
	means := false
	for i := range d.Watches {
		w := &d.Watches[i]
		name := w.Name + "." + w.Quantity
		if w.Mean {
			name += " *"
			means = true
		}
		resolves := "-"
		if w.ResolvingPower != nil {
			resolves = percent(*w.ResolvingPower)
		}
		verdict := w.Verdict
		if w.OddOneOut != nil {
			verdict += ", odd one out " + *w.OddOneOut
		}
		t.add(name, p.withBar(w.Peak.Value, w.Peak.Numerical, w.Unit), p.timeOfPeak(w), p.withBar(w.RMS.Value, w.RMS.Numerical, w.Unit), verdict, resolves)
	}
	p.table(t)
	if means {
		p.line("  * jumps, so each row is the mean over one interval, as a logger would hold")
	}
	for i := range d.Watches {
		if w := &d.Watches[i]; w.Verdict != "agree" && w.Reason != "" {
			p.prose("  ", w.Name+"."+w.Quantity+": "+w.Reason)
		}
	}
}

// timeOfPeak is that of the solver whose peak lies nearest to the one reported.
func (p *printer) timeOfPeak(w *app.WatchRow) string {
	best, at := math.Inf(1), ""
	for _, s := range w.Solvers {
		if s.Peak == nil || s.TimeOfPeak == nil {
			continue
		}
		if gap := math.Abs(*s.Peak - w.Peak.Value); gap < best {
			best, at = gap, p.show(*s.TimeOfPeak, "s", 4)
		}
	}
	return at
}

// recordRows is the height of a small picture in lines.
const recordRows = 5

func (p *printer) sayRecords(records []record) {
	for _, r := range records {
		left := 12
		width := max(20, min(p.width-left-2, 120))
		lines, top, bottom := picture(r.values, width, recordRows)
		if lines == nil {
			continue
		}
		p.line("\n%s", r.name)
		zero := zeroRow(top, bottom, recordRows)
		for i, l := range lines {
			label := ""
			switch {
			case i == 0:
				label = p.edge(top, top-bottom, r.unit)
			case i == recordRows-1:
				label = p.edge(bottom, top-bottom, r.unit)
			case i == zero:
				label = "0"
			}
			p.line("%*s ┤%s", left-2, label, strings.TrimRight(l, "\u2800"))
		}
		end := p.show(r.every*float64(len(r.values)-1), "s", 4)
		p.line("%*s └0%s%s", left-2, "", strings.Repeat(" ", max(1, width-1-len(end))), end)
	}
}

// edge is the label of a picture's edge; rounding about zero is zero.
func (p *printer) edge(v, height float64, si string) string {
	if math.Abs(v) < 1e-3*height {
		return "0"
	}
	return p.show(v, si, 3)
}

func (p *printer) saySolvers(d *app.RunDoc) {
	if len(d.Solvers) == 0 {
		return
	}
	p.line("\nsolvers")
	energy := map[string]*app.EnergyRow{}
	for i := range d.Energy {
		energy[d.Energy[i].Solver] = &d.Energy[i]
	}
	t := newTable("", "cells", "steps", "levels", "energy in", "lost", "unexplained").flush(1, 2, 3, 4, 5, 6)
	var more []string
	for _, s := range d.Solvers {
		if s.ReasonIfAbsent != nil {
			more = append(more, s.Name+" took no part: "+*s.ReasonIfAbsent)
			continue
		}
		row := []string{s.Name, fmt.Sprint(*s.Cells), fmt.Sprint(*s.Steps), levelText(s.Levels)}
		t.add(append(row, p.account(energy[s.Name])...)...)
		for _, n := range s.Notes {
			more = append(more, s.Name+": "+n)
		}
	}
	if len(t.rows) > 0 {
		p.table(t)
	}
	for _, n := range more {
		p.prose("  ", n)
	}
}

func levelText(levels []int) string {
	if len(levels) == 0 {
		return "-"
	}
	return fmt.Sprintf("%d to %d", levels[0], levels[len(levels)-1])
}

// account is the energy that came in, the share lost and the share that the
// solver cannot explain.
func (p *printer) account(e *app.EnergyRow) []string {
	if e == nil || e.Unaccounted == nil || e.Start == nil || e.End == nil || e.Lost == nil || e.Work == nil {
		return []string{"-", "-", "-"}
	}
	in := math.Max(math.Abs(*e.Start)+math.Abs(*e.Work), *e.End)
	if in == 0 {
		return []string{"0", "-", "-"}
	}
	return []string{p.show(*e.Start+*e.Work, "J", 3), percent(*e.Lost / in), fmt.Sprintf("%.0e", math.Abs(*e.Unaccounted)/in)}
}

func (p *printer) sayCautions(list []app.CautionNote) {
	if len(list) == 0 {
		return
	}
	p.line("\ncautions")
	for _, c := range list {
		p.prose("  - ", c.Text)
	}
}
