package fronts

import (
	"math"
	"testing"

	"github.com/tautspan/tautspan/engine/mesh"
)

// walker follows every path by itself, without merging: an independent recursion
// on one line with dashpots.
type walker struct {
	m     *mesh.Mesh
	end   float64
	watch mesh.Spot
	hit   func(t, a float64)        // at the watch
	met   func(node int, t float64) // at a node; nil: not asked
}

func (w *walker) follow(piece int, forward bool, s, t, a float64) {
	m := w.m
	p := &m.Pieces[piece]
	c := p.WaveSpeed()
	gamma := p.Viscous / (2 * p.MassPerLength)
	left := s
	if forward {
		left = p.Length - s
	}
	if piece == w.watch.Piece {
		d := w.watch.At - s
		if !forward {
			d = -d
		}
		if d > 0 && t+d/c <= w.end {
			w.hit(t+d/c, a*math.Exp(-gamma*d/c))
		}
	}
	t += left / c
	a *= math.Exp(-gamma * left / c)
	if t > w.end {
		return
	}
	node := p.From
	if forward {
		node = p.To
	}
	if math.Abs(a) < 1e-16 { // where pieces are alike nothing comes back
		return
	}
	if w.met != nil {
		w.met(node, t)
	}
	n := m.Nodes[node]
	other := -1
	sum := p.Impedance()
	if forward && piece+1 < len(m.Pieces) {
		other = piece + 1
	} else if !forward && piece > 0 {
		other = piece - 1
	}
	if other >= 0 {
		sum += m.Pieces[other].Impedance()
	}
	v := 2 * p.Impedance() * a / (sum + n.Dashpot)
	if n.Fixed {
		v = 0
	}
	start := 0.0
	if forward {
		start = p.Length
	}
	w.follow(piece, !forward, start, t, v-a)
	if other >= 0 && !n.Fixed {
		start = 0
		if !forward {
			start = m.Pieces[other].Length
		}
		w.follow(other, forward, start, t, v)
	}
}

// The ledger's superposed steps equal those of every path taken by itself. Both
// are exact; about 1e3 paths of rounding 1e-16 relative: 1e-12.
func TestAgainstEveryPath(t *testing.T) {
	nodes := []mesh.Node{{Fixed: true}, {Dashpot: 30}, {Dashpot: 80}, {}}
	m := lineOf(6.4, nodes, seg{100, 1, 10000, 0.1}, seg{100, 2, 20000, 0}, seg{70, 3, 10000, 0.3})
	m.Pushes = []mesh.Push{{Name: "on", At: in(0, 30), Force: stepAt(200, 0)}}
	watchAt(m, "w", in(2, 21))
	l := trace1(t, m, Options{})
	type step struct{ t, a float64 }
	var all []step
	w := walker{m: m, end: 6.4, watch: in(2, 21), hit: func(t, a float64) { all = append(all, step{t, a}) }}
	z := m.Pieces[0].Impedance()
	for _, forward := range []bool{true, false} {
		w.follow(0, forward, 30, 0, 200/(2*z))
	}
	for i := 0; i <= 200; i++ {
		at := 6.39 * float64(i) / 200
		got, want := 0.0, 0.0
		for _, a := range l.Arrivals {
			if a.Time <= at {
				got += a.Amplitude
			}
		}
		for _, s := range all {
			if s.t <= at {
				want += s.a
			}
		}
		near(t, "velocity", got, want, 1e-12)
	}
	merged := 0
	for _, a := range l.Arrivals {
		merged += a.Merged
	}
	if merged != len(all) {
		t.Errorf("%d paths merged into %d arrivals, brute force finds %d paths", merged, len(l.Arrivals), len(all))
	}
}

// The number of meetings is that of the distinct (node, time) that single paths
// come to. Four segments of 1.3, 1.8, 4.7 and 2.2 m at 20 kN, hit at the first
// joint, a dashpot at the third.
func TestCountOfMeetings(t *testing.T) {
	const end = 0.16
	nodes := []mesh.Node{{Fixed: true}, {}, {}, {Dashpot: 150}, {Dashpot: 90}}
	m := lineOf(end, nodes, seg{1.3, 2, 20000, 0}, seg{1.8, 2, 20000, 0}, seg{4.7, 3.5, 20000, 0}, seg{2.2, 2, 20000, 0})
	m.Pushes = []mesh.Push{{Name: "hit", At: on(1), Force: stepAt(1, 0)}}
	watchAt(m, "w", on(2))
	type place struct{ node, tick int }
	met := map[place]bool{}
	w := walker{m: m, end: end, watch: on(0), met: func(node int, t float64) { met[place{node, int(math.Round(t * 1e10))}] = true }}
	z := m.Pieces[0].Impedance()
	w.follow(0, false, 1.3, 0, 1/(2*z))
	w.follow(1, true, 0, 0, 1/(2*z))
	full := trace1(t, m, Options{})
	if full.Meetings != len(met) {
		t.Errorf("%d meetings, single paths come to %d", full.Meetings, len(met))
	}
	last := 0
	for _, p := range []float64{0.1, 1e-2, 1e-3, 1e-4} {
		l := trace1(t, m, Options{Prune: p})
		if l.Meetings < last || l.Meetings > full.Meetings {
			t.Errorf("%d meetings at %g", l.Meetings, p)
		}
		last = l.Meetings
	}
}

// What pruning drops bounds the error of any record of the quantity.
func TestPruningBound(t *testing.T) {
	nodes := []mesh.Node{{Fixed: true}, {Dashpot: 30}, {Dashpot: 10}, {}}
	m := lineOf(30, nodes, seg{100, 1, 10000, 0.02}, seg{141, 2, 20000, 0}, seg{77, 3, 10000, 0})
	m.Pushes = []mesh.Push{{Name: "on", At: in(0, 30), Force: stepAt(200, 0)}}
	watchAt(m, "w", in(2, 21))
	full := trace1(t, m, Options{Most: 200000})
	cut := trace1(t, m, Options{Prune: 0.02})
	if cut.Meetings >= full.Meetings || cut.LostAmplitude == 0 || cut.PrunedBelow != 0.02 {
		t.Fatalf("%d against %d meetings", cut.Meetings, full.Meetings)
	}
	at := func(l *Ledger, t float64) (v float64) {
		for _, a := range l.Arrivals {
			if a.Time <= t {
				v += a.Amplitude
			}
		}
		return v
	}
	worst := 0.0
	for i := 0; i <= 1000; i++ {
		tm := 0.03 * float64(i)
		worst = math.Max(worst, math.Abs(at(full, tm)-at(cut, tm)))
	}
	if worst == 0 || worst > cut.Accounts[0].LostAmplitude {
		t.Errorf("off by %g, bound %g", worst, cut.Accounts[0].LostAmplitude)
	}
}
