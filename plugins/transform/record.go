package transform

import (
	"math"

	"gonum.org/v1/gonum/dsp/fourier"

	"github.com/tautspan/tautspan/engine/scenario"
)

// spectrumOf is the probe's transform at frequency k, integrated as often as its
// record is averaged, less what a jump at t = 0 would leave.
func (p *probe) spectrumOf(s *system, g *grid, k int) complex128 {
	at := g.at(k)
	var v complex128
	switch {
	case p.quantity == scenario.Tension:
		v = s.tension(p.line)
	case p.point >= 0:
		pt := &s.n.points[p.point]
		if pt.u >= 0 {
			v = s.x[pt.u]
		} else if m := s.n.motions[pt.node]; m != nil {
			v = m.of[k]
		}
	default:
		for _, t := range p.terms {
			v += complex(t.sign, 0) * s.state(t.element, t.at, k)[t.component]
		}
	}
	switch p.quantity {
	case scenario.Velocity:
		v = at*v - complex(p.u0, 0)
	case scenario.Acceleration:
		v = at*(at*v-complex(p.u0, 0)) - complex(p.v0, 0)
	}
	for range p.means {
		v /= at
	}
	return v - p.jump(g, at)
}

// jump is the transform of what the integrated quantity starts with: its value,
// as c e^{-beta t}, or its slope, as c (1 - e^{-beta t})/beta. beta makes either
// die within the record, so that nothing large is taken off and put back.
func (p *probe) jump(g *grid, at complex128) complex128 {
	beta := complex(fadeRate(g), 0)
	switch p.means {
	case 0:
		return complex(p.begin, 0) / (at + beta)
	case 1:
		return complex(p.begin, 0) / (at * (at + beta))
	}
	return 0
}

func fadeRate(g *grid) float64 { return 60 / g.window }

// integrated is the record on the fine grid, with what was taken off put back.
func (p *probe) integrated(g *grid, c []complex128, fft *fourier.FFT, out []float64) []float64 {
	out = fft.Sequence(out, c)
	beta := fadeRate(g)
	for j := range out[:g.rows] {
		t := g.step * float64(j)
		v := out[j] / g.window * math.Exp(g.sigma*t)
		switch p.means {
		case 0:
			v += p.begin * math.Exp(-beta*t)
		case 1:
			v += p.begin * -math.Expm1(-beta*t) / beta
		}
		out[j] = v
	}
	return out
}

// rows makes the record of the fine grid: samples, or means by differences of the
// integral. Before t = 0 the quantity goes on as it starts.
func (p *probe) rows(g *grid, fine []float64, every float64, rows, stride int, out []float64) {
	// The value before the start: of a displacement u0 - t v0, of others constant.
	before := func(j int) float64 {
		t := g.step * float64(j) // j < 0
		rate := 0.0
		if p.quantity == scenario.Displacement {
			rate = p.v0
		}
		switch p.means {
		case 1:
			return p.begin*t + rate*t*t/2
		case 2:
			return p.begin*t*t/2 + rate*t*t*t/6
		}
		return p.begin + rate*t
	}
	at := func(j int) float64 {
		if j < 0 {
			return before(j)
		}
		return fine[j]
	}
	for i := range rows {
		j := i * stride * g.sub
		switch p.means {
		case 0:
			out[i] = at(j)
		case 1:
			out[i] = (at(j+g.sub/2) - at(j-g.sub/2)) / every
		default:
			out[i] = (at(j+g.sub) - 2*at(j) + at(j-g.sub)) / (every * every)
		}
		out[i] += p.static
	}
}
