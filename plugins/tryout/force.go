package tryout

import (
	"context"
	"io"
	"math"

	"github.com/tautspan/tautspan/plugins/author"
)

// Presets are values for all parameters of a plugin: the preset, or the middle
// of the range, or 1.
func Presets(a *author.About) map[string]float64 {
	out := map[string]float64{}
	for _, p := range a.Parameters {
		switch {
		case p.HasPreset:
			out[p.Name] = p.Preset
		case p.Least == 0 && p.Most == 0:
			out[p.Name] = 1
		case p.Least > 0 && p.Most/p.Least > 100:
			out[p.Name] = math.Sqrt(p.Least * p.Most)
		default:
			out[p.Name] = (p.Least + p.Most) / 2
		}
	}
	return out
}

func describes(b *book, a *author.About) bool {
	err := a.Check()
	b.note("describes itself", err == nil, "%s %s", a.Name, a.Version)
	if err != nil {
		b.checks[len(b.checks)-1].Detail = err.Error()
	}
	if len(a.Parameters) > 0 {
		b.note("says its formula", a.Formula != "" && a.Source != "", "%s (source: %s)", a.Formula, a.Source)
	}
	return err == nil
}

// Load tries a load at one place and along a stretch: finite, repeatable, the
// same whether asked for in one block or in several.
func Load(ctx context.Context, l author.Load) []Check {
	b := &book{}
	about := l.About()
	if !describes(b, &about) {
		return b.checks
	}
	for _, along := range []bool{false, true} {
		name := "at a place"
		q := author.LoadWant{Parameters: Presets(&about), Along: along, Length: 100, Duration: 20, Places: []float64{50}}
		if along {
			name, q.Places = "along a stretch", []float64{0, 25, 50, 75, 100}
		}
		step, spacing, err := l.Prepare(q)
		switch {
		case err != nil:
			b.refused(name, err.Error())
			continue
		case !(step > 0) || math.IsInf(step, 0) || along && !(spacing > 0):
			b.note(name, false, "wants a step of %g s and a spacing of %g m", step, spacing)
			continue
		}
		b.load(ctx, name, l, q, step)
	}
	return b.checks
}

func (b *book) load(ctx context.Context, name string, l author.Load, q author.LoadWant, step float64) {
	n := int(math.Min(q.Duration/step, 20000)) + 2
	times := make([]float64, n)
	for i := range times {
		times[i] = float64(i) * step
	}
	once, err := forces(ctx, l, q, times)
	if err != nil {
		b.note(name, false, "%v", err)
		return
	}
	again, err := forces(ctx, l, q, times)
	if err != nil {
		b.note(name, false, "%v", err)
		return
	}
	short, err := forces(ctx, l, q, times[:n/2])
	if err != nil {
		b.note(name, false, "%v", err)
		return
	}
	most := 0.0
	for k := range once {
		for i, v := range once[k] {
			switch {
			case math.IsNaN(v) || math.IsInf(v, 0):
				b.note(name, false, "answers %v at %g s", v, times[i])
				return
			case math.Float64bits(v) != math.Float64bits(again[k][i]):
				b.note(name, false, "answers %v and then %v at %g s", v, again[k][i], times[i])
				return
			case i < n/2 && math.Float64bits(v) != math.Float64bits(short[k][i]):
				b.note(name, false, "answers otherwise for a shorter span of time, at %g s", times[i])
				return
			}
			most = math.Max(most, math.Abs(v))
		}
	}
	b.note(name, true, "%d instants %.3g s apart at %d places, at most %.3g", n, step, len(q.Places), most)
}

func forces(ctx context.Context, l author.Load, q author.LoadWant, times []float64) ([][]float64, error) {
	out := make([][]float64, len(q.Places))
	for k := range out {
		out[k] = make([]float64, len(times))
	}
	return out, l.Evaluate(ctx, q, times, out)
}

// Law tries a law: that it is written or can be followed, is finite, repeats
// itself, and, where it promises to, takes energy and never gives it back over a
// closed swing.
func Law(_ context.Context, l author.Law) []Check {
	b := &book{}
	about := l.About()
	if !describes(b, &about) {
		return b.checks
	}
	values := Presets(&about)
	text, err := l.Written(values)
	switch {
	case err != nil:
		b.note("written", false, "%v", err)
		return b.checks
	case text != "":
		b.note("written", true, "%s", text)
		return b.checks
	}
	b.refused("written", "followed step by step, some 50 us a step from another process")
	for _, size := range []float64{1e-4, 1e-2, 1} {
		b.swing(l, &about, values, size)
	}
	return b.checks
}

// swing moves the law through cycles of a size, in m, at 1 Hz.
func (b *book) swing(l author.Law, about *author.About, values map[string]float64, size float64) {
	name := "a swing"
	f, err := l.Follow(values)
	if err != nil {
		b.note(name, false, "%v", err)
		return
	}
	if c, ok := f.(io.Closer); ok {
		defer func() { _ = c.Close() }()
	}
	const w, steps = 2 * math.Pi, 2000
	taken, gross, before := 0.0, 0.0, 0.0
	for i := range 3*steps + 1 {
		t := float64(i) / steps
		u, v := size*math.Sin(w*t), size*w*math.Cos(w*t)
		force, err := f.Force(t, u, v, true)
		if err != nil || math.IsNaN(force) || math.IsInf(force, 0) {
			b.note(name, false, "answers %v, %v at %g m", force, err, size)
			return
		}
		power := -force * v
		if i > 0 {
			taken += (power + before) / 2 / steps
			gross += math.Abs(power+before) / 2 / steps
		}
		before = power
	}
	ok := !about.Dissipates || taken >= -1e-3*gross
	b.note(name, ok, "three cycles of %g m take %.3g J", size, taken)
}
