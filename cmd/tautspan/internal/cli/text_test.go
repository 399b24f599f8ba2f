package cli

import (
	"math"
	"strings"
	"testing"

	"github.com/tautspan/tautspan/dsl/unit"
)

func TestWithBar(t *testing.T) {
	r := reader{unit.SI}
	for _, c := range []struct {
		v, bar float64
		si     string
		want   string
	}{
		{0.18423, 0.00056, "m", "184.2 ± 0.6 mm"},
		{0.18423, 0.00014, "m", "184.23 ± 0.14 mm"},
		{4120, 37, "N", "4.12 ± 0.04 kN"},
		{0.02, 0, "1", "0.02"},
		{math.NaN(), 1, "m", "-"},
		{1.0126, 0.004, "Hz", "1.013 ± 0.004 Hz"},
	} {
		if got := r.withBar(c.v, c.bar, c.si); got != c.want {
			t.Errorf("%g ± %g %s: %q, want %q", c.v, c.bar, c.si, got, c.want)
		}
	}
}

func TestTableAligns(t *testing.T) {
	tb := newTable("name", "value").flush(1)
	tb.add("é", "1.5")
	tb.add("long", "12.25")
	want := "  name  value\n  é       1.5\n  long  12.25"
	if got := strings.Join(tb.lines(), "\n"); got != want {
		t.Errorf("got\n%s\nwant\n%s", got, want)
	}
}

func TestPictureKeepsExtremes(t *testing.T) {
	values := make([]float64, 1000)
	values[500], values[501] = 3, -1 // a spike much narrower than a column
	lines, top, bottom := picture(values, 20, 4)
	if len(lines) != 4 || top != 3 || bottom != -1 {
		t.Fatalf("%d lines from %g to %g", len(lines), top, bottom)
	}
	for i, l := range lines {
		if !strings.ContainsFunc(l, func(r rune) bool { return r != '\u2800' }) {
			t.Errorf("line %d is empty: the spike was lost", i)
		}
	}
	if lines, _, _ := picture([]float64{math.NaN()}, 20, 4); lines != nil {
		t.Error("a record without values has no picture")
	}
}

func TestWrap(t *testing.T) {
	for _, l := range wrap(strings.Repeat("word ", 40), 30, "  ") {
		if len(l) > 32 {
			t.Errorf("%q is too long", l)
		}
	}
}
