package app

import (
	"fmt"
	"math"

	"github.com/tautspan/tautspan/engine/compare"
	"github.com/tautspan/tautspan/engine/doubt"
	"github.com/tautspan/tautspan/engine/scenario"
)

// document fills the run's document from outcome and answers.
func (r *runner) document() {
	d := r.doc
	d.Run, d.Plucks = r.runFacts(), r.pluckFacts()
	d.Plugins = append(d.Plugins, r.loads.used...)
	d.Plugins = append(d.Plugins, r.builtInLaws()...)
	d.Cautions = cautions(r.net, formatEnergy)
	d.Collected = collectedRows(r.answers.Collected[:min(r.asked, len(r.answers.Collected))])
	var verdicts []string
	for i := range r.answers.Requirements {
		row := requirementRow(&r.answers.Requirements[i])
		d.Requirements = append(d.Requirements, row)
		verdicts = append(verdicts, row.Verdict)
	}
	if r.outcome != nil {
		d.Cut = r.outcome.Cut
		d.Notes = append(d.Notes, r.outcome.Notes...)
		r.voices()
		for c := range r.outcome.Channels {
			row := r.watchRow(c)
			d.Watches = append(d.Watches, row)
			verdicts = append(verdicts, row.Verdict)
		}
		verdicts = append(verdicts, r.outcome.Verdict.String())
	}
	if r.answers.Changes != "" {
		d.Notes = append(d.Notes, "the doubt of the inputs was carried to the records by "+r.answers.Changes)
	}
	for _, w := range r.answers.Waiting {
		d.Notes = append(d.Notes, w+" waits for a run")
	}
	d.Notes = append(d.Notes, r.leftToSweep()...)
	d.Verdict = worstVerdict(verdicts)
	d.Head = r.head
	d.ResultDir = r.dir
}

// voices lists the solvers and their energy accounts.
func (r *runner) voices() {
	for i := range r.outcome.Voices {
		v := &r.outcome.Voices[i]
		row := SolverRow{Name: v.Name, Version: v.Version, Levels: []int{}, Notes: append([]string{}, v.Notes...)}
		if sum, foreign := r.solvers.checksums[v.Name]; foreign {
			row.SHA256 = &sum
		}
		if !v.Usable() {
			reason := v.Reason()
			row.ReasonIfAbsent = &reason
		} else {
			cells, steps := v.Cells, v.Steps
			row.Cells, row.Steps, row.Levels = &cells, &steps, v.Levels
			if v.Exhausted != "" {
				row.Notes = append(row.Notes, "not refined further: "+v.Exhausted)
			}
			e := v.Energy
			row := EnergyRow{Solver: v.Name, Start: finite(e.Start)}
			if !e.Unkept {
				row.Work, row.End, row.Lost, row.Unaccounted = finite(e.Work), finite(e.End), finite(e.Lost), finite(e.Unaccounted())
			}
			r.doc.Energy = append(r.doc.Energy, row)
		}
		r.doc.Solvers = append(r.doc.Solvers, row)
	}
}

func (r *runner) watchRow(c int) WatchRow {
	ch, mc := &r.outcome.Channels[c], &r.session.Centre().Mesh.Channels[c]
	row := WatchRow{
		Name: mc.Watch, Quantity: mc.Quantity.String(), Unit: ch.Unit, Mean: mc.Means > 0, Solvers: []WatchVoice{},
		Verdict: ch.Verdict.String(), Difference: finite(ch.Difference), ResolvingPower: finite(ch.ResolvingPower),
	}
	if ch.OddOneOut != "" {
		row.OddOneOut = &ch.OddOneOut
	}
	for i := range r.outcome.Voices {
		if !r.outcome.Voices[i].Usable() {
			continue
		}
		s := &ch.Solvers[i]
		row.Solvers = append(row.Solvers, WatchVoice{Solver: r.outcome.Voices[i].Name, Peak: finite(s.Peak), TimeOfPeak: finite(s.TimeOfPeak), ErrorBar: finite(s.ErrorBar), Order: finite(s.Order)})
	}
	figure := func(kind scenario.MeasureKind, k compare.Kind) doubt.Number {
		if n, ok := r.figureOf(ch.Name, kind); ok && !mc.Along {
			return n
		}
		o := &ch.Observables[k]
		return doubt.Bounded(o.Value, ch.Unit, o.Numerical)
	}
	row.Peak, row.RMS, row.Final = figure(scenario.Peak, compare.Peak), figure(scenario.RMS, compare.RMS), figure(scenario.Final, compare.Final)
	row.Reason = r.reasonOf(ch)
	r.picture(c, ch)
	return row
}

// reasonOf says in words why a channel's solvers do not agree.
func (r *runner) reasonOf(ch *compare.Channel) string {
	switch ch.Verdict {
	case compare.Unsettled:
		return fmt.Sprintf("the solvers resolve %.2g %% and %.2g %% is asked; allow more work (effort thorough, limit work) or a wider agree", 100*ch.ResolvingPower, 100*r.net.Run.Agree)
	case compare.Differ:
		if ch.OddOneOut != "" {
			return ch.OddOneOut + " stands against the others, which agree"
		}
		return "the solvers differ by more than their bars explain, and it cannot be said which is wrong"
	case compare.Alone:
		return "only one solver can answer, so nothing checks it"
	}
	return ""
}

// picture keeps the record of a place for the small picture in the terminal.
func (r *runner) picture(c int, ch *compare.Channel) {
	mc := &r.session.Centre().Mesh.Channels[c]
	if mc.Along || len(ch.Series) == 0 {
		return
	}
	r.histories = append(r.histories, History{Name: ch.Name, Unit: ch.Unit, Every: r.mesh.Timing.Every, Values: ch.Series[0]})
}

func requirementRow(q *requirement) RequirementRow {
	row := RequirementRow{
		Text: q.Of.Source, Clause: q.Of.Clause, Remark: q.Of.Text, Value: q.Value, Limit: finite(q.Limit.Value), Unit: q.Of.Unit, Shown: q.Of.Shown,
		Verdict: string(q.Verdict), Margin: finite(q.Judgement.Margin), Settle: q.Settles,
	}
	if q.Of.Relation == scenario.Within || q.Of.Relation == scenario.Outside {
		row.Upper = finite(q.Upper.Value)
	}
	for i, m := range q.Of.Measures {
		if i > 0 {
			row.Measure += ", "
		}
		row.Measure += m.Source
	}
	if q.Note != "" && !math.IsNaN(q.Value.Value) {
		row.Settle = joinSentences(row.Settle, q.Note)
	}
	return row
}

func joinSentences(a, b string) string {
	if a == "" {
		return b
	}
	return a + "; " + b
}
