package fit

import (
	"fmt"
	"sort"

	"github.com/tautspan/tautspan/engine/scenario"
)

// observation is one number read.
type observation struct {
	reading string
	item    *scenario.ReadingItem
	kind    scenario.ReadingKind
	config  int
	order   int // 0: not known, paired within its list
	list    int // index into lists, -1
	peak    int // observation whose mode this damping ratio has, -1
	value   float64
	u       float64
	shared  int     // unknown that holds the shared error, -1
	sharedU float64 // its standard uncertainty in the unit of the value
}

// list is a set of frequencies without numbers that are paired in order.
type list struct {
	obs      []int // rising by value
	from, to int   // modes that may be paired; 0, 0: all
}

// chosen are the readings that the fit statement names, or all.
func chosen(t *scenario.Template) []int {
	if t.Fit != nil {
		return t.Fit.Readings
	}
	var out []int
	for i := range t.Readings {
		out = append(out, i)
	}
	return out
}

// observe turns readings into observations.
func (p *Problem) observe(readings []scenario.Reading) error {
	use := p.template.Fit
	if use == nil {
		use = &scenario.Fit{}
	}
	for _, i := range chosen(p.template) {
		r := &readings[i]
		loose := map[int]int{} // by config: the list of `frequency ?`
		shared := map[scenario.ReadingKind]int{}
		for k := range r.Items {
			it := &r.Items[k]
			if !use.Takes(it.Kind, it.Order) {
				continue
			}
			c, err := p.config(r, it, fmt.Sprintf("reading.%s.%d", r.Name, k))
			if err != nil {
				return err
			}
			at := -1
			if it.Kind == scenario.PeaksReading || it.Kind == scenario.FrequencyReading && it.Order == 0 {
				l, known := loose[c]
				if it.Kind == scenario.PeaksReading || !known {
					l = len(p.lists)
					p.lists = append(p.lists, list{})
					p.lists[l].from, p.lists[l].to = use.Orders(it.Kind)
					if it.Kind == scenario.FrequencyReading {
						loose[c] = l
					}
				}
				at = l
			}
			for n, v := range it.Values {
				o := observation{reading: r.Name, item: it, kind: it.Kind, config: c, order: it.Order, list: at, peak: -1, value: v, u: it.U[n], shared: -1}
				if it.Shared > 0 {
					if _, known := shared[it.Kind]; !known {
						shared[it.Kind] = len(p.unknowns)
						p.unknowns = append(p.unknowns, unknown{name: "shared error of " + it.Kind.String() + " in " + r.Name, let: -1, prior: true, u: 1, scale: 1, private: -1})
					}
					o.shared, o.sharedU = shared[it.Kind], it.Shared
				}
				if at >= 0 {
					p.lists[at].obs = append(p.lists[at].obs, len(p.obs))
				}
				p.obs = append(p.obs, o)
			}
			p.need(c, it)
		}
	}
	return nil
}

func (p *Problem) sortLists() {
	for i := range p.lists {
		l := &p.lists[i]
		sort.SliceStable(l.obs, func(a, b int) bool { return p.obs[l.obs[a]].value < p.obs[l.obs[b]].value })
	}
}

// Peaks are the peaks of one channel of a record, without order numbers: what a
// reading of peaks says, with the damping ratios that their decays show.
type Peaks struct {
	Reading   string // name of the record
	Line      int
	Sideways  bool
	Sag       bool      // the sag term of the line counts in that plane
	Frequency []float64 // Hz
	U         []float64 // Hz
	Damping   []float64 // ratio; 0 where none is known
	DampingU  []float64
}

// observePeaks turns the peaks of a record into observations.
func (p *Problem) observePeaks(r *Peaks) error {
	use := p.template.Fit
	if use == nil {
		use = &scenario.Fit{}
	}
	if !use.Takes(scenario.PeaksReading, 0) {
		return nil
	}
	it := &scenario.ReadingItem{Kind: scenario.PeaksReading, Values: r.Frequency, Sideways: r.Sideways, Sag: r.Sag}
	c, err := p.config(&scenario.Reading{Name: r.Reading, Line: r.Line}, it, "record."+r.Reading)
	if err != nil {
		return err
	}
	l := list{}
	l.from, l.to = use.Orders(scenario.PeaksReading)
	p.need(c, it)
	// A record always shows decays; they count only where the fit says so, since a
	// line without losses of its own could not explain them.
	decays := len(use.Uses) > 0 && use.Takes(scenario.DecayReading, 0)
	damped := false
	for i, f := range r.Frequency {
		at := len(p.obs)
		l.obs = append(l.obs, at)
		p.obs = append(p.obs, observation{reading: r.Reading, item: it, kind: scenario.PeaksReading, config: c, list: len(p.lists), peak: -1, value: f, u: r.U[i], shared: -1})
		if i < len(r.Damping) && r.Damping[i] > 0 && decays {
			damped = true
			p.obs = append(p.obs, observation{reading: r.Reading, item: it, kind: scenario.DecayReading, config: c, list: -1, peak: at, value: r.Damping[i], u: r.DampingU[i], shared: -1})
		}
	}
	p.configs[c].decays = p.configs[c].decays || damped
	p.lists = append(p.lists, l)
	return nil
}
