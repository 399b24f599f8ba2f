package spectral

import (
	"context"
	"errors"
	"fmt"
	"math"

	"github.com/tautspan/tautspan/engine/mesh"
	"github.com/tautspan/tautspan/engine/solver"
)

const (
	name    = "spectral"
	version = "2"
	// maxBytes is the memory that one solution may hold.
	maxBytes = int64(2e9)
	// modalMost is the largest network that is diagonalised as a whole: the cost
	// grows with the cube and cannot be interrupted.
	modalMost = 500
)

// Solver is the spectral solver. The zero value is ready.
type Solver struct{}

// New returns the spectral solver.
func New() solver.Solver { return Solver{} }

// Name is the solver's word.
func (Solver) Name() string { return name }

// Version changes whenever answers may change.
func (Solver) Version() string { return version }

// denseMost is from how many nodes on the element ends' system is banded: the dense
// one's factors take the cube. Chosen at a tenth of a second.
const denseMost = 300

// mostNodes bounds what is assembled at all.
const mostNodes = 100000

// Refuses lists what the solver cannot represent: of a network without laws, only a
// free mass of no mass.
func (Solver) Refuses(m *mesh.Mesh) []string {
	if len(m.Nodes) > mostNodes {
		return []string{fmt.Sprintf("takes %d nodes at most; there are %d", mostNodes, len(m.Nodes))}
	}
	for i := range m.Pieces {
		if !within(m.Pieces[i].From, m.Nodes) || !within(m.Pieces[i].To, m.Nodes) {
			return []string{fmt.Sprintf("piece %d has no nodes", i)}
		}
	}
	return refuses(m)
}

// Plan says what a level costs.
func (Solver) Plan(m *mesh.Mesh, req solver.Request) (solver.Plan, error) {
	j, err := newJob(m, req)
	if err != nil {
		return solver.Plan{}, err
	}
	return j.plan, nil
}

// job is one solution being prepared or computed.
type job struct {
	m      *mesh.Mesh
	lay    *layout
	frozen bool
	capped bool
	sys    *system
	rate   float64 // of proportional damping, 1/s
	sub    int     // base steps of one output interval
	steps  int     // base steps in all
	plan   solver.Plan
}

// newJob chooses the discretisation and assembles the network, after its size has
// been found to fit.
func newJob(m *mesh.Mesh, req solver.Request) (*job, error) {
	if err := validate(m); err != nil {
		return nil, err
	}
	if no := refuses(m); len(no) > 0 {
		return nil, fault("%s", no[0])
	}
	if req.Level < 0 || req.Level > 12 {
		return nil, fmt.Errorf("level %d: %w", req.Level, solver.ErrBudget)
	}
	j := &job{m: m}
	if lay, ok := req.Freeze.(*layout); ok && lay != nil && lay.fits(m) {
		copied := *lay
		j.lay, j.frozen = &copied, true
	} else {
		j.lay, j.capped = newLayout(m, req)
	}
	j.baseSteps()
	if err := j.size(); err != nil {
		return nil, err
	}
	var ok bool
	if j.sys, ok = newSystem(m, j.lay); !ok {
		return nil, fault("an element's eigenvalues did not converge")
	}
	if !finite(j.sys.top) || !finite(j.sys.mass...) || !finite(j.sys.omega2...) {
		return nil, fault("the network's numbers are out of range")
	}
	j.choose()
	return j, nil
}

// baseSteps counts the steps at whose ends records are read.
func (j *job) baseSteps() {
	half, twice := false, false
	for c := range j.m.Channels {
		half = half || j.m.Channels[c].Means == 1
		twice = twice || j.m.Channels[c].Means >= 2
	}
	j.sub = 1
	if half {
		j.sub = 2
	}
	j.steps = (j.m.Timing.Rows - 1) * j.sub
	switch {
	case j.m.Timing.Every <= 0:
		j.steps = 0
	case twice:
		j.steps += j.sub
	case half:
		j.steps++
	}
}

// size works out the memory before any of it is taken.
func (j *job) size() error {
	_, inner, ends := j.lay.count(j.m)
	n, rec, spots := float64(inner+ends), 0.0, 0.0
	for c := range j.m.Channels {
		ch := &j.m.Channels[c]
		rows := j.m.Timing.Rows
		if ch.Along {
			rows, _ = j.m.FieldRows()
		}
		rec += float64(rows) * float64(len(ch.Spots))
		spots += float64(len(ch.Spots))
	}
	seen, refs := map[int]bool{}, 0.0
	for _, ss := range j.lay.pieces {
		for _, s := range ss {
			if !seen[s.degree] {
				seen[s.degree] = true
				refs += 6 * float64(s.degree+1) * float64(s.degree+1)
			}
		}
	}
	loads := float64(len(j.m.Pushes) + len(j.m.Presses) + 2*len(j.m.Nodes) + 30)
	poles := float64((padeMax + 1) / 2 * keptPlans)
	words := rec + refs + n*(loads+40)
	if framing(j.m) {
		words += j.bodies(poles)
	} else {
		words += poles * (2*float64(inner) + 2*float64(ends)*float64(ends))
	}
	if n <= modalMost {
		words += 4*n*n + spots*n // sparse rows else
	} else {
		words += spots * (maxDegree + 20)
	}
	if bytes := 8 * words; bytes > float64(maxBytes) {
		return fmt.Errorf("%s: %.3g bytes for %.3g degrees of freedom and %.3g recorded numbers: %w",
			name, bytes, n, rec, solver.ErrBudget)
	}
	j.plan.Cells = int(inner + ends)
	j.plan.Bytes = int64(8 * words)
	return nil
}

// bodies is the memory of a frame's elements, words: their shapes, losses and, for
// each pole, inverses; and of the banded systems.
func (j *job) bodies(poles float64) float64 {
	words := 0.0
	for i, ss := range j.lay.pieces {
		p := &j.m.Pieces[i]
		for _, s := range ss {
			d := float64(s.degree + 1)
			words += 4 * d * d // elements of a stretch share a body where tension does not rise
			each := 20 * d
			if p.Internal > 0 && p.Bending > 0 {
				each += 2 * d * d
			}
			if p.TensionRise != 0 {
				words += 4 * d * d * float64(s.elements)
				each *= float64(s.elements)
			}
			words += poles * (each + 60*float64(s.elements))
		}
	}
	return words
}

// choose settles method and substeps, unless they are frozen, and what they cost.
func (j *job) choose() {
	s, lay := j.sys, j.lay
	rate, proportional := s.proportional()
	j.rate = rate
	if lay.hot == 0 {
		lay.hot = s.top
		lay.modal = proportional && j.mayUseModes()
		scale := math.Pow(ratio, float64(lay.level))
		reach := padeReach(padeMax, padeTol) / lay.hot
		energy := energyPhase / math.Max(j.sys.hung(8*lay.omega), math.Max(lay.omega, 2*math.Pi*j.m.Band))
		if lay.modal {
			reach = math.Inf(1)
			if rate > 0 {
				reach = 1.9 / rate
			}
		}
		lay.quiet = reach
		if j.lossy() {
			lay.quiet = math.Min(reach, energy)
		}
		lay.loaded = math.Min(reach, energy/2) // a load's start shakes its own place faster
		if j.m.Band > 0 {
			lay.loaded = math.Min(lay.loaded, loadPhase/(2*math.Pi*j.m.Band*scale))
		}
	} else if lay.modal && !(proportional && j.mayUseModes()) {
		lay.modal = false // the damping is no longer proportional
		lay.quiet = math.Min(lay.quiet, padeReach(padeMax, padeTol)/lay.hot)
		lay.loaded = math.Min(lay.loaded, lay.quiet)
	}
	j.lawStep()
	base := j.base()
	parts := math.Ceil(base/lay.loaded - 1e-9)
	if len(j.m.Pushes)+len(j.m.Presses)+len(j.m.Rolls)+len(s.moved) == 0 {
		parts = math.Ceil(base/lay.quiet - 1e-9)
	}
	if lay.law > 0 {
		parts = math.Ceil(base/lay.law - 1e-9)
	}
	parts = math.Max(1, parts)
	steps := parts * float64(j.steps)
	for _, r := range j.m.Rolls {
		if r.Mass > 0 {
			continue // a step more for each step, below
		}
		for _, p := range j.m.Lines[r.Line].Pieces {
			for _, e := range s.byPiece[p] {
				steps += 3 * float64(s.elements[e].ref.p) // a changing step is prepared anew
			}
		}
	}
	j.plan.Steps = int(math.Min(steps, math.MaxInt32))
	n := float64(s.size())
	work := steps * n * 10
	if lay.modal {
		work += 12 * n * n * n
	} else {
		m := padeDegree(lay.hot * base / parts)
		ends := float64(s.ends)
		if s.frame {
			work = steps * n * 60 * float64(m+1) / 2
			if lay.law > 0 { // kicks, trials, accounts
				work *= 4
			}
		} else {
			work = steps * (n*10*float64(m+1)/2 + 4*ends*ends*float64(m+1)/2)
		}
	}
	j.plan.Work = int64(math.Min(work, 9e18))
}

// lawStep chooses the step of forces that are not linear, unless it is frozen: a share
// of the highest wave that the level resolves, and of the highest vibration of an
// element's tension where that grows.
func (j *job) lawStep() {
	features := j.m.Features()
	if features&lawful == 0 || j.lay.law > 0 {
		return
	}
	j.lay.law = math.Min(j.lay.loaded, lawPhase/(j.lay.omega*math.Pow(ratio, float64(j.lay.level))))
	if features&mesh.Stretching != 0 {
		j.lay.law = math.Min(j.lay.law, stretchPhase/j.sys.topOfTension())
	}
}

// lawPhase is chosen: the forces of contacts are constant over a step.
const lawPhase = 0.25

// stretchPhase is chosen: the highest vibration of an element's tension turns by so much
// a step, of which the stretch may be that tension's 1/stretchPhase^2 (see steady).
const stretchPhase = 5.0

// base is the length of a base step, s.
func (j *job) base() float64 { return j.m.Timing.Every / float64(j.sub) }

// mayUseModes tells whether real modes can carry the network if its damping allows.
func (j *job) mayUseModes() bool {
	return j.sys.size() <= modalMost && !j.hasFields() && j.m.Features()&mesh.Stretching == 0
}

// hasFields tells whether a load changes its pattern with time: its projection
// on modes would cost more than the modes save.
func (j *job) hasFields() bool {
	for i := range j.m.Presses {
		if v := &j.m.Presses[i].Force.Value; v.UsesArg(0) && v.UsesArg(1) {
			return true
		}
	}
	return len(j.m.Rolls) > 0
}

func (j *job) lossy() bool {
	if len(j.sys.brackets) > 0 {
		return true
	}
	for i := range j.sys.elements {
		if j.sys.elements[i].lossy() {
			return true
		}
	}
	for _, row := range j.sys.rows {
		for _, t := range row {
			if t.c != 0 {
				return true
			}
		}
	}
	return false
}

// run goes through the time, again with half the step where the tension of a line
// grows more than the step allows.
func (j *job) run(ctx context.Context, op operator, res *solver.Result, progress func(float64)) (*walk, error) {
	const tries = 8
	for i := 0; ; i++ {
		w := newWalk(j, op, res.Series)
		err := w.march(ctx, progress)
		if i < tries && errors.Is(err, errCoarse) {
			j.lay.law /= 2
			res.Series = solver.NewSeries(j.m)
			continue
		}
		if errors.Is(err, errCoarse) {
			err = fault("the tension grows to many times its start")
		}
		return w, err
	}
}

// claim is the order to expect and what is to be said about it.
func (j *job) claim(notes []string) (float64, []string) {
	f := j.m.Features()
	switch {
	case f&(mesh.JointLaw|mesh.SpreadLaw|mesh.SlackTie) != 0:
		return 1, append(notes, "Friction, stops, slack ties and laws send kinks through the elements, which resolve them slowly: records are good to about a thousandth of their size at the usual levels.")
	case f&mesh.RollingSprung != 0:
		return 1, append(notes, "A load that rolls with a mass of its own bends the line under it, which the elements resolve slowly: records are good to about a thousandth of their size at the usual levels.")
	}
	return 0, notes
}

// Solve computes the records of a mesh.
func (Solver) Solve(ctx context.Context, m *mesh.Mesh, req solver.Request, progress func(share float64)) (*solver.Result, error) {
	if err := ctx.Err(); err != nil {
		return nil, err
	}
	j, err := newJob(m, req)
	if err != nil {
		return nil, err
	}
	var op operator
	switch {
	case j.lay.modal:
		mo, ok := newModal(j.sys, j.rate)
		if !ok {
			return nil, fault("the network's eigenvalues did not converge")
		}
		op = mo
	case j.sys.frame:
		op = newFrame(j.sys, j.lay.hot)
	default:
		op = newArrow(j.sys, j.lay.hot)
	}
	if err := ctx.Err(); err != nil {
		return nil, err
	}
	res := &solver.Result{Plan: j.plan, Order: 0, Ratio: ratio, Layout: j.lay, Frozen: j.frozen, Series: solver.NewSeries(m)}
	if j.capped {
		res.Notes = append(res.Notes, "The excitations reach above the frequencies that the coarsest level resolves; further levels close the gap.")
	}
	if j.sys.above && !j.lay.modal {
		res.Notes = append(res.Notes, "A very short stretch or a very stiff attachment has vibrations far above the line's; they are damped by the time step instead of followed.")
	}
	res.Order, res.Notes = j.claim(res.Notes)
	w, err := j.run(ctx, op, res, progress)
	if err != nil {
		return nil, err
	}
	res.Energy = w.meter.acct
	for c := range res.Series {
		for k := range res.Series[c] {
			if !finite(res.Series[c][k]...) {
				return nil, fault("channel %s is not finite", m.Channels[c].Name())
			}
		}
	}
	if !finite(res.Energy.Start, res.Energy.End, res.Energy.Work, res.Energy.Lost) {
		return nil, fault("the energy account is not finite")
	}
	return res, nil
}
