package resolve

import (
	"errors"
	"strings"
	"testing"

	"github.com/tautspan/tautspan/engine/formula"
	"github.com/tautspan/tautspan/engine/scenario"
)

// A law's programs are its formulas with the parameters of each use put in, SI.
func TestWrittenLaw(t *testing.T) {
	res := resolveText(t, `
let grip = 300 N
law hook {
    takes hold unit kN, soft unit mm/s, share
    state z = 2 mm rate v - z * abs(v) / (5 mm)
    state w = 1 rate -w / (2 s)
    force = -hold * v / (abs(v) + soft) - share * 1 kN/m * z * w + 3 N/s * t
}
stock s {
    mass 2 kg/m
}
line l {
    tension 1 kN
    plane sideways
    support a fixed
    segment s s 3 m
    joint j law hook(hold = grip * 2, soft = 5 mm/s, share = 20 %)
    segment u s 5 m, every 2 m from 0.5 m mass 0.3 kg
    support b fixed
}
watch q at u.2 displacement
`, Options{})
	net := bind(t, res)
	w := net.Lines[0].Nodes[1].Laws[0].Written
	args := []float64{0.7, 0, 0.01, -0.02, 0.003, 0.4} // t, x, u, v, z, w
	near(t, "force", w.Force.Eval(nil, args), 600*0.02/(0.02+0.005)-0.2*1000*0.003*0.4+3*0.7)
	near(t, "rate of z", w.Rates[0].Eval(nil, args), -0.02-0.003*0.02/0.005)
	near(t, "rate of w", w.Rates[1].Eval(nil, args), -0.2)
	near(t, "start of z", w.Starts[0], 0.002)
	near(t, "start of w", w.Starts[1], 1)
	near(t, "second joint of the row", net.Travel(net.Watches[0].At), 5.5)
	// What a let moves moves the law.
	v, err := res.Template.Values(map[string]float64{"grip": 150})
	if err != nil {
		t.Fatal(err)
	}
	moved, err := res.Template.Bind(v)
	if err != nil {
		t.Fatal(err)
	}
	near(t, "force of another grip", moved.Lines[0].Nodes[1].Laws[0].Written.Force.Eval(nil, args), 300*0.02/(0.02+0.005)-0.2*1000*0.003*0.4+3*0.7)
}

// Loss factors add up as told, and a ratio in every mode is half of one.
func TestLossFactors(t *testing.T) {
	net := bind(t, resolveText(t, `
stock s {
    mass 2 kg/m
    bending 3 N*m^2
    loss ratio 0.1 %
    loss hysteretic 3 % of bending
    loss hysteretic 0.05 %
}
line l {
    tension 1 kN
    plane sideways
    support a pinned, axial 3 MN/m
    segment s s 3 m
    joint j hinge, spring 3 kN/m loss 0.2, tuned 2 kg 3 kN/m loss 30 %
    segment u s 5 m, loss hysteretic 0.2 %
    joint k inertia 0.3 kg*m^2
    segment v s 5 m
    support b pinned
}
tie q from l.s 1 m to l.u 2 m spring 3 kN/m loss 0.1
`, Options{}))
	s, u := net.Lines[0].Segments[0], net.Lines[0].Segments[1]
	near(t, "tension", s.TensionLoss, 0.0025)
	near(t, "bending", s.BendingLoss, 0.0325)
	near(t, "own tension", u.TensionLoss, 0.002)
	near(t, "own bending", u.BendingLoss, 0.002)
	j := net.Lines[0].Nodes[1]
	if !j.Hinge || j.SpringLoss != 0.2 || j.Tuned[0].Loss != 0.3 || j.Tuned[0].Dashpot != 0 || net.Lines[0].Nodes[2].Inertia != 0.3 || net.Ties[0].SpringLoss != 0.1 || net.Lines[0].Nodes[0].AxialGive != 3e6 {
		t.Errorf("joint %+v", j)
	}
}

// What a let moves out of its range is told by the place that says it.
func TestBindRefusesFittings(t *testing.T) {
	const text = `
let much = 1
stock s {
    mass 2 kg/m
}
law fall {
    takes p
    force = -1 N/m * u * log(p)
}
line l {
    tension 1 kN
    plane sideways
    support a fixed
    segment s s 3 m, every much * 1 m mass 0.1 kg
    joint j friction much * 3 N through 3 kN/m, stop (much * 3 mm) 3 kN/m up
    segment u s 5 m
    joint k law fall(p = much)
    segment v s 5 m
    support b fixed
}
`
	res := resolveText(t, text, Options{})
	for _, c := range []struct {
		x          float64
		path, word string
	}{
		{-1, "line.l.s.every", "greater than zero"},
		{1e-6, "line.l.s.every", "more than"},
	} {
		v, err := res.Template.Values(map[string]float64{"much": c.x})
		if err != nil {
			t.Fatal(err)
		}
		_, err = res.Template.Bind(v)
		var pe *scenario.PathError
		if !errors.As(err, &pe) || pe.Path != c.path || !strings.Contains(pe.What, c.word) {
			t.Errorf("x = %g: %v", c.x, err)
		}
		if _, ok := res.Paths.Find(c.path); !ok {
			t.Errorf("%s stands nowhere", c.path)
		}
	}
	line := &res.Template.Model.Lines[0]
	line.Segments[0].Every = nil
	v, _ := res.Template.Values(map[string]float64{"much": -1})
	var pe *scenario.PathError
	if _, err := res.Template.Bind(v); !errors.As(err, &pe) || pe.Path != "line.l.j.friction" {
		t.Errorf("%v", err)
	}
	line.Nodes[1].Laws[0].Friction.Force = formula.Const(3)
	if _, err := res.Template.Bind(v); !errors.As(err, &pe) || pe.Path != "line.l.j.stop" || !strings.Contains(pe.What, "rest") {
		t.Errorf("%v", err)
	}
	line.Nodes[1].Laws = nil
	if _, err := res.Template.Bind(v); !errors.As(err, &pe) || pe.Path != "line.l.k.law" || !strings.Contains(pe.What, "finite") {
		t.Errorf("%v", err)
	}
}

// A place that falls on a joint of a row to rounding is that joint: 3 * 0.1 m is
// not 0.3 m in the arithmetic, and no sliver of line may stand between.
func TestPlaceOnRow(t *testing.T) {
	net := bind(t, resolveText(t, `
stock s {
    mass 2 kg/m
}
line l {
    tension 1 kN
    plane sideways
    support a fixed
    segment s s 3 m, every 0.3 m mass 0.1 kg
    support b fixed
}
watch q at s (0.1 m * 3) displacement, velocity mass 1 g
watch r at s.3 displacement
`, Options{}))
	rows := scenario.Rows(&net.Lines[0].Segments[0])
	if len(rows) != 9 {
		t.Fatalf("%d joints in 3 m at 0.3 m, want 9: one at the end is none", len(rows))
	}
	if at := net.Watches[0].At.Offset; at != rows[0].At {
		t.Errorf("watch at %.17g, joint at %.17g", at, rows[0].At)
	}
	if at := net.Watches[1].At.Offset; at != rows[2].At {
		t.Errorf("watch at %.17g, joint at %.17g", at, rows[2].At)
	}
}
