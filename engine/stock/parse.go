package stock

import (
	"fmt"
	"math"
	"strconv"
	"strings"
)

// units of the list, each a factor to SI as a fraction of exact numbers.
var units = map[string][2]float64{
	"mm": {1, 1e3}, "mm2": {1, 1e6}, "kg/m": {1, 1}, "GPa": {1e9, 1}, "kN": {1e3, 1},
}

// unitOf is the unit in which the list says a property.
var unitOf = map[string]string{"diameter": "mm", "area": "mm2", "mass": "kg/m", "young": "GPa", "strength": "kN"}

// parse reads a list; its form stands at its head.
func parse(text string) ([]Entry, error) {
	p := parser{sources: map[string]string{}, names: map[string]bool{}}
	for n, line := range strings.Split(text, "\n") {
		if err := p.line(line); err != nil {
			return nil, fmt.Errorf("line %d: %w", n+1, err)
		}
	}
	if err := p.end(); err != nil {
		return nil, err
	}
	return p.list, nil
}

type parser struct {
	sources map[string]string
	names   map[string]bool
	list    []Entry
	said    map[string]bool // by the last entry
}

func (p *parser) line(line string) error {
	word, rest, _ := strings.Cut(strings.TrimSpace(line), " ")
	rest = strings.TrimSpace(rest)
	switch {
	case word == "" || strings.HasPrefix(word, "#"):
		return nil
	case word == "source":
		key, words, _ := strings.Cut(rest, " ")
		if words = strings.TrimSpace(words); words == "" || p.sources[key] != "" {
			return fmt.Errorf("source %q says nothing, or is said twice", key)
		}
		p.sources[key] = words
		return nil
	case word == "stock":
		if err := p.end(); err != nil {
			return err
		}
		if rest == "" || p.names[rest] {
			return fmt.Errorf("stock %q has no name, or is said twice", rest)
		}
		p.names[rest] = true
		p.list = append(p.list, Entry{Name: rest})
		p.said = map[string]bool{}
		return nil
	case len(p.list) == 0:
		return fmt.Errorf("%s stands before the first stock", word)
	case rest == "" || p.said[word]:
		return fmt.Errorf("%s says nothing, or is said twice", word)
	}
	p.said[word] = true
	return p.entry(&p.list[len(p.list)-1], word, rest)
}

// end checks that the last entry is whole.
func (p *parser) end() error {
	if len(p.list) == 0 {
		return nil
	}
	for _, w := range []string{"title", "family", "diameter", "area", "mass", "young", "strength"} {
		if !p.said[w] {
			return fmt.Errorf("stock %s does not say its %s", p.list[len(p.list)-1].Name, w)
		}
	}
	return nil
}

func (p *parser) entry(e *Entry, word, rest string) error {
	var err error
	switch word {
	case "title":
		e.Title = rest
	case "family":
		e.Family = rest
	case "note":
		e.Note = rest
	case "wires":
		if e.Wires, err = strconv.Atoi(rest); err == nil && e.Wires < 1 {
			err = fmt.Errorf("%d wires", e.Wires)
		}
	case "usual":
		f := strings.SplitN(rest, " ", 3)
		if len(f) != 3 {
			return fmt.Errorf("usual wants an origin, a source and words")
		}
		e.Usual.Text = f[2]
		e.Usual.Origin, e.Usual.Source, err = p.origin(f[0], f[1])
	case "diameter":
		err = p.value(&e.Diameter, word, strings.Fields(rest), 4)
	case "area":
		err = p.value(&e.Area, word, strings.Fields(rest), 4)
	case "mass":
		err = p.value(&e.Mass, word, strings.Fields(rest), 4)
	case "strength":
		err = p.value(&e.Strength, word, strings.Fields(rest), 4)
	case "young":
		f := strings.Fields(rest)
		if err = p.value(&e.Young, word, f, 5); err == nil {
			err = e.youngRange(f[4])
		}
	default:
		err = fmt.Errorf("%s is no property of a stock", word)
	}
	return err
}

// value reads NUMBER UNIT ORIGIN SOURCE.
func (p *parser) value(v *Value, word string, f []string, want int) error {
	if len(f) != want {
		return fmt.Errorf("%s wants %d words", word, want)
	}
	if f[1] != unitOf[word] {
		return fmt.Errorf("%s stands in %s", word, unitOf[word])
	}
	x, err := number(f[0])
	if err != nil {
		return err
	}
	u := units[f[1]]
	v.SI = x * u[0] / u[1]
	v.Origin, v.Source, err = p.origin(f[2], f[3])
	return err
}

func (p *parser) origin(word, source string) (Origin, string, error) {
	words, ok := p.sources[source]
	if !ok {
		return 0, "", fmt.Errorf("no source is called %s", source)
	}
	for _, o := range []Origin{Seen, Computed, Memory} {
		if o.String() == word {
			return o, words, nil
		}
	}
	return 0, "", fmt.Errorf("%s is no origin", word)
}

// youngRange reads LOW..HIGH in GPa, which holds the value.
func (e *Entry) youngRange(text string) error {
	low, high, ok := strings.Cut(text, "..")
	lo, err := number(low)
	hi, err2 := number(high)
	if !ok || err != nil || err2 != nil {
		return fmt.Errorf("%q is no range of moduli", text)
	}
	u := units["GPa"]
	e.YoungLow, e.YoungHigh = lo*u[0]/u[1], hi*u[0]/u[1]
	if e.YoungLow > e.Young.SI || e.YoungHigh < e.Young.SI {
		return fmt.Errorf("the range %s does not hold the modulus", text)
	}
	return nil
}

func number(text string) (float64, error) {
	x, err := strconv.ParseFloat(text, 64)
	if err != nil || !(x > 0) || math.IsInf(x, 0) {
		return 0, fmt.Errorf("%q is no positive number", text)
	}
	return x, nil
}
