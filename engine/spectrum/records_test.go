package spectrum_test

import (
	"encoding/csv"
	"math"
	"math/rand/v2"
	"os"
	"path/filepath"
	"strconv"
	"testing"

	"github.com/tautspan/tautspan/engine/record"
	"github.com/tautspan/tautspan/engine/spectrum"
)

const recordsDir = "../../testdata/records"

func openRecord(t *testing.T, name string) *record.Record {
	t.Helper()
	f, err := os.Open(filepath.Join(recordsDir, name))
	if err != nil {
		t.Fatal(err)
	}
	defer func() { _ = f.Close() }()
	read := func() (*record.Record, error) { return record.ReadWAV(f, record.Options{}) }
	if filepath.Ext(name) == ".csv" {
		read = func() (*record.Record, error) { return record.ReadCSV(f, record.Options{}) }
	}
	r, err := read()
	if err != nil {
		t.Fatal(err)
	}
	return r
}

// partial is a row of the independent analysis.
type partial struct {
	n                int
	frequency, decay float64
	clean            bool
	off              float64 // dB rms of the log envelope about its line
}

func partials(t *testing.T) map[string][]partial {
	t.Helper()
	f, err := os.Open(filepath.Join(recordsDir, "partials.csv"))
	if err != nil {
		t.Fatal(err)
	}
	defer func() { _ = f.Close() }()
	rows, err := csv.NewReader(f).ReadAll()
	if err != nil {
		t.Fatal(err)
	}
	out := map[string][]partial{}
	for _, row := range rows[1:] {
		n, _ := strconv.Atoi(row[1])
		hz, err := strconv.ParseFloat(row[2], 64)
		if err != nil {
			t.Fatal(err)
		}
		decay, err := strconv.ParseFloat(row[4], 64)
		if err != nil {
			decay = math.NaN() // not told there
		}
		off, err := strconv.ParseFloat(row[8], 64)
		if err != nil {
			off = math.NaN()
		}
		out[row[0]] = append(out[row[0]], partial{n, hz, decay, row[11] == "1", off})
	}
	return out
}

// Four real strings, plucked and struck, against an independent analysis that was
// made with other methods (testdata/records/README.md): f0 within 0.1 %, B within
// 10 %, every clean decay within 20 %.
func TestRealStrings(t *testing.T) {
	all := partials(t)
	ratio := map[string]float64{} // B/f0^2
	allClean, allTold := 0, 0
	for _, c := range []struct {
		file, note string
		f0, b      float64
		strongB    bool // the analysis says that B is sure to 10 %
	}{
		{"bass_e_open.wav", "bass_e_open", 41.199, 1.450e-4, true},
		{"steel_e_open.wav", "steel_e_open", 330.051, 2.001e-5, true},
		{"steel_e_fret5.wav", "steel_e_fret5", 440.530, 3.535e-5, true},
		{"piano_c4.wav", "piano_c4", 261.475, 2.921e-4, true},
		{"bass_e_open_2205hz.csv", "bass_e_open", 41.194, 1.442e-4, true},
		{"piano_c4_stereo_6000hz.csv", "piano_c4", 261.41, 3.00e-4, false},
	} {
		r := openRecord(t, c.file)
		found, err := spectrum.Find(r.Channels[0].Samples, r.Rate, spectrum.Want{})
		if err != nil {
			t.Fatal(err)
		}
		s, ok := spectrum.FitSeries(found.Peaks)
		if !ok {
			t.Errorf("%s: no series", c.file)
			continue
		}
		ratio[c.note] = s.B / (s.F0 * s.F0)
		used := 0
		for _, n := range s.Order {
			if n > 0 {
				used++
			}
		}
		t.Logf("%s: f0 %.3f +- %.3f (%.3f), B %.3e +- %.1e (%.3e), %d of %d peaks", c.file, s.F0, s.F0U, c.f0, s.B, s.BU, c.b, used, len(s.Order))
		if math.Abs(s.F0/c.f0-1) > 1e-3 {
			t.Errorf("%s: f0 %.4f Hz, the other analysis %.4f", c.file, s.F0, c.f0)
		}
		if c.strongB && math.Abs(s.B/c.b-1) > 0.1 {
			t.Errorf("%s: B %.4e, the other analysis %.4e", c.file, s.B, c.b)
		}
		if filepath.Ext(c.file) == ".csv" {
			continue
		}
		clean, told := 0, 0
		for _, p := range all[c.note] {
			var q *spectrum.Peak
			for i := range found.Peaks {
				if d := math.Abs(found.Peaks[i].Frequency - p.frequency); d < 2e-3*p.frequency && (q == nil || d < math.Abs(q.Frequency-p.frequency)) {
					q = &found.Peaks[i]
				}
			}
			if q != nil {
				if p.clean {
					clean++
					if q.Straight {
						told++
						if math.Abs(q.Decay/p.decay-1) > 0.2 {
							t.Errorf("%s partial %d: decay %.3f/s, the other analysis %.3f", c.file, p.n, q.Decay, p.decay)
						}
					} else {
						t.Logf("%s partial %d at %.2f Hz: clean there, here %s (%.3f against %.3f)", c.file, p.n, p.frequency, q.Why, q.Decay, p.decay)
					}
				} else if q.Straight {
					// Here a line is followed less far down into the noise, and may be
					// straight so far; then its slope is the other analysis' all the same.
					if p.off > 2 && math.Abs(q.Decay/p.decay-1) > 0.2 {
						t.Errorf("%s partial %d: straight with %.3g/s here, %.1f dB rms off its line of %.3g/s there", c.file, p.n, q.Decay, p.off, p.decay)
					}
					t.Logf("%s partial %d at %.2f Hz: straight here (%.3f), not clean there (%.3f)", c.file, p.n, p.frequency, q.Decay, p.decay)
				}
			}
		}
		t.Logf("%s: %d of %d clean decays are straight here", c.file, told, clean)
		allClean, allTold = allClean+clean, allTold+told
	}
	if allTold < allClean*8/10 || allClean < 25 {
		t.Errorf("only %d of %d clean decays are told to be straight", allTold, allClean)
	}
	// The same string at two lengths: B/f0^2 = 4 pi^2 EI m/T^2 does not depend on it.
	// The other analysis: 1.837e-10 and 1.822e-10 s^2; its B is good to some per cent.
	a, b := ratio["steel_e_open"], ratio["steel_e_fret5"]
	t.Logf("B/f0^2 of one string at two lengths: %.4g and %.4g s^2", a, b)
	if math.Abs(a/b-1) > 0.05 {
		t.Errorf("B/f0^2 of one string: %.4g and %.4g s^2", a, b)
	}
}

// White noise holds no peak.
func TestNoiseHoldsNothing(t *testing.T) {
	r := rand.New(rand.NewPCG(7, 7))
	for range 40 {
		if found, err := spectrum.Find(synthetic(r, nil, 100, 6000, 1), 100, spectrum.Want{}); err == nil {
			t.Errorf("%d peaks in noise, the first at %.3f Hz", len(found.Peaks), found.Peaks[0].Frequency)
		}
	}
}
