package app

import (
	"math"

	"github.com/tautspan/tautspan/engine/spectrum"
)

// uncalibrated stands for the unit of samples that have none.
const uncalibrated = "uncalibrated"

// PeaksDoc is what a record holds.
type PeaksDoc struct {
	Head
	Rate     *float64      `json:"rate_hz"`
	Duration *float64      `json:"duration_s"`
	Start    *float64      `json:"start_s"` // by the file's own clock
	Channels []PeakChannel `json:"channels"`
	Notes    []string      `json:"notes"`
	Cautions []CautionNote `json:"cautions"`
}

// PeakChannel is one channel. Times count from the record's first sample used.
type PeakChannel struct {
	Name     string       `json:"name"`
	Unit     string       `json:"unit"`         // SI, or uncalibrated
	Written  string       `json:"written_unit"` // as the file says it
	From     *float64     `json:"from_s"`       // the stretch analysed
	To       *float64     `json:"to_s"`
	Struck   bool         `json:"struck"` // a strike was found; the stretch starts after it
	Step     *float64     `json:"resolution_hz"`
	Peaks    []RecordPeak `json:"peaks"`
	Series   *SeriesFacts `json:"series"`
	Spectrum *Thinned     `json:"spectrum"`
	Notes    []string     `json:"notes"`

	factor float64 // SI per unit of the samples
}

// RecordPeak is one vibration.
type RecordPeak struct {
	Frequency    float64  `json:"frequency_hz"`
	Uncertainty  float64  `json:"uncertainty_hz"` // one standard uncertainty
	Level        float64  `json:"level_db"`       // against the strongest of the channel
	Prominence   float64  `json:"prominence_db"`  // above the noise around
	Amplitude    *float64 `json:"amplitude"`      // in the channel's unit where the stretch starts
	Decay        *float64 `json:"decay_per_s"`
	DecayU       *float64 `json:"decay_uncertainty_per_s"`
	DampingRatio *float64 `json:"damping_ratio"`
	Straight     *bool    `json:"decay_straight"` // null: no decay can be told
	Why          string   `json:"decay_remark"`
	Number       *int     `json:"number"` // in the series
	NearLimit    bool     `json:"possible_alias"`
	Mains        bool     `json:"possible_mains_hum"`
}

// SeriesFacts is the stiff string that the peaks form.
type SeriesFacts struct {
	F0      float64   `json:"f0_hz"` // of the same string without stiffness
	F0U     float64   `json:"f0_uncertainty_hz"`
	B       float64   `json:"stiffness_b"` // f_n = n f0 sqrt(1 + B n^2)
	BU      float64   `json:"stiffness_b_uncertainty"`
	RMS     float64   `json:"residual_relative"`
	Used    int       `json:"used"`
	Left    []float64 `json:"left_out_hz"`
	Missing []int     `json:"missing_numbers"`
}

// Thinned is a spectrum at few places, each the highest of its stretch.
type Thinned struct {
	From  float64   `json:"from_hz"`
	To    float64   `json:"to_hz"`
	Level []float64 `json:"level_db"` // against the highest
}

// rowOf puts a peak into a row. A decay that is not straight is not told as one
// number: the remark says what it does.
func rowOf(p *spectrum.Peak, rate, factor float64) RecordPeak {
	network, _ := spectrum.Mains(p.Frequency, rate)
	row := RecordPeak{
		Frequency: p.Frequency, Uncertainty: p.FrequencyU, Level: p.Level, Prominence: p.Prominence, Amplitude: finite(p.Amplitude * factor),
		Why: p.Why, NearLimit: p.NearLimit, Mains: network > 0 && !p.Straight,
	}
	if math.IsNaN(p.Decay) {
		return row
	}
	straight := p.Straight
	row.Straight = &straight
	if straight {
		row.Decay, row.DecayU, row.DampingRatio = finite(p.Decay), finite(p.DecayU), finite(p.DampingRatio())
	}
	return row
}

func seriesOf(s *spectrum.Series, peaks []spectrum.Peak) *SeriesFacts {
	out := &SeriesFacts{F0: s.F0, F0U: s.F0U, B: s.B, BU: s.BU, RMS: s.RMS, Left: []float64{}, Missing: []int{}}
	seen, top := map[int]bool{}, 0
	for i, n := range s.Order {
		if n == 0 {
			out.Left = append(out.Left, peaks[i].Frequency)
			continue
		}
		out.Used++
		seen[n] = true
		top = max(top, n)
	}
	for n := 1; n < top; n++ {
		if !seen[n] {
			out.Missing = append(out.Missing, n)
		}
	}
	return out
}

// thinnedPlaces is how many values a thinned spectrum has.
const thinnedPlaces = 240

// thinned is the averaged spectrum between 0 and a little above the highest peak.
func thinned(x []float64, rate float64, found *spectrum.Result, want PeaksWant) *Thinned {
	high := rate / 2
	if want.High > 0 {
		high = math.Min(high, want.High)
	} else if n := len(found.Peaks); n > 0 {
		high = math.Min(high, 1.15*found.Peaks[n-1].Frequency)
	}
	low := want.Low
	first := int(found.From * rate)
	d := spectrum.Welch(x[min(first, len(x)):], rate, (high-low)/thinnedPlaces)
	return &Thinned{From: low, To: high, Level: d.Thin(low, high, thinnedPlaces)}
}
