package syntax

import "strings"

// Words of properties allowed at each element; the rest of the judgement is
// the resolver's.
const (
	supportWords = "fixed free absorbing pinned clamped turning guided weighted spring dashpot mass rotary axial"
	jointWords   = "fixed mass spring dashpot rotary inertia hinge tuned stop friction impedance law holds"
	tieWords     = "spring dashpot mass slack"
)

func (p *parser) stockProperty(k chunk) (StockProperty, bool) {
	switch p.tokens[k.lo].Text {
	case "wires":
		r, ok := parseRule[wiresRule](p, k, InStock)
		if !ok {
			return StockProperty{}, false
		}
		return StockProperty{At: p.at(r.mark), Word: p.word(r.Tokens[0]), Value: p.expr(r.Count), Of: p.expr(r.Diameter)}, true
	case "loss":
		r, ok := parseRule[lossRule](p, k, InStock)
		if !ok {
			return StockProperty{}, false
		}
		return StockProperty{At: p.at(r.mark), Word: p.word(r.Tokens[0]), Loss: p.loss(r)}, true
	}
	r, ok := parseRule[stockValueRule](p, k, InStock)
	if !ok {
		return StockProperty{}, false
	}
	return StockProperty{At: p.at(r.mark), Word: p.word(r.Word), Value: p.expr(r.Value)}, true
}

func (p *parser) loss(r *lossRule) *Loss {
	l := &Loss{At: p.at(r.mark), Kind: p.word(r.Tokens[1]), OfBending: r.Bending}
	switch {
	case r.Law != nil:
		l.Law = p.call(r.Law)
	case r.Ratio != nil:
		l.Value, l.AtF = p.expr(r.Ratio), p.expr(r.AtF)
	case r.Eta != nil:
		l.Value = p.expr(r.Eta)
	default:
		l.Value = p.expr(r.Value)
	}
	return l
}

func (p *parser) lineItem(k chunk) LineItem {
	switch p.tokens[k.lo].Text {
	case "about":
		if a, ok := p.about(k, InLine); ok {
			return a
		}
	case "support":
		if r, ok := parseRule[supportRule](p, k, InLine); ok {
			return &Support{At: p.at(r.mark), Name: p.label(r.Name), Properties: p.properties(r.Properties, "support", supportWords)}
		}
	case "segment":
		if r, ok := parseRule[segmentRule](p, k, InLine); ok {
			return p.segment(r)
		}
	case "joint":
		if r, ok := parseRule[jointRule](p, k, InLine); ok {
			return &Joint{At: p.at(r.mark), Name: p.label(r.Name), Properties: p.properties(r.Properties, "joint", jointWords)}
		}
	default:
		if r, ok := parseRule[linePropertyRule](p, k, InLine); ok {
			return p.lineProperty(r)
		}
	}
	return nil
}

func (p *parser) lineProperty(r *linePropertyRule) *LineProperty {
	l := &LineProperty{At: p.at(r.mark), Word: p.word(r.Tokens[0])}
	switch {
	case r.Tension != nil:
		l.Value, l.Spot = p.expr(r.Tension), p.spot(r.Spot)
	case r.Word != nil:
		l.Value = p.expr(r.Value)
	case r.Effect != nil:
		l.Choice = p.optWord(r.With)
	default:
		l.Choice = p.optWord(r.Plane)
	}
	return l
}

func (p *parser) segment(r *segmentRule) *Segment {
	s := &Segment{At: p.at(r.mark), Name: p.label(r.Name), Stock: p.name(r.Stock), Length: p.expr(r.Length)}
	for _, part := range r.Parts {
		if !part.Comma {
			p.wantsComma(part.mark)
		}
		switch {
		case part.Tension != nil:
			if s.Tension != nil {
				p.reportAt(p.at(part.mark), "said-twice", "the tension of this segment is said twice", "", "")
				continue
			}
			s.Tension = p.expr(part.Tension)
		case part.Loss != nil:
			s.Losses = append(s.Losses, p.loss(part.Loss))
		case part.Every != nil:
			e := &Every{At: p.at(part.Every.mark), Spacing: p.expr(part.Every.Spacing), First: p.expr(part.Every.First)}
			e.Properties = append(e.Properties, p.property(part.Every.Property, "every", jointWords))
			s.Every = append(s.Every, e)
		case len(s.Every) == 0:
			p.property(part.Property, "segment", "tension loss every")
		default:
			e := s.Every[len(s.Every)-1]
			e.Properties = append(e.Properties, p.property(part.Property, "every", jointWords))
			e.Span = e.Span.To(p.at(part.mark).Span)
		}
	}
	return s
}

// properties converts a comma list. The comma before the first property and
// the one behind a bare word (`fixed mass 3 kg`) may be left out.
func (p *parser) properties(rs []*propertyTail, where, allowed string) []Property {
	var out []Property
	for i, r := range rs {
		if i > 0 && !r.Comma && rs[i-1].Property.Bare == nil {
			p.wantsComma(r.mark)
		}
		out = append(out, p.property(r.Property, where, allowed))
	}
	return out
}

func (p *parser) wantsComma(m mark) {
	t := m.Tokens[0]
	p.reportAt(p.tokenAt(t), "missing-comma", "a comma goes between properties", "none before this", ", "+t.Value)
}

func (p *parser) property(r *propertyRule, where, allowed string) Property {
	first := r.Tokens[0]
	x := Property{At: p.at(r.mark), Word: p.word(first)}
	if words := strings.Fields(allowed); !contains(words, first.Value) {
		p.reportAt(p.tokenAt(first), "misplaced-word", "`"+first.Value+"` is no property of a "+where,
			"it may be "+orList(words), "")
	}
	switch {
	case r.Word != nil:
		x.Value = p.expr(r.Value)
	case r.Spring != nil:
		x.Value, x.Loss = p.expr(r.Spring.Value), p.expr(r.Spring.Loss)
	case r.Through != nil:
		x.Value, x.Through = p.expr(r.Through.Value), p.expr(r.Through.Through)
	case r.Tuned != nil:
		x.Value, x.Stiffness = p.beside(r.Tuned.Mass), p.beside(r.Tuned.Spring)
		x.Dashpot, x.Loss = p.beside(r.Tuned.Dashpot), p.expr(r.Tuned.Loss)
	case r.Stop != nil:
		x.Value, x.Stiffness, x.Side = p.beside(r.Stop.Gap), p.beside(r.Stop.Spring), p.word(r.Stop.Side)
	case r.Call != nil:
		x.Call = p.call(r.Call)
	}
	return x
}

func (p *parser) lawItem(l *Law, k chunk) {
	switch p.tokens[k.lo].Text {
	case "takes":
		if r, ok := parseRule[takesRule](p, k, InLaw); ok {
			for _, t := range r.Takes {
				l.Takes = append(l.Takes, Take{At: p.at(t.mark), Name: p.label(t.Name), Unit: p.unit(t.Unit)})
			}
		}
	case "state":
		if r, ok := parseRule[stateRule](p, k, InLaw); ok {
			l.States = append(l.States, State{At: p.at(r.mark), Name: p.label(r.Name), Initial: p.expr(r.Initial), Rate: p.expr(r.Rate)})
		}
	default:
		if r, ok := parseRule[forceRule](p, k, InLaw); ok {
			l.Forces = append(l.Forces, LawForce{At: p.at(r.mark), Value: p.expr(r.Value)})
		}
	}
}
