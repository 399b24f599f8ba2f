package compare

import (
	"fmt"
	"math"
	"strings"

	"github.com/tautspan/tautspan/engine/solver"
)

// Verdict is the outcome of a comparison. A larger one is worse.
type Verdict uint8

// The verdicts: solvers agree within the share asked for; there is only one;
// the bars could not be brought within the share asked for, or a difference
// between one and two bars' sum stayed; solvers differ by more than their bars
// can explain.
const (
	Agree Verdict = iota
	Alone
	Unsettled
	Differ
)

var verdictNames = [...]string{"agree", "alone", "unsettled", "differ"}

// String is the verdict's word.
func (v Verdict) String() string { return verdictNames[v] }

// Outcome is everything that a comparison found.
type Outcome struct {
	Voices   []Voice
	Channels []Channel
	Asked    []Answer
	// EnergyLeft is the energy at the end as a share of the most held.
	EnergyLeft Observable
	Verdict    Verdict
	Effort     int   // as in solver.Request
	Work       int64 // cell-steps spent
	Cut        bool  // stopped before it was done
	Notes      []string
}

// Voice is one solver's part.
type Voice struct {
	Solver    solver.Solver
	Name      string
	Version   string
	Absent    string // why it took no part; "" if it did
	Fault     string // what went wrong; "" if nothing. A finding, not an absence
	Exhausted string // why it was not refined further; ""
	Levels    []int  // of the last three solutions
	Cells     int    // of the finest
	Steps     int
	Order     float64 // theory
	Ratio     float64
	Energy    solver.Energy
	Finest    *solver.Result // nil where there is none
	Notes     []string
}

// Usable tells whether the solver has answers that count.
func (v *Voice) Usable() bool {
	return v.Absent == "" && v.Fault == "" && v.Finest != nil && len(v.Levels) == levels
}

// Reason is why the solver gave no answer, or "".
func (v *Voice) Reason() string {
	if v.Absent != "" {
		return v.Absent
	}
	return v.Fault
}

// Channel is the comparison of one recorded quantity.
type Channel struct {
	Name           string
	Unit           string
	Solvers        []SolverFigures // of each voice; meaningful where it is usable
	Observables    []Observable    // by Kind
	Best           int             // voice with the smallest bar of the record; -1: none
	Series         [][]float64     // of the best voice, one record a spot
	Band           [][]float64     // pointwise error band of Series
	Verdict        Verdict         // worst of the governed observables, and of the record where it differs
	OddOneOut      string          // solver that stands against the rest; "" where it cannot be told
	ResolvingPower float64         // share: largest of those of the governed observables
	Difference     float64         // share: largest disagreement of two solvers on the record
}

// SolverFigures are one solver's figures of a channel.
type SolverFigures struct {
	Peak          float64
	TimeOfPeak    float64 // s
	ErrorBar      float64 // of the peak, in its unit
	Order         float64 // observed, of the record; NaN where there is none
	RecordBar     float64 // share of the record's scale
	NotConverging bool    // the record's changes do not fall
}

// Observable is the comparison of one observable. Slices are by voice, NaN for
// voices that are not usable.
type Observable struct {
	Kind      Kind
	Values    []float64
	Bars      []float64
	Orders    []float64
	Scale     float64 // relative figures are shares of this
	Pairs     []Pair
	Verdict   Verdict
	OddOneOut int // voice, or -1
	Best      int // voice whose value is reported, or -1
	Value     float64
	Numerical float64 // bound
	Governed  bool    // agree governs it
	// ResolvingPower is the least U_A + U_B of two agreeing solvers as a share of
	// Scale; the voice's own bar where it is alone.
	ResolvingPower float64
}

// Pair is the comparison of two voices.
type Pair struct {
	A, B       int
	Difference float64 // in the observable's unit
	Ratio      float64 // to the sum of the two bars
	Resolving  float64 // the sum of the two bars as a share of the scale
	// Unbacked says that the two records as a whole do not differ beyond their
	// bars. A single figure that lies further apart is then not held against a
	// solver: figures hang on few rows, whose changes from level to level may be
	// small by chance, while a wrong solver is wrong in more than one row.
	Unbacked bool
	// Immaterial says that difference and bars together stay within a tenth of the
	// share asked for: too little to call the solvers at odds, whatever the ratio.
	// The reported bound covers it.
	Immaterial bool
}

// Interval is a value that lies between Low and High; NaN as value where there
// is none.
type Interval struct{ Value, Low, High float64 }

// Reading is a record with its pointwise error band, as Asked evaluates it.
type Reading struct {
	Every  float64 // s between rows, the first at t = 0
	Values []float64
	Band   []float64
}

// Asked is something that a scenario names and that `agree` therefore governs:
// an observable of a channel that it would not govern otherwise, or a reading
// (such as the time to settle) of the channel's first spot. Reading is called
// from one goroutine.
type Asked struct {
	Channel int
	Kind    Kind                             // without Reading
	Reading func(r Reading) (value Interval) // nil: Kind
}

// Answer is the outcome of one Asked.
type Answer struct {
	Interval
	Settled bool
}

// AllAbsentError says that no solver can answer, and why each cannot.
type AllAbsentError struct{ Reasons []string }

// Error lists the reasons.
func (e *AllAbsentError) Error() string {
	return "no solver gives an answer: " + strings.Join(e.Reasons, "; ")
}

// outcome collects what the runner holds.
func (r *runner) outcome() (*Outcome, error) {
	out := &Outcome{Work: r.spent, Effort: r.effort, Notes: r.notes}
	if r.mesh.BandCut {
		out.Notes = append(out.Notes, "the excitation is shorter than the solvers are asked to resolve; a difference between them counts as unsettled")
	}
	var reasons []string
	answered := false
	for _, v := range r.voices {
		voice := Voice{Solver: v.solver, Name: v.solver.Name(), Version: v.solver.Version(), Absent: v.absent, Fault: v.fault, Exhausted: v.exhausted}
		if n := len(v.runs); n > 0 {
			top := v.top()
			voice.Finest, voice.Energy, voice.Notes = top.result, top.energy, top.result.Notes
			voice.Cells, voice.Steps = top.result.Plan.Cells, top.result.Plan.Steps
			voice.Order, voice.Ratio = v.theory()
			for _, run := range v.runs[max(0, n-levels):] {
				voice.Levels = append(voice.Levels, run.level)
			}
		}
		if !v.usable() && voice.Reason() == "" {
			voice.Absent = "was stopped before three levels were solved"
		}
		if v.usable() {
			answered = true
		} else {
			reasons = append(reasons, fmt.Sprintf("%s: %s", voice.Name, voice.Reason()))
		}
		out.Voices = append(out.Voices, voice)
	}
	if !answered {
		return out, &AllAbsentError{Reasons: reasons}
	}
	judged := r.judge()
	for c := range r.mesh.Channels {
		out.Channels = append(out.Channels, r.channel(c, judged[c]))
		out.Verdict = max(out.Verdict, out.Channels[c].Verdict)
	}
	for i := range r.options.Asked {
		a := &r.options.Asked[i]
		ch := &out.Channels[a.Channel]
		if a.Reading == nil {
			o := &ch.Observables[a.Kind]
			out.Asked = append(out.Asked, Answer{Interval{o.Value, o.Value - o.Numerical, o.Value + o.Numerical}, o.Verdict == Agree || o.Verdict == Alone})
			continue
		}
		got := a.Reading(Reading{Every: r.mesh.Timing.Every, Values: ch.Series[0], Band: ch.Band[0]})
		out.Asked = append(out.Asked, Answer{got, r.readingSettled(got)})
		if !r.readingSettled(got) {
			out.Verdict = max(out.Verdict, Unsettled)
		}
	}
	out.EnergyLeft = r.energyLeft()
	if r.options.EnergyLeft || len(out.Channels) == 0 {
		out.Verdict = max(out.Verdict, out.EnergyLeft.Verdict)
	}
	return out, nil
}

func (r *runner) channel(c int, obs []Observable) Channel {
	ch := &r.mesh.Channels[c]
	out := Channel{Name: ch.Name(), Unit: ch.Quantity.Unit(), Observables: obs, Best: -1}
	_, stride := r.mesh.FieldRows()
	if !ch.Along {
		stride = 1
	}
	for i, v := range r.voices {
		f := SolverFigures{Peak: math.NaN(), TimeOfPeak: math.NaN(), ErrorBar: math.NaN(), Order: math.NaN(), RecordBar: math.NaN()}
		if v.usable() {
			top := &v.top().figures[c]
			f.Peak, f.TimeOfPeak = top.of[Peak], float64(top.at[Peak]*stride)*r.mesh.Timing.Every
			f.ErrorBar, f.Order = obs[Peak].Bars[i], obs[Record].Orders[i]
			f.RecordBar = share(obs[Record].Bars[i], obs[Record].Scale)
			e1, e2 := v.changes(c, Record)
			order, ratio := v.theory()
			f.NotConverging = NewBar(e1, e2, ratio, order).NotConverging && obs[Record].Bars[i] > 2*roundOff*obs[Record].Scale
		}
		out.Solvers = append(out.Solvers, f)
	}
	odd := -1
	sure := true
	for k := range obs {
		o := &obs[k]
		if o.Governed {
			out.Verdict = max(out.Verdict, o.Verdict)
			out.ResolvingPower = math.Max(out.ResolvingPower, o.ResolvingPower)
		} else if o.Verdict == Differ && o.Kind == Record {
			out.Verdict = Differ
		}
		if (o.Governed || o.Kind == Record) && o.Verdict == Differ {
			sure = sure && o.OddOneOut >= 0 && (odd < 0 || odd == o.OddOneOut)
			odd = o.OddOneOut
		}
	}
	if sure && odd >= 0 {
		out.OddOneOut = r.voices[odd].solver.Name()
	}
	if out.Verdict == Differ && r.mesh.BandCut {
		// What no level resolves says nothing against any solver.
		out.Verdict, out.OddOneOut = Unsettled, ""
	}
	for _, p := range obs[Record].Pairs {
		out.Difference = math.Max(out.Difference, share(p.Difference, obs[Record].Scale))
	}
	out.Best = obs[Record].Best
	out.Series = r.voices[out.Best].series(c)
	out.Band = r.band(c, &obs[Record])
	return out
}

func share(a, scale float64) float64 {
	if a == 0 {
		return 0
	}
	return a / scale
}
