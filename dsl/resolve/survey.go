package resolve

import (
	"fmt"
	"math"
	"strings"

	"github.com/tautspan/tautspan/dsl/diag"
	"github.com/tautspan/tautspan/dsl/syntax"
	"github.com/tautspan/tautspan/dsl/unit"
	"github.com/tautspan/tautspan/engine/formula"
	"github.com/tautspan/tautspan/engine/scenario"
)

// seek makes a let unknown.
func (r *resolver) seek(s *syntax.Seek) {
	let := r.letNamed(s.Name)
	what := "the range of " + clip(s.Name)
	var ends [2]formula.Program
	for i, e := range []syntax.Expr{s.From, s.To} {
		v := r.compile(e, plain)
		if v.bad || let.bad {
			return
		}
		if v = r.inRange(r.check(v, e, same(let.dim), what), e, anything, what); v.bad {
			return
		}
		ends[i] = v.prog
	}
	if !(r.num(ends[0]) < r.num(ends[1])) {
		r.errorAt(s.From.Place().To(s.To.Place()), "empty-range", "a range runs from its lower to its higher end", "", "")
		return
	}
	text, _ := s.Name.Plain()
	index := r.lets[text].index
	for _, other := range r.tmpl.Seeks {
		if other.Let == index {
			r.errorAt(s.Name.Span, "said-twice", text+" is sought already", "", "")
			return
		}
	}
	r.path("seek."+text, s.Span)
	r.tmpl.Seeks = append(r.tmpl.Seeks, scenario.Seek{Let: index, From: ends[0], To: ends[1]})
}

// fitWords are what a fit can use.
var fitWords = []string{"frequencies", "peaks", "returns", "swings", "decays", "history"}

var fitKinds = map[string][]scenario.ReadingKind{
	"frequencies": {scenario.FrequencyReading, scenario.PeaksReading}, "peaks": {scenario.PeaksReading}, "returns": {scenario.ReturnsReading},
	"swings": {scenario.SwingsReading}, "decays": {scenario.DecayReading}, "history": nil,
}

// fit compiles what is fitted to what.
func (r *resolver) fit(s *syntax.Fit) {
	out := &scenario.Fit{}
	ok := !s.Incomplete
	for _, n := range s.To {
		ok = r.fitTo(n, out) && ok
	}
	for _, u := range s.Using {
		kinds, known := fitKinds[u.What.Text]
		if !known {
			r.errorAt(u.What.Span, "unknown-word", "a fit cannot use "+u.What.Text, "", diag.Nearest(u.What.Text, fitWords))
			ok = false
			continue
		}
		use := scenario.FitUse{Kinds: kinds, History: u.What.Text == "history"}
		if u.Which != nil {
			var good bool
			if use.From, use.To, good = r.orders(u.Which); !good {
				ok = false
			}
		}
		out.Uses = append(out.Uses, use)
	}
	if ok && len(out.Readings)+len(out.Records) == 0 {
		r.errorAt(firstWord(s.Span), "missing-property", "this fit does not say to what", "", "to NAME")
		ok = false
	}
	if ok {
		r.tmpl.Fit = out
	}
}

// orders reads `1..6` or `3`.
func (r *resolver) orders(e syntax.Expr) (from, to int, ok bool) {
	rg, isRange := syntax.Ungroup(e).(*syntax.Range)
	if !isRange {
		from, ok = r.order(e, "a mode")
		return from, from, ok
	}
	from, ok1 := r.order(rg.Low, "a mode")
	to, ok2 := r.order(rg.High, "a mode")
	if ok1 && ok2 && from > to {
		r.errorAt(rg.Span, "empty-range", "a range of modes runs upward", "", fmt.Sprintf("%d..%d", to, from))
		return 0, 0, false
	}
	return from, to, ok1 && ok2
}

// fitTo finds a reading or a record by its name.
func (r *resolver) fitTo(n *syntax.Name, out *scenario.Fit) bool {
	text, ok := n.Plain()
	sym, isTop := r.top[text]
	switch {
	case !ok:
		r.errorAt(n.Span, "unknown-name", "here stands the name of a reading or a record", "", "")
		return false
	case r.broken[text]:
		return false
	case isTop && sym.kind == "reading":
		for i := range r.tmpl.Readings {
			if r.tmpl.Readings[i].Name == text {
				out.Readings = append(out.Readings, i)
				return true
			}
		}
		return false
	case isTop && sym.kind == "record":
		for i := range r.tmpl.Records {
			if r.tmpl.Records[i].Name == text {
				out.Records = append(out.Records, i)
				return true
			}
		}
		return false
	case isTop:
		r.errorAt(n.Span, "unknown-name", fmt.Sprintf("%s is %s, not a reading or a record", text, article(sym.kind)), "", "", related(sym.span, "said here"))
	default:
		r.errorAt(n.Span, "unknown-name", "no reading or record is called "+text, "", nearest(r, text, r.top))
	}
	return false
}

// record compiles which file a record is and what its channels saw.
func (r *resolver) record(s *syntax.Record) {
	out := scenario.Record{Name: s.Name.Text, Path: s.Path.Text, From: s.Span.File.Name(), About: abouts(s.Abouts)}
	r.path("record."+out.Name, s.Name.Span)
	ok := !s.Incomplete
	for i, t := range s.Times {
		if i > 0 {
			r.errorAt(t.Span, "said-twice", "a record has one time column", "", "", related(s.Times[0].Span, "first said here"))
			ok = false
		}
		if t.Unit == nil {
			continue
		}
		u, uok := r.unit(t.Unit, "")
		if uok && u.Dim != unit.Time.Dim {
			r.errorAt(t.Unit.Span, "wants-time", "the time column wants a unit of time", "this is "+u.Dim.Name(), "unit s")
			uok = false
		}
		if ok = ok && uok; uok {
			out.TimeFactor = u.Factor()
		}
		var good bool
		out.Time, out.TimeNumber, good = r.columnOf(t.Column)
		ok = ok && good
	}
	if wav := strings.HasSuffix(strings.ToLower(s.Path.Text), ".wav"); ok && wav && len(s.Times) > 0 {
		r.errorAt(s.Times[0].Span, "misplaced", "a WAV file has no time column", "its head says how fast it was sampled", "")
		ok = false
	} else if ok && !wav && len(s.Times) == 0 {
		r.errorAt(s.Name.Span, "missing-property", "the record "+out.Name+" does not say which column is the time", "", `time "t" unit s`)
		ok = false
	}
	for i := range s.Channels {
		c, good := r.recordChannel(&s.Channels[i])
		if ok = ok && good; good {
			out.Channels = append(out.Channels, c)
		}
	}
	if ok {
		r.tmpl.Records = append(r.tmpl.Records, out)
	} else {
		r.broken[s.Name.Text] = true
	}
}

func (r *resolver) recordChannel(c *syntax.RecordChannel) (scenario.RecordChannel, bool) {
	m := blank(0, c)
	ok := c.For != nil && r.watchQuantity(c.For, &m)
	out := scenario.RecordChannel{Watch: m.Watch, Quantity: m.Quantity}
	var good bool
	out.Column, out.Number, good = r.columnOf(c.Column)
	ok = ok && good
	if c.Unit == nil {
		return out, ok
	}
	u, uok := r.unit(c.Unit, "")
	if !ok || !uok {
		return out, false
	}
	if q, err := unit.Parse(m.Quantity.Unit()); err == nil && q.Dim != u.Dim {
		r.errorAt(c.Unit.Span, "unit-mismatch", fmt.Sprintf("%s is recorded in %s", m.Quantity, m.Quantity.Unit()), "this is "+u.Dim.Name(), "")
		return out, false
	}
	out.Unit, out.Factor = c.Unit.Text, u.Factor()
	return out, true
}

// columnOf reads a column by its name or its number from 1.
func (r *resolver) columnOf(e syntax.Expr) (name string, number int, ok bool) {
	switch e := e.(type) {
	case *syntax.String:
		return e.Text, 0, true
	case *syntax.Number:
		if e.Unit != nil || e.Value < 1 || e.Value != math.Trunc(e.Value) || e.Value > 1e6 {
			r.errorAt(e.Span, "wants-order", "the number of a column counts from 1", "", "")
			return "", 0, false
		}
		return "", int(e.Value), true
	}
	return "", 0, false
}
