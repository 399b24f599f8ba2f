package scenario

import (
	"errors"
	"math"
	"strings"
	"testing"

	"github.com/tautspan/tautspan/engine/formula"
)

// sample is one line of two segments over two lets, the second made of the first.
func sample() *Template {
	c := formula.Const
	t := &Template{Lets: []Let{
		{Name: "pull", Value: c(20000), Unit: "N", Doubt: &Doubt{StandardU: formula.Mul(c(0.02), formula.Let(0))}},
		{Name: "half", Value: formula.Div(formula.Let(0), c(2)), Unit: "N"},
	}}
	seg := func(name string, length float64) SegmentOf[formula.Program] {
		return SegmentOf[formula.Program]{Name: name, Length: c(length), MassPerLength: c(2), Tension: formula.Let(0)}
	}
	t.Model.Lines = []LineOf[formula.Program]{{
		Name: "l",
		Nodes: []NodeOf[formula.Program]{
			{Name: "a", Fixed: true},
			{Name: "j", Kind: Joint, Mass: c(3), Dashpots: []DashpotOf[formula.Program]{{C: formula.Let(1), Bracket: true, Through: c(1e6)}}},
			{Name: "b", Fixed: true},
		},
		Segments: []SegmentOf[formula.Program]{seg("s", 10), seg("u", 30)},
	}}
	t.Model.Watches = []WatchOf[formula.Program]{{Name: "w", At: PlaceOf[formula.Program]{Node: -1, Segment: 1, Offset: c(5)}, Quantities: []Quantity{Displacement}}}
	return t
}

func TestValuesFollowOverrides(t *testing.T) {
	tpl := sample()
	v, err := tpl.Values(map[string]float64{"pull": 30000})
	if err != nil || v[0] != 30000 || v[1] != 15000 {
		t.Fatalf("got %v, %v", v, err)
	}
	if u := tpl.StandardU(v); math.Abs(u[0]-600) > 1e-9 || u[1] != 0 {
		t.Errorf("standard uncertainties %v, want 600 and 0", u)
	}
	var pe *PathError
	if _, err := tpl.Values(map[string]float64{"push": 1}); !errors.As(err, &pe) || pe.Path != "let.push" {
		t.Errorf("unknown let: %v", err)
	}
}

func TestBindGivesNumbers(t *testing.T) {
	tpl := sample()
	v, _ := tpl.Values(nil)
	net, err := tpl.Bind(v)
	if err != nil {
		t.Fatal(err)
	}
	d := net.Lines[0].Nodes[1].Dashpots[0]
	if d.C != 10000 || d.Through != 1e6 {
		t.Errorf("dashpot %+v", d)
	}
	if x := net.Travel(net.Watches[0].At); x != 15 {
		t.Errorf("watch at %g m, want 15", x)
	}
	// Twenty round trips of 40 m at 100 m/s are 16 s, rounded down to 10 s.
	if net.Run.For != 10 || net.Run.Agree != 0.01 || net.Run.Every != 0.002 {
		t.Errorf("defaults %+v", net.Run)
	}
}

func TestBindRefuses(t *testing.T) {
	for _, c := range []struct {
		path, word string
		change     func(*Template)
	}{
		{"line.l.s.tension", "greater than zero", func(t *Template) { t.Lets[0].Value = formula.Const(-1) }},
		{"line.l.j.mass", "negative", func(t *Template) { t.Model.Lines[0].Nodes[1].Mass = formula.Const(-3) }},
		{"line.l.u.length", "no finite value", func(t *Template) {
			t.Model.Lines[0].Segments[1].Length = formula.Apply(formula.OpLog, formula.Const(-1))
		}},
		{"watch.w.at", "outside", func(t *Template) { t.Model.Watches[0].At.Offset = formula.Const(30.1) }},
		{"run.every", "rows", func(t *Template) {
			t.Model.Run = RunOf[formula.Program]{ForGiven: true, EveryGiven: true, For: formula.Const(1e9), Every: formula.Const(1)}
		}},
		{"run.every", "no record", func(t *Template) {
			t.Model.Run = RunOf[formula.Program]{ForGiven: true, EveryGiven: true, For: formula.Const(1), Every: formula.Const(2)}
		}},
	} {
		tpl := sample()
		c.change(tpl)
		v, err := tpl.Values(nil)
		if err == nil {
			_, err = tpl.Bind(v)
		}
		var pe *PathError
		if !errors.As(err, &pe) || pe.Path != c.path || !strings.Contains(pe.What, c.word) {
			t.Errorf("want %s … %s, got %v", c.path, c.word, err)
		}
	}
}

// A place given by a sum of lengths that rounds past the end is at the end.
func TestPlaceSnapsToEnds(t *testing.T) {
	tpl := sample()
	tpl.Model.Watches[0].At.Offset = formula.Const(30 * (1 + 1e-13))
	v, _ := tpl.Values(nil)
	net, err := tpl.Bind(v)
	if err != nil || net.Watches[0].At.Node != 2 {
		t.Fatalf("node %v, %v", net, err)
	}
}

func TestHistoryIsNothingBeforeTheStart(t *testing.T) {
	h := History{Value: formula.Const(5)}
	if h.At(-1e-9, 0) != 0 || h.At(0, 0) != 5 {
		t.Error("a history must be 0 before t = 0")
	}
}

func BenchmarkBind(b *testing.B) {
	tpl := sample()
	v, _ := tpl.Values(nil)
	b.ReportAllocs()
	for b.Loop() {
		if _, err := tpl.Bind(v); err != nil {
			b.Fatal(err)
		}
	}
}
