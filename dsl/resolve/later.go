package resolve

import (
	"fmt"
	"math"

	"github.com/tautspan/tautspan/dsl/diag"
	"github.com/tautspan/tautspan/dsl/syntax"
	"github.com/tautspan/tautspan/dsl/unit"
)

// resolveLater checks the statements that other commands will answer. They are
// kept out of the template.
func (r *resolver) resolveLater() {
	for _, s := range r.statements {
		switch s := s.(type) {
		case *syntax.Vary:
			r.vary(s)
			r.later(s.Span, "vary", "sweep")
		case *syntax.Sample:
			r.sample(s)
			r.later(s.Span, "sample", "sweep")
		case *syntax.Best:
			v := r.compile(s.Value, measured(&asked{}, "a value to be best"))
			_ = v
			r.over(s.Over, s.From, s.To)
			r.later(s.Span, "best", "sweep")
		case *syntax.Meet:
			r.meet(s)
			r.later(s.Span, "meet", "sweep")
		}
	}
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

// over checks NAME from A to B.
func (r *resolver) over(name *syntax.Name, from, to syntax.Expr) {
	ends, ok := r.likeIn(r.letNamed(name), "the range of "+clip(name), nil, []syntax.Expr{from, to})
	if ok && !(ends[0] < ends[1]) {
		r.errorAt(from.Place().To(to.Place()), "empty-range", "a range runs from its lower to its higher end", "", "")
	}
}

func (r *resolver) vary(s *syntax.Vary) {
	let := r.letNamed(s.Name)
	what := "the range of " + clip(s.Name)
	switch {
	case s.Draw != nil:
		r.draw(s.Draw, let, what)
	case s.Steps != nil:
		ends, ok := r.likeIn(let, what, nil, []syntax.Expr{s.From, s.To})
		if ok && ends[0] == ends[1] {
			r.errorAt(s.From.Place().To(s.To.Place()), "empty-range", "a range has two different ends", "", "")
		} else if ok && s.Geometric && !(ends[0] > 0 && ends[1] > 0) {
			r.errorAt(s.From.Place().To(s.To.Place()), "not-positive", "geometric steps want both ends greater than zero", "", "")
		}
		r.order(s.Steps, "steps")
	default:
		r.like(let, what, s.Through...)
	}
}

// draw checks a distribution.
func (r *resolver) draw(c *syntax.Call, let value, what string) {
	name := c.Name.Text
	two := name == "normal" || name == "uniform" || name == "lognormal"
	switch {
	case !two && name != "one_of":
		r.errorAt(c.Name.Span, "unknown-word", "no distribution is called "+name, "", diag.Nearest(name, []string{"normal", "uniform", "lognormal", "one_of"}))
		return
	case two && len(c.Args) != 2 || len(c.Args) == 0 || !r.plainArgs(c):
		r.errorAt(c.Span, "wrong-arguments", name+" takes two values, one_of any number", "", "")
		return
	}
	var list []syntax.Expr
	for _, a := range c.Args {
		list = append(list, a.Value)
	}
	if name == "normal" || name == "lognormal" {
		if unitOf := syntax.SharedUnit(list...); unitOf != nil && !isPercent(unitOf) {
			r.like(let, what, list...)
		} else {
			_, ok := r.like(let, what, list[0])
			if spread := r.spread(list[1]); ok && !spread.bad && spread.dim != let.dim && !spread.percent {
				r.errorAt(list[1].Place(), "unit-mismatch", "the spread of "+describe(let)+" is "+let.dim.Name()+" or a share in %", "this is "+describe(spread), "")
			}
		}
		return
	}
	ends, ok := r.like(let, what, list...)
	if ok && name == "uniform" && !(ends[0] < ends[1]) {
		r.errorAt(c.Span, "empty-range", "a range runs from its lower to its higher end", "", "")
	}
}

func isPercent(u *syntax.Unit) bool { return u.Text == "%" }

func (r *resolver) sample(s *syntax.Sample) {
	whole := func(e syntax.Expr, what string, least, most float64) {
		if e == nil {
			return
		}
		v := r.want(e, plain, unit.Number, what)
		if v.bad {
			return
		}
		if x := r.num(v.prog); x != math.Trunc(x) || x < least || x > most {
			r.errorAt(e.Place(), "out-of-range", fmt.Sprintf("%s is a whole number from %.0f to %.0f", what, least, most), "", "")
		}
	}
	whole(s.Count, "the number of samples", 1, 1e7)
	whole(s.Seed, "a seed", 0, 1<<53)
}

func (r *resolver) meet(s *syntax.Meet) {
	v := r.compile(s.Value, measured(&asked{expand: true}, "a value to meet"))
	for _, e := range s.With {
		w := r.compile(e, measured(&asked{expand: true}, "a value to meet"))
		if !v.bad && !w.bad {
			r.alike(e, s.Value, e, v, w, "equal")
		}
	}
	r.over(s.Over, s.From, s.To)
}
