package loads

import (
	"context"
	"errors"
	"math"
	"math/rand/v2"

	"github.com/tautspan/tautspan/plugins/author"
)

// wind is the fluctuating drag of turbulent wind, random in time and along the
// line, the same for the same seed.
type wind struct{}

// About is the description.
func (wind) About() author.About {
	return author.About{
		Name: "turbulent-wind", Version: "1", Says: "fluctuating drag of turbulent wind along a line, seeded",
		Formula: "q = density speed diameter drag u(x, t); u random with n S(n)/friction^2 = 105 r/(1 + 33 r)^(5/3), r = n height/speed, and coherence exp(-decay n dx/speed) of neighbours",
		Source:  "spectrum: Kaimal and others 1972 (lateral 17 r/(1 + 9.5 r)^(5/3) is not used); coherence: Davenport 1961; sum of cosines: Shinozuka and Jan 1972; all from memory",
		Cannot:  []string{"the mean drag, which is part of the rest position", "forces that depend on the line's own speed: add them as `loss viscous`"},
		Parameters: []author.Parameter{
			{Name: "speed", Unit: "m/s", Says: "mean wind", Least: 0.1, Most: 100},
			{Name: "friction", Unit: "m/s", Says: "friction velocity (about 0.4 speed/ln(height/roughness))", Least: 0.001, Most: 20},
			{Name: "height", Unit: "m", Says: "above ground", Least: 1, Most: 1000},
			{Name: "diameter", Unit: "m", Says: "of the line", Least: 1e-5, Most: 10},
			{Name: "density", Unit: "kg/m^3", Says: "of air", Least: 0.1, Most: 10, Preset: 1.225, HasPreset: true},
			{Name: "drag", Unit: "1", Says: "drag coefficient", Least: 0, Most: 10, Preset: 1.1, HasPreset: true},
			{Name: "decay", Unit: "1", Says: "of coherence", Least: 0.1, Most: 100, Preset: 10, HasPreset: true},
			{Name: "highest", Unit: "Hz", Says: "where the spectrum is cut off", Least: 0.1, Most: 1000, Preset: 5, HasPreset: true},
			{Name: "seed", Unit: "1", Says: "of chance", Least: 0, Most: 1e15, Preset: 1, HasPreset: true},
		},
	}
}

// tones is how many cosines make the wind; between them the spectrum is taken as
// flat. They are spread evenly over the logarithm of frequency, each at a random
// place of its band so that the record does not repeat.
const tones = 400

// stations bounds the places that have a wind of their own.
const stations = 31

// Prepare: twenty instants a cycle of the highest frequency; places a length
// apart over which neighbours' coherence at 0.2 Hz falls to half.
func (wind) Prepare(q author.LoadWant) (step, spacing float64, err error) {
	if !q.Along {
		return 0, 0, errors.New("turbulent wind acts along a line or segment")
	}
	p := q.Parameters
	return 1 / (20 * p["highest"]), math.Max(math.Ln2*p["speed"]/(0.2*p["decay"]), q.Length/(stations-1)), nil
}

// spectrum is S(n) of the longitudinal turbulence, m^2/s (one-sided).
func (wind) spectrum(p map[string]float64, n float64) float64 {
	r := n * p["height"] / p["speed"]
	return p["friction"] * p["friction"] * 105 * r / math.Pow(1+33*r, 5.0/3) / n
}

// Evaluate sums the cosines. At each frequency the phases along the line are a
// chain: each station keeps coherence with the one before and adds chance, which
// has the exponential coherence exactly for stations in a row.
func (w wind) Evaluate(ctx context.Context, q author.LoadWant, t []float64, force [][]float64) error {
	p := q.Parameters
	low, high := math.Min(0.5/math.Max(q.Duration, 1), p["highest"]/10), p["highest"]
	gain := p["density"] * p["speed"] * p["diameter"] * p["drag"]
	for k := range force {
		clear(force[k])
	}
	for j := range tones {
		if ctx.Err() != nil {
			return ctx.Err()
		}
		// Chance of its own for each tone: a block of instants gets what the
		// whole record would.
		rng := rand.New(rand.NewPCG(uint64(p["seed"]), uint64(j)))
		from := low * math.Pow(high/low, float64(j)/tones)
		to := low * math.Pow(high/low, float64(j+1)/tones)
		n := from + (to-from)*rng.Float64()
		amplitude := gain * math.Sqrt(2*w.spectrum(p, n)*(to-from))
		c, s := rng.NormFloat64()/math.Sqrt2, rng.NormFloat64()/math.Sqrt2
		for k := range force {
			if k > 0 {
				coherence := math.Exp(-p["decay"] * n * (q.Places[k] - q.Places[k-1]) / p["speed"])
				fresh := math.Sqrt(1 - coherence*coherence)
				c = coherence*c + fresh*rng.NormFloat64()/math.Sqrt2
				s = coherence*s + fresh*rng.NormFloat64()/math.Sqrt2
			}
			for i, now := range t {
				_, turn := math.Modf(n * now)
				sin, cos := math.Sincos(2 * math.Pi * turn)
				force[k][i] += amplitude * (c*cos + s*sin)
			}
		}
	}
	return nil
}
