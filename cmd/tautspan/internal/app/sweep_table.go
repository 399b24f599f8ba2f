package app

import (
	"fmt"
	"math"
	"slices"

	"github.com/tautspan/tautspan/cmd/tautspan/internal/store"
)

// verdictNumber is how a table writes a verdict.
var verdictNumber = map[string]float64{"met": 1, "undecided": 0, "not met": -1}

// columns are the names of a table's columns, the number of the case first.
func (s *sweeper) columns(lets []int) []string {
	t := s.compiled.Template
	names := []string{"case"}
	for _, i := range lets {
		names = append(names, fmt.Sprintf("%s [%s]", t.Lets[i].Name, t.Lets[i].Unit))
	}
	for i := range t.Collects {
		c := &t.Collects[i]
		names = append(names, fmt.Sprintf("%s [%s]", c.Source, c.Unit), fmt.Sprintf("%s low95 [%s]", c.Source, c.Unit), fmt.Sprintf("%s high95 [%s]", c.Source, c.Unit))
	}
	for i := range t.Requires {
		q := &t.Requires[i]
		names = append(names, fmt.Sprintf("require %s [%s]", q.Source, q.Unit), fmt.Sprintf("require %s margin [%s]", q.Source, q.Unit), fmt.Sprintf("require %s verdict", q.Source))
	}
	seen := map[string]int{}
	for i, n := range names { // the same asked twice
		if seen[n]++; seen[n] > 1 {
			names[i] = fmt.Sprintf("%s (%d)", n, seen[n])
		}
	}
	return names
}

// gather puts the cases that are done into table, document and summary.
func (s *sweeper) gather(p *plan, rows [][]float64, reasons []string, verdicts [][]string) {
	names := s.columns(p.lets)
	s.doc.Columns = names
	columns := make([]store.Column, len(names))
	for c, name := range names {
		columns[c].Name = name
	}
	t := s.compiled.Template
	for i := range t.Requires {
		s.doc.Summary.Verdicts = append(s.doc.Summary.Verdicts, VerdictCount{Text: t.Requires[i].Source})
	}
	for k, row := range rows {
		if reasons[k] != "" {
			s.doc.Failed++
			s.doc.Failures = append(s.doc.Failures, SweepFailure{Case: k + 1, Reason: reasons[k]})
			continue
		}
		if row == nil {
			s.doc.Cut = true
			continue
		}
		s.doc.Done++
		shown := make([]*float64, 0, len(names))
		for c := range columns {
			v := float64(k + 1)
			if c > 0 {
				v = row[c-1]
			}
			columns[c].Values = append(columns[c].Values, v)
			shown = append(shown, finite(v))
		}
		if len(s.doc.Rows) < shownRows {
			s.doc.Rows = append(s.doc.Rows, shown)
		}
		for i, v := range verdicts[k] {
			count := &s.doc.Summary.Verdicts[i]
			switch v {
			case "met":
				count.Met++
			case "undecided":
				count.Undecided++
			default:
				count.NotMet++
			}
		}
	}
	s.table = store.Table{Columns: columns}
	for c := 1; c < len(columns); c++ {
		s.doc.Summary.Columns = append(s.doc.Summary.Columns, summarise(names[c], columns[c].Values))
	}
}

// summarise is a column's spread. Sums go in the order of the cases, so that they
// come out the same whatever the number of workers.
func summarise(name string, values []float64) ColumnSummary {
	var sorted []float64
	sum := 0.0
	for _, v := range values {
		if !math.IsNaN(v) && !math.IsInf(v, 0) {
			sorted = append(sorted, v)
			sum += v
		}
	}
	out := ColumnSummary{Name: name, Count: len(sorted)}
	if len(sorted) == 0 {
		return out
	}
	mean, squares := sum/float64(len(sorted)), 0.0
	for _, v := range sorted {
		squares += (v - mean) * (v - mean)
	}
	slices.Sort(sorted)
	at := func(share float64) *float64 {
		x := math.Min(math.Max(share*float64(len(sorted))-0.5, 0), float64(len(sorted)-1))
		k := min(int(x), len(sorted)-1)
		v := sorted[k]
		if k+1 < len(sorted) {
			v += (x - float64(k)) * (sorted[k+1] - sorted[k])
		}
		return finite(v)
	}
	out.Least, out.Most, out.Mean = at(0), at(1), finite(mean)
	out.Median, out.P05, out.P95 = at(0.5), at(0.05), at(0.95)
	if len(sorted) > 1 {
		out.SD = finite(math.Sqrt(squares / float64(len(sorted)-1)))
	}
	return out
}
