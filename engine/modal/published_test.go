package modal

import (
	"encoding/json"
	"fmt"
	"math"
	"os"
	"testing"

	"github.com/tautspan/tautspan/engine/mesh"
)

type entry struct {
	Value float64 `json:"value"`
}

type published struct {
	ID       string           `json:"id"`
	Inputs   map[string]entry `json:"inputs"`
	Expected map[string]entry `json:"expected"`
}

// cases of testdata/published.json; sources stand beside each case there.
func cases(t testing.TB) map[string]published {
	t.Helper()
	text, err := os.ReadFile("testdata/published.json")
	if err != nil {
		t.Fatal(err)
	}
	var list []published
	if err := json.Unmarshal(text, &list); err != nil {
		t.Fatal(err)
	}
	out := map[string]published{}
	for _, c := range list {
		out[c.ID] = c
	}
	return out
}

// Tolerances of the classes of the table: T1 closed form, T2 root.
const (
	classT1 = 1e-9
	classT2 = 1e-8
)

func (c published) in(name string) float64 { return c.Inputs[name].Value }

// frequencies compares every f<n> of the case.
func (c published) frequencies(t *testing.T, res *Result, format string, rel float64) {
	t.Helper()
	checked := 0
	for n := 1; n <= len(res.Modes); n++ {
		if want, ok := c.Expected[fmt.Sprintf(format, n)]; ok {
			near(t, fmt.Sprintf("%s mode %d", c.ID, n), res.Modes[n-1].Frequency, want.Value, rel)
			checked++
		}
	}
	if checked == 0 {
		t.Errorf("%s: nothing compared", c.ID)
	}
}

func TestPublishedUndamped(t *testing.T) {
	all := cases(t)
	free := mesh.Node{}
	for id, make := range map[string]func(c published) *build{
		"C01-01": func(c published) *build {
			return line(c.in("m"), c.in("T"), 0, []float64{0, c.in("L")}, fixed, fixed)
		},
		"C01-02": func(c published) *build {
			return line(c.in("m"), c.in("T"), 0, []float64{0, 0.31 * c.in("L"), c.in("L")}, fixed, free, fixed)
		},
		"C01-03": func(c published) *build {
			return line(c.in("m"), c.in("T"), 0, []float64{0, c.in("L")}, fixed, free)
		},
		"C02-01": endSpring, "C02-02": endSpring, "C02-03": endSpring,
		"C03-01": pointMass, "C03-02": pointMass,
		"C03-03": func(c published) *build {
			return line(c.in("m"), c.in("T"), 0, []float64{0, c.in("L")}, fixed, mesh.Node{Mass: c.in("M")})
		},
		"C04-01": twoParts, "C04-02": twoParts,
		"C04-11": func(c published) *build {
			return line(c.in("m"), c.in("T"), 0, []float64{0, c.in("a"), c.in("L")}, fixed, mesh.Node{Spring: c.in("K")}, fixed)
		},
	} {
		c := all[id]
		rel := classT2
		if id < "C02" {
			rel = classT1
		}
		c.frequencies(t, find(t, &make(c).m, Want{Count: 12}), "f%d", rel)
	}
}

func endSpring(c published) *build {
	return line(c.in("m"), c.in("T"), 0, []float64{0, c.in("L")}, fixed, mesh.Node{Spring: c.in("K")})
}

func pointMass(c published) *build {
	return line(c.in("m"), c.in("T"), 0, []float64{0, c.in("a"), c.in("L")}, fixed, mesh.Node{Mass: c.in("M")}, fixed)
}

func twoParts(c published) *build {
	b := &build{}
	l, j, r := b.node(fixed), b.node(mesh.Node{}), b.node(fixed)
	b.piece(l, j, c.in("L1"), c.in("m1"), c.in("T"), 0)
	b.piece(j, r, c.in("L2"), c.in("m2"), c.in("T"), 0)
	return b
}

// C01-04: ordinates of mode 3.
func TestPublishedShape(t *testing.T) {
	c := cases(t)["C01-04"]
	b := line(2, 300, 0, []float64{0, 10}, fixed, fixed)
	shape := find(t, &b.m, Want{Count: 3, Shapes: true}).Modes[2].Shape
	for name, x := range map[string]float64{"phi3_at_1_m": 1, "phi3_at_2_m": 2, "phi3_at_2.5_m": 2.5, "phi3_at_4_m": 4} {
		v := shape.At(mesh.Spot{Node: -1, Piece: 0, At: x})
		near(t, name, real(v), c.Expected[name].Value, classT1)
		if imag(v) != 0 {
			t.Errorf("%s has phase: %v", name, v)
		}
	}
}

// C01-05: Mersenne's laws.
func TestPublishedSensitivity(t *testing.T) {
	c := cases(t)["C01-05"]
	f := func(l, tension float64) float64 {
		return find(t, &line(2, tension, 0, []float64{0, l}, fixed, fixed).m, Want{Count: 1}).Modes[0].Frequency
	}
	base := f(10, 300)
	// The change is a hundredth of the value, so 1e-13 of the frequency is 1e-11 here.
	near(t, "tension", f(10, 303)/base-1, c.Expected["df_over_f_tension"].Value, classT1)
	near(t, "length", f(10.1, 300)/base-1, c.Expected["df_over_f_length"].Value, classT1)
}

// C02-04: a dashpot as the end of the line, with closed forms for all modes.
func TestPublishedEndDashpot(t *testing.T) {
	c := cases(t)["C02-04"]
	z := math.Sqrt(c.in("T") * c.in("m"))
	for _, v := range []struct {
		share   float64
		decay   string
		f1, f2  string
		creeps  int
		spacing float64
	}{{0.5, "decay_C_0.5Z", "f1_C_0.5Z", "f2_C_0.5Z", 0, 2}, {2, "decay_C_2Z", "f1_C_2Z", "", 1, 2}} {
		b := line(c.in("m"), c.in("T"), 0, []float64{0, c.in("L")}, fixed, mesh.Node{Dashpot: v.share * z})
		res := find(t, &b.m, Want{Count: 8})
		if len(res.Modes) != 8 || len(res.Overdamped) != v.creeps {
			t.Fatalf("C = %g Z: %d modes, %d overdamped: %v", v.share, len(res.Modes), len(res.Overdamped), res.Notes)
		}
		near(t, "f1", res.Modes[0].DampedFrequency, c.Expected[v.f1].Value, classT1)
		if v.f2 != "" {
			near(t, "f2", res.Modes[1].DampedFrequency, c.Expected[v.f2].Value, classT1)
		}
		for n, m := range res.Modes {
			near(t, "decay", m.Decay, c.Expected[v.decay].Value, classT1)
			near(t, "frequency", m.DampedFrequency, c.Expected[v.f1].Value+float64(n)*v.spacing, classT1)
		}
		for _, o := range res.Overdamped {
			near(t, "creep", o.Decay, c.Expected[v.decay].Value, classT1)
		}
	}
}

// C04-12: two equal lines tied by a spring.
func TestPublishedTie(t *testing.T) {
	c := cases(t)["C04-12"]
	b := &build{}
	var at [2]int
	for i := range at {
		l, j, r := b.node(mesh.Node{Fixed: true, Line: i}), b.node(mesh.Node{Line: i}), b.node(mesh.Node{Fixed: true, Line: i})
		b.piece(l, j, c.in("a"), c.in("m"), c.in("T"), 0)
		b.piece(j, r, c.in("L")-c.in("a"), c.in("m"), c.in("T"), 0)
		at[i] = j
	}
	b.link(at[0], at[1], c.in("K"), 0)
	res := find(t, &b.m, Want{Count: 6})
	want := []string{"f1_in_phase", "f1", "f2_in_phase", "f2", "f3_in_phase", "f3"}
	for i, name := range want {
		near(t, name, res.Modes[i].Frequency, c.Expected[name].Value, classT2)
		if res.Modes[i].Line != -1 || res.Modes[i].Group != 0 {
			t.Errorf("mode %d is of group %d, line %d; tied lines have no line of their own", i+1, res.Modes[i].Group, res.Modes[i].Line)
		}
	}
}

// Group 7: viscous loss, closed form.
func TestPublishedViscous(t *testing.T) {
	all := cases(t)
	c := all["C07-01"]
	b := line(c.in("m"), c.in("T"), c.in("d"), []float64{0, 42, c.in("L")}, fixed, mesh.Node{}, fixed)
	res := find(t, &b.m, Want{Count: 5})
	for _, n := range []int{1, 2, 5} {
		m := res.Modes[n-1]
		near(t, "sigma", m.Decay, c.Expected["sigma"].Value, classT1)
		near(t, "zeta", m.DampingRatio, c.Expected[fmt.Sprintf("zeta%d", n)].Value, classT1)
		near(t, "fd", m.DampedFrequency, c.Expected[fmt.Sprintf("fd%d", n)].Value, classT1)
	}
	c = all["C07-02"]
	b = line(c.in("m"), c.in("T"), c.in("d"), []float64{0, c.in("L")}, fixed, fixed)
	res = find(t, &b.m, Want{Count: 3})
	if len(res.Overdamped) != 2 {
		t.Fatalf("overdamped: %v", res.Overdamped)
	}
	near(t, "slow", res.Overdamped[0].Decay, c.Expected["slow_rate"].Value, classT1)
	near(t, "fast", res.Overdamped[1].Decay, c.Expected["fast_rate"].Value, classT1)
	near(t, "fd2", res.Modes[0].DampedFrequency, c.Expected["fd2"].Value, classT1)
	c = all["C07-06"]
	// A line whose first mode has the stated frequency.
	f := c.in("f")
	b = line(c.in("m"), c.in("m")*4*f*f, c.Expected["d"].Value, []float64{0, 1}, fixed, fixed)
	res = find(t, &b.m, Want{Count: 4})
	near(t, "zeta at f", res.Modes[0].DampingRatio, c.in("zeta"), classT1)
	near(t, "zeta at 4f", res.Modes[3].DampingRatio, c.Expected["zeta_at_4Hz"].Value, classT1)
}

// C11-01 and C11-02: a damper on a line.
func TestPublishedDamper(t *testing.T) {
	all := cases(t)
	for _, id := range []string{"C11-01", "C11-02"} {
		c := all[id]
		b := line(c.in("m"), c.in("T"), 0, []float64{0, c.in("a"), c.in("L")}, fixed, mesh.Node{Dashpot: c.in("C")}, fixed)
		res := find(t, &b.m, Want{Count: 5})
		c.frequencies(t, res, "f%d", classT2)
		toK := c.in("L") / math.Sqrt(c.in("T")/c.in("m"))
		for n := 1; n <= 3; n++ {
			m := res.Modes[n-1]
			near(t, "zeta", m.DampingRatio, c.Expected[fmt.Sprintf("zeta%d", n)].Value, classT2)
			near(t, "kL re", imag(m.S)*toK, c.Expected[fmt.Sprintf("kL%d_re", n)].Value, classT2)
			near(t, "kL im", m.Decay*toK, c.Expected[fmt.Sprintf("kL%d_im", n)].Value, classT2)
		}
	}
}
