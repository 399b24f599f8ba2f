package main

import (
	"encoding/json"
	"math"
	"os"
	"path/filepath"
	"testing"
)

// The shipped surveys were made by calculation and noise from values that are
// known: the intervals hold them, and the verdicts are those that the stories
// of their making tell.
func TestShippedSurveys(t *testing.T) {
	for _, c := range []struct {
		name     string
		truth    map[string]float64
		verdicts []string
		stranger []float64 // Hz
		missing  map[string]int
	}{
		{
			"hanger-survey", map[string]float64{"pull1": 302e3, "pull2": 331e3, "pull3": 309e3, "stiff": 27.5e3, "turn": 0.9e6},
			[]string{"undecided", "undecided", "met"}, []float64{8.10}, map[string]int{"H3": 3},
		},
		{"guy-timing", map[string]float64{"pullA": 12.01e3, "pullB": 10.25e3, "pullC": 11.12e3}, []string{"met", "not met", "undecided"}, nil, nil},
		{"conductor-sag", map[string]float64{"pull": 28.72e3}, []string{"undecided"}, nil, nil},
	} {
		doc := printed(t, 1, "fit", "--json", filepath.Join("..", "..", "scenarios", c.name+".taut"))
		found := map[string]map[string]any{}
		for _, u := range doc["unknowns"].([]any) {
			row := u.(map[string]any)
			found[row["name"].(string)] = row
		}
		for name, truth := range c.truth {
			row := found[name]
			if row == nil {
				t.Errorf("%s: nothing found of %s", c.name, name)
				continue
			}
			if low, high := numberOf(t, row["low95"]), numberOf(t, row["high95"]); !(low <= truth && truth <= high) {
				t.Errorf("%s: %s lies between %g and %g, and is %g", c.name, name, low, high, truth)
			}
		}
		for i, r := range doc["requirements"].([]any) {
			if v := r.(map[string]any)["verdict"]; v != c.verdicts[i] {
				t.Errorf("%s: requirement %d is %v, want %s", c.name, i+1, v, c.verdicts[i])
			}
		}
		var strangers []float64
		for _, r := range doc["residuals"].([]any) {
			if row := r.(map[string]any); row["stranger"].(bool) {
				strangers = append(strangers, numberOf(t, row["observed"]))
			}
		}
		if len(strangers) != len(c.stranger) || len(strangers) > 0 && strangers[0] != c.stranger[0] {
			t.Errorf("%s: strangers %v, want %v", c.name, strangers, c.stranger)
		}
		missing := doc["missing_modes"].([]any)
		if len(missing) != len(c.missing) {
			t.Errorf("%s: missing %v", c.name, missing)
		}
		for _, m := range missing {
			row := m.(map[string]any)
			if n, ok := c.missing[row["line"].(string)]; !ok || float64(n) != numberOf(t, row["mode"]) {
				t.Errorf("%s: missing %v", c.name, row)
			}
		}
		if alternatives := doc["alternatives"].([]any); len(alternatives) > 0 {
			t.Errorf("%s: %d alternatives", c.name, len(alternatives))
		}
	}
}

// A plan for the first two vibrations of a string puts the sensor where both
// show alike, a third of the way, with sin(pi/3) of their largest; an eighth of a
// period is a sample, and a pulse returns in 2 L/c.
func TestPlanOfAString(t *testing.T) {
	file := filepath.Join(t.TempDir(), "string.taut")
	text := "tautspan 1\nstock w {\n mass 5 kg/m\n}\nline l {\n tension 50 kN\n support a fixed\n segment s w 100 m\n support b fixed\n}\n"
	if err := os.WriteFile(file, []byte(text), 0o600); err != nil {
		t.Fatal(err)
	}
	doc := printed(t, 0, "plan", "--json", "--modes", "2", "--accuracy", "0.5 %", file)
	line := doc["lines"].([]any)[0].(map[string]any)
	for _, s := range line["sensors"].([]any) {
		row := s.(map[string]any)
		if row["reach"] != "anywhere" {
			continue
		}
		x := numberOf(t, row["x_m"])
		closeTo(t, "sensor", math.Min(x, 100-x), 100.0/3, 0.15) // places lie 0.25 m apart
		closeTo(t, "least", numberOf(t, row["least"]), math.Sin(math.Pi/3), 5e-3)
	}
	closeTo(t, "record", numberOf(t, line["record_s"]), 1/(0.005*0.5), 1e-6)
	closeTo(t, "sampling", numberOf(t, line["sampling_hz"]), 8*1.0, 1e-6)
	closeTo(t, "return", numberOf(t, line["return_s"]), 2, 1e-9)
}

// numberOf is a number of a decoded document.
func numberOf(t *testing.T, v any) float64 {
	t.Helper()
	n, ok := v.(json.Number)
	if !ok {
		t.Fatalf("%v is no number", v)
	}
	f, err := n.Float64()
	if err != nil {
		t.Fatal(err)
	}
	return f
}
