package doubt

import (
	"encoding/json"
	"math"
	"sort"
)

// Coverage factors of the normal distribution: 95 % on both sides together, and
// 95 % on one side. Three decimals are the convention of the trade; the exact
// quantiles are 1.95996 and 1.64485.
const (
	TwoSided = 1.960
	OneSided = 1.645
)

// Basis says how the doubt of the inputs was found.
type Basis string

// The bases. A plain number has no doubtful input.
const (
	Plain      Basis = "exact inputs"
	FirstOrder Basis = "first order"
	Sampled    Basis = "sampled"
)

// Number is a value with its doubt. Whatever does not exist is NaN or infinite
// and becomes null in JSON.
type Number struct {
	Value     float64
	Unit      string  // SI
	Numerical float64 // bound, same unit; 0 for exact answers
	InputU    float64 // standard uncertainty from doubtful inputs

	// The interval of about 95 %, both sides together, and the ends of the
	// one-sided intervals of 95 %.
	Low95, High95 float64
	LowEnd        float64
	HighEnd       float64

	LeadingInput string   // the doubtful input that counts most; "" where none does
	ExactInputs  []string // inputs taken as exact, sorted

	Basis         Basis
	Contributions []Contribution // of each doubtful input, largest first
}

// Contribution is what one doubtful input adds to an answer's doubt: the change
// of the answer for one standard uncertainty, with sign.
type Contribution struct {
	Input  string
	Change float64 // half the difference of the answers at plus and minus one standard uncertainty
	Curve  float64 // f(+) - 2 f(0) + f(-): 0 where the answer is straight in the input
}

// rounding is the share of a value below which a change is that of rounding, and
// no input is named for it. Chosen: some thousand roundings.
const rounding = 1e-12

// Exact is a value without any doubt of its own.
func Exact(value float64, unit string, exactInputs ...string) Number {
	return Bounded(value, unit, 0, exactInputs...)
}

// Bounded is a value with a numerical bound and exact inputs.
func Bounded(value float64, unit string, numerical float64, exactInputs ...string) Number {
	return Combine(value, unit, numerical, nil, exactInputs...)
}

// Combine is a value with a numerical bound and the contributions of doubtful
// inputs, which are independent: InputU = sqrt(sum of Change^2), to first order.
//
//	Low95  = Value - Numerical - 1.960 InputU, High95 likewise
//	LowEnd = Value - Numerical - 1.645 InputU, HighEnd likewise
//
// Source: JCGM 100:2008, 5.1.2 (from memory). Bounds and statistical doubt are
// added, not mixed, since a bound has no distribution.
func Combine(value float64, unit string, numerical float64, parts []Contribution, exactInputs ...string) Number {
	n := Number{Value: value, Unit: unit, Numerical: math.Abs(numerical), Basis: Plain}
	n.ExactInputs = append([]string(nil), exactInputs...)
	sort.Strings(n.ExactInputs)
	n.Contributions = append([]Contribution(nil), parts...)
	sort.SliceStable(n.Contributions, func(i, j int) bool {
		return math.Abs(n.Contributions[i].Change) > math.Abs(n.Contributions[j].Change)
	})
	squares := 0.0
	for i := len(n.Contributions) - 1; i >= 0; i-- { // smallest first
		squares += n.Contributions[i].Change * n.Contributions[i].Change
	}
	n.InputU = math.Sqrt(squares)
	if len(parts) > 0 {
		n.Basis = FirstOrder
		if math.Abs(n.Contributions[0].Change) > rounding*math.Abs(value) {
			n.LeadingInput = n.Contributions[0].Input
		}
	}
	n.Low95, n.High95 = value-n.Numerical-TwoSided*n.InputU, value+n.Numerical+TwoSided*n.InputU
	n.LowEnd, n.HighEnd = value-n.Numerical-OneSided*n.InputU, value+n.Numerical+OneSided*n.InputU
	return n
}

// Between is a quantity of which no more is known than that it lies between low
// and high (infinite where open), such as a time that did not come before the
// record ended. It has no value.
func Between(low, high float64, unit string, exactInputs ...string) Number {
	n := Exact(math.NaN(), unit, exactInputs...)
	n.Numerical, n.InputU = math.NaN(), math.NaN()
	n.Low95, n.High95, n.LowEnd, n.HighEnd = low, high, low, high
	return n
}

// Missing is a value that does not exist.
func Missing(unit string, exactInputs ...string) Number {
	return Between(math.Inf(-1), math.Inf(1), unit, exactInputs...)
}

// FromSamples gives a number whose input doubt is that of samples of the answer
// (without numerical error), drawn over the inputs: Low95 and High95 are the
// 2.5 % and 97.5 % quantiles, the one-sided ends the 5 % and 95 % ones, each
// widened by the numerical bound; InputU is the standard deviation. A sample
// that does not exist opens both sides. The first-order parts tell which input
// leads; they may be nil.
//
// Source: JCGM 101:2008 (from memory).
func FromSamples(value float64, unit string, numerical float64, samples []float64, parts []Contribution, exactInputs ...string) Number {
	n := Combine(value, unit, numerical, parts, exactInputs...)
	n.Basis = Sampled
	sorted := make([]float64, 0, len(samples))
	missing := false
	for _, s := range samples {
		if math.IsNaN(s) {
			missing = true
			continue
		}
		sorted = append(sorted, s)
	}
	if missing || len(sorted) < 2 {
		n.InputU = math.NaN()
		n.Low95, n.High95, n.LowEnd, n.HighEnd = math.Inf(-1), math.Inf(1), math.Inf(-1), math.Inf(1)
		return n
	}
	sort.Float64s(sorted)
	n.InputU = deviation(sorted)
	n.Low95, n.High95 = quantile(sorted, 0.025)-n.Numerical, quantile(sorted, 0.975)+n.Numerical
	n.LowEnd, n.HighEnd = quantile(sorted, 0.05)-n.Numerical, quantile(sorted, 0.95)+n.Numerical
	return n
}

func deviation(x []float64) float64 {
	mean, sum := 0.0, 0.0
	for _, v := range x {
		mean += v / float64(len(x))
	}
	for _, v := range x {
		sum += (v - mean) * (v - mean)
	}
	return math.Sqrt(sum / float64(len(x)-1))
}

// quantile is the value below which a share p of sorted samples lies, straight
// between the plotting positions (i+1/2)/n.
func quantile(sorted []float64, p float64) float64 {
	at := p*float64(len(sorted)) - 0.5
	i := int(math.Floor(at))
	switch {
	case i < 0:
		return sorted[0]
	case i >= len(sorted)-1:
		return sorted[len(sorted)-1]
	}
	if sorted[i] == sorted[i+1] { // also two infinities
		return sorted[i]
	}
	return sorted[i] + (at-float64(i))*(sorted[i+1]-sorted[i])
}

// Exists tells whether there is a value.
func (n Number) Exists() bool { return !math.IsNaN(n.Value) && !math.IsInf(n.Value, 0) }

// MarshalJSON writes the number as the documents hold it, with null for what
// does not exist.
func (n Number) MarshalJSON() ([]byte, error) {
	type document struct {
		Value     *float64 `json:"value"`
		Unit      string   `json:"unit"`
		Numerical *float64 `json:"numerical"`
		InputU    *float64 `json:"input_u"`
		Low95     *float64 `json:"low95"`
		High95    *float64 `json:"high95"`
		Leading   *string  `json:"leading_input"`
		Exact     []string `json:"exact_inputs"`
		Basis     Basis    `json:"basis"`
	}
	d := document{
		Value: orNull(n.Value), Unit: n.Unit, Numerical: orNull(n.Numerical), InputU: orNull(n.InputU),
		Low95: orNull(n.Low95), High95: orNull(n.High95), Exact: n.ExactInputs, Basis: n.Basis,
	}
	if d.Exact == nil {
		d.Exact = []string{}
	}
	if d.Basis == "" {
		d.Basis = Plain
	}
	if n.LeadingInput != "" {
		d.Leading = &n.LeadingInput
	}
	return json.Marshal(d)
}

func orNull(v float64) *float64 {
	if math.IsNaN(v) || math.IsInf(v, 0) {
		return nil
	}
	return &v
}
