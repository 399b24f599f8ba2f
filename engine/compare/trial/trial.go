// Package trial tries the comparison itself: on random lines with healthy
// solvers, where any alarm is false, and with one of them made wrong on purpose,
// where silence is a miss.
//
// It is support for tests. It knows no solver; whoever calls brings them.
package trial

import (
	"context"
	"errors"
	"fmt"
	"math/rand/v2"
	"sync"

	"github.com/tautspan/tautspan/engine/compare"
	"github.com/tautspan/tautspan/engine/formula"
	"github.com/tautspan/tautspan/engine/mesh"
	"github.com/tautspan/tautspan/engine/scenario"
	"github.com/tautspan/tautspan/engine/solver"
)

// Line is a random line of three segments: fixed support, a joint with a mass, a
// joint with a dashpot and on every other line a spring, a support with a spring.
// It is hit by a half sine at the mass, plucked in the second segment, or lifted
// by a rising force there. It runs for about so many passages of a wave and is
// watched in each segment and at the springy support.
func Line(random *rand.Rand, passages float64) (*mesh.Mesh, error) {
	between := func(a, b float64) float64 { return a + (b-a)*random.Float64() }
	tension := between(5e3, 4e4)
	net := &scenario.Network{}
	line := scenario.Line{Name: "l"}
	travel := 0.0
	for i := range 3 {
		s := scenario.Segment{Name: fmt.Sprintf("s%d", i), Length: between(1.2, 5), MassPerLength: between(0.8, 4), Tension: tension}
		if random.IntN(3) == 0 {
			s.Viscous = between(0.1, 2)
		}
		p := mesh.Piece{Length: s.Length, MassPerLength: s.MassPerLength, Tension: tension}
		travel += p.TravelTime()
		line.Segments = append(line.Segments, s)
	}
	dashpot := scenario.Node{Name: "d", Kind: scenario.Joint, Dashpots: []scenario.DashpotOf[float64]{{C: between(50, 400)}}}
	if random.IntN(2) == 0 {
		dashpot.Spring = between(1e3, 2e4)
	}
	line.Nodes = []scenario.Node{
		{Name: "a", Kind: scenario.Support, Fixed: true},
		{Name: "m", Kind: scenario.Joint, Mass: between(0.3, 4)},
		dashpot,
		{Name: "b", Kind: scenario.Support, Spring: between(2e4, 5e5)},
	}
	net.Lines = []scenario.Line{line}
	inside := scenario.Place{Node: -1, Segment: 1, Offset: line.Segments[1].Length * between(0.2, 0.8)}
	time, size := travel*between(0.15, 0.4), between(100, 800)
	argT := formula.Arg(formula.ArgT)
	push := func(at scenario.Place, force formula.Program) {
		net.Pushes = []scenario.PushOf[float64]{{Name: "hit", At: at, Force: scenario.History{Value: force, Breaks: []float64{0, time}}}}
	}
	switch random.IntN(3) {
	case 0:
		push(scenario.Place{Node: 1}, formula.Apply(formula.OpHalfSine, argT, formula.Const(size), formula.Const(time)))
	case 1:
		net.Plucks = []scenario.PluckOf[float64]{{Name: "hit", At: inside, Force: size}}
	case 2:
		push(inside, formula.Apply(formula.OpRamp, argT, formula.Const(size), formula.Const(0), formula.Const(time)))
	}
	for i, s := range line.Segments {
		at := scenario.Place{Node: -1, Segment: i, Offset: s.Length * between(0.3, 0.7)}
		quantities := []scenario.Quantity{scenario.Displacement}
		if i == 1 {
			quantities = append(quantities, scenario.Velocity, scenario.Slope)
		}
		net.Watches = append(net.Watches, scenario.Watch{Name: fmt.Sprintf("w%d", i), At: at, Quantities: quantities})
	}
	net.Watches = append(net.Watches, scenario.Watch{Name: "end", At: scenario.Place{Node: 3}, Quantities: []scenario.Quantity{scenario.Displacement, scenario.Force}})
	rows := 40 * passages
	net.Run = scenario.RunOf[float64]{For: passages * travel, Every: passages * travel / rows}
	return mesh.Build(net)
}

// Defect is a mistake that a solver might make.
type Defect struct {
	Name  string
	Voice int // index of the solver that makes it
	Spoil func(m *mesh.Mesh)
}

// Defects are mistakes on lines such as Line gives: from one that turns the sign
// of a reflection, which can be heard at once, down to a thousandth of
// one segment's mass. voices is the number of solvers; the mistakes go around.
func Defects(voices int) []Defect {
	mass := func(i int, factor float64) func(m *mesh.Mesh) {
		return func(m *mesh.Mesh) { m.Pieces[i].MassPerLength *= factor }
	}
	list := []Defect{
		{Name: "sign of the reflection at the fixed support turned", Spoil: func(m *mesh.Mesh) { m.Nodes[m.Pieces[0].From].Fixed = false }},
		{Name: "springy support taken as free", Spoil: func(m *mesh.Mesh) { m.Nodes[m.Pieces[2].To].Spring = 0 }},
		{Name: "two segments swapped", Spoil: func(m *mesh.Mesh) {
			m.Pieces[0].MassPerLength, m.Pieces[1].MassPerLength = m.Pieces[1].MassPerLength, m.Pieces[0].MassPerLength
			m.Pieces[0].Viscous, m.Pieces[1].Viscous = m.Pieces[1].Viscous, m.Pieces[0].Viscous
		}},
		{Name: "one segment's mass +1 %", Spoil: mass(1, 1.01)},
		{Name: "one segment's mass +0.1 %", Spoil: mass(1, 1.001)},
		{Name: "dashpot -5 %", Spoil: func(m *mesh.Mesh) { m.Nodes[m.Pieces[1].To].Dashpot *= 0.95 }},
		{Name: "clamp mass +1 %", Spoil: func(m *mesh.Mesh) { m.Nodes[m.Pieces[0].To].Mass *= 1.01 }},
	}
	for i := range list {
		list[i].Voice = i % voices
	}
	return list
}

// spoilt is a solver that sees a spoilt mesh.
type spoilt struct {
	solver.Solver
	spoil func(m *mesh.Mesh)
}

// Spoilt is a solver that makes a mistake: it solves another network than it is
// given, which is left as it is.
func Spoilt(s solver.Solver, spoil func(m *mesh.Mesh)) solver.Solver { return spoilt{s, spoil} }

func (s spoilt) seen(m *mesh.Mesh) *mesh.Mesh {
	other := *m
	other.Nodes = append([]mesh.Node(nil), m.Nodes...)
	other.Pieces = append([]mesh.Piece(nil), m.Pieces...)
	other.Links = append([]mesh.Link(nil), m.Links...)
	s.spoil(&other)
	return &other
}

func (s spoilt) Plan(m *mesh.Mesh, req solver.Request) (solver.Plan, error) {
	return s.Solver.Plan(s.seen(m), req)
}

func (s spoilt) Solve(ctx context.Context, m *mesh.Mesh, req solver.Request, progress func(float64)) (*solver.Result, error) {
	return s.Solver.Solve(ctx, s.seen(m), req, progress)
}

// remembering keeps the solutions of one mesh, so that many comparisons with the
// same healthy solver solve once.
type remembering struct {
	solver.Solver
	lock sync.Mutex
	kept map[[2]int]solver.Result
}

// Remembering is a solver that solves each level of one mesh once. It is for one
// mesh only and ignores Request.Freeze.
func Remembering(s solver.Solver) solver.Solver {
	return &remembering{Solver: s, kept: map[[2]int]solver.Result{}}
}

func (s *remembering) Solve(ctx context.Context, m *mesh.Mesh, req solver.Request, progress func(float64)) (*solver.Result, error) {
	k := [2]int{req.Level, req.Effort}
	s.lock.Lock()
	r, ok := s.kept[k]
	s.lock.Unlock()
	if ok {
		return &r, nil
	}
	got, err := s.Solver.Solve(ctx, m, req, progress)
	if err != nil {
		return nil, err
	}
	r = *got // the comparison drops the records of results it is done with
	s.lock.Lock()
	s.kept[k] = r
	s.lock.Unlock()
	return &r, nil
}

// Score counts what came of one kind of trial.
type Score struct {
	Name     string
	Trials   int
	Raised   int      // the comparison said that solvers differ
	Named    int      // and named the one that was spoilt, and no other
	Misnamed int      // and named another
	Settled  int      // the comparison said that they agree
	Worst    float64  // largest ratio of a difference to its bars among the governed figures and records
	Power    float64  // mean resolving power, share
	Alarms   []string // of the first few alarms, what differs
}

// Study tries so many random lines, first with healthy solvers (the first Score)
// and then with each defect. The same seed gives the same lines.
func Study(ctx context.Context, solvers []solver.Solver, lines int, passages float64, seed uint64, options compare.Options) ([]Score, error) {
	defects := Defects(len(solvers))
	scores := make([]Score, 1+len(defects))
	scores[0].Name = "healthy"
	for i, d := range defects {
		scores[1+i].Name = d.Name + ", by " + solvers[d.Voice].Name()
	}
	random := rand.New(rand.NewPCG(seed, 1))
	for range lines {
		m, err := Line(random, passages)
		if err != nil {
			return nil, err
		}
		healthy := make([]solver.Solver, len(solvers))
		for i, s := range solvers {
			healthy[i] = Remembering(s)
		}
		if err := scores[0].add(ctx, m, healthy, "", options); err != nil {
			return nil, err
		}
		for i, d := range defects {
			some := append([]solver.Solver(nil), healthy...)
			some[d.Voice] = Spoilt(solvers[d.Voice], d.Spoil)
			if err := scores[1+i].add(ctx, m, some, solvers[d.Voice].Name(), options); err != nil {
				return nil, err
			}
		}
	}
	for i := range scores {
		scores[i].Power /= float64(max(1, scores[i].Trials))
	}
	return scores, nil
}

// alarmsKept is how many lines of Score.Alarms are kept.
const alarmsKept = 12

func (s *Score) add(ctx context.Context, m *mesh.Mesh, solvers []solver.Solver, culprit string, options compare.Options) error {
	out, err := compare.Run(ctx, m, solvers, options)
	if err != nil {
		return err
	}
	for _, v := range out.Voices {
		if !v.Usable() {
			return errors.New("solver " + v.Name + " took no part: " + v.Reason())
		}
	}
	s.Trials++
	power := 0.0
	named, misnamed := false, false
	for _, ch := range out.Channels {
		power += ch.ResolvingPower / float64(len(out.Channels))
		named = named || culprit != "" && ch.OddOneOut == culprit
		misnamed = misnamed || ch.OddOneOut != "" && ch.OddOneOut != culprit
		for _, o := range ch.Observables {
			for _, p := range o.Pairs {
				if o.Governed || o.Kind == compare.Record {
					s.Worst = max(s.Worst, p.Ratio)
				}
				if o.Verdict == compare.Differ && p.Ratio > 2 && !p.Unbacked && !p.Immaterial && len(s.Alarms) < alarmsKept {
					s.Alarms = append(s.Alarms, fmt.Sprintf("line %d (jump %d): %s %v, %s against %s: ratio %.3g, values %.9g and %.9g, bars %.2g and %.2g, levels to %d and %d",
						s.Trials, m.Jump, ch.Name, o.Kind, out.Voices[p.A].Name, out.Voices[p.B].Name, p.Ratio, o.Values[p.A], o.Values[p.B], o.Bars[p.A], o.Bars[p.B], out.Voices[p.A].Levels[2], out.Voices[p.B].Levels[2]))
				}
			}
		}
	}
	s.Power += power
	switch out.Verdict {
	case compare.Differ:
		s.Raised++
	case compare.Agree:
		s.Settled++
	}
	if misnamed {
		s.Misnamed++
	} else if named {
		s.Named++
	}
	return nil
}

// String is the score as one line.
func (s Score) String() string {
	return fmt.Sprintf("%-70s alarm %3d of %3d, culprit named %3d, another named %2d, agree %3d, largest ratio %8.2f, resolving power %.3f %%",
		s.Name, s.Raised, s.Trials, s.Named, s.Misnamed, s.Settled, s.Worst, 100*s.Power)
}
