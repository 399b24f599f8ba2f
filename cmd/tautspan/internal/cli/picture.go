package cli

import (
	"math"
	"strings"
)

// dots are the bits of a braille character by row and column, from U+2800.
var dots = [4][2]rune{{0x01, 0x08}, {0x02, 0x10}, {0x04, 0x20}, {0x40, 0x80}}

// picture draws a record as rows lines of text, width characters wide, four
// dots high and two wide each. Every column of dots spans from the least to the
// largest value in its stretch of time, so that nothing between two dots is lost.
// It returns the lines and the values at the top and bottom edge.
func picture(values []float64, width, rows int) (lines []string, top, bottom float64) {
	low, high := math.Inf(1), math.Inf(-1)
	for _, v := range values {
		if !math.IsNaN(v) && !math.IsInf(v, 0) {
			low, high = math.Min(low, v), math.Max(high, v)
		}
	}
	if low > high || width < 1 || rows < 1 {
		return nil, 0, 0
	}
	// Zero stays in view: a record is read against rest.
	low, high = math.Min(low, 0), math.Max(high, 0)
	if high == low {
		low, high = -1, 1
	}
	cols, steps := 2*width, 4*rows
	cell := func(v float64) int {
		return min(steps-1, int(float64(steps)*(high-v)/(high-low)))
	}
	grid := make([][]rune, rows)
	for i := range grid {
		grid[i] = []rune(strings.Repeat("\u2800", width))
	}
	prev := math.NaN()
	for c := 0; c < cols; c++ {
		a, b := c*len(values)/cols, (c+1)*len(values)/cols
		if b == a {
			b = min(a+1, len(values))
		}
		lo, hi := math.Inf(1), math.Inf(-1)
		if !math.IsNaN(prev) {
			lo, hi = prev, prev // joined to the column before
		}
		for _, v := range values[a:b] {
			if !math.IsNaN(v) {
				lo, hi, prev = math.Min(lo, v), math.Max(hi, v), v
			}
		}
		if lo > hi {
			continue
		}
		for y := cell(hi); y <= cell(lo); y++ {
			grid[y/4][c/2] |= dots[y%4][c%2]
		}
	}
	for _, row := range grid {
		lines = append(lines, string(row))
	}
	return lines, high, low
}

// zeroRow is the line of the picture in which the value zero lies.
func zeroRow(top, bottom float64, rows int) int {
	return min(rows-1, int(float64(rows)*top/(top-bottom)))
}
