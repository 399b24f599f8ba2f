package fit

import (
	"fmt"
	"math"

	"github.com/tautspan/tautspan/engine/formula"
	"github.com/tautspan/tautspan/engine/scenario"
)

// unknown is one coordinate of the search: a let that is sought, a doubtful let
// that readings depend on, or an error that several readings share.
type unknown struct {
	name     string
	let      int // -1: a shared error
	sought   bool
	log      bool    // the coordinate is ln(value), else value = centre + scale*x
	from, to float64 // of a sought let, in its unit
	prior    bool    // known beforehand: what its own expression says, +- u
	u        float64
	centre   float64
	scale    float64
	configs  []int // that depend on it
	private  int   // the group of lines that alone depends on it; -1: several
}

// value is a sought let's value. Of a doubtful let it is how far it lies from
// what its own expression says, of a shared error its standard uncertainties.
func (u *unknown) value(x float64) float64 {
	switch lo, hi := u.bounds(); {
	case u.sought && x <= lo:
		return u.from
	case u.sought && x >= hi:
		return u.to
	case u.log:
		return math.Exp(x)
	}
	return u.centre + u.scale*x
}

// at is the coordinate of a value.
func (u *unknown) at(value float64) float64 {
	if u.log {
		return math.Log(value)
	}
	return (value - u.centre) / u.scale
}

// bounds are the coordinates between which the search stays.
func (u *unknown) bounds() (lo, hi float64) {
	if !u.sought {
		return math.Inf(-1), math.Inf(1)
	}
	return u.at(u.from), u.at(u.to)
}

// Problem is a scenario's fit made ready. It is for one goroutine.
type Problem struct {
	template *scenario.Template
	start    []float64 // values of the lets as they stand
	unknowns []unknown
	sought   []int // indices into unknowns, in the order of the seek statements
	obs      []observation
	lists    []list
	configs  []*config
	slack    float64 // how many times worse than they say readings are taken to be while they are paired
	leading  bool    // starts are being led to their minima: steps need not be fine
	detail   detail  // of the model
	mayDrop  []bool  // by observation: a numbered frequency that may be a stranger
}

// Error is a fit that cannot be made, with the path of what is at fault.
type Error struct {
	Code string
	Path string
	What string
	Hint string
}

// Error says what is wrong.
func (e *Error) Error() string { return e.What }

// New makes the fit of a template ready: of all readings where it has no fit
// statement. It returns an *Error or a *scenario.PathError where there is nothing
// that can be fitted. records are what the spectra of records hold beside that.
func New(t *scenario.Template, records ...Peaks) (*Problem, error) {
	if len(t.Seeks) == 0 {
		return nil, &Error{Code: "nothing-sought", What: "nothing is sought: no let is made unknown", Hint: "seek NAME from A to B"}
	}
	values, err := t.Values(nil)
	if err != nil {
		return nil, err
	}
	net, err := t.Bind(values)
	if err != nil {
		return nil, err
	}
	readings, err := t.BindReadings(net)
	if err != nil {
		return nil, err
	}
	p := &Problem{template: t, start: values, slack: 1}
	if err := p.observe(readings); err != nil {
		return nil, err
	}
	for i := range records {
		if err := p.observePeaks(&records[i]); err != nil {
			return nil, err
		}
	}
	p.sortLists()
	if len(p.obs) == 0 {
		return nil, &Error{Code: "nothing-read", Path: "fit", What: "there is no reading to fit to", Hint: "reading NAME of LINE { frequency 1 = 1.01 Hz +- 0.4 % }"}
	}
	if err := p.seek(); err != nil {
		return nil, err
	}
	p.depend()
	p.drops()
	return p, p.enough()
}

// seek enters the sought lets and the doubtful ones as unknowns.
func (p *Problem) seek() error {
	t := p.template
	u := t.StandardU(p.start)
	used := p.letsRead()
	sought := map[int]bool{}
	for _, s := range t.Seeks {
		let := &t.Lets[s.Let]
		sought[s.Let] = true
		x := unknown{name: let.Name, let: s.Let, sought: true, from: s.From.Eval(p.start, nil), to: s.To.Eval(p.start, nil), private: -1}
		if !(x.from < x.to) || math.IsInf(x.from, 0) || math.IsInf(x.to, 0) {
			return &Error{Code: "empty-range", Path: "seek." + let.Name, What: "a range runs from its lower to its higher end"}
		}
		x.log = x.from > 0
		x.centre, x.scale = (x.from+x.to)/2, (x.to-x.from)/2
		if u[s.Let] > 0 {
			x.prior, x.u = true, u[s.Let]
		}
		if !used[s.Let] {
			return &Error{Code: "not-identifiable", Path: "seek." + let.Name, What: "no reading of this fit depends on " + let.Name, Hint: "leave it out of what is sought, or add a reading of the line that it belongs to"}
		}
		p.sought = append(p.sought, len(p.unknowns))
		p.unknowns = append(p.unknowns, x)
	}
	for i := range t.Lets {
		if u[i] > 0 && used[i] && !sought[i] {
			p.unknowns = append(p.unknowns, unknown{name: t.Lets[i].Name, let: i, prior: true, u: u[i], scale: u[i], private: -1})
		}
	}
	return nil
}

// enough refuses a fit of more unknowns than it has readings.
func (p *Problem) enough() error {
	free := 0
	for _, i := range p.sought {
		if !p.unknowns[i].prior {
			free++
		}
	}
	if free > len(p.obs) {
		last := p.unknowns[p.sought[len(p.sought)-1]]
		return &Error{Code: "more-unknowns-than-readings", Path: "seek." + last.name,
			What: fmt.Sprintf("%d unknowns are sought from %d readings", free, len(p.obs)),
			Hint: "take further readings, or say what is known of a let: let " + last.name + " = VALUE +- DOUBT"}
	}
	return nil
}

// letsRead marks the lets on which the predictions of any config rest, those
// that lets read included.
func (p *Problem) letsRead() map[int]bool {
	all := map[int]bool{}
	for _, c := range p.configs {
		for i := range c.reads {
			all[i] = true
		}
	}
	return all
}

// depend notes which configs move with which unknown.
func (p *Problem) depend() {
	for i := range p.unknowns {
		u := &p.unknowns[i]
		for c, cfg := range p.configs {
			if u.let >= 0 && cfg.reads[u.let] {
				u.configs = append(u.configs, c)
			}
		}
		for k, c := range u.configs {
			if g := p.configs[c].group; k == 0 {
				u.private = g
			} else if g != u.private {
				u.private = -1
			}
		}
	}
}

// spread adds the lets that lets read.
func spread(t *scenario.Template, used map[int]bool) {
	for changed := true; changed; {
		before := len(used)
		for i := range t.Lets {
			if used[i] {
				t.Lets[i].Value.LetsUsed(used)
			}
		}
		changed = len(used) != before
	}
}

// lineReads marks the lets in what stands on a line.
func lineReads(l *scenario.LineOf[formula.Program], used map[int]bool) {
	see := func(programs ...formula.Program) {
		for _, p := range programs {
			p.LetsUsed(used)
		}
	}
	node := func(n *scenario.NodeOf[formula.Program]) {
		see(n.Mass, n.Spring, n.SpringLoss, n.Rotary, n.Inertia, n.AxialGive)
		for _, d := range n.Dashpots {
			see(d.C, d.Through)
		}
		for _, t := range n.Tuned {
			see(t.Mass, t.Spring, t.Dashpot, t.Loss)
		}
	}
	see(l.Incline, l.Temperature)
	for i := range l.Nodes {
		node(&l.Nodes[i])
	}
	for _, s := range l.Segments {
		see(s.Length, s.MassPerLength, s.Tension, s.TensionRise, s.Bending, s.Internal, s.Axial, s.Viscous, s.Expansion, s.TensionLoss, s.BendingLoss)
		for k := range s.Every {
			see(s.Every[k].First, s.Every[k].Spacing)
			node(&s.Every[k].Joint)
		}
	}
}
