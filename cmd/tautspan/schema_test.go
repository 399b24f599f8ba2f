package main

import (
	"bytes"
	"encoding/json"
	"io"
	"os"
	"path/filepath"
	"strings"
	"testing"

	"github.com/santhosh-tekuri/jsonschema/v6"

	"github.com/tautspan/tautspan/cmd/tautspan/internal/cli"
)

// printed runs a command in this process and holds what it prints against the
// command's schema: one document, nothing else.
func printed(t *testing.T, want int, args ...string) map[string]any {
	t.Helper()
	var out, errs bytes.Buffer
	code := cli.Main(args, cli.Streams{In: strings.NewReader(""), Out: &out, Err: &errs})
	what := strings.Join(args, " ")
	if code != want {
		t.Errorf("%s: exit %d, expected %d\n%s", what, code, want, errs.String())
	}
	schema, err := jsonschema.NewCompiler().Compile(filepath.Join("testdata", "schema", args[0]+".json"))
	if err != nil {
		t.Fatal(err)
	}
	dec := json.NewDecoder(bytes.NewReader(out.Bytes()))
	dec.UseNumber()
	var doc map[string]any
	if err := dec.Decode(&doc); err != nil {
		t.Fatalf("%s prints no document: %v\n%s", what, err, out.String())
	}
	if _, err := dec.Token(); err != io.EOF {
		t.Errorf("%s prints more than one document", what)
	}
	plain, err := jsonschema.UnmarshalJSON(bytes.NewReader(out.Bytes()))
	if err != nil {
		t.Fatal(err)
	}
	if err := schema.Validate(plain); err != nil {
		t.Errorf("%s: %v", what, err)
	}
	list, _ := doc["errors"].([]any)
	if (code == 2) != (len(list) > 0) && code != 3 {
		t.Errorf("%s: exit %d with %d errors", what, code, len(list))
	}
	return doc
}

// Every document that a command prints, in good and in bad cases, is one that
// its schema describes.
func TestDocumentsFollowTheirSchemas(t *testing.T) {
	shipped := func(name string) string { return filepath.Join("..", "..", "scenarios", name+".taut") }
	dir := t.TempDir()
	bad := filepath.Join(dir, "bad.taut")
	if err := os.WriteFile(bad, []byte("tautspan 1\nlet a = 3 m + 2 s\nstok w {\n    mass 1 kg/m\n}\n"), 0o600); err != nil {
		t.Fatal(err)
	}
	short := filepath.Join(dir, "short.taut")
	text := "tautspan 1\nlet pull = 12 kN +- 2 %\nstock w {\n    mass 1.2 kg/m\n    axial 12 MN\n}\nline l {\n    tension pull\n    support a fixed\n    segment s w 20 m\n    joint j mass 2 kg, dashpot 40 N*s/m\n    segment u w 30 m\n    support b spring 40 kN/m\n}\n" +
		"excite tap push at s 6 m with half_sine(300 N, 20 ms)\nwatch mid at u 12 m displacement, velocity\nwatch all along l displacement\nrun {\n    for 1 s\n    every 5 ms\n}\nrequire peak(mid.displacement) within 1 mm .. 60 mm\nrequire frequency(1) > 9 Hz\ncollect damping(1..2), rms(mid.velocity)\n"
	if err := os.WriteFile(short, []byte(text), 0o600); err != nil {
		t.Fatal(err)
	}
	for _, name := range []string{"first-hanger", "stay-release", "guy-pulse", "crosstie", "wire-splice"} {
		printed(t, 0, "check", "--json", shipped(name))
		printed(t, 0, "modes", "--json", "--count", "3", "--shapes", shipped(name))
		printed(t, 0, "arrivals", "--json", shipped(name))
		printed(t, 0, "respond", "--json", "--points", "5", shipped(name))
	}
	printed(t, 0, "plugins", "--json", "list")
	printed(t, 0, "plugins", "--json", "try", "characteristic")
	printed(t, 3, "plugins", "--json", "show", "nobody")
	printed(t, 0, "run", "--json", "--out", "none", shipped("first-hanger"))
	doc := printed(t, 1, "run", "--json", "--out", "none", short)
	if v := doc["verdict"]; v != "not met" {
		t.Errorf("verdict %v, expected not met: 9 Hz is far above the first vibration", v)
	}
	printed(t, 1, "fit", "--json", filepath.Join("testdata", "fit", "hangers.taut"))
	printed(t, 2, "fit", "--json", short)
	survey := filepath.Join(dir, "survey")
	printed(t, 1, "fit", "--json", "--out", survey, shipped("guy-timing"))
	printed(t, 0, "change", "--json", survey, survey)
	printed(t, 2, "change", "--json", short, survey)
	printed(t, 0, "plan", "--json", shipped("hanger-survey"))
	printed(t, 0, "plan", "--json", short)
	printed(t, 2, "sweep", "--json", short)
	swept := filepath.Join(dir, "swept.taut")
	more := strings.Replace(text, "pull = 12 kN +- 2 %\n", "pull = 12 kN +- 2 %\nlet knob = 40 N*s/m\n", 1)
	more = strings.Replace(more, "dashpot 40 N*s/m", "dashpot knob", 1) +
		"best damping(1..2) largest over knob from 5 N*s/m to 400 N*s/m\nmeet frequency(1..3) with 1.5 Hz over pull from 1 kN to 20 kN\nvary knob from 20 N*s/m to 40 N*s/m, 1 steps\n"
	if err := os.WriteFile(swept, []byte(more), 0o600); err != nil {
		t.Fatal(err)
	}
	printed(t, 1, "sweep", "--json", "--out", "none", swept)
	records := filepath.Join("..", "..", "testdata", "records")
	printed(t, 0, "peaks", "--json", filepath.Join(records, "steel_e_open.wav"))
	printed(t, 0, "peaks", "--json", "--channel", "mic_left", filepath.Join(records, "piano_c4_stereo_6000hz.csv"))
	printed(t, 2, "peaks", "--json", "--channel", "9", filepath.Join(records, "steel_e_open.wav"))
	printed(t, 2, "peaks", "--json", bad)
	printed(t, 3, "peaks", "--json", filepath.Join(dir, "missing.csv"))
	printed(t, 0, "tidy", "--json", short)
	printed(t, 0, "why", "--json", "scope")
	printed(t, 0, "scenarios", "--json")
	for _, command := range []string{"check", "modes", "respond", "arrivals", "run", "fit", "plan", "sweep"} {
		printed(t, 2, command, "--json", bad)
		printed(t, 2, command, "--json", filepath.Join(dir, "missing.taut"))
	}
	printed(t, 2, "tidy", "--json", bad)
	printed(t, 2, "why", "--json", "no-such-code")
	printed(t, 2, "scenarios", "--json", "no-such-scenario")
	printed(t, 2, "run", "--json", "--solver", "nobody", "--out", "none", short)
}

// The schemas themselves must be able to refuse.
func TestSchemasRefuse(t *testing.T) {
	schema, err := jsonschema.NewCompiler().Compile(filepath.Join("testdata", "schema", "run.json"))
	if err != nil {
		t.Fatal(err)
	}
	for _, text := range []string{`{}`, `{"format":1}`, `{"format":2,"command":"run"}`} {
		doc, err := jsonschema.UnmarshalJSON(strings.NewReader(text))
		if err != nil {
			t.Fatal(err)
		}
		if schema.Validate(doc) == nil {
			t.Errorf("%s was taken for the document of a run", text)
		}
	}
}
