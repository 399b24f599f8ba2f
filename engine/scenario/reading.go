package scenario

import (
	"fmt"
	"slices"

	"github.com/tautspan/tautspan/engine/formula"
)

// ReadingKind says what a reading tells.
type ReadingKind uint8

// The kinds of the language.
const (
	FrequencyReading ReadingKind = iota // of mode Order, or of one that is not known (Order 0), Hz
	PeaksReading                        // frequencies without order numbers, Hz, rising
	ReturnsReading                      // time of Order round trips of a pulse, s
	SwingsReading                       // time of Order swings of the first mode, s
	DecayReading                        // damping ratio of mode Order
)

var readingWords = [...]string{"frequency", "peaks", "returns", "swings", "decay"}
var readingUnits = [...]string{"Hz", "Hz", "s", "s", "1"}

// String is the word of the language.
func (k ReadingKind) String() string { return readingWords[k] }

// Unit is the SI unit of what is read.
func (k ReadingKind) Unit() string { return readingUnits[k] }

// ReadingOf is a block of site readings of one line.
type ReadingOf[V any] struct {
	Name  string
	Line  int
	About []Pair
	Items []ReadingItemOf[V]
}

// ReadingItemOf is one statement of a block: one value, or the values of peaks.
type ReadingItemOf[V any] struct {
	Kind   ReadingKind
	Order  int    // 0: not known
	Source string // as written
	Values []V    // SI
	U      []V    // standard uncertainty of each value, same unit
	// AsTaken is the doubt of the last value in words, and that of the shared part,
	// for check to repeat.
	AsTaken, SharedAsTaken string
	// Assumed says in words what stands for a doubt that was not said; "" where
	// one was.
	Assumed string
	// Shared is the standard uncertainty that all readings of this kind in the
	// block have in common, so that repeats do not average it away; 0: none.
	Shared V
	// Sideways is the plane that was read, and Sag whether the sag term of the
	// line counts in it.
	Sideways bool
	Sag      bool
	// Temperature in K at the time of the reading; with Warm only.
	Warm        bool
	Temperature V
	HasPlace    bool
	Place       PlaceOf[V]
}

// Reading is a bound block.
type Reading = ReadingOf[float64]

// ReadingItem is a bound statement of a block.
type ReadingItem = ReadingItemOf[float64]

// Seek makes a let unknown within a range.
type Seek struct {
	Let      int
	From, To formula.Program // in the let's SI unit
}

// FitUse limits what a fit uses: a kind of reading, for modes From .. To where
// From is not 0.
type FitUse struct {
	Kinds    []ReadingKind
	History  bool // the record itself, step by step
	From, To int
}

// Fit says what is fitted to what. Without any uses everything is used.
type Fit struct {
	Readings []int // into Template.Readings
	Records  []int // into Template.Records
	Uses     []FitUse
}

// RecordChannel is one channel of a record and what it saw.
type RecordChannel struct {
	Column   string  // by name; "" where it is by number
	Number   int     // from 1; 0 where it is by name
	Factor   float64 // SI units per unit of the column; 0: uncalibrated
	Unit     string  // as written; "" where uncalibrated
	Watch    int
	Quantity Quantity
}

// Record is a file with channels against time. The file is read by others; a
// template only says which it is.
type Record struct {
	Name       string
	Path       string // as written, relative to the file that says it
	From       string // slash-separated path of the file that says it
	Time       string // column by name; "" by number, or none
	TimeNumber int    // from 1; 0: by name, or none (a WAV file)
	TimeFactor float64
	Channels   []RecordChannel
	About      []Pair
}

// Takes tells whether a fit takes a kind of reading of a mode (0: not known).
func (f *Fit) Takes(kind ReadingKind, mode int) bool {
	if len(f.Uses) == 0 {
		return true
	}
	for _, u := range f.Uses {
		if !slices.Contains(u.Kinds, kind) {
			continue
		}
		if u.From == 0 || mode == 0 || mode >= u.From && mode <= u.To {
			return true
		}
	}
	return false
}

// Orders are the modes to which the uses of a kind are limited; 0, 0: none.
func (f *Fit) Orders(kind ReadingKind) (from, to int) {
	for i, u := range f.Uses {
		if !slices.Contains(u.Kinds, kind) {
			continue
		}
		if u.From == 0 {
			return 0, 0
		}
		if i == 0 || from == 0 {
			from, to = u.From, u.To
		}
		from, to = min(from, u.From), max(to, u.To)
	}
	return from, to
}

// BindReadings gives the readings in numbers for values of the lets and the
// network that they make. A *PathError names the first number that cannot stand.
func (t *Template) BindReadings(net *Network) ([]Reading, error) {
	b := &binder{values: net.Values}
	out := make([]Reading, len(t.Readings))
	for i := range t.Readings {
		r := &t.Readings[i]
		out[i] = Reading{Name: r.Name, Line: r.Line, About: r.About}
		for k := range r.Items {
			it := &r.Items[k]
			path := fmt.Sprintf("reading.%s.%d", r.Name, k)
			item := ReadingItem{
				Kind: it.Kind, Order: it.Order, Source: it.Source, AsTaken: it.AsTaken, SharedAsTaken: it.SharedAsTaken, Assumed: it.Assumed, Shared: b.nonneg(it.Shared, path),
				Sideways: it.Sideways, Sag: it.Sag, Warm: it.Warm, Temperature: b.nonneg(it.Temperature, path), HasPlace: it.HasPlace,
			}
			for n, v := range it.Values {
				item.Values = append(item.Values, b.pos(v, path))
				item.U = append(item.U, b.pos(it.U[n], path))
			}
			if it.HasPlace {
				item.Place = b.place(net, it.Place, path)
			}
			out[i].Items = append(out[i].Items, item)
		}
	}
	if b.err != nil {
		return nil, b.err
	}
	return out, nil
}
