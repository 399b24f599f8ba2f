package fit

import (
	"math"
	"sort"
)

// Figure is a value that a survey found, with what an error of each source does
// to it.
type Figure struct {
	Value float64
	Parts []Part
}

// Part is the change of a figure for one standard uncertainty of a source, with
// its sign.
type Part struct {
	Source string
	Change float64
}

// Known is a let that was known before a survey.
type Known struct{ Stated, U float64 }

// Difference is what lies between two surveys of one thing.
type Difference struct {
	Value    float64  // second less first
	U        float64  // standard uncertainty
	Relative float64  // second over first, less 1
	LogU     float64  // standard uncertainty of the logarithm of second over first
	Common   []string // sources whose error is the same in both, sorted
}

// Between holds two figures against one another. A let that both surveys knew
// by the same value and doubt (a mass, a length) errs by the same amount in both,
// so that it counts with the difference of what it does to each; everything else
// errs anew:
//
//	u^2 = sum over common sources (c2 - c1)^2 + sum over others c1^2 + c2^2.
//
// Source: JCGM 100:2008, 5.2 (correlated inputs), from memory.
func Between(first, second Figure, before, after map[string]Known) Difference {
	d := Difference{Value: second.Value - first.Value, Relative: second.Value/first.Value - 1}
	common := func(source string) bool {
		a, known := before[source]
		b, still := after[source]
		return known && still && a == b
	}
	shared := map[string][2]float64{}
	own := 0.0
	relative := 0.0
	add := func(f Figure, which int) {
		for _, p := range f.Parts {
			if common(p.Source) {
				s := shared[p.Source]
				s[which] += p.Change
				shared[p.Source] = s
				continue
			}
			own += p.Change * p.Change
			relative += p.Change / f.Value * p.Change / f.Value
		}
	}
	add(first, 0)
	add(second, 1)
	for source, c := range shared {
		d.Common = append(d.Common, source)
		own += (c[1] - c[0]) * (c[1] - c[0])
		r := c[1]/second.Value - c[0]/first.Value
		relative += r * r
	}
	sort.Strings(d.Common)
	d.U = math.Sqrt(own)
	d.LogU = math.Min(math.Sqrt(relative), unbounded)
	return d
}

// unbounded is the standard uncertainty of a logarithm that stands for not
// knowing anything; twice as much would leave the range of numbers.
const unbounded = 300

// Ratio is second over first, moved by so many standard uncertainties of its
// logarithm.
func (d *Difference) Ratio(k float64) float64 { return (1 + d.Relative) * math.Exp(k*d.LogU) }

// Unchanged is the ratio that lies k standard uncertainties from 1.
func (d *Difference) Unchanged(k float64) float64 { return math.Exp(k * d.LogU) }

// Apart is by how many standard uncertainties the ratio differs from 1.
func (d *Difference) Apart() float64 {
	apart := math.Abs(math.Log1p(d.Relative))
	if apart == 0 {
		return 0
	}
	return apart / d.LogU
}

// AlarmFactor is by how many standard uncertainties one of n independent
// differences must stand off from nothing for an alarm, if n that all are nothing
// shall give any alarm at most at the rate given: (1 - p)^n = 1 - rate.
// Source: Sidak, J. Amer. Statist. Assoc. 62 (1967) 626-633 (from memory).
func AlarmFactor(n int, rate float64) float64 {
	p := 1 - math.Pow(1-rate, 1/float64(max(n, 1)))
	return math.Sqrt2 * math.Erfinv(1-p)
}
