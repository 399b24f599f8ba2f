package main

import (
	"context"
	"encoding/csv"
	"fmt"
	"math"
	"os"
	"path/filepath"
	"strconv"
	"strings"
	"testing"

	"github.com/tautspan/tautspan/cmd/tautspan/internal/app"
)

// ran is a run as a reader of its folder sees it.
type ran struct {
	doc   *app.RunDoc
	every float64
	best  map[string][]float64            // the record reported, by watch.quantity
	band  map[string][]float64            // its error band
	voice map[string]map[string][]float64 // by watch.quantity and solver
}

// runOf runs a scenario through the use case behind the command, with a result
// folder, and reads the folder back.
func runOf(t *testing.T, text string) *ran {
	t.Helper()
	dir := t.TempDir()
	file, out := filepath.Join(dir, "case.taut"), filepath.Join(dir, "result")
	if err := os.WriteFile(file, []byte(text), 0o600); err != nil {
		t.Fatal(err)
	}
	doc, histories, status, err := app.New().Run(context.Background(), app.Input{File: file}, app.RunWant{Out: out})
	if err != nil || len(doc.Errors) > 0 {
		t.Fatalf("status %d, %v, %+v\n%s", status, err, doc, text)
	}
	r := &ran{doc: doc, every: doc.Run.Every, best: map[string][]float64{}, band: map[string][]float64{}, voice: map[string]map[string][]float64{}}
	for _, h := range histories {
		r.best[h.Name] = h.Values
	}
	r.read(t, filepath.Join(out, "series.csv"))
	return r
}

// read takes the table of records apart.
func (r *ran) read(t *testing.T, file string) {
	t.Helper()
	f, err := os.Open(file)
	if err != nil {
		t.Fatal(err)
	}
	defer func() { _ = f.Close() }()
	rows, err := csv.NewReader(f).ReadAll()
	if err != nil {
		t.Fatal(err)
	}
	for k, head := range rows[0] {
		values := make([]float64, len(rows)-1)
		for i := range values {
			if values[i], err = strconv.ParseFloat(rows[i+1][k], 64); err != nil {
				t.Fatal(err)
			}
		}
		name, _, _ := strings.Cut(head, " ")
		if stem, found := strings.CutSuffix(name, ".band"); found {
			r.band[stem] = values
			continue
		}
		at := strings.LastIndex(name, ".")
		if at < 0 {
			continue
		}
		if r.voice[name[:at]] == nil {
			r.voice[name[:at]] = map[string][]float64{}
		}
		r.voice[name[:at]][name[at+1:]] = values
	}
}

// row is the row of a time, which must be one of the record's.
func (r *ran) row(t *testing.T, time float64) int {
	t.Helper()
	i := int(math.Round(time / r.every))
	if math.Abs(float64(i)*r.every-time) > 1e-9*(time+r.every) {
		t.Fatalf("%g s is no row of a record every %g s", time, r.every)
	}
	return i
}

// sharpness is how wide, as a share of the record's peak, an error band may be at
// a published value for the value to be a check at all. Chosen: agree, for the
// peak itself is settled within that; a band is pointwise and may be wider, so
// twice it.
const sharpness = 2

// covers holds a record's row against a value: they may differ by the error band
// that the run itself gives there, and by extra, which belongs to the value and
// is derived where it is used. It returns the part of that allowance taken up.
func (r *ran) covers(t *testing.T, what, channel string, time, want, extra float64) float64 {
	t.Helper()
	best, band := r.best[channel], r.band[channel]
	if len(best) == 0 || len(band) != len(best) {
		t.Fatalf("%s: no record of %s", what, channel)
	}
	i := r.row(t, time)
	peak := 0.0
	for _, v := range best {
		peak = math.Max(peak, math.Abs(v))
	}
	if peak > 0 && band[i] > sharpness*r.doc.Run.Agree*peak {
		t.Errorf("%s: the band of %.2g at %g s is too wide to check anything (peak %.3g)", what, band[i], time, peak)
	}
	off := math.Abs(best[i] - want)
	if !(off <= band[i]+extra) {
		t.Errorf("%s: %s is %.9g +- %.2g at %g s, published %.9g (off by %.2g)", what, channel, best[i], band[i], time, want, off)
	}
	if band[i]+extra == 0 {
		return 0
	}
	return off / (band[i] + extra)
}

// settled asks that the solvers agree with one another and that three spoke.
func (r *ran) settled(t *testing.T, what string) {
	t.Helper()
	if r.doc.Verdict != "agree" && r.doc.Verdict != "met" {
		t.Errorf("%s: verdict %s", what, r.doc.Verdict)
	}
	for _, s := range r.doc.Solvers {
		if s.ReasonIfAbsent != nil {
			t.Errorf("%s: %s is absent: %s", what, s.Name, *s.ReasonIfAbsent)
		}
	}
}

// placeAndTime reads names such as y_x0.6_t0.001.
func placeAndTime(name string) (x, t float64, ok bool) {
	xs, ts, found := strings.Cut(strings.TrimPrefix(name, "y_x"), "_t")
	x, err1 := strconv.ParseFloat(xs, 64)
	t, err2 := strconv.ParseFloat(ts, 64)
	return x, t, found && err1 == nil && err2 == nil
}

// probed is a published table of displacements over place and time with the
// scenario of the motion; shift is added to every place, delay to every time.
type probed struct {
	id           string
	scene        []string
	at           func(x float64) string // the place of a published x
	delay        float64
	duration     float64
	every, agree float64
	skip         map[string]string // names left out, and why
	extra        func(x, t float64) float64
}

// hold runs the scenario with a watch at every published place.
func (p probed) hold(t *testing.T) {
	t.Helper()
	c := caseOf(t, p.id)
	parts := append([]string(nil), p.scene...)
	watch := map[float64]string{}
	for name := range c.Expected {
		x, _, ok := placeAndTime(name)
		if _, known := watch[x]; ok && !known && p.skip[name] == "" {
			watch[x] = "w" + strconv.Itoa(len(watch))
			parts = append(parts, "watch "+watch[x]+" at "+p.at(x)+" displacement")
		}
	}
	r := runOf(t, taut(append(parts, runFor(p.duration, p.every, p.agree))...))
	r.settled(t, p.id)
	worst, count := 0.0, 0
	scale := 0.0
	for _, f := range c.Expected {
		scale = math.Max(scale, math.Abs(f.Value))
	}
	for name := range c.Expected {
		x, at, ok := placeAndTime(name)
		if !ok || p.skip[name] != "" {
			continue
		}
		extra := c.slack(t, name, scale)
		if p.extra != nil {
			extra += p.extra(x, at)
		}
		count++
		worst = math.Max(worst, r.covers(t, p.id+" "+name, watch[x]+".displacement", at+p.delay, c.want(name), extra))
	}
	if count == 0 {
		t.Errorf("%s: nothing was held", p.id)
	}
	t.Logf("%s: %d values, at most %.2f of band and class taken up", p.id, count, worst)
}

func onSegment(shift float64) func(float64) string {
	return func(x float64) string { return "s " + q(x+shift, "m") }
}

// D'Alembert: pluck, strike, hump, and a pulse that meets an end.
func TestPublishedPulses(t *testing.T) {
	pluck := caseOf(t, "C05-01")
	tension := 1000.0
	mass := func(c published) float64 { return tension / (c.in("c") * c.in("c")) }
	probed{
		id: "C05-01", at: onSegment(0), duration: 0.015, every: 0.0005, agree: 0.01,
		scene: []string{
			stockOf("w", mass(pluck), 0), plain(tension, pluck.in("L"), "fixed", "fixed"),
			"excite x pluck at s " + q(pluck.in("a"), "m") + " by " + q(pluck.in("h"), "m"),
		},
	}.hold(t)

	strike := caseOf(t, "C05-02")
	probed{
		id: "C05-02", duration: 0.035, every: 0.0005, agree: 0.01,
		at: onSegment(0),
		scene: []string{
			stockOf("w", mass(strike), 0), plain(tension, strike.in("L"), "fixed", "fixed"),
			"excite x start velocity along s = if(x < " + q(strike.in("x1"), "m") + ", 0 m/s, if(x < " + q(strike.in("x2"), "m") + ", " + q(strike.in("v0"), "m/s") + ", 0 m/s))",
		},
	}.hold(t)
	// The same strike along a segment of its own.
	probed{
		id: "C05-02", duration: 0.035, every: 0.0005, agree: 0.01,
		at: func(x float64) string {
			switch {
			case x < strike.in("x1"):
				return "s " + q(x, "m")
			case x < strike.in("x2"):
				return "r " + q(x-strike.in("x1"), "m")
			}
			return "v " + q(x-strike.in("x2"), "m")
		},
		scene: []string{
			stockOf("w", mass(strike), 0), lineOf("l", tension, "support a fixed", "segment s w "+q(strike.in("x1"), "m"),
				"segment r w "+q(strike.in("x2")-strike.in("x1"), "m"), "segment v w "+q(strike.in("L")-strike.in("x2"), "m"), "support b fixed"),
			"excite x start velocity along r = " + q(strike.in("v0"), "m/s"),
		},
	}.hold(t)

	hump := caseOf(t, "C05-03")
	probed{
		id: "C05-03", duration: 0.2, every: 0.01, agree: 0.01,
		at: func(x float64) string {
			if x < hump.in("w") {
				return "d " + q(x, "m")
			}
			return "e " + q(x-hump.in("w"), "m")
		},
		scene: []string{
			stockOf("w", mass(hump), 0), lineOf("l", tension, "support a absorbing", "segment s w 4 m", "segment u w "+q(hump.in("w"), "m"),
				"segment d w "+q(hump.in("w"), "m"), "segment e w 4 m", "support b absorbing"),
			"excite x start displacement along u = " + q(hump.in("h"), "m") + " * x / " + q(hump.in("w"), "m"),
			"excite y start displacement along d = " + q(hump.in("h"), "m") + " * (1 - x / " + q(hump.in("w"), "m") + ")",
		},
	}.hold(t)

	for id, end := range map[string]string{"C05-04": "fixed", "C05-05": "free"} {
		c := caseOf(t, id)
		bell := fmt.Sprintf("%s * exp(-(x - %s)^2 / (2 * (%s)^2))", q(c.in("A"), "m"), q(c.in("x0"), "m"), q(c.in("s"), "m"))
		probed{
			id: id, at: onSegment(0), duration: 0.2, every: 0.01, agree: 0.01,
			scene: []string{
				stockOf("w", mass(c), 0), plain(tension, c.in("L"), "fixed", end),
				"excite x start displacement along s = " + bell,
				"excite y start velocity along s = " + q(c.in("c"), "m/s") + " * (x - " + q(c.in("x0"), "m") + ") / (" + q(c.in("s"), "m") + ")^2 * " + bell,
			},
		}.hold(t)
	}
}

// The hump once more, said in one expression, whose bends the mesh does not know
// of: no value lies further off than the share of the peak within which the run
// was asked to agree. (At the passing tip the pointwise band alone is too narrow:
// 1.4e-5 m where the record is 3.3e-5 m off; the band of the peak does hold.)
func TestPublishedHumpInOneExpression(t *testing.T) {
	c := caseOf(t, "C05-03")
	const agree = 0.01
	r := runOf(t, taut(stockOf("w", 1000/(c.in("c")*c.in("c")), 0), plain(1000, 12, "absorbing", "absorbing"),
		"excite x start displacement along s = "+q(c.in("h"), "m")+" * max(0, 1 - abs(x - 6 m) / "+q(c.in("w"), "m")+")",
		"watch tip at s 6 m displacement", "watch past at s 8.5 m displacement", runFor(0.2, 0.01, agree)))
	r.settled(t, c.ID)
	for name, channel := range map[string]string{"y_x0_t0": "tip", "y_x0_t0.02": "tip", "y_x2.5_t0.05": "past"} {
		_, at, _ := placeAndTime(name)
		record := r.best[channel+".displacement"]
		if off := math.Abs(record[r.row(t, at)] - c.want(name)); off > agree*0.05 {
			t.Errorf("C05-03 %s off by %.3g m", name, off)
		}
	}
	for i := range r.doc.Watches {
		w := &r.doc.Watches[i]
		want := map[string]float64{"tip": c.want("y_x0_t0"), "past": c.want("y_x2.5_t0.05")}[w.Name]
		if math.Abs(w.Peak.Value-want) > w.Peak.Numerical+c.slack(t, "y_x0_t0", 1) {
			t.Errorf("C05-03: peak of %s is %.9g +- %.2g, published %.9g", w.Name, w.Peak.Value, w.Peak.Numerical, want)
		}
	}
}

// A constant force that crosses a string: fast, slowly, and on an endless string.
func TestPublishedTravellingLoads(t *testing.T) {
	c := caseOf(t, "C13-03")
	scene := func(c published, length float64, end, from string) []string {
		return []string{
			stockOf("w", c.in("m"), 0), plain(c.in("T"), length, end, end),
			"excite x roll along l at " + q(c.in("v"), "m/s") + " load " + q(c.in("P"), "N") + from,
		}
	}
	probed{id: "C13-03", at: onSegment(0), duration: 1.3, every: 0.1, agree: 0.01, scene: scene(c, c.in("L"), "fixed", "")}.hold(t)

	c = caseOf(t, "C13-04")
	for name := range c.Expected {
		if _, at, ok := placeAndTime(name); ok {
			probed{id: "C13-04", at: onSegment(0), duration: at, every: at / 500, agree: 0.01, scene: scene(c, c.in("L"), "fixed", "")}.hold(t)
		}
	}

	c = caseOf(t, "C13-05")
	at := c.in("t")
	r := runOf(t, taut(append(scene(c, 110, "absorbing", " from s 50 m"),
		"watch under at s "+q(50+c.in("v")*at, "m")+" displacement", "watch behind at s 55 m slope", "watch ahead at s 77 m slope",
		runFor(at, at/300, 0.01))...))
	r.settled(t, c.ID)
	worst := r.covers(t, "C13-05 y_under_load", "under.displacement", at, c.want("y_under_load"), c.slack(t, "y_under_load", 1))
	worst = math.Max(worst, r.covers(t, "C13-05 slope_behind", "behind.slope", at, c.want("slope_behind"), c.slack(t, "slope_behind", 1)))
	worst = math.Max(worst, r.covers(t, "C13-05 slope_ahead", "ahead.slope", at, c.want("slope_ahead"), c.slack(t, "slope_ahead", 1)))
	i := r.row(t, at)
	b, a := r.best["behind.slope"][i], r.best["ahead.slope"][i]
	bound := r.band["behind.slope"][i] + r.band["ahead.slope"][i]
	if off := math.Abs(b - a - c.want("kink")); off > bound+c.slack(t, "kink", 1) {
		t.Errorf("C13-05 kink: %.9g +- %.2g, published %.9g", b-a, bound, c.want("kink"))
	}
	t.Logf("C13-05: at most %.2f of band and class taken up", worst)
}
