package mesh

import "math"

// The bounds on Neglect within which solvers of ideal strings answer for a line
// with bending stiffness: below the first its neglect is not worth a word, above
// the second the answer is not worth giving.
const (
	NeglectSilent = 0.05
	NeglectMost   = 0.3
)

// Neglect estimates the relative L2 error of a whole record that comes of leaving
// out the bending stiffness,
//
//	phi = omega t_end/sqrt 3 (sqrt 15 sum over pieces tau_i/tau * eps_i/2 + sum over clamped ends l/(c tau)),
//
// with omega the root mean square frequency of the excitations, eps = EI omega^2/(T c^2),
// l = sqrt(EI/T), tau the line's travel time; the largest of all lines. For one
// uniform line the second term is 2/xi between clamps, xi = L sqrt(T/EI). 0 without
// bending; infinite where the excitation has a kink or jump, or a band of its own
// is not known, or a law sets off fronts of its own, so that no frequency bounds it. An end with a spring against
// turning counts as clamped. Fittings inside the line are not counted.
//
// Source: derived here. A stiff string's phase runs ahead by k c t eps/2 and by the
// offset l of each boundary layer; sqrt 3 is from the mean over the record of t^2,
// sqrt 15 from that of k^6 over a bell's spectrum. With both factors 1 the error was
// measured at 0.5 (clamps) to 2.4 (pins) of phi. The first term is doubled where a
// load's slope jumps, whose spectrum has a longer tail (measured: 1.7 to 1.8 times a
// bell's). See the test in plugins/conform.
func (m *Mesh) Neglect() float64 {
	if m.Features()&Bending == 0 {
		return 0
	}
	if m.Features()&NonLinear != 0 || m.Jump <= 2 || !(m.Band > 0) || m.BandCut {
		return math.Inf(1)
	}
	omega := 2 * math.Pi * m.Band / bandFactor
	spread := 1.0
	if m.Jump <= 3 {
		spread = 2 // a force with a bend, as half a sine: more of it lies at high frequencies
	}
	most := 0.0
	for i := range m.Lines {
		shift, travel := 0.0, 0.0
		for _, k := range m.Lines[i].Pieces {
			p := &m.Pieces[k]
			c := p.WaveSpeed()
			travel += p.TravelTime()
			shift += spread * math.Sqrt(15) * p.TravelTime() * p.Bending * omega * omega / (2 * p.Tension * c * c)
			for _, n := range [2]int{p.From, p.To} {
				if node := &m.Nodes[n]; node.Support && (node.Clamped || node.Rotary > 0) {
					shift += math.Sqrt(p.Bending/p.Tension) / c
				}
			}
		}
		if travel > 0 {
			most = math.Max(most, omega*m.Timing.End()/math.Sqrt(3)*shift/travel)
		}
	}
	return most
}
