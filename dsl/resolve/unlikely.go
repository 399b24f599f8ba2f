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
	lambdaHigh              = 0.1 // Irvine's parameter; at 0.09 the first vertical frequency rises by 0.4 %
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
	if e.young != nil {
		r.outside(said["young"].Value.Place(), "unlikely-young", "a modulus", r.num(*e.young), youngLow, youngHigh, unit.Stress.Dim)
	}
	switch d, ok := got["density"]; {
	case ok:
		r.outside(said["density"].Value.Place(), "unlikely-density", "a density", r.num(d), densityLow, densityHigh, unit.Density.Dim)
	case e.area != nil:
		r.outside(e.massAt, "unlikely-density", "a mass per length and area that make a density", r.num(e.mass)/r.num(*e.area), densityLow, densityHigh, unit.Density.Dim)
	}
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
	mass, length := 0.0, 0.0
	give := 0.0 // sum of L/EA, m/N
	for i := range line.Segments {
		s, p := &line.Segments[i], &e.parts[i]
		t, m := r.num(s.Tension), r.num(s.MassPerLength)
		if once(p.tensAt, "tension", "") {
			r.outside(p.tensAt, "unlikely-tension", "a tension", t, tensionLow, tensionHigh, unit.Force.Dim)
		}
		l := r.num(s.Length)
		mass, length = mass+m*l, length+l
		if ea := r.num(s.Axial); ea > 0 {
			give += l / ea
			if t/ea > strainHigh && once(p.tensAt, "strain", s.Stock) {
				r.warnAt(p.tensAt, "unlikely-strain", fmt.Sprintf("this tension strains %s by %s %%", s.Stock, unit.Digits(100*t/ea, 3)), "above 1 % the area or the modulus is likely to be wrong", "")
			}
		} else {
			give = math.NaN()
		}
		if strength := r.num(s.Strength); strength > 0 && once(p.tensAt, "share", s.Stock) {
			r.share(p.tensAt, s.Stock, t/strength)
		}
		if once(p.tensAt, "speed", s.Stock) {
			r.outside(p.tensAt, "unlikely-wave-speed", fmt.Sprintf("a wave speed in %s", s.Stock), math.Sqrt(t/m), speedLow, speedHigh, unit.Speed.Dim)
		}
	}
	if !e.sideways && !e.sagSaid && give > 0 {
		r.sagMatters(e, r.num(line.Segments[0].Tension), mass, length, give)
	}
}

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

// sagMatters remarks where sag, which is left out, would change the first
// vertical frequency: lambda^2 = (m g L/T)^2 L/(T sum(l/EA)) of a level line, with the mean
// mass per length m (Irvine and Caughey, Proc. R. Soc. A 341 (1974) 299-315;
// the effective length is taken as L, which for such lines is right within a
// per cent).
func (r *resolver) sagMatters(e *lineEntry, tension, mass, length, give float64) {
	weight := mass * unit.StandardGravity
	lambda2 := math.Pow(weight/tension, 2) * length / (tension * give)
	if lambda2 <= lambdaHigh {
		return
	}
	r.warnAt(e.stmt.Name.Span, "sag-matters", "sag is left out, and would raise the first vertical frequency of "+e.name,
		fmt.Sprintf("lambda squared is %s for a level line, where 0.1 is remarked on", unit.Digits(lambda2, 3)), "plane sideways")
}
