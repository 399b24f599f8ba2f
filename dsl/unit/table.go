package unit

import "math"

// atom is one unit of the table. Its factor to SI is num/den, two numbers that
// are held exactly wherever the factor is a decimal fraction, so that 9 ms is
// the float64 nearest to 0.009.
type atom struct {
	dim      Dim
	num, den float64
	prefixed bool // takes prefixes from n to G
	memory   bool // takes k, M, G only
	angle    bool
	percent  bool
	offset   float64 // K to add where a temperature is meant
	scale    bool    // has an offset
}

// Exact numbers of the customary units, NIST SP 811 appendix B.
const (
	inchNum, inchDen = 254, 10_000                     // 1 in = 0.0254 m
	footNum, footDen = 3048, 10_000                    // 1 ft = 0.3048 m
	lbNum, lbDen     = 45_359_237, 100_000_000         // 1 lb = 0.45359237 kg
	lbfNum, lbfDen   = 44_482_216_152_605, 1e13        // 1 lbf = 1 lb x 9.80665 m/s^2
	gravNum, gravDen = 980_665, 100_000                // 9.80665 m/s^2
	psiNum, psiDen   = 44_482_216_152_605, 1e5 * 64516 // lbf/in^2; 254^2 = 64516
)

// StandardGravity is the conventional value g0, m/s^2, exact by definition (3rd CGPM 1901, SI brochure).
const StandardGravity = 9.80665

// lookup is the table of units without prefix.
func lookup(word string) (atom, bool) {
	a, ok := atoms[word]
	if ok && a.den == 0 {
		a.den = 1
	}
	return a, ok
}

// atoms is never changed.
var atoms = map[string]atom{
	"m":    {dim: Length.Dim, num: 1, prefixed: true},
	"g":    {dim: Mass.Dim, num: 1, den: 1000, prefixed: true},
	"s":    {dim: Time.Dim, num: 1, prefixed: true},
	"N":    {dim: Force.Dim, num: 1, prefixed: true},
	"Pa":   {dim: Stress.Dim, num: 1, prefixed: true},
	"J":    {dim: Energy.Dim, num: 1, prefixed: true},
	"W":    {dim: Power.Dim, num: 1, prefixed: true},
	"Hz":   {dim: Frequency.Dim, num: 1, prefixed: true},
	"rad":  {num: 1, angle: true, prefixed: true},
	"K":    {dim: Temperature.Dim, num: 1, prefixed: true},
	"t":    {dim: Mass.Dim, num: 1000},
	"deg":  {num: math.Pi, den: 180, angle: true},
	"min":  {dim: Time.Dim, num: 60},
	"h":    {dim: Time.Dim, num: 3600},
	"%":    {num: 1, den: 100, percent: true},
	"degC": {dim: Temperature.Dim, num: 1, offset: 273.15, scale: true},
	"degF": {dim: Temperature.Dim, num: 5, den: 9, offset: 459.67 * 5 / 9, scale: true},
	"in":   {dim: Length.Dim, num: inchNum, den: inchDen},
	"ft":   {dim: Length.Dim, num: footNum, den: footDen},
	"yd":   {dim: Length.Dim, num: 9144, den: 10_000},
	"mi":   {dim: Length.Dim, num: 1_609_344, den: 1000},
	"lb":   {dim: Mass.Dim, num: lbNum, den: lbDen},
	"lbf":  {dim: Force.Dim, num: lbfNum, den: lbfDen},
	"kip":  {dim: Force.Dim, num: lbfNum, den: lbfDen / 1000},
	"psi":  {dim: Stress.Dim, num: psiNum, den: psiDen},
	"ksi":  {dim: Stress.Dim, num: psiNum, den: psiDen / 1000},
	"mph":  {dim: Speed.Dim, num: 44_704, den: 100_000},
	"kgf":  {dim: Force.Dim, num: gravNum, den: gravDen},
	"B":    {dim: Memory.Dim, num: 1, memory: true},
}

// prefix is a power of ten before a unit.
type prefix struct {
	text     string
	num, den float64
}

// prefixes from n to G, SI brochure table 7 without the tens and hundreds.
// Micro is written u or with either of the two signs that keyboards give.
var prefixes = [...]prefix{
	{"n", 1, 1e9}, {"u", 1, 1e6}, {"µ", 1, 1e6}, {"μ", 1, 1e6}, {"m", 1, 1e3}, {"c", 1, 100}, {"d", 1, 10},
	{"k", 1e3, 1}, {"M", 1e6, 1}, {"G", 1e9, 1},
}

// Words lists every unit without its prefixes, for editors and for the check
// that no keyword is a unit.
func Words() []string {
	out := make([]string, 0, len(atoms))
	for w := range atoms {
		out = append(out, w)
	}
	return out
}

// find reads one unit with its prefix.
func find(word string) (atom, bool) {
	if a, ok := lookup(word); ok {
		return a, true
	}
	for _, p := range prefixes {
		if len(word) <= len(p.text) || word[:len(p.text)] != p.text {
			continue
		}
		a, ok := lookup(word[len(p.text):])
		if !ok || !(a.prefixed || a.memory && p.num > 1) {
			continue
		}
		a.num *= p.num
		a.den *= p.den
		if g := min(a.num, a.den); g > 1 && math.Mod(a.num, g) == 0 && math.Mod(a.den, g) == 0 {
			a.num /= g
			a.den /= g
		}
		return a, true
	}
	return atom{}, false
}
