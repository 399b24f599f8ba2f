package stock

import (
	_ "embed" // the list is data
	"math"
	"strings"
	"sync"
)

//go:embed list.txt
var text string

// Origin says how a value was come by.
type Origin uint8

// The origins, the surest first.
const (
	Seen     Origin = iota // read in the source
	Computed               // worked out, from the shape or from remembered factors
	Memory                 // remembered; the source names where it stands
)

// String is the origin's word in the list.
func (o Origin) String() string {
	switch o {
	case Seen:
		return "seen"
	case Computed:
		return "computed"
	}
	return "memory"
}

// Value is a number with where it comes from.
type Value struct {
	SI     float64
	Origin Origin
	Source string // in words
}

// Usual is the tension that such a line usually has in service, in words; Text
// is empty where nothing is known.
type Usual struct {
	Text   string
	Origin Origin
	Source string
}

// Entry is one stock.
type Entry struct {
	Name   string // as the language says it: acsr_drake
	Title  string
	Family string
	Wires  int // how many wires about alike it is made of; 0 where not known

	Diameter Value // m, over all
	Area     Value // m^2, of the metal
	Mass     Value // kg/m
	Young    Value // Pa, of the whole cross-section
	Strength Value // N, the least breaking force

	YoungLow, YoungHigh float64 // Pa, the range in which it is found

	Usual Usual
	Note  string
}

// Axial is the axial stiffness EA, N.
func (e *Entry) Axial() float64 { return e.Young.SI * e.Area.SI }

// BendingBounds are the least and the most that the bending stiffness can
// reasonably be, N m^2, for the area A and n wires:
//
//	E A^2/(4 pi n)   wires that slide on one another,
//	E A^2/(4 pi)     a solid round bar of the same metal area.
//
// The first is the sum of E pi d^4/64 over wires all alike; for wires of
// different sizes the sum is larger (Cauchy's inequality), so that it stays a
// bound. low is 0 where the number of wires is not known.
func (e *Entry) BendingBounds() (low, high float64) {
	high = e.Young.SI * e.Area.SI * e.Area.SI / (4 * math.Pi)
	if e.Wires > 0 {
		low = high / float64(e.Wires)
	}
	return low, high
}

// parsed is the list, read once.
var parsed = sync.OnceValue(func() []Entry {
	list, err := parse(text)
	if err != nil {
		panic("stock: the embedded list: " + err.Error())
	}
	return list
})

// List is every entry in the order of the list, by family.
func List() []Entry { return append([]Entry(nil), parsed()...) }

// Find is the entry of a name.
func Find(name string) (Entry, bool) {
	for _, e := range parsed() {
		if e.Name == name {
			return e, true
		}
	}
	return Entry{}, false
}

// Search lists the entries that hold every word of a text in their name, title
// or family, capitals apart; an entry of exactly that name comes alone.
func Search(words string) []Entry {
	if e, ok := Find(strings.TrimSpace(words)); ok {
		return []Entry{e}
	}
	var out []Entry
	for _, e := range parsed() {
		all := strings.ToLower(e.Name + " " + e.Title + " " + e.Family)
		found := true
		for _, w := range strings.Fields(strings.ToLower(words)) {
			found = found && strings.Contains(all, w)
		}
		if found {
			out = append(out, e)
		}
	}
	return out
}
