package spectrum_test

import (
	"encoding/csv"
	"math"
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
		out[row[0]] = append(out[row[0]], partial{n, hz, decay, row[11] == "1"})
	}
	return out
}

// Four real strings, plucked and struck, against an independent analysis that was
// made with other methods (testdata/records/README.md): f0 within 0.1 %, B within
// 10 %, every clean decay within 20 %.
func TestRealStrings(t *testing.T) {
	all := partials(t)
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
					t.Logf("%s partial %d at %.2f Hz: straight here (%.3f), not clean there (%.3f)", c.file, p.n, p.frequency, q.Decay, p.decay)
				}
			}
		}
		t.Logf("%s: %d of %d clean decays are straight here", c.file, told, clean)
	}
}
