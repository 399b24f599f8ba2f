package app

import (
	"github.com/tautspan/tautspan/dsl/diag"
	"github.com/tautspan/tautspan/engine/doubt"
)

// Format is the version of the JSON documents.
const Format = 1

// Head is what every document carries.
type Head struct {
	Format   int       `json:"format"`
	Version  string    `json:"tautspan"`
	Command  string    `json:"command"`
	Scenario Source    `json:"scenario"`
	Engine   Engine    `json:"engine"`
	Errors   diag.List `json:"errors"`
	Warnings diag.List `json:"warnings"`
}

// Source says which scenario a document belongs to.
type Source struct {
	Title  string `json:"title"`
	File   string `json:"file"`
	SHA256 string `json:"sha256"`
}

// Engine says who computed.
type Engine struct {
	Platform string            `json:"platform"`
	Solvers  map[string]string `json:"solvers"`
}

// CheckDoc is what is known of a scenario without running it.
type CheckDoc struct {
	Head
	Diagnostics diag.List      `json:"diagnostics"`
	Solvers     []SolverCan    `json:"solvers"`
	Lines       []LineFacts    `json:"lines"`
	Lets        []LetFacts     `json:"lets"`
	Run         *RunFacts      `json:"run"`
	Plucks      []PluckFacts   `json:"plucks"`
	Stocks      []StockFacts   `json:"stocks"`
	Cautions    []CautionNote  `json:"cautions"`
	Readings    []ReadingFacts `json:"readings"`
	Sought      []SoughtFacts  `json:"sought"`
}

// ReadingFacts is one statement of a reading with its doubt as it was taken.
type ReadingFacts struct {
	Reading       string    `json:"reading"`
	Line          string    `json:"line"`
	Kind          string    `json:"kind"`
	Number        *int      `json:"number"` // of the mode, or how many returns or swings
	Plane         string    `json:"plane"`
	Unit          string    `json:"unit"`
	Values        []float64 `json:"values"`
	StandardU     []float64 `json:"standard_u"`
	SharedU       float64   `json:"shared_u"`
	AsTaken       string    `json:"as_taken"`
	SharedAsTaken string    `json:"shared_as_taken"`
	Temperature   *float64  `json:"temperature_k"`
}

// SoughtFacts is a let that a fit seeks.
type SoughtFacts struct {
	Name string  `json:"name"`
	From float64 `json:"from"`
	To   float64 `json:"to"`
	Unit string  `json:"unit"`
}

// SolverCan says whether a solver can represent the scenario.
type SolverCan struct {
	Name    string   `json:"name"`
	Can     bool     `json:"can"`
	Reasons []string `json:"reasons"`
	Cost    *float64 `json:"cost"` // cell-steps of three levels
}

// LineFacts is what statics and the first natural vibrations say of a line.
type LineFacts struct {
	Name         string         `json:"name"`
	Length       float64        `json:"length_m"`
	TravelTime   float64        `json:"travel_time_s"`
	Lambda2      *float64       `json:"lambda2"`
	Xi           *float64       `json:"xi"`
	StoredEnergy *float64       `json:"stored_energy_j"`
	Strength     *float64       `json:"share_of_strength"`
	Frequencies  []float64      `json:"frequencies_hz"`
	StartTension float64        `json:"tension_start_n"`
	EndTension   float64        `json:"tension_end_n"`
	Holds        []HoldFacts    `json:"holds"`
	Segments     []SegmentFacts `json:"segments"`
}

// HoldFacts is the force that a joint has to hold because the tension changes there.
type HoldFacts struct {
	Joint string  `json:"joint"`
	Force float64 `json:"force_n"`
}

// SegmentFacts is one segment in SI numbers.
type SegmentFacts struct {
	Name          string   `json:"name"`
	Length        float64  `json:"length_m"`
	MassPerLength float64  `json:"mass_kg_per_m"`
	Tension       float64  `json:"tension_n"`
	WaveSpeed     float64  `json:"wave_speed_m_per_s"`
	Impedance     float64  `json:"impedance_kg_per_s"`
	Bending       float64  `json:"bending_n_m2"`
	Axial         *float64 `json:"axial_n"`
}

// StockFacts is the bending stiffness of a stock with the bounds that follow from
// its matter; the lower one is 0 where it is not known.
type StockFacts struct {
	Name    string  `json:"name"`
	Bending float64 `json:"bending_n_m2"`
	Low     float64 `json:"bending_low_n_m2"`
	High    float64 `json:"bending_high_n_m2"`
}

// LetFacts is a let with its doubt as it was taken.
type LetFacts struct {
	Name      string  `json:"name"`
	Value     float64 `json:"value"`
	Unit      string  `json:"unit"`
	StandardU float64 `json:"standard_u"`
	AsTaken   string  `json:"as_taken"`
}

// RunFacts is what a run will do, defaults filled in.
type RunFacts struct {
	For     float64  `json:"for_s"`
	Every   float64  `json:"every_s"`
	Rows    int      `json:"rows"`
	Agree   float64  `json:"agree"`
	Assumed []string `json:"assumed"` // which of for, every, agree the scenario leaves open
}

// PluckFacts is the force and travel of a pluck.
type PluckFacts struct {
	Name  string  `json:"name"`
	Force float64 `json:"force_n"`
	Drawn float64 `json:"drawn_m"`
}

// ModesDoc is the list of natural vibrations.
type ModesDoc struct {
	Head
	Modes         []ModeRow   `json:"modes"`
	Overdamped    []OverRow   `json:"overdamped"`
	CompleteBelow *float64    `json:"complete_below_hz"`
	Notes         []string    `json:"notes"`
	Collected     []Collected `json:"collected"`
}

// ModeRow is one natural vibration. Line is nil for the modes of tied lines.
type ModeRow struct {
	Line            *string      `json:"line"`
	Plane           *string      `json:"plane"`
	Number          int          `json:"number"`
	Frequency       float64      `json:"frequency_hz"`
	DampedFrequency float64      `json:"damped_frequency_hz"`
	DampingRatio    float64      `json:"damping_ratio"`
	Decay           float64      `json:"decay_per_s"`
	FrequencyDoubt  doubt.Number `json:"frequency"`
	DampingDoubt    doubt.Number `json:"damping"`
	Shape           []ShapeLine  `json:"shape,omitempty"`
}

// ShapeLine is a mode's shape along one line: amplitude, largest 1, and phase.
type ShapeLine struct {
	Line      string    `json:"line"`
	X         []float64 `json:"x_m"`
	Amplitude []float64 `json:"amplitude"`
	Phase     []float64 `json:"phase_rad"`
}

// OverRow is a motion that creeps back without swinging.
type OverRow struct {
	Line  *string `json:"line"`
	Decay float64 `json:"decay_per_s"`
}

// Collected is a value that collect asked for.
type Collected struct {
	Text  string       `json:"text"`
	Value doubt.Number `json:"value"`
	Note  string       `json:"note"` // a formula, or why first order was not enough
}

// ArrivalsDoc is the pulse ledger.
type ArrivalsDoc struct {
	Head
	Arrivals      []ArrivalRow `json:"arrivals"`
	PrunedBelow   float64      `json:"pruned_below"`
	LostAmplitude float64      `json:"lost_amplitude"`
	Reached       float64      `json:"reached_s"`
	Notes         []string     `json:"notes"`
}

// ArrivalRow is one front at one watch.
type ArrivalRow struct {
	Watch     string   `json:"watch"`
	Excite    string   `json:"excite"`
	Number    int      `json:"number"`
	Time      float64  `json:"time_s"`
	Quantity  string   `json:"quantity"`
	Unit      string   `json:"unit"`
	Amplitude float64  `json:"amplitude"`
	Sign      int      `json:"sign"`
	Path      []string `json:"path"`
	Merged    int      `json:"merged"`
	Smeared   bool     `json:"smeared"`
	Settled   *float64 `json:"settled"`
	PeakTime  *float64 `json:"peak_time_s"`
}

// RunDoc is the answer of a run.
type RunDoc struct {
	Head
	ResultDir    string           `json:"result_dir"`
	Watches      []WatchRow       `json:"watches"`
	Solvers      []SolverRow      `json:"solvers"`
	Requirements []RequirementRow `json:"requirements"`
	Collected    []Collected      `json:"collected"`
	Energy       []EnergyRow      `json:"energy"`
	Cautions     []CautionNote    `json:"cautions"`
	Run          *RunFacts        `json:"run"`
	Plucks       []PluckFacts     `json:"plucks"`
	Plugins      []PluginUse      `json:"plugins"` // loads and laws that the run used
	Notes        []string         `json:"notes"`
	Cut          bool             `json:"cut"`
	Verdict      string           `json:"verdict"`
}

// WatchRow is one watched quantity held against all solvers.
type WatchRow struct {
	Name           string       `json:"name"`
	Quantity       string       `json:"quantity"`
	Unit           string       `json:"unit"`
	Mean           bool         `json:"mean_over_every"` // the record holds means over one interval
	Solvers        []WatchVoice `json:"solvers"`
	Peak           doubt.Number `json:"peak"`
	RMS            doubt.Number `json:"rms"`
	Final          doubt.Number `json:"final"`
	Difference     *float64     `json:"difference"`
	ResolvingPower *float64     `json:"resolving_power"`
	Verdict        string       `json:"verdict"`
	OddOneOut      *string      `json:"odd_one_out"`
	Reason         string       `json:"reason"`
}

// WatchVoice is what one solver says of a watched quantity.
type WatchVoice struct {
	Solver     string   `json:"solver"`
	Peak       *float64 `json:"peak"`
	TimeOfPeak *float64 `json:"time_of_peak_s"`
	ErrorBar   *float64 `json:"error_bar"`
	Order      *float64 `json:"order"`
}

// PluginUse says which load or law a run used; the solvers' rows say it of theirs.
type PluginUse struct {
	Name    string  `json:"name"`
	Kind    string  `json:"kind"`
	Version string  `json:"version"`
	SHA256  *string `json:"sha256"` // of a plugin's file; null: built in
}

// SolverRow is a solver that ran, or why it did not.
type SolverRow struct {
	Name           string   `json:"name"`
	Version        string   `json:"version"`
	Cells          *int     `json:"cells"`
	Steps          *int     `json:"steps"`
	Levels         []int    `json:"levels"`
	SHA256         *string  `json:"sha256"` // of a plugin's file; null: built in
	ReasonIfAbsent *string  `json:"reason_if_absent"`
	Notes          []string `json:"notes"`
}

// RequirementRow is one requirement with its verdict.
type RequirementRow struct {
	Text    string       `json:"text"`
	Clause  string       `json:"clause"`
	Remark  string       `json:"remark"`
	Measure string       `json:"measure"`
	Value   doubt.Number `json:"value"`
	Limit   *float64     `json:"limit"`
	Upper   *float64     `json:"upper"`
	Unit    string       `json:"unit"`
	Shown   string       `json:"shown_unit"` // as the limit is written; "": none
	Verdict string       `json:"verdict"`
	Margin  *float64     `json:"margin"`
	Settle  string       `json:"settle"`

	of int // which of the scenario's requirements; used by a fit
}

// EnergyRow is the energy account of one solver.
type EnergyRow struct {
	Solver      string   `json:"solver"`
	Start       *float64 `json:"start_j"`
	Work        *float64 `json:"work_j"`
	End         *float64 `json:"end_j"`
	Lost        *float64 `json:"lost_j"`
	Unaccounted *float64 `json:"unaccounted_j"`
}

// CautionNote is a safety note whose trigger applies.
type CautionNote struct {
	Code string `json:"code"`
	Text string `json:"text"`
}
