package app

import (
	"context"
	"fmt"
	"path/filepath"
	"slices"

	"github.com/tautspan/tautspan/cmd/tautspan/internal/store"
	"github.com/tautspan/tautspan/dsl"
	"github.com/tautspan/tautspan/engine/doubt"
	"github.com/tautspan/tautspan/engine/fit"
	"github.com/tautspan/tautspan/engine/formula"
	"github.com/tautspan/tautspan/engine/measure"
	"github.com/tautspan/tautspan/engine/scenario"
)

// figuresOf are the mean tensions of all lines and the sought lets with the doubt
// of a solution; nil where it cannot be carried.
func (l *loaded) figuresOf(ctx context.Context, s *fit.Solution) (tensions, lets []*doubt.Number) {
	t := *l.compiled.Template
	t.Requires, t.Collects = nil, nil
	for i := range t.Model.Lines {
		m := scenario.MeasureOf[formula.Program]{Kind: scenario.LineTension, Source: "tension(" + t.Model.Lines[i].Name + ")", Watch: -1, Line: i, Segment: -1}
		t.Collects = append(t.Collects, scenario.Collect{Source: m.Source, Unit: "N", Value: formula.Arg(0), Measures: []scenario.MeasureOf[formula.Program]{m}})
	}
	for i := range s.Unknowns {
		t.Collects = append(t.Collects, scenario.Collect{Source: s.Unknowns[i].Name, Unit: s.Unknowns[i].Unit, Value: formula.Let(s.Unknowns[i].Let)})
	}
	all := make([]*doubt.Number, len(t.Collects))
	session, err := measure.New(&t, nil, measure.Options{Workers: workers(), Seed: seed, ExactSamples: samples, Joint: s.Joint()})
	if err == nil {
		var answers *measure.Answers
		if answers, err = session.Answer(ctx, nil); err == nil {
			for i := range answers.Collected {
				all[i] = &answers.Collected[i].Value
			}
		}
	}
	if err != nil {
		l.warn("doubt-not-carried", err.Error())
	}
	return all[:len(t.Model.Lines)], all[len(t.Model.Lines):]
}

// markOf is the mark that a line's readings give it, or its name.
func (l *loaded) markOf(line int) string {
	for _, r := range l.compiled.Template.Readings {
		if r.Line != line {
			continue
		}
		for _, a := range r.About {
			if a.Key == "mark" {
				return a.Text
			}
		}
	}
	return l.compiled.Template.Model.Lines[line].Name
}

// putIn writes what was found into the text of the scenario: the value of each
// sought let with its standard uncertainty. Its seek statement becomes a comment,
// since a second fit to the same readings would else count them twice.
func (l *loaded) putIn(doc *FitDoc, s *fit.Solution) {
	if len(doc.Alternatives) > 0 {
		doc.Notes = append(doc.Notes, "nothing is written: more than one solution explains the readings")
		return
	}
	var found []dsl.Found
	for i := range s.Unknowns {
		u := &s.Unknowns[i]
		if u.Undecided {
			doc.Notes = append(doc.Notes, u.Name+" is not written: no reading decides it")
			continue
		}
		f := dsl.Found{Name: u.Name, Value: u.Value, StandardU: u.U}
		if u.Log {
			f.StandardU *= u.Value
		}
		found = append(found, f)
	}
	text, written := l.compiled.PutIn(found)
	for _, f := range found {
		if !slices.Contains(written, f.Name) {
			doc.Notes = append(doc.Notes, f.Name+" is not written: its let stands in a file that the scenario uses")
		}
	}
	if len(written) > 0 {
		doc.text, doc.Written = text, written
		doc.Notes = append(doc.Notes, "the lets found hang together, and the text keeps the doubt of each alone; their seek statements are comments now, so that the same readings do not count twice")
	}
}

// writeFit puts the result folder of a fit in its place.
func (l *loaded) writeFit(doc *FitDoc, want FitWant) error {
	out := *doc
	out.ResultDir = "."
	out.Scenario.File = filepath.Base(out.Scenario.File)
	result, err := encode(&out)
	if err != nil {
		return err
	}
	timing, err := encode(map[string]any{"written": fmt.Sprint(now().UTC().Format("2006-01-02T15:04:05Z"))})
	if err != nil {
		return err
	}
	folder := &store.Folder{Result: result, Timing: timing, Scenario: []byte(l.compiled.Fold())}
	return store.Write(want.Out, l.head.Scenario.File, folder, want.Force)
}
