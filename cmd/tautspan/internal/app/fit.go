package app

import (
	"context"
	"errors"
	"fmt"
	"math"
	"strings"

	"github.com/tautspan/tautspan/dsl/diag"
	"github.com/tautspan/tautspan/engine/doubt"
	"github.com/tautspan/tautspan/engine/fit"
	"github.com/tautspan/tautspan/engine/measure"
	"github.com/tautspan/tautspan/engine/scenario"
	"github.com/tautspan/tautspan/engine/statics"
)

// FitWant is what a fit is asked beside the scenario.
type FitWant struct {
	Out   string // result folder; "": none
	Force bool
	Write bool // put what was found into the text of the scenario
}

// Fit seeks the lets that explain the readings, and judges the requirements on
// the line that they make.
func (a *App) Fit(ctx context.Context, in Input, want FitWant) (*FitDoc, Status, error) {
	l, err := a.load("fit", in)
	if err != nil {
		return nil, Outside, err
	}
	l.bind()
	l.needLine()
	doc := emptyFit()
	if want.Out != "" && !l.failed() {
		if err := permitted(want.Out, l.head.Scenario.File, want.Force); err != nil {
			return nil, Outside, err
		}
	}
	if !l.failed() {
		if err := l.fit(ctx, in, doc, want); err != nil {
			if ctx.Err() != nil {
				doc.Head = l.head
				return doc, Interrupted, nil
			}
			return nil, Defect, err
		}
	}
	doc.Head = l.head
	if l.failed() {
		return doc, BadInput, nil
	}
	if want.Out != "" {
		doc.ResultDir = want.Out
		if err := l.writeFit(doc, want); err != nil {
			return nil, Outside, err
		}
	}
	if doc.Verdict == "met" || doc.Verdict == "fitted" {
		return doc, Done, nil
	}
	return doc, NotAsAsked, nil
}

func (l *loaded) fit(ctx context.Context, in Input, doc *FitDoc, want FitWant) error {
	records, err := l.records(in, doc)
	if err != nil || l.failed() {
		return err
	}
	p, err := fit.New(l.compiled.Template, records...)
	var res *fit.Result
	if err == nil {
		res, err = p.Solve(ctx)
	}
	if err != nil {
		return l.refuseFit(ctx, err)
	}
	doc.Exact = append(doc.Exact, p.Exact()...)
	if f := l.compiled.Template.Fit; f != nil {
		for _, u := range f.Uses {
			if u.History {
				doc.Notes = append(doc.Notes, "history is left out: this version does not fit records step by step")
			}
		}
	}
	l.fitted(doc, res)
	if err := l.judgeFit(ctx, doc, res); err != nil {
		return err
	}
	l.forceTable(ctx, doc, res.Best)
	if want.Write {
		l.putIn(doc, res.Best)
	}
	return nil
}

// refuseFit turns a fit that cannot be made into a diagnostic; other errors are
// passed on.
func (l *loaded) refuseFit(ctx context.Context, err error) error {
	var cannot *fit.Error
	var path *scenario.PathError
	switch {
	case ctx.Err() != nil:
		return ctx.Err()
	case errors.As(err, &cannot):
		span, ok := l.compiled.PathSpans.Find(cannot.Path)
		if !ok {
			span = diag.Span{File: l.compiled.Sources[0].File}
		}
		l.note(diag.List{{Code: cannot.Code, Severity: diag.Error, Span: span, Summary: cannot.What, Hint: cannot.Hint}})
	case errors.As(err, &path):
		l.refuse(err)
	default:
		return err
	}
	return nil
}

// judgeFit answers requirements and collects of the fitted line with the doubt
// that the fit leaves. Where several solutions stand, a requirement is decided
// only if it is the same in all.
func (l *loaded) judgeFit(ctx context.Context, doc *FitDoc, res *fit.Result) error {
	answers, err := l.answersOf(ctx, res.Best)
	if err != nil {
		return err
	}
	for i := range answers.Requirements {
		row := requirementRow(&answers.Requirements[i])
		for k := range l.compiled.Template.Requires {
			if &l.compiled.Template.Requires[k] == answers.Requirements[i].Of {
				row.of = k
			}
		}
		doc.Requirements = append(doc.Requirements, row)
	}
	doc.Collected = collectedRows(answers.Collected)
	for _, w := range answers.Waiting {
		doc.Notes = append(doc.Notes, w+" waits for a run")
	}
	waiting := len(answers.Requirements) < len(l.compiled.Template.Requires)
	for k, s := range res.Alternatives {
		other, err := l.answersOf(ctx, s)
		if err != nil {
			return err
		}
		for i := range other.Requirements {
			row := requirementRow(&other.Requirements[i])
			doc.Alternatives[k].Requirements = append(doc.Alternatives[k].Requirements, row)
			if mine := &doc.Requirements[i]; mine.Verdict != row.Verdict && mine.Verdict != "undecided" {
				mine.Settle = joinSentences(fmt.Sprintf("another solution that explains the readings about as well would be %s: know more of the sought lets beforehand, or take a reading that tells the solutions apart", row.Verdict), mine.Settle)
				mine.Verdict = "undecided"
			}
		}
	}
	doc.Verdict = fitVerdict(doc, waiting)
	doc.Cautions = append(doc.Cautions, l.fitCautions(res.Best)...)
	return nil
}

// fitVerdict is the worst of a fit: a requirement, one that waits for a run, an
// ambiguous or undecided let.
func fitVerdict(doc *FitDoc, waiting bool) string {
	rank := []string{"fitted", "met", "undecided", "ambiguous", "not met"}
	worst := 0
	see := func(v string) {
		for i, known := range rank {
			if v == known {
				worst = max(worst, i)
			}
		}
	}
	for i := range doc.Requirements {
		see(doc.Requirements[i].Verdict)
	}
	if waiting {
		see("undecided")
	}
	if len(doc.Alternatives) > 0 {
		see("ambiguous")
	}
	if len(doc.Requirements) == 0 {
		for i := range doc.Unknowns {
			if !doc.Unknowns[i].Decided || doc.Unknowns[i].AtBound {
				see("undecided")
			}
		}
	}
	return rank[worst]
}

// answersOf judges the scenario's questions on the line of one solution.
func (l *loaded) answersOf(ctx context.Context, s *fit.Solution) (*measure.Answers, error) {
	o := l.measuring()
	o.Joint = s.Joint()
	session, err := measure.New(l.compiled.Template, nil, o)
	if err != nil {
		return nil, err
	}
	return session.Answer(ctx, nil)
}

// fitCautions are the safety notes of a survey, with the tension as fitted.
func (l *loaded) fitCautions(s *fit.Solution) []CautionNote {
	net, err := l.compiled.Template.Bind(s.Values)
	if err != nil {
		net = l.net
	}
	return l.surveyCautions(net)
}

// surveyCautions are those of the site and of the lines, each kind once but for
// the energy of every line.
func (l *loaded) surveyCautions(net *scenario.Network) []CautionNote {
	out := l.siteCautions()
	said := map[string]bool{}
	for _, n := range out {
		said[n.Code] = true
	}
	for _, n := range cautions(net, formatEnergy) {
		if !said[n.Code] {
			out = append(out, n)
		}
	}
	return out
}

// siteCautions are the safety notes of readings on a line, and of what follows
// from them.
func (l *loaded) siteCautions() []CautionNote {
	notes := []CautionNote{
		{"changing-tension", "Never slacken or stress a line on the strength of this report alone: temporary supports or a second load path, step by step, by a method statement; neighbours take up what one line loses."},
		{"height", "Do not climb a pole, mast or pylon for a reading before it is checked that it takes the added and unbalanced load; readings from the ground are to be preferred. No work under iced or galloping lines, in lightning or in high wind."},
		{"live-parts", "Treat a conductor, ground wire or contact wire as energised until authorised people have switched, tested and grounded it; parallel and crossing lines can carry induced voltage. No metal tape, rope or sensor lead near live parts."},
		{"lock-out", "Do not strike, pluck or clamp a line of a hoist, lift, cableway or machine before the drive is locked out and the load is secured. A soft mallet and small taps, away from sockets, insulators, sheathing and fibre."},
	}
	return notes
}

// forceTable is one row a line that was read.
func (l *loaded) forceTable(ctx context.Context, doc *FitDoc, s *fit.Solution) {
	net, err := l.compiled.Template.Bind(s.Values)
	if err != nil {
		return
	}
	tensions, lets := l.figuresOf(ctx, s)
	for i := range doc.Unknowns {
		if lets[i] != nil {
			doc.Unknowns[i].Parts = partsOf(lets[i])
		}
	}
	for i := range net.Lines {
		modes, read := 0, false
		for k := range s.Residuals {
			if r := &s.Residuals[k]; r.Line == i {
				read = true
				if r.Mode > 0 && r.Kind.Unit() == "Hz" {
					modes++
				}
			}
		}
		if !read {
			continue
		}
		row := FitLine{Line: net.Lines[i].Name, Mark: l.markOf(i), Length: statics.Length(&net.Lines[i]), Modes: modes, Where: "mean", Parts: []FitPart{}}
		row.Temperature, row.PerKelvin = warmth(&net.Lines[i])
		if n := tensions[i]; n != nil {
			row.take(n)
		}
		l.designOf(doc, i, &row)
		doc.Lines = append(doc.Lines, row)
	}
}

// take enters a tension with its interval, which is symmetric in the logarithm
// like that of the lets that were found.
func (f *FitLine) take(n *doubt.Number) {
	if !n.Exists() || !(n.Value > 0) {
		return
	}
	factor := math.Exp(doubt.TwoSided * n.InputU / n.Value)
	f.Tension, f.Low95, f.High95 = finite(n.Value), finite(n.Value/factor), finite(n.Value*factor)
	f.Parts = partsOf(n)
}

// warmth is the temperature at which a line's tension holds, and how the tension
// changes with it, by half a degree to both sides; nil where the scenario does
// not say enough.
func warmth(line *scenario.Line) (at, perKelvin *float64) {
	if !line.Warm {
		return nil, nil
	}
	up, err1 := statics.AtTemperature(line, line.Temperature+0.5)
	down, err2 := statics.AtTemperature(line, line.Temperature-0.5)
	if err1 != nil || err2 != nil {
		return finite(line.Temperature), nil
	}
	return finite(line.Temperature), finite(statics.MeanTension(&up) - statics.MeanTension(&down))
}

// designOf takes design tension, verdict and action from the first requirement
// on the tension of a line.
func (l *loaded) designOf(doc *FitDoc, line int, row *FitLine) {
	row.Action = "say what is required of it"
	for i := range doc.Requirements {
		r := &doc.Requirements[i]
		q := &l.compiled.Template.Requires[r.of]
		if q.Unit != "N" || !l.isTensionOf(q, line) {
			continue
		}
		if len(q.Measures) == 1 && q.Measures[0].HasPlace {
			row.take(&r.Value)
			row.Where = strings.TrimSuffix(strings.TrimPrefix(q.Measures[0].Source, "tension("), ")")
		}
		if r.Limit != nil && r.Upper != nil && q.Relation == scenario.Within {
			design := (*r.Limit + *r.Upper) / 2
			row.Design = &design
		} else if r.Limit != nil {
			row.Design = r.Limit
		}
		if row.Design != nil && row.Tension != nil && *row.Design != 0 {
			row.Ratio = finite(*row.Tension / *row.Design)
		}
		row.Verdict = r.Verdict
		switch r.Verdict {
		case "met":
			row.Action = "none by this requirement"
		case "not met":
			row.Action = "bring before the responsible engineer"
		default:
			row.Action = "read again, then decide"
		}
		return
	}
}

// isTensionOf tells whether a requirement is about the tension of a line: its
// own measure, or a let that is the line's tension.
func (l *loaded) isTensionOf(q *scenario.Require, line int) bool {
	for _, m := range q.Measures {
		if m.Kind == scenario.LineTension && m.Line == line {
			return len(q.Measures) == 1
		}
	}
	used := map[int]bool{}
	q.Value.LetsUsed(used)
	if len(q.Measures) > 0 || len(used) != 1 {
		return false
	}
	pulls := map[int]bool{}
	for _, s := range l.compiled.Template.Model.Lines[line].Segments {
		s.Tension.LetsUsed(pulls)
	}
	for i := range used {
		return pulls[i]
	}
	return false
}
