package spectrum

import "math"

// Mains networks keep their frequency to 0.2 Hz in ordinary service, and their
// hum shows at once and twice, three times that. Common practice, no source.
const (
	mainsWander = 0.2 // Hz at the fundamental
	mainsOrders = 4
)

// Mains tells whether a frequency is one at which mains hum shows at a sampling
// rate, also folded back from above half the rate: the network's frequency and
// the multiple, or 0, 0.
func Mains(frequency, rate float64) (network, multiple int) {
	for _, hz := range []int{50, 60} {
		for k := 1; k <= mainsOrders; k++ {
			f := float64(hz * k)
			folded := math.Abs(f - rate*math.Round(f/rate))
			if math.Abs(folded-frequency) <= mainsWander*float64(k) {
				return hz, k
			}
		}
	}
	return 0, 0
}
