package app

import (
	"context"
	"encoding/json"
	"math"
	"strings"
	"testing"
)

func respondTo(t *testing.T, text string, want RespondWant) (*RespondDoc, Status) {
	t.Helper()
	doc, status, err := New().Respond(context.Background(), Input{File: "-", Stdin: strings.NewReader(text)}, want)
	if err != nil {
		t.Fatal(err)
	}
	return doc, status
}

func hz(f float64) *float64 { return &f }

const heldLine = `tautspan 1
stock s {
    mass 0.8 kg/m
}
line l {
    tension 5000 N
    support a fixed
    segment z s 10 m
    support b fixed
}
excite p push at z 3 m with sine(1 N, 1 Hz)
excite k pluck at z 2 m by 1 mm
watch q at z 6 m displacement, velocity
`

// Receptance of a held string driven at 3 m and watched at 6 m, 3.5 Hz.
// Source: Kinsler et al., Fundamentals of Acoustics (2000), ch. 2 (from memory).
func TestRespondAtOneFrequency(t *testing.T) {
	doc, status := respondTo(t, heldLine, RespondWant{From: hz(3.5), To: hz(3.5), Points: 201})
	if status != Done || len(doc.Frequency) != 1 || len(doc.Responses) != 2 {
		t.Fatalf("status %d, %d frequencies, %d responses, errors %v", status, len(doc.Frequency), len(doc.Responses), doc.Errors)
	}
	if a := doc.Responses[0].Amplitude[0]; a == nil || math.Abs(*a-0.00135669219644434) > 1e-10*0.00136 {
		t.Errorf("amplitude %v", a)
	}
	if p := doc.Responses[0].Phase[0]; p == nil || math.Abs(*p) > 1e-10 { // rounding; 1e-16 seen
		t.Errorf("phase %v, want 0: without loss all moves in step", p)
	}
	if len(doc.Notes) != 1 || !strings.Contains(doc.Notes[0], "pluck") {
		t.Errorf("notes %v", doc.Notes)
	}
}

// Every array has one value a frequency; what does not exist is null: shares at
// 0 Hz, where no wave travels, and the amplitude at a resonance without loss.
func TestRespondDocument(t *testing.T) {
	text := strings.Replace(heldLine, "    support b", "    joint c mass 1 kg\n    segment y s 4 m\n    support b", 1)
	doc, _ := respondTo(t, text, RespondWant{From: hz(0), To: hz(10), Points: 11})
	raw, err := json.Marshal(doc)
	if err != nil {
		t.Fatal(err)
	}
	var got struct {
		Frequency []float64        `json:"frequency_hz"`
		Responses []map[string]any `json:"responses"`
		Joints    []map[string]any `json:"joints"`
		Ends      []map[string]any `json:"ends"`
		Collected []any            `json:"collected"`
		Errors    []any            `json:"errors"`
	}
	if err := json.Unmarshal(raw, &got); err != nil {
		t.Fatal(err)
	}
	if len(got.Frequency) != 11 || len(got.Joints) != 2 || len(got.Ends) != 2 || got.Collected == nil || len(got.Errors) != 0 {
		t.Fatalf("%s", raw)
	}
	if got.Joints[0]["from"] != "before" || got.Joints[1]["from"] != "after" || got.Joints[0]["name"] != "c" {
		t.Errorf("joints %v", got.Joints)
	}
	if got.Ends[0]["support"] != "a" || got.Ends[1]["support"] != "b" {
		t.Errorf("ends %v", got.Ends)
	}
	curves := func(row map[string]any, firstNull bool, keys ...string) {
		for _, k := range keys {
			list, ok := row[k].([]any)
			if !ok || len(list) != 11 || (list[0] == nil) != firstNull || list[5] == nil {
				t.Errorf("%s of %v", k, row)
			}
		}
	}
	for _, j := range got.Joints {
		curves(j, true, "reflected", "reflected_phase_rad", "passed", "passed_phase_rad", "absorbed")
	}
	for _, e := range got.Ends {
		curves(e, true, "reflected", "taken")
	}
	for _, r := range got.Responses {
		curves(r, false, "amplitude", "phase_rad")
	}
}

// A string of 10 m with T/m = 1e4 m^2/s^2 resonates at 5 Hz.
func TestRespondAtUndampedResonance(t *testing.T) {
	text := strings.Replace(strings.Replace(heldLine, "0.8 kg/m", "1 kg/m", 1), "5000 N", "10000 N", 1)
	doc, status := respondTo(t, text, RespondWant{From: hz(5), To: hz(5), Points: 1})
	if status != Done || doc.Responses[0].Amplitude[0] != nil || doc.Responses[0].Phase[0] != nil {
		t.Errorf("status %d, %v", status, doc.Responses)
	}
}

func TestRespondDefaultsAndLimits(t *testing.T) {
	doc, status := respondTo(t, heldLine, RespondWant{Points: 201})
	// f_n = n 79.0569/20 Hz.
	f1 := math.Sqrt(5000/0.8) / 20
	if n := len(doc.Frequency); status != Done || n != 201 || math.Abs(doc.Frequency[0]-f1/5) > 1e-9 || math.Abs(doc.Frequency[200]-8*f1) > 1e-9 {
		t.Errorf("status %d, %d frequencies", status, n)
	}
	for _, want := range []RespondWant{{Points: 0}, {Points: 2_000_000}, {From: hz(3), To: hz(2), Points: 5}, {From: hz(-1), To: hz(2), Points: 5}} {
		if doc, status := respondTo(t, heldLine, want); status != BadInput || len(doc.Errors) == 0 {
			t.Errorf("%+v: status %d", want, status)
		}
	}
}

func TestRespondStops(t *testing.T) {
	ctx, stop := context.WithCancel(context.Background())
	stop()
	doc, status, err := New().Respond(ctx, Input{File: "-", Stdin: strings.NewReader(heldLine)}, RespondWant{Points: 201})
	if err != nil || status != Interrupted || doc == nil {
		t.Errorf("status %d, %v", status, err)
	}
}
