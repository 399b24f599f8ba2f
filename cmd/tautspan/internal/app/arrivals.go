package app

import (
	"github.com/tautspan/tautspan/dsl/diag"
	"github.com/tautspan/tautspan/engine/fronts"
)

// Arrivals traces the fronts of a scenario to its watches.
func (a *App) Arrivals(in Input) (*ArrivalsDoc, Status, error) {
	l, err := a.load("arrivals", in)
	if err != nil {
		return nil, Outside, err
	}
	l.bind()
	l.needLine()
	doc := &ArrivalsDoc{Arrivals: []ArrivalRow{}, Notes: []string{}}
	if !l.failed() {
		l.trace(doc)
	}
	doc.Head = l.head
	if l.failed() {
		return doc, BadInput, nil
	}
	return doc, Done, nil
}

func (l *loaded) trace(doc *ArrivalsDoc) {
	ledger, err := fronts.Trace(l.mesh, fronts.Options{Prune: fronts.DefaultPrune, StartName: l.startName()})
	if err != nil {
		l.note(diag.List{{Code: "no-fronts", Severity: diag.Error, Span: diag.Span{File: l.compiled.Sources[0].File}, Summary: err.Error()}})
		return
	}
	doc.PrunedBelow, doc.LostAmplitude, doc.Reached = ledger.PrunedBelow, ledger.LostAmplitude, ledger.ReachedTime
	doc.Notes = append(doc.Notes, ledger.Notes...)
	for _, f := range ledger.Arrivals {
		row := ArrivalRow{
			Watch: f.Watch, Excite: f.Excite, Number: f.Number, Time: f.Time, Quantity: f.Quantity, Unit: f.Unit,
			Amplitude: f.Amplitude, Sign: f.Sign, Path: f.Path, Merged: f.Merged, Smeared: f.Smeared,
		}
		if f.Smeared {
			row.PeakTime = finite(f.Time + f.PeakAfter)
			row.Settled = finite(f.Settled)
		}
		doc.Arrivals = append(doc.Arrivals, row)
	}
}

// startName is the name of the excitation that gives the start shape, for the
// ledger: the only one, or the word start where several add up.
func (l *loaded) startName() string {
	var names []string
	for _, p := range l.net.Plucks {
		names = append(names, p.Name)
	}
	for _, s := range l.net.Starts {
		names = append(names, s.Name)
	}
	if len(names) == 1 {
		return names[0]
	}
	return ""
}
