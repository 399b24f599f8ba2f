package main

import (
	"encoding/json"
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
