package conform_test

import (
	"math"
	"math/cmplx"
	"testing"

	"github.com/tautspan/tautspan/engine/formula"
	"github.com/tautspan/tautspan/engine/scenario"
	"gonum.org/v1/gonum/dsp/fourier"
)

// chain is a line of segments under one tension, held at both ends and pushed
// at one place, seen outward from the push: what lies towards the first support
// and, link by link, what lies towards the last.
type chain struct {
	tension, viscous float64 // N, N s/m^2
	near             link    // from the push to the first support
	far              []link  // from the push to the last support
	heard            int     // the probe stands at the far end of far[heard-1]
}

// link is a uniform stretch and what sits at its far end.
type link struct {
	length, mass  float64 // m, kg/m
	hung, dashpot float64 // kg, N s/m; of no account at a support
}

// struck is the line of threeSegments as a chain: pushed at 12 m, heard at 60 m.
func struck() *chain {
	return &chain{
		tension: 20000, viscous: 0.08, near: link{length: 12, mass: 0.9}, heard: 2,
		far: []link{{18, 0.9, 4, 0}, {30, 1.6, 0, 0}, {15, 1.6, 1.5, 120}, {length: 25, mass: 0.9}},
	}
}

// receptance is the displacement of the probe for a unit force, m/N, at complex
// frequency s, Re s > 0. With a = sqrt((m s^2 + c s)/T), z = T a and k z the
// stiffness of what follows a stretch of length L,
//
//	in   = z (k cosh aL + sinh aL)/(cosh aL + k sinh aL)   stiffness seen
//	far  = near/(cosh aL + k sinh aL)                      displacement handed on
//
// with e^{-aL} in front, so that nothing overflows. Exact; no mesh.
func (c *chain) receptance(s complex128) complex128 {
	wave := func(l *link) (z, e complex128) {
		a := cmplx.Sqrt((complex(l.mass, 0)*s*s + complex(c.viscous, 0)*s) / complex(c.tension, 0))
		return complex(c.tension, 0) * a, cmplx.Exp(-a * complex(l.length, 0))
	}
	z, e := wave(&c.near)
	total := z * (1 + e*e) / (1 - e*e)
	passed, in := complex128(1), complex128(0)
	for i := len(c.far) - 1; i >= 0; i-- {
		l := &c.far[i]
		z, e := wave(l)
		if i == len(c.far)-1 {
			in = z * (1 + e*e) / (1 - e*e)
			continue
		}
		k := (in + complex(l.hung, 0)*s*s + complex(l.dashpot, 0)*s) / z
		below := (1 + e*e) + k*(1-e*e)
		in = z * (k*(1+e*e) + (1 - e*e)) / below
		if i < c.heard {
			passed *= 2 * e / below
		}
	}
	return passed / (total + in)
}

// contour is how a transform is inverted.
type contour struct {
	fine    int     // samples an output interval: the band ends at fine/(2 every), Hz
	samples int     // in the window
	decay   float64 // a copy of the record one window later is this much smaller
}

// The contour of the reference: band to 64 kHz, window 8.2 s for a record of 5 s.
// The transform falls with s^-4 (2 from the force, 1 from the line, 1 from the
// first clamp's mass), so that a band of 200 times that of the half sine leaves
// less than 1e-9; rounding is raised by decay^(5/8.2) = 2e6 to some 1e-10.
func referenceContour() contour { return contour{fine: 64, samples: 1 << 20, decay: 1e-10} }

// answer is the chain's record, rows every so many seconds, after a half sine of
// peak f0 and duration d, whose transform is f0 p (1+e^{-sd})/(s^2+p^2), p = pi/d:
//
//	u(t) = (e^{bt}/W) sum over k of U(b + 2 pi i k/W) e^{2 pi i k t/W}
//
// by a real FFT over a window W.
func (c *chain) answer(f0, d float64, rows int, every float64, how contour) []float64 {
	step := every / float64(how.fine)
	window := step * float64(how.samples)
	b := -math.Log(how.decay) / window
	p := complex(math.Pi/d, 0)
	coefficients := make([]complex128, how.samples/2+1)
	for k := range coefficients {
		s := complex(b, 2*math.Pi*float64(k)/window)
		force := complex(f0, 0) * p * (1 + cmplx.Exp(-s*complex(d, 0))) / (s*s + p*p)
		coefficients[k] = force * c.receptance(s)
	}
	u := fourier.NewFFT(how.samples).Sequence(nil, coefficients)
	out := make([]float64, rows)
	for i := range out {
		out[i] = u[i*how.fine] / window * math.Exp(b*every*float64(i))
	}
	return out
}

// Forty tones at one place of a uniform line.
const (
	tonesLength, tonesTension, tonesMass, tonesViscous = 50.0, 60000.0, 4.0, 0.4
	tonesAt, tonesPeak, tonesEvery                     = 13.0, 5.0, 1e-3
)

func tonesHeard() []float64 { return []float64{8.5, 17, 31} }

// tones are the frequencies, Hz.
func tones() []float64 {
	out := make([]float64, 40)
	for i := range out {
		k := float64(i + 1)
		out[i] = 0.25 + 0.5*(k-1+math.Mod(0.6180339887498949*k, 1))
	}
	return out
}

// longRecord is the line under the tones, rows rows at 1 kHz.
func longRecord(rows int) *scenario.Network {
	c := formula.Const
	force := c(0)
	for _, f := range tones() {
		force = formula.Add(force, formula.Apply(formula.OpSine, formula.Arg(formula.ArgT), c(tonesPeak), c(f), c(0)))
	}
	net := &scenario.Network{}
	net.Lines = []scenario.Line{{Name: "l", Nodes: []scenario.Node{{Name: "a", Fixed: true}, {Name: "b", Fixed: true}},
		Segments: []scenario.Segment{{Name: "s", Length: tonesLength, MassPerLength: tonesMass, Tension: tonesTension, Viscous: tonesViscous}}}}
	net.Pushes = []scenario.PushOf[float64]{{Name: "f", At: inside(0, tonesAt), Force: scenario.History{Value: force, Breaks: []float64{0}}}}
	for _, x := range tonesHeard() {
		net.Watches = append(net.Watches, scenario.Watch{Name: "w", At: inside(0, x), Quantities: []scenario.Quantity{scenario.Displacement}})
	}
	net.Run = scenario.RunOf[float64]{For: float64(rows-1) * tonesEvery, Every: tonesEvery}
	return net
}

// tonesRecord is every stride-th of rows rows at the three probes: to each tone
// the exact wave receptance sin(kx) sin(k(L-y))/(T k sin kL), x the nearer of
// probe and push to the start, y the other, k^2 = (m w^2 - i c w)/T; and so many
// free modes, which take away displacement and velocity of that at t = 0:
//
//	q = -sum Im a_k,  v = -sum Im i w_k a_k,  a_k = (2 P/(m L)) sin sin/(W^2 - w_k^2 + i w_k c/m)
//
// The modes fall with their cube.
func tonesRecord(rows, stride, modes int) [][]float64 {
	const g = tonesViscous / (2 * tonesMass)
	n, every := (rows-1)/stride+1, tonesEvery*float64(stride)
	heard := tonesHeard()
	out := make([][]float64, len(heard))
	for p := range out {
		out[p] = make([]float64, n)
	}
	for _, f := range tones() {
		w := 2 * math.Pi * f
		k := cmplx.Sqrt(complex(tonesMass*w*w, -tonesViscous*w) / tonesTension)
		for p, x := range heard {
			a := tonesPeak * cmplx.Sin(k*complex(min(x, tonesAt), 0)) * cmplx.Sin(k*complex(tonesLength-max(x, tonesAt), 0)) /
				(tonesTension * k * cmplx.Sin(k*tonesLength))
			for i := range out[p] {
				// The phase is reduced first: w t reaches 1e5.
				_, turn := math.Modf(f * every * float64(i))
				out[p][i] += imag(a * cmplx.Rect(1, 2*math.Pi*turn))
			}
		}
	}
	for j := 1; j <= modes; j++ {
		k := float64(j) * math.Pi / tonesLength
		own := k * math.Sqrt(tonesTension/tonesMass)
		q, v := 0.0, 0.0
		for _, f := range tones() {
			w := 2 * math.Pi * f
			a := complex(2/(tonesMass*tonesLength)*tonesPeak*math.Sin(k*tonesAt), 0) / complex(own*own-w*w, 2*g*w)
			q -= imag(a)
			v -= imag(a * complex(0, w))
		}
		d := math.Sqrt(own*own - g*g)
		z, step := complex(q, -(v+g*q)/d), cmplx.Exp(complex(-g*every, d*every)) // Re z = q cos + (v+gq)/d sin
		for i := 0; i < n && g*every*float64(i) < 40; i++ {                      // e^-40 is below rounding
			for p, x := range heard {
				out[p][i] += real(z) * math.Sin(k*x)
			}
			z *= step
		}
	}
	return out
}

// What the references promise: a relative L2 error below 1e-8.
const promised = 1e-8

// A uniform line's receptance is the textbook's sin sin/(T k sin kL), here at
// complex frequencies. It holds to rounding, raised by the eight factors.
func TestChainOfOneKind(t *testing.T) {
	c := &chain{tension: 20000, viscous: 0.08, near: link{length: 12, mass: 0.9}, heard: 2,
		far: []link{{18, 0.9, 0, 0}, {30, 0.9, 0, 0}, {15, 0.9, 0, 0}, {length: 25, mass: 0.9}}}
	for _, s := range []complex128{2 + 3i, 0.5 + 77i, 3 + 500i} {
		k := cmplx.Sqrt(-(0.9*s*s + 0.08*s) / 20000)
		want := cmplx.Sin(k*12) * cmplx.Sin(k*40) / (20000 * k * cmplx.Sin(k*100))
		if got := c.receptance(s); cmplx.Abs(got-want) > 1e-13*cmplx.Abs(want) {
			t.Errorf("s = %v: %v, want %v", s, got, want)
		}
	}
}

// Without loss the first arrival behind a mass is known in closed form. The push
// sends F/2Z on; a mass M between impedances Z and Y obeys
// M v' + (Z+Y) v = 2 Z v_in = F, at rest before. At 60 m nothing else comes
// within 24 m of the first line, to its support and back.
func TestStruckFirstArrival(t *testing.T) {
	const f0, d, every, rows = 500.0, 0.008, 1.0 / 2000, 10001
	c := struck()
	c.viscous = 0
	u := c.answer(f0, d, rows, every, referenceContour())
	c1, c2 := math.Sqrt(20000/0.9), math.Sqrt(20000/1.6)
	z, y, m := math.Sqrt(20000*0.9), math.Sqrt(20000*1.6), 4.0
	arrival, next := 18/c1+30/c2, 18/c1+30/c2+24/c1
	// v = A sin pt + B cos pt + C e^{-rt} until d, then it decays; u is its integral.
	r, p := (z+y)/m, math.Pi/d
	big := f0 / m / (r*r + p*p)
	v := func(t float64) float64 {
		return big * (r*math.Sin(p*t) - p*math.Cos(p*t) + p*math.Exp(-r*t))
	}
	moved := func(t float64) float64 {
		tt := min(t, d)
		out := big * (r*(1-math.Cos(p*tt))/p - math.Sin(p*tt) + p*(1-math.Exp(-r*tt))/r)
		if t > d {
			out += v(d) * (1 - math.Exp(-r*(t-d))) / r
		}
		return out
	}
	peak := 2 * f0 * d / math.Pi / (z + y)
	worst := 0.0
	for i := 0; float64(i)*every < next; i++ {
		want := 0.0
		if t := float64(i)*every - arrival; t > 0 {
			want = moved(t)
		}
		worst = math.Max(worst, math.Abs(u[i]-want))
	}
	t.Logf("largest error %.1e of the plateau", worst/peak)
	if worst > promised*peak {
		t.Errorf("largest error %.1e m of a plateau of %.1e m", worst, peak)
	}
}

// With the band doubled, the contour moved and the window doubled the record
// stays what it is.
func TestStruckReference(t *testing.T) {
	c := struck()
	want := c.answer(500, 0.008, 10001, 1.0/2000, referenceContour())
	for _, how := range []contour{{64, 1 << 20, 1e-8}, {64, 1 << 20, 1e-12}, {128, 1 << 21, 1e-10}, {32, 1 << 20, 1e-10}} {
		change := relativeError(c.answer(500, 0.008, 10001, 1.0/2000, how), want, 1)
		t.Logf("%+v: %.1e", how, change)
		if change > promised {
			t.Errorf("the record changes by %.1e under %+v", change, how)
		}
	}
}

// The plucked line's mode sum against one of twice as many modes with the
// coefficients worked out in another way: b = (2/(L k^3)) (p+q)/(2r) (cos k(a-r)
// - cos k(a+r)), p and -q the slopes of the flanks; and against the given shape.
func TestPluckReference(t *testing.T) {
	const L, a, r, c, g, x = 20.0, 4.0, 0.2, 154.91933384829668, 0.05 / 0.7, 7.0 // c = sqrt(8400/0.35)
	const bend, stride, modes = (0.02/a + 0.02/(L-a)) / (2 * r), 100, 40000
	got := pluckRecord()
	want := make([]float64, len(got))
	for n := 1; n <= modes; n++ {
		k := float64(n) * math.Pi / L
		b := 2 / (L * k * k * k) * bend * (math.Cos(k*(a-r)) - math.Cos(k*(a+r))) * math.Sin(k*x)
		w := math.Sqrt(k*k*c*c - g*g)
		for i := 0; i < len(want); i += stride {
			t := float64(i) / 2000
			sin, cos := math.Sincos(w * t)
			want[i] += b * math.Exp(-g*t) * (cos + g/w*sin)
		}
	}
	e := relativeError(got, want, stride)
	t.Logf("twice the modes: %.1e", e)
	if e > promised {
		t.Errorf("the mode sum changes by %.1e", e)
	}
	if shape := 0.02 * (L - x) / (L - a); math.Abs(got[0]-shape) > 1e-7*shape {
		t.Errorf("starts at %.10g m, want %.10g m", got[0], shape)
	}
}

// Twice as many free modes leave the forced line's record as it is, and before
// the first wave arrives tones and modes together are nothing.
func TestTonesReference(t *testing.T) {
	const rows, stride, modes = 20001, 50, 6000
	got, want := tonesRecord(rows, stride, modes), tonesRecord(rows, stride, 2*modes)
	norm := 0.0
	for _, v := range want[2] {
		norm += v * v
	}
	norm = math.Sqrt(norm / float64(len(want[2])))
	e := relativeErrors(got, want, 1)
	t.Logf("twice the modes: %.1e", e)
	if e > promised {
		t.Errorf("the record changes by %.1e", e)
	}
	for i := range 3 { // 18 m at 122.5 m/s take 0.147 s, 4 m 0.033 s
		if math.Abs(got[2][i]) > 1e-7*norm {
			t.Errorf("%.1e of the usual motion %g s after the start", got[2][i]/norm, 0.05*float64(i))
		}
	}
}

// relativeErrors is the relative L2 error over several records.
func relativeErrors(got, want [][]float64, stride int) float64 {
	diff, norm := 0.0, 0.0
	for p := range want {
		for i, w := range want[p] {
			d := got[p][i*stride] - w
			diff += d * d
			norm += w * w
		}
	}
	return math.Sqrt(diff / norm)
}
