package statics

import "testing"

// The static shape of a stiff sagging line of a hundred segments, plucked.
func BenchmarkHold(b *testing.B) {
	lengths := make([]float64, 100)
	for i := range lengths {
		lengths[i] = 3
	}
	line := stiff(500, span(28e3, 1.6, clamped, clamped, lengths...))
	line.Sag = true
	for i := range line.Segments {
		line.Segments[i].Axial = 35e6
	}
	net := network(line)
	pluck(net, 0, 100, 300)
	b.ReportAllocs()
	for b.Loop() {
		if _, err := Hold(net); err != nil {
			b.Fatal(err)
		}
	}
}

// The same where tension rises along the line, so that shapes are power series.
func BenchmarkHoldRising(b *testing.B) {
	line := stiff(500, span(28e3, 1.6, clamped, clamped, 300))
	line.Segments[0].TensionRise = 12
	net := network(line)
	pluck(net, 0, 100, 300)
	b.ReportAllocs()
	for b.Loop() {
		if _, err := Hold(net); err != nil {
			b.Fatal(err)
		}
	}
}
