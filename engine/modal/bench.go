package modal

import (
	"fmt"
	"math"
	"sort"

	"github.com/tautspan/tautspan/engine/mesh"
)

// impedance is the force per velocity of a bench record at s = i omega, N s/m,
// straight between its rows; the conjugate at negative frequencies. It reports
// false beyond the record's ends.
func impedance(b *mesh.Bench, s complex128) (complex128, bool) {
	f := math.Abs(imag(s)) / (2 * math.Pi)
	last := len(b.Frequency) - 1
	// Chosen: a frequency at the record's end, to rounding, is in it.
	const slack = 1e-12
	if last < 0 || f < b.Frequency[0]*(1-slack) || f > b.Frequency[last]*(1+slack) {
		return 0, false
	}
	k := min(max(sort.SearchFloat64s(b.Frequency, f), 1), last)
	z := b.Impedance[0]
	if last > 0 {
		t := (f - b.Frequency[k-1]) / (b.Frequency[k] - b.Frequency[k-1])
		z = b.Impedance[k-1] + complex(math.Min(math.Max(t, 0), 1), 0)*(b.Impedance[k]-b.Impedance[k-1])
	}
	if imag(s) < 0 {
		z = complex(real(z), -imag(z))
	}
	return z, true
}

// Measured refuses a frequency, rad/s, at which a damper of the network was not
// measured.
func Measured(m *mesh.Mesh, omega float64) error {
	for i := range m.Nodes {
		for _, b := range m.Nodes[i].Benches {
			if _, ok := impedance(b, complex(0, omega)); !ok {
				f := b.Frequency
				return fmt.Errorf("the damper at %s was measured from %.6g Hz to %.6g Hz (%s), and is not guessed at %.6g Hz",
					m.Nodes[i].Name, f[0], f[len(f)-1], b.Name, omega/(2*math.Pi))
			}
		}
	}
	return nil
}

// Impedance is the force per velocity of a bench record at an angular frequency
// within its ends, N s/m; 0 beyond them.
func Impedance(b *mesh.Bench, omega float64) complex128 {
	z, _ := impedance(b, complex(0, omega))
	return z
}
