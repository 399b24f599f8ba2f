package measure_test

import (
	"context"
	"math"
	"testing"
	"testing/fstest"

	"github.com/tautspan/tautspan/dsl"
	"github.com/tautspan/tautspan/engine/measure"
)

// collected answers the collects of a scenario written out, without a run.
func collected(t *testing.T, text string, o measure.Options) []measure.Collected {
	t.Helper()
	c := dsl.Compile(fstest.MapFS{"a.taut": {Data: []byte("tautspan 1\n" + text)}}, "a.taut", dsl.Options{})
	for _, d := range c.Diagnostics.Errors() {
		t.Fatalf("%s: %s %s", d.Code, d.Summary, d.Found)
	}
	s, err := measure.New(c.Template, nil, o)
	if err != nil {
		t.Fatal(err)
	}
	a, err := s.Answer(context.Background(), nil)
	if err != nil {
		t.Fatal(err)
	}
	if len(a.Waiting) > 0 {
		t.Fatalf("waits for a run: %v", a.Waiting)
	}
	return a.Collected
}

// wire is a joint of mass between two stretches, and ends that give.
const wire = `
let pull = 10 kN +- 3 %
let lump = 2 kg +- 10 %
let knob = 160 N*s/m
stock w {
    mass       1.6 kg/m
    axial      20 MN
    diameter   20 mm
    expansion  17e-6 1/K
}
line l {
    tension  pull
    at       15 degC
    support  a  fixed
    segment  s  w 60 m
    joint    j  mass lump, dashpot knob
    segment  z  w 40 m
    support  b  fixed
}
excite knock push at z 10 m with step(1 kN, 1 s)
watch q at z 20 m displacement, force
`

// A mass and a dashpot at a joint of an endless string: with D = i w c - w^2 M,
// r = -D/(D + 2 i w Z), t = 1 + r, absorbed 1 - |r|^2 - |t|^2.
// Source: Graff, Wave Motion in Elastic Solids (1975), ch. 1 (from memory).
func TestSharesOfJoint(t *testing.T) {
	got := collected(t, wire+"collect reflected(j, 5 Hz), passed(j, 5 Hz), absorbed(j, 5 Hz, from after), taken(a, 5 Hz)\n", measure.Options{})
	const w = 2 * math.Pi * 5
	z := math.Sqrt(10e3 * 1.6)
	d := complex(-w*w*2, w*160)
	r := -d / (d + complex(0, 2*w*z))
	square := func(c complex128) float64 { return real(c)*real(c) + imag(c)*imag(c) }
	want := []float64{math.Sqrt(square(r)), math.Sqrt(square(1 + r)), 1 - square(r) - square(1+r), 0}
	for i, v := range want {
		n := got[i].Value
		if math.Abs(n.Value-v) > 1e-12 || n.Numerical != 0 {
			t.Errorf("%s: %.14g, want %.14g, numerical %g", got[i].Of.Source, n.Value, v, n.Numerical)
		}
	}
	if n := got[0].Value; n.LeadingInput != "lump" || len(n.ExactInputs) == 0 {
		t.Errorf("reflected: led by %q, exact %v", n.LeadingInput, n.ExactInputs)
	}
}

// First order against drawn lets, for every measure that statics and steady
// waves answer: both give the same standard uncertainty to what 1500 draws tell.
func TestSensitivitiesAgainstSampling(t *testing.T) {
	ask := wire + `
let air = 1.2 kg/m^3 +- 2 %
let warm = 30 degC +- 2 K
collect reflected(j, 5 Hz), passed(j, 5 Hz), absorbed(j, 5 Hz), taken(b, 0.3 Hz)
collect response(q.displacement, knock, 0.25 Hz), response(q.force, knock, 0.25 Hz)
collect sag(l), sag(j), sag_place(l), take_up(l, 13 kN), tension(l, warm), tension(j, warm)
collect frequency(l, 2), damping(1..2), scruton(l, 1..2, air)
`
	first := collected(t, ask, measure.Options{Workers: 2, ExactSamples: 2})
	drawn := collected(t, ask, measure.Options{Workers: 2, ExactSamples: 1500, Seed: 7, Sample: true})
	for i := range first {
		a, b := first[i].Value, drawn[i].Value
		if math.Abs(a.Value-b.Value) > 1e-12*math.Abs(a.Value) {
			t.Errorf("%s: %g and %g", first[i].Of.Source, a.Value, b.Value)
		}
		// A hypercube of 1500 tells a standard deviation to about 2 %; what bends adds some.
		if !(math.Abs(a.InputU-b.InputU) <= 0.06*b.InputU) {
			t.Errorf("%s: standard uncertainty %g to first order, %g drawn (%s)", first[i].Of.Source, a.InputU, b.InputU, first[i].Note)
		}
	}
}

// The Scruton number m zeta/(rho D^2) says its formula.
func TestScruton(t *testing.T) {
	got := collected(t, wire+"collect scruton(2, 1.2 kg/m^3), damping(2)\n", measure.Options{})
	want := got[1].Value.Value * 1.6 / (1.2 * 0.02 * 0.02)
	if math.Abs(got[0].Value.Value-want) > 1e-12*want || got[0].Note != "scruton is m zeta/(rho D^2)" {
		t.Errorf("%g, want %g; note %q", got[0].Value.Value, want, got[0].Note)
	}
}

// A response at the frequency of an undamped vibration does not exist.
func TestResponseAtResonance(t *testing.T) {
	const plain = `
stock w {
    mass 1 kg/m
}
line l {
    tension  10 kN
    support  a  fixed
    segment  s  w 50 m
    support  b  fixed
}
excite knock push at s 20 m with step(1 kN, 1 s)
watch q at s 20 m displacement
collect response(q.displacement, knock, 1 Hz), response(q.displacement, knock, 0.01 Hz)
`
	got := collected(t, plain, measure.Options{})
	if got[0].Value.Exists() {
		t.Errorf("a response of %g at an undamped resonance", got[0].Value.Value)
	}
	// F a(L-a)/(T L) in the limit of 0 Hz; (f/f1)^2 = 1e-4 adds some of its own.
	if v := got[1].Value.Value; math.Abs(v-20*30/(10e3*50)) > 3e-4*v {
		t.Errorf("%g m/N, want nearly %g", v, 20*30/(10e3*50))
	}
}
