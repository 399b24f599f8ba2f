package unit

import (
	"strconv"
	"strings"
)

// Dim is a dimension: the integer powers of the base quantities. Angles are
// numbers and have none; Unit remembers where a unit is one.
type Dim struct {
	Length, Mass, Time, Temperature, Memory int8
}

// dim is a dimension without temperature and memory.
func dim(length, mass, time int8) Dim { return Dim{Length: length, Mass: mass, Time: time} }

// maxPower bounds the powers of a dimension; beyond it products are refused.
const maxPower = 60

// Mul is the dimension of a product; ok is false where a power leaves the range.
func (d Dim) Mul(e Dim) (Dim, bool) { return d.combine(e, 1) }

// Div is the dimension of a quotient; ok is false where a power leaves the range.
func (d Dim) Div(e Dim) (Dim, bool) { return d.combine(e, -1) }

func (d Dim) combine(e Dim, sign int) (Dim, bool) {
	ok := true
	add := func(a, b int8) int8 {
		s := int(a) + sign*int(b)
		if s > maxPower || s < -maxPower {
			ok = false
			return 0
		}
		return int8(s)
	}
	out := Dim{add(d.Length, e.Length), add(d.Mass, e.Mass), add(d.Time, e.Time), add(d.Temperature, e.Temperature), add(d.Memory, e.Memory)}
	return out, ok
}

// Pow is the dimension raised to num/den; ok is false where the powers are not
// whole or leave the range.
func (d Dim) Pow(num, den int) (Dim, bool) {
	ok := den != 0
	raise := func(a int8) int8 {
		if !ok {
			return 0
		}
		p := int64(a) * int64(num)
		if p%int64(den) != 0 || p/int64(den) > maxPower || p/int64(den) < -maxPower {
			ok = false
			return 0
		}
		return int8(p / int64(den))
	}
	out := Dim{raise(d.Length), raise(d.Mass), raise(d.Time), raise(d.Temperature), raise(d.Memory)}
	if !ok {
		return Dim{}, false
	}
	return out, true
}

// IsNumber tells whether the dimension is that of a pure number.
func (d Dim) IsNumber() bool { return d == Dim{} }

// Kind is a quantity that has a name of its own: how people call it, its
// dimension and its SI unit.
type Kind struct {
	Word string // "force"; also the end of a diagnostic's code
	Name string // "a force"
	Dim  Dim
	SI   string // "N"
}

// Kinds of quantities. Where two share a dimension each has its own words.
var (
	Number         = Kind{"number", "a pure number", Dim{}, "1"}
	Angle          = Kind{"angle", "an angle", Dim{}, "rad"}
	Share          = Kind{"share", "a share such as 5 %", Dim{}, "1"}
	Length         = Kind{"length", "a length", dim(1, 0, 0), "m"}
	Area           = Kind{"area", "an area", dim(2, 0, 0), "m^2"}
	Mass           = Kind{"mass", "a mass", dim(0, 1, 0), "kg"}
	Time           = Kind{"time", "a time", dim(0, 0, 1), "s"}
	Temperature    = Kind{"temperature", "a temperature", Dim{Temperature: 1}, "K"}
	Memory         = Kind{"memory", "an amount of memory", Dim{Memory: 1}, "B"}
	Frequency      = Kind{"frequency", "a frequency", dim(0, 0, -1), "Hz"}
	Speed          = Kind{"speed", "a speed", dim(1, 0, -1), "m/s"}
	Acceleration   = Kind{"acceleration", "an acceleration", dim(1, 0, -2), "m/s^2"}
	Force          = Kind{"force", "a force", dim(1, 1, -2), "N"}
	Stress         = Kind{"stress", "a stress", dim(-1, 1, -2), "Pa"}
	Energy         = Kind{"energy", "an energy", dim(2, 1, -2), "J"}
	Moment         = Kind{"moment", "a moment", dim(2, 1, -2), "N*m"}
	Power          = Kind{"power", "a power", dim(2, 1, -3), "W"}
	MassPerLength  = Kind{"mass-per-length", "a mass per length", dim(-1, 1, 0), "kg/m"}
	Density        = Kind{"density", "a density", dim(-3, 1, 0), "kg/m^3"}
	ForcePerLength = Kind{"force-per-length", "a force per length", dim(0, 1, -2), "N/m"}
	Spring         = Kind{"spring", "a spring constant (force per length)", dim(0, 1, -2), "N/m"}
	Dashpot        = Kind{"dashpot", "a dashpot constant (force per velocity)", dim(0, 1, -1), "N*s/m"}
	Viscous        = Kind{"viscous", "a viscous coefficient (force per length and velocity)", dim(-1, 1, -1), "N*s/m^2"}
	Bending        = Kind{"bending", "a bending stiffness", dim(3, 1, -2), "N*m^2"}
	Rotary         = Kind{"rotary", "a rotary spring constant", dim(2, 1, -2), "N*m/rad"}
	Inertia        = Kind{"inertia", "a moment of inertia", dim(2, 1, 0), "kg*m^2"}
	Expansion      = Kind{"expansion", "an expansion coefficient", Dim{Temperature: -1}, "1/K"}
	Volume         = Kind{"volume", "a volume", dim(3, 0, 0), "m^3"}
)

// named lists the kinds in the order in which a bare dimension is called by them.
var named = [...]Kind{
	Number, Length, Area, Volume, Mass, Time, Temperature, Memory, Frequency, Speed, Acceleration, Force, Stress, Energy, Power,
	MassPerLength, Density, ForcePerLength, Dashpot, Viscous, Bending, Inertia, Expansion,
}

// Name is what people call a quantity of the dimension, with its article.
func (d Dim) Name() string {
	switch d {
	case Number.Dim:
		return "a number"
	case Dashpot.Dim:
		return "a force per velocity"
	case Viscous.Dim:
		return "a force per length and velocity"
	case Energy.Dim:
		return "a moment or an energy"
	}
	for _, k := range named {
		if k.Dim == d {
			return k.Name
		}
	}
	return "a quantity in " + d.SI()
}

// SI is the SI unit of the dimension as the language writes it: "N*s/m",
// "kg/m", and "1" for a pure number.
func (d Dim) SI() string {
	for _, k := range named {
		if k.Dim == d {
			return k.SI
		}
	}
	return d.base()
}

// base writes the dimension in base units with at most one stroke.
func (d Dim) base() string {
	bases := [...]struct {
		name  string
		power int8
	}{{"kg", d.Mass}, {"m", d.Length}, {"s", d.Time}, {"K", d.Temperature}, {"B", d.Memory}}
	var over, under []string
	for _, b := range bases {
		switch {
		case b.power > 0:
			over = append(over, raised(b.name, int(b.power)))
		case b.power < 0:
			under = append(under, raised(b.name, -int(b.power)))
		}
	}
	out := strings.Join(over, "*")
	if out == "" {
		out = "1"
	}
	switch len(under) {
	case 0:
		return out
	case 1:
		return out + "/" + under[0]
	}
	return out + "/(" + strings.Join(under, "*") + ")"
}

func raised(name string, power int) string {
	if power == 1 {
		return name
	}
	return name + "^" + strconv.Itoa(power)
}
