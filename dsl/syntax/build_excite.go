package syntax

import (
	"strings"

	"github.com/tautspan/tautspan/dsl/diag"
)

// quantityWords are what a watch can look at.
const quantityWords = "displacement velocity acceleration slope force moment tension"

func (p *parser) excite(r *exciteRule) *Excite {
	e := &Excite{At: p.at(r.mark), Name: p.label(r.Name)}
	switch {
	case r.Pluck != nil:
		x := r.Pluck
		e.Action = &Pluck{At: p.at(x.mark), Spot: p.spot(x.Spot), By: p.expr(x.By), With: p.expr(x.With), Until: p.expr(x.Until)}
	case r.Start != nil:
		x := r.Start
		e.Action = &Start{At: p.at(x.mark), Quantity: p.word(x.Quantity), Along: p.spot(x.Along), Shape: p.expr(x.Shape)}
	case r.Push != nil:
		x := r.Push
		e.Action = &Push{At: p.at(x.mark), Spot: p.spot(x.Spot), With: p.expr(x.With)}
	case r.Press != nil:
		x := r.Press
		e.Action = &Press{At: p.at(x.mark), Along: p.spot(x.Along), With: p.expr(x.With)}
	case r.Move != nil:
		x := r.Move
		e.Action = &Move{At: p.at(x.mark), Support: p.spot(x.Support), With: p.expr(x.With)}
	case r.Roll != nil:
		e.Action = p.roll(r.Roll)
	default:
		x := r.Load
		plugin := Call{At: p.tokenAt(x.Plugin), Name: p.quoted(x.Plugin), Args: p.args(x.Args)}
		e.Action = &Load{At: p.at(x.mark), Plugin: plugin, Along: x.Along, Spot: p.spot(x.Spot)}
	}
	return e
}

func (p *parser) roll(r *rollRule) *Roll {
	out := &Roll{At: p.at(r.mark), Along: p.spot(r.Along), Speed: p.expr(r.Speed), Load: p.expr(r.Load)}
	for _, part := range r.Parts {
		word, target := "from", (*Expr)(nil)
		switch {
		case part.From != nil:
			if out.From == nil {
				out.From = p.spot(part.From)
				continue
			}
		case part.Starting != nil:
			word, target = "starting", &out.Starting
		default:
			word = part.Word.Value
			target = map[string]*Expr{"mass": &out.Mass, "spring": &out.Spring, "dashpot": &out.Dashpot}[word]
		}
		if target == nil || *target != nil {
			p.reportAt(p.at(part.mark), "said-twice", "`"+word+"` is said twice", "", "")
			continue
		}
		*target = p.expr(part.Value)
		if part.Starting != nil {
			*target = p.expr(part.Starting)
		}
	}
	return out
}

func (p *parser) watch(r *watchRule) *Watch {
	w := &Watch{At: p.at(r.mark), Name: p.label(r.Name), Along: r.Along, Spot: p.spot(r.Spot)}
	for i, part := range r.Parts {
		if part.Mass != nil {
			if w.Mass != nil {
				p.reportAt(p.at(part.mark), "said-twice", "`mass` is said twice", "", "")
			}
			w.Mass = p.expr(part.Mass)
			continue
		}
		q := p.word(*part.Quantity)
		switch {
		case !contains(strings.Fields(quantityWords), q.Text):
			p.unknownQuantity(w, q, i)
		case i > 0 && !part.Comma:
			p.wantsComma(part.mark)
		}
		w.Quantities = append(w.Quantities, q)
	}
	if len(w.Quantities) == 0 {
		p.reportAt(w.At, "missing-quantity", "a watch names what it looks at", "", orList(strings.Fields(quantityWords)))
	}
	return w
}

// unknownQuantity speaks of a word that is no quantity; right behind a place
// it may be a length that lacks its brackets.
func (p *parser) unknownQuantity(w *Watch, q Word, i int) {
	known := strings.Fields(quantityWords)
	d := diag.Diagnostic{Code: "unknown-word", Span: q.Span, Summary: "`" + q.Text + "` is nothing that a watch can look at",
		Found: "it may be " + orList(known), Hint: diag.Nearest(q.Text, known)}
	if d.Hint == "" && i == 0 && w.Spot.Offset == nil {
		d.Hint = w.Spot.Span.Text() + " (" + q.Text + ")"
	}
	p.diags.Add(d)
}

func (p *parser) column(r *columnRule) Expr {
	if r.Text != nil {
		s := p.text(*r.Text)
		return &s
	}
	return p.number(r.Number.Number, r.Number.Unit)
}

func (p *parser) recordItem(out *Record, k chunk) {
	switch p.tokens[k.lo].Text {
	case "about":
		if a, ok := p.about(k, InRecord); ok {
			out.Abouts = append(out.Abouts, a)
		}
	case "time":
		if r, ok := parseRule[recordTimeRule](p, k, InRecord); ok {
			out.Times = append(out.Times, RecordTime{At: p.at(r.mark), Column: p.column(r.Column), Unit: p.unit(&r.Unit)})
		}
	default:
		if r, ok := parseRule[recordChannelRule](p, k, InRecord); ok {
			out.Channels = append(out.Channels, RecordChannel{At: p.at(r.mark), Column: p.column(r.Column),
				Unit: p.unit(r.Unit), Uncalibrated: r.Uncalibrated, For: p.name(r.For)})
		}
	}
}

func (p *parser) readingItem(out *Reading, k chunk) {
	if p.tokens[k.lo].Text == "about" {
		if a, ok := p.about(k, InReading); ok {
			out.Abouts = append(out.Abouts, a)
		}
		return
	}
	r, ok := parseRule[readingItemRule](p, k, InReading)
	if !ok {
		return
	}
	item := ReadingItem{At: p.at(r.mark), Word: p.word(r.Tokens[0])}
	switch {
	case r.Mode != nil:
		item.Order, item.Values = p.expr(r.Number), []Expr{p.expr(r.Value)}
	case r.Trips != nil:
		item.Order, item.Values = p.expr(r.Count), []Expr{p.expr(r.Took)}
	default:
		item.Values = p.exprs(r.Peaks)
	}
	var last *Doubt
	for _, t := range r.Parts {
		switch {
		case t.Doubt != nil:
			last = p.doubt(t.Doubt)
			target := &item.Doubt
			if t.Shared {
				target = &item.Shared
			}
			if *target != nil {
				p.reportAt(p.at(t.mark), "said-twice", "this doubt is said twice", "", "")
			}
			*target = last
		case t.Plane != nil:
			if item.Plane.Text != "" {
				p.reportAt(p.at(t.mark), "said-twice", "the plane is said twice", "", "")
			}
			item.Plane = p.word(*t.Plane)
		default:
			item.Where = p.where(item.Where, last, t.Where)
		}
	}
	out.Items = append(out.Items, item)
}

func (p *parser) doubt(r *doubtRule) *Doubt {
	if r == nil {
		return nil
	}
	if r.Between != nil {
		return p.between(r.Between)
	}
	return &Doubt{At: p.at(r.mark), Spread: p.expr(r.Spread), OfIt: r.OfIt}
}

func (p *parser) between(r *betweenRule) *Doubt {
	return &Doubt{At: p.at(r.mark), Between: true, Low: p.expr(r.Low), High: p.expr(r.High)}
}

// where takes in one `at ...`: behind a doubt, a number with the unit `%` is
// its level; everything else goes to the list.
func (p *parser) where(list []AtPart, doubt *Doubt, r *atPartRule) []AtPart {
	part := AtPart{At: p.at(r.mark), Spot: p.spot(r.Spot), Value: p.beside(r.Value)}
	if n, ok := part.Value.(*Number); ok && doubt != nil && n.Unit != nil && n.Unit.Text == "%" {
		if doubt.Level != nil {
			p.reportAt(part.At, "said-twice", "the level of this doubt is said twice", "", "")
		}
		doubt.Level = n
		doubt.Span = doubt.Span.To(part.Span)
		return list
	}
	return append(list, part)
}
