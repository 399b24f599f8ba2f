package transform

import (
	"context"
	"fmt"
	"math"
	"runtime"
	"sync"
	"sync/atomic"

	"gonum.org/v1/gonum/dsp/fourier"

	"github.com/tautspan/tautspan/engine/mesh"
	"github.com/tautspan/tautspan/engine/solver"
)

const (
	name    = "transform"
	version = "1"
	// known is what this solver represents beyond a taut string.
	known = mesh.Bending | mesh.VaryingTension | mesh.Sagging | mesh.InternalLoss | mesh.Hysteretic | mesh.TurningJoint
)

// Solver inverts the exact dynamic stiffness. The zero value is ready.
type Solver struct{}

// New returns the solver.
func New() solver.Solver { return Solver{} }

// Name is the solver's word.
func (Solver) Name() string { return name }

// Version changes whenever answers may change.
func (Solver) Version() string { return version }

// fastest is the share of the wave speed above which a rolling load is refused:
// at the wave speed itself a string has no steady answer.
const fastest = 0.95

// Refuses lists what the solver cannot represent.
func (Solver) Refuses(m *mesh.Mesh) []string {
	out := m.Unknown(known)
	for _, r := range m.Rolls {
		for _, k := range m.Lines[r.Line].Pieces {
			if p := &m.Pieces[k]; p.TensionRise != 0 {
				out = append(out, "takes rolling loads on lines of even tension only")
				break
			} else if p.Bending == 0 && r.Speed > fastest*p.WaveSpeed() && r.Speed < p.WaveSpeed()/fastest {
				out = append(out, fmt.Sprintf("the load %s rolls at the wave speed", r.Name))
				break
			}
		}
	}
	for i := range m.Pieces {
		if p := &m.Pieces[i]; p.Internal > 0 && p.Given != nil {
			out = append(out, "takes no start shape along a line with internal loss (a pluck it does)")
			break
		}
	}
	if len(m.Nodes) > nodesMost {
		out = append(out, fmt.Sprintf("takes %d nodes at most; there are %d", nodesMost, len(m.Nodes)))
	}
	return out
}

// nodesMost keeps one frequency within a millisecond or so.
const nodesMost = 2000

// job is one solution.
type job struct {
	m      *mesh.Mesh
	grid   *grid
	net    *network
	probes [][]*probe
	plan   solver.Plan
}

// workUnit turns the counts of a plan into cell-steps: measured on three segments,
// a count takes 6 ns of two cores and a cell-step of the differences 1 to 1.5 of one.
const workUnit = 8

// planOf works out sizes without the network.
func planOf(m *mesh.Mesh, req solver.Request) (*grid, solver.Plan, error) {
	g, err := newGrid(m, req)
	if err != nil {
		return nil, solver.Plan{}, err
	}
	elements, probes := int64(0), int64(0)
	at, _ := cuts(m, req.Level)
	for i := range at {
		cost := int64(len(at[i])) * 150
		if m.Pieces[i].Bending > 0 {
			cost *= 10
		}
		if m.Pieces[i].Given != nil || m.Pieces[i].StartRate != nil {
			cost += 64 * 150
		}
		elements += cost
	}
	loads := int64(len(m.Pushes))
	for i := range m.Presses {
		loads++
		if m.Presses[i].Force.Value.UsesArg(argX) {
			loads += 40 * int64(len(m.Presses[i].Parts))
		}
	}
	for i := range m.Channels {
		if spots := int64(len(m.Channels[i].Spots)); m.Channels[i].Along {
			probes += (spots + fieldShare - 1) / fieldShare
		} else {
			probes += spots
		}
	}
	frequencies := int64(g.samples/2 + 1)
	p := solver.Plan{
		Cells: g.samples / 2, Steps: g.rows,
		Work:  workUnit * (frequencies*(elements+probes*60) + loads*int64(g.samples)*finer*20),
		Bytes: frequencies*16*(probes+loads+8) + int64(g.samples)*finer*24,
	}
	if p.Bytes > bytesMost {
		return nil, solver.Plan{}, fmt.Errorf("%s: level %d would hold %.1f GB: %w", name, req.Level, float64(p.Bytes)/1e9, solver.ErrBudget)
	}
	return g, p, nil
}

// Plan says what a level costs.
func (Solver) Plan(m *mesh.Mesh, req solver.Request) (solver.Plan, error) {
	_, p, err := planOf(m, req)
	return p, err
}

// Solve computes the records.
func (s Solver) Solve(ctx context.Context, m *mesh.Mesh, req solver.Request, progress func(float64)) (*solver.Result, error) {
	if no := s.Refuses(m); len(no) > 0 {
		return nil, &solver.FaultError{Solver: name, What: no[0]}
	}
	g, plan, err := planOf(m, req)
	if err != nil {
		return nil, err
	}
	j := &job{m: m, grid: g, net: newNetwork(m, req.Level), plan: plan}
	j.net.loads(g)
	j.probes = j.net.probes()
	if ctx.Err() != nil {
		return nil, ctx.Err()
	}
	spectra, err := j.spectra(ctx, progress)
	if err != nil {
		return nil, err
	}
	r := &solver.Result{Plan: plan, Ratio: 2, Series: solver.NewSeries(m), Energy: j.energy()}
	if j.net.varying {
		r.Order = 2
		r.Notes = append(r.Notes, "takes tension that varies in steps of equal travel time")
	}
	if m.Features()&mesh.Hysteretic != 0 {
		r.Notes = append(r.Notes, "a hysteretic loss factor is made causal: its stiffness is the one stated at the first vibration of the line (of a hung mass: at its own) and grows by 0.64 times the loss factor for each factor of 2.7 in frequency")
	}
	j.invert(spectra, r)
	return r, nil
}

// fieldShare is the part of the band that pictures along a line are made from.
const fieldShare = 8

// block is how many frequencies a worker takes at a time.
const block = 256

// spectra solves all frequencies. Which worker takes which block has no
// influence on the numbers.
func (j *job) spectra(ctx context.Context, progress func(float64)) ([][]complex128, error) {
	n := j.grid.samples/2 + 1
	var list []*probe
	for _, c := range j.probes {
		list = append(list, c...)
	}
	out := make([][]complex128, len(list))
	for i := range out {
		if out[i] = make([]complex128, n); list[i].field {
			out[i] = make([]complex128, n/fieldShare)
		}
	}
	// A picture is for looking at: an eighth of the band is enough for it.
	fields := n / fieldShare
	var next, done atomic.Int64
	var broken atomic.Bool
	workers := min(runtime.GOMAXPROCS(0), (n+block-1)/block)
	var wait sync.WaitGroup
	work := func(tell func(float64)) {
		s := newSystem(j.net)
		for ctx.Err() == nil && !broken.Load() {
			first := int(next.Add(block)) - block
			if first >= n {
				return
			}
			for k := first; k < min(first+block, n); k++ {
				s.solve(j.grid, k)
				for i, p := range list {
					if p.field && k >= fields {
						continue
					}
					v := p.spectrumOf(s, j.grid, k)
					if !finite(v) {
						broken.Store(true)
						return
					}
					out[i][k] = v
				}
			}
			if total := done.Add(block); tell != nil {
				tell(math.Min(1, float64(total)/float64(n)))
			}
		}
	}
	for range workers - 1 {
		wait.Add(1)
		go func() {
			defer wait.Done()
			work(nil)
		}()
	}
	work(progress)
	wait.Wait()
	switch {
	case ctx.Err() != nil:
		return nil, ctx.Err()
	case broken.Load():
		return nil, &solver.FaultError{Solver: name, What: "a frequency has no finite answer"}
	}
	return out, nil
}

// invert makes the records.
func (j *job) invert(spectra [][]complex128, r *solver.Result) {
	fft := fourier.NewFFT(j.grid.samples)
	fine, padded := make([]float64, j.grid.samples), make([]complex128, j.grid.samples/2+1)
	fieldRows, stride := j.m.FieldRows()
	i := 0
	for c := range j.probes {
		for k, p := range j.probes[c] {
			whole := spectra[i]
			if p.field {
				clear(padded)
				copy(padded, whole)
				whole = padded
			}
			whole[j.grid.samples/2] = complex(real(whole[j.grid.samples/2]), 0)
			fine = p.integrated(j.grid, whole, fft, fine)
			rows, step := j.m.Timing.Rows, 1
			if p.field {
				rows, step = fieldRows, stride
			}
			p.rows(j.grid, fine, j.m.Timing.Every, rows, step, r.Series[c][k])
			i++
		}
	}
}

// energy is what the start holds as far as it is known without an account: the
// work of the plucks and the motion.
func (j *job) energy() solver.Energy {
	e := solver.Energy{Unkept: true}
	for _, d := range j.m.Drawn {
		if d.At.Node >= 0 {
			e.Start += d.Force * j.m.Nodes[d.At.Node].Start / 2
			continue
		}
		e.Start += d.Force * valueOf(j.m.Pieces[d.At.Piece].Start, d.At.At) / 2
	}
	for i := range j.net.elements {
		el := &j.net.elements[i]
		p := &j.m.Pieces[el.piece]
		if p.Given == nil && p.StartRate == nil {
			continue
		}
		const parts = 200
		h := el.length / parts
		for k := range parts {
			x := el.x0 + h*(float64(k)+0.5)
			du := (valueOf(p.Given, x+h/2) - valueOf(p.Given, x-h/2)) / h
			v := valueOf(p.StartRate, x)
			e.Start += h / 2 * (p.MassPerLength*v*v + el.tension*du*du)
		}
	}
	e.Most = math.Max(e.Start, 0)
	return e
}
