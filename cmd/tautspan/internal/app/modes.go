package app

import (
	"context"
	"errors"
	"fmt"
	"math"

	"github.com/tautspan/tautspan/dsl/diag"
	"github.com/tautspan/tautspan/engine/doubt"
	"github.com/tautspan/tautspan/engine/measure"
	"github.com/tautspan/tautspan/engine/mesh"
	"github.com/tautspan/tautspan/engine/modal"
	"github.com/tautspan/tautspan/engine/scenario"
)

// ModesWant is how many natural vibrations are asked for.
type ModesWant struct {
	Count  int
	Below  float64 // Hz; 0: no limit
	Shapes bool
}

// Modes lists the natural vibrations of a scenario with the doubt that its
// inputs leave.
func (a *App) Modes(ctx context.Context, in Input, want ModesWant) (*ModesDoc, Status, error) {
	l, err := a.load("modes", in)
	if err != nil {
		return nil, Outside, err
	}
	l.bind()
	l.needLine()
	doc := &ModesDoc{Modes: []ModeRow{}, Overdamped: []OverRow{}, Notes: []string{}, Collected: []Collected{}}
	if !l.failed() {
		l.modes(ctx, doc, want)
	}
	doc.Head = l.head
	switch {
	case ctx.Err() != nil:
		return doc, Interrupted, nil
	case l.failed():
		return doc, BadInput, nil
	}
	return doc, Done, nil
}

func (l *loaded) modes(ctx context.Context, doc *ModesDoc, want ModesWant) {
	res, err := modal.Find(l.mesh, modal.Want{Count: want.Count, Below: want.Below, Shapes: want.Shapes})
	if err != nil {
		l.noModes(err)
		return
	}
	doc.CompleteBelow = finite(res.CompleteBelow)
	doc.Notes = append(append(doc.Notes, res.Notes...), l.leftToSweep()...)
	numbers := l.modeDoubts(ctx, res, want)
	for i := range res.Modes {
		m := &res.Modes[i]
		row := ModeRow{
			Line: l.lineName(m.Line), Number: m.Number, Frequency: m.Frequency, DampedFrequency: m.DampedFrequency,
			DampingRatio: m.DampingRatio, Decay: m.Decay, FrequencyDoubt: numbers[2*i], DampingDoubt: numbers[2*i+1],
		}
		if m.Defective {
			doc.Notes = append(doc.Notes, fmt.Sprintf("mode %d coincides with another of the same shape (critical damping): it dies away like t e^(-t/T)", m.Number))
		}
		if m.Shape != nil {
			row.Shape = l.shapeOf(m.Shape)
		}
		doc.Modes = append(doc.Modes, row)
	}
	for _, o := range res.Overdamped {
		doc.Overdamped = append(doc.Overdamped, OverRow{Line: l.lineName(o.Line), Decay: o.Decay})
	}
	doc.Collected = l.collectExact(ctx)
}

// noModes refuses natural vibrations, at the place that forbids them where there
// is one.
func (l *loaded) noModes(err error) {
	d := diag.Diagnostic{Code: "no-modes", Severity: diag.Error, Span: diag.Span{File: l.compiled.Sources[0].File}, Summary: err.Error()}
	var p *scenario.PathError
	if errors.As(err, &p) {
		d.Span, d.Summary = l.placeOf(p.Path), p.What
	}
	l.note(diag.List{d})
}

func (l *loaded) lineName(i int) *string {
	if i < 0 {
		return nil
	}
	return &l.net.Lines[i].Name
}

// modeDoubts propagates the doubtful lets to frequency and damping ratio of
// every mode listed: two numbers a mode.
func (l *loaded) modeDoubts(ctx context.Context, res *modal.Result, want ModesWant) []doubt.Number {
	count := 0
	for _, m := range res.Modes {
		count = max(count, m.Number)
	}
	answers := func(r *modal.Result) []float64 {
		out := make([]float64, 0, 2*len(res.Modes))
		at := map[[2]int]*modal.Mode{}
		for i := range r.Modes {
			at[[2]int{r.Modes[i].Group, r.Modes[i].Number}] = &r.Modes[i]
		}
		for _, m := range res.Modes {
			if found := at[[2]int{m.Group, m.Number}]; found != nil {
				out = append(out, found.Frequency, found.DampingRatio)
			} else {
				out = append(out, math.NaN(), math.NaN())
			}
		}
		return out
	}
	units := make([]string, 0, 2*len(res.Modes))
	for range res.Modes {
		units = append(units, "Hz", "1")
	}
	again := func(ctx context.Context, m *mesh.Mesh) ([]float64, error) {
		r, err := modal.Find(m, modal.Want{Count: count})
		if err != nil {
			return nil, err
		}
		return answers(r), nil
	}
	return l.propagate(ctx, answers(res), units, again)
}

func (l *loaded) shapeOf(s *modal.Shape) []ShapeLine {
	return shapeLines(l.mesh, s)
}

// collectExact answers what collect asks for and modes can tell: everything
// that needs no run.
func (l *loaded) collectExact(ctx context.Context) []Collected {
	session, err := measure.New(l.compiled.Template, nil, l.measuring())
	if err != nil {
		l.warn("doubt-not-carried", err.Error())
		return []Collected{}
	}
	answers, err := session.Answer(ctx, nil)
	if err != nil {
		l.warn("doubt-not-carried", err.Error())
		return []Collected{}
	}
	return collectedRows(answers.Collected)
}
