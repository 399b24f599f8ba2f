package fit

import (
	"context"
	"fmt"
	"math"
	"sort"

	"github.com/tautspan/tautspan/engine/doubt"
	"github.com/tautspan/tautspan/engine/scenario"
)

// Result is every solution of a fit, the best first.
type Result struct {
	Best         *Solution
	Alternatives []*Solution // within a cost of 9 of the best
	Next         *Next       // nil where no further reading would help
}

// Solution is one minimum with its doubt.
type Solution struct {
	Values   []float64 // of all lets
	Unknowns []Unknown // the sought lets, in the order of their statements
	Informed []Unknown // the doubtful lets and shared errors that moved with them

	Residuals   []Residual
	Missing     []Mode
	Correlation [][]float64 // of the sought lets, in their order

	Cost    float64 // residuals, strangers and vibrations passed over
	Chi2    float64 // residuals alone, those of what was known included
	Freedom int     // readings and knowns less unknowns
	Factor  float64 // by which the readings' uncertainties count, at least 1

	Open  []string // what the readings cannot decide, one sentence each
	Notes []string // what to be careful about, one sentence each

	cover *cover
}

// Unknown is a let with what was found of it.
type Unknown struct {
	Name        string
	Let         int // into Template.Lets; -1: a shared error
	Unit        string
	Value       float64
	Low95       float64
	High95      float64
	U           float64 // standard uncertainty; of the logarithm where Log
	Log         bool    // the interval is symmetric in the logarithm
	From, To    float64 // range sought in
	AtBound     bool
	Undecided   bool    // no reading decides it
	Stated      float64 // what was known beforehand, and its standard uncertainty
	StatedU     float64 // 0: nothing was
	PriorPulled float64 // (value - stated)/stated u
}

// Residual is one reading with what the solution makes of it.
type Residual struct {
	Reading  string
	Kind     scenario.ReadingKind
	Line     int
	Sideways bool
	Mode     int // 0 for a stranger and for returns
	Order    int // returns and swings: how many
	Observed float64
	Computed float64 // NaN for a stranger
	U        float64 // standard uncertainty, shared part apart
	Stranger bool
	Assumed  bool // its doubt was not said
}

// Mode is a vibration of a line.
type Mode struct {
	Reading   string
	Line      int
	Sideways  bool
	Number    int
	Frequency float64 // Hz
}

// materialShift is the share of a time from which it is told that bending changes
// it. Chosen: half of what a stopwatch tells in ten round trips.
const materialShift = 0.002

// Solve finds the solutions.
func (p *Problem) Solve(ctx context.Context) (*Result, error) {
	found, err := p.search(ctx)
	if err != nil {
		return nil, err
	}
	if len(found) == 0 {
		// A model that exists nowhere says why, such as friction that has no vibrations.
		for _, q := range p.predict(p.middle()) {
			if q.err != nil {
				return nil, &Error{Code: "no-solution", Path: "fit", What: "the line cannot be computed: " + q.err.Error()}
			}
		}
		return nil, &Error{Code: "no-solution", Path: "fit", What: "no values of the sought lets within their ranges explain any of the readings"}
	}
	res := &Result{}
	for i := range found {
		s, err := p.solution(&found[i])
		if err != nil {
			return nil, err
		}
		if i == 0 {
			res.Best = s
		} else {
			res.Alternatives = append(res.Alternatives, s)
		}
	}
	if !res.Best.misfit() {
		res.Next = p.next(res.Best)
	}
	return res, ctx.Err()
}

// misfit tells whether the model does not explain the readings, so that more of
// them would not help: a let stands at an end of its range, or they scatter three
// times as much as they say.
func (s *Solution) misfit() bool {
	for i := range s.Unknowns {
		if s.Unknowns[i].AtBound {
			return true
		}
	}
	return s.cover.scatter > 3
}

// solution works out what a minimum says.
func (p *Problem) solution(s *solution) (*Solution, error) {
	c, err := p.cover(s)
	if err != nil {
		return nil, err
	}
	values, err := p.values(s.x)
	if err != nil {
		return nil, err
	}
	out := &Solution{Values: values, Cost: s.cost, Chi2: c.chi2, Freedom: c.freedom, Factor: c.factor, cover: c}
	for i := range p.unknowns {
		if !p.unknowns[i].sought {
			out.Informed = append(out.Informed, c.informed(i, values))
		}
	}
	for _, i := range p.sought {
		u := c.informed(i, values)
		u.Low95, u.High95 = c.interval(i)
		out.Unknowns = append(out.Unknowns, u)
		row := make([]float64, len(p.sought))
		for k, j := range p.sought {
			row[k] = c.correlation(i, j)
		}
		out.Correlation = append(out.Correlation, row)
	}
	p.residualRows(s, out)
	for _, d := range c.open {
		out.Open = append(out.Open, c.words(d))
	}
	out.Notes = p.remarks(c, out)
	return out, nil
}

// informed is an unknown as the solution has it, with the interval of its
// curvature.
func (c *cover) informed(i int, values []float64) Unknown {
	u := &c.p.unknowns[i]
	out := Unknown{Name: u.name, Let: u.let, Unit: "1", U: c.sd(i), Log: u.log, From: u.from, To: u.to, AtBound: u.sought && c.atBound(i), Undecided: c.undecided(i)}
	half := doubt.TwoSided * out.U
	x := c.s.x[i]
	out.Value, out.Low95, out.High95 = u.value(x), u.value(x-half), u.value(x+half)
	if u.let < 0 {
		const digits = 1e6 // of a standard uncertainty; the rest is rounding
		out.Value = math.Round(out.Value*digits) / digits
		return out
	}
	let := &c.p.template.Lets[u.let]
	out.Unit, out.Value = let.Unit, values[u.let]
	if u.prior {
		out.Stated, out.StatedU = let.Value.Eval(values, nil), u.u
		out.PriorPulled = (out.Value - out.Stated) / u.u
	}
	if !u.sought {
		out.Low95, out.High95 = out.Low95+out.Stated, out.High95+out.Stated
	}
	if !u.log {
		out.U *= u.scale
	}
	return out
}

// residualRows lists the readings in the order in which they stand, and the
// vibrations passed over.
func (p *Problem) residualRows(s *solution, out *Solution) {
	for i := range p.obs {
		o := &p.obs[i]
		c := p.configs[o.config]
		r := Residual{Reading: o.reading, Kind: o.kind, Line: c.line, Sideways: c.sideways, Observed: o.value, U: o.u, Computed: math.NaN(), Assumed: o.item.Assumed != ""}
		timed := o.kind == scenario.ReturnsReading || o.kind == scenario.SwingsReading
		if timed {
			r.Order = o.order
		}
		switch {
		case s.modes[i] == 0:
			r.Stranger = true
		case o.kind == scenario.ReturnsReading:
			r.Computed = s.q[o.config].of(o, 0) + o.shift(s.x)
		case timed:
			r.Mode, r.Computed = 1, s.q[o.config].of(o, 1)+o.shift(s.x)
		default:
			r.Mode, r.Computed = s.modes[i], s.q[o.config].of(o, s.modes[i])+o.shift(s.x)
		}
		out.Residuals = append(out.Residuals, r)
	}
	for l := range p.lists {
		if len(p.lists[l].obs) == 0 {
			continue
		}
		o := &p.obs[p.lists[l].obs[0]]
		c := p.configs[o.config]
		for _, n := range p.passedOver(&p.lists[l], s.modes) {
			out.Missing = append(out.Missing, Mode{Reading: o.reading, Line: c.line, Sideways: c.sideways, Number: n, Frequency: s.q[o.config].frequency[n-1]})
		}
	}
}

// remarks are what to be careful about.
func (p *Problem) remarks(c *cover, out *Solution) []string {
	var notes []string
	add := func(format string, args ...any) { notes = append(notes, fmt.Sprintf(format, args...)) }
	for k, u := range out.Unknowns {
		i := p.sought[k]
		lo, _ := p.unknowns[i].bounds()
		end := "upper"
		if c.s.x[i]-lo < 1e-6*math.Max(1, math.Abs(lo)) {
			end = "lower"
		}
		switch {
		case u.AtBound:
			add("%s stands at the %s end of its range: what the readings ask for may lie beyond it", u.Name, end)
		case u.Undecided:
		case u.Log && u.U > loose:
			add("%s is known only roughly (a standard uncertainty of %.0f %%)", u.Name, 100*u.U)
		}
		for m := range k {
			if r := out.Correlation[k][m]; math.Abs(r) > correlated && !u.Undecided && !out.Unknowns[m].Undecided {
				add("%s and %s can hardly be told apart (correlation %.2f)", out.Unknowns[m].Name, u.Name, r)
			}
		}
	}
	for _, u := range out.Informed {
		if math.Abs(u.PriorPulled) > 2.5 {
			add("the readings pull %s by %.1f of its standard uncertainties: hold it against its source", u.Name, math.Abs(u.PriorPulled))
		}
	}
	for _, cfg := range p.configs {
		if share := cfg.bendingOfTrips(out.Values); share > materialShift {
			add("the round trips of %s are reckoned as on a string; its clamped ends make them about %.1f %% shorter, and short waves run ahead besides", p.lineName(cfg.line), 100*share)
		}
	}
	if c.scatter > 1.5 {
		add("the readings scatter %.1f times as much as their doubt says, and count so much less; a wrong order number, end or length does the same", c.scatter)
	}
	if c.freedom == 0 {
		add("there are as many readings as unknowns, so that nothing checks the model")
	}
	if c.roughly {
		add("the slopes of the model do not settle at the solution, so that the intervals are rough")
	}
	return notes
}

// Names of the lets that are taken as exact: inputs that the fit's model reads
// and that are neither sought nor doubtful, sorted.
func (p *Problem) Exact() []string {
	moving := map[int]bool{}
	for i := range p.unknowns {
		if p.unknowns[i].let >= 0 {
			moving[p.unknowns[i].let] = true
		}
	}
	var out []string
	for i := range p.letsRead() {
		below := map[int]bool{}
		p.template.Lets[i].Value.LetsUsed(below)
		if !moving[i] && len(below) == 0 {
			out = append(out, p.template.Lets[i].Name)
		}
	}
	sort.Strings(out)
	return out
}
