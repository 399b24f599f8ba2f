package app

import (
	"context"
	"fmt"
	"math"
	"math/cmplx"

	"github.com/tautspan/tautspan/dsl/diag"
	"github.com/tautspan/tautspan/engine/mesh"
	"github.com/tautspan/tautspan/engine/modal"
	"github.com/tautspan/tautspan/engine/scatter"
)

// RespondWant is the range of frequencies asked for, Hz, in equal steps. Nil
// leaves an end to the program: a fifth of the first natural frequency to the
// eighth.
type RespondWant struct {
	From, To *float64
	Points   int
}

// Limits of a request; chosen so that a document stays below about a gigabyte
// and a request below minutes.
const (
	mostPoints   = 100_000
	mostAnswers  = 20_000_000
	defaultModes = 8
	mostPeaks    = 8 // of each response
)

// RespondDoc is the steady vibration of a scenario against frequency.
type RespondDoc struct {
	Head
	Frequency []float64     `json:"frequency_hz"`
	Responses []ResponseRow `json:"responses"`
	Joints    []JointRow    `json:"joints"`
	Ends      []EndRow      `json:"ends"`
	Notes     []string      `json:"notes"`
	Collected []Collected   `json:"collected"`

	partial bool // the responses at the watches are missing
}

// ResponseRow is one watched quantity per unit of one excitation.
type ResponseRow struct {
	Watch     string     `json:"watch"`
	Quantity  string     `json:"quantity"`
	Excite    string     `json:"excite"`
	Unit      string     `json:"unit"`
	Amplitude []*float64 `json:"amplitude"`
	Phase     []*float64 `json:"phase_rad"`
	Peaks     []PeakRow  `json:"peaks"`
}

// PeakRow is a largest amplitude between the frequencies asked for. Amplitude
// and phase are nil where nothing damps it.
type PeakRow struct {
	Frequency float64  `json:"frequency_hz"`
	Amplitude *float64 `json:"amplitude"`
	Phase     *float64 `json:"phase_rad"`
}

// JointRow is what becomes of a wave that meets a joint from one side.
type JointRow struct {
	Name           string     `json:"name"`
	From           string     `json:"from"`
	Reflected      []*float64 `json:"reflected"`
	ReflectedPhase []*float64 `json:"reflected_phase_rad"`
	Passed         []*float64 `json:"passed"`
	PassedPhase    []*float64 `json:"passed_phase_rad"`
	Absorbed       []*float64 `json:"absorbed"`
}

// EndRow is what the end of a line takes of a wave.
type EndRow struct {
	Support        string     `json:"support"`
	Joints         []string   `json:"joints"`
	Reflected      []*float64 `json:"reflected"`
	ReflectedPhase []*float64 `json:"reflected_phase_rad"`
	Taken          []*float64 `json:"taken"`
}

// Respond gives the steady vibration of a scenario against frequency.
func (a *App) Respond(ctx context.Context, in Input, want RespondWant) (*RespondDoc, Status, error) {
	l, err := a.load("respond", in)
	if err != nil {
		return nil, Outside, err
	}
	l.bind()
	l.needLine()
	doc := &RespondDoc{Frequency: []float64{}, Responses: []ResponseRow{}, Joints: []JointRow{}, Ends: []EndRow{}, Notes: []string{}, Collected: []Collected{}}
	if !l.failed() {
		l.respond(ctx, doc, want)
	}
	doc.Head = l.head
	switch {
	case ctx.Err() != nil:
		return doc, Interrupted, nil
	case l.failed():
		return doc, BadInput, nil
	case doc.partial:
		return doc, NotAsAsked, nil
	}
	return doc, Done, nil
}

// refuseWhole refuses a scenario, or what was asked of it, as a whole.
func (l *loaded) refuseWhole(code, summary string) {
	l.note(diag.List{{Code: code, Severity: diag.Error, Span: diag.Span{File: l.compiled.Sources[0].File}, Summary: summary}})
}

// unanswered refuses unless it was the user who stopped it.
func (l *loaded) unanswered(ctx context.Context, err error) {
	if ctx.Err() == nil {
		l.refuseWhole("no-response", err.Error())
	}
}

func (l *loaded) respond(ctx context.Context, doc *RespondDoc, want RespondWant) {
	drives, reasons := scatter.Drives(l.net, l.mesh)
	answers := len(drives)*len(l.mesh.Channels)*2 + len(l.mesh.Nodes)*10
	if want.Points > mostPoints || answers > 0 && want.Points > mostAnswers/answers {
		l.refuseWhole("too-many-points", fmt.Sprintf("%d frequencies are more than this scenario's %d curves allow", want.Points, answers))
		return
	}
	grid, err := l.frequencies(want)
	if err != nil {
		l.refuseWhole("no-frequencies", err.Error())
		return
	}
	doc.Frequency = grid
	joints, notes, err := scatter.Joints(ctx, l.mesh, grid)
	if err != nil {
		l.unanswered(ctx, err)
		return
	}
	for i := range joints {
		doc.Joints = append(doc.Joints, jointRow(joints[i].Name, "before", joints[i].Before), jointRow(joints[i].Name, "after", joints[i].After))
	}
	if len(joints) > 0 {
		doc.Notes = append(doc.Notes, notes...)
	}
	ends, more, err := scatter.Ends(ctx, l.mesh, grid)
	if err != nil {
		l.unanswered(ctx, err)
		return
	}
	for i := range ends {
		e := &ends[i]
		doc.Ends = append(doc.Ends, EndRow{Support: e.Support, Joints: e.Joints, Reflected: finiteAll(e.Reflected), ReflectedPhase: finiteAll(e.ReflectedPhase), Taken: finiteAll(e.Taken)})
	}
	if len(joints) == 0 {
		doc.Notes = append(doc.Notes, more...)
	}
	doc.Notes = append(doc.Notes, reasons...)
	l.steady(ctx, doc, drives, grid)
	if !l.failed() && ctx.Err() == nil {
		doc.Collected = l.collectExact(ctx)
	}
}

// steady adds the responses at the watches.
func (l *loaded) steady(ctx context.Context, doc *RespondDoc, drives []scatter.Drive, grid []float64) {
	if len(drives) == 0 || len(l.mesh.Channels) == 0 {
		return
	}
	network, err := scatter.NewNetwork(l.mesh)
	if err != nil {
		l.warn("no-response", "no response at a watch: "+err.Error())
		doc.partial = true
		return
	}
	responses, notes, err := network.Responses(ctx, drives, grid)
	if err != nil {
		l.unanswered(ctx, err)
		return
	}
	doc.Notes = append(doc.Notes, notes...)
	for i := range responses {
		r := &responses[i]
		row := ResponseRow{Watch: r.Watch, Quantity: r.Quantity.String(), Excite: r.Excite, Unit: r.Unit, Peaks: []PeakRow{}}
		for _, v := range r.Value {
			row.Amplitude = append(row.Amplitude, finite(cmplx.Abs(v)))
			row.Phase = append(row.Phase, finite(scatter.Phase(v)))
		}
		peaks, err := network.Peaks(ctx, r, grid, mostPeaks)
		if err != nil {
			return
		}
		for _, p := range peaks {
			row.Peaks = append(row.Peaks, PeakRow{Frequency: p.Frequency, Amplitude: finite(cmplx.Abs(p.Value)), Phase: finite(scatter.Phase(p.Value))})
		}
		doc.Responses = append(doc.Responses, row)
	}
}

func jointRow(name, from string, shares []scatter.Shares) JointRow {
	r := JointRow{Name: name, From: from}
	for i := range shares {
		s := &shares[i]
		r.Reflected = append(r.Reflected, finite(s.Reflected))
		r.ReflectedPhase = append(r.ReflectedPhase, finite(s.ReflectedPhase))
		r.Passed = append(r.Passed, finite(s.Passed))
		r.PassedPhase = append(r.PassedPhase, finite(s.PassedPhase))
		r.Absorbed = append(r.Absorbed, finite(s.Absorbed))
	}
	return r
}

func finiteAll(values []float64) []*float64 {
	out := make([]*float64, len(values))
	for i, v := range values {
		out[i] = finite(v)
	}
	return out
}

// frequencies are the frequencies asked for in equal steps, both ends included.
func (l *loaded) frequencies(want RespondWant) ([]float64, error) {
	if want.Points < 1 {
		return nil, fmt.Errorf("at least one frequency has to be asked for, and it is %d", want.Points)
	}
	var from, to float64
	if want.From == nil || want.To == nil {
		from, to = l.span()
		from, to = measured(l.mesh, from, to)
	}
	switch {
	case want.From != nil && want.To != nil:
		from, to = *want.From, *want.To
	case want.From != nil:
		from = *want.From
		if to <= from {
			to = 10 * from
		}
	case want.To != nil:
		to = *want.To
		from = math.Min(from, to/10)
	}
	if !(from >= 0) || !(to >= from) || math.IsInf(to, 0) {
		return nil, fmt.Errorf("the range from %g Hz to %g Hz is none", from, to)
	}
	points := want.Points
	if from == to {
		points = 1
	}
	out := make([]float64, points)
	for i := range out {
		out[i] = from
		if i > 0 {
			out[i] = from + (to-from)*float64(i)/float64(points-1)
		}
	}
	if points > 1 {
		out[points-1] = to
	}
	return out, nil
}

// measured keeps a range of frequencies within what every bench record of the
// network holds, where the two meet.
func measured(m *mesh.Mesh, from, to float64) (float64, float64) {
	low, high := from, to
	for i := range m.Nodes {
		for _, b := range m.Nodes[i].Benches {
			low, high = math.Max(low, b.Frequency[0]), math.Min(high, b.Frequency[len(b.Frequency)-1])
		}
	}
	if low < high {
		return low, high
	}
	return from, to
}

// span is a fifth of the first natural frequency to the eighth; without natural
// vibrations (a line that goes on for ever) the same of a held line of that
// travel time.
func (l *loaded) span() (from, to float64) {
	low, high := math.Inf(1), 0.0
	if res, err := modal.Find(l.mesh, modal.Want{Count: defaultModes}); err == nil {
		for i := range res.Modes {
			low = math.Min(low, res.Modes[i].DampedFrequency)
			high = math.Max(high, res.Modes[i].DampedFrequency)
		}
	}
	if !(high > 0) || !(low > 0) {
		for i := range l.mesh.Lines {
			travel := 0.0
			for _, k := range l.mesh.Lines[i].Pieces {
				p := &l.mesh.Pieces[k]
				mean := p.Tension + p.TensionRise*p.Length/2
				travel += p.Length * math.Sqrt(p.MassPerLength/mean)
			}
			low = math.Min(low, 1/(2*travel))
			high = math.Max(high, defaultModes/(2*travel))
		}
	}
	return low / 5, high
}
