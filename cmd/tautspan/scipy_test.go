package main

import (
	"bufio"
	"math"
	"os"
	"path/filepath"
	"strconv"
	"strings"
	"testing"
)

// A struck line of two segments, with a clamp mass, a dashpot behind a bracket
// and a support that gives, against SciPy's DOP853 on a chain of cells
// (testdata/published/scipy_reference.py). Each value is met within the record's
// error band and the reference's own error, both as they are stated.
func TestAgainstSciPy(t *testing.T) {
	text := taut(stockOf("w", 0.9, 0), stockOf("v", 1.6, 0),
		lineOf("l", 12000, "support a fixed", "segment s w 18 m", "joint clamp mass 2.5 kg, dashpot 80 N*s/m through 60 kN/m", "segment r v 27 m", "support b spring 30 kN/m"),
		"excite hit push at s 7.2 m with half_sine(400 N, 40 ms)", "watch clamp_u at clamp displacement", "watch see at r 9 m displacement",
		runFor(0.8, 0.005, 0.002))
	doc, r := recordsOf(t, text)
	if doc.Verdict != "agree" {
		t.Errorf("the solvers %s", doc.Verdict)
	}
	file, err := os.Open(filepath.Join(publishedDir, "scipy_reference.csv"))
	if err != nil {
		t.Fatal(err)
	}
	defer file.Close()
	worst := map[string]float64{}
	rows := 0
	for in := bufio.NewScanner(file); in.Scan(); {
		if strings.HasPrefix(in.Text(), "#") {
			continue
		}
		var v [5]float64
		for i, cell := range strings.Split(in.Text(), ",") {
			if v[i], err = strconv.ParseFloat(cell, 64); err != nil {
				t.Fatal(err)
			}
		}
		for i, watch := range []string{"clamp_u", "see"} {
			band := r.columns[watch+".displacement.band [m]"][rows]
			for column, values := range r.columns {
				if !strings.HasPrefix(column, watch+".displacement.") || strings.Contains(column, ".band ") {
					continue
				}
				off := math.Abs(values[rows] - v[1+2*i])
				worst[column] = math.Max(worst[column], off)
				// The band is that of the two sharpest solvers; a third may be off by
				// what was asked for, 0.2 % of a record of 30 mm.
				if off > band+v[2+2*i]+0.002*0.03 {
					t.Errorf("%s at %g s: off by %.2g m, band %.2g, reference good to %.2g", column, v[0], off, band, v[2+2*i])
				}
			}
		}
		rows++
	}
	if rows != 161 {
		t.Errorf("%d rows in the reference, expected 161", rows)
	}
	t.Log(worst)
}
