package cli

import (
	"fmt"
	"strings"
	"unicode/utf8"

	"github.com/tautspan/tautspan/cmd/tautspan/internal/app"
)

// stockCmd lists the built-in stock.
type stockCmd struct {
	Words []string `arg:"" optional:"" name:"word" help:"Only what has these words in its name, title or family; one that is left is shown with its sources."`
}

// Run lists it, or shows the one that is meant.
func (c *stockCmd) Run(s *session) error {
	doc, status := s.app.Stock(strings.Join(c.Words, " "))
	return s.deliver(&doc.Head, doc, int(status), func(p *printer) {
		if len(doc.Stock) == 1 {
			p.sayStock(&doc.Stock[0])
			return
		}
		p.sayStocks(doc.Stock)
	})
}

// sayStocks prints a list, by family. A value that was not read in its source
// is marked.
func (p *printer) sayStocks(list []app.StockRow) {
	for i := 0; i < len(list); {
		j := i
		for j < len(list) && list[j].Family == list[i].Family {
			j++
		}
		if i > 0 {
			p.line("")
		}
		p.line("%s", list[i].Family)
		p.stockTable(list[i:j])
		i = j
	}
	p.line("")
	p.prose("", "~ remembered or worked out, not read in a source. 'tautspan stock NAME' shows where each value comes from. A certificate of the line at hand goes before all of them. In a scenario: segment a NAME 300 m.")
}

func (p *printer) stockTable(list []app.StockRow) {
	t := newTable("name", "diameter", "metal area", "mass", "young", "strength").flush(1, 2, 3, 4, 5)
	for i := range list {
		e := &list[i]
		t.add(e.Name, p.stockCell(&e.Diameter, "m"), p.stockCell(&e.Area, "m^2"), p.stockCell(&e.Mass, "kg/m"), p.stockCell(&e.Young, "Pa"), p.stockCell(&e.Strength, "N"))
	}
	p.table(t)
}

// stockCell is a value with its mark, or a blank in its place so that figures
// stand under figures.
func (p *printer) stockCell(v *app.StockValue, unit string) string {
	mark := " "
	if v.Origin != "seen" {
		mark = "~"
	}
	return p.show(v.Value, unit, 4) + mark
}

// sayStock prints one stock with its sources.
func (p *printer) sayStock(e *app.StockRow) {
	p.line("%s: %s, %s", e.Name, e.Title, e.Family)
	if e.Wires != nil && *e.Wires > 1 {
		p.line("  %d wires", *e.Wires)
	}
	t := newTable().flush(1)
	var sources []string
	for _, row := range []struct {
		word, unit string
		v          *app.StockValue
	}{{"diameter", "m", &e.Diameter}, {"metal area", "m^2", &e.Area}, {"mass", "kg/m", &e.Mass}, {"young", "Pa", &e.Young}, {"strength", "N", &e.Strength}} {
		t.add(row.word, p.show(row.v.Value, row.unit, 5), originWord(row.v.Origin)+":")
		sources = append(sources, row.v.Source)
	}
	lines, width := t.lines(), 0
	for _, l := range lines {
		width = max(width, utf8.RuneCountInString(l))
	}
	for i, l := range lines {
		p.prose(l+strings.Repeat(" ", width+1-utf8.RuneCountInString(l)), sources[i])
	}
	p.line("")
	p.line("  young is found from %s to %s; axial, young times area, is %s", p.show(e.YoungLow, "Pa", 3), p.show(e.YoungHigh, "Pa", 3), p.show(e.Axial, "N", 4))
	p.line("  taken as an ideal string; %s", p.stockBending(e))
	if e.Usual != nil {
		p.prose("  ", fmt.Sprintf("usual tension: %s (%s, %s)", e.Usual.Text, originWord(e.Usual.Origin), e.Usual.Source))
	}
	if e.Note != "" {
		p.prose("  ", e.Note)
	}
}

// stockBending says what the bending stiffness may be.
func (p *printer) stockBending(e *app.StockRow) string {
	high := p.show(e.BendingHigh, "N*m^2", 3)
	switch {
	case e.BendingLow == nil:
		return "its bending stiffness is at most " + high + ", that of a solid bar"
	case *e.BendingLow == e.BendingHigh:
		return "its bending stiffness is " + high + ", that of a solid bar"
	}
	return "its bending stiffness is between " + p.show(*e.BendingLow, "N*m^2", 3) + " (wires that slide) and " + high + " (a solid bar)"
}

// originWord says how a value was come by.
func originWord(origin string) string {
	switch origin {
	case "seen":
		return "read"
	case "computed":
		return "worked out"
	}
	return "remembered"
}
