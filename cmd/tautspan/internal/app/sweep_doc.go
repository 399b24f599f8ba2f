package app

import "github.com/tautspan/tautspan/engine/doubt"

// SweepDoc is the answer of a sweep.
type SweepDoc struct {
	Head
	ResultDir    string           `json:"result_dir"`
	Cases        int              `json:"cases"`
	Done         int              `json:"done"`
	Failed       int              `json:"failed"`
	Cut          bool             `json:"cut"` // stopped before all cases were done
	Columns      []string         `json:"columns"`
	Rows         [][]*float64     `json:"rows"` // the first cases, in the order of columns
	Summary      SweepSummary     `json:"summary"`
	Failures     []SweepFailure   `json:"failures"`
	Files        []string         `json:"files"`
	Crossings    []SweepCrossing  `json:"crossings"`
	Searches     []SweepSearch    `json:"searches"`
	Best         []SweepBest      `json:"best"`
	Requirements []RequirementRow `json:"requirements"`
	Collected    []Collected      `json:"collected"`
	Cautions     []CautionNote    `json:"cautions"`
	Notes        []string         `json:"notes"`
	Verdict      string           `json:"verdict"`
}

// SweepSummary says what the cases that were done come to.
type SweepSummary struct {
	Columns  []ColumnSummary `json:"columns"`
	Verdicts []VerdictCount  `json:"verdicts"`
}

// ColumnSummary is one column over the cases that have a value there.
type ColumnSummary struct {
	Name   string   `json:"name"`
	Count  int      `json:"count"`
	Least  *float64 `json:"least"`
	Median *float64 `json:"median"`
	Most   *float64 `json:"most"`
	Mean   *float64 `json:"mean"`
	SD     *float64 `json:"sd"`
	P05    *float64 `json:"p05"`
	P95    *float64 `json:"p95"`
}

// VerdictCount is how often a requirement came out how.
type VerdictCount struct {
	Text      string `json:"text"`
	Met       int    `json:"met"`
	Undecided int    `json:"undecided"`
	NotMet    int    `json:"not_met"`
}

// SweepFailure is a case without an answer.
type SweepFailure struct {
	Case   int    `json:"case"`
	Reason string `json:"reason"`
}

// SweepCrossing is a value of a let at which two expressions are equal.
type SweepCrossing struct {
	What    string       `json:"what"`
	With    string       `json:"with"`
	Over    string       `json:"over"`
	At      doubt.Number `json:"at"`
	Value   *float64     `json:"value"` // of both, in Unit
	Unit    string       `json:"unit"`
	Touches bool         `json:"touches"`
	Shown   string       `json:"shown"` // unit in which the range is written
	Step    float64      `json:"step"`
}

// SweepSearch is what was searched for one meeting, with what was found.
type SweepSearch struct {
	What  string  `json:"what"`
	With  string  `json:"with"`
	Over  string  `json:"over"`
	From  float64 `json:"from"`
	To    float64 `json:"to"`
	Step  float64 `json:"step"`
	Unit  string  `json:"unit"`
	Shown string  `json:"shown"`
	Found int     `json:"found"`
	// Jumps are places where one overtakes the other by a jump; in Gaps one of them
	// has no value.
	Jumps []float64    `json:"jumps"`
	Gaps  [][2]float64 `json:"gaps"`
}

// SweepBest is the best value of an expression over a let.
type SweepBest struct {
	Measure  string       `json:"measure"`
	Goal     string       `json:"goal"`
	Over     string       `json:"over"`
	At       *float64     `json:"at"`
	OverUnit string       `json:"over_unit"`
	Shown    string       `json:"shown"`
	Value    doubt.Number `json:"value"`
	Inside   bool         `json:"inside"` // false: at an end of the range, and better beyond it for all that is known
	From     float64      `json:"from"`
	To       float64      `json:"to"`
	Step     float64      `json:"step"`
	FlatFrom *float64     `json:"flat_from"` // where it is within 2 % of the best
	FlatTo   *float64     `json:"flat_to"`
	Curve    SweepCurve   `json:"curve"`
	Drift    []SweepDrift `json:"drift"`
}

// SweepCurve is the expression at the places looked at.
type SweepCurve struct {
	Over  []float64  `json:"over"`
	Value []*float64 `json:"value"`
}

// SweepDrift is what one doubtful let, off by a standard uncertainty, makes of it.
type SweepDrift struct {
	Let     string   `json:"let"`
	Sign    int      `json:"sign"`
	Kept    *float64 `json:"kept"` // the value where it was best
	At      *float64 `json:"at"`   // where it is best now
	Reached *float64 `json:"reached"`
}

func emptySweep() *SweepDoc {
	return &SweepDoc{
		Columns: []string{}, Rows: [][]*float64{}, Summary: SweepSummary{Columns: []ColumnSummary{}, Verdicts: []VerdictCount{}}, Failures: []SweepFailure{}, Files: []string{},
		Crossings: []SweepCrossing{}, Searches: []SweepSearch{}, Best: []SweepBest{}, Requirements: []RequirementRow{}, Collected: []Collected{}, Cautions: []CautionNote{}, Notes: []string{}, Verdict: "done",
	}
}
