//go:build amd64 && !purego

package differences

import "golang.org/x/sys/cpu"

// advance is advanceGo, by vectors of four where the processor has them.
func advance(prev, cur []float64, d, a float64) {
	if n := len(prev); n > 0 && cpu.X86.HasAVX2 {
		_ = cur[n+1]
		advanceAVX2(&prev[0], &cur[0], n, d, a)
		return
	}
	advanceGo(prev, cur, d, a)
}

// advanceLossy is advanceLossyGo, by vectors of four where the processor has them.
func advanceLossy(prev, cur []float64, d, a float64, sums *[lanes]float64) {
	if n := len(prev); n > 0 && cpu.X86.HasAVX2 {
		_ = cur[n+1]
		advanceLossyAVX2(&prev[0], &cur[0], n, d, a, &sums[0])
		return
	}
	advanceLossyGo(prev, cur, d, a, sums)
}

// vectors tells whether the assembly runs here.
func vectors() bool { return cpu.X86.HasAVX2 }

//go:noescape
func advanceAVX2(prev, cur *float64, n int, d, a float64)

//go:noescape
func advanceLossyAVX2(prev, cur *float64, n int, d, a float64, sums *float64)
