package mesh

import (
	"math"
	"testing"

	"github.com/tautspan/tautspan/engine/formula"
	"github.com/tautspan/tautspan/engine/scenario"
)

// tones is a sum of n cosines from 1 Hz in steps of 0.83 Hz.
func tones(n int) formula.Program {
	sum := formula.Const(0)
	for i := range n {
		angle := formula.Mul(formula.Const(2*math.Pi*(1+0.83*float64(i))), formula.Arg(formula.ArgT))
		sum = formula.Add(sum, formula.Apply(formula.OpCos, formula.Add(angle, formula.Const(float64(i*i)))))
	}
	return sum
}

// The root mean square frequency of a sum of cosines of equal size is that of
// their frequencies, however long the record.
func TestBandOfLongRecords(t *testing.T) {
	want := 0.0
	for i := range 40 {
		f := 1 + 0.83*float64(i)
		want += f * f / 40
	}
	want = math.Sqrt(want)
	force := scenario.History{Value: tones(40)}
	for _, end := range []float64{2, 20, 100, 1000, 20000} {
		const every = 1e-3
		b := &builder{m: &Mesh{Timing: Timing{Every: every, Rows: int(end/every) + 1}}}
		if got := b.historyFrequency(force, 0); math.Abs(got/want-1) > 0.05 {
			t.Errorf("%g s: %.4g Hz, want %.4g", end, got, want)
		}
	}
}

// A smooth load with breaks keeps its order on a long record, and a jump is seen.
func TestJumpOfLongRecords(t *testing.T) {
	at := formula.Arg(formula.ArgT)
	smooth := formula.Apply(formula.OpSin, formula.Mul(formula.Const(2*math.Pi*30), at))
	for _, end := range []float64{10, 1000, 50000} {
		b := &builder{m: &Mesh{Timing: Timing{Every: 1e-3, Rows: int(end*1000) + 1}}}
		for _, c := range []struct {
			name string
			h    scenario.History
			want int
		}{
			{"sine with a break where it passes on smoothly", scenario.History{Value: formula.Mul(smooth, smooth), Breaks: []float64{end / 3}}, SmoothJump},
			{"step", scenario.History{Value: formula.Apply(formula.OpStep, at, formula.Const(1), formula.Const(end/3)), Breaks: []float64{end / 3}}, 0},
			{"sine from t = 0 on", scenario.History{Value: smooth}, 1},
		} {
			if got := b.historyJump(c.h); got != c.want {
				t.Errorf("%g s: %s: order %d, want %d", end, c.name, got, c.want)
			}
		}
	}
}

// The cost does not grow with the record, and is the same every time.
func TestLooksAreBounded(t *testing.T) {
	for _, width := range []float64{1, 1e3, 1e6} {
		n := 0
		f := func(x float64) float64 { n++; return math.Cos(7 * x) }
		first := sample(f, width, 1e-3)
		if n > 12600 {
			t.Errorf("width %g: %d looks", width, n)
		}
		if again := sample(f, width, 1e-3); again != first {
			t.Errorf("width %g: %v, then %v", width, first, again)
		}
	}
}

// A pulse without breaks far into a long record is found by its peak.
func TestPulseInLongRecord(t *testing.T) {
	const wide = 0.5
	f := func(x float64) float64 { return math.Exp(-(x-711.3)*(x-711.3)/(2*wide*wide)) * math.Cos(200*x) }
	s := sample(f, 1000, 1e-3)
	if got := math.Sqrt(s.change / s.value); math.Abs(got/200-1) > 0.05 {
		t.Errorf("%.4g rad/s, want 200", got)
	}
}
