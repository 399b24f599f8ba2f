//go:build !amd64 || purego

package differences

func advance(prev, cur []float64, d, a float64) { advanceGo(prev, cur, d, a) }

func advanceLossy(prev, cur []float64, d, a float64, sums *[lanes]float64) {
	advanceLossyGo(prev, cur, d, a, sums)
}

// vectors tells whether the assembly runs here.
func vectors() bool { return false }
