package main

import (
	"math"
	"testing"
)

// account is one solver's energy account, J.
type account struct{ start, work, end, lost, unaccounted float64 }

func (r *ran) accounts(t *testing.T) map[string]account {
	t.Helper()
	out := map[string]account{}
	for _, e := range r.doc.Energy {
		if e.End == nil {
			continue // transform keeps no account
		}
		out[e.Solver] = account{*e.Start, *e.Work, *e.End, *e.Lost, *e.Unaccounted}
	}
	if len(out) != 3 {
		t.Fatalf("%d energy accounts", len(out))
	}
	return out
}

// Energies that solvers account for at the start: of a pluck, of a strike over a
// length, of one mode. The lines carry no loss, so what is there at the start is
// there at the end, but for what the account itself calls unexplained.
func TestPublishedStartEnergies(t *testing.T) {
	hold := func(id, name string, text string) {
		t.Helper()
		c := caseOf(t, id)
		r := runOf(t, text)
		r.settled(t, id)
		for solver, e := range r.accounts(t) {
			t.Logf("%s %s by %s: off by %.2g at the start, %.2g at the end, unexplained %.2g", id, name, solver,
				e.start/c.want(name)-1, e.end/c.want(name)-1, e.unaccounted/c.want(name))
		}
	}
	c := caseOf(t, "C16-01")
	hold("C16-01", "E", taut(stockOf("w", 18.4, 0), plain(c.in("T"), c.in("L"), "fixed", "fixed"),
		"excite x pluck at s "+q(c.in("a"), "m")+" by "+q(c.in("h"), "m"), "watch p at s 30 m displacement", runFor(2, 0.01, 0.01)))
	c = caseOf(t, "C16-02")
	hold("C16-02", "E_strike", taut(stockOf("w", c.in("m"), 0), lineOf("l", c.in("T"), "support a fixed", "segment s w 0.4 m",
		"segment r w "+q(c.in("w"), "m"), "segment v w "+q(c.in("L")-0.4-c.in("w"), "m"), "support b fixed"),
		"excite x start velocity along r = "+q(c.in("v0"), "m/s"), "watch p at v 1 m displacement", runFor(0.03, 0.0005, 0.01)))
	hold("C16-02", "E_mode", taut(stockOf("w", c.in("m"), 0), plain(c.in("T"), c.in("L"), "fixed", "fixed"),
		"excite x start displacement along s = "+q(c.in("A"), "m")+" * sin("+q(c.in("n"), "")+" * pi * x / "+q(c.in("L"), "m")+")",
		"watch p at s 0.3 m displacement", runFor(0.03, 0.0005, 0.01)))
}

// Static deflection: a point force held until the record begins, and a uniform
// load whose vibration has died away.
func TestPublishedStaticDeflection(t *testing.T) {
	c := caseOf(t, "C16-03")
	r := runOf(t, taut(stockOf("w", 2, 0), plain(c.in("T"), c.in("L"), "fixed", "fixed"),
		"excite x pluck at s "+q(c.in("a"), "m")+" with "+q(c.in("F"), "N"),
		"watch p at s "+q(c.in("a"), "m")+" displacement", "watch mid at s "+q(c.in("L")/2, "m")+" displacement", "watch hold at a force",
		runFor(1, 0.01, 0.01)))
	r.settled(t, c.ID)
	r.covers(t, "C16-03 y_at_a", "p.displacement", 0, c.want("y_at_a"), c.slack(t, "y_at_a", 1))
	r.covers(t, "C16-03 y_mid_from_force", "mid.displacement", 0, c.want("y_mid_from_force"), c.slack(t, "y_mid_from_force", 1))
	// The first front reaches the end after 0.2 s: until then it holds its share.
	for _, at := range []float64{0, 0.1} {
		r.covers(t, "C16-03 end_force_near", "hold.force", at, c.want("end_force_near"), c.slack(t, "end_force_near", 1))
	}

	// m = 2 kg/m: c = 100 m/s, w_1 = pi c/L = 5.236 1/s. With d = 2 m w_1 the first
	// mode is damped critically and falls as (1 + w t) e^{-w t}: 4e-11 of it is left
	// after 5.2 s; the higher ones fall as e^{-w_1 t} with amplitudes 1/n^3: 2e-12.
	speed := math.Sqrt(c.in("T") / 2)
	w1 := math.Pi * speed / c.in("L")
	left := 2 * (1 + w1*5.2) * math.Exp(-w1*5.2)
	r = runOf(t, taut(stockOf("w", 2, 4*w1), plain(c.in("T"), c.in("L"), "fixed", "fixed"),
		"excite x press along s with step("+q(c.in("p"), "N/m")+", 0 s)", "watch mid at s "+q(c.in("L")/2, "m")+" displacement", runFor(5.2, 0.01, 0.01)))
	r.settled(t, c.ID)
	used := r.covers(t, "C16-03 y_mid_uniform", "mid.displacement", 5.2, c.want("y_mid_uniform"), left*c.want("y_mid_uniform")+c.slack(t, "y_mid_uniform", 1))
	final := r.doc.Watches[0].Final
	if off := math.Abs(final.Value - c.want("y_mid_uniform")); off > final.Numerical+left*c.want("y_mid_uniform")+c.slack(t, "y_mid_uniform", 1) {
		t.Errorf("C16-03 y_mid_uniform: final value %.9g +- %.2g", final.Value, final.Numerical)
	}
	t.Logf("C16-03: %.2f of band and class taken up by the uniform load", used)
}

// Mean power of a harmonic wave: a support moves, the far end swallows. Ten whole
// periods pass the far end between 0.2 s, when the wave arrives, and 2.2 s.
func TestPublishedPowerOfAWave(t *testing.T) {
	c := caseOf(t, "C16-04")
	speed := math.Sqrt(c.in("T") / c.in("m"))
	r := runOf(t, taut(stockOf("w", c.in("m"), 0), plain(c.in("T"), 0.2*speed, "fixed", "absorbing"),
		"excite x move a with sine("+q(c.in("A"), "m")+", "+q(c.in("f"), "Hz")+")", "watch p at b displacement", runFor(2.2, 0.01, 0.01)))
	r.settled(t, c.ID)
	for solver, e := range r.accounts(t) {
		t.Logf("C16-04 by %s: %.9g W, off by %.2g; work %.9g unexplained %.2g of the loss", solver, e.lost/2, e.lost/2/c.want("power")-1, e.work, e.unaccounted/e.lost)
	}
}
