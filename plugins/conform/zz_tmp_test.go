package conform_test

import (
	"context"
	"testing"
	"time"

	"github.com/tautspan/tautspan/engine/compare"
	"github.com/tautspan/tautspan/engine/measure"
	"github.com/tautspan/tautspan/engine/formula"
	"github.com/tautspan/tautspan/engine/scenario"
	"github.com/tautspan/tautspan/engine/solver"
	"github.com/tautspan/tautspan/plugins/characteristic"
	"github.com/tautspan/tautspan/plugins/differences"
	"github.com/tautspan/tautspan/plugins/spectral"
)

func TestTmp(t *testing.T) {
	solvers := []solver.Solver{differences.New(), spectral.New(), characteristic.New()}
	c := formula.Const
	seg := func(n string, l float64) scenario.SegmentOf[formula.Program] {
		return scenario.SegmentOf[formula.Program]{Name: n, Length: c(l), MassPerLength: c(18.4), Tension: formula.Let(0), Viscous: c(0.6), Axial: c(610e6)}
	}
	tm := &scenario.Template{Lets: []scenario.Let{{Name: "pull", Value: c(412e3), Unit: "N", Doubt: &scenario.Doubt{StandardU: c(4120)}}, {Name: "knob", Value: c(4800), Unit: "N*s/m", Doubt: &scenario.Doubt{StandardU: c(240)}}}}
	tm.Model.Lines = []scenario.LineOf[formula.Program]{{Name: "stay", Nodes: []scenario.NodeOf[formula.Program]{{Name: "deck", Fixed: true}, {Name: "clamp", Kind: scenario.Joint, Mass: c(18), Dashpots: []scenario.DashpotOf[formula.Program]{{C: formula.Let(1)}}}, {Name: "saddle", Spring: c(4.2e6)}},
		Segments: []scenario.SegmentOf[formula.Program]{seg("lower", 12), seg("upper", 148.5)}}}
	at := func(x float64) scenario.PlaceOf[formula.Program] {
		return scenario.PlaceOf[formula.Program]{Node: -1, Segment: 1, Offset: c(x)}
	}
	tm.Model.Plucks = []scenario.PluckOf[formula.Program]{{Name: "snap", At: at(67), Force: c(2000)}}
	tm.Model.Watches = []scenario.WatchOf[formula.Program]{{Name: "mid", At: at(68), Quantities: []scenario.Quantity{scenario.Displacement, scenario.Velocity}},
		{Name: "hold", At: scenario.PlaceOf[formula.Program]{Node: 0}, Quantities: []scenario.Quantity{scenario.Force}},
		{Name: "whole", Along: true, Span: scenario.SpanOf{Segment: -1}, Quantities: []scenario.Quantity{scenario.Displacement}}}
	tm.Model.Run = scenario.RunOf[formula.Program]{ForGiven: true, For: c(40), EveryGiven: true, Every: c(0.005), AgreeGiven: true, Agree: c(0.01)}
	m := func(k scenario.MeasureKind, src string, args ...formula.Program) []scenario.MeasureOf[formula.Program] {
		return []scenario.MeasureOf[formula.Program]{{Kind: k, Source: src, Watch: 0, ModeFrom: 1, ModeTo: 4, Args: args}}
	}
	tm.Requires = []scenario.Require{
		{Source: "peak", Value: formula.Arg(0), Limit: c(0.25), Relation: scenario.Less, Unit: "m", Measures: m(scenario.Peak, "peak")},
		{Source: "damping", Value: formula.Arg(0), Limit: c(0.02), Relation: scenario.Greater, Unit: "1", Measures: m(scenario.DampingRatio, "damping")},
		{Source: "settle", Value: formula.Arg(0), Limit: c(35), Relation: scenario.Less, Unit: "s", Measures: m(scenario.Settle, "settle", c(0.05))},
	}
	t0 := time.Now()
	s, err := measure.New(tm, nil, measure.Options{Workers: 2})
	if err != nil {
		t.Fatal(err)
	}
	asked, el := s.Asked()
	out, err := compare.Run(context.Background(), s.Centre().Mesh, solvers, compare.Options{Agree: 0.01, Asked: asked, EnergyLeft: el})
	if err != nil {
		t.Fatal(err)
	}
	t.Log(time.Since(t0), out.Verdict, out.Asked, out.Work)
	for _, ch := range out.Channels {
		t.Log(ch.Name, ch.Verdict, ch.ResolvingPower, ch.Difference, out.Voices[ch.Best].Name)
		for i, f := range ch.Solvers {
			t.Logf("   %s %+v", out.Voices[i].Name, f)
		}
		for _, o := range ch.Observables {
			if o.Verdict != compare.Agree {
				t.Logf("%v %+v", o.Kind, o)
			}
		}
	}
	for _, v := range out.Voices {
		t.Log(v.Name, v.Levels, v.Cells, v.Steps, v.Exhausted, v.Fault, v.Energy.Unaccounted(), v.Energy, v.Notes)
	}
	t0 = time.Now()
	a, err := s.Answer(context.Background(), out)
	if err != nil {
		t.Fatal(err)
	}
	for _, r := range a.Requirements {
		t.Logf("%s: %v %+v\n%+v", r.Of.Source, r.Judgement, r.Value, r.Note)
	}
	t.Log(time.Since(t0), a.Changes)
}
