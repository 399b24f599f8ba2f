package seek

import (
	"context"
	"errors"
	"math"
	"testing"

	"github.com/tautspan/tautspan/engine/doubt"
)

// of makes a problem of functions of x and of the inputs.
func of(from, to float64, steps int, inputs []doubt.Input, f ...func(x float64, in []float64) float64) *Problem {
	centre := make([]float64, len(inputs))
	for i := range inputs {
		centre[i] = inputs[i].Value
	}
	return &Problem{From: from, To: to, Steps: steps, Inputs: inputs, Workers: 2,
		Values: func(_ context.Context, which []int, x float64, in []float64) ([]float64, error) {
			if in == nil {
				in = centre
			}
			out := make([]float64, len(which))
			for i, w := range which {
				out[i] = f[w](x, in)
			}
			return out, nil
		}}
}

func meet(t *testing.T, p *Problem, n int) *Crossings {
	t.Helper()
	c, err := Meet(context.Background(), p, n)
	if err != nil {
		t.Fatal(err)
	}
	return c
}

// Zeros of known functions, none missed: simple ones, two within a step, one that
// touches, one at a look and at an end, a jump and a pole that are none, a gap.
func TestMeet(t *testing.T) {
	type f = func(x float64, in []float64) float64
	for _, c := range []struct {
		what string
		f    f
		want []float64
	}{
		{"sine", func(x float64, _ []float64) float64 { return math.Sin(x) }, []float64{math.Pi, 2 * math.Pi, 3 * math.Pi}},
		{"two in a step", func(x float64, _ []float64) float64 { return (x - 3.03) * (x - 3.07) }, []float64{3.03, 3.07}},
		{"two in the first step", func(x float64, _ []float64) float64 { return (x - 0.61) * (x - 0.64) }, []float64{0.61, 0.64}},
		{"two about a look", func(x float64, _ []float64) float64 { return (x - 4.98) * (x - 5.03) }, []float64{4.98, 5.03}},
		{"negative dip", func(x float64, _ []float64) float64 { return -(x - 3.03) * (x - 3.07) }, []float64{3.03, 3.07}},
		{"touch", func(x float64, _ []float64) float64 { return (x - 7.313) * (x - 7.313) }, []float64{7.313}},
		{"at a look", func(x float64, _ []float64) float64 { return x - 5 }, []float64{5}},
		{"at an end", func(x float64, _ []float64) float64 { return (x - 10) * 3 }, []float64{10}},
		{"near miss", func(x float64, _ []float64) float64 { return (x-7.313)*(x-7.313) + 1e-6 }, nil},
		{"jump", func(x float64, _ []float64) float64 { return math.Copysign(1, x-4.4) }, nil},
		{"pole", func(x float64, _ []float64) float64 { return 1 / (x - 4.43) }, nil},
		{"gap", func(x float64, _ []float64) float64 {
			if x > 3 && x < 4 {
				return math.NaN()
			}
			return x - 6.2
		}, []float64{6.2}},
		{"kink", func(x float64, _ []float64) float64 { return math.Abs(x-2.02) - 0.01 }, []float64{2.01, 2.03}},
	} {
		got := meet(t, of(0.5, 10, 95, nil, c.f), 1)
		if len(got.List) != len(c.want) {
			t.Errorf("%s: %+v, want %v", c.what, got.List, c.want)
			continue
		}
		for i, w := range c.want {
			tolerance := 1e-11
			if got.List[i].Touches {
				tolerance = 1e-5 // where a parabola is flat, rounding moves its foot
			}
			if math.Abs(got.List[i].At-w) > tolerance {
				t.Errorf("%s: %.15g, want %.15g", c.what, got.List[i].At, w)
			}
			if got.List[i].Touches != (c.what == "touch") {
				t.Errorf("%s: touches %v", c.what, got.List[i].Touches)
			}
		}
		if (len(got.Jumps[0]) == 1) != (c.what == "jump" || c.what == "pole") || (len(got.Gaps[0]) == 1) != (c.what == "gap") {
			t.Errorf("%s: jumps %v, gaps %v", c.what, got.Jumps, got.Gaps)
		}
		if math.Abs(got.Step-0.1) > 1e-12 {
			t.Errorf("step %g", got.Step)
		}
	}
}

// Random polynomials with known zeros further apart than a step: none is missed.
func TestMeetMissesNone(t *testing.T) {
	seed := uint64(1)
	next := func() float64 {
		seed = seed*6364136223846793005 + 1442695040888963407
		return float64(seed>>11) / (1 << 53)
	}
	for range 300 {
		var zeros []float64
		for x := next(); x < 9.9; x += 0.11 + 3*next() {
			zeros = append(zeros, x)
		}
		f := func(x float64, _ []float64) float64 {
			v := 1.0
			for _, z := range zeros {
				v *= x - z
			}
			return v
		}
		got := meet(t, of(0, 10, 100, nil, f), 1).List
		if len(got) != len(zeros) {
			t.Fatalf("%d zeros, want %v", len(got), zeros)
		}
		for i := range zeros {
			if math.Abs(got[i].At-zeros[i]) > 1e-9 {
				t.Errorf("%g, want %g", got[i].At, zeros[i])
			}
		}
	}
}

// The doubt of a zero of x^2 - a: u(x) = u(a)/(2x); of the other function, none
// of its own.
func TestDoubtOfCrossing(t *testing.T) {
	in := []doubt.Input{{Name: "a", Value: 9, U: 0.09}, {Name: "b", Value: 4, U: 0.2}}
	p := of(0, 10, 50, in, func(x float64, in []float64) float64 { return x*x - in[0] }, func(x float64, in []float64) float64 { return x - in[1] })
	got := meet(t, p, 2).List
	if len(got) != 2 {
		t.Fatalf("%+v", got)
	}
	for i, want := range []float64{0.09 / 6, 0.2} {
		n := got[i].Doubt.Number("m", 0)
		if math.Abs(n.InputU-want) > 1e-3*want || n.LeadingInput != in[i].Name || got[i].Function != i {
			t.Errorf("%d: %g by %q, want %g", i, n.InputU, n.LeadingInput, want)
		}
	}
}

func TestBest(t *testing.T) {
	in := []doubt.Input{{Name: "a", Value: 3.21, U: 0.4}}
	hill := func(x float64, in []float64) float64 { return 5 - (x-in[0])*(x-in[0]) }
	// The least of two, as the least damping of two modes, is best at a kink.
	roof := func(x float64, _ []float64) float64 { return math.Min(x, 7-x/2) }
	two := func(x float64, _ []float64) float64 {
		return math.Exp(-(x-2)*(x-2)) + 1.1*math.Exp(-(x-8.03)*(x-8.03)*400)
	}
	for _, c := range []struct {
		what          string
		f             func(float64, []float64) float64
		largest       bool
		at, tolerance float64
		inside        bool
	}{
		{"hill", hill, true, 3.21, 1e-6, true},
		{"valley", func(x float64, in []float64) float64 { return -hill(x, in) }, false, 3.21, 1e-6, true},
		{"roof", roof, true, 14. / 3, 1e-6, true},
		{"narrow summit beside a wide one", two, true, 8.03, 1e-4, true},
		{"rising", func(x float64, _ []float64) float64 { return x }, true, 10, 0, false},
		{"falling", func(x float64, _ []float64) float64 { return x }, false, 0, 0, false},
	} {
		o, err := Best(context.Background(), of(0, 10, 60, in, c.f), c.largest)
		if err != nil {
			t.Fatal(err)
		}
		if math.Abs(o.At-c.at) > c.tolerance || o.Inside != c.inside || math.Abs(o.Value-c.f(o.At, []float64{3.21})) > 0 {
			t.Errorf("%s: %g (inside %v), want %g", c.what, o.At, o.Inside, c.at)
		}
		if c.what == "hill" {
			low, high := o.Drift[0], o.Drift[1]
			if math.Abs(low.At-2.81) > 1e-6 || math.Abs(high.At-3.61) > 1e-6 || math.Abs(low.Kept-4.84) > 1e-6 || math.Abs(high.Reached-5) > 1e-9 || low.Sign != -1 || high.Input != "a" {
				t.Errorf("drift %+v", o.Drift)
			}
			// within 2 % of 5: sqrt(0.1) = 0.316 to both sides, by looks of 1/6.
			if math.Abs(o.FlatFrom-3) > 1e-9 || math.Abs(o.FlatTo-3.5) > 1e-9 {
				t.Errorf("flat from %g to %g", o.FlatFrom, o.FlatTo)
			}
		}
	}
	none := func(float64, []float64) float64 { return math.NaN() }
	if o, err := Best(context.Background(), of(0, 1, 10, nil, none), true); o != nil || err != nil {
		t.Errorf("%v %v", o, err)
	}
}

func TestErrorsAndEnd(t *testing.T) {
	bad := errors.New("bad")
	p := of(0, 1, 10, nil, func(x float64, _ []float64) float64 { return x })
	p.Values = func(context.Context, []int, float64, []float64) ([]float64, error) { return nil, bad }
	if _, err := Meet(context.Background(), p, 1); !errors.Is(err, bad) {
		t.Errorf("got %v", err)
	}
	p.Values = func(context.Context, []int, float64, []float64) ([]float64, error) { panic("no") }
	if _, err := Best(context.Background(), p, true); err == nil {
		t.Error("a panic was no error")
	}
	ctx, cancel := context.WithCancel(context.Background())
	cancel()
	if _, err := Best(ctx, of(0, 1, 10, nil, func(x float64, _ []float64) float64 { return x }), true); !errors.Is(err, context.Canceled) {
		t.Errorf("got %v", err)
	}
	if _, err := Meet(context.Background(), of(1, 0, 10, nil, func(x float64, _ []float64) float64 { return x }), 1); err == nil {
		t.Error("an empty range was searched")
	}
}
