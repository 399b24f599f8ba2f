package resolve

import (
	"fmt"

	"github.com/tautspan/tautspan/dsl/diag"
	"github.com/tautspan/tautspan/dsl/syntax"
	"github.com/tautspan/tautspan/dsl/unit"
	"github.com/tautspan/tautspan/engine/formula"
	"github.com/tautspan/tautspan/engine/scenario"
)

// resolveSurvey compiles what was read at the site and what is sought in it:
// readings and records first, since a fit names them.
func (r *resolver) resolveSurvey() {
	for _, s := range r.statements {
		switch s := s.(type) {
		case *syntax.Record:
			r.record(s)
		case *syntax.Reading:
			r.reading(s)
		}
	}
	var before diag.Span
	for _, s := range r.statements {
		switch s := s.(type) {
		case *syntax.Seek:
			r.seek(s)
		case *syntax.Fit:
			if !before.IsZero() {
				r.errorAt(firstWord(s.Span), "said-twice", "a scenario has one fit", "", "", related(before, "first said here"))
				continue
			}
			before = firstWord(s.Span)
			r.path("fit", before)
			r.fit(s)
		}
	}
}

// readingKinds are the kinds of what a reading says, with what it measures.
var readingKinds = map[string]struct {
	kind scenario.ReadingKind
	of   unit.Kind
}{
	"frequency": {scenario.FrequencyReading, unit.Frequency}, "peaks": {scenario.PeaksReading, unit.Frequency}, "returns": {scenario.ReturnsReading, unit.Time},
	"swings": {scenario.SwingsReading, unit.Time}, "decay": {scenario.DecayReading, unit.Share},
}

// mostPeaks is the most values of one peaks statement. Chosen: a spectrum has
// fewer that anybody could name.
const mostPeaks = 200

// reading compiles a block of readings.
func (r *resolver) reading(s *syntax.Reading) {
	el, ok := r.find(s.Of, "a reading")
	if ok && el.kind != lineKind {
		r.errorAt(s.Of.Span, "wrong-place", "a reading is of a line", clip(s.Of)+" is "+article(el.kind), "")
		ok = false
	}
	out := scenario.ReadingOf[formula.Program]{Name: s.Name.Text, Line: el.line, About: abouts(s.Abouts)}
	r.path("reading."+out.Name, s.Name.Span)
	var line *lineEntry
	if ok {
		line = r.lineOrder[el.line]
	}
	for i := range s.Items {
		item, good := r.readingItem(&s.Items[i], line)
		r.path(fmt.Sprintf("reading.%s.%d", out.Name, len(out.Items)), s.Items[i].Span)
		out.Items = append(out.Items, item)
		ok = ok && good
	}
	if ok {
		r.tmpl.Readings = append(r.tmpl.Readings, out)
	} else {
		r.broken[s.Name.Text] = true
	}
}

func abouts(list []*syntax.About) []scenario.Pair {
	var out []scenario.Pair
	for _, a := range list {
		for _, e := range a.Entries {
			out = append(out, scenario.Pair{Key: e.Key.Text, Text: e.Text.Text})
		}
	}
	return out
}

// readingItem compiles one statement of a reading; line is nil where the line
// is not known.
func (r *resolver) readingItem(it *syntax.ReadingItem, line *lineEntry) (scenario.ReadingItemOf[formula.Program], bool) {
	out := scenario.ReadingItemOf[formula.Program]{Source: flat(it)}
	k, ok := readingKinds[it.Word.Text]
	if !ok {
		return out, false
	}
	out.Kind = k.kind
	if it.Order != nil {
		out.Order, ok = r.order(it.Order, "a "+map[bool]string{true: "mode", false: "return or swing"}[k.of != unit.Time])
	}
	if len(it.Values) > mostPeaks {
		r.errorAt(it.Span, "too-many", fmt.Sprintf("one statement takes at most %d peaks", mostPeaks), "", "")
		return out, false
	}
	sc := *plain
	sc.shared = syntax.SharedUnit(it.Values...)
	for _, e := range it.Values {
		v := r.inRange(r.check(r.compile(e, &sc), e, k.of, it.Word.Text), e, positive, it.Word.Text)
		if v.bad {
			ok = false
			continue
		}
		u, good := r.readingDoubt(it, e, v, &out)
		ok = ok && good
		out.Values, out.U = append(out.Values, v.prog), append(out.U, u)
	}
	if ok && out.Assumed != "" {
		r.warnAt(it.Span, "reading-without-doubt", "this reading says no doubt", "it is weighed with "+out.Assumed, "")
	}
	if it.Shared != nil && ok && len(it.Values) == 1 {
		v := value{prog: out.Values[0], dim: k.of.Dim, percent: k.of == unit.Share}
		d, good := r.doubt(it.Shared, v)
		if ok = good; ok {
			out.Shared, out.SharedAsTaken = d.StandardU, d.AsTaken
		}
	} else if it.Shared != nil && len(it.Values) > 1 {
		r.errorAt(it.Shared.Span, "misplaced", "a shared doubt stands behind one value", "these are several", "")
		ok = false
	}
	r.readingPlane(it, line, &out)
	return out, r.readingWhere(it.Where, line, &out) && ok
}

// readingPlane settles the plane that was read, which is that of the line where
// none is said, and whether the sag term counts in it.
func (r *resolver) readingPlane(it *syntax.ReadingItem, line *lineEntry, out *scenario.ReadingItemOf[formula.Program]) {
	if line == nil {
		return
	}
	out.Sideways = line.sideways
	if it.Plane.Text != "" {
		out.Sideways = it.Plane.Text == "sideways"
	}
	out.Sag = !out.Sideways && line.sags
}

// readingDoubt is the standard uncertainty of one value of a reading.
func (r *resolver) readingDoubt(it *syntax.ReadingItem, e syntax.Expr, v value, out *scenario.ReadingItemOf[formula.Program]) (formula.Program, bool) {
	if it.Doubt == nil {
		u, words := assumed(out.Kind, v.prog)
		out.Assumed, out.AsTaken = words, words
		return u, true
	}
	d, ok := r.doubt(it.Doubt, v)
	if !ok {
		return formula.Program{}, false
	}
	if r.num(d.StandardU) <= 0 {
		r.errorAt(it.Doubt.Span, "not-positive", "a reading has some doubt", "one without cannot be weighed against others", "")
		return formula.Program{}, false
	}
	out.AsTaken = d.AsTaken
	return d.StandardU, true
}

// assumed is the standard uncertainty that stands for a doubt that was not said,
// wide enough that such a reading does not outweigh one with a doubt. Common
// practice, no source: half a per cent of a frequency, 0.2 s for a stopwatch in
// the hand, a tenth of a damping ratio.
func assumed(kind scenario.ReadingKind, v formula.Program) (formula.Program, string) {
	switch kind {
	case scenario.FrequencyReading, scenario.PeaksReading:
		return formula.Mul(formula.Const(0.005), v), "a standard uncertainty of 0.5 %, as for a peak read off a spectrum"
	case scenario.DecayReading:
		return formula.Mul(formula.Const(0.1), v), "a standard uncertainty of 10 % of it"
	}
	return formula.Const(0.2), "a standard uncertainty of 0.2 s, as for a stopwatch in the hand"
}

// readingWhere tells temperatures from places.
func (r *resolver) readingWhere(list []syntax.AtPart, line *lineEntry, out *scenario.ReadingItemOf[formula.Program]) bool {
	ok := true
	for _, w := range list {
		var temperature value
		switch {
		case w.Value != nil:
			temperature = r.want(w.Value, plain, unit.Temperature, "a temperature")
		case w.Spot != nil:
			name, plainName := w.Spot.Name.Plain()
			e, isLet := r.lets[name]
			if !plainName || w.Spot.Offset != nil || !isLet || len(r.elements[name]) > 0 {
				p, good := r.place(w.Spot, "a reading")
				if good && line != nil && p.Line != line.index {
					r.errorAt(w.Span, "wrong-place", "a reading is taken at a place of its own line", "this one is of "+line.name, "")
					good = false
				}
				out.HasPlace, out.Place = good, p
				ok = ok && good
				continue
			}
			temperature = r.check(e.val, w.Spot.Name, unit.Temperature, "a temperature")
		}
		if temperature.bad {
			ok = false
			continue
		}
		if out.Warm {
			r.errorAt(w.Span, "said-twice", "a reading has one temperature", "", "")
		}
		out.Warm, out.Temperature = true, temperature.prog
	}
	return ok
}
