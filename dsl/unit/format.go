package unit

import (
	"math"
	"strconv"
	"strings"
)

// System is a choice of display units.
type System int

// The systems: SI with engineering prefixes, and US customary units.
const (
	SI System = iota
	US
)

// SystemNamed reads the words "si" and "us".
func SystemNamed(word string) (System, bool) {
	switch word {
	case "si":
		return SI, true
	case "us":
		return US, true
	}
	return SI, false
}

// DefaultDigits is how many significant digits people are shown where nothing
// better is known.
const DefaultDigits = 4

// scales lists for each kind the units that people read it in, from small to
// large; the largest whose value is not below 1 is taken.
var scalesSI = map[Dim]string{
	Length.Dim:         "um mm m km",
	Area.Dim:           "mm^2 m^2",
	Mass.Dim:           "g kg t",
	Time.Dim:           "us ms s",
	Frequency.Dim:      "Hz kHz",
	Speed.Dim:          "mm/s m/s",
	Acceleration.Dim:   "mm/s^2 m/s^2",
	Force.Dim:          "mN N kN MN",
	Stress.Dim:         "Pa kPa MPa GPa",
	Energy.Dim:         "mJ J kJ MJ",
	Power.Dim:          "mW W kW MW",
	MassPerLength.Dim:  "kg/m",
	Density.Dim:        "kg/m^3",
	ForcePerLength.Dim: "N/m kN/m MN/m",
	Dashpot.Dim:        "N*s/m kN*s/m MN*s/m",
	Viscous.Dim:        "N*s/m^2 kN*s/m^2",
	Bending.Dim:        "N*m^2 kN*m^2 MN*m^2",
	Memory.Dim:         "B kB MB GB",
}

var scalesUS = map[Dim]string{
	Length.Dim:         "in ft",
	Area.Dim:           "in^2 ft^2",
	Mass.Dim:           "lb",
	Time.Dim:           "us ms s",
	Frequency.Dim:      "Hz kHz",
	Speed.Dim:          "in/s ft/s",
	Acceleration.Dim:   "in/s^2 ft/s^2",
	Force.Dim:          "lbf kip",
	Stress.Dim:         "psi ksi",
	Energy.Dim:         "lbf*ft kip*ft",
	Power.Dim:          "lbf*ft/s",
	MassPerLength.Dim:  "lb/ft",
	Density.Dim:        "lb/ft^3",
	ForcePerLength.Dim: "lbf/ft kip/ft",
	Dashpot.Dim:        "lbf*s/ft kip*s/ft",
	Viscous.Dim:        "lbf*s/ft^2",
	Bending.Dim:        "lbf*ft^2 kip*ft^2",
	Memory.Dim:         "B kB MB GB",
}

// Format writes an SI value for people: in the units of the system, with an
// engineering prefix and so many significant digits (DefaultDigits for 0). A
// pure number comes without a unit; infinities and NaN as words.
func Format(si float64, d Dim, system System, digits int) string {
	u, v := Display(si, d, system)
	text := Digits(v, digits)
	if u.Text == "" {
		return text
	}
	return text + " " + u.Text
}

// Display is the unit in which Format writes the value, and the value in it.
func Display(si float64, d Dim, system System) (Unit, float64) {
	table := scalesSI
	if system == US {
		table = scalesUS
	}
	names, ok := table[d]
	if !ok {
		if d.IsNumber() {
			return None(), si
		}
		if d == Temperature.Dim && system == US {
			return must("degF"), must("degF").From(si)
		}
		if d == Temperature.Dim {
			return must("degC"), must("degC").From(si)
		}
		return Unit{Text: d.SI(), Dim: d, num: 1, den: 1}, si
	}
	var best Unit
	for i, name := range strings.Fields(names) {
		u := must(name)
		// 0.9995 of a unit would be written as 1.000 of it with four digits.
		if i == 0 || math.Abs(u.From(si)) >= 0.99949 {
			best = u
		}
	}
	if si == 0 || math.IsInf(si, 0) || math.IsNaN(si) {
		best = zeroUnit(d, names)
	}
	return best, best.From(si)
}

// zeroUnit is the unit in which nothing is written: the SI unit where the
// system has it, else the smallest.
func zeroUnit(d Dim, names string) Unit {
	list := strings.Fields(names)
	for _, n := range list {
		if n == d.SI() {
			return must(n)
		}
	}
	return must(list[0])
}

// must reads a unit of the display tables; every one of them is read by a test.
func must(text string) Unit {
	u, err := Parse(text)
	if err != nil {
		panic("unit: display table: " + err.Error())
	}
	return u
}

// Digits writes a number with so many significant digits, without trailing
// zeros behind the point and without an exponent between 1e-4 and 1e9.
func Digits(v float64, digits int) string {
	switch {
	case math.IsNaN(v):
		return "no number"
	case math.IsInf(v, 1):
		return "infinity"
	case math.IsInf(v, -1):
		return "-infinity"
	case v == 0:
		return "0"
	}
	if digits <= 0 {
		digits = DefaultDigits
	}
	text := strconv.FormatFloat(v, 'e', digits-1, 64)
	rounded, _ := strconv.ParseFloat(text, 64)
	if a := math.Abs(rounded); a >= 1e9 || a < 1e-4 {
		mantissa, exponent, _ := strings.Cut(text, "e")
		power, _ := strconv.Atoi(exponent)
		return trim(mantissa) + "e" + strconv.Itoa(power)
	}
	decimals := digits - 1 - int(math.Floor(math.Log10(math.Abs(rounded))+1e-12))
	return trim(strconv.FormatFloat(rounded, 'f', max(decimals, 0), 64))
}

func trim(s string) string {
	if !strings.Contains(s, ".") {
		return s
	}
	return strings.TrimRight(strings.TrimRight(s, "0"), ".")
}
