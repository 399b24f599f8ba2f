package syntax

import "strings"

// statement makes the tree of one statement at the top of a file or in an
// each block; nil where it could not be read.
func (p *parser) statement(k chunk, c Context) Statement {
	switch p.tokens[k.lo].Text {
	case "about":
		if a, ok := p.about(k, c); ok {
			return a
		}
		return nil
	case "stock", "line", "law", "each", "run", "record", "reading", "fit":
		return p.blockStatement(k, c)
	}
	return p.plainStatement(k, c)
}

func (p *parser) plainStatement(k chunk, c Context) Statement {
	switch p.tokens[k.lo].Text {
	case "tautspan":
		if r, ok := parseRule[versionRule](p, k, c); ok {
			return &Version{At: p.at(r.mark), Number: *p.number(r.Number, nil)}
		}
	case "title":
		if r, ok := parseRule[textRule](p, k, c); ok {
			return &Title{At: p.at(r.mark), Text: p.text(r.Text)}
		}
	case "note":
		if r, ok := parseRule[textRule](p, k, c); ok {
			return &Note{At: p.at(r.mark), Text: p.text(r.Text)}
		}
	case "let":
		if r, ok := parseRule[letRule](p, k, c); ok {
			return p.let(r)
		}
	case "use":
		if r, ok := parseRule[useRule](p, k, c); ok {
			return &Use{At: p.at(r.mark), Path: p.text(r.Path)}
		}
	case "tie":
		if r, ok := parseRule[tieRule](p, k, c); ok {
			return &Tie{At: p.at(r.mark), Name: p.label(r.Name), From: p.spot(r.From), To: p.spot(r.To),
				Properties: p.properties(r.Properties, "tie", tieWords)}
		}
	case "excite":
		if r, ok := parseRule[exciteRule](p, k, c); ok {
			return p.excite(r)
		}
	case "watch":
		if r, ok := parseRule[watchRule](p, k, c); ok {
			return p.watch(r)
		}
	case "require":
		if r, ok := parseRule[requireRule](p, k, c); ok {
			return p.require(r)
		}
	default:
		return p.question(k, c)
	}
	return nil
}

// question makes the statements that ask for unknowns and for many cases.
func (p *parser) question(k chunk, c Context) Statement {
	switch p.tokens[k.lo].Text {
	case "seek":
		if r, ok := parseRule[seekRule](p, k, c); ok {
			return &Seek{At: p.at(r.mark), Name: p.name(r.Name), From: p.expr(r.Span.From), To: p.expr(r.Span.To)}
		}
	case "vary":
		if r, ok := parseRule[varyRule](p, k, c); ok {
			v := &Vary{At: p.at(r.mark), Name: p.name(r.Name), Steps: p.expr(r.Steps), Geometric: r.Geometric,
				Through: p.exprs(r.Through), Draw: p.call(r.Draw)}
			if r.Span != nil {
				v.From, v.To = p.expr(r.Span.From), p.expr(r.Span.To)
			}
			return v
		}
	case "sample":
		if r, ok := parseRule[sampleRule](p, k, c); ok {
			return &Sample{At: p.at(r.mark), Count: p.expr(r.Count), Seed: p.expr(r.Seed)}
		}
	case "collect":
		if r, ok := parseRule[collectRule](p, k, c); ok {
			return &Collect{At: p.at(r.mark), Values: p.exprs(r.Values)}
		}
	case "best":
		if r, ok := parseRule[bestRule](p, k, c); ok {
			return &Best{At: p.at(r.mark), Value: p.expr(r.Value), Goal: p.word(r.Goal), Over: p.name(r.Over),
				From: p.expr(r.Span.From), To: p.expr(r.Span.To)}
		}
	case "meet":
		if r, ok := parseRule[meetRule](p, k, c); ok {
			return &Meet{At: p.at(r.mark), Value: p.expr(r.Value), With: p.exprs(r.With), Over: p.name(r.Over),
				From: p.expr(r.Span.From), To: p.expr(r.Span.To)}
		}
	}
	return nil
}

// blockStatement makes the statements that have a block. A head that could not
// be read loses its block's tree, but the block is still read for its errors.
func (p *parser) blockStatement(k chunk, c Context) Statement {
	before := p.broken
	var out Statement
	switch p.tokens[k.lo].Text {
	case "stock":
		s := &Stock{}
		if r, ok := parseRule[stockRule](p, k, c); ok {
			s.Name, out = p.label(r.Name), s
		}
		p.each(k, func(item chunk) {
			if x, ok := p.stockProperty(item); ok {
				s.Properties = append(s.Properties, x)
			}
		})
		s.At, s.Incomplete = p.whole(k), p.broken > before
	case "line":
		l := &Line{}
		if r, ok := parseRule[lineRule](p, k, c); ok {
			l.Name, out = p.label(r.Name), l
		}
		p.each(k, func(item chunk) {
			if x := p.lineItem(item); x != nil {
				l.Items = append(l.Items, x)
			}
		})
		l.At, l.Incomplete = p.whole(k), p.broken > before
	case "law":
		l := &Law{}
		if r, ok := parseRule[lawRule](p, k, c); ok {
			l.Name, out = p.label(r.Name), l
		}
		p.each(k, func(item chunk) { p.lawItem(l, item) })
		l.At, l.Incomplete = p.whole(k), p.broken > before
	case "each":
		e := &Each{}
		if r, ok := parseRule[eachRule](p, k, c); ok {
			e.Row, e.Table, out = p.label(r.Row), p.text(r.Table), e
		}
		p.each(k, func(item chunk) { e.Statements = append(e.Statements, p.orBroken(item, InEach)) })
		e.At, e.Incomplete = p.whole(k), p.broken > before
	default:
		out = p.dataBlock(k, c)
	}
	return out
}

// dataBlock makes run, record, reading and fit.
func (p *parser) dataBlock(k chunk, c Context) Statement {
	before := p.broken
	var out Statement
	switch p.tokens[k.lo].Text {
	case "run":
		x := &Run{}
		if _, ok := parseRule[runRule](p, k, c); ok {
			out = x
		}
		p.each(k, func(item chunk) { p.runItem(x, item) })
		x.At, x.Incomplete = p.whole(k), p.broken > before
	case "record":
		x := &Record{}
		if r, ok := parseRule[recordRule](p, k, c); ok {
			x.Name, x.Path, out = p.label(r.Name), p.text(r.Path), x
		}
		p.each(k, func(item chunk) { p.recordItem(x, item) })
		x.At, x.Incomplete = p.whole(k), p.broken > before
	case "reading":
		x := &Reading{}
		if r, ok := parseRule[readingRule](p, k, c); ok {
			x.Name, x.Of, out = p.label(r.Name), p.name(r.Of), x
		}
		p.each(k, func(item chunk) { p.readingItem(x, item) })
		x.At, x.Incomplete = p.whole(k), p.broken > before
	case "fit":
		x := &Fit{}
		if _, ok := parseRule[fitRule](p, k, c); ok {
			out = x
		}
		p.each(k, func(item chunk) { p.fitItem(x, item) })
		x.At, x.Incomplete = p.whole(k), p.broken > before
	}
	return out
}

func (p *parser) about(k chunk, c Context) (*About, bool) {
	before := p.broken
	_, ok := parseRule[aboutRule](p, k, c)
	a := &About{At: p.whole(k)}
	p.each(k, func(item chunk) {
		if r, ok := parseRule[aboutEntryRule](p, item, InAbout); ok {
			a.Entries = append(a.Entries, AboutEntry{At: p.at(r.mark), Key: p.word(r.Key), Text: p.text(r.Text)})
		}
	})
	a.Incomplete = p.broken > before
	return a, ok
}

func (p *parser) let(r *letRule) *Let {
	l := &Let{At: p.at(r.mark), Name: p.label(r.Name), Value: p.expr(r.Value), Doubt: p.doubt(r.Doubt)}
	if r.Between != nil {
		l.Doubt = p.between(r.Between)
	}
	for _, w := range r.Where {
		l.Where = p.where(l.Where, l.Doubt, w)
	}
	return l
}

func (p *parser) require(r *requireRule) *Require {
	q := &Require{At: p.at(r.mark), Value: p.expr(r.Value), Text: p.optText(r.Text), Clause: p.optText(r.Clause)}
	if r.Op != nil {
		q.Test, q.Limit = p.word(*r.Op), p.expr(r.Limit)
		return q
	}
	q.Test, q.Low, q.High = p.optWord(r.Sides), p.expr(r.Low), p.expr(r.High)
	return q
}

func (p *parser) runItem(run *Run, k chunk) {
	r, ok := parseRule[runItemRule](p, k, InRun)
	if !ok {
		return
	}
	item := RunItem{At: p.at(r.mark), Word: p.word(r.Tokens[0]), Value: p.expr(r.Value)}
	switch {
	case r.Effort != nil:
		item.Choice = p.word(*r.Effort)
		p.oneOf(item.Choice, "effort", "quick normal thorough")
	case r.Limit != nil:
		item.Choice, item.Value = p.word(*r.Limit), p.expr(r.Most)
		p.oneOf(item.Choice, "limit", "memory work time")
	}
	for _, s := range r.Solvers {
		item.Solvers = append(item.Solvers, p.quoted(s.Name))
	}
	run.Items = append(run.Items, item)
}

func (p *parser) fitItem(f *Fit, k chunk) {
	if p.tokens[k.lo].Text == "to" {
		if r, ok := parseRule[fitToRule](p, k, InFit); ok {
			f.To = append(f.To, p.names(r.Names)...)
		}
		return
	}
	r, ok := parseRule[fitUsingRule](p, k, InFit)
	if !ok {
		return
	}
	for _, u := range r.Uses {
		use := FitUse{At: p.at(u.mark), What: p.word(u.What), Which: p.expr(u.Low)}
		if u.High != nil {
			high := p.expr(u.High)
			use.Which = &Range{At: At{use.Which.Place().To(high.Place())}, Low: use.Which, High: high}
		}
		f.Using = append(f.Using, use)
	}
}

// oneOf reports a word that is none of the words known.
func (p *parser) oneOf(w Word, what, known string) {
	words := strings.Fields(known)
	if !contains(words, w.Text) {
		p.reportHint(w.At, "unknown-word", "`"+what+"` is followed by "+orList(words), "this is none of them", w.Text, words)
	}
}
