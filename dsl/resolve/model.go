package resolve

import (
	"fmt"
	"strings"

	"github.com/tautspan/tautspan/dsl/diag"
	"github.com/tautspan/tautspan/dsl/syntax"
	"github.com/tautspan/tautspan/dsl/unit"
	"github.com/tautspan/tautspan/engine/formula"
	"github.com/tautspan/tautspan/engine/scenario"
)

// resolveModel compiles what is there and what happens.
func (r *resolver) resolveModel() {
	for _, s := range r.statements {
		if law, ok := s.(*syntax.Law); ok {
			if e := r.laws[law.Name.Text]; e != nil && e.stmt == law {
				r.resolveLaw(e)
			}
		}
	}
	for _, e := range r.stockOrder {
		r.resolveStock(e)
	}
	r.resolveLines()
	for _, s := range r.statements {
		switch s := s.(type) {
		case *syntax.Tie:
			r.resolveTie(s)
		case *syntax.Excite:
			r.resolveExcite(s)
		case *syntax.Watch:
			r.resolveWatch(s)
		}
	}
	r.resolveRun()
}

func (r *resolver) resolveTie(t *syntax.Tie) {
	path := "tie." + t.Name.Text
	r.path(path, t.Name.Span)
	from, fok := r.place(t.From, "a tie")
	to, tok := r.place(t.To, "a tie")
	r.path(path+".from", t.From.Span)
	r.path(path+".to", t.To.Span)
	out := scenario.TieOf[formula.Program]{Name: t.Name.Text, From: from, To: to}
	said := map[string]diag.Span{}
	for i := range t.Properties {
		p := &t.Properties[i]
		word := p.Word.Text
		if before, ok := said[word]; ok {
			r.errorAt(p.Word.Span, "said-twice", t.Name.Text+" says "+word+" already", "", "", related(before, "first said here"))
			continue
		}
		said[word] = p.Word.Span
		switch word {
		case "spring":
			out.Spring = r.quantity(p.Value, unit.Spring, notNegative, "spring", path+".spring")
			if p.Loss != nil {
				out.SpringLoss = r.quantity(p.Loss, unit.Share, notNegative, "a loss factor", "")
			}
		case "dashpot":
			out.Dashpot = r.quantity(p.Value, unit.Dashpot, notNegative, "dashpot", path+".dashpot")
			if p.Through != nil {
				out.Bracket = true
				out.Through = r.quantity(p.Through, unit.Spring, positive, "the give of a bracket", path+".through")
			}
		case "mass":
			out.Mass = r.quantity(p.Value, unit.Mass, notNegative, "mass", path+".mass")
		case "slack":
			out.Slack = true
		default:
			r.errorAt(p.Span, "misplaced", word+" does not stand at a tie", "", "")
		}
	}
	if said["spring"].IsZero() && said["dashpot"].IsZero() {
		r.errorAt(t.Name.Span, "missing-property", "the tie "+t.Name.Text+" says neither a spring nor a dashpot", "a rigid tie would make two places one", "spring 10 MN/m")
		return
	}
	if fok && tok && from.Line == to.Line && from.Node >= 0 && from.Node == to.Node {
		r.errorAt(t.To.Span, "wrong-place", "a tie joins two places", "both ends are at the same one", "")
		return
	}
	if fok && tok && r.heldAt(from) && r.heldAt(to) {
		r.warnAt(t.Name.Span, "no-effect", "the tie "+t.Name.Text+" does nothing", "both its ends are held in place", "")
	}
	if fok && tok {
		r.tmpl.Model.Ties = append(r.tmpl.Model.Ties, out)
	}
}

// heldAt tells whether a place does not move.
func (r *resolver) heldAt(p placeOf) bool {
	return p.Node >= 0 && p.Node < len(r.tmpl.Model.Lines[p.Line].Nodes) && r.tmpl.Model.Lines[p.Line].Nodes[p.Node].Fixed
}

// quantityWords are the quantities that a watch records.
var quantityWords = []string{"displacement", "velocity", "acceleration", "slope", "force", "moment", "tension"}

func (r *resolver) resolveWatch(w *syntax.Watch) {
	if index, ok := r.watches[w.Name.Text]; !ok || index >= 0 || r.top[w.Name.Text].span != w.Name.Span {
		return // a second one of the name, reported already
	}
	path := "watch." + w.Name.Text
	r.path(path, w.Name.Span)
	out := scenario.WatchOf[formula.Program]{Name: w.Name.Text, Along: w.Along}
	ok := true
	if w.Along {
		out.Span, ok = r.span(w.Spot, "watch along", false)
	} else {
		out.At, ok = r.place(w.Spot, "watch at")
	}
	r.path(path+".at", w.Spot.Span)
	said := map[string]bool{}
	for _, q := range w.Quantities {
		quantity, known := scenario.QuantityNamed(q.Text)
		switch {
		case !known:
			r.errorAt(q.Span, "unknown-word", "a watch cannot record "+q.Text, "", diag.Nearest(q.Text, quantityWords))
			ok = false
		case said[q.Text]:
			r.errorAt(q.Span, "said-twice", "this watch records "+q.Text+" already", "", "")
			ok = false
		default:
			if quantity == scenario.Moment && !r.watchedBends(&out) {
				r.warnAt(q.Span, "no-effect", "the moment is zero everywhere", "there is no bending stiffness", "")
			}
			said[q.Text] = true
			out.Quantities = append(out.Quantities, quantity)
		}
	}
	if w.Mass != nil {
		out.Mass = r.quantity(w.Mass, unit.Mass, notNegative, "the mass of a sensor", path+".mass")
		if w.Along {
			r.errorAt(w.Mass.Place(), "misplaced", "a sensor with a mass stands at a point", "this watch goes along a stretch", "")
			ok = false
		}
	}
	if ok {
		r.watches[w.Name.Text] = len(r.tmpl.Model.Watches)
		r.tmpl.Model.Watches = append(r.tmpl.Model.Watches, out)
	} else {
		r.watches[w.Name.Text] = faultyWatch
	}
}

// watchedBends tells whether a watched place or stretch has bending, or is not
// known well enough to say.
func (r *resolver) watchedBends(w *scenario.WatchOf[formula.Program]) bool {
	line, from, to := w.At.Line, w.At.Segment, w.At.Segment
	if w.Along {
		line, from, to = w.Span.Line, w.Span.Segment, w.Span.Segment
	} else if w.At.Node >= 0 {
		from, to = w.At.Node-1, w.At.Node
	}
	if line < 0 || line >= len(r.tmpl.Model.Lines) || r.lineOrder[line].bad {
		return true
	}
	segments := r.tmpl.Model.Lines[line].Segments
	if w.Along && w.Span.Segment < 0 {
		from, to = 0, len(segments)-1
	}
	for i := max(from, 0); i <= to && i < len(segments); i++ {
		if mayBend(segments[i].Bending) {
			return true
		}
	}
	return false
}

// faultyWatch marks a watch whose mistake has been reported.
const faultyWatch = -2

// resolveRun compiles the run statement; a scenario has at most one.
func (r *resolver) resolveRun() {
	var before diag.Span
	for _, s := range r.statements {
		run, ok := s.(*syntax.Run)
		if !ok {
			continue
		}
		if !before.IsZero() {
			r.errorAt(firstWord(run.Span), "said-twice", "a scenario has one run", "", "", related(before, "first said here"))
			continue
		}
		before = firstWord(run.Span)
		r.path("run", before)
		r.runItems(run)
	}
}

func (r *resolver) runItems(run *syntax.Run) {
	out := &r.tmpl.Model.Run
	said := map[string]diag.Span{}
	var forOK, everyOK bool
	var everyAt diag.Span
	for i := range run.Items {
		it := &run.Items[i]
		key := it.Word.Text
		if key == "limit" {
			key += " " + it.Choice.Text
		}
		if before, ok := said[key]; ok {
			r.errorAt(it.Word.Span, "said-twice", "this run says "+key+" already", "", "", related(before, "first said here"))
			continue
		}
		said[key] = it.Span
		switch it.Word.Text {
		case "for":
			out.For, forOK = r.positiveOf(it.Value, unit.Time, "for", "run.for")
			out.ForGiven = true
		case "every":
			out.Every, everyOK = r.positiveOf(it.Value, unit.Time, "every", "run.every")
			out.EveryGiven = true
			everyAt = it.Value.Place()
		case "agree":
			out.Agree, _ = r.positiveOf(it.Value, unit.Share, "agree", "run.agree")
			out.AgreeGiven = true
			r.agreeRange(it.Value, out.Agree)
		case "solvers":
			r.solvers(it)
		case "effort":
			r.effort(it)
		case "limit":
			r.limit(it)
		}
	}
	if forOK && everyOK {
		r.rows(everyAt)
	}
}

// positiveOf is quantity with whether it is sound.
func (r *resolver) positiveOf(e syntax.Expr, k unit.Kind, subject, path string) (formula.Program, bool) {
	v := r.inRange(r.want(e, plain, k, subject), e, positive, subject)
	r.path(path, e.Place())
	return v.prog, !v.bad
}

func (r *resolver) agreeRange(e syntax.Expr, p formula.Program) {
	n, ok := literal(e)
	switch x := r.num(p); {
	case x >= 1 && ok && n.Unit == nil:
		r.errorAt(e.Place(), "out-of-range", "agree wants a share below 100 %", "this is "+unit.Digits(100*x, 4)+" %", clip(e)+" %")
	case x >= 1:
		r.errorAt(e.Place(), "out-of-range", "agree wants a share below 100 %", "", "agree 1 %")
	case x > 0 && x < 1e-8:
		r.warnAt(e.Place(), "unlikely-agree", "no solver agrees so closely", "rounding alone makes more of a difference", "agree 0.1 %")
	}
}

func (r *resolver) rows(at diag.Span) {
	run := &r.tmpl.Model.Run
	duration, every := r.num(run.For), r.num(run.Every)
	rows := duration/every + 1
	switch {
	case rows > scenario.MaxRows:
		r.errorAt(at, "too-many-rows", fmt.Sprintf("this asks for %s rows, and %d is the most", unit.Digits(rows, 4), scenario.MaxRows), "", "make `every` longer or `for` shorter")
	case every > duration:
		r.errorAt(at, "too-few-rows", "`every` is longer than `for`", "there would be no record", "")
	}
}

func (r *resolver) solvers(it *syntax.RunItem) {
	said := map[string]bool{}
	for _, s := range it.Solvers {
		switch {
		case s.Quoted && said[s.Text]:
			r.errorAt(s.Span, "said-twice", "the solver "+s.Text+" is listed already", "", "")
		case s.Quoted:
			if _, ok := r.plugin(s.Span, s.Text, "solver"); ok {
				r.tmpl.Model.Run.Foreign = append(r.tmpl.Model.Run.Foreign, s.Text)
			}
		case said[s.Text]:
			r.errorAt(s.Span, "said-twice", "the solver "+s.Text+" is listed already", "", "")
		case !contains(r.opts.Solvers, s.Text):
			r.errorAt(s.Span, "unknown-solver", "no solver is called "+s.Text, "there are "+strings.Join(r.opts.Solvers, ", "), diag.Nearest(s.Text, r.opts.Solvers))
		default:
			r.tmpl.Model.Run.Solvers = append(r.tmpl.Model.Run.Solvers, s.Text)
		}
		said[s.Text] = true
	}
}

func (r *resolver) effort(it *syntax.RunItem) {
	switch it.Choice.Text {
	case "quick":
		r.tmpl.Model.Run.Effort = scenario.Quick
	case "normal":
		r.tmpl.Model.Run.Effort = scenario.Normal
	case "thorough":
		r.tmpl.Model.Run.Effort = scenario.Thorough
	default:
		r.errorAt(it.Choice.Span, "unknown-word", "effort is quick, normal or thorough", "", diag.Nearest(it.Choice.Text, []string{"quick", "normal", "thorough"}))
	}
}

func (r *resolver) limit(it *syntax.RunItem) {
	run := &r.tmpl.Model.Run
	switch it.Choice.Text {
	case "memory":
		run.LimitMemory, _ = r.positiveOf(it.Value, unit.Memory, "limit memory", "run.limit")
	case "work":
		run.LimitWork, _ = r.positiveOf(it.Value, unit.Number, "limit work", "run.limit")
	case "time":
		run.LimitTime, _ = r.positiveOf(it.Value, unit.Time, "limit time", "run.limit")
	default:
		r.errorAt(it.Choice.Span, "unknown-word", "a limit is of memory, work or time", "", diag.Nearest(it.Choice.Text, []string{"memory", "work", "time"}))
	}
}

func contains(list []string, word string) bool {
	for _, w := range list {
		if w == word {
			return true
		}
	}
	return false
}
