package conform

import (
	"math"
	"testing"

	"github.com/tautspan/tautspan/engine/formula"
	"github.com/tautspan/tautspan/engine/mesh"
	"github.com/tautspan/tautspan/engine/scenario"
)

// Substituting an argument changes the program's value as substitution should.
func TestSubstitute(t *testing.T) {
	table := &formula.Table{X: []float64{0, 1, 3}, Y: []float64{2, 4, 0}}
	p := formula.Add(formula.Lookup(table, formula.Arg(formula.ArgT)), formula.Apply(formula.OpHalfSine, formula.Arg(formula.ArgT), formula.Const(3), formula.Const(2)))
	q := substitute(p, formula.ArgT, formula.Div(formula.Arg(formula.ArgT), formula.Const(4)))
	for _, at := range []float64{0.2, 1.7, 3.9, 8} {
		if got, want := q.At(at, 0), p.At(at/4, 0); got != want {
			t.Errorf("t = %g: %g, want %g", at, got, want)
		}
	}
}

// Twice reversed is the original; a mesh of the reversed network has the same
// pieces from the other end.
func TestReversedTwice(t *testing.T) {
	for _, c := range Cases() {
		once, ok := Reversed(c.Net)
		if !ok {
			t.Fatalf("%s was not reversed", c.Name)
		}
		twice, _ := Reversed(once)
		for i, p := range c.Net.Pushes {
			if p.At != twice.Pushes[i].At {
				t.Errorf("%s: push at %+v, then %+v", c.Name, p.At, twice.Pushes[i].At)
			}
		}
		a, err1 := mesh.Build(c.Net)
		b, err2 := mesh.Build(once)
		if err1 != nil || err2 != nil {
			t.Fatal(err1, err2)
		}
		for _, l := range []int{0} {
			pa, pb := a.Pieces[a.Lines[l].Pieces[0]], b.Pieces[b.Lines[l].Pieces[len(b.Lines[l].Pieces)-1]]
			if math.Abs(pa.Length-pb.Length) > 1e-12*pa.Length || pa.MassPerLength != pb.MassPerLength {
				t.Errorf("%s: first piece %+v, last of the reversed %+v", c.Name, pa, pb)
			}
		}
	}
}

// A splice changes no place: every watch stays where it was.
func TestSplicedKeepsPlaces(t *testing.T) {
	net := &scenario.Network{}
	k := &maker{net: net}
	k.line([]scenario.Node{{Fixed: true}, {}, {Fixed: true}}, segment("s", 7, 1, 100, 0), segment("u", 13, 1, 100, 0))
	net.Run = scenario.RunOf[float64]{For: 1, Every: 0.1}
	watchAll(net)
	out, ok := Spliced(net, 0.37)
	if !ok || len(out.Lines[0].Segments) != 3 || len(out.Lines[0].Nodes) != 4 {
		t.Fatalf("%v %+v", ok, out)
	}
	for i := range net.Watches {
		if a, b := net.Travel(net.Watches[i].At), out.Travel(out.Watches[i].At); math.Abs(a-b) > 1e-12 {
			t.Errorf("watch moved from %g to %g m", a, b)
		}
	}
}

// In other units the wave speed is length/time times as large.
func TestRescaled(t *testing.T) {
	c := Cases()[2]
	m1, _ := mesh.Build(c.Net)
	m2, err := mesh.Build(Rescaled(c.Net, 3, 0.5, 7))
	if err != nil {
		t.Fatal(err)
	}
	if got, want := m2.Pieces[0].WaveSpeed(), m1.Pieces[0].WaveSpeed()*3/0.5; math.Abs(got-want) > 1e-12*want {
		t.Errorf("wave speed %g, want %g", got, want)
	}
	f1, f2 := m1.Pushes[0].Force.At(0.3, 0), m2.Pushes[0].Force.At(0.15, 0)
	if math.Abs(f2-f1*7*3/0.25) > 1e-9*math.Abs(f2) {
		t.Errorf("force %g, want %g", f2, f1*7*3/0.25)
	}
}

// The derived loads do balance the chosen motion: where the motion is checked
// by finite differences of the program itself,
// m u_tt + c u_t - (T u_x)_x + EI (u_xxxx + tau u_xxxxt) + w h - q = 0.
func TestLoadsBalance(t *testing.T) {
	for _, c := range Cases() {
		for i, p := range c.Net.Presses {
			line := &c.Net.Lines[p.Along.Line]
			s := line.Segments[p.Along.Segment]
			x0 := c.Net.Travel(scenario.Place{Line: p.Along.Line, Node: p.Along.Segment})
			const h, at = 1e-3, 0.71
			x := 0.37 * s.Length
			u := func(dx, dt float64) float64 { return c.Exact(p.Along.Line, x0+x+dx, at+dt) }
			utt := (16*(u(0, h)+u(0, -h)) - u(0, 2*h) - u(0, -2*h) - 30*u(0, 0)) / (12 * h * h)
			ut := (8*(u(0, h)-u(0, -h)) - u(0, 2*h) + u(0, -2*h)) / (12 * h)
			ux := (u(h, 0) - u(-h, 0)) / (2 * h)
			uxx := (u(h, 0) - 2*u(0, 0) + u(-h, 0)) / (h * h)
			pull := (s.Tension+s.TensionRise*x)*uxx + s.TensionRise*ux
			// The fourth derivative wants a longer step: rounding grows with h^-4.
			const k = 0.05
			fourth := func(dt float64) float64 {
				return (u(2*k, dt) - 4*u(k, dt) + 6*u(0, dt) - 4*u(-k, dt) + u(-2*k, dt)) / (k * k * k * k)
			}
			bend, lost := s.Bending*fourth(0), s.Bending*s.Internal*(fourth(h)-fourth(-h))/(2*h)
			sag := sagForce(t, &c, p.Along, at)
			inertia := s.MassPerLength * utt
			gap := inertia + s.Viscous*ut - pull + bend + lost + sag - p.Force.At(at, x)
			// In time the differences are of order 4: the motion may pass through
			// zero at this instant and its error does not. In place they are off by
			// h^2/12 of the fourth derivative, and the bending's by k^2/6 of the
			// sixth, at most (4 pi/20)^2 = 0.4 times the fourth: 1.7e-4.
			if math.Abs(gap) > 3e-4*(math.Abs(inertia)+math.Abs(pull)+math.Abs(bend)+math.Abs(lost)+math.Abs(sag)+1) {
				t.Errorf("%s, press %d: gap %g of %g", c.Name, i, gap, inertia)
			}
		}
	}
}

// sagForce is w h of the line's sag term at a time, the integral by the midpoint
// rule.
func sagForce(t *testing.T, c *Case, along scenario.SpanOf, at float64) float64 {
	t.Helper()
	m, err := mesh.Build(c.Net)
	if err != nil {
		t.Fatal(err)
	}
	line := &m.Lines[along.Line]
	if line.Sag == nil {
		return 0
	}
	const n = 4000
	sum, weight := 0.0, 0.0
	for i, k := range line.Pieces {
		p := &m.Pieces[k]
		for j := range n {
			sum += line.Sag.Pieces[i] * c.Exact(along.Line, p.X0+(float64(j)+0.5)*p.Length/n, at) * p.Length / n
		}
		if p.Segment == along.Segment {
			weight = line.Sag.Pieces[i]
		}
	}
	for node, w := range line.Sag.Nodes {
		sum += w * c.Exact(along.Line, m.Nodes[node].X, at)
	}
	return weight * line.Sag.Stiffness * sum
}
