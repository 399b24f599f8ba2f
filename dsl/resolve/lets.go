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

// letEntry is one let on its way into the template.
type letEntry struct {
	stmt    *syntax.Let
	expr    syntax.Expr   // nil where only `between` was said
	doubt   *syntax.Doubt // nil: exact
	given   bool          // overridden from outside
	state   letState
	index   int  // in the template
	circled bool // its circle has been reported
	val     value
}

type letState int

const (
	untouched letState = iota
	busy
	done
)

func (r *resolver) declareLet(s *syntax.Let) {
	if meaning, ok := reserved[s.Name.Text]; ok {
		r.errorAt(s.Name.Span, "reserved-name", s.Name.Text+" cannot be a let", "it is "+meaning, s.Name.Text+"1")
		return
	}
	if !r.enter(s.Name, "let") {
		return
	}
	e := &letEntry{stmt: s, expr: s.Value, doubt: s.Doubt}
	r.lets[s.Name.Text] = e
	r.letOrder = append(r.letOrder, e)
}

// resolveLets compiles every let, each after those that it reads, and then the
// doubts, which may read any let.
func (r *resolver) resolveLets() {
	originals := r.override()
	for _, e := range r.letOrder {
		r.readLet(e)
	}
	for _, e := range r.letOrder {
		r.letDoubt(e)
		for _, w := range e.stmt.Where {
			r.errorAt(w.Span, "misplaced", "a let has no temperature and no place", "", "say it at the line or the reading")
		}
	}
	r.checkOverrides(originals)
}

// override puts the values given from outside in the place of lets.
func (r *resolver) override() map[string]syntax.Expr {
	originals := map[string]syntax.Expr{}
	names := known(r.opts.Set)
	for _, name := range names {
		typed := "let " + name + " = " + r.opts.Set[name]
		file := diag.NewFile("--set "+name, setHead+typed+"\n")
		r.typed[file] = diag.NewFile("--set "+name, typed)
		value := diag.Span{File: file, Start: len(setHead + "let "), End: len(setHead + typed)}
		e, ok := r.lets[name]
		if !ok {
			if !r.incomplete {
				r.errorAt(value, "unknown-name", "no let is called "+name, "", nearest(r, name, r.lets))
			}
			continue
		}
		if strings.ContainsAny(r.opts.Set[name], "\r\n#") || invalidUTF8(r.opts.Set[name]) >= 0 {
			r.errorAt(value, "bad-override", "--set takes NAME=QUANTITY", "", "")
			continue
		}
		tree, diags := syntax.Parse(file)
		r.diags = append(r.diags, diags...)
		if diags.HasErrors() {
			continue
		}
		let, ok := tree.Statements[len(tree.Statements)-1].(*syntax.Let)
		if !ok || len(tree.Statements) != 2 {
			r.errorAt(value, "bad-override", "--set takes NAME=QUANTITY", "", "")
			continue
		}
		originals[name] = e.expr
		if e.expr == nil && e.doubt != nil {
			originals[name] = e.doubt.Low
		}
		e.expr, e.doubt, e.given = let.Value, let.Doubt, true
	}
	return originals
}

// setHead makes a file of one let.
const setHead = "tautspan 1\n"

// asTyped moves a place in the file made of a value from outside to the place
// in what was typed, and one in the text made of an each block to the block.
func (r *resolver) asTyped(s diag.Span) diag.Span {
	if m, ok := r.mades[s.File]; ok {
		return m.origin(s)
	}
	shown, ok := r.typed[s.File]
	if !ok {
		return s
	}
	end := len(shown.Text())
	return diag.Span{File: shown, Start: min(max(s.Start-len(setHead), 0), end), End: min(max(s.End-len(setHead), 0), end)}
}

// checkOverrides holds an overriding value against the dimension of the let's own.
func (r *resolver) checkOverrides(originals map[string]syntax.Expr) {
	for _, name := range known(originals) {
		e := r.lets[name]
		if e.val.bad || originals[name] == nil {
			continue
		}
		own := r.compile(originals[name], plain)
		if !own.bad && own.dim != e.val.dim && e.expr != nil {
			r.errorAt(e.expr.Place(), "unit-mismatch", fmt.Sprintf("the let %s is %s", name, describe(own)), "this is "+describe(e.val), "")
			e.val = badValue
		}
	}
}

// readLet is the value of a let where an expression reads it.
func (r *resolver) readLet(e *letEntry) value {
	switch e.state {
	case done:
		return e.val
	case busy:
		r.circle(e)
		return badValue
	}
	if len(r.letStack) >= maxLetChain {
		r.errorAt(e.stmt.Name.Span, "too-long", "this chain of lets is too long to follow", "each is computed from one that stands further down", "")
		e.state = done
		e.val = badValue
		return badValue
	}
	e.state = busy
	r.stack(e)
	depth := r.depth
	r.depth = 0
	e.val = r.letValue(e)
	r.depth = depth
	r.letStack = r.letStack[:len(r.letStack)-1]
	e.state = done
	return e.val
}

// stack remembers the lets that are being read, for circles.
func (r *resolver) stack(e *letEntry) { r.letStack = append(r.letStack, e) }

// maxLetChain bounds how many lets may hang on one another against the order of
// the text.
const maxLetChain = 20_000

// circle reports the lets that read one another, once, at the first of them in the text.
func (r *resolver) circle(e *letEntry) {
	if e.circled {
		return
	}
	from := len(r.letStack) - 1
	for from > 0 && r.letStack[from] != e {
		from--
	}
	ring := append([]*letEntry{}, r.letStack[from:]...)
	first := 0
	for i, l := range ring {
		l.circled = true
		if l.stmt.Span.Start < ring[first].stmt.Span.Start {
			first = i
		}
	}
	ring = append(ring[first:], ring[:first]...)
	words := make([]string, 0, len(ring)+1)
	for i, l := range ring {
		if i == 6 && len(ring) > 8 {
			words = append(words, "…")
			continue
		}
		if i > 6 && i < len(ring)-1 && len(ring) > 8 {
			continue
		}
		words = append(words, l.stmt.Name.Text)
	}
	words = append(words, ring[0].stmt.Name.Text)
	r.errorAt(ring[0].stmt.Name.Span, "circular-lets", "these lets are computed from one another", strings.Join(words, " -> "), "")
}

// letValue compiles a let and enters it in the template.
func (r *resolver) letValue(e *letEntry) value {
	v := r.letExpr(e)
	if v.bad {
		return v
	}
	name := e.stmt.Name.Text
	place := syntax.Node(e.stmt)
	if e.expr != nil {
		place = e.expr
	}
	x := r.num(v.prog)
	if math.IsNaN(x) || math.IsInf(x, 0) {
		r.errorAt(place.Place(), "not-finite", name+" has no finite value", "this comes to "+unit.Digits(x, 4), "")
		return badValue
	}
	e.index = len(r.tmpl.Lets)
	text := v.dim.SI()
	if v.dim.IsNumber() && v.angle == 1 {
		text = "rad"
	} else if v.dim == unit.Moment.Dim && strings.Contains(place.Place().Text(), "N") {
		text = unit.Moment.SI
	}
	r.tmpl.Lets = append(r.tmpl.Lets, scenario.Let{Name: name, Value: v.prog, Unit: text})
	r.values = append(r.values, x)
	r.path("let."+name, place.Place())
	v.prog = formula.Let(e.index)
	v.bare = false
	return v
}

func (r *resolver) letExpr(e *letEntry) value {
	if e.expr != nil {
		return r.compile(e.expr, plain)
	}
	if e.doubt == nil || !e.doubt.Between {
		return badValue
	}
	low, high, ok := r.ends(e.doubt)
	if !ok {
		return badValue
	}
	mid := low
	mid.prog = formula.Mul(formula.Const(0.5), formula.Add(low.prog, high.prog))
	mid.bare = false
	return mid
}

// ends compiles the ends of `between A and B`.
func (r *resolver) ends(d *syntax.Doubt) (low, high value, ok bool) {
	sc := *plain
	sc.shared = syntax.SharedUnit(d.Low, d.High)
	low, high = r.compile(d.Low, &sc), r.compile(d.High, &sc)
	if low.bad || high.bad || !r.alike(d, d.Low, d.High, low, high, "the ends of one range") {
		return low, high, false
	}
	if a, b := r.num(low.prog), r.num(high.prog); !(a < b) {
		r.errorAt(d.Span, "empty-range", "between A and B wants A below B", "", "")
		return low, high, false
	}
	return low, high, true
}

// rootThree is the divisor of the half width of a rectangle, GUM 4.3.7.
var rootThree = math.Sqrt(3)

// letDoubt enters the doubt of a let. It may read every let, also its own.
func (r *resolver) letDoubt(e *letEntry) {
	if e.doubt == nil || e.val.bad || e.state != done {
		return
	}
	d, ok := r.doubt(e.doubt, e.val)
	if !ok {
		return
	}
	r.tmpl.Lets[e.index].Doubt = d
	r.path("let."+e.stmt.Name.Text+".doubt", e.doubt.Span)
}

// doubt is a standard uncertainty in SI of a value.
func (r *resolver) doubt(d *syntax.Doubt, v value) (*scenario.Doubt, bool) {
	if d.Between {
		return r.rectangle(d, v)
	}
	if d.Spread == nil {
		return nil, false
	}
	spread := r.spread(d.Spread)
	if spread.bad {
		return nil, false
	}
	u, ok := r.spreadProgram(d, spread, v)
	if !ok {
		return nil, false
	}
	factor, words, ok := r.level(d.Level)
	if !ok {
		return nil, false
	}
	if factor != 1 {
		u = formula.Div(u, formula.Const(factor))
	}
	x := r.num(u)
	switch {
	case math.IsNaN(x) || math.IsInf(x, 0):
		r.errorAt(d.Span, "not-finite", "this doubt has no finite value", "", "")
		return nil, false
	case x < 0:
		r.errorAt(d.Spread.Place(), "negative", "a doubt must not be negative", "", "")
		return nil, false
	}
	return &scenario.Doubt{StandardU: u, AsTaken: "normal, one standard uncertainty " + differenceText(x, v.dim) + words}, true
}

// spread compiles the number behind +-, where degC means a difference.
func (r *resolver) spread(e syntax.Expr) value {
	if n, ok := syntax.Ungroup(e).(*syntax.Number); ok && n.Unit != nil {
		if u, ok := r.unit(n.Unit, n.Text); ok && u.Scale {
			return value{prog: formula.Const(u.Difference(n.Value)), dim: u.Dim}
		}
	}
	v := r.compile(e, plain)
	if !v.bad && v.point {
		return r.scaleFault(e, "a doubt")
	}
	return v
}

// spreadProgram turns the number behind +- into a program in SI. Behind a value
// with a unit, angles included, a share is relative; behind a pure number it is
// what the number is, and a doubt in another form is refused as ambiguous.
func (r *resolver) spreadProgram(d *syntax.Doubt, spread, v value) (formula.Program, bool) {
	relative := formula.Mul(formula.Apply(formula.OpAbs, v.prog), spread.prog)
	at := d.Spread
	hasUnit := !v.dim.IsNumber() || v.angle != 0
	share := spread.dim.IsNumber() && spread.angle == 0
	switch {
	case d.OfIt && share:
		return relative, true
	case d.OfIt:
		r.errorAt(at.Place(), "doubt-form", "`of it` stands behind a share", "this is "+describe(spread), "+- 7 % of it")
	case hasUnit && spread.percent && v.point:
		r.errorAt(at.Place(), "doubt-form", "the doubt of a temperature is a difference in K", "", "+- 2 K")
	case hasUnit && spread.percent:
		return relative, true
	case hasUnit && share && isNumber(at):
		si := v.dim.SI()
		if v.angle != 0 && v.dim.IsNumber() {
			si = "deg"
		}
		r.errorAt(at.Place(), "missing-unit", "the doubt of "+describe(v)+" wants its unit or %", "this number has no unit", "+- "+clip(at)+" "+si)
	case v.dim != spread.dim || v.dim.IsNumber() && (v.angle != 0) != (spread.angle != 0):
		r.errorAt(at.Place(), "unit-mismatch", "the doubt of "+describe(v)+" is "+v.dim.Name()+" or a share in %", "this is "+describe(spread), "")
	case !hasUnit && spread.percent && !v.percent:
		r.errorAt(at.Place(), "doubt-form", "the doubt of a pure number is written as the number is", "absolute or of the value?", "+- "+clip(at)+" of it")
	case !hasUnit && v.percent && !spread.percent && isNumber(at):
		r.errorAt(at.Place(), "doubt-form", "the doubt of a pure number is written as the number is", "the value is written in %, its doubt is not", "+- "+clip(at)+" %")
	default:
		return spread.prog, true
	}
	return relative, false
}

// level is the factor by which a doubt at a level is divided.
func (r *resolver) level(e syntax.Expr) (factor float64, words string, ok bool) {
	if e == nil {
		return 1, "", true
	}
	v := r.check(r.compile(e, plain), e, unit.Share, "a level")
	if v.bad {
		return 1, "", false
	}
	p, isConst := v.prog.IsConst()
	switch {
	case !isConst || !(p > 0 && p < 1):
		r.errorAt(e.Place(), "out-of-range", "a level is a number between 0 % and 100 %", "", "at 95 %")
		return 1, "", false
	case math.Abs(p-0.95) < 1e-12:
		return 1.960, " (said at 95 %, divided by 1.960)", true // the language's own number
	}
	k := math.Sqrt2 * math.Erfinv(p) // two-sided quantile of the normal distribution
	return k, fmt.Sprintf(" (said at %s, divided by %s)", clip(e), unit.Digits(k, 4)), true
}

// rectangle is the doubt of `between A and B`.
func (r *resolver) rectangle(d *syntax.Doubt, v value) (*scenario.Doubt, bool) {
	before := len(r.diags)
	low, high, ok := r.ends(d)
	if !ok {
		if len(r.diags) > before && v.bad {
			r.diags = r.diags[:before]
		}
		return nil, false
	}
	if low.dim != v.dim {
		r.errorAt(d.Span, "unit-mismatch", "the range of "+describe(v)+" is "+describe(low), "", "")
		return nil, false
	}
	a, b, x := r.num(low.prog), r.num(high.prog), r.num(v.prog)
	if slack := 1e-12 * (b - a); x < a-slack || x > b+slack {
		r.errorAt(d.Span, "out-of-range", "the value lies outside its own range", "", "")
		return nil, false
	}
	half := formula.Mul(formula.Const(0.5), formula.Sub(high.prog, low.prog))
	u := formula.Div(half, formula.Const(rootThree))
	return &scenario.Doubt{StandardU: u, Rectangular: true,
		AsTaken: fmt.Sprintf("rectangle, standard uncertainty %s (half the width over the root of 3)", differenceText((b-a)/2/rootThree, v.dim))}, true
}

// differenceText writes a difference, for which a temperature has no offset.
func differenceText(x float64, d unit.Dim) string {
	if d == unit.Temperature.Dim {
		return unit.Digits(x, 3) + " K"
	}
	return unit.Format(x, d, unit.SI, 3)
}

// letInfo lists the lets in the order of the text.
func (r *resolver) letInfo() []LetInfo {
	var out []LetInfo
	for _, e := range r.letOrder {
		info := LetInfo{Name: e.stmt.Name.Text, Kind: describe(e.val), Dim: e.val.dim, Span: r.asTyped(e.stmt.Name.Span), Given: e.given}
		if !e.val.bad && e.state == done {
			info.Value = r.values[e.index]
			if d := r.tmpl.Lets[e.index].Doubt; d != nil {
				info.StdU = r.num(d.StandardU)
			}
		} else {
			info.Kind = ""
		}
		out = append(out, info)
	}
	return out
}
