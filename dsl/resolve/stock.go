package resolve

import (
	"fmt"
	"math"

	"github.com/tautspan/tautspan/dsl/diag"
	"github.com/tautspan/tautspan/dsl/syntax"
	"github.com/tautspan/tautspan/dsl/unit"
	"github.com/tautspan/tautspan/engine/formula"
	"github.com/tautspan/tautspan/engine/scenario"
)

// stockEntry is one stock with what a segment takes from it.
type stockEntry struct {
	stmt      *syntax.Stock
	bad       bool // something in it was refused: its absences prove nothing
	mass      formula.Program
	massAt    diag.Span
	axial     formula.Program
	axialAt   diag.Span
	strength  formula.Program
	strongAt  diag.Span
	diameter  formula.Program // of the outside; the number 0 where nothing is said
	expansion formula.Program // 1/K; likewise
	grows     bool            // the expansion is said
	bending   formula.Program // EI; the number 0 where nothing is said
	bendAt    diag.Span
	loss      lossSum
	area      *formula.Program
	young     *formula.Program
	// What EI can be from matter: wires that slide on one another, and one solid
	// bar of the same metal area; nil where not known.
	bendLow, bendHigh *formula.Program
}

// lossSum is what the losses of one stock or segment come to.
type lossSum struct {
	viscous  formula.Program // N s/m^2
	internal formula.Program // s, Kelvin-Voigt
	tension  formula.Program // loss factor of the tension
	bending  formula.Program // loss factor of the bending
	law      *lawOf          // per length; nil: none
	at       diag.Span       // of the first, zero where there is none
	inside   diag.Span       // of the first that acts on bending alone
}

// take puts the losses on a segment.
func (l *lossSum) take(s *scenario.SegmentOf[formula.Program]) {
	s.Viscous, s.Internal, s.TensionLoss, s.BendingLoss, s.Law = l.viscous, l.internal, l.tension, l.bending, l.law
}

// properties are the values of a stock by their word.
type properties map[string]*syntax.StockProperty

// stockKinds are the kinds of the plain properties.
var stockKinds = map[string]struct {
	kind   unit.Kind
	bounds bounds
}{
	"mass": {unit.MassPerLength, positive}, "axial": {unit.Force, positive}, "bending": {unit.Bending, notNegative}, "density": {unit.Density, positive},
	"young": {unit.Stress, positive}, "area": {unit.Area, positive}, "diameter": {unit.Length, positive}, "expansion": {unit.Expansion, anything},
}

// resolveStock compiles a stock.
func (r *resolver) resolveStock(e *stockEntry) {
	name := e.stmt.Name.Text
	e.bad = e.stmt.Incomplete
	said := properties{}
	var losses []*syntax.Loss
	for i := range e.stmt.Properties {
		p := &e.stmt.Properties[i]
		if p.Loss != nil {
			losses = append(losses, p.Loss)
			continue
		}
		word := p.Word.Text
		if before, ok := said[word]; ok {
			r.errorAt(p.Word.Span, "said-twice", name+" says its "+word+" already", "", "", related(before.Span, "first said here"))
			continue
		}
		said[word] = p
	}
	got := map[string]formula.Program{}
	for _, word := range []string{"mass", "axial", "bending", "density", "young", "area", "diameter", "expansion"} {
		p, ok := said[word]
		if !ok {
			continue
		}
		k := stockKinds[word]
		v := r.inRange(r.want(p.Value, plain, k.kind, word), p.Value, k.bounds, word)
		if v.bad {
			e.bad = true
			continue
		}
		got[word] = v.prog
	}
	e.diameter = got["diameter"]
	e.expansion, e.grows = got["expansion"], said["expansion"] != nil
	r.stockStrength(e, said)
	r.stockArea(e, said, got)
	r.stockMass(e, said, got)
	r.stockStiffness(e, said, got)
	if p, ok := said["strength"]; ok {
		e.strongAt = p.Value.Place()
	}
	e.loss = r.losses(losses, e.mass, e.bad, "stock."+name)
	r.internalWantsBending(e.loss, e.bending, e.bad)
	r.unlikelyStock(e, said, got)
}

// stockStrength compiles a force, or a stress that the area turns into one.
func (r *resolver) stockStrength(e *stockEntry, said properties) {
	p, ok := said["strength"]
	if !ok {
		return
	}
	v := r.compile(p.Value, plain)
	switch {
	case v.bad:
		e.bad = true
		return
	case v.dim == unit.Stress.Dim:
		if said["area"] == nil && said["diameter"] == nil && said["wires"] == nil && !e.bad {
			r.errorAt(p.Value.Place(), "missing-property", "a strength as a stress wants the area of the stock", "", "area 100 mm^2")
			e.bad = true
			return
		}
	default:
		v = r.check(v, p.Value, unit.Force, "strength")
	}
	v = r.inRange(v, p.Value, positive, "strength")
	if v.bad {
		e.bad = true
		return
	}
	e.strength = v.prog
}

// stockArea finds the cross-section: said, of a solid round, or of the wires.
func (r *resolver) stockArea(e *stockEntry, said properties, got map[string]formula.Program) {
	quarter := func(d formula.Program) formula.Program {
		return formula.Mul(formula.Const(math.Pi/4), formula.Mul(d, d))
	}
	set := func(p formula.Program) { e.area = &p }
	if w, ok := said["wires"]; ok {
		n := r.inRange(r.want(w.Value, plain, unit.Number, "the number of wires"), w.Value, positive, "the number of wires")
		d := r.inRange(r.want(w.Of, plain, unit.Length, "the diameter of a wire"), w.Of, positive, "the diameter of a wire")
		if n.bad || d.bad {
			e.bad = true
			return
		}
		if x := r.num(n.prog); x != math.Trunc(x) {
			r.errorAt(w.Value.Place(), "wants-number", "the number of wires is a whole number", "", "")
			e.bad = true
			return
		}
		set(formula.Mul(n.prog, quarter(d.prog)))
		got["wires"], got["wire"] = n.prog, d.prog
	} else if d, ok := got["diameter"]; ok {
		set(quarter(d))
	}
	if a, ok := got["area"]; ok {
		set(a)
	}
	// A stress becomes a force here, where the area is known.
	if p, ok := said["strength"]; ok && e.area != nil && !e.bad {
		if v := r.compile(p.Value, plain); !v.bad && v.dim == unit.Stress.Dim {
			e.strength = formula.Mul(v.prog, *e.area)
		}
	}
}

// stockMass takes the mass per length as said or from matter.
func (r *resolver) stockMass(e *stockEntry, said properties, got map[string]formula.Program) {
	m, hasMass := got["mass"]
	d, hasDensity := got["density"]
	switch {
	case said["mass"] != nil && said["density"] != nil:
		r.errorAt(said["density"].Word.Span, "said-twice", "the mass is said already", "", "leave out mass or density", related(said["mass"].Span, "first said here"))
		e.bad = true
	case hasMass:
		e.mass, e.massAt = m, said["mass"].Value.Place()
	case hasDensity && e.area != nil:
		e.mass, e.massAt = formula.Mul(d, *e.area), said["density"].Value.Place()
	case hasDensity && !e.bad:
		r.errorAt(said["density"].Word.Span, "missing-property", "a density wants the area, the diameter or the wires of the stock", "", "")
		e.bad = true
	case said["mass"] == nil && said["density"] == nil && !e.bad:
		r.errorAt(e.stmt.Name.Span, "missing-property", "the stock "+e.stmt.Name.Text+" has no mass", "", "mass 10 kg/m")
		e.bad = true
	}
}

// stockStiffness takes EA and EI as said, or from matter.
func (r *resolver) stockStiffness(e *stockEntry, said properties, got map[string]formula.Program) {
	young, hasYoung := got["young"]
	if hasYoung {
		e.young = &young
	}
	if a, ok := got["axial"]; ok {
		e.axial, e.axialAt = a, said["axial"].Value.Place()
	} else if hasYoung && e.area != nil {
		e.axial, e.axialAt = formula.Mul(young, *e.area), said["young"].Value.Place()
	} else if hasYoung && !e.bad {
		r.errorAt(said["young"].Word.Span, "missing-property", "a modulus wants the area, the diameter or the wires of the stock", "", "")
		e.bad = true
	}
	if hasYoung && e.area != nil {
		// E A^2/(4 pi) is E pi d^4/64 of a round bar of the area A, and N times the
		// sum over N wires E pi D^4/64.
		solid := formula.Mul(formula.Const(1/(4*math.Pi)), formula.Mul(young, formula.Mul(*e.area, *e.area)))
		e.bendHigh = &solid
		if n, ok := got["wires"]; ok && said["area"] == nil {
			loose := formula.Div(solid, n)
			e.bendLow = &loose
		}
	}
	r.stockBending(e, said, got)
}

// roundSlack is the share by which the area of a solid round bar may differ
// from that of its circle. Chosen: both are rounded in lists; a strand of seven
// wires, the fullest, misses its circle by 22 %.
const roundSlack = 0.02

// stockBending takes EI as said or, of a solid round bar, from matter. That of
// wires lies between two bounds far apart, and is not guessed.
func (r *resolver) stockBending(e *stockEntry, said properties, got map[string]formula.Program) {
	if b, ok := got["bending"]; ok {
		e.bending, e.bendAt = b, said["bending"].Value.Place()
		return
	}
	if said["bending"] != nil || e.bendHigh == nil || e.bad {
		return
	}
	if p := said["wires"]; p != nil {
		hint := fmt.Sprintf("write `bending B` with B up to %s (a solid bar)", r.shownBending(*e.bendHigh))
		if e.bendLow != nil {
			hint = fmt.Sprintf("write `bending B` with B from %s (wires that slide) to %s (a solid bar)", r.shownBending(*e.bendLow), r.shownBending(*e.bendHigh))
		}
		r.errorAt(p.Span, "bending-unsaid", "the bending stiffness of wires is not known from their size", "it lies between two bounds", hint+", or `bending 0 N*m^2` for an ideal string")
		e.bad = true
		return
	}
	d, ok := got["diameter"]
	if !ok {
		return
	}
	if circle := math.Pi / 4 * math.Pow(r.num(d), 2); math.Abs(r.num(*e.area)-circle) > roundSlack*circle {
		r.errorAt(said["diameter"].Span, "bending-unsaid", "the bending stiffness of what is no solid round bar is not known from its size", "the area is not that of this diameter",
			fmt.Sprintf("write `bending B` with B up to %s (a solid bar), or `bending 0 N*m^2` for an ideal string", r.shownBending(*e.bendHigh)))
		e.bad = true
		return
	}
	e.bending, e.bendAt = *e.bendHigh, said["young"].Value.Place()
}

// shownBending is a bending stiffness for people.
func (r *resolver) shownBending(p formula.Program) string {
	return unit.Format(r.num(p), unit.Bending.Dim, unit.SI, 3)
}

// mayBend tells whether a bending stiffness is there, or could be for other
// values of the lets.
func mayBend(p formula.Program) bool {
	x, constant := p.IsConst()
	return !constant || x > 0
}

// internalWantsBending refuses an internal loss that has nothing to act on.
func (r *resolver) internalWantsBending(l lossSum, bending formula.Program, bad bool) {
	if bad || l.inside.IsZero() || mayBend(bending) {
		return
	}
	r.errorAt(l.inside, "missing-property", "this loss acts on bending, and there is none here", "the stock is an ideal string", "bending 10 kN*m^2")
}

// losses adds up several losses of one stock or segment. The mass is that per
// length.
func (r *resolver) losses(list []*syntax.Loss, mass formula.Program, massBad bool, path string) lossSum {
	var sum lossSum
	said := map[string]diag.Span{}
	for _, l := range list {
		kind := l.Kind.Text
		if l.OfBending {
			kind += " of bending"
		}
		if before, ok := said[kind]; ok {
			r.errorAt(l.Kind.Span, "said-twice", "this loss is said already", "", "", related(before, "first said here"))
			continue
		}
		said[kind] = l.Span
		switch {
		case kind == "internal":
			v := r.inRange(r.want(l.Value, plain, unit.Time, "loss internal"), l.Value, notNegative, "loss internal")
			if v.bad {
				continue
			}
			sum.internal = v.prog
			sum.acts(l.Span)
		case l.Kind.Text == "hysteretic", kind == "ratio" && l.AtF == nil:
			if !r.lossFactor(l, &sum) {
				continue
			}
		case kind == "law":
			law, ok := r.useLaw(l.Law, unit.ForcePerLength, path)
			if !ok {
				continue
			}
			sum.law = law
		default:
			p, ok := r.loss(l, mass, massBad)
			if !ok {
				continue
			}
			sum.viscous = formula.Add(sum.viscous, p)
		}
		if sum.at.IsZero() {
			sum.at = l.Span
		}
	}
	return sum
}

// loss is the viscous coefficient of one loss that has one, N s/m^2.
func (r *resolver) loss(l *syntax.Loss, mass formula.Program, massBad bool) (formula.Program, bool) {
	none := formula.Program{}
	switch l.Kind.Text {
	case "viscous":
		v := r.inRange(r.want(l.Value, plain, unit.Viscous, "loss viscous"), l.Value, notNegative, "loss viscous")
		return v.prog, !v.bad
	case "ratio":
		z := r.inRange(r.want(l.Value, plain, unit.Share, "loss ratio"), l.Value, notNegative, "loss ratio")
		f := r.inRange(r.want(l.AtF, plain, unit.Frequency, "the frequency of loss ratio"), l.AtF, positive, "the frequency of loss ratio")
		if z.bad || f.bad {
			return none, false
		}
		if x := r.num(z.prog); x >= 1 {
			r.errorAt(l.Value.Place(), "out-of-range", "a damping ratio stays below 100 %", r.shown(x, z.dim, l.Value), "")
			return none, false
		}
		r.unlikelyRatio(l.Value, r.num(z.prog))
		if massBad {
			return none, false
		}
		// zeta = d/(2 m omega) of a line with viscous loss d per length, so d = 2 m zeta 2 pi F.
		return formula.Mul(formula.Mul(formula.Const(4*math.Pi), mass), formula.Mul(z.prog, f.prog)), true
	default:
		r.notYet(l.Span, "this loss", "")
	}
	return none, false
}

// acts notes a loss that acts on bending alone.
func (l *lossSum) acts(at diag.Span) {
	if l.inside.IsZero() {
		l.inside = at
	}
}

// lossFactor adds `hysteretic ETA [of bending]`, or `ratio Z` in every mode, which
// is twice the ratio: a line whose tension and bending have the loss factor eta
// has the ratio sin(atan(eta)/2), eta/2 to first order.
func (r *resolver) lossFactor(l *syntax.Loss, sum *lossSum) bool {
	what := "loss " + l.Kind.Text
	v := r.inRange(r.want(l.Value, plain, unit.Share, what), l.Value, notNegative, what)
	if v.bad {
		return false
	}
	x, eta := r.num(v.prog), v.prog
	if l.Kind.Text == "ratio" {
		eta = formula.Mul(formula.Const(2), eta)
		x *= 2
	}
	if x >= 1 {
		r.errorAt(l.Value.Place(), "out-of-range", "a loss factor of a line stays below 1, and a ratio below 50 %", r.shown(x, v.dim, l.Value), "")
		return false
	}
	sum.bending = formula.Add(sum.bending, eta)
	if l.OfBending {
		sum.acts(l.Span)
		return true
	}
	r.unlikelyRatio(l.Value, x/2)
	sum.tension = formula.Add(sum.tension, eta)
	return true
}

// stockInfo lists what is known of the stocks that could be read.
func (r *resolver) stockInfo() []StockInfo {
	var out []StockInfo
	add := func(e *stockEntry, builtin bool) {
		if e.bad {
			return
		}
		info := StockInfo{Name: e.stmt.Name.Text, Builtin: builtin, Bending: r.num(e.bending), Span: r.asTyped(e.stmt.Name.Span)}
		if e.bendLow != nil {
			info.BendingLow = r.num(*e.bendLow)
		}
		if e.bendHigh != nil {
			info.BendingHigh = r.num(*e.bendHigh)
		}
		out = append(out, info)
	}
	for _, e := range r.stockOrder {
		add(e, false)
	}
	for _, name := range known(r.builtin) {
		add(r.builtin[name], true)
	}
	return out
}
