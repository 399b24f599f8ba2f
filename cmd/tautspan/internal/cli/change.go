package cli

import (
	"fmt"
	"strconv"
	"strings"

	"github.com/tautspan/tautspan/cmd/tautspan/internal/app"
)

// changeCmd holds two surveys against one another.
type changeCmd struct {
	First      string `arg:"" help:"Result folder or document of the earlier fit."`
	Second     string `arg:"" help:"The same of the later one."`
	FalseAlarm string `default:"5 %" placeholder:"SHARE" help:"How often lines that did not change may give any alarm, all together."`
}

// Run compares.
func (c *changeCmd) Run(s *session) error {
	text := strings.TrimSpace(c.FalseAlarm)
	factor := 1.0
	if strings.HasSuffix(text, "%") {
		text, factor = strings.TrimSpace(strings.TrimSuffix(text, "%")), 0.01
	}
	v, err := strconv.ParseFloat(text, 64)
	if rate := v * factor; err != nil || !(rate >= 1e-6 && rate <= 0.5) {
		return s.badFlag("change", "--false-alarm", fmt.Errorf("wants a share between 0.0001 %% and 50 %%, such as '5 %%', and is %q", c.FalseAlarm))
	}
	doc, status, err := s.app.Change(c.First, c.Second, v*factor)
	if err != nil {
		return s.failed("change", status, err)
	}
	return s.deliver(&doc.Head, doc, int(status), func(p *printer) { p.sayChange(doc, !s.Quiet) })
}

// sayChange prints what lies between two surveys.
func (p *printer) sayChange(d *app.ChangeDoc, cautions bool) {
	p.heading(&d.Head)
	p.line("\n%s, then %s", d.First, d.Second)
	t := newTable("line", "first", "second", "change", "from", "to", "alarm beyond", "").flush(1, 2, 3, 4, 5, 6)
	common := map[string]bool{}
	var names []string
	for i := range d.Lines {
		r := &d.Lines[i]
		t.add(r.Name, p.show(r.First, r.Unit, 4), p.show(r.Second, r.Unit, 4), signed(percent(round3(r.Relative))), signed(percent(round3(r.RelativeLow))), signed(percent(round3(r.RelativeHigh))), percent(round3(r.Resolves)), r.Verdict)
		for _, c := range r.Common {
			if !common[c] {
				common[c] = true
				names = append(names, c)
			}
		}
	}
	p.table(t)
	for i := range d.Lines {
		if r := &d.Lines[i]; r.Moved != nil {
			p.line("  %s: %s of temperature taken out", r.Name, p.show(*r.Moved, r.Unit, 3))
		}
	}
	if len(names) > 0 {
		p.prose("  ", "known alike in both, so that their errors are the same in both: "+strings.Join(names, ", "))
	}
	p.prose("  ", fmt.Sprintf("lines that did not change give an alarm in %s of such comparisons at most, all lines together", percent(d.FalseAlarm)))
	if len(d.Unknowns) > 0 {
		p.line("\nlets")
		u := newTable("", "first", "second", "change", "from", "to").flush(1, 2, 3, 4, 5)
		for i := range d.Unknowns {
			r := &d.Unknowns[i]
			as := app.FitUnknown{Unit: r.Unit, Shown: r.Shown}
			u.add(r.Name, p.as(r.First, &as, 4), p.as(r.Second, &as, 4), signed(percent(round3(r.Relative))), signed(percent(round3(r.RelativeLow))), signed(percent(round3(r.RelativeHigh))))
		}
		p.table(u)
	}
	for _, n := range d.Notes {
		p.prose("note: ", n)
	}
	if cautions {
		p.sayCautions(d.Cautions)
	}
	p.line("\nIn all: %s.", d.Verdict)
}
