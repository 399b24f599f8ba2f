package characteristic

import (
	"fmt"
	"math"
	"slices"

	"github.com/tautspan/tautspan/engine/formula"
	"github.com/tautspan/tautspan/engine/mesh"
	"github.com/tautspan/tautspan/engine/scenario"
	"github.com/tautspan/tautspan/engine/solver"
)

// run is one solution in the making.
type run struct {
	m          *mesh.Mesh
	step       float64 // s
	tol        float64 // s, times closer than this are one
	hrel       float64
	k          int
	lines      []*line
	sources    []*source
	winds      []*wind
	lattices   []*lattice
	sags       []*sagging
	groups     []group
	joints     []*joint // of every node
	clusters   []*cluster
	checkEvery int
	coarsest   float64 // s, largest lattice step
	series     [][][]float64
	watches    []watch
	row        int // rows recorded
	notes      []string
	start      float64 // J, stored at t = 0
	most       float64
	rolled     float64 // J, work of rolling loads
	end        float64
	closing    energy
	closed     bool
}

// group is clusters that step together.
type group struct {
	substeps int
	clusters []*cluster
}

// assemble builds everything at t = 0.
func assemble(m *mesh.Mesh, lay *Layout) (*run, error) {
	r := &run{m: m, step: lay.Step}
	longest := lay.Step
	for i := range m.Pieces {
		longest = math.Max(longest, m.Pieces[i].TravelTime())
	}
	r.hrel = lay.Step / longest
	const ulps = 8 * 0x1p-52
	r.tol = math.Max(1e-9*lay.Step, ulps*m.Timing.End())
	r.coarsest = lay.coarsest(m)
	lag := window(m)
	r.makeLines(lay, lag)
	loads := r.makeLoads(lay, lag)
	if err := r.makeClusters(lay, loads); err != nil {
		return nil, err
	}
	r.makeLattices(lay, lag)
	r.makeSags(lag)
	r.makeWatches()
	cost := 1
	for _, g := range r.groups {
		cost += g.substeps * len(g.clusters)
	}
	for _, n := range lay.Cells {
		cost += n / 4
	}
	r.checkEvery = max(1, 20000/cost)
	r.series = solver.NewSeries(m)
	r.start = r.energyAt(0)
	r.most = r.start
	return r, nil
}

func (r *run) makeLines(lay *Layout, lag float64) {
	m := r.m
	for i := range m.Pieces {
		p := &m.Pieces[i]
		w := &line{length: p.Length, c: p.WaveSpeed(), z: p.Impedance(), tau: p.TravelTime(), tension: p.Tension,
			mass: p.MassPerLength, gamma: p.Viscous / (2 * p.MassPerLength), from: p.From, to: p.To, stub: lay.Stub[i]}
		w.sent[0] = r.newSent(lay, p.From, w.tau+2*lag+10*lay.Step+r.coarsest)
		w.sent[1] = r.newSent(lay, p.To, w.tau+2*lag+10*lay.Step+r.coarsest)
		r.launch(w, p)
		for k := range m.Rolls {
			if roll, ok := rollsOn(m, &m.Rolls[k], p, w); ok {
				w.rolls = append(w.rolls, roll)
			}
		}
		r.lines = append(r.lines, w)
	}
}

func (r *run) newSent(lay *Layout, node int, span float64) *history {
	delta := lay.Step / float64(lay.Substeps[node])
	room := min(4096, max(24, ringSize(delta, span)/6))
	return newHistory(delta, span, room, r.tol)
}

// forceOf makes a load of a bound force: at place x, times share.
func forceOf(h *scenario.History, end, x, share, tol float64) *load {
	program := h.Value
	return &load{value: func(t float64) float64 { return share * program.At(t, x) }, breaks: breaksOf(h.Breaks, end, tol)}
}

// breaksOf is the breaks from t = 0 to the end in order, t = 0 among them.
func breaksOf(given []float64, end, tol float64) []float64 {
	all := []float64{0}
	for _, t := range given {
		if t > 0 && t <= end {
			all = append(all, t)
		}
	}
	slices.Sort(all)
	out := all[:1]
	for _, t := range all[1:] {
		if t > out[len(out)-1]+tol {
			out = append(out, t)
		}
	}
	return out
}

// makeLoads makes the sources inside pieces and returns the loads at nodes.
func (r *run) makeLoads(lay *Layout, lag float64) map[int][]*load {
	m := r.m
	end := m.Timing.End() + lag + 100*lay.Step
	at := make(map[int][]*load)
	for i := range m.Pushes {
		p := &m.Pushes[i]
		l := forceOf(&p.Force, end, 0, 1, r.tol)
		if p.At.Node >= 0 {
			at[p.At.Node] = append(at[p.At.Node], l)
			continue
		}
		w := r.lines[p.At.Piece]
		switch {
		case p.At.At <= 0:
			at[w.from] = append(at[w.from], l)
		case p.At.At >= w.length:
			at[w.to] = append(at[w.to], l)
		default:
			r.addSource(w, p.At.At, l, lag)
		}
	}
	for i := range m.Presses {
		p := &m.Presses[i]
		for _, part := range p.Parts {
			if w := r.lines[part.Piece]; w.stub {
				// So short a piece has no lattice: half the force at each end.
				share := 0.5 * (math.Min(part.To, w.length) - math.Max(part.From, 0))
				l := forceOf(&p.Force, end, part.Origin+0.5*(part.From+part.To), share, r.tol)
				at[w.from], at[w.to] = append(at[w.from], l), append(at[w.to], l)
			}
		}
	}
	return at
}

func (r *run) addSource(w *line, x float64, l *load, lag float64) {
	s := &source{p: w, x: x, half: 1 / (2 * w.z), gamma: w.gamma, load: l}
	delta := r.step
	if w.stub {
		delta = w.sent[0].delta
	}
	span := w.tau + 2*lag + float64(20+ahead)*r.step + r.coarsest
	s.h = newHistory(delta, span, min(4096, max(24, ringSize(delta, span)/6)), r.tol)
	s.per = int(math.Round(r.step / delta))
	for i := 0; i < ahead*s.per; i++ {
		s.advance()
	}
	w.sources = append(w.sources, s)
	r.sources = append(r.sources, s)
}

// makeLattices makes the winds and lattices of pieces that need them.
func (r *run) makeLattices(lay *Layout, lag float64) {
	m := r.m
	places := make([][]float64, len(m.Pieces))
	for i := range m.Channels {
		for _, s := range m.Channels[i].Spots {
			if s.Node < 0 && s.At > 0 && s.At < m.Pieces[s.Piece].Length && !slices.Contains(places[s.Piece], s.At) {
				places[s.Piece] = append(places[s.Piece], s.At)
			}
		}
	}
	for i, w := range r.lines {
		for _, s := range w.sources {
			if !slices.Contains(places[i], s.x) {
				places[i] = append(places[i], s.x)
			}
		}
	}
	pressed := pressedPieces(m)
	end := m.Timing.End() + lag + 100*lay.Step
	for i, w := range r.lines {
		n := lay.Cells[i]
		if n == 0 {
			continue
		}
		span := 2*lag + 12*lay.Step + 12*w.tau/float64(n)
		if pressed[i] {
			w.wind = newWind(w, n, span, r.tol, places[i])
			for k := range m.Presses {
				p := &m.Presses[k]
				for _, part := range p.Parts {
					if part.Piece == i {
						w.wind.press(p, part, breaksOf(p.Force.Breaks, end, r.tol), p.Force.Value.UsesArg(formula.ArgX))
					}
				}
			}
			w.wind.begin()
			r.winds = append(r.winds, w.wind)
		}
		w.lattice = newLattice(w, n, span, r.tol, places[i])
		p := &m.Pieces[i]
		w.lattice.begin(
			func(x float64) float64 { f, _ := w.carried(x, 0, -1, 0); return f },
			func(x float64) float64 { _, g := w.carried(x, 0, -1, 0); return g },
			func(x float64) float64 { return startRate(p, x) })
		r.lattices = append(r.lattices, w.lattice)
	}
	for _, s := range r.sources {
		s.taps = s.p.tapsAt(s.x)
		f, g := s.p.waves(s.x, 0, &s.taps, 0, -1)
		s.u = f + g
	}
	for _, w := range r.winds {
		for w.step < windAhead-1 {
			w.advance()
		}
	}
}

// note adds a remark once.
func (r *run) note(format string, args ...any) {
	s := fmt.Sprintf(format, args...)
	if !slices.Contains(r.notes, s) {
		r.notes = append(r.notes, s)
	}
}
