package cli

import (
	"bytes"
	"context"
	"encoding/json"
	"errors"
	"strings"
	"testing"

	"github.com/tautspan/tautspan/cmd/tautspan/internal/app"
)

// runStock runs the command and returns what it prints and its exit code.
func runStock(t *testing.T, flags common, words ...string) (out, errs string, code int) {
	t.Helper()
	var o, e bytes.Buffer
	s := &session{ctx: context.Background(), Streams: Streams{Out: &o, Err: &e}, common: flags, width: 100, app: app.New()}
	err := (&stockCmd{Words: words}).Run(s)
	var exit exitError
	switch {
	case errors.As(err, &exit):
		code = int(exit)
	case err != nil:
		t.Fatal(err)
	}
	return o.String(), e.String(), code
}

func TestStockCommand(t *testing.T) {
	all, _, code := runStock(t, common{Units: "si"})
	for _, want := range []string{"conductor\n", "acsr_drake", "locked coil\n", "music_1_00", "~ remembered"} {
		if code != exitDone || !strings.Contains(all, want) {
			t.Errorf("the list lacks %q (exit %d)", want, code)
		}
	}
	for _, l := range strings.Split(all, "\n") {
		if len([]rune(l)) > 100 {
			t.Errorf("too wide: %q", l)
		}
	}
	one, _, _ := runStock(t, common{Units: "si"}, "ehs", "1/4")
	for _, want := range []string{"ehs_1_4: ", "0.1801 kg/m  read:", "remembered:", "worked out:", "ASTM A475", "wires that slide"} {
		if !strings.Contains(one, want) {
			t.Errorf("%q is missing in\n%s", want, one)
		}
	}
	if us, _, _ := runStock(t, common{Units: "us"}, "ehs_1_4"); !strings.Contains(us, "0.25 in") {
		t.Errorf("in feet and pounds:\n%s", us)
	}
	_, errs, code := runStock(t, common{Units: "si"}, "flc_41")
	if code != exitInput || !strings.Contains(errs, "flc_40") || !strings.Contains(errs, "[unknown-name]") {
		t.Errorf("exit %d: %s", code, errs)
	}
}

func TestStockDocument(t *testing.T) {
	out, _, _ := runStock(t, common{Units: "si", JSON: true}, "flc")
	var doc struct {
		Format  int
		Command string
		Errors  []any
		Stock   []map[string]any
	}
	if err := json.Unmarshal([]byte(out), &doc); err != nil {
		t.Fatal(err)
	}
	if doc.Format != 1 || doc.Command != "stock" || doc.Errors == nil || len(doc.Stock) != 4 {
		t.Fatalf("%+v", doc)
	}
	e := doc.Stock[0]
	mass, ok := e["mass_kg_per_m"].(map[string]any)
	if !ok || mass["value"] != 8.934 || mass["origin"] != "computed" || mass["source"] == "" {
		t.Errorf("mass: %v", e["mass_kg_per_m"])
	}
	// How many wires a locked coil rope has is not known: null, not left out.
	for _, key := range []string{"wires", "bending_low_n_m2"} {
		if v, there := e[key]; !there || v != nil {
			t.Errorf("%s is %v", key, v)
		}
	}
	out, _, code := runStock(t, common{Units: "si", JSON: true}, "nothing of the kind")
	if err := json.Unmarshal([]byte(out), &doc); err != nil || code != exitInput || len(doc.Errors) != 1 || len(doc.Stock) != 0 {
		t.Errorf("exit %d: %s", code, out)
	}
}
