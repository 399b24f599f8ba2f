package cli

import (
	"math"
	"strconv"

	"github.com/tautspan/tautspan/dsl/unit"
)

// reader formats SI numbers for people in the chosen system of units.
type reader struct {
	system unit.System
}

// dimOf is the dimension of an SI unit as it stands in a document ("1" for none).
func dimOf(si string) unit.Dim {
	if si == "" || si == "1" {
		return unit.Dim{}
	}
	u, err := unit.Parse(si)
	if err != nil {
		return unit.Dim{}
	}
	return u.Dim
}

// show writes a value with its unit, digits significant.
func (r reader) show(v float64, si string, digits int) string {
	if si == "rad" {
		return unit.Digits(v*1e3, digits) + " mrad"
	}
	if si == moment {
		factor, word := r.momentUnit(v)
		return unit.Digits(v*factor, digits) + " " + word
	}
	return unit.Format(v, dimOf(si), r.system, digits)
}

// moment is the unit of a moment. It has the dimension of an energy, and nobody
// reads a moment in joules.
const moment = "N*m"

func (r reader) momentUnit(scale float64) (factor float64, word string) {
	switch scale = math.Abs(scale); {
	case r.system == unit.US:
		return 1 / 1.3558179483314004, "lbf*ft" // exact: 0.3048 m times 4.4482216152605 N
	case scale >= 1e6:
		return 1e-6, "MN*m"
	case scale >= 1e3:
		return 1e-3, "kN*m"
	}
	return 1, moment
}

// split is the value and the unit as two words, for columns; scale is the value
// by whose size the unit is chosen, so that a column keeps one unit.
func (r reader) unitFor(scale float64, si string) (factor float64, word string) {
	if si == "rad" {
		return 1e3, "mrad"
	}
	if si == moment {
		return r.momentUnit(scale)
	}
	u, v := unit.Display(scale, dimOf(si), r.system)
	if scale == 0 || u.Text == "" {
		return 1, u.Text
	}
	return v / scale, u.Text
}

// withBar writes a value and its bar in one unit, the value to the digit that
// the bar's second figure has: 184.2 ± 0.6 mm.
func (r reader) withBar(v, bar float64, si string) string {
	if math.IsNaN(v) {
		return "-"
	}
	factor, word := r.unitFor(v, si)
	if word != "" {
		word = " " + word
	}
	return barText(v*factor, bar*factor) + word
}

// barText writes a value and its bar, the value to the digit that the bar's
// second figure has.
func barText(v, bar float64) string {
	bar = math.Abs(bar)
	if bar == 0 || math.IsNaN(bar) || math.IsInf(bar, 0) {
		return trimNumber(v, 6)
	}
	places := barPlaces(v, bar)
	if !(roundUp(bar, places) > 0) {
		return trimNumber(v, 6) // far below the last digit
	}
	return strconv.FormatFloat(v, 'f', places, 64) + " ± " + strconv.FormatFloat(roundUp(bar, places), 'f', places, 64)
}

// barPlaces is the number of decimals at which the bar has one or two figures.
func barPlaces(v, bar float64) int {
	places := -int(math.Floor(math.Log10(bar)))
	if bar*math.Pow(10, float64(places)) < 3 {
		places++ // a leading 1 or 2 says too little alone
	}
	most := 9
	if v != 0 {
		most = max(0, 5-int(math.Floor(math.Log10(math.Abs(v)))))
	}
	return max(0, min(places, most))
}

// roundUp rounds a bar away from zero, so that it never claims too much.
func roundUp(bar float64, places int) float64 {
	p := math.Pow(10, float64(places))
	return math.Ceil(bar*p-1e-9) / p
}

// trimNumber writes a number with so many significant digits.
func trimNumber(v float64, digits int) string { return unit.Digits(v, digits) }

// column writes values in one unit, chosen by the largest, with as many decimals
// as give the largest so many significant digits; it returns the unit for the
// column's head.
func (r reader) column(values []float64, si string, digits int) (cells []string, word string) {
	largest := 0.0
	for _, v := range values {
		if !math.IsNaN(v) && !math.IsInf(v, 0) {
			largest = math.Max(largest, math.Abs(v))
		}
	}
	factor, word := r.unitFor(largest, si)
	places := 0
	if largest > 0 {
		places = max(0, digits-1-int(math.Floor(math.Log10(largest*factor))))
	}
	for _, v := range values {
		cells = append(cells, strconv.FormatFloat(v*factor, 'f', places, 64))
	}
	return cells, word
}

// head is a column's head with its unit.
func head(name, word string) string {
	if word == "" {
		return name
	}
	return name + " [" + word + "]"
}
