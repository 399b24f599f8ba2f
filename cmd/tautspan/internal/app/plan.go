package app

import (
	"context"
	"errors"
	"math"
	"math/cmplx"

	"github.com/tautspan/tautspan/dsl/diag"
	"github.com/tautspan/tautspan/engine/doubt"
	"github.com/tautspan/tautspan/engine/fit"
	"github.com/tautspan/tautspan/engine/mesh"
	"github.com/tautspan/tautspan/engine/modal"
	"github.com/tautspan/tautspan/engine/statics"
)

// PlanWant is what a plan is made for.
type PlanWant struct {
	Modes int     // vibrations to be read of each line
	Share float64 // relative standard uncertainty of a frequency
}

// PlanDoc is a survey before the climb.
type PlanDoc struct {
	Head
	Accuracy float64        `json:"accuracy"` // relative standard uncertainty of each frequency
	Lines    []PlanLine     `json:"lines"`
	Expected []PlanExpected `json:"expected"`
	Unknowns []string       `json:"unknowns"`
	Notes    []string       `json:"notes"`
	Cautions []CautionNote  `json:"cautions"`
}

// PlanLine is what to look for on one line, and where.
type PlanLine struct {
	Line        string         `json:"line"`
	Frequencies []doubt.Number `json:"frequencies"`
	Sensors     []PlanSensor   `json:"sensors"`
	Record      float64        `json:"record_s"`
	Sampling    float64        `json:"sampling_hz"`
	Return      float64        `json:"return_s"` // one round trip of a pulse
}

// PlanSensor is a place for a sensor.
type PlanSensor struct {
	Segment string  `json:"segment"`
	Offset  float64 `json:"offset_m"` // from the segment's start
	X       float64 `json:"x_m"`      // from the line's start
	Reach   string  `json:"reach"`    // anywhere, or from which end it can be reached
	Least   float64 `json:"least"`    // amplitude of the mode that shows least there, as a share of its own largest
	Mode    int     `json:"mode"`     // that mode
}

// PlanExpected is what so many peaks would tell.
type PlanExpected struct {
	Peaks     int       `json:"peaks"`
	HalfWidth []float64 `json:"half_width"` // of 95 %, in the order of unknowns
	Relative  []bool    `json:"relative"`   // as a share of the value
	Open      []string  `json:"undecided"`
}

// Plan prepares a survey of the lines that have readings, or of all.
func (a *App) Plan(ctx context.Context, in Input, want PlanWant) (*PlanDoc, Status, error) {
	l, err := a.load("plan", in)
	if err != nil {
		return nil, Outside, err
	}
	l.bind()
	l.needLine()
	doc := &PlanDoc{Accuracy: want.Share, Lines: []PlanLine{}, Expected: []PlanExpected{}, Unknowns: []string{}, Notes: []string{}, Cautions: []CautionNote{}}
	if !l.failed() {
		l.plan(ctx, doc, want)
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

func (l *loaded) plan(ctx context.Context, doc *PlanDoc, want PlanWant) {
	res, err := modal.Find(l.mesh, modal.Want{Count: want.Modes, Shapes: true})
	if err != nil {
		l.note(diag.List{{Code: "no-modes", Severity: diag.Error, Span: diag.Span{File: l.compiled.Sources[0].File}, Summary: err.Error()}})
		return
	}
	numbers := l.modeDoubts(ctx, res, ModesWant{Count: want.Modes})
	lines := l.surveyed()
	for _, i := range lines {
		doc.Lines = append(doc.Lines, l.planLine(i, res, numbers, want))
	}
	doc.Cautions = l.surveyCautions(l.net)
	if len(l.compiled.Template.Seeks) == 0 {
		doc.Notes = append(doc.Notes, "nothing is sought, so that no interval can be expected; say seek NAME from A to B")
		return
	}
	expected, err := fit.Expect(l.compiled.Template, lines, want.Modes, want.Share)
	var cannot *fit.Error
	switch {
	case errors.As(err, &cannot):
		doc.Notes = append(doc.Notes, "what the intervals would be cannot be told: "+cannot.What)
	case err != nil:
		doc.Notes = append(doc.Notes, "what the intervals would be cannot be told: "+err.Error())
	}
	for _, e := range expected {
		row := PlanExpected{Peaks: e.Peaks, HalfWidth: e.HalfWidth, Relative: e.Relative, Open: append([]string{}, e.Open...)}
		doc.Expected = append(doc.Expected, row)
	}
	for _, s := range l.compiled.Template.Seeks {
		doc.Unknowns = append(doc.Unknowns, l.compiled.Template.Lets[s.Let].Name)
	}
	doc.Notes = append(doc.Notes, "frequencies and intervals are those of the lets as they are said; the survey will tell")
}

// surveyed are the lines that have readings, or all.
func (l *loaded) surveyed() []int {
	t := l.compiled.Template
	seen := map[int]bool{}
	for i := range t.Readings {
		seen[t.Readings[i].Line] = true
	}
	var out []int
	for i := range t.Model.Lines {
		if seen[i] || len(seen) == 0 {
			out = append(out, i)
		}
	}
	return out
}

// Common practice, no source: the record as long as tells the first frequency
// from the next place of a plain spectrum, eight samples in a period of the
// highest, and a tenth of the line within reach of either end.
const (
	samplesPerPeriod = 8
	withinReach      = 0.1
)

func (l *loaded) planLine(line int, res *modal.Result, numbers []doubt.Number, want PlanWant) PlanLine {
	out := PlanLine{Line: l.net.Lines[line].Name, Frequencies: []doubt.Number{}, Sensors: []PlanSensor{}, Return: 2 * statics.TravelTime(&l.net.Lines[line])}
	var shapes []*modal.Shape
	for i := range res.Modes {
		if m := &res.Modes[i]; m.Line == line || m.Line < 0 {
			out.Frequencies = append(out.Frequencies, numbers[2*i])
			shapes = append(shapes, m.Shape)
		}
	}
	if n := len(out.Frequencies); n > 0 {
		out.Record = 1 / (want.Share * out.Frequencies[0].Value)
		out.Sampling = samplesPerPeriod * out.Frequencies[n-1].Value
	}
	first, last := l.net.Lines[line].Nodes[0].Name, l.net.Lines[line].Nodes[len(l.net.Lines[line].Nodes)-1].Name
	for _, reach := range []struct {
		word     string
		from, to float64
	}{{"from " + first, 0, withinReach}, {"from " + last, 1 - withinReach, 1}, {"anywhere", 0, 1}} {
		if s, ok := l.sensor(line, shapes, reach.from, reach.to); ok {
			s.Reach = reach.word
			out.Sensors = append(out.Sensors, s)
		}
	}
	return out
}

// looks is how many places of a line are tried for a sensor.
const looks = 400

// sensor is the place between two shares of a line at which the vibration that
// shows least there shows most.
func (l *loaded) sensor(line int, shapes []*modal.Shape, from, to float64) (PlanSensor, bool) {
	if len(shapes) == 0 {
		return PlanSensor{}, false
	}
	m := l.mesh
	length := m.Lines[line].Length
	at := func(share float64) mesh.Spot {
		x := share * length
		pieces := m.Lines[line].Pieces
		k := 0
		for k+1 < len(pieces) && x > m.Pieces[pieces[k+1]].X0 {
			k++
		}
		return mesh.Spot{Node: -1, Piece: pieces[k], At: math.Min(x-m.Pieces[pieces[k]].X0, m.Pieces[pieces[k]].Length)}
	}
	most := make([]float64, len(shapes))
	for n, s := range shapes {
		for k := 0; k <= looks; k++ {
			most[n] = math.Max(most[n], cmplx.Abs(s.At(at(float64(k)/looks))))
		}
	}
	best := PlanSensor{Least: -1}
	for k := 0; k <= looks; k++ {
		share := from + (to-from)*float64(k)/looks
		spot := at(share)
		least, mode := math.Inf(1), 0
		for n, s := range shapes {
			if most[n] == 0 {
				continue // a vibration of another of the tied lines
			}
			if v := cmplx.Abs(s.At(spot)) / most[n]; v < least {
				least, mode = v, n+1
			}
		}
		if mode > 0 && least > best.Least+1e-9 {
			p := &m.Pieces[spot.Piece]
			best = PlanSensor{Segment: l.net.Lines[line].Segments[p.Segment].Name, Offset: p.S0 + spot.At, X: share * length, Least: least, Mode: mode}
		}
	}
	return best, best.Least > 0
}
