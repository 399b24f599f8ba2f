package resolve

import (
	"fmt"
	"math"

	"github.com/tautspan/tautspan/dsl/diag"
	"github.com/tautspan/tautspan/dsl/syntax"
	"github.com/tautspan/tautspan/dsl/unit"
	"github.com/tautspan/tautspan/engine/scenario"
)

// resolveSweep compiles what a sweep answers.
func (r *resolver) resolveSweep() {
	sampled := diag.Span{}
	varied := map[int]diag.Span{}
	for _, s := range r.statements {
		switch s := s.(type) {
		case *syntax.Vary:
			v, ok := r.vary(s)
			if !ok {
				continue
			}
			if before, twice := varied[v.Let]; twice {
				r.errorAt(s.Name.Span, "said-twice", clip(s.Name)+" is varied already", "", "", related(before, "first said here"))
				continue
			}
			varied[v.Let] = s.Name.Span
			r.tmpl.Varies = append(r.tmpl.Varies, v)
		case *syntax.Sample:
			if !sampled.IsZero() {
				r.errorAt(firstWord(s.Span), "said-twice", "a scenario says once how often it samples", "", "", related(sampled, "first said here"))
				continue
			}
			sampled = firstWord(s.Span)
			r.sample(s)
		case *syntax.Best:
			r.best(s)
		case *syntax.Meet:
			r.meet(s)
		}
	}
}

// best compiles `best EXPR largest|smallest over NAME from A to B`.
func (r *resolver) best(s *syntax.Best) {
	a := &asked{}
	v := r.compile(s.Value, measured(a, "a value to be best"))
	over, ok := r.over(s.Over, s.From, s.To)
	if v.bad || !ok {
		return
	}
	r.tmpl.Bests = append(r.tmpl.Bests, scenario.Best{
		Source: flat(s.Value), Unit: siText(v, a), Largest: s.Goal.Text == "largest", Over: over, Value: v.prog, Measures: a.list,
	})
}

// letNamed resolves a name that must be a let; the value is bad where it is not.
func (r *resolver) letNamed(n *syntax.Name) value {
	text, ok := n.Plain()
	if !ok {
		r.errorAt(n.Span, "wants-let", "here stands the name of a let", "", "")
		return badValue
	}
	if e, ok := r.lets[text]; ok {
		return e.val
	}
	if r.broken[text] {
		return badValue
	}
	if s, ok := r.top[text]; ok {
		r.errorAt(n.Span, "wants-let", fmt.Sprintf("%s is %s, not a let", text, article(s.kind)), "", "", related(s.span, "said here"))
		return badValue
	}
	r.errorAt(n.Span, "unknown-name", "no let is called "+text, "", nearest(r, text, r.lets))
	return badValue
}

// like compiles a list of values that must have the dimension of a let; the unit
// of the last holds for all.
func (r *resolver) like(let value, what string, list ...syntax.Expr) ([]float64, bool) {
	return r.likeIn(let, what, syntax.SharedUnit(list...), list)
}

// likeIn compiles values of the dimension of a let; shared is a unit for those
// without one, or nil.
func (r *resolver) likeIn(let value, what string, shared *syntax.Unit, list []syntax.Expr) ([]float64, bool) {
	sc := *plain
	sc.shared = shared
	ok := !let.bad
	var out []float64
	for _, e := range list {
		v := r.compile(e, &sc)
		if v.bad || let.bad {
			ok = false
			continue
		}
		if v = r.inRange(r.check(v, e, same(let.dim), what), e, anything, what); v.bad {
			ok = false
			continue
		}
		out = append(out, r.num(v.prog))
	}
	return out, ok
}

// over compiles NAME from A to B.
func (r *resolver) over(name *syntax.Name, from, to syntax.Expr) (scenario.Over, bool) {
	ends, ok := r.likeIn(r.letNamed(name), "the range of "+clip(name), nil, []syntax.Expr{from, to})
	if ok && !(ends[0] < ends[1]) {
		r.errorAt(from.Place().To(to.Place()), "empty-range", "a range runs from its lower to its higher end", "", "")
		ok = false
	}
	if !ok {
		return scenario.Over{}, false
	}
	return scenario.Over{Let: r.tmpl.LetNamed(name.Parts[0].Text), From: ends[0], To: ends[1], Shown: writtenUnit(to, from)}, true
}

// vary compiles one statement of a sweep.
func (r *resolver) vary(s *syntax.Vary) (out scenario.Vary, ok bool) {
	let := r.letNamed(s.Name)
	what := "the range of " + clip(s.Name)
	if s.Draw != nil {
		out, ok = r.draw(s.Draw, let, what)
	} else if s.Steps != nil {
		var ends []float64
		ends, ok = r.likeIn(let, what, nil, []syntax.Expr{s.From, s.To})
		if ok && ends[0] == ends[1] {
			r.errorAt(s.From.Place().To(s.To.Place()), "empty-range", "a range has two different ends", "", "")
			ok = false
		} else if ok && s.Geometric && !(ends[0] > 0 && ends[1] > 0) {
			r.errorAt(s.From.Place().To(s.To.Place()), "not-positive", "geometric steps want both ends greater than zero", "", "")
			ok = false
		}
		n, counted := r.order(s.Steps, "steps")
		if ok = ok && counted; ok {
			out.Values = steps(ends[0], ends[1], n, s.Geometric)
		}
	} else {
		out.Values, ok = r.like(let, what, s.Through...)
	}
	if !ok {
		return out, false
	}
	out.Let, out.Shown = r.tmpl.LetNamed(s.Name.Parts[0].Text), writtenUnit(append([]syntax.Expr{s.To, s.From}, s.Through...)...)
	return out, true
}

// steps are the values of n equal steps, n + 1 of them, both ends included.
func steps(from, to float64, n int, geometric bool) []float64 {
	out := make([]float64, n+1)
	for i := range out {
		share := float64(i) / float64(n)
		out[i] = from + (to-from)*share
		if geometric {
			out[i] = from * math.Pow(to/from, share)
		}
	}
	out[n] = to
	return out
}

// distributions are the words of a drawn let.
var distributions = map[string]scenario.Distribution{
	"normal": scenario.DrawNormal, "uniform": scenario.DrawUniform, "lognormal": scenario.DrawLognormal, "one_of": scenario.DrawOneOf,
}

// draw compiles a distribution.
func (r *resolver) draw(c *syntax.Call, let value, what string) (out scenario.Vary, ok bool) {
	name := c.Name.Text
	kind, known := distributions[name]
	switch {
	case !known:
		r.errorAt(c.Name.Span, "unknown-word", "no distribution is called "+name, "", diag.Nearest(name, []string{"normal", "uniform", "lognormal", "one_of"}))
		return out, false
	case kind != scenario.DrawOneOf && len(c.Args) != 2 || len(c.Args) == 0 || !r.plainArgs(c):
		r.errorAt(c.Span, "wrong-arguments", name+" takes two values, one_of any number", "", "")
		return out, false
	}
	var list []syntax.Expr
	for _, a := range c.Args {
		list = append(list, a.Value)
	}
	out.Draw = kind
	if kind == scenario.DrawOneOf || kind == scenario.DrawUniform {
		out.Values, ok = r.like(let, what, list...)
		if ok && kind == scenario.DrawUniform && !(out.Values[0] < out.Values[1]) {
			r.errorAt(c.Span, "empty-range", "a range runs from its lower to its higher end", "", "")
			ok = false
		}
		return out, ok
	}
	if unitOf := syntax.SharedUnit(list...); unitOf != nil && !isPercent(unitOf) {
		out.Values, ok = r.like(let, what, list...)
	} else {
		out.Values, ok = r.like(let, what, list[0])
		spread := r.spread(list[1])
		switch {
		case !ok || spread.bad:
			return out, false
		case spread.dim == let.dim && !(spread.percent && !let.dim.IsNumber()):
			out.Values = append(out.Values, r.num(spread.prog))
		case spread.percent:
			out.Values = append(out.Values, r.num(spread.prog)*math.Abs(out.Values[0]))
		default:
			r.errorAt(list[1].Place(), "unit-mismatch", "the spread of "+describe(let)+" is "+let.dim.Name()+" or a share in %", "this is "+describe(spread), "")
			return out, false
		}
	}
	if ok && !(out.Values[1] > 0) || ok && kind == scenario.DrawLognormal && !(out.Values[0] > 0) {
		r.errorAt(c.Span, "not-positive", "a distribution wants a spread above zero, and lognormal a mean above zero", "", "")
		ok = false
	}
	return out, ok
}

func isPercent(u *syntax.Unit) bool { return u.Text == "%" }

func (r *resolver) sample(s *syntax.Sample) {
	sound := true
	whole := func(e syntax.Expr, what string, least, most float64) float64 {
		if e == nil {
			return 1
		}
		v := r.want(e, plain, unit.Number, what)
		if v.bad {
			sound = false
			return 0
		}
		x := r.num(v.prog)
		if x != math.Trunc(x) || x < least || x > most {
			r.errorAt(e.Place(), "out-of-range", fmt.Sprintf("%s is a whole number from %.0f to %.0f", what, least, most), "", "")
			sound = false
		}
		return x
	}
	count := whole(s.Count, "the number of samples", 2, 1e6)
	seed := whole(s.Seed, "a seed", 0, 1<<53)
	if sound {
		r.tmpl.Sample = &scenario.Sample{Count: int(count), Seed: uint64(seed)}
	}
}

// meet compiles `meet EXPR with EXPR, … over NAME from A to B`: a question for
// each number of a range, on either side.
func (r *resolver) meet(s *syntax.Meet) {
	over, ok := r.over(s.Over, s.From, s.To)
	total := 1
	for pick := 0; pick < total; pick++ {
		for _, e := range s.With {
			a := &asked{expand: true, pick: pick}
			v := r.compile(s.Value, measured(a, "a value to meet"))
			w := r.compile(e, measured(a, "a value to meet"))
			if v.bad || w.bad || !r.alike(e, s.Value, e, v, w, "equal") {
				ok = false
				continue
			}
			if n, even := r.rangeCount(a); !even {
				return
			} else if n > total {
				total = n
			}
			if !ok {
				continue
			}
			r.tmpl.Meets = append(r.tmpl.Meets, scenario.Meet{
				Source: pickedText(s.Value, a), With: pickedText(e, a), Unit: siText(v, a), Over: over, Value: v.prog, Other: w.prog, Measures: a.list,
			})
		}
		if !ok {
			return
		}
	}
}
