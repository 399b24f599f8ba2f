package app

import (
	"github.com/tautspan/tautspan/engine/doubt"
	"github.com/tautspan/tautspan/engine/fit"
)

// FitDoc is what a fit found.
type FitDoc struct {
	Head
	ResultDir    string           `json:"result_dir"`
	Unknowns     []FitUnknown     `json:"unknowns"`
	Knowns       []FitUnknown     `json:"knowns"` // doubtful lets and shared errors, as the readings leave them
	Exact        []string         `json:"exact_inputs"`
	Residuals    []FitResidual    `json:"residuals"`
	Missing      []FitMode        `json:"missing_modes"`
	Correlation  [][]float64      `json:"correlation"`
	Alternatives []FitAlternative `json:"alternatives"`
	Cost         *float64         `json:"cost"`
	Chi2         *float64         `json:"chi2"`
	Freedom      int              `json:"degrees_of_freedom"`
	Factor       *float64         `json:"widened_by"`
	Open         []string         `json:"undecided"`
	Notes        []string         `json:"notes"`
	Next         *FitNext         `json:"next_reading"`
	Lines        []FitLine        `json:"lines"`
	Requirements []RequirementRow `json:"requirements"`
	Collected    []Collected      `json:"collected"`
	Cautions     []CautionNote    `json:"cautions"`
	Written      []string         `json:"written"` // lets that --write put into the scenario
	Verdict      string           `json:"verdict"`

	text string // of the scenario, with what was found
}

// Text is the scenario with what was found in it; "" where nothing is to be written.
func (d *FitDoc) Text() string { return d.text }

// FitUnknown is a let as the fit leaves it.
type FitUnknown struct {
	Name      string    `json:"name"`
	Value     float64   `json:"value"`
	Unit      string    `json:"unit"`
	Shown     string    `json:"shown_unit"` // as its let is written; "": none
	Low95     *float64  `json:"low95"`
	High95    *float64  `json:"high95"`
	StandardU *float64  `json:"standard_u"` // in the unit of the value
	From      *float64  `json:"from"`       // range sought in; null for a known
	To        *float64  `json:"to"`
	AtBound   bool      `json:"at_bound"`
	Decided   bool      `json:"decided"`  // false: no reading decides it
	Stated    *float64  `json:"stated"`   // known beforehand
	StatedU   *float64  `json:"stated_u"` // its standard uncertainty
	Parts     []FitPart `json:"contributions"`
}

// FitPart is the change of a value for one standard uncertainty of what its
// doubt comes from: a let that was known, or the readings of a block.
type FitPart struct {
	Source string  `json:"source"`
	Change float64 `json:"change"`
}

// FitResidual is one reading held against the fitted line.
type FitResidual struct {
	Reading     string   `json:"reading"`
	Kind        string   `json:"kind"`
	Line        string   `json:"line"`
	Plane       string   `json:"plane"`
	Mode        *int     `json:"mode"`
	Count       *int     `json:"count"` // of returns or swings
	Observed    float64  `json:"observed"`
	Computed    *float64 `json:"computed"`
	Uncertainty float64  `json:"uncertainty"`
	Unit        string   `json:"unit"`
	Normalized  *float64 `json:"normalized"` // (observed - computed)/uncertainty
	Stranger    bool     `json:"stranger"`
	Assumed     bool     `json:"assumed_uncertainty"`
}

// FitMode is a vibration that nothing was read of though one above it was.
type FitMode struct {
	Reading   string  `json:"reading"`
	Line      string  `json:"line"`
	Mode      int     `json:"mode"`
	Frequency float64 `json:"frequency_hz"`
}

// FitAlternative is another solution that explains the readings about as well.
type FitAlternative struct {
	Unknowns     []FitUnknown     `json:"unknowns"`
	Cost         float64          `json:"cost"`
	Modes        []int            `json:"modes"` // of the residuals, in their order; 0 for a stranger
	Requirements []RequirementRow `json:"requirements"`
}

// FitNext is the further reading that would help most.
type FitNext struct {
	What        string  `json:"what"`
	Kind        string  `json:"kind"`
	Line        *string `json:"line"`
	Mode        *int    `json:"mode"`
	Value       float64 `json:"value"`
	Uncertainty float64 `json:"uncertainty"`
	Unit        string  `json:"unit"`
	Unknown     string  `json:"unknown"`
	From        float64 `json:"relative_half_width"`
	To          float64 `json:"relative_half_width_after"`
}

// FitLine is one row of the force table.
type FitLine struct {
	Line    string   `json:"line"`
	Mark    string   `json:"mark"`
	Length  float64  `json:"length_m"`
	Modes   int      `json:"modes"` // paired
	Tension *float64 `json:"tension_n"`
	Low95   *float64 `json:"low95"`
	High95  *float64 `json:"high95"`
	Where   string   `json:"where"` // mean, or the place that a requirement names
	Design  *float64 `json:"design_n"`
	Ratio   *float64 `json:"ratio"`
	Verdict string   `json:"verdict"`
	Action  string   `json:"next_action"`
	// Temperature at which the tension holds, and how it changes with it; null
	// where the scenario does not say.
	Temperature *float64  `json:"temperature_k"`
	PerKelvin   *float64  `json:"tension_per_kelvin"`
	Parts       []FitPart `json:"contributions"`
}

func emptyFit() *FitDoc {
	return &FitDoc{
		Unknowns: []FitUnknown{}, Knowns: []FitUnknown{}, Exact: []string{}, Residuals: []FitResidual{}, Missing: []FitMode{}, Correlation: [][]float64{},
		Alternatives: []FitAlternative{}, Open: []string{}, Notes: []string{}, Lines: []FitLine{}, Requirements: []RequirementRow{}, Collected: []Collected{},
		Cautions: []CautionNote{}, Written: []string{}, Verdict: "undecided",
	}
}

func (l *loaded) unknownRow(u *fit.Unknown) FitUnknown {
	row := FitUnknown{Name: u.Name, Value: u.Value, Unit: u.Unit, Shown: l.compiled.WrittenUnit(u.Name), Low95: finite(u.Low95), High95: finite(u.High95), AtBound: u.AtBound, Decided: !u.Undecided, Parts: []FitPart{}}
	if row.StandardU = finite(u.U); u.Log {
		row.StandardU = finite(u.U * u.Value)
	}
	if u.From < u.To {
		row.From, row.To = finite(u.From), finite(u.To)
	}
	if u.StatedU > 0 {
		row.Stated, row.StatedU = finite(u.Stated), finite(u.StatedU)
	}
	return row
}

func (l *loaded) residualRow(r *fit.Residual) FitResidual {
	row := FitResidual{
		Reading: r.Reading, Kind: r.Kind.String(), Line: l.net.Lines[r.Line].Name, Plane: planeWord(r.Sideways), Observed: r.Observed, Computed: finite(r.Computed),
		Uncertainty: r.U, Unit: r.Kind.Unit(), Normalized: finite((r.Observed - r.Computed) / r.U), Stranger: r.Stranger, Assumed: r.Assumed,
	}
	if r.Mode > 0 {
		row.Mode = &r.Mode
	}
	if r.Order > 0 {
		row.Count = &r.Order
	}
	return row
}

func partsOf(n *doubt.Number) []FitPart {
	out := []FitPart{}
	for _, c := range n.Contributions {
		if finite(c.Change) != nil && c.Change != 0 {
			out = append(out, FitPart{c.Input, c.Change})
		}
	}
	return out
}

func planeWord(sideways bool) string {
	if sideways {
		return "sideways"
	}
	return "vertical"
}

// fitted fills the document from a result.
func (l *loaded) fitted(doc *FitDoc, res *fit.Result) {
	best := res.Best
	for i := range best.Unknowns {
		doc.Unknowns = append(doc.Unknowns, l.unknownRow(&best.Unknowns[i]))
	}
	for i := range best.Informed {
		doc.Knowns = append(doc.Knowns, l.unknownRow(&best.Informed[i]))
	}
	for i := range best.Residuals {
		doc.Residuals = append(doc.Residuals, l.residualRow(&best.Residuals[i]))
	}
	for _, m := range best.Missing {
		doc.Missing = append(doc.Missing, FitMode{Reading: m.Reading, Line: l.net.Lines[m.Line].Name, Mode: m.Number, Frequency: m.Frequency})
	}
	for _, row := range best.Correlation {
		for k := range row {
			if row[k] != row[k] { // a let that nothing decides hangs together with nothing
				row[k] = 0
			}
		}
		doc.Correlation = append(doc.Correlation, row)
	}
	doc.Cost, doc.Chi2, doc.Freedom = finite(best.Cost), finite(best.Chi2), best.Freedom
	doc.Factor = finite(best.Factor)
	doc.Open = append(doc.Open, best.Open...)
	doc.Notes = append(doc.Notes, best.Notes...)
	for _, s := range res.Alternatives {
		alt := FitAlternative{Cost: s.Cost, Modes: []int{}, Requirements: []RequirementRow{}}
		for i := range s.Unknowns {
			alt.Unknowns = append(alt.Unknowns, l.unknownRow(&s.Unknowns[i]))
		}
		for i := range s.Residuals {
			alt.Modes = append(alt.Modes, s.Residuals[i].Mode)
		}
		doc.Alternatives = append(doc.Alternatives, alt)
	}
	if n := res.Next; n != nil {
		row := FitNext{What: n.What, Kind: n.Candidate, Value: n.Value, Uncertainty: n.U, Unit: n.Unit, Unknown: n.Let, From: n.From, To: n.To}
		if n.Line >= 0 {
			row.Line = &l.net.Lines[n.Line].Name
		}
		if n.Mode > 0 {
			row.Mode = &n.Mode
		}
		doc.Next = &row
	}
}
