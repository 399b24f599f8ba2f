package cli

import (
	"fmt"
	"math"
	"strings"

	"github.com/tautspan/tautspan/cmd/tautspan/internal/app"
	"github.com/tautspan/tautspan/dsl/unit"
	"github.com/tautspan/tautspan/engine/doubt"
)

// sayModes prints the natural vibrations.
func (p *printer) sayModes(d *app.ModesDoc) {
	p.heading(&d.Head)
	var group string
	var t *table
	flush := func() {
		if t != nil {
			p.table(t)
		}
	}
	for i := range d.Modes {
		m := &d.Modes[i]
		name := "tied lines"
		if m.Line != nil {
			name = "line " + *m.Line
		}
		if t == nil || name != group || m.Number == 1 {
			flush()
			group = name
			p.line("\n%s", name)
			t = newTable("mode", "frequency", "damping ratio", "log decrement", "falls to 1/e in").flush(0, 1, 2, 3, 4)
		}
		t.add(fmt.Sprint(m.Number), p.doubtful(&m.FrequencyDoubt), p.ratio(m), decrement(m.DampingRatio), p.fall(m.Decay))
	}
	flush()
	for _, o := range d.Overdamped {
		p.line("  creeps back without swinging, to 1/e in %s", p.show(1/o.Decay, "s", 4))
	}
	if d.CompleteBelow != nil && *d.CompleteBelow > 0 {
		p.line("\nEvery vibration below %s is listed: counted, not searched for.", p.show(*d.CompleteBelow, "Hz", 5))
	}
	for _, n := range d.Notes {
		p.prose("note: ", n)
	}
	p.sayShapes(d.Modes)
	p.sayCollected(d.Collected)
}

// doubtful is a number with its 95 % half-width where an input is in doubt, and
// with its numerical bound where that is all there is.
func (p *printer) doubtful(n *doubt.Number) string {
	half := n.Numerical + doubt.TwoSided*n.InputU
	if math.IsNaN(half) {
		return p.show(n.Value, n.Unit, 6)
	}
	return p.withBar(n.Value, half, n.Unit)
}

// inUnit is a number with its half-width in the unit that the user wrote, or as
// doubtful has it where that is none of its kind.
func (p *printer) inUnit(n *doubt.Number, shown string) string {
	u, err := unit.Parse(shown)
	half := n.Numerical + doubt.TwoSided*n.InputU
	if shown == "" || err != nil || u.Dim != dimOf(n.Unit) || n.Unit == "rad" || math.IsNaN(half) {
		return p.doubtful(n)
	}
	return barText(n.Value/u.Factor(), half/u.Factor()) + " " + shown
}

func (p *printer) ratio(m *app.ModeRow) string {
	if m.DampingRatio == 0 {
		return "0"
	}
	half := doubt.TwoSided * m.DampingDoubt.InputU * 100
	if half == 0 || math.IsNaN(half) {
		return trimNumber(m.DampingRatio*100, 4) + " %"
	}
	return p.withBar(m.DampingRatio*100, half, "1") + " %"
}

// decrement is the logarithmic decrement 2 pi zeta/sqrt(1-zeta^2).
func decrement(zeta float64) string {
	if zeta <= 0 || zeta >= 1 {
		return "0"
	}
	return trimNumber(2*math.Pi*zeta/math.Sqrt(1-zeta*zeta), 4)
}

func (p *printer) fall(decay float64) string {
	if decay <= 0 {
		return "never"
	}
	return p.show(1/decay, "s", 4)
}

// sayShapes draws each shape that was asked for in three lines.
func (p *printer) sayShapes(modes []app.ModeRow) {
	for i := range modes {
		m := &modes[i]
		for _, s := range m.Shape {
			values := make([]float64, len(s.X))
			for k := range values {
				values[k] = s.Amplitude[k] * math.Cos(s.Phase[k])
			}
			lines, _, _ := picture(values, min(64, p.width-16), 3)
			p.line("\n  mode %d along %s", m.Number, s.Line)
			for _, l := range lines {
				p.line("    %s", strings.TrimRight(l, "\u2800"))
			}
		}
	}
}

func (p *printer) sayCollected(list []app.Collected) {
	if len(list) == 0 {
		return
	}
	p.line("\ncollected")
	t := newTable()
	for i := range list {
		c := &list[i]
		t.add(c.Text, p.doubtful(&c.Value), p.because(&c.Value), c.Note)
	}
	p.table(t)
}

// because says where a number's doubt comes from.
func (p *printer) because(n *doubt.Number) string {
	if n.LeadingInput != "" {
		return "mostly by " + n.LeadingInput
	}
	return ""
}

// sayArrivals prints the pulse ledger.
func (p *printer) sayArrivals(d *app.ArrivalsDoc) {
	p.heading(&d.Head)
	for i := 0; i < len(d.Arrivals); {
		j := i
		for j < len(d.Arrivals) && d.Arrivals[j].Watch == d.Arrivals[i].Watch {
			j++
		}
		p.sayFronts(d.Arrivals[i:j])
		i = j
	}
	if len(d.Arrivals) == 0 {
		p.line("\nNo front reaches a watch.")
	}
	p.line("\nFronts below %s of the strongest are left out; followed to %s.", percent(d.PrunedBelow), p.show(d.Reached, "s", 4))
	for _, n := range d.Notes {
		p.prose("note: ", n)
	}
}

// sayFronts prints the fronts at one watch.
func (p *printer) sayFronts(rows []app.ArrivalRow) {
	p.line("\nfronts at %s", rows[0].Watch)
	times := make([]float64, len(rows))
	several, smeared := false, false
	for i := range rows {
		times[i] = rows[i].Time
		several = several || rows[i].Merged > 1
		smeared = smeared || rows[i].Smeared
	}
	cells, word := p.column(times, "s", 6)
	t := newTable("no", head("time", word), "jump", "of", "path").flush(0, 1, 2)
	for i := range rows {
		a := &rows[i]
		mark := ""
		if a.Smeared {
			mark += " ~"
		}
		path := shorten(strings.Join(a.Path, " → "), p.width-52)
		if a.Merged > 1 {
			path += fmt.Sprintf(" (%d paths)", a.Merged)
		}
		t.add(fmt.Sprint(a.Number), cells[i], signed(p.show(a.Amplitude, a.Unit, 4)), a.Quantity+mark, path)
	}
	p.table(t)
	if smeared {
		p.prose("  ", "~ smeared on its way by a mass or a spring: it begins at this time and rises; the jump is what a record with the run's interval shows")
	}
}

func signed(s string) string {
	if strings.HasPrefix(s, "-") {
		return s
	}
	return "+" + s
}

// shorten cuts the middle out of a long path.
func shorten(s string, most int) string {
	r := []rune(s)
	most = max(most, 24)
	if len(r) <= most {
		return s
	}
	half := (most - 3) / 2
	return string(r[:half]) + " … " + string(r[len(r)-half:])
}
