package resolve

import (
	"fmt"
	"math"
	"sort"
	"strings"

	"github.com/tautspan/tautspan/dsl/diag"
	"github.com/tautspan/tautspan/dsl/syntax"
	"github.com/tautspan/tautspan/dsl/unit"
	"github.com/tautspan/tautspan/engine/formula"
	"github.com/tautspan/tautspan/engine/scenario"
)

type measureOf = scenario.MeasureOf[formula.Program]

// asked collects the measures of one expression; measure i is argument i of its
// program.
type asked struct {
	list []measureOf
	// expand asks for each number of a range by itself, pick says which; else a
	// range is one question about all its modes.
	expand bool
	pick   int
	ranges []modeRange
}

// modeRange is a range that was met while expanding.
type modeRange struct {
	span     diag.Span
	from, to int
}

// maxModes is the highest order number of a mode.
const maxModes = 1000

// quantityMeasures take one quantity of a watch and have its dimension.
var quantityMeasures = map[string]scenario.MeasureKind{
	"peak": scenario.Peak, "rms": scenario.RMS, "final": scenario.Final, "highest": scenario.Highest, "lowest": scenario.Lowest,
	"time_of_peak": scenario.TimeOfPeak, "settle": scenario.Settle, "reach": scenario.Reach, "difference": scenario.SolverDifference,
}

// otherMeasures are the rest that this version answers.
var otherMeasures = map[string]bool{
	"frequency": true, "damping": true, "tension": true, "wave_speed": true, "stored_energy": true, "arrival": true, "energy_left": true, "low": true, "high": true,
	"sag": true, "sag_place": true, "take_up": true, "reflected": true, "passed": true, "absorbed": true, "taken": true, "response": true, "scruton": true,
}

func isMeasure(name string) bool {
	_, q := quantityMeasures[name]
	return q || otherMeasures[name]
}

func measureNames() []string {
	out := append(known(quantityMeasures), known(otherMeasures)...)
	sort.Strings(out)
	return out
}

// ask enters a measure and gives its value as an argument of the program.
func (a *asked) ask(m measureOf, d unit.Dim, angle int8) value {
	a.list = append(a.list, m)
	return value{prog: formula.Arg(len(a.list) - 1), dim: d, angle: angle}
}

// blank is a measure without anything said.
func blank(kind scenario.MeasureKind, c syntax.Node) measureOf {
	return measureOf{Kind: kind, Source: flat(c), Watch: -1, Line: -1, Segment: -1, Place: placeOf{Line: -1, Node: -1, Segment: -1}}
}

func (r *resolver) energyLeft(n *syntax.Name, sc *scope) value {
	return sc.measures.ask(blank(scenario.EnergyLeft, n), unit.Dim{}, 0)
}

// measure compiles one measure.
func (r *resolver) measure(c *syntax.Call, sc *scope) value {
	name := c.Name.Text
	if kind, ok := quantityMeasures[name]; ok {
		return r.quantityMeasure(c, sc, kind)
	}
	switch name {
	case "frequency", "damping":
		return r.modeMeasure(c, sc)
	case "tension":
		return r.tensionMeasure(c, sc)
	case "wave_speed":
		return r.stretchMeasure(c, sc, scenario.WaveSpeed, unit.Speed)
	case "stored_energy":
		return r.stretchMeasure(c, sc, scenario.StoredEnergy, unit.Energy)
	case "arrival":
		return r.arrival(c, sc)
	case "reflected":
		return r.shareMeasure(c, sc, scenario.Reflected)
	case "passed":
		return r.shareMeasure(c, sc, scenario.Passed)
	case "absorbed":
		return r.shareMeasure(c, sc, scenario.Absorbed)
	case "taken":
		return r.takenMeasure(c, sc)
	case "response":
		return r.responseMeasure(c, sc)
	case "sag":
		return r.sagMeasure(c, sc)
	case "sag_place":
		return r.stretchMeasure(c, sc, scenario.SagPlace, unit.Length)
	case "take_up":
		return r.takeUpMeasure(c, sc)
	case "scruton":
		return r.scrutonMeasure(c, sc)
	case "low":
		return r.endOf(c, sc, scenario.LowEnd)
	case "high":
		return r.endOf(c, sc, scenario.HighEnd)
	}
	r.errorAt(c.Span, "wrong-arguments", "energy_left takes nothing", "", "energy_left")
	return badValue
}

// count refuses a wrong number of arguments.
func (r *resolver) count(c *syntax.Call, form string, allowed ...int) bool {
	for _, n := range allowed {
		if len(c.Args) == n {
			return true
		}
	}
	r.errorAt(c.Span, "wrong-arguments", c.Name.Text+" is written "+form, fmt.Sprintf("here stand %d values", len(c.Args)), form)
	return false
}

// quantityMeasure compiles peak(mid.displacement) and its like.
func (r *resolver) quantityMeasure(c *syntax.Call, sc *scope, kind scenario.MeasureKind) value {
	forms := map[scenario.MeasureKind]string{scenario.Settle: "settle(WATCH.QUANTITY, 5 %)", scenario.Reach: "reach(WATCH.QUANTITY, LEVEL)"}
	form, n := forms[kind], 2
	if form == "" {
		form, n = c.Name.Text+"(WATCH.QUANTITY)", 1
	}
	if !r.count(c, form, n) || !r.plainArgs(c) {
		return badValue
	}
	m := blank(kind, c)
	ok := r.watchQuantity(c.Args[0].Value, &m)
	d, angle := unit.Time.Dim, int8(0)
	var qd unit.Dim
	if ok {
		u, err := unit.Parse(m.Quantity.Unit())
		if err != nil {
			panic("resolve: the unit of a quantity does not read: " + m.Quantity.Unit())
		}
		qd = u.Dim
		if kind != scenario.TimeOfPeak && kind != scenario.Settle && kind != scenario.Reach {
			d, angle = u.Dim, u.Angle
		}
	}
	if n == 2 {
		level := c.Args[1].Value
		k := unit.Share
		if kind == scenario.Reach {
			if !ok {
				return badValue
			}
			k = same(qd)
		}
		v := r.inRange(r.want(level, plain, k, "the level of "+c.Name.Text), level, positive, "the level of "+c.Name.Text)
		if v.bad {
			return badValue
		}
		if kind == scenario.Settle && r.num(v.prog) >= 1 {
			r.errorAt(level.Place(), "out-of-range", "settle wants a share below 100 %", "", "5 %")
			return badValue
		}
		m.Args = append(m.Args, v.prog)
	}
	if !ok {
		return badValue
	}
	return sc.measures.ask(m, d, angle)
}

// watchQuantity resolves WATCH.QUANTITY.
func (r *resolver) watchQuantity(e syntax.Expr, m *measureOf) bool {
	n, ok := syntax.Ungroup(e).(*syntax.Name)
	if !ok || len(n.Parts) != 2 || n.Parts[0].Index != nil {
		hint := ""
		if n, isName := syntax.Ungroup(e).(*syntax.Name); isName {
			if i, isWatch := r.watches[n.Parts[0].Text]; isWatch && i >= 0 {
				w := r.tmpl.Model.Watches[i]
				hint = w.Name + "." + w.Quantities[0].String()
			}
		}
		r.errorAt(e.Place(), "wants-record", "a quantity of a watch is written WATCH.QUANTITY", "", hint)
		return false
	}
	w, ok := r.watch(n)
	if !ok {
		return false
	}
	q, known := scenario.QuantityNamed(n.Parts[1].Text)
	watch := &r.tmpl.Model.Watches[w]
	if !known {
		r.errorAt(n.Parts[1].Span, "unknown-word", "a watch cannot record "+n.Parts[1].Text, "", diag.Nearest(n.Parts[1].Text, quantityWords))
		return false
	}
	for _, has := range watch.Quantities {
		if has == q {
			if watch.Along {
				r.notYet(n.Span, "a measure of a picture along a line", "watch a point of it")
				return false
			}
			m.Watch, m.Quantity = w, q
			return true
		}
	}
	var words []string
	for _, has := range watch.Quantities {
		words = append(words, has.String())
	}
	r.errorAt(n.Parts[1].Span, "unknown-name", fmt.Sprintf("the watch %s does not record %s", watch.Name, q), "it records "+strings.Join(words, ", "), "")
	return false
}

// watch resolves the watch that a name begins with.
func (r *resolver) watch(n *syntax.Name) (int, bool) {
	name := n.Parts[0].Text
	i, ok := r.watches[name]
	switch {
	case ok && i >= 0:
		return i, true
	case ok || r.broken[name]:
		return 0, false // its mistake has been reported
	}
	if s, ok := r.top[name]; ok {
		r.errorAt(n.Parts[0].Span, "unknown-name", fmt.Sprintf("%s is %s, not a watch", name, article(s.kind)), "", "", related(s.span, "said here"))
		return 0, false
	}
	r.errorAt(n.Parts[0].Span, "unknown-name", "no watch is called "+name, "", nearest(r, name, r.watches))
	return 0, false
}

// modeMeasure compiles frequency(n), damping(1..4), damping(LINE, below F).
func (r *resolver) modeMeasure(c *syntax.Call, sc *scope) value {
	if !r.count(c, c.Name.Text+"(1)", 1, 2) {
		return badValue
	}
	if !r.vibrates(c) {
		return badValue
	}
	m := blank(scenario.Frequency, c)
	d := unit.Frequency.Dim
	if c.Name.Text == "damping" {
		m.Kind, d = scenario.DampingRatio, unit.Dim{}
	}
	ok := true
	if len(c.Args) == 2 {
		ok = r.lineArg(c.Args[0], &m)
	}
	if !r.modes(c.Args[len(c.Args)-1], &m, sc) || !ok {
		return badValue
	}
	return sc.measures.ask(m, d, 0)
}

// lineArg resolves an argument that names a line.
func (r *resolver) lineArg(a syntax.Arg, m *measureOf) bool {
	spot, ok := spotOf(a)
	if !ok {
		r.errorAt(a.Span, "wrong-place", "here stands the name of a line", "", "")
		return false
	}
	span, ok := r.span(spot, "this measure", true)
	m.Line = span.Line
	return ok
}

// spotOf reads an argument as a place.
func spotOf(a syntax.Arg) (*syntax.Spot, bool) {
	if a.Key != nil || a.Mark != nil || a.Unit != nil {
		return nil, false
	}
	switch e := syntax.Ungroup(a.Value).(type) {
	case *syntax.Spot:
		return e, true
	case *syntax.Name:
		return &syntax.Spot{At: e.At, Name: e}, true
	}
	return nil, false
}

// modes reads which modes a measure is about.
func (r *resolver) modes(a syntax.Arg, m *measureOf, sc *scope) bool {
	switch {
	case a.Key != nil || a.Unit != nil || a.Mark != nil && a.Mark.Text != "below":
		r.errorAt(a.Span, "wrong-arguments", "here stands the number of a mode", "", "")
		return false
	case a.Mark != nil:
		v := r.inRange(r.want(a.Value, plain, unit.Frequency, "below"), a.Value, positive, "below")
		if v.bad {
			return false
		}
		m.Below, m.Args = true, []formula.Program{v.prog}
		return true
	}
	if rg, ok := syntax.Ungroup(a.Value).(*syntax.Range); ok {
		from, ok1 := r.order(rg.Low, "a mode")
		to, ok2 := r.order(rg.High, "a mode")
		if !ok1 || !ok2 {
			return false
		}
		if from > to {
			r.errorAt(rg.Span, "empty-range", "a range of modes runs upward", "", fmt.Sprintf("%d..%d", to, from))
			return false
		}
		m.ModeFrom, m.ModeTo = from, to
		if sc.measures.expand {
			sc.measures.ranges = append(sc.measures.ranges, modeRange{rg.Span, from, to})
			m.ModeFrom = min(from+sc.measures.pick, to)
			m.ModeTo = m.ModeFrom
			m.Source = fmt.Sprintf("%s%d%s", m.Source[:max(strings.Index(m.Source, flat(rg)), 0)], m.ModeFrom, afterText(m.Source, flat(rg)))
		}
		return true
	}
	n, ok := r.order(a.Value, "a mode")
	m.ModeFrom, m.ModeTo = n, n
	return ok
}

// afterText is what stands behind part in text.
func afterText(text, part string) string {
	_, after, _ := strings.Cut(text, part)
	return after
}

// order reads a positive whole number that is written out.
func (r *resolver) order(e syntax.Expr, what string) (int, bool) {
	n, ok := syntax.Ungroup(e).(*syntax.Number)
	if !ok {
		r.errorAt(e.Place(), "wants-order", "the number of "+what+" is written out", "", "1")
		return 0, false
	}
	switch {
	case n.Unit != nil:
		r.errorAt(n.Span, "wants-order", "the number of "+what+" has no unit", "", n.Text)
	case n.Value < 1 || n.Value != math.Trunc(n.Value):
		r.errorAt(n.Span, "wants-order", "the number of "+what+" counts from 1", "", "")
	case n.Value > maxModes:
		r.errorAt(n.Span, "out-of-range", fmt.Sprintf("the number of %s is at most %d", what, maxModes), "", "")
	default:
		return int(n.Value), true
	}
	return 0, false
}

// tensionMeasure compiles tension(PLACE).
func (r *resolver) tensionMeasure(c *syntax.Call, sc *scope) value {
	if !r.count(c, "tension(PLACE)", 1, 2) {
		return badValue
	}
	spot, ok := spotOf(c.Args[0])
	if !ok {
		r.errorAt(c.Args[0].Span, "wrong-place", "tension wants a place", "", "")
		return badValue
	}
	m := blank(scenario.LineTension, c)
	if len(c.Args) == 2 && !r.warmth(c, &m) {
		return badValue
	}
	if spot.Offset != nil {
		p, ok := r.place(spot, "tension")
		if !ok {
			return badValue
		}
		m.HasPlace, m.Place, m.Line = true, p, p.Line
		return r.askTension(c, m, sc)
	}
	el, ok := r.find(spot.Name, "tension")
	if !ok {
		return badValue
	}
	m.Line = el.line
	if el.kind == lineKind {
		return r.askTension(c, m, sc)
	}
	m.HasPlace = true
	m.Place = placeOf{Line: el.line, Node: el.node, Segment: el.segment}
	if el.segment >= 0 {
		// The tension of a segment is that of its middle.
		m.Segment = el.segment
		m.Place.Offset = formula.Mul(formula.Const(0.5), r.tmpl.Model.Lines[el.line].Segments[el.segment].Length)
	}
	return r.askTension(c, m, sc)
}

// stretchMeasure compiles wave_speed(SEGMENT), stored_energy(LINE) and sag_place(LINE).
func (r *resolver) stretchMeasure(c *syntax.Call, sc *scope, kind scenario.MeasureKind, k unit.Kind) value {
	if !r.count(c, c.Name.Text+"(NAME)", 1) {
		return badValue
	}
	spot, ok := spotOf(c.Args[0])
	if !ok {
		r.errorAt(c.Args[0].Span, "wrong-place", c.Name.Text+" wants a name", "", "")
		return badValue
	}
	m := blank(kind, c)
	span, ok := r.span(spot, c.Name.Text, kind != scenario.WaveSpeed)
	if !ok {
		return badValue
	}
	if kind == scenario.WaveSpeed && span.Segment < 0 {
		if len(r.tmpl.Model.Lines[span.Line].Segments) != 1 {
			r.errorAt(c.Args[0].Span, "wrong-place", "wave_speed wants a segment", "this is a line of several", "")
			return badValue
		}
		span.Segment = 0
	}
	m.Line, m.Segment = span.Line, span.Segment
	return sc.measures.ask(m, k.Dim, 0)
}

// arrival compiles arrival(watch, k).
func (r *resolver) arrival(c *syntax.Call, sc *scope) value {
	if !r.count(c, "arrival(WATCH, 1)", 2) || !r.plainArgs(c) {
		return badValue
	}
	n, ok := syntax.Ungroup(c.Args[0].Value).(*syntax.Name)
	if !ok || len(n.Parts) > 2 {
		r.errorAt(c.Args[0].Span, "wants-record", "arrival wants a watch", "", "")
		return badValue
	}
	m := blank(scenario.Arrival, c)
	if len(n.Parts) == 2 {
		ok = r.watchQuantity(n, &m)
	} else {
		m.Watch, ok = r.watch(n)
		if ok {
			m.Quantity = r.tmpl.Model.Watches[m.Watch].Quantities[0]
			if r.tmpl.Model.Watches[m.Watch].Along {
				r.notYet(n.Span, "arrivals along a line", "watch a point of it")
				ok = false
			}
		}
	}
	k, kok := r.order(c.Args[1].Value, "a front")
	if !ok || !kok {
		return badValue
	}
	m.Args = []formula.Program{formula.Const(float64(k))}
	return sc.measures.ask(m, unit.Time.Dim, 0)
}

// endOf compiles low(EXPR) and high(EXPR).
func (r *resolver) endOf(c *syntax.Call, sc *scope, kind scenario.MeasureKind) value {
	if !r.count(c, c.Name.Text+"(EXPR)", 1) || !r.plainArgs(c) {
		return badValue
	}
	inner := *sc
	inner.shared = nil
	inner.measures = &asked{expand: sc.measures.expand, pick: sc.measures.pick}
	v := r.compile(c.Args[0].Value, &inner)
	sc.measures.ranges = append(sc.measures.ranges, inner.measures.ranges...)
	if v.bad {
		return v
	}
	m := blank(kind, c)
	m.Inner = &scenario.InnerOf[formula.Program]{Value: v.prog, Measures: inner.measures.list}
	return sc.measures.ask(m, v.dim, v.angle)
}
