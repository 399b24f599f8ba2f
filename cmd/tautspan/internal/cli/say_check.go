package cli

import (
	"fmt"
	"io"
	"math"
	"strings"

	"github.com/tautspan/tautspan/cmd/tautspan/internal/app"
)

// printer writes answers for people.
type printer struct {
	out   io.Writer
	width int // columns
	reader
}

func (p *printer) line(format string, args ...any) { fmt.Fprintf(p.out, format+"\n", args...) }

func (p *printer) table(t *table) {
	for _, l := range t.lines() {
		p.line("%s", l)
	}
}

func (p *printer) prose(indent, text string) {
	for i, l := range wrap(text, p.width-len(indent), "") {
		if i == 0 {
			p.line("%s%s", indent, l)
		} else {
			p.line("%s%s", strings.Repeat(" ", len(indent)), l)
		}
	}
}

// heading names the scenario.
func (p *printer) heading(h *app.Head) {
	title := h.Scenario.Title
	if title == "" {
		title = h.Scenario.File
	}
	for _, l := range wrap(title, p.width, "") {
		p.line("%s", l)
	}
}

// sayCheck prints what is known without running.
func (p *printer) sayCheck(d *app.CheckDoc) {
	p.heading(&d.Head)
	for i := range d.Lines {
		p.sayLine(&d.Lines[i])
	}
	p.sayBounds(d.Stocks)
	p.sayLets(d.Lets)
	p.saySurvey(d)
	for _, pl := range d.Plucks {
		p.line("\npluck %s: %s holds %s aside", pl.Name, p.show(pl.Force, "N", 4), p.show(pl.Drawn, "m", 4))
	}
	if d.Run != nil {
		assumed := ""
		if len(d.Run.Assumed) > 0 {
			assumed = " (assumed: " + strings.Join(d.Run.Assumed, ", ") + ")"
		}
		p.line("\nrun: %s, a row every %s, agreement within %s%s", p.show(d.Run.For, "s", 4), p.show(d.Run.Every, "s", 4), percent(d.Run.Agree), assumed)
	}
	if len(d.Solvers) > 0 {
		p.line("\nsolvers")
		t := newTable()
		for _, s := range d.Solvers {
			switch {
			case !s.Can:
				t.add(s.Name, "cannot: "+strings.Join(s.Reasons, "; "))
			case s.Cost != nil:
				t.add(s.Name, fmt.Sprintf("can, about %s cell-steps for three levels", trimNumber(round2(*s.Cost), 2)))
			default:
				t.add(s.Name, "can")
			}
		}
		p.table(t)
	}
}

func (p *printer) sayLine(l *app.LineFacts) {
	p.line("\nline %s: %s long, end to end in %s", l.Name, p.show(l.Length, "m", 5), p.show(l.TravelTime, "s", 4))
	t := newTable("segment", "length", "mass", "tension", "wave speed", "impedance").flush(1, 2, 3, 4, 5)
	for i, s := range l.Segments {
		if i == 12 && len(l.Segments) > 14 {
			t.add(fmt.Sprintf("… %d more", len(l.Segments)-i), "", "", "", "", "")
			break
		}
		t.add(s.Name, p.show(s.Length, "m", 5), p.show(s.MassPerLength, "kg/m", 4), p.show(s.Tension, "N", 4), p.show(s.WaveSpeed, "m/s", 4), p.show(s.Impedance, "N*s/m", 4))
	}
	p.table(t)
	for _, h := range l.Holds {
		p.line("  joint %s holds %s along the line", h.Joint, p.show(h.Force, "N", 4))
	}
	var facts []string
	if l.Strength != nil {
		facts = append(facts, percent(*l.Strength)+" of strength")
	}
	if l.StoredEnergy != nil {
		facts = append(facts, p.show(*l.StoredEnergy, "J", 3)+" stored")
	}
	if l.Lambda2 != nil {
		facts = append(facts, "sag parameter lambda² "+trimNumber(*l.Lambda2, 3))
	}
	if l.Xi != nil {
		facts = append(facts, "bending parameter xi "+trimNumber(*l.Xi, 3))
	}
	if len(facts) > 0 {
		p.line("  %s", strings.Join(facts, ", "))
	}
	if len(l.Frequencies) > 0 {
		words := make([]string, len(l.Frequencies))
		factor, unit := p.unitFor(l.Frequencies[0], "Hz")
		for i, f := range l.Frequencies {
			words[i] = trimNumber(f*factor, 5)
		}
		p.line("  first vibrations %s %s", strings.Join(words, ", "), unit)
	}
}

// sayBounds prints what the bending stiffness of a stock can be.
func (p *printer) sayBounds(stocks []app.StockFacts) {
	const unit = "N*m^2"
	for _, s := range stocks {
		bounds := "up to " + p.show(s.High, unit, 3) + " (a solid bar)"
		if s.Low > 0 && s.Low < s.High {
			bounds = "between " + p.show(s.Low, unit, 3) + " (wires that slide) and " + p.show(s.High, unit, 3) + " (a solid bar)"
		}
		taken := "an ideal string"
		if s.Bending > 0 {
			taken = p.show(s.Bending, unit, 3)
		}
		p.line("\nstock %s: bending stiffness %s; taken as %s", s.Name, bounds, taken)
	}
}

func (p *printer) sayLets(lets []app.LetFacts) {
	t := newTable()
	for _, l := range lets {
		if l.AsTaken != "" {
			t.add(l.Name, p.withBar(l.Value, l.StandardU, l.Unit), "taken as: "+l.AsTaken)
		}
	}
	if len(t.rows) > 0 {
		p.line("\ndoubtful inputs (one standard uncertainty)")
		p.table(t)
	}
}

// saySurvey prints the readings with their doubts as they were taken, and what is
// sought in them.
func (p *printer) saySurvey(d *app.CheckDoc) {
	t := newTable()
	for i := range d.Readings {
		r := &d.Readings[i]
		what := r.Kind
		if r.Number != nil {
			what += fmt.Sprintf(" %d", *r.Number)
		}
		values := make([]string, len(r.Values))
		for k, v := range r.Values {
			values[k] = p.read(v, r.Unit)
		}
		taken := "taken as: " + r.AsTaken
		if len(r.Values) > 1 {
			taken += " (of the last)"
		}
		if r.SharedAsTaken != "" {
			taken += "; in common: " + r.SharedAsTaken
		}
		t.add(r.Reading, what, shorten(strings.Join(values, ", "), p.width/3), taken)
	}
	if len(t.rows) > 0 {
		p.line("\nreadings")
		p.table(t)
	}
	var words []string
	for _, s := range d.Sought {
		words = append(words, s.Name+" from "+p.show(s.From, s.Unit, 4)+" to "+p.show(s.To, s.Unit, 4))
	}
	if len(words) > 0 {
		p.prose("sought by fit: ", strings.Join(words, ", "))
	}
}

// percent writes a share.
func percent(share float64) string {
	return trimNumber(share*100, 3) + " %"
}

func round2(v float64) float64 {
	if v == 0 {
		return 0
	}
	p := math.Pow(10, math.Floor(math.Log10(v))-1)
	return math.Round(v/p) * p
}
