package doubt

import (
	"context"
	"encoding/json"
	"errors"
	"math"
	"math/rand/v2"
	"strings"
	"testing"

	"pgregory.net/rapid"
)

// of makes a Func of one answer.
func of(f func(x []float64) float64) Func {
	return func(_ context.Context, x []float64) ([]float64, error) { return []float64{f(x)}, nil }
}

func propagate(t *testing.T, in []Input, f Func, o Options) []Propagated {
	t.Helper()
	out, err := Propagate(context.Background(), in, f, o)
	if err != nil {
		t.Fatal(err)
	}
	return out
}

func TestClosedForms(t *testing.T) {
	T, m, L := 412e3, 18.4, 160.5
	uT, um, uL := 0.02*T, 0.01*m, 0.003*L
	in := []Input{{Name: "T", Value: T, U: uT}, {Name: "m", Value: m, U: um}, {Name: "L", Value: L, U: uL}}
	// First natural frequency of a taut string; GUM for a product of powers
	// (JCGM 100:2008, 5.1.6): relative u^2 = sum of (power x relative u)^2.
	f := func(x []float64) float64 { return math.Sqrt(x[0]/x[1]) / (2 * x[2]) }
	n := propagate(t, in, of(f), Options{Workers: 3})[0].Number("Hz", 0)
	want := f([]float64{T, m, L}) * math.Sqrt(math.Pow(0.02/2, 2)+math.Pow(0.01/2, 2)+math.Pow(0.003, 2))
	// The symmetric difference errs by u^2/8 relative for a root at 2 %: 5e-5.
	if math.Abs(n.InputU/want-1) > 1e-4 || n.LeadingInput != "T" || n.Basis != FirstOrder {
		t.Errorf("u %g, want %g; leading %s", n.InputU, want, n.LeadingInput)
	}
	if math.Abs(n.High95-(n.Value+1.960*n.InputU)) > 1e-15 || math.Abs(n.LowEnd-(n.Value-1.645*n.InputU)) > 1e-15 {
		t.Errorf("interval %+v", n)
	}
	// A let that stands in both parts of a difference counts once: x - x/2 has
	// half the doubt of x, not root of 1.25 of it.
	n = propagate(t, in[:1], of(func(x []float64) float64 { return x[0] - x[0]/2 }), Options{})[0].Number("N", 0)
	if math.Abs(n.InputU-uT/2) > 1e-9 {
		t.Errorf("correlated: %g, want %g", n.InputU, uT/2)
	}
}

func TestLinearIsExact(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		n := rapid.IntRange(1, 6).Draw(t, "inputs")
		in := make([]Input, n)
		a := make([]float64, n)
		want := 0.0
		for i := range in {
			in[i] = Input{Name: string(rune('a' + i)), Value: rapid.Float64Range(-5, 5).Draw(t, "x"), U: rapid.Float64Range(0, 2).Draw(t, "u"), Rectangular: i%2 == 1}
			a[i] = rapid.Float64Range(-3, 3).Draw(t, "a")
			want += a[i] * a[i] * in[i].U * in[i].U
		}
		f := func(x []float64) float64 {
			v := 7.0
			for i := range x {
				v += a[i] * x[i]
			}
			return v
		}
		bound := rapid.Float64Range(0, 1).Draw(t, "bound")
		p, err := Propagate(context.Background(), in, of(f), Options{Samples: 10})
		if err != nil {
			t.Fatal(err)
		}
		if p[0].NotFirstOrder != "" && math.Sqrt(want) > 1e-9 {
			t.Fatalf("a straight answer: %s", p[0].NotFirstOrder)
		}
		got := p[0].Number("m", bound)
		if math.Abs(got.InputU-math.Sqrt(want)) > 1e-12*(1+math.Sqrt(want))*10 && p[0].Samples == nil {
			t.Fatalf("u %g, want %g", got.InputU, math.Sqrt(want))
		}
		if !(got.Low95 <= got.LowEnd && got.LowEnd <= got.Value && got.Value <= got.HighEnd && got.HighEnd <= got.High95) && p[0].Samples == nil {
			t.Fatalf("intervals out of order: %+v", got)
		}
	})
}

func TestSamplingAgreesWithFirstOrder(t *testing.T) {
	in := []Input{{Name: "a", Value: 10, U: 0.3}, {Name: "b", Value: 4, U: 0.2}}
	f := of(func(x []float64) float64 { return 2*x[0] - 3*x[1] })
	first := propagate(t, in, f, Options{})[0].Number("1", 0.05)
	sampled := propagate(t, in, f, Options{Samples: 4000, Seed: 1, Always: true, Workers: 4})[0].Number("1", 0.05)
	if sampled.Basis != Sampled || sampled.LeadingInput != "a" && sampled.LeadingInput != "b" {
		t.Errorf("%+v", sampled)
	}
	// The standard error of a 2.5 % quantile of 4000 normal values is 4.2 % of
	// their deviation, of the deviation 1.1 %; four of each.
	if math.Abs(sampled.InputU/first.InputU-1) > 0.045 || math.Abs(sampled.Low95-first.Low95) > 0.17*first.InputU || math.Abs(sampled.HighEnd-first.HighEnd) > 0.17*first.InputU {
		t.Errorf("first order %+v\nsampled %+v", first, sampled)
	}
}

func TestDraw(t *testing.T) {
	in := []Input{{Name: "n", Value: 5, U: 2}, {Name: "r", Value: -1, U: 0.5, Rectangular: true}, {Name: "e", Value: 3}}
	sets := Draw(in, 2000, 9)
	for i, x := range in {
		column := make([]float64, len(sets))
		mean := 0.0
		for k := range sets {
			column[k] = sets[k][i]
			mean += column[k] / float64(len(sets))
		}
		// One value from each of 2000 shares: mean and deviation are far closer
		// than of free draws; 1 % leaves room for the open tails. 1e-12 is rounding.
		if math.Abs(mean-x.Value) > 0.01*x.U+1e-12 || math.Abs(deviation(column)-x.U) > 0.01*x.U+1e-12 {
			t.Errorf("%s: mean %g deviation %g", x.Name, mean, deviation(column))
		}
		if x.Rectangular {
			for _, v := range column {
				if math.Abs(v-x.Value) > x.U*math.Sqrt(3)*(1+1e-12) {
					t.Fatalf("%g lies outside the rectangle", v)
				}
			}
		}
	}
	again := Draw(in, 2000, 9)
	other := Draw(in, 2000, 10)
	if again[7][0] != sets[7][0] || other[7][0] == sets[7][0] {
		t.Error("the seed decides, and nothing else")
	}
}

func TestNotFirstOrder(t *testing.T) {
	in := []Input{{Name: "a", Value: 0, U: 1}, {Name: "b", Value: 1, U: 0.01}}
	for _, c := range []struct {
		name string
		f    func(x []float64) float64
		bent bool
	}{
		{"at a top", func(x []float64) float64 { return -x[0] * x[0] }, true},
		{"strongly bent", func(x []float64) float64 { return math.Exp(2 * x[0]) }, true},
		{"slightly bent", func(x []float64) float64 { return math.Exp(0.1 * x[0]) }, false},
		{"straight", func(x []float64) float64 { return 3*x[0] + x[1] }, false},
		{"bent by an input that does not count", func(x []float64) float64 { return 3*x[0] + math.Pow(x[1]-1, 2) }, false},
		{"a rounding step", func(x []float64) float64 { return 3*x[0] + 1e-15*math.Abs(x[1]-1) }, false},
		{"a corner", func(x []float64) float64 { return math.Abs(x[0]) }, true},
		{"missing on one side", func(x []float64) float64 { return math.Sqrt(x[0]) }, true},
	} {
		p := propagate(t, in, of(c.f), Options{Samples: 200, Seed: 3})[0]
		if (p.NotFirstOrder != "") != c.bent || (p.Samples != nil) != c.bent {
			t.Errorf("%s: %q, %d samples", c.name, p.NotFirstOrder, len(p.Samples))
		}
	}
	// |a| of a standard normal: 97.5 % quantile 2.2414 (that of 98.75 % of the
	// normal), 2.5 % quantile 0.0313.
	n := propagate(t, in, of(func(x []float64) float64 { return math.Abs(x[0]) }), Options{Samples: 5000, Seed: 3})[0].Number("1", 0)
	if math.Abs(n.High95-2.2414) > 0.01 || math.Abs(n.Low95-0.0313) > 0.01 {
		t.Errorf("|a|: %g .. %g", n.Low95, n.High95)
	}
	n = propagate(t, in, of(func(x []float64) float64 { return math.Sqrt(x[0]) }), Options{Samples: 50, Seed: 3})[0].Number("1", 0)
	if !math.IsInf(n.Low95, -1) || n.Value != 0 {
		t.Errorf("missing answers leave the interval open: %+v", n)
	}
	jumped := propagate(t, in, of(func(x []float64) float64 { return x[0] }), Options{Samples: 50, Jumped: func(_, i int) bool { return i == 0 }})[0]
	if !strings.Contains(jumped.NotFirstOrder, "another time with a") {
		t.Errorf("jump: %q", jumped.NotFirstOrder)
	}
}

func TestErrorsAndPanics(t *testing.T) {
	in := []Input{{Name: "a", Value: 0, U: 1}}
	broken := errors.New("broken")
	_, err := Propagate(context.Background(), in, func(_ context.Context, x []float64) ([]float64, error) {
		if x[0] > 0 {
			return nil, broken
		}
		return []float64{1}, nil
	}, Options{})
	if !errors.Is(err, broken) {
		t.Errorf("%v", err)
	}
	if _, err = Propagate(context.Background(), in, of(func([]float64) float64 { panic("out of range") }), Options{}); err == nil {
		t.Error("a panic goes through")
	}
	ctx, cancel := context.WithCancel(context.Background())
	cancel()
	if _, err = Propagate(ctx, in, of(func([]float64) float64 { return 1 }), Options{}); !errors.Is(err, context.Canceled) {
		t.Errorf("%v", err)
	}
}

func TestWorkersDoNotMatter(t *testing.T) {
	in := []Input{{Name: "a", Value: 0, U: 1}, {Name: "b", Value: 1, U: 0.3, Rectangular: true}}
	f := of(func(x []float64) float64 { return math.Exp(x[0]) * x[1] })
	one := propagate(t, in, f, Options{Samples: 300, Seed: 5, Workers: 1})[0].Number("1", 0.1)
	many := propagate(t, in, f, Options{Samples: 300, Seed: 5, Workers: 7})[0].Number("1", 0.1)
	a, _ := json.Marshal(one)
	b, _ := json.Marshal(many)
	if string(a) != string(b) {
		t.Errorf("%s\n%s", a, b)
	}
}

func TestJudge(t *testing.T) {
	number := func(v, numerical, u float64) Number {
		return Combine(v, "m", numerical, []Contribution{{Input: "pull", Change: u}})
	}
	for _, c := range []struct {
		name        string
		v, bound, u float64
		strict      bool
		one         Verdict // margin
		settlesWith string
	}{
		// margin - bound - 1.645 u against 0, by hand.
		{"well clear", 1, 0.1, 0.1, true, Met, ""},
		{"clear by a hair", 0.265, 0.1, 0.1, true, Met, ""},
		{"just not clear", 0.264, 0.1, 0.1, true, Undecided, "pull"},
		{"bad by a hair", -0.265, 0.1, 0.1, true, NotMet, ""},
		{"not quite bad", -0.264, 0.1, 0.1, true, Undecided, "pull"},
		{"numerical only", 0.05, 0.1, 0, true, Undecided, "closer agreement"},
		{"both", 0.05, 0.1, 0.1, true, Undecided, "both"},
		{"on the limit, not allowed", 0, 0, 0, true, NotMet, ""},
		{"on the limit, allowed", 0, 0, 0, false, Met, ""},
		{"on the limit, doubtful", 0, 0, 0.1, false, Undecided, "nothing"},
	} {
		j := JudgeAbove(number(c.v, c.bound, c.u), c.strict)
		if j.Verdict != c.one || !strings.Contains(j.Settles, c.settlesWith) || (j.Settles == "") != (c.one != Undecided) || j.Margin != c.v {
			t.Errorf("%s: %+v, want %s", c.name, j, c.one)
		}
	}
	for _, c := range []struct {
		name            string
		v, bound, u     float64
		within, outside Verdict
	}{
		// Limits 2 and 4, factor 1.960.
		{"middle", 3, 0.1, 0.1, Met, NotMet},
		{"inside by a hair", 3.703, 0.1, 0.1, Met, NotMet},
		{"not quite inside", 3.705, 0.1, 0.1, Undecided, Undecided},
		{"outside by a hair", 4.297, 0.1, 0.1, NotMet, Met},
		{"not quite outside", 4.295, 0.1, 0.1, Undecided, Undecided},
		{"below by a hair", 1.703, 0.1, 0.1, NotMet, Met},
		{"on the edge, exact", 4, 0, 0, Met, NotMet},
	} {
		low, high := number(c.v-2, c.bound, c.u), number(4-c.v, c.bound, c.u)
		below, above := number(2-c.v, c.bound, c.u), number(c.v-4, c.bound, c.u)
		in, out := JudgeWithin(low, high), JudgeOutside(below, above)
		if in.Verdict != c.within || out.Verdict != c.outside {
			t.Errorf("%s: within %s outside %s", c.name, in.Verdict, out.Verdict)
		}
		if math.Abs(in.Margin-math.Min(c.v-2, 4-c.v)) > 1e-15 || math.Abs(out.Margin-math.Max(2-c.v, c.v-4)) > 1e-15 {
			t.Errorf("%s: margins %g %g", c.name, in.Margin, out.Margin)
		}
	}
}

func TestJudgeWithoutValue(t *testing.T) {
	// Not reached within 10 s: later than 5 s is certain, earlier than 20 s open.
	time := Between(10, math.Inf(1), "s")
	later := Between(time.LowEnd-5, math.Inf(1), "s")
	earlier := Between(math.Inf(-1), 20-time.LowEnd, "s")
	never := Between(math.Inf(-1), 5-time.LowEnd, "s")
	if JudgeAbove(later, true).Verdict != Met || JudgeAbove(earlier, true).Verdict != Undecided || JudgeAbove(never, true).Verdict != NotMet {
		t.Error("open intervals")
	}
	if j := JudgeAbove(earlier, true); !strings.Contains(j.Settles, "longer run") {
		t.Errorf("%q", j.Settles)
	}
	if j := JudgeAbove(Missing("s"), true); j.Verdict != Undecided || !strings.Contains(j.Settles, "no value") {
		t.Errorf("%+v", j)
	}
}

// The share that the leading input's doubt is told to fall to does settle it.
func TestSettlesIsTrue(t *testing.T) {
	random := rand.New(rand.NewPCG(1, 2))
	seen := 0
	for range 2000 {
		lead, rest, bound, v := 1+random.Float64(), random.Float64(), 0.2*random.Float64(), 3*random.Float64()
		make1 := func(share float64) Number {
			return Combine(v, "m", bound, []Contribution{{Input: "rest", Change: rest}, {Input: "lead", Change: lead * share}})
		}
		j := JudgeAbove(make1(1), true)
		var percent float64
		if i := strings.Index(j.Settles, "at most "); i < 0 {
			continue
		} else if err := json.Unmarshal([]byte(strings.Fields(j.Settles[i+8:])[0]), &percent); err != nil {
			t.Fatal(err)
		}
		seen++
		if percent > 0 && JudgeAbove(make1(percent/100*0.9999), true).Verdict != Met || JudgeAbove(make1(percent/100+0.011), true).Verdict == Met {
			t.Fatalf("%q for %g +- %g, %g, %g", j.Settles, v, bound, lead, rest)
		}
	}
	if seen < 200 {
		t.Errorf("only %d cases", seen)
	}
}

func TestJSON(t *testing.T) {
	n := Combine(0.25, "m", 0.01, []Contribution{{Input: "knob", Change: 0.001}, {Input: "pull", Change: -0.02}}, "span", "mass")
	got, err := json.Marshal(n)
	if err != nil {
		t.Fatal(err)
	}
	var back map[string]any
	if err := json.Unmarshal(got, &back); err != nil {
		t.Fatal(err)
	}
	for _, k := range []string{"value", "unit", "numerical", "input_u", "low95", "high95", "leading_input", "exact_inputs"} {
		if _, ok := back[k]; !ok {
			t.Errorf("no %s in %s", k, got)
		}
	}
	if back["leading_input"] != "pull" || back["exact_inputs"].([]any)[0] != "mass" {
		t.Errorf("%s", got)
	}
	for _, n := range []Number{Missing("s"), Between(3, math.Inf(1), "s"), {Value: math.NaN(), Unit: "s"}} {
		got, err := json.Marshal(n)
		if err != nil || !strings.Contains(string(got), `"value":null`) || !strings.Contains(string(got), `"leading_input":null`) || !strings.Contains(string(got), `"exact_inputs":[]`) {
			t.Errorf("%s %v", got, err)
		}
	}
	if got, _ := json.Marshal(Between(3, math.Inf(1), "s")); !strings.Contains(string(got), `"low95":3`) || !strings.Contains(string(got), `"high95":null`) {
		t.Errorf("%s", got)
	}
}
