package app

import (
	"encoding/json"
	"errors"
	"fmt"
	"io"
	"math"
	"os"
	"path/filepath"

	"github.com/tautspan/tautspan/dsl/diag"
	"github.com/tautspan/tautspan/engine/doubt"
	"github.com/tautspan/tautspan/engine/fit"
)

// ChangeDoc is two surveys held against one another.
type ChangeDoc struct {
	Head
	First      string        `json:"first"`
	Second     string        `json:"second"`
	FalseAlarm float64       `json:"false_alarm"`  // rate at which lines that did not change give any alarm
	Factor     float64       `json:"alarm_factor"` // standard uncertainties from which a line counts as changed
	Lines      []ChangeRow   `json:"lines"`
	Unknowns   []ChangeRow   `json:"unknowns"`
	Notes      []string      `json:"notes"`
	Cautions   []CautionNote `json:"cautions"`
	Verdict    string        `json:"verdict"`
}

// ChangeRow is the change of one tension or let.
type ChangeRow struct {
	Name         string   `json:"name"`
	Unit         string   `json:"unit"`
	Shown        string   `json:"shown_unit"`
	First        float64  `json:"first"`
	Second       float64  `json:"second"` // at the temperature of the first
	Difference   float64  `json:"difference"`
	Low95        float64  `json:"low95"` // of the difference
	High95       float64  `json:"high95"`
	Relative     float64  `json:"relative"`
	RelativeLow  float64  `json:"relative_low95"`
	RelativeHigh float64  `json:"relative_high95"`
	Resolves     float64  `json:"resolves"` // relative change from which an alarm is given
	Temperature  *float64 `json:"temperature_k"`
	Moved        *float64 `json:"moved_by_temperature"` // taken from the second tension
	Common       []string `json:"common"`
	Verdict      string   `json:"verdict"`
}

// The verdicts of a change.
const (
	unchanged  = "no change seen"
	hasChanged = "changed"
)

// largestDoc bounds the document that is read; suspectWarm is the difference of
// temperature from which a straight line through it is remarked on. Both chosen.
const (
	largestDoc  = 64 << 20
	suspectWarm = 15.0 // K
)

// Change holds two results of fits against one another.
func (a *App) Change(first, second string, falseAlarm float64) (*ChangeDoc, Status, error) {
	doc := &ChangeDoc{
		Head:  Head{Format: Format, Version: Version, Command: "change", Engine: engineOf(), Errors: diag.List{}, Warnings: diag.List{}},
		First: first, Second: second, FalseAlarm: falseAlarm, Lines: []ChangeRow{}, Unknowns: []ChangeRow{}, Notes: []string{}, Cautions: []CautionNote{}, Verdict: unchanged,
	}
	before, problem, err := readSurvey(first)
	if err == nil && problem == nil {
		doc.Scenario = before.Scenario
	}
	if err != nil {
		return nil, Outside, err
	}
	after, other, err := readSurvey(second)
	if err != nil {
		return nil, Outside, err
	}
	for _, p := range []*diag.Diagnostic{problem, other} {
		if p != nil {
			doc.Errors = append(doc.Errors, *p)
		}
	}
	if len(doc.Errors) == 0 {
		doc.hold(before, after)
	}
	if len(doc.Errors) > 0 {
		return doc, BadInput, nil
	}
	if doc.Verdict == hasChanged {
		return doc, NotAsAsked, nil
	}
	return doc, Done, nil
}

// readSurvey reads the document of a fit, or that in a result folder.
func readSurvey(path string) (*FitDoc, *diag.Diagnostic, error) {
	bad := func(format string, args ...any) *diag.Diagnostic {
		return &diag.Diagnostic{Code: "no-survey", Span: diag.Span{File: diag.NewFile(path, "")}, Summary: fmt.Sprintf(format, args...), Hint: "tautspan fit FILE --out DIR writes one"}
	}
	info, err := os.Stat(path)
	if err != nil {
		return nil, nil, err
	}
	if info.IsDir() {
		path = filepath.Join(path, "result.json")
		if info, err = os.Stat(path); errors.Is(err, os.ErrNotExist) {
			return nil, bad("this folder holds no result"), nil
		} else if err != nil {
			return nil, nil, err
		}
	}
	if info.Size() > largestDoc {
		return nil, bad("this file has %d bytes, and the document of a fit at most %d", info.Size(), largestDoc), nil
	}
	f, err := os.Open(path)
	if err != nil {
		return nil, nil, err
	}
	defer func() { _ = f.Close() }() // only read
	text, err := io.ReadAll(io.LimitReader(f, largestDoc))
	if err != nil {
		return nil, nil, err
	}
	var doc surveyDoc
	if err := json.Unmarshal(text, &doc); err != nil {
		return nil, bad("this is no document of a fit: %v", err), nil
	}
	if doc.Format != Format || doc.Command != "fit" {
		return nil, bad("this is no document of a fit"), nil
	}
	return &FitDoc{Head: Head{Scenario: doc.Scenario}, Lines: doc.Lines, Unknowns: doc.Unknowns, Knowns: doc.Knowns, Alternatives: doc.Alternatives}, nil, nil
}

// surveyDoc is the part of a fit's document that a change needs.
type surveyDoc struct {
	Format       int              `json:"format"`
	Command      string           `json:"command"`
	Scenario     Source           `json:"scenario"`
	Unknowns     []FitUnknown     `json:"unknowns"`
	Knowns       []FitUnknown     `json:"knowns"`
	Lines        []FitLine        `json:"lines"`
	Alternatives []FitAlternative `json:"alternatives"`
}

// known are the lets that a survey knew beforehand.
func (d *FitDoc) known() map[string]fit.Known {
	out := map[string]fit.Known{}
	for _, list := range [][]FitUnknown{d.Knowns, d.Unknowns} {
		for i := range list {
			if u := &list[i]; u.Stated != nil && u.StatedU != nil {
				out[u.Name] = fit.Known{Stated: *u.Stated, U: *u.StatedU}
			}
		}
	}
	return out
}

// hold fills the document.
func (doc *ChangeDoc) hold(before, after *FitDoc) {
	knownBefore, knownAfter := before.known(), after.known()
	type pair struct{ a, b *FitLine }
	var pairs []pair
	for i := range before.Lines {
		for k := range after.Lines {
			if a, b := &before.Lines[i], &after.Lines[k]; a.Line == b.Line && a.Tension != nil && b.Tension != nil {
				pairs = append(pairs, pair{a, b})
			}
		}
	}
	if len(pairs) == 0 {
		doc.Errors = append(doc.Errors, diag.Diagnostic{Code: "no-survey", Span: diag.Span{File: diag.NewFile(doc.Second, "")}, Summary: "the two surveys have no line in common", Hint: "lines are told by their names"})
		return
	}
	if n := len(before.Alternatives) + len(after.Alternatives); n > 0 {
		doc.Notes = append(doc.Notes, "a survey has more than one solution; the best of each is held against the other")
	}
	doc.Factor = fit.AlarmFactor(len(pairs), doc.FalseAlarm)
	doc.Verdict = unchanged
	for _, p := range pairs {
		row := doc.row(p.a.Line, "N", figure(*p.a.Tension, p.a.Parts), figure(*p.b.Tension, p.b.Parts), knownBefore, knownAfter, doc.warm(p.a, p.b))
		row.Temperature = p.a.Temperature
		if p.a.Where != p.b.Where {
			doc.Notes = append(doc.Notes, fmt.Sprintf("the tension of %s was given at %s before and at %s after", p.a.Line, p.a.Where, p.b.Where))
		}
		if row.Verdict == hasChanged {
			doc.Verdict = hasChanged
		}
		doc.Lines = append(doc.Lines, row)
	}
	for i := range before.Unknowns {
		for k := range after.Unknowns {
			if a, b := &before.Unknowns[i], &after.Unknowns[k]; a.Name == b.Name && a.Unit == b.Unit && a.Decided && b.Decided && a.Value != 0 {
				row := doc.row(a.Name, a.Unit, figure(a.Value, a.Parts), figure(b.Value, b.Parts), knownBefore, knownAfter, nil)
				row.Shown, row.Verdict = a.Shown, ""
				doc.Unknowns = append(doc.Unknowns, row)
			}
		}
	}
	doc.Cautions = append(doc.Cautions,
		CautionNote{"authority", "Results are an aid. A licensed engineer has to check them; local codes and owner rules govern. That no change is seen says only that none larger than what the surveys resolve has come about."})
}

func figure(value float64, parts []FitPart) fit.Figure {
	f := fit.Figure{Value: value}
	for _, p := range parts {
		f.Parts = append(f.Parts, fit.Part(p))
	}
	return f
}

// warm is what the second tension of a line would be less at the temperature of
// the first; nil where that is not known or nothing.
func (doc *ChangeDoc) warm(a, b *FitLine) *float64 {
	switch {
	case a.Temperature == nil && b.Temperature == nil:
		return nil
	case a.Temperature == nil || b.Temperature == nil:
		doc.Notes = append(doc.Notes, "the temperature of "+a.Line+" is known in one survey only, so that it is not taken out")
		return nil
	}
	degrees := *b.Temperature - *a.Temperature
	if degrees == 0 {
		return nil
	}
	if a.PerKelvin == nil || b.PerKelvin == nil {
		doc.Notes = append(doc.Notes, fmt.Sprintf("%s was %.3g K warmer at the second survey, and how its tension changes with that is not known: say axial and expansion of its stock", a.Line, degrees))
		return nil
	}
	if math.Abs(degrees) > suspectWarm {
		doc.Notes = append(doc.Notes, fmt.Sprintf("%s was %.3g K away from its first temperature: the mean of both slopes takes that out, which is rough for a sagging line", a.Line, degrees))
	}
	moved := degrees * (*a.PerKelvin + *b.PerKelvin) / 2
	return &moved
}

// row holds two figures against one another.
func (doc *ChangeDoc) row(name, unit string, a, b fit.Figure, before, after map[string]fit.Known, moved *float64) ChangeRow {
	if moved != nil {
		b.Value -= *moved
	}
	d := fit.Between(a, b, before, after)
	row := ChangeRow{
		Name: name, Unit: unit, First: a.Value, Second: b.Value, Difference: d.Value, Low95: d.Value - doubt.TwoSided*d.U, High95: d.Value + doubt.TwoSided*d.U,
		Relative: d.Relative, RelativeLow: d.Ratio(-doubt.TwoSided) - 1, RelativeHigh: d.Ratio(doubt.TwoSided) - 1,
		Resolves: d.Unchanged(doc.Factor) - 1, Moved: moved, Common: append([]string{}, d.Common...), Verdict: unchanged,
	}
	if d.Apart() > doc.Factor {
		row.Verdict = hasChanged
	}
	return row
}
