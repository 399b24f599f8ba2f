package loads

import (
	"context"
	"errors"
	"math"
	"strings"
	"testing"

	"github.com/tautspan/tautspan/engine/scenario"
	"github.com/tautspan/tautspan/plugins/author"
	"github.com/tautspan/tautspan/plugins/tryout"
)

func TestBuiltInConform(t *testing.T) {
	for _, l := range BuiltIn() {
		for _, c := range tryout.Run(context.Background(), l) {
			if c.Failed() {
				t.Errorf("%s: %s", l.About().Name, c)
			}
		}
	}
}

func use(l author.Load, along bool, given map[string]float64) author.LoadWant {
	q := author.LoadWant{Parameters: map[string]float64{}, Along: along, Length: 100, Duration: 600}
	for _, p := range l.About().Parameters {
		if q.Parameters[p.Name] = p.Preset; !p.HasPreset {
			q.Parameters[p.Name] = given[p.Name]
		}
		if v, ok := given[p.Name]; ok {
			q.Parameters[p.Name] = v
		}
	}
	return q
}

func evaluated(t *testing.T, l author.Load, q author.LoadWant, step float64, n int) [][]float64 {
	t.Helper()
	times, out := make([]float64, n), make([][]float64, len(q.Places))
	for i := range times {
		times[i] = float64(i) * step
	}
	for k := range out {
		out[k] = make([]float64, n)
	}
	if err := l.Evaluate(context.Background(), q, times, out); err != nil {
		t.Fatal(err)
	}
	return out
}

// Vortices: the frequency of Strouhal's number, and the locked one within the
// band. Air at 10 m/s past 50 mm sheds at 0.2*10/0.05 = 40 Hz.
func TestVortexFrequency(t *testing.T) {
	for _, c := range []struct{ lock, want float64 }{{0, 40}, {36, 36}, {45, 45}, {30, 40}, {60, 40}} {
		q := use(vortex{}, true, map[string]float64{"speed": 10, "diameter": 0.05, "lock": c.lock})
		if got := (vortex{}).frequency(q.Parameters); math.Abs(got-c.want) > 1e-12 {
			t.Errorf("lock %g: %g Hz, want %g", c.lock, got, c.want)
		}
		q.Places = []float64{0}
		f := evaluated(t, vortex{}, q, 1/(4*c.want), 8)
		// 0.5*1.225*100*0.05*0.3 N/m at a quarter of a cycle.
		if want := 0.91875; math.Abs(f[0][1]-want) > 1e-9 {
			t.Errorf("lock %g: %g N/m, want %g", c.lock, f[0][1], want)
		}
	}
}

// The wind's variance is that of its spectrum (integrated here by another rule,
// and in closed form over all frequencies: 4.77 friction^2 for 105 r/(1+33r)^(5/3)),
// and neighbours keep the coherence told. Chance: over 40 seeds the mean variance
// of 600 s is known to some 3 %.
func TestWindVarianceAndCoherence(t *testing.T) {
	const dx = 3.0
	given := map[string]float64{"speed": 20, "friction": 1.5, "height": 20, "diameter": 0.03}
	q := use(wind{}, true, given)
	q.Places = []float64{0, dx}
	gain := 1.225 * 20 * 0.03 * 1.1
	want, low := 0.0, 0.5/600.0
	const n = 20000
	for i := range n { // over log frequency, midpoint rule
		f := low * math.Pow(5/low, (float64(i)+0.5)/n)
		want += gain * gain * (wind{}).spectrum(q.Parameters, f) * f * math.Log(5/low) / n
	}
	if all := 105.0 / 33 * 1.5 * gain * gain * 1.5 * 1.5; want > all || want < 0.8*all {
		// The integral of 105/(1+33r)^(5/3) dr is 105/33 * 3/2.
		t.Errorf("spectrum holds %g of %g", want, all)
	}
	variance, cross := 0.0, 0.0
	const seeds = 40
	for seed := range seeds {
		q.Parameters["seed"] = float64(seed)
		f := evaluated(t, wind{}, q, 0.5, 1200)
		for i := range f[0] {
			variance += (f[0][i]*f[0][i] + f[1][i]*f[1][i]) / 2 / 1200 / seeds
			cross += f[0][i] * f[1][i] / 1200 / seeds
		}
	}
	if math.Abs(variance/want-1) > 0.1 {
		t.Errorf("variance %g, of the spectrum %g", variance, want)
	}
	shared := 0.0
	for i := range n {
		f := low * math.Pow(5/low, (float64(i)+0.5)/n)
		shared += gain * gain * (wind{}).spectrum(q.Parameters, f) * f * math.Log(5/low) / n * math.Exp(-10*f*dx/20)
	}
	if math.Abs(cross/shared-1) > 0.1 {
		t.Errorf("shared variance %g, of the coherence %g", cross, shared)
	}
}

func network() *scenario.Network {
	net := &scenario.Network{}
	net.Lines = []scenario.Line{{Name: "l", Nodes: []scenario.Node{{Name: "a", Fixed: true}, {Name: "b", Fixed: true}},
		Segments: []scenario.Segment{{Name: "s", Length: 20, MassPerLength: 0.5, Tension: 800}}}}
	net.Run = scenario.RunOf[float64]{For: 2, Every: 0.01}
	return net
}

// tilted is x + t along a stretch: hats and straight lines give it exactly.
type tilted struct{ step, spacing float64 }

func (l tilted) About() author.About {
	return author.About{Name: "tilted", Version: "1", Parameters: []author.Parameter{{Name: "scale", Unit: "kN/m", Least: 0, Most: 5}}}
}
func (l tilted) Prepare(author.LoadWant) (float64, float64, error) { return l.step, l.spacing, nil }
func (l tilted) Evaluate(_ context.Context, q author.LoadWant, t []float64, force [][]float64) error {
	for k, x := range q.Places {
		for i := range t {
			force[k][i] = q.Parameters["scale"] * (x + t[i])
		}
	}
	return nil
}

func TestWorkOut(t *testing.T) {
	find := func(l author.Load) func(string) (author.Load, error) {
		return func(name string) (author.Load, error) {
			if name != "tilted" {
				return nil, errors.New("no load called " + name)
			}
			return l, nil
		}
	}
	scale := []scenario.ParameterOf[float64]{{Name: "scale", Value: 3000, Factor: 1000}}
	net := network()
	net.Loads = []scenario.LoadOf[float64]{{Name: "w", Plugin: "tilted", Parameters: scale, Along: true, Span: scenario.SpanOf{Segment: -1}}}
	if err := WorkOut(context.Background(), net, find(tilted{0.1, 3})); err != nil {
		t.Fatal(err)
	}
	if len(net.Loads) != 0 || len(net.Presses) != 8 {
		t.Fatalf("%d presses", len(net.Presses))
	}
	for _, at := range [][2]float64{{0, 0}, {20, 0}, {7.3, 1.234}, {19.99, 2}, {2.857142857142857, 0.7}} {
		sum := 0.0
		for _, p := range net.Presses {
			sum += p.Force.At(at[1], at[0])
		}
		if want := 3 * (at[0] + at[1]); math.Abs(sum-want) > 1e-9 {
			t.Errorf("at %g m, %g s: %g, want %g", at[0], at[1], sum, want)
		}
	}
	for what, l := range map[string]author.Load{"instants": tilted{1e-9, 3}, "places": tilted{0.1, 1e-3}, "step of 0": tilted{0, 3}, "spacing of NaN": tilted{0.1, math.NaN()}} {
		net := network()
		net.Loads = []scenario.LoadOf[float64]{{Name: "w", Plugin: "tilted", Parameters: scale, Along: true, Span: scenario.SpanOf{Segment: -1}}}
		var p *scenario.PathError
		if err := WorkOut(context.Background(), net, find(l)); !errors.As(err, &p) || p.Path != "excite.w" || !strings.Contains(p.What, what) {
			t.Errorf("%s: %v", what, err)
		}
	}
	net = network()
	net.Loads = []scenario.LoadOf[float64]{{Name: "w", Plugin: "tilted", Parameters: []scenario.ParameterOf[float64]{{Name: "scale", Value: 6000, Factor: 1000}}, At: scenario.Place{Node: -1, Offset: 3}}}
	if err := WorkOut(context.Background(), net, find(tilted{0.1, 3})); err == nil || !strings.Contains(err.Error(), "between 0 and 5 kN/m") {
		t.Errorf("a let that moves a parameter out of its range: %v", err)
	}
}
