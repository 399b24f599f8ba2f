package unit

import (
	"strings"
	"unicode"
)

// usual maps what people type to the unit that they mean. Common practice, no
// source; units that could mean two things (ton, cal) are left out.
var usual = map[string]string{
	"lbs": "lb", "lbm": "lb", "pound": "lb", "pounds": "lb", "kips": "kip", "klbf": "kip", "lbsf": "lbf", "lbF": "lbf",
	"sec": "s", "secs": "s", "second": "s", "seconds": "s", "msec": "ms", "hr": "h", "hrs": "h", "hour": "h", "hours": "h",
	"mins": "min", "minute": "min", "minutes": "min",
	"meter": "m", "meters": "m", "metre": "m", "metres": "m", "mtr": "m", "micron": "um",
	"inch": "in", "inches": "in", "foot": "ft", "feet": "ft", "yard": "yd", "yards": "yd", "mile": "mi", "miles": "mi",
	"°": "deg", "degree": "deg", "degrees": "deg", "°C": "degC", "℃": "degC", "°F": "degF", "℉": "degF", "radian": "rad", "radians": "rad", "rads": "rad",
	"kelvin": "K", "celsius": "degC", "fahrenheit": "degF",
	"tonne": "t", "tonnes": "t", "tons": "t", "gram": "g", "grams": "g", "kilogram": "kg", "kilograms": "kg", "kilo": "kg", "kgs": "kg", "gr": "g",
	"newton": "N", "newtons": "N", "kilonewton": "kN", "kp": "kgf", "kilopond": "kgf", "hertz": "Hz", "cps": "Hz",
	"pascal": "Pa", "joule": "J", "joules": "J", "watt": "W", "watts": "W",
	"percent": "%", "pct": "%", "bytes": "B", "byte": "B", "KB": "kB", "Mb": "MB", "Gb": "GB",
	"rpm": "1/min", "fps": "ft/s", "kph": "km/h", "kmh": "km/h", "kmph": "km/h", "kt": "km/h", "plf": "lbf/ft", "klf": "kip/ft", "pli": "lbf/in", "psf": "lbf/ft^2", "pcf": "lb/ft^3", "ppf": "lb/ft",
	"Nm": "N*m", "kNm": "kN*m", "MNm": "MN*m", "Nmm": "N*mm", "Ns": "N*s", "kNs": "kN*s", "Ws": "W*s", "kgm": "kg*m", "lbft": "lbf*ft", "ftlb": "lbf*ft", "lbin": "lbf*in", "mK": "m*K",
}

// unknown records that a word is no unit and, where it can, what was meant.
// The returned atom keeps the reading going.
func (p *parser) unknown(word string, start int) atom {
	if p.bad == nil {
		p.bad = p.fail(start, start+len(word), "no unit is called %s", shorten(word))
	}
	meant := Meant(word)
	if meant == "" {
		p.fixes = append(p.fixes, fix{start: -1})
		return atom{num: 1, den: 1}
	}
	p.fixes = append(p.fixes, fix{start, start + len(word), meant})
	a, ok := find(meant)
	if !ok {
		return atom{num: 1, den: 1}
	}
	return a
}

// shorten keeps a message readable whatever was typed.
func shorten(word string) string {
	r := []rune(word)
	if len(r) > 24 {
		return string(r[:24]) + "…"
	}
	return word
}

// mended is the whole unit with every fix in it, or "" where one part stays a riddle.
func (p *parser) mended() string {
	out := p.text
	for i := len(p.fixes) - 1; i >= 0; i-- {
		f := p.fixes[i]
		if f.start < 0 {
			return ""
		}
		out = out[:f.start] + f.with + out[f.end:]
	}
	if _, err := Parse(out); err != nil {
		return ""
	}
	return out
}

// Meant is the unit that was probably meant by one unknown word, or "".
func Meant(word string) string {
	if m, ok := usual[word]; ok {
		return m
	}
	if m, ok := usual[strings.ToLower(word)]; ok {
		return m
	}
	if m := otherCase(word); m != "" {
		return m
	}
	// m2 and mm3 for powers, kNm2 for products.
	if n := len(word); n > 1 && (word[n-1] == '2' || word[n-1] == '3' || word[n-1] == '4') {
		base := word[:n-1]
		if _, ok := find(base); ok {
			return base + "^" + word[n-1:]
		}
		if m := Meant(base); m != "" && !strings.ContainsAny(m, "^/") {
			return m + "^" + word[n-1:]
		}
	}
	if m := run(word); m != "" {
		return m
	}
	return ""
}

// preferred settles words whose letters fit several units in other cases.
var preferred = map[string]string{
	"mpa": "MPa", "gpa": "GPa", "kpa": "kPa", "pa": "Pa", "mn": "MN", "kn": "kN", "gn": "GN", "n": "N", "hz": "Hz", "khz": "kHz", "mhz": "MHz",
	"kg": "kg", "mg": "mg", "mm": "mm", "cm": "cm", "km": "km", "m": "m", "ms": "ms", "s": "s", "g": "g", "j": "J", "kj": "kJ", "mj": "MJ", "k": "K",
	"kw": "kW", "mw": "MW", "w": "W", "ft": "ft", "in": "in", "lb": "lb", "lbf": "lbf", "kip": "kip", "ksi": "ksi", "psi": "psi", "mph": "mph", "kgf": "kgf",
	"rad": "rad", "deg": "deg", "degc": "degC", "degf": "degF", "min": "min", "h": "h", "t": "t", "yd": "yd", "mi": "mi", "b": "B", "kb": "kB", "mb": "MB", "gb": "GB", "mrad": "mrad", "us": "us", "um": "um",
}

// otherCase is the unit that is written with the same letters in another case.
func otherCase(word string) string {
	m, ok := preferred[strings.ToLower(word)]
	if !ok || m == word {
		return ""
	}
	return m
}

// run splits letters that run together, such as kNmm, into a product of two units.
func run(word string) string {
	for i, r := range word {
		if i == 0 || !unicode.IsLetter(r) {
			continue
		}
		a, okA := find(word[:i])
		b, okB := find(word[i:])
		if okA && okB && a.dim != b.dim && !a.dim.IsNumber() && !b.dim.IsNumber() {
			return word[:i] + "*" + word[i:]
		}
	}
	return ""
}
