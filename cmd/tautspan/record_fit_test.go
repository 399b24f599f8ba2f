package main

import (
	"fmt"
	"math"
	"os"
	"path/filepath"
	"testing"
)

// Records of four real strings, and of two of them as a logger would write them,
// are fitted from the file to tension and bending stiffness. Length and mass are
// not known, so that a metre and a kilogram a metre stand for them: f0 =
// root(T/m)/(2L) and B = pi^2 EI/(T L^2) are what an independent analysis found by
// other methods (testdata/records/README.md). f0 within 0.1 %, B within 10 %, and
// no closer, as that analysis says of itself.
func TestRealStringsAreFitted(t *testing.T) {
	for _, c := range []struct {
		file, columns string
		f0, b         float64
	}{
		{"bass_e_open.wav", "channel 1 uncalibrated for q.displacement", 41.199, 1.450e-4},
		{"steel_e_open.wav", "channel 1 uncalibrated for q.displacement", 330.051, 2.001e-5},
		{"steel_e_fret5.wav", "channel 1 uncalibrated for q.displacement", 440.530, 3.535e-5},
		{"piano_c4.wav", "channel 1 uncalibrated for q.displacement", 261.475, 2.921e-4},
		{"bass_e_open_2205hz.csv", "time 1 unit s\n channel 2 uncalibrated for q.displacement", 41.194, 1.442e-4},
	} {
		dir := t.TempDir()
		data, err := os.ReadFile(filepath.Join("..", "..", "testdata", "records", c.file))
		if err != nil {
			t.Fatal(err)
		}
		if err := os.WriteFile(filepath.Join(dir, c.file), data, 0o600); err != nil {
			t.Fatal(err)
		}
		// Tension within a factor of 25 around what the note's name says, stiffness
		// within 1000.
		pull := 4 * c.f0 * c.f0
		text := fmt.Sprintf("tautspan 1\nlet pull = %.4g N\nlet stiff = 1 N*m^2\nstock w {\n mass 1 kg/m\n bending stiff\n}\nline l {\n tension pull\n support a pinned\n segment s w 1 m\n support b pinned\n}\n"+
			"watch q at s 0.2 m displacement\nrecord r \"%s\" {\n %s\n}\nseek pull from %.4g N to %.4g N\nseek stiff from %.4g N*m^2 to %.4g N*m^2\nfit {\n to r\n}\n",
			pull, c.file, c.columns, pull/5.3, pull*4.7, pull*1e-6, pull*1e-3)
		file := filepath.Join(dir, "case.taut")
		if err := os.WriteFile(file, []byte(text), 0o600); err != nil {
			t.Fatal(err)
		}
		doc := printed(t, 0, "fit", "--json", file)
		found := map[string]float64{}
		for _, u := range doc["unknowns"].([]any) {
			row := u.(map[string]any)
			found[row["name"].(string)] = numberOf(t, row["value"])
		}
		f0, b := math.Sqrt(found["pull"])/2, math.Pi*math.Pi*found["stiff"]/found["pull"]
		closeTo(t, c.file+" f0", f0, c.f0, 1e-3*c.f0)
		closeTo(t, c.file+" B", b, c.b, 0.1*c.b)
	}
}
