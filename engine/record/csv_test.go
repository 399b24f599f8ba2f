package record_test

import (
	"errors"
	"fmt"
	"math"
	"strings"
	"testing"

	"github.com/tautspan/tautspan/engine/record"
)

func read(text string, opt record.Options) (*record.Record, error) {
	return record.Read(strings.NewReader(text), opt)
}

// Tables as loggers of several makes and countries write them; what is expected is
// written by hand beside each.
func TestTables(t *testing.T) {
	for name, c := range map[string]struct {
		text    string
		opt     record.Options
		rate    float64
		start   float64
		names   string
		samples [][]float64
	}{
		"commas, one heading": {
			"t,a,b\n0,1,10\n0.5,2,20\n1,3,30\n", record.Options{}, 2, 0, "a  b ", [][]float64{{1, 2, 3}, {10, 20, 30}}},
		"names and units": {
			"time,x\ns,mm\n0,1\n0.01,2\n0.02,3\n", record.Options{}, 100, 0, "x mm", [][]float64{{1, 2, 3}}},
		"unit in brackets": {
			"Time [ms],x (g)\n0,1\n10,2\n20,3\n", record.Options{}, 100, 0, "x g", [][]float64{{1, 2, 3}}},
		"semicolons and decimal commas": {
			"t;x\n0,0;1,5\n0,1;-2,5e-1\n0,2;3\n", record.Options{}, 10, 0, "x ", [][]float64{{1.5, -0.25, 3}}},
		"tabs and decimal commas": {
			"t\tx\n0,0\t1,5\n0,1\t2,5\n0,2\t3,5\n", record.Options{}, 10, 0, "x ", [][]float64{{1.5, 2.5, 3.5}}},
		"semicolons and decimal points": {
			"t;x\n0.0;1.5\n0.1;2.5\n0.2;3.5\n", record.Options{}, 10, 0, "x ", [][]float64{{1.5, 2.5, 3.5}}},
		"mark of byte order, line ends of another system, comments": {
			"\xef\xbb\xbf# made by hand\r\nt,x\r\n# inside\r\n0,1\r\n1,2\r\n2,3\r\n", record.Options{}, 1, 0, "x ", [][]float64{{1, 2, 3}}},
		"a head of other text": {
			"Logger 7\nSerial,123,abc,x\nt,x\ns,V\n3,1\n4,2\n5,3\n", record.Options{}, 1, 3, "x V", [][]float64{{1, 2, 3}}},
		"no heading": {
			"0,1\n1,2\n2,3\n", record.Options{}, 1, 0, "2 ", [][]float64{{1, 2, 3}}},
		"no time": {
			"x\n1\n2\n3\n", record.Options{Rate: 50}, 50, 0, "x ", [][]float64{{1, 2, 3}}},
		"time by number": {
			"x,y\n5,0.0\n6,0.1\n7,0.2\n", record.Options{TimeNumber: 2}, 10, 0, "x ", [][]float64{{5, 6, 7}}},
		"time by name": {
			"x,clock\n5,0.0\n6,0.1\n7,0.2\n", record.Options{Time: "clock"}, 10, 0, "x ", [][]float64{{5, 6, 7}}},
		"time of day": {
			"date;x\n2031-05-02 23:59:59.50;1\n2031-05-03 00:00:00.00;2\n2031-05-03 00:00:00.50;3\n", record.Options{}, 2, math.NaN(), "x ", [][]float64{{1, 2, 3}}},
		"time of day with zone": {
			"when,x\n2031-05-02T10:00:00.00Z,1\n2031-05-02T10:00:00.25Z,2\n2031-05-02T10:00:00.50Z,3\n", record.Options{}, 4, math.NaN(), "x ", [][]float64{{1, 2, 3}}},
		"a channel by name, in another order": {
			"t,a,b\n0,1,10\n1,2,20\n2,3,30\n", record.Options{Only: []string{"b", "1"}}, 1, 0, "b  a ", [][]float64{{10, 20, 30}, {1, 2, 3}}},
		"cut": {
			"t,a\n0,1\n1,2\n2,3\n3,4\n4,5\n", record.Options{From: 1, To: 3}, 1, 1, "a ", [][]float64{{2, 3, 4}}},
		"a row is missing": {
			"t,a\n" + rows(0, 200, 150), record.Options{}, 1, 0, "a ", nil},
	} {
		r, err := read(c.text, c.opt)
		if err != nil {
			t.Errorf("%s: %v", name, err)
			continue
		}
		var names []string
		for _, ch := range r.Channels {
			names = append(names, ch.Name+" "+ch.Unit)
		}
		if got := strings.Join(names, " "); got != c.names {
			t.Errorf("%s: channels %q, expected %q", name, got, c.names)
		}
		if math.Abs(r.Rate/c.rate-1) > 1e-9 || !math.IsNaN(c.start) && r.Start != c.start {
			t.Errorf("%s: rate %v, start %v, expected %v, %v", name, r.Rate, r.Start, c.rate, c.start)
		}
		for i := range c.samples {
			if fmt.Sprint(r.Channels[i].Samples) != fmt.Sprint(c.samples[i]) {
				t.Errorf("%s: %v, expected %v", name, r.Channels[i].Samples, c.samples[i])
			}
		}
	}
}

// rows writes t,t from first on, leaving one out.
func rows(first, count, without int) string {
	var b strings.Builder
	for i := first; i < first+count; i++ {
		if i != without {
			fmt.Fprintf(&b, "%d,%d\n", i, i)
		}
	}
	return b.String()
}

// Stamps rounded to few digits: the rate is that of the whole column, and no row is
// taken for missing or doubled. Steps are chosen against the grain of a millisecond.
func TestRoundedStamps(t *testing.T) {
	for _, step := range []float64{0.0025, 0.0012, 0.0017, 0.0004, 1.0 / 2205, 1.0 / 1500, 0.1} {
		var b strings.Builder
		b.WriteString("t,x\n")
		const n = 5000
		for i := range n {
			fmt.Fprintf(&b, "%.3f,%d\n", float64(i)*step, i%7)
		}
		r, err := read(b.String(), record.Options{})
		if err != nil {
			t.Errorf("step %v: %v", step, err)
			continue
		}
		// The two ends are off by half a millisecond each at most.
		if math.Abs(1/r.Rate-step) > 1.01e-3/(n-1) || len(r.Channels[0].Samples) != n {
			t.Errorf("step %v: read as %v, %d rows of %d", step, 1/r.Rate, len(r.Channels[0].Samples), n)
		}
		for _, f := range r.Findings {
			if f.Code == "missing-samples" || f.Code == "gap" || f.Code == "jitter" {
				t.Errorf("step %v: %s: %s", step, f.Code, f.What)
			}
		}
	}
}

// What is wrong with samples is told, and only that.
func TestFindings(t *testing.T) {
	sine := func(i int) float64 { return math.Sin(0.3 * float64(i)) }
	table := func(value func(i int) string, skip func(i int) bool) string {
		var b strings.Builder
		b.WriteString("t,x\n")
		for i := range 4000 {
			if !skip(i) {
				fmt.Fprintf(&b, "%.4f,%s\n", float64(i)/200, value(i))
			}
		}
		return b.String()
	}
	never := func(int) bool { return false }
	plain := func(f func(int) float64) func(int) string {
		return func(i int) string { return fmt.Sprintf("%.5f", f(i)) }
	}
	for name, c := range map[string]struct {
		text, want string
		samples    int
	}{
		"nothing":      {table(plain(sine), never), "", 4000},
		"clipped":      {table(plain(func(i int) float64 { return max(-0.8, min(0.8, sine(i))) }), never), "clipped", 4000},
		"offset":       {table(plain(func(i int) float64 { return 9.81 + sine(i) }), never), "offset", 4000},
		"drift":        {table(plain(func(i int) float64 { return sine(i) + float64(i-2000)/2000 }), never), "drift", 4000},
		"flat":         {table(func(int) string { return "0" }, never), "nothing-in-it", 4000},
		"rows missing": {table(plain(sine), func(i int) bool { return i == 70 || i == 71 || i == 900 }), "missing-samples", 4000},
		"values empty": {table(func(i int) string {
			if i%999 == 5 {
				return ""
			}
			return plain(sine)(i)
		}, never), "missing-samples", 4000},
		"gap": {table(plain(sine), func(i int) bool { return i >= 1000 && i < 1100 }), "gap", 2900},
	} {
		r, err := read(c.text, record.Options{})
		if err != nil {
			t.Errorf("%s: %v", name, err)
			continue
		}
		var codes []string
		for _, f := range r.Findings {
			codes = append(codes, f.Code)
		}
		if got := strings.Join(codes, " "); got != c.want || len(r.Channels[0].Samples) != c.samples {
			t.Errorf("%s: found %q in %d samples, expected %q in %d: %v", name, got, len(r.Channels[0].Samples), c.want, c.samples, r.Findings)
		}
		if math.Abs(r.Rate-200) > 1e-3 {
			t.Errorf("%s: rate %v, expected 200", name, r.Rate)
		}
	}
	// A missing row is put where it belongs: straight lines, not a shifted rest.
	r, _ := read(table(plain(sine), func(i int) bool { return i == 70 || i == 71 }), record.Options{})
	for i, v := range r.Channels[0].Samples {
		if d := math.Abs(v - sine(i)); d > 1e-5 && i != 70 && i != 71 || d > 0.1 {
			t.Fatalf("sample %d is %v, expected %v", i, v, sine(i))
		}
	}
}

// Jitter is told apart from rounding: stamps off the grid by up to a third of a
// step, written with all their digits.
func TestJitter(t *testing.T) {
	var b strings.Builder
	b.WriteString("t,x\n")
	for i := range 3000 {
		fmt.Fprintf(&b, "%.9f,%d\n", (float64(i)+0.3*math.Sin(float64(i*i)))/100, i%5-2)
	}
	r, err := read(b.String(), record.Options{})
	if err != nil {
		t.Fatal(err)
	}
	if len(r.Findings) != 1 || r.Findings[0].Code != "jitter" || len(r.Channels[0].Samples) != 3000 {
		t.Errorf("%v, %d samples", r.Findings, len(r.Channels[0].Samples))
	}
}

// Wrong tables are refused with the place and, where one can be told, a mend.
func TestWrongTables(t *testing.T) {
	for name, c := range map[string]struct {
		text         string
		opt          record.Options
		code         string
		line, column int
		hint         string
	}{
		"empty":             {"", record.Options{}, "empty-record", 0, 0, ""},
		"words only":        {"hello\nworld\n", record.Options{}, "no-data", 2, 1, "rows of numbers"},
		"bytes":             {"ab\x00\x01\x02", record.Options{}, "not-a-table", 0, 0, ".wav"},
		"no number":         {"t,x\n0,1\n1,bad\n2,3\n", record.Options{}, "broken-row", 3, 3, ""},
		"a field too many":  {"t,x\n0,1\n1,2,3\n2,3\n", record.Options{}, "broken-row", 3, 1, "semicolons"},
		"decimal commas":    {"t,x\n0,0,1,5\n0,1,2\n", record.Options{}, "", 0, 0, ""},
		"time turns back":   {"t,x\n0,1\n2,2\n1,3\n", record.Options{}, "time-turns-back", 4, 1, "--time"},
		"swapped":           {"x,t\n0.3,0\n0.1,1\n0.2,2\n0.1,3\n", record.Options{Time: "x"}, "time-turns-back", 3, 1, "column 2 (t) rises evenly"},
		"time stands still": {"t,x\n1,1\n1,2\n1,3\n", record.Options{}, "time-stands-still", 2, 1, "--time"},
		"time in metres":    {"t,x\nm,s\n0,1\n1,2\n2,3\n", record.Options{}, "wants-time", 3, 1, "--time"},
		"no time":           {"a,b\n5,1\n4,2\n6,3\n", record.Options{}, "no-time", 2, 1, "--rate"},
		"no such channel":   {"t,x\n0,1\n1,2\n2,3\n", record.Options{Only: []string{"y"}}, "unknown-channel", 0, 0, ""},
		"two rows":          {"t,x\n0,1\n1,2\n", record.Options{}, "empty-record", 2, 1, ""},
		"nothing left":      {"t,x\n0,1\n1,2\n2,3\n", record.Options{From: 5}, "empty-record", 0, 0, ""},
		"mostly missing":    {"t,x\n0,1\n1,\n2,\n3,4\n", record.Options{}, "missing-samples", 0, 0, "--from"},
	} {
		_, err := read(c.text, c.opt)
		var e *record.Error
		if !errors.As(err, &e) {
			t.Errorf("%s: %v", name, err)
			continue
		}
		if c.code != "" && e.Code != c.code || c.line > 0 && (e.Line != c.line || e.Column != c.column) || !strings.Contains(e.Hint, c.hint) {
			t.Errorf("%s: %s at %d:%d, hint %q (%s)", name, e.Code, e.Line, e.Column, e.Hint, e.What)
		}
	}
}

// Whatever bytes come, reading ends with a record whose samples are finite and
// whose rate is positive, or with an error.
func FuzzRead(f *testing.F) {
	for _, s := range []string{"t,x\n0,1\n1,2\n2,3\n", "a;b\n0,5;1\n0,6;2\n0,7;3\n", "RIFF\x24\x00\x00\x00WAVEfmt \x10\x00\x00\x00\x01\x00\x01\x00\x40\x1f\x00\x00\x80\x3e\x00\x00\x02\x00\x10\x00data\x08\x00\x00\x00\x01\x00\x02\x00\x03\x00\x04\x00", "date,x\n2031-05-02 10:00:00,1\n2031-05-02 10:00:01,2\n2031-05-02 10:00:02,1\n", "t,x\n0,1e308\n1e-300,-1e308\n1e300,1e308\n"} {
		f.Add([]byte(s), "")
		f.Add([]byte(s), "1")
	}
	f.Fuzz(func(t *testing.T, b []byte, channel string) {
		opt := record.Options{}
		if channel != "" {
			opt.Only = []string{channel}
		}
		r, err := record.Read(strings.NewReader(string(b)), opt)
		if err != nil {
			return
		}
		if !(r.Rate > 0) || math.IsInf(r.Rate, 0) {
			t.Errorf("rate %v", r.Rate)
		}
		for _, c := range r.Channels {
			if len(c.Samples) != len(r.Channels[0].Samples) {
				t.Error("channels of different lengths")
			}
			for _, v := range c.Samples {
				if math.IsNaN(v) || math.IsInf(v, 0) {
					t.Errorf("sample %v", v)
				}
			}
		}
	})
}
