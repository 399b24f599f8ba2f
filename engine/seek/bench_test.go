package seek

import (
	"context"
	"math"
	"testing"
)

// Meetings of a function that costs next to nothing: what the search itself takes.
func BenchmarkMeet(b *testing.B) {
	p := of(0.5, 40, 240, nil, func(x float64, _ []float64) float64 { return math.Sin(x) })
	for b.Loop() {
		if _, err := Meet(context.Background(), p, 1); err != nil {
			b.Fatal(err)
		}
	}
}
