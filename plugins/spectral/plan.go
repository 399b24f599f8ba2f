package spectral

import (
	"fmt"
	"math"

	"github.com/tautspan/tautspan/engine/mesh"
	"github.com/tautspan/tautspan/engine/solver"
)

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
	k := j.contacts()
	words += keptPlans * (5*k*n + k*k)
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

// contacts is the number of forces that are not linear.
func (j *job) contacts() float64 {
	k := 0
	for i := range j.m.Nodes {
		k += len(j.m.Nodes[i].Laws)
	}
	for i := range j.m.Links {
		if j.m.Links[i].Slack {
			k++
		}
	}
	for i, ss := range j.lay.pieces {
		for _, s := range ss {
			if j.m.Pieces[i].Law != nil {
				k += s.elements * lawPoints(s.degree)
			}
		}
	}
	return float64(k)
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
	k := j.contacts()
	work += steps * (10*k*k + 4*k*n)
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
