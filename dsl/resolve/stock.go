package resolve

import (
	"math"

	"github.com/tautspan/tautspan/dsl/diag"
	"github.com/tautspan/tautspan/dsl/syntax"
	"github.com/tautspan/tautspan/dsl/unit"
	"github.com/tautspan/tautspan/engine/formula"
)

// stockEntry is one stock with what a segment takes from it.
type stockEntry struct {
	stmt     *syntax.Stock
	bad      bool // something in it was refused: its absences prove nothing
	mass     formula.Program
	massAt   diag.Span
	axial    formula.Program
	axialAt  diag.Span
	strength formula.Program
	strongAt diag.Span
	viscous  formula.Program
	lossAt   diag.Span
	area     *formula.Program
	young    *formula.Program
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
	r.stockStrength(e, said)
	r.stockArea(e, said, got)
	r.stockMass(e, said, got)
	r.stockStiffness(e, said, got)
	if p, ok := said["strength"]; ok {
		e.strongAt = p.Value.Place()
	}
	e.viscous, e.lossAt = r.losses(losses, e.mass, e.bad)
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

// stockStiffness takes EA and refuses EI.
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
	const hint = "write `bending 0 N*m^2` to treat it knowingly as an ideal string"
	if b, ok := got["bending"]; ok {
		if r.num(b) > 0 {
			r.bent = true
			r.notYet(said["bending"].Span, "a line with bending stiffness", hint)
			e.bad = true
		}
		return
	}
	if said["bending"] != nil || !hasYoung {
		return
	}
	for _, word := range []string{"diameter", "wires"} {
		if p := said[word]; p != nil {
			r.bent = true
			r.notYet(p.Span, "the bending stiffness that follows from young and "+word, hint)
			e.bad = true
			return
		}
	}
}

// losses adds up the viscous coefficient of several losses of one stock or
// segment. The mass is that per length.
func (r *resolver) losses(list []*syntax.Loss, mass formula.Program, massBad bool) (formula.Program, diag.Span) {
	var sum formula.Program
	var span diag.Span
	said := map[string]diag.Span{}
	for _, l := range list {
		kind := l.Kind.Text
		if before, ok := said[kind]; ok {
			r.errorAt(l.Kind.Span, "said-twice", "this loss is said already", "", "", related(before, "first said here"))
			continue
		}
		said[kind] = l.Span
		p, ok := r.loss(l, mass, massBad)
		if !ok {
			continue
		}
		if span.IsZero() {
			sum, span = p, l.Span
		} else {
			sum = formula.Add(sum, p)
		}
	}
	return sum, span
}

// loss is the viscous coefficient of one loss, N s/m^2.
func (r *resolver) loss(l *syntax.Loss, mass formula.Program, massBad bool) (formula.Program, bool) {
	none := formula.Program{}
	switch l.Kind.Text {
	case "viscous":
		v := r.inRange(r.want(l.Value, plain, unit.Viscous, "loss viscous"), l.Value, notNegative, "loss viscous")
		return v.prog, !v.bad
	case "ratio":
		z := r.inRange(r.want(l.Value, plain, unit.Share, "loss ratio"), l.Value, notNegative, "loss ratio")
		if l.AtF == nil {
			r.notYet(l.Span, "the same damping ratio in every mode", "loss ratio "+clip(l.Value)+" at 1 Hz")
			return none, false
		}
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
	case "internal":
		r.inRange(r.want(l.Value, plain, unit.Time, "loss internal"), l.Value, notNegative, "loss internal")
		r.notYet(l.Span, "an internal loss", "")
	case "hysteretic":
		r.inRange(r.want(l.Value, plain, unit.Share, "loss hysteretic"), l.Value, notNegative, "loss hysteretic")
		r.notYet(l.Span, "a hysteretic loss", "")
	case "law":
		r.notYet(l.Span, "a loss by a law", "")
	default:
		r.notYet(l.Span, "this loss", "")
	}
	return none, false
}
