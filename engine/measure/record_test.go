package measure

import (
	"math"
	"testing"

	"pgregory.net/rapid"

	"github.com/tautspan/tautspan/engine/compare"
	"github.com/tautspan/tautspan/engine/formula"
	"github.com/tautspan/tautspan/engine/mesh"
	"github.com/tautspan/tautspan/engine/scenario"
)

func near(t *testing.T, what string, got, want, tolerance float64) {
	t.Helper()
	if !(math.Abs(got-want) <= tolerance) && !(math.IsNaN(got) && math.IsNaN(want)) {
		t.Errorf("%s: %.9g, want %.9g within %.2g", what, got, want, tolerance)
	}
}

// reading samples f every 1 ms for so many seconds, with a constant band.
func reading(f func(t float64) float64, seconds, band float64) compare.Reading {
	n := int(math.Round(seconds*1000)) + 1
	r := compare.Reading{Every: 0.001, Values: make([]float64, n), Band: make([]float64, n)}
	for i := range n {
		r.Values[i], r.Band[i] = f(float64(i)*r.Every), band
	}
	return r
}

func TestSettleOfADecay(t *testing.T) {
	// A pure decay exp(-t/2) falls to 5 % at 2 ln 20 = 5.99146 s; straight
	// lines between rows err by (1 ms)^2/8 of the curvature: 1e-7 s.
	decay := func(t float64) float64 { return math.Exp(-t / 2) }
	v := Settle(reading(decay, 10, 0), 0.05, 0, 0)
	near(t, "decay", v.Value, 2*math.Log(20), 1e-6)
	if v.Low > v.Value || v.High < v.Value || v.High-v.Low > 0.0011 {
		t.Errorf("without a band within one row: %+v", v)
	}
	// With a band of 1e-3: the last certain time is where the decay is 0.05 (1 +
	// 1e-3) + 1e-3, the last possible where it is 0.05 (1 - 1e-3) - 1e-3.
	v = Settle(reading(decay, 10, 1e-3), 0.05, 0, 0)
	near(t, "low", v.Low, -2*math.Log(0.05*1.001+0.001), 1.1e-3)
	near(t, "high", v.High, -2*math.Log(0.05*0.999-0.001), 1.1e-3)
	// About another static value, and after an excitation that ends at 1 s: the
	// peak that counts is that after the end.
	v = Settle(reading(func(t float64) float64 {
		if t < 1 {
			return 40 * t
		}
		return 3 + math.Exp(-(t-1)/2)
	}, 12, 0), 0.05, 1, 3)
	near(t, "after an excitation", v.Value, 1+2*math.Log(20), 1e-6)
	v = Settle(reading(decay, 5, 0), 0.05, 0, 0)
	if !math.IsNaN(v.Value) || !math.IsInf(v.High, 1) || v.Low != 5 {
		t.Errorf("not settled by the end: %+v", v)
	}
	if v = Settle(reading(func(float64) float64 { return 0 }, 1, 0), 0.05, 0.3, 0); v.Value != 0.3 {
		t.Errorf("at rest: %+v", v)
	}
	for _, bad := range []compare.Interval{
		Settle(reading(decay, 5, 0), 0.05, math.Inf(1), 0), Settle(reading(decay, 5, 0), 0.05, 9, 0), Settle(reading(decay, 5, 0), 0.05, 0, math.NaN()),
	} {
		if !math.IsNaN(bad.Value) || !math.IsInf(bad.Low, -1) || !math.IsInf(bad.High, 1) {
			t.Errorf("no value: %+v", bad)
		}
	}
}

func TestReach(t *testing.T) {
	ramp := func(t float64) float64 { return -2 * t }
	v := Reach(reading(ramp, 3, 0), 1.2345)
	near(t, "ramp", v.Value, 0.61725, 1e-9)
	v = Reach(reading(ramp, 3, 0.1), 1)
	near(t, "low", v.Low, 0.45, 1.1e-3)
	near(t, "high", v.High, 0.55, 1.1e-3)
	if v = Reach(reading(ramp, 3, 0), 7); !math.IsNaN(v.Value) || v.Low != 3 || !math.IsInf(v.High, 1) {
		t.Errorf("never: %+v", v)
	}
	if v = Reach(reading(ramp, 3, 0.1), 6.05); !math.IsNaN(v.Value) || math.Abs(v.Low-2.975) > 1.1e-3 || !math.IsInf(v.High, 1) {
		t.Errorf("perhaps at the end: %+v", v)
	}
	if v = Reach(reading(ramp, 3, 0), 0); v.Value != 0 || v.Low != 0 {
		t.Errorf("at once: %+v", v)
	}
}

func TestTimeOfPeak(t *testing.T) {
	two := func(t float64) float64 { return math.Sin(2*math.Pi*t) * (1 - 0.01*t) }
	v := TimeOfPeak(reading(two, 1, 0))
	near(t, "peak", v.Value, 0.25, 0.002)
	if v.Low != v.Value || v.High != v.Value {
		t.Errorf("sure without a band: %+v", v)
	}
	// The second peak is 0.5 % lower: with a band of 0.3 % either may be the largest.
	v = TimeOfPeak(reading(two, 1, 0.003))
	if v.Low > 0.25 || v.High < 0.75 {
		t.Errorf("two peaks: %+v", v)
	}
}

// Whatever a record within the band does, its reading lies within the interval.
func TestReadingsHoldWithinTheBand(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		n := rapid.IntRange(5, 60).Draw(t, "rows")
		value := rapid.Float64Range(-1, 1)
		r := compare.Reading{Every: 0.5, Values: make([]float64, n), Band: make([]float64, n)}
		o := compare.Reading{Every: 0.5, Values: make([]float64, n), Band: make([]float64, n)}
		for i := range n {
			r.Values[i], r.Band[i] = value.Draw(t, "v"), math.Abs(value.Draw(t, "b"))*0.2
			o.Values[i] = r.Values[i] + value.Draw(t, "d")*r.Band[i]
		}
		end := 0.5 * float64(n-1)
		share := rapid.Float64Range(0.05, 0.95).Draw(t, "share")
		for name, read := range map[string]func(compare.Reading) compare.Interval{
			"peak":   TimeOfPeak,
			"reach":  func(r compare.Reading) compare.Interval { return Reach(r, share) },
			"settle": func(r compare.Reading) compare.Interval { return Settle(r, share, 1, 0.1) },
		} {
			in, got := read(r), read(o).Value
			if math.IsNaN(got) {
				got = end // at the earliest
				if in.High >= end {
					continue
				}
			}
			if got < in.Low-1e-12 || got > in.High+1e-12 {
				t.Fatalf("%s: %g outside %+v", name, got, in)
			}
		}
	})
}

func TestHistoryEnd(t *testing.T) {
	arg := formula.Arg(formula.ArgT)
	inf := math.Inf(1)
	history := func(p formula.Program, breaks ...float64) scenario.History {
		return scenario.History{Value: p, Breaks: breaks}
	}
	for _, c := range []struct {
		name string
		h    scenario.History
		want float64
		by   float64
	}{
		{"half sine", history(formula.Apply(formula.OpHalfSine, arg, formula.Const(300), formula.Const(0.008)), 0, 0.008), 0.008, 0},
		{"half sine between looks", history(formula.Apply(formula.OpHalfSine, formula.Sub(arg, formula.Const(3.3331)), formula.Const(300), formula.Const(1e-4)), 3.3331, 3.3332), 3.3332, 1e-9},
		{"step", history(formula.Apply(formula.OpStep, arg, formula.Const(5), formula.Const(1.23)), 1.23), 1.23, 0},
		{"ramp", history(formula.Apply(formula.OpRamp, arg, formula.Const(5), formula.Const(1), formula.Const(2.7)), 1, 2.7), 2.7, 0},
		{"sine", history(formula.Apply(formula.OpSine, arg, formula.Const(5), formula.Const(2), formula.Const(0)), 0), inf, 0},
		// exp(-10 t) is below 1e-6 of its start from 1.3816 s on; looks stand every 2.5 ms.
		{"decay", history(formula.Apply(formula.OpExp, formula.Mul(formula.Const(-10), arg))), 0.6 * math.Log(10), 2.6e-3},
		{"constant", history(formula.Const(3)), 0, 0},
	} {
		if got := historyEnd(c.h, 10, 0); !(math.Abs(got-c.want) <= c.by || got == c.want) {
			t.Errorf("%s: %g, want %g", c.name, got, c.want)
		}
	}
}

// span is a uniform line with fixed ends.
func spanNet(tension, length float64) *scenario.Network {
	net := &scenario.Network{}
	net.Lines = []scenario.Line{{Name: "l",
		Nodes:    []scenario.Node{{Name: "a", Kind: scenario.Support, Fixed: true}, {Kind: scenario.Splice}, {Name: "b", Kind: scenario.Support, Fixed: true}},
		Segments: []scenario.Segment{{Name: "s", Length: 0.3 * length, MassPerLength: 2, Tension: tension}, {Name: "t", Length: 0.7 * length, MassPerLength: 2, Tension: tension}},
	}}
	net.Watches = []scenario.Watch{{Name: "w", At: scenario.Place{Node: -1, Segment: 1, Offset: 0.2 * length}, Quantities: []scenario.Quantity{scenario.Displacement, scenario.Velocity, scenario.Slope}}}
	net.Run = scenario.RunOf[float64]{For: 4, Every: 0.01}
	return net
}

func TestStaticValue(t *testing.T) {
	const T, L = 5000.0, 20.0
	value := func(net *scenario.Network, channel int) float64 {
		m, err := mesh.Build(net)
		if err != nil {
			t.Fatal(err)
		}
		return StaticValue(net, m, channel)
	}
	net := spanNet(T, L)
	if v := value(net, 0); v != 0 {
		t.Errorf("no load: %g", v)
	}
	step := scenario.History{Value: formula.Apply(formula.OpStep, formula.Arg(formula.ArgT), formula.Const(40), formula.Const(1)), Breaks: []float64{1}}
	net.Pushes = []scenario.PushOf[float64]{{Name: "p", At: scenario.Place{Node: 1}, Force: step}}
	// Point force P at a of a span L: u(x) = P a (L - x)/(T L) for x >= a.
	near(t, "point force", value(net, 0), 40*0.3*L*0.5*L/(T*L), 1e-12)
	if v := value(net, 1); v != 0 {
		t.Errorf("velocity: %g", v)
	}
	if v := value(net, 2); !math.IsNaN(v) {
		t.Errorf("slope is not offered: %g", v)
	}
	net.Pushes = nil
	net.Presses = []scenario.PressOf[float64]{{Name: "p", Along: scenario.SpanOf{Segment: -1}, Force: step}}
	// Uniform load q: q L^2/(8 T) at the middle; the midpoint rule with 200 points
	// errs there by at most 1/200^2.
	near(t, "uniform load", value(net, 0), 40*L*L/(8*T), 40*L*L/(8*T)/(200*200))
	half := scenario.History{Value: formula.Apply(formula.OpHalfSine, formula.Arg(formula.ArgT), formula.Const(40), formula.Const(1)), Breaks: []float64{0, 1}}
	net.Presses[0].Force = half
	if v := value(net, 0); v != 0 {
		t.Errorf("a load that ends: %g", v)
	}
	if end := ExcitationEnd(net); end != 1 {
		t.Errorf("ends at %g", end)
	}
	net.Rolls = []scenario.RollOf[float64]{{Name: "r", Speed: 8, Force: 1, From: scenario.Place{Node: 1}, Starting: 0.5}}
	near(t, "rolls off", ExcitationEnd(net), 0.5+0.7*L/8, 1e-12)
}
