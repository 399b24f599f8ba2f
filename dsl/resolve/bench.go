package resolve

import (
	"fmt"

	"github.com/tautspan/tautspan/dsl/syntax"
	"github.com/tautspan/tautspan/dsl/unit"
	"github.com/tautspan/tautspan/engine/scenario"
)

// bench reads impedance table("bench.csv", "f" unit Hz, "real" unit N*s/m,
// "imag" unit N*s/m): force per velocity over frequency.
func (r *resolver) bench(c *syntax.Call) (scenario.Bench, bool) {
	const form = `impedance table("bench.csv", "f" unit Hz, "real" unit N*s/m, "imag" unit N*s/m)`
	none := scenario.Bench{}
	if c.Name.Quoted || c.Name.Text != "table" || len(c.Args) != 4 {
		r.errorAt(c.Span, "wrong-arguments", "an impedance is a table of three columns: frequency, real and imaginary part", "", form)
		return none, false
	}
	file, ok := c.Args[0].Value.(*syntax.String)
	if !ok || c.Args[0].Key != nil || c.Args[0].Unit != nil {
		r.errorAt(c.Args[0].Span, "wrong-arguments", "a table begins with the name of its file in quotes", "", form)
		return none, false
	}
	kinds := [3]unit.Kind{unit.Frequency, unit.Dashpot, unit.Dashpot}
	var units [3]unit.Unit
	for i, a := range c.Args[1:] {
		if a.Unit == nil {
			r.errorAt(a.Span, "missing-unit", "a column of a table says its unit", "", clip(a.Value)+" unit "+kinds[i].SI)
			return none, false
		}
		u, uok := r.unit(a.Unit, "")
		if !uok {
			return none, false
		}
		if u.Dim != kinds[i].Dim || u.Angle != 0 {
			r.errorAt(a.Unit.Span, "wants-"+kinds[i].Word, fmt.Sprintf("column %d of an impedance is %s", i+1, kinds[i].Name), "this is "+describe(value{dim: u.Dim, angle: u.Angle}), "unit "+kinds[i].SI)
			return none, false
		}
		units[i] = u
	}
	t := r.table(file)
	if t == nil {
		return none, false
	}
	read := &csvReader{r: r, out: t, call: file.Span}
	var columns [3][]float64
	first := 0
	for i := range columns {
		at, found := r.column(t, c.Args[i+1].Value)
		if !found {
			return none, false
		}
		if columns[i] = read.numbers(at, units[i]); columns[i] == nil {
			return none, false
		}
		if i == 0 {
			first = at
		}
	}
	f := columns[0]
	for i := range f {
		if f[i] > 0 && (i == 0 || f[i] > f[i-1]) {
			continue
		}
		read.fault(t.starts[i][first], len(t.rows[i][first]), "table-order", "the frequencies of a table are above zero and rise from row to row", "", "")
		return none, false
	}
	for i, z := range columns[1] {
		if z < 0 {
			r.warnAt(c.Span, "bench-drives", "this damper gives power to the line", fmt.Sprintf("at %s its real part is below zero", unit.Format(f[i], unit.Frequency.Dim, unit.SI, 4)), "")
			break
		}
	}
	return scenario.Bench{Name: t.file.Name(), Frequency: f, Real: columns[1], Imag: columns[2]}, true
}
