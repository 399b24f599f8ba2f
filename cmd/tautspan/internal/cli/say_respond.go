package cli

import (
	"fmt"
	"math"
	"slices"
	"strings"

	"github.com/tautspan/tautspan/cmd/tautspan/internal/app"
)

// A person is shown so many frequencies of the shares and joints; JSON holds them all.
const (
	shownFrequencies = 5
	shownJoints      = 12
)

// sayRespond prints steady vibration against frequency.
func (p *printer) sayRespond(d *app.RespondDoc, pictures bool) {
	p.heading(&d.Head)
	n := len(d.Frequency)
	if n == 0 {
		return
	}
	if n > 1 {
		p.line("%d frequencies from %s to %s", n, p.show(d.Frequency[0], "Hz", 5), p.show(d.Frequency[n-1], "Hz", 5))
	}
	p.sayJoints(d)
	p.sayEnds(d)
	p.sayResponses(d, pictures)
	p.sayCollected(d.Collected)
	if len(d.Notes) > 0 {
		p.line("")
	}
	for _, note := range d.Notes {
		p.prose("note: ", note)
	}
}

// spread picks indices of the frequencies that a person is shown.
func spread(n int) []int {
	if n <= shownFrequencies {
		out := make([]int, n)
		for i := range out {
			out[i] = i
		}
		return out
	}
	var out []int
	for i := 0; i < shownFrequencies; i++ {
		out = append(out, i*(n-1)/(shownFrequencies-1))
	}
	return out
}

func (p *printer) frequencyHeads(d *app.RespondDoc, first ...string) ([]int, *table) {
	at := spread(len(d.Frequency))
	heads := first
	var right []int
	for _, i := range at {
		right = append(right, len(heads))
		heads = append(heads, p.show(d.Frequency[i], "Hz", 4))
	}
	return at, newTable(heads...).flush(right...)
}

func (p *printer) sayJoints(d *app.RespondDoc) {
	if len(d.Joints) == 0 {
		return
	}
	p.line("\neach joint alone on an endless line: %% reflected / passed / absorbed")
	at, t := p.frequencyHeads(d, "joint", "wave from")
	for i := 0; i+1 < len(d.Joints) && i < 2*shownJoints; i += 2 {
		before, after := shareCells(&d.Joints[i], at), shareCells(&d.Joints[i+1], at)
		if strings.Join(before, ";") == strings.Join(after, ";") {
			t.add(append([]string{d.Joints[i].Name, "either side"}, before...)...)
			continue
		}
		t.add(append([]string{d.Joints[i].Name, d.Joints[i].From}, before...)...)
		t.add(append([]string{"", d.Joints[i+1].From}, after...)...)
	}
	p.table(t)
	if more := len(d.Joints)/2 - shownJoints; more > 0 {
		p.line("  and %d more joints, in full with --json", more)
	}
	p.prose("  ", "Reflected and passed compare displacements, so that on unlike sides passed may exceed 100 %; absorbed is the share of power lost.")
}

func shareCells(j *app.JointRow, at []int) []string {
	var out []string
	for _, i := range at {
		out = append(out, whole(j.Reflected[i])+" / "+whole(j.Passed[i])+" / "+whole(j.Absorbed[i]))
	}
	return out
}

// whole writes a share in percent without its sign, three figures.
func whole(share *float64) string {
	if share == nil {
		return "-"
	}
	v := *share * 100
	switch {
	case v == 0:
		return "0"
	case v < 0.05:
		return "<0.1"
	}
	return trimNumber(v, 3)
}

func (p *printer) sayEnds(d *app.RespondDoc) {
	if len(d.Ends) == 0 {
		return
	}
	p.line("\neach end with what stands near it: %% of a wave's power taken")
	at, t := p.frequencyHeads(d, "end", "counted with it")
	for i := range d.Ends {
		e := &d.Ends[i]
		row := []string{e.Support, shorten(nearText(e.Joints), 28)}
		for _, k := range at {
			row = append(row, whole(e.Taken[k]))
		}
		t.add(row...)
	}
	p.table(t)
	p.prose("  ", "A wave that comes along the line loses this share of its power there; the support's own echo is counted, which is why it differs from a joint alone.")
}

func nearText(joints []string) string {
	if len(joints) == 0 {
		return "nothing"
	}
	return strings.Join(joints, ", ")
}

func (p *printer) sayResponses(d *app.RespondDoc, pictures bool) {
	for i := range d.Responses {
		r := &d.Responses[i]
		p.line("\n%s.%s per unit of %s%s", r.Watch, r.Quantity, r.Excite, inUnit(r.Unit))
		values := make([]float64, len(r.Amplitude))
		for k, a := range r.Amplitude {
			values[k] = math.NaN()
			if a != nil {
				values[k] = *a
			}
		}
		if !slices.ContainsFunc(values, func(v float64) bool { return v != 0 }) {
			p.line("  zero at every frequency")
			continue
		}
		if pictures && len(values) > 1 {
			p.curve(d.Frequency, values)
		}
		p.sayPeaks(d.Frequency, values, r)
	}
	if len(d.Responses) > 0 {
		p.prose("  ", "Amplitude of the steady motion for an excitation of amplitude 1 in its unit; the phase says how far the watch is ahead of the excitation. Peaks are sought between the frequencies listed; two within one step show as one.")
	}
}

func inUnit(unit string) string {
	if unit == "1" {
		return ""
	}
	return " [" + unit + "]"
}

// amplitude writes an amplitude per unit of excitation with the SI unit as it
// stands: prefixes in a quotient mislead.
func amplitude(v float64) string { return fmt.Sprintf("%.4g", v) }

// curve draws amplitude against frequency, the largest at the top.
func (p *printer) curve(frequency, values []float64) {
	const left, rows = 12, 4
	width := max(20, min(p.width-left-2, 100))
	lines, top, _ := picture(values, width, rows)
	for i, l := range lines {
		label := ""
		switch i {
		case 0:
			label = amplitude(top)
		case rows - 1:
			label = "0"
		}
		p.line("%*s ┤%s", left-2, label, strings.TrimRight(l, "\u2800"))
	}
	from, to := p.show(frequency[0], "Hz", 4), p.show(frequency[len(frequency)-1], "Hz", 4)
	p.line("%*s └%s%s%s", left-2, "", from, strings.Repeat(" ", max(1, width-len([]rune(from))-len([]rune(to)))), to)
}

// sayPeaks lists the peaks, or the few values there are.
func (p *printer) sayPeaks(frequency, values []float64, r *app.ResponseRow) {
	if len(values) <= shownFrequencies {
		for k, v := range values {
			if math.IsNaN(v) {
				p.line("  at %s there is no finite answer: nothing damps a resonance there", p.show(frequency[k], "Hz", 5))
				continue
			}
			p.line("  at %s: %s%s, phase %s rad", p.show(frequency[k], "Hz", 5), amplitude(v), bare(r.Unit), trimNumber(*r.Phase[k], 4))
		}
		return
	}
	if len(r.Peaks) == 0 {
		p.line("  no peak between these frequencies")
		return
	}
	t := newTable("peak at", "amplitude", "phase").flush(0, 1, 2)
	for i := range r.Peaks {
		k := &r.Peaks[i]
		if k.Amplitude == nil {
			t.add(p.show(k.Frequency, "Hz", 6), "without bound", "")
			continue
		}
		t.add(p.show(k.Frequency, "Hz", 6), amplitude(*k.Amplitude)+bare(r.Unit), trimNumber(*k.Phase, 3)+" rad")
	}
	p.table(t)
}

func bare(unit string) string {
	if unit == "1" {
		return ""
	}
	return " " + unit
}
