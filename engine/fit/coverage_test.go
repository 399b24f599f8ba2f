package fit

import (
	"context"
	"math/rand/v2"
	"sort"
	"strings"
	"testing"

	"github.com/tautspan/tautspan/dsl"
	"github.com/tautspan/tautspan/engine/mesh"
	"github.com/tautspan/tautspan/engine/modal"
	"github.com/tautspan/tautspan/engine/scenario"
	"github.com/tautspan/tautspan/scenarios"
)

// hangerText is a clamped line of 30 m and 20 kg/m under 500 kN with 180 kN m^2,
// bending parameter 50.
const hangerText = "let pull = 400 kN\nlet stiff = 100 kN*m^2\nstock w {\n mass 20 kg/m\n bending stiff\n}\nline l {\n tension pull\n support a clamped\n segment z w 30 m\n support b clamped\n}\n"

const hangerSought = "seek pull from 150 kN to 1500 kN\nseek stiff from 30 kN*m^2 to 1000 kN*m^2\n"

const (
	hangerPull  = 500e3
	hangerStiff = 180e3
)

// hangerFrequencies are the true vibrations.
func hangerFrequencies(t testing.TB, count int) []float64 {
	t.Helper()
	tmpl := templateOf(t, hangerText)
	values, err := tmpl.Values(map[string]float64{"pull": hangerPull, "stiff": hangerStiff})
	if err != nil {
		t.Fatal(err)
	}
	net, err := tmpl.Bind(values)
	if err != nil {
		t.Fatal(err)
	}
	m, err := mesh.Build(net)
	if err != nil {
		t.Fatal(err)
	}
	res, err := modal.Find(m, modal.Want{Count: count})
	if err != nil {
		t.Fatal(err)
	}
	out := make([]float64, count)
	for i := range out {
		out[i] = res.Modes[i].Frequency
	}
	return out
}

func list2(values []float64) string {
	words := make([]string, len(values))
	for i, v := range values {
		words[i] = scenarioNumber(v)
	}
	return strings.Join(words, ", ")
}

// covered fits simulated surveys and counts how often the 95 % intervals hold
// the truth: eight peaks without numbers that scatter by `more` times the 0.2 %
// that they say.
func covered(t testing.TB, trials int, seed uint64, more float64) (pull, stiff int) {
	f := hangerFrequencies(t, 8)
	r := rand.New(rand.NewPCG(seed, 0))
	for range trials {
		peaks := make([]float64, len(f))
		for i := range f {
			peaks[i] = f[i] * (1 + 0.002*more*r.NormFloat64())
		}
		res := solve(t, hangerText+"reading r of l {\n peaks "+list2(peaks)+" Hz +- 0.2 %\n}\n"+hangerSought)
		if u := res.Best.Unknowns[0]; u.Low95 <= hangerPull && hangerPull <= u.High95 {
			pull++
		}
		if u := res.Best.Unknowns[1]; u.Low95 <= hangerStiff && hangerStiff <= u.High95 {
			stiff++
		}
	}
	return pull, stiff
}

// The intervals hold the truth as often as they say. The full count is that of
// BenchmarkCoverage; here a part of it, whose own scatter is 3 %.
func TestCoverage(t *testing.T) {
	const trials = 40
	pull, stiff := covered(t, trials, 7, 1)
	// 95 % of 40 is 38; below 34 is less likely than 1 %, and so is no miss at all in
	// both at the 97 % that the benchmark counts.
	if pull < 34 || stiff < 34 || pull+stiff == 2*trials {
		t.Errorf("tension inside %d times, stiffness %d, of %d", pull, stiff, trials)
	}
}

// Peaks that scatter twice as much as they say are paired with their scatter and
// widen the intervals: without either these would hold the truth in two surveys
// of three; counted over 400 they hold it in 87 %.
func TestCoverageOfPeaksThatSayTooLittle(t *testing.T) {
	const trials = 40
	pull, stiff := covered(t, trials, 8, 2)
	if pull < 30 || stiff < 30 {
		t.Errorf("tension inside %d times, stiffness %d, of %d", pull, stiff, trials)
	}
}

// BenchmarkCoverage counts over 1000 surveys, about 20 s.
func BenchmarkCoverage(b *testing.B) {
	const trials = 1000
	for b.Loop() {
		pull, stiff := covered(b, trials, 21, 1)
		b.ReportMetric(100*float64(pull)/trials, "%tension")
		b.ReportMetric(100*float64(stiff)/trials, "%stiffness")
		if least, most := trials*92/100, trials*98/100; pull < least || pull > most || stiff < least || stiff > most {
			b.Errorf("coverage of tension %d, of stiffness %d of %d: outside 92 .. 98 %%", pull, stiff, trials)
		}
	}
}

// With four of twelve vibrations missing and two strangers among the peaks the
// right tension is found.
func TestPairing(t *testing.T) {
	f := hangerFrequencies(t, 12)
	r := rand.New(rand.NewPCG(5, 0))
	const trials = 40
	right := 0
	for range trials {
		keep := r.Perm(12)[:8]
		var peaks []float64
		for _, k := range keep {
			peaks = append(peaks, f[k]*(1+0.002*r.NormFloat64()))
		}
		for range 2 {
			peaks = append(peaks, f[0]*0.7+(f[11]-f[0]*0.7)*r.Float64())
		}
		sort.Float64s(peaks)
		res := solve(t, hangerText+"reading r of l {\n peaks "+list2(peaks)+" Hz +- 0.2 %\n}\n"+hangerSought)
		if v := res.Best.Unknowns[0].Value; v > 0.96*hangerPull && v < 1.04*hangerPull {
			right++
		}
	}
	if right < 39 {
		t.Errorf("%d of %d right", right, trials)
	}
}

// BenchmarkOneLine is a whole fit of eight peaks of one line.
func BenchmarkOneLine(b *testing.B) {
	f := hangerFrequencies(b, 8)
	tmpl := templateOf(b, hangerText+"reading r of l {\n peaks "+list2(f)+" Hz +- 0.2 %\n}\n"+hangerSought)
	benchmarkSolve(b, tmpl)
}

// BenchmarkThreeHangers is the shipped survey of three lines that share two lets.
func BenchmarkThreeHangers(b *testing.B) {
	c := dsl.Compile(scenarios.Files, "hanger-survey.taut", dsl.Options{})
	if c.Diagnostics.HasErrors() {
		b.Fatal(c.Diagnostics.Text(3))
	}
	benchmarkSolve(b, c.Template)
}

func benchmarkSolve(b *testing.B, tmpl *scenario.Template) {
	b.Helper()
	for b.Loop() {
		p, err := New(tmpl)
		if err != nil {
			b.Fatal(err)
		}
		if _, err := p.Solve(context.Background()); err != nil {
			b.Fatal(err)
		}
	}
}
