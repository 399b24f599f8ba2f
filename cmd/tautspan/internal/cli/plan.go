package cli

import (
	"fmt"
	"strconv"
	"strings"

	"github.com/tautspan/tautspan/cmd/tautspan/internal/app"
)

// planCmd prepares a survey.
type planCmd struct {
	File     string `arg:"" help:"Scenario file; - for standard input."`
	Modes    int    `default:"8" help:"How many vibrations of each line are to be read."`
	Accuracy string `default:"0.2 %" placeholder:"SHARE" help:"Standard uncertainty of a frequency, as a share of it."`
}

// Run plans.
func (c *planCmd) Run(s *session) error {
	if c.Modes < 2 || c.Modes > 60 {
		return s.badFlag("plan", "--modes", fmt.Errorf("must lie between 2 and 60, and is %d", c.Modes))
	}
	text := strings.TrimSpace(c.Accuracy)
	factor := 1.0
	if strings.HasSuffix(text, "%") {
		text, factor = strings.TrimSpace(strings.TrimSuffix(text, "%")), 0.01
	}
	v, err := strconv.ParseFloat(text, 64)
	if share := v * factor; err != nil || !(share >= 1e-6 && share <= 0.1) {
		return s.badFlag("plan", "--accuracy", fmt.Errorf("wants a share between 0.0001 %% and 10 %%, such as '0.2 %%', and is %q", c.Accuracy))
	}
	doc, status, err := s.app.Plan(s.ctx, s.input(c.File), app.PlanWant{Modes: c.Modes, Share: v * factor})
	if err != nil {
		return err
	}
	return s.deliver(&doc.Head, doc, int(status), func(p *printer) { p.sayPlan(doc, !s.Quiet) })
}

// sayPlan prints a survey before the climb; its cautions come first.
func (p *printer) sayPlan(d *app.PlanDoc, cautions bool) {
	p.heading(&d.Head)
	if cautions {
		p.sayCautions(d.Cautions)
	}
	for i := range d.Lines {
		l := &d.Lines[i]
		p.line("\nline %s", l.Line)
		var words []string
		for k := range l.Frequencies {
			words = append(words, p.doubtful(&l.Frequencies[k]))
		}
		p.prose("  vibrations: ", strings.Join(words, ", "))
		for _, s := range l.Sensors {
			p.line("  sensor %s: %s %s (%s from the start); mode %d shows least, %s of its largest", s.Reach, s.Segment, p.show(s.Offset, "m", 3), p.show(s.X, "m", 3), s.Mode, percent(round2(s.Least)))
		}
		p.line("  record %s or longer, %s samples a second or more", p.show(round2(l.Record), "s", 2), trimNumber(round2(l.Sampling), 2))
		p.line("  a pulse returns in %s", p.show(l.Return, "s", 4))
	}
	p.sayExpected(d)
	for _, n := range d.Notes {
		p.prose("note: ", n)
	}
}

// sayExpected prints what so many peaks would tell.
func (p *printer) sayExpected(d *app.PlanDoc) {
	if len(d.Expected) == 0 {
		return
	}
	p.line("\nhalf width of 95 %% to be expected, frequencies read to %s", percent(d.Accuracy))
	if len(d.Unknowns) <= fewUnknowns {
		t := newTable(append([]string{"peaks of each line"}, d.Unknowns...)...)
		t.flush(0)
		for _, e := range d.Expected {
			row := []string{fmt.Sprint(e.Peaks)}
			for k := range e.HalfWidth {
				row = append(row, halfWidth(&e, k))
			}
			t.add(row...)
		}
		for i := range d.Unknowns {
			t.flush(i + 1)
		}
		p.table(t)
	} else {
		head := []string{"peaks of each line"}
		for _, e := range d.Expected {
			head = append(head, fmt.Sprint(e.Peaks))
		}
		t := newTable(head...)
		for k, name := range d.Unknowns {
			row := []string{name}
			for i := range d.Expected {
				row = append(row, halfWidth(&d.Expected[i], k))
			}
			t.add(row...)
		}
		for i := range d.Expected {
			t.flush(i + 1)
		}
		p.table(t)
	}
	if open := d.Expected[len(d.Expected)-1].Open; len(open) > 0 {
		for _, o := range open {
			p.prose("  ", o)
		}
	}
}

// fewUnknowns is how many lets stand beside one another in a table; more stand
// below one another.
const fewUnknowns = 6

// halfWidth is one expected half width, as a share where it is one.
func halfWidth(e *app.PlanExpected, k int) string {
	switch h := e.HalfWidth[k]; {
	case !e.Relative[k]:
		return trimNumber(h, 2)
	case h > 1:
		return "open"
	default:
		return percent(round2(h))
	}
}
