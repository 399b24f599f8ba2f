package main

import (
	"bytes"
	"encoding/json"
	"fmt"
	"math"
	"os"
	"path/filepath"
	"strconv"
	"strings"
	"sync"
	"testing"

	"github.com/tautspan/tautspan/cmd/tautspan/internal/cli"
)

// publishedDir holds the values that are not of this program's making.
const publishedDir = "../../testdata/published"

// figure is one published number.
type figure struct {
	Value   float64 `json:"value"`
	Unit    string  `json:"unit"`
	Printed string  `json:"printed"`
	Class   string  `json:"tolerance_class"`
}

// published is one case: what goes in, what comes out, and who says so.
type published struct {
	ID       string            `json:"id"`
	Inputs   map[string]figure `json:"inputs"`
	Expected map[string]figure `json:"expected"`
	Class    string            `json:"tolerance_class"`
	Source   string            `json:"source"`
	Check    string            `json:"source_check"`
}

var publishedCases = sync.OnceValues(func() (map[string]published, error) {
	text, err := os.ReadFile(filepath.Join(publishedDir, "values.json"))
	if err != nil {
		return nil, err
	}
	var list []published
	if err := json.Unmarshal(text, &list); err != nil {
		return nil, err
	}
	out := map[string]published{}
	for _, c := range list {
		out[c.ID] = c
	}
	return out, nil
})

// caseOf is a published case by its id.
func caseOf(t *testing.T, id string) published {
	t.Helper()
	all, err := publishedCases()
	if err != nil {
		t.Fatal(err)
	}
	c, ok := all[id]
	if !ok {
		t.Fatalf("there is no published case %s", id)
	}
	return c
}

// in is an input of the case.
func (c published) in(name string) float64 {
	f, ok := c.Inputs[name]
	if !ok {
		panic("case " + c.ID + " has no input " + name)
	}
	return f.Value
}

// want is an expected value of the case.
func (c published) want(name string) float64 {
	f, ok := c.Expected[name]
	if !ok {
		panic("case " + c.ID + " expects no " + name)
	}
	return f.Value
}

// classes are the relative tolerances of the tolerance classes: closed forms,
// roots of frequency equations, series and optima. A closed form that is zero is
// met within absoluteShare of the case's scale.
var classes = map[string]float64{"T1": 1e-9, "T2": 1e-8, "T3": 1e-6}

const absoluteShare = 1e-12

// slack is the tolerance of an expected value by its class; scale is the size of
// the case's values, for one that is zero.
func (c published) slack(t *testing.T, name string, scale float64) float64 {
	t.Helper()
	class := c.Class
	if f := c.Expected[name]; f.Class != "" {
		class = f.Class
	}
	share, ok := classes[class]
	if !ok {
		t.Fatalf("%s %s: class %q has no tolerance", c.ID, name, class)
	}
	if v := c.want(name); v != 0 {
		return share * math.Abs(v)
	}
	return absoluteShare * scale
}

// exact holds an answer of an exact method against an expected value.
func (c published) exact(t *testing.T, name string, got float64) {
	t.Helper()
	c.exactOf(t, name, got, 1)
}

// exactOf is exact for a case whose values are of size scale.
func (c published) exactOf(t *testing.T, name string, got, scale float64) {
	t.Helper()
	if want := c.want(name); !(math.Abs(got-want) <= c.slack(t, name, scale)) {
		t.Errorf("%s %s: %.15g, published %.15g (%s), off by %.2g of it", c.ID, name, got, want, c.Class, got/want-1)
	}
}

// q writes a number with its unit so that it reads back to the same number.
func q(v float64, unit string) string {
	return strconv.FormatFloat(v, 'g', -1, 64) + " " + unit
}

// taut is a scenario with its first two statements.
func taut(parts ...string) string {
	return "tautspan 1\ntitle \"published value\"\n" + strings.Join(parts, "\n") + "\n"
}

// stockOf is a stock of a mass per length, perhaps with a viscous loss.
func stockOf(name string, mass, loss float64) string {
	s := "stock " + name + " {\n    mass " + q(mass, "kg/m") + "\n"
	if loss != 0 {
		s += "    loss viscous " + q(loss, "N*s/m^2") + "\n"
	}
	return s + "}"
}

// lineOf is a line with its elements in walking order.
func lineOf(name string, tension float64, elements ...string) string {
	return "line " + name + " {\n    tension " + q(tension, "N") + "\n    " + strings.Join(elements, "\n    ") + "\n}"
}

// plain is a line of one segment s of stock w.
func plain(tension, length float64, first, last string) string {
	return lineOf("l", tension, "support a "+first, "segment s w "+q(length, "m"), "support b "+last)
}

// runFor is a run statement.
func runFor(duration, every, agree float64) string {
	return "run {\n    for " + q(duration, "s") + "\n    every " + q(every, "s") + "\n    agree " + q(100*agree, "%") + "\n}"
}

// command runs the program in this process on a scenario, decodes its JSON
// document and returns the exit code and the folder in which the scenario lies.
func command(t *testing.T, doc any, text, name string, flags ...string) (code int, dir string) {
	t.Helper()
	dir = t.TempDir()
	file := filepath.Join(dir, "case.taut")
	if err := os.WriteFile(file, []byte(text), 0o600); err != nil {
		t.Fatal(err)
	}
	var out, errs bytes.Buffer
	args := append(append([]string{name, "--json"}, flags...), file)
	code = cli.Main(args, cli.Streams{In: strings.NewReader(""), Out: &out, Err: &errs})
	if code > 1 {
		t.Fatalf("%s ended with %d\n%s\n%s\n%s", strings.Join(args[:len(args)-1], " "), code, out.String(), errs.String(), text)
	}
	if err := json.Unmarshal(out.Bytes(), doc); err != nil {
		t.Fatalf("%s: %v\n%s", name, err, out.String())
	}
	return code, dir
}

// decode runs the program in this process and decodes its JSON document.
func decode(t *testing.T, doc any, args ...string) {
	t.Helper()
	var out, errs bytes.Buffer
	if code := cli.Main(args, cli.Streams{In: strings.NewReader(""), Out: &out, Err: &errs}); code > 1 {
		t.Fatalf("%s ended with %d\n%s", strings.Join(args, " "), code, errs.String())
	}
	if err := json.Unmarshal(out.Bytes(), doc); err != nil {
		t.Fatal(err)
	}
}

// number is a value with its numerical bound.
type number struct {
	Value     *float64 `json:"value"`
	Numerical *float64 `json:"numerical"`
}

// collected is what collect asked for.
type collected []struct {
	Text  string `json:"text"`
	Value number `json:"value"`
}

// exactly is a collected value, which an exact method must have given.
func (c collected) exactly(t *testing.T, i int) float64 {
	t.Helper()
	if i >= len(c) || c[i].Value.Value == nil || c[i].Value.Numerical == nil || *c[i].Value.Numerical != 0 {
		t.Fatalf("collect %d is no exact value in %+v", i, c)
	}
	return *c[i].Value.Value
}

// modesDoc is what these tests read of a list of natural vibrations.
type modesDoc struct {
	Modes []struct {
		Line      *string `json:"line"`
		Number    int     `json:"number"`
		Frequency float64 `json:"frequency_hz"`
		Damped    float64 `json:"damped_frequency_hz"`
		Ratio     float64 `json:"damping_ratio"`
		Decay     float64 `json:"decay_per_s"`
		Shape     []struct {
			X         []float64 `json:"x_m"`
			Amplitude []float64 `json:"amplitude"`
			Phase     []float64 `json:"phase_rad"`
		} `json:"shape"`
	} `json:"modes"`
	Overdamped []struct {
		Decay float64 `json:"decay_per_s"`
	} `json:"overdamped"`
	Collected collected `json:"collected"`
}

func modesOf(t *testing.T, count int, text string) modesDoc {
	t.Helper()
	var doc modesDoc
	command(t, &doc, text, "modes", "--count", strconv.Itoa(count))
	if len(doc.Modes) < count {
		t.Fatalf("%d modes, asked for %d", len(doc.Modes), count)
	}
	return doc
}

// checkDoc is what these tests read of a check.
type checkDoc struct {
	Lines []struct {
		Segments []struct {
			Mass      float64 `json:"mass_kg_per_m"`
			Tension   float64 `json:"tension_n"`
			WaveSpeed float64 `json:"wave_speed_m_per_s"`
			Impedance float64 `json:"impedance_kg_per_s"`
		} `json:"segments"`
	} `json:"lines"`
	Plucks []struct {
		Force float64 `json:"force_n"`
		Drawn float64 `json:"drawn_m"`
	} `json:"plucks"`
}

// arrivalsDoc is the pulse ledger.
type arrivalsDoc struct {
	Arrivals []arrivalRow `json:"arrivals"`
}

type arrivalRow struct {
	Watch     string  `json:"watch"`
	Number    int     `json:"number"`
	Time      float64 `json:"time_s"`
	Quantity  string  `json:"quantity"`
	Amplitude float64 `json:"amplitude"` // with its sign
	Sign      int     `json:"sign"`
	Smeared   bool    `json:"smeared"`
}

// at lists the fronts that reach a watch, in order.
func (d arrivalsDoc) at(t *testing.T, watch string, least int) []arrivalRow {
	t.Helper()
	var out []arrivalRow
	for _, a := range d.Arrivals {
		if a.Watch == watch {
			out = append(out, a)
		}
	}
	if len(out) < least {
		t.Fatalf("%d fronts reach %s, expected at least %d", len(out), watch, least)
	}
	return out
}

// Every case in the file has its source, and every expected value a class that
// these tests know or the remark that it belongs to an approximate formula.
func TestPublishedFileIsWhole(t *testing.T) {
	all, err := publishedCases()
	if err != nil {
		t.Fatal(err)
	}
	if len(all) < 50 {
		t.Errorf("only %d cases", len(all))
	}
	for id, c := range all {
		if c.Source == "" || c.Check == "" || len(c.Expected) == 0 {
			t.Errorf("%s lacks its source or its values", id)
		}
		for name, f := range c.Expected {
			class := c.Class
			if f.Class != "" {
				class = f.Class
			}
			if _, ok := classes[class]; !ok && class != "T5" {
				t.Errorf("%s %s has class %q", id, name, class)
			}
		}
	}
	if !strings.Contains(all["C02-01"].Check, "cited from memory") {
		t.Error("the remark on how a source was seen got lost")
	}
}

// The comparison itself must be able to fail.
func TestPublishedComparisonCanFail(t *testing.T) {
	c := caseOf(t, "C01-01")
	if s := c.slack(t, "f1", 1); !(s < 2e-7) || s <= 0 {
		t.Errorf("tolerance of f1 is %g Hz", s)
	}
	var doc modesDoc
	command(t, &doc, taut(stockOf("w", c.in("m")*1.001, 0), plain(c.in("T"), c.in("L"), "fixed", "fixed")), "modes")
	if got := doc.Modes[0].Frequency; math.Abs(got-c.want("f1")) < 1e3*c.slack(t, "f1", 1) {
		t.Errorf("a line a thousandth too heavy passes with %g Hz", got)
	}
	if s := fmt.Sprint(q(0.00114, "kg/m")); s != "0.00114 kg/m" {
		t.Errorf("numbers are written as %q", s)
	}
}
