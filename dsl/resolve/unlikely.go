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

// Ranges within which the lines of the trade lie. Values outside them are
// remarked on, never refused. Common practice, no source: from an instrument
// wire to the largest stay.
const (
	massLow, massHigh       = 1e-5, 200.0    // kg/m
	tensionLow, tensionHigh = 0.5, 20e6      // N
	shareLow, shareHigh     = 0.03, 0.60     // tension against strength
	youngLow, youngHigh     = 50e9, 210e9    // Pa; strands and ropes from 66 to 210 GPa
	ratioLow, ratioHigh     = 0.0002, 0.005  // damping ratio of a bare line
	densityLow, densityHigh = 2700.0, 9100.0 // kg/m^3; aluminium 2750, copper 8900-9100
	speedLow, speedHigh     = 20.0, 500.0    // m/s
	strainHigh              = 0.01
	xiLow, xiBeam           = 400.0, 20.0 // L sqrt(T/EI); below the second the first terms for a string fail
	lambdaHigh              = 0.1         // Irvine's parameter; at 0.09 the first vertical frequency rises by 0.4 %
)

// outside remarks on a value outside its usual range.
func (r *resolver) outside(span diag.Span, code, subject string, x, low, high float64, d unit.Dim) {
	if x >= low && x <= high || span.IsZero() {
		return
	}
	r.warnAt(span, code, fmt.Sprintf("%s of %s is unusual", subject, unit.Format(x, d, unit.SI, 3)),
		fmt.Sprintf("usual is %s to %s", unit.Format(low, d, unit.SI, 3), unit.Format(high, d, unit.SI, 3)), "")
}

// unlikelyStock remarks on the values of a stock.
func (r *resolver) unlikelyStock(e *stockEntry, said properties, got map[string]formula.Program) {
	if e.bad {
		return
	}
	r.outside(e.massAt, "unlikely-mass", "a mass per length", r.num(e.mass), massLow, massHigh, unit.MassPerLength.Dim)
	if e.young != nil && said["young"] != nil {
		r.outside(said["young"].Value.Place(), "unlikely-young", "a modulus", r.num(*e.young), youngLow, youngHigh, unit.Stress.Dim)
	}
	r.unlikelyBending(e)
	switch d, ok := got["density"]; {
	case ok:
		r.outside(said["density"].Value.Place(), "unlikely-density", "a density", r.num(d), densityLow, densityHigh, unit.Density.Dim)
	case e.area != nil:
		r.outside(e.massAt, "unlikely-density", "a mass per length and area that make a density", r.num(e.mass)/r.num(*e.area), densityLow, densityHigh, unit.Density.Dim)
	}
}

// bendingSlack is how far a bending stiffness may lie outside its bounds before
// it is remarked on. Chosen: wires that do not slide at all reach 1.12 times a
// solid bar of the same metal area, because they stand farther from the middle.
const bendingSlack = 2

// unlikelyBending remarks on a bending stiffness outside its bounds. None at all
// is a choice and not remarked on here.
func (r *resolver) unlikelyBending(e *stockEntry) {
	x := r.num(e.bending)
	if e.bendHigh == nil || x == 0 {
		return
	}
	low, high := 0.0, r.num(*e.bendHigh)
	if e.bendLow != nil {
		low = r.num(*e.bendLow)
	}
	if x >= low/bendingSlack && x <= high*bendingSlack {
		return
	}
	found := "a solid bar of the same metal has " + r.shownBending(*e.bendHigh)
	if e.bendLow != nil {
		found += ", wires that slide " + r.shownBending(*e.bendLow)
	}
	r.warnAt(e.bendAt, "unlikely-bending", "a bending stiffness of "+r.shownBending(e.bending)+" is unusual for this stock", found, "")
}

// unlikelyRatio remarks on a damping ratio of a bare line.
func (r *resolver) unlikelyRatio(e syntax.Expr, z float64) {
	if z == 0 || z >= ratioLow && z <= ratioHigh {
		return
	}
	r.warnAt(e.Place(), "unlikely-loss", fmt.Sprintf("a damping ratio of %s %% is unusual for a bare line", unit.Digits(100*z, 3)), "usual is 0.02 % to 0.5 %", "")
}

// unlikelyLine remarks on tension, strain and wave speed.
func (r *resolver) unlikelyLine(e *lineEntry, line *scenario.LineOf[formula.Program]) {
	seen := map[string]bool{}
	once := func(span diag.Span, code, key string) bool {
		k := fmt.Sprint(span.Start, code, key)
		if seen[k] {
			return false
		}
		seen[k] = true
		return true
	}
	whole := lineSums{cos: 1}
	if e.incline != nil {
		whole.cos = math.Cos(r.num(*e.incline))
	}
	for i := range line.Nodes {
		if n := &line.Nodes[i]; n.Kind == scenario.Joint && n.Mass.Code != nil {
			whole.mass += r.num(n.Mass)
		}
	}
	for i := range line.Segments {
		whole.mass += r.rowMass(&line.Segments[i])
		s, p := &line.Segments[i], &e.parts[i]
		low, high := r.segmentEnds(s)
		mean, m := (low+high)/2, r.num(s.MassPerLength)
		if once(p.tensAt, "tension", "") {
			r.outside(p.tensAt, "unlikely-tension", "a tension", high, tensionLow, tensionHigh, unit.Force.Dim)
		}
		whole.add(r.num(s.Length), m, mean, r.num(s.Axial))
		if ea := r.num(s.Axial); ea > 0 && high/ea > strainHigh && once(p.tensAt, "strain", s.Stock) {
			r.warnAt(p.tensAt, "unlikely-strain", fmt.Sprintf("this tension strains %s by %s %%", s.Stock, unit.Digits(100*high/ea, 3)), "above 1 % the area or the modulus is likely to be wrong", "")
		}
		if strength := r.num(s.Strength); strength > 0 && once(p.tensAt, "share", s.Stock) {
			r.share(p.tensAt, s.Stock, high/strength)
		}
		if once(p.tensAt, "speed", s.Stock) {
			r.outside(p.tensAt, "unlikely-wave-speed", fmt.Sprintf("a wave speed in %s", s.Stock), math.Sqrt(mean/m), speedLow, speedHigh, unit.Speed.Dim)
		}
	}
	if !e.sideways && e.sag.IsZero() && !e.weighted && whole.give > 0 {
		r.sagMatters(e, &whole)
	}
	r.sagDeep(e, &whole)
	r.bendingMatters(e, line, &whole)
}

// rowMass is what the joints of a segment's rows weigh, kg.
func (r *resolver) rowMass(s *scenario.SegmentOf[formula.Program]) float64 {
	sum := 0.0
	for i := range s.Every {
		e := &s.Every[i]
		sum += r.num(e.Joint.Mass) * float64(scenario.EveryCount(r.num(s.Length), r.num(e.First), r.num(e.Spacing)))
	}
	return sum
}

// lineSums are sums over a line.
type lineSums struct {
	length, mass, pull float64 // m, kg, N m (tension times length)
	give               float64 // sum of L/EA, m/N; NaN where one is not known
	cos                float64 // of the incline
}

func (w *lineSums) add(length, massPerLength, tension, axial float64) {
	w.length += length
	w.mass += massPerLength * length
	w.pull += tension * length
	if axial > 0 {
		w.give += length / axial
	} else {
		w.give = math.NaN()
	}
}

// tension is the mean tension, N.
func (w *lineSums) tension() float64 { return w.pull / w.length }

// share remarks on the part of its strength that a line carries.
func (r *resolver) share(span diag.Span, stock string, share float64) {
	if share >= shareLow && share <= shareHigh {
		return
	}
	found := "usual is 3 % to 60 %"
	if share > 1 {
		found = "it would break"
	}
	r.warnAt(span, "unlikely-share", fmt.Sprintf("this tension is %s %% of the strength of %s", unit.Digits(100*share, 3), stock), found, "")
}

// deepSag is the sag of a line by its span up to which the shallow theory is
// used. Source: Irvine, Cable Structures (1981), ch. 2: d/L below 1/8 (from memory).
const deepSag = 0.125

// sagDeep remarks on a line that hangs too deep for a shallow one: its sag is
// W cos(incline)/(8 T) of its span, with the whole weight W.
func (r *resolver) sagDeep(e *lineEntry, w *lineSums) {
	share := w.mass * unit.StandardGravity * w.cos / (8 * w.tension())
	if !(share > deepSag) || math.IsInf(share, 0) {
		return
	}
	r.warnAt(e.stmt.Name.Span, "deep-sag", "the line "+e.name+" hangs too deep for the theory of shallow lines",
		fmt.Sprintf("its sag is %s %% of its span, and the theory holds up to 12.5 %% (one eighth)", unit.Digits(100*share, 3)), "")
}

// sagMatters remarks where sag, which is left out, would change the first
// vertical frequency: lambda^2 = (m g L cos(incline)/T)^2 L/(T sum(l/EA)), with
// the mean mass per length m and the mean tension T (Irvine and Caughey, Proc.
// R. Soc. A 341 (1974) 299-315; the effective length is taken as L, which for
// such lines is right within a per cent).
func (r *resolver) sagMatters(e *lineEntry, w *lineSums) {
	weight := w.mass * unit.StandardGravity * w.cos
	lambda2 := math.Pow(weight/w.tension(), 2) * w.length / (w.tension() * w.give)
	if !(lambda2 > lambdaHigh) {
		return
	}
	r.warnAt(e.stmt.Name.Span, "sag-matters", "sag is left out, and would raise the first vertical frequency of "+e.name,
		fmt.Sprintf("lambda squared is %s, where 0.1 is remarked on", unit.Digits(lambda2, 3)), "sag included")
}

// bendingMatters remarks where bending is left out and a solid bar of the metal
// would have so much of it that the line is no string: xi = L sqrt(T/EI) below
// 400, where clamped ends raise the first frequency by 2/xi and a tension read
// from it by 4/xi, 1 % (the first terms of the frequency equation of a clamped
// line with bending for large xi).
func (r *resolver) bendingMatters(e *lineEntry, line *scenario.LineOf[formula.Program], w *lineSums) {
	worst, stock := 0.0, ""
	var loosest *formula.Program
	for i := range line.Segments {
		from := e.parts[i].stock
		if from.bendHigh == nil || r.num(line.Segments[i].Bending) > 0 {
			continue
		}
		if ei := r.num(*from.bendHigh); ei > worst {
			worst, stock, loosest = ei, line.Segments[i].Stock, from.bendLow
		}
	}
	xi := w.length * math.Sqrt(w.tension()/worst)
	if worst == 0 || !(xi < xiLow) {
		return
	}
	bounds := "at most " + unit.Format(worst, unit.Bending.Dim, unit.SI, 3)
	if loosest != nil && r.num(*loosest) < worst {
		bounds = "from " + unit.Format(r.num(*loosest), unit.Bending.Dim, unit.SI, 3) + " (wires that slide) to " + unit.Format(worst, unit.Bending.Dim, unit.SI, 3) + " (a solid bar)"
	}
	effect := "by up to " + unit.Digits(200/xi, 2) + " %"
	if xi < xiBeam {
		effect = "by far"
	}
	r.warnAt(e.stmt.Name.Span, "bending-matters", "bending is left out, and could raise the first frequency of "+e.name+" "+effect,
		fmt.Sprintf("%s has %s, so that xi may be as low as %s, where 400 is remarked on", stock, bounds, unit.Digits(xi, 3)), "")
}
