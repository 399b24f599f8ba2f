package cli

import (
	"fmt"
	"math"
	"strings"

	"github.com/tautspan/tautspan/cmd/tautspan/internal/app"
	"github.com/tautspan/tautspan/engine/doubt"
)

// sayRecord prints what a record holds.
func (p *printer) sayRecord(d *app.PeaksDoc, more bool) {
	p.heading(&d.Head)
	p.line("%s sampled at %s", p.show(*d.Duration, "s", 5), p.show(*d.Rate, "Hz", 7))
	for i := range d.Channels {
		p.sayChannel(&d.Channels[i], more)
	}
	for _, n := range d.Notes {
		p.prose("note: ", n)
	}
	if more {
		p.sayCautions(d.Cautions)
	}
}

func (p *printer) sayChannel(c *app.PeakChannel, more bool) {
	p.line("\nchannel %s, %s", c.Name, c.Unit)
	if len(c.Peaks) == 0 {
		p.line("  no peak is told")
		return
	}
	strike := ""
	if c.Struck {
		strike = ", after a strike"
	}
	p.line("  analysed from %s to %s%s (± is 95 %%)", p.show(*c.From, "s", 4), p.show(*c.To, "s", 4), strike)
	t := newTable("order", "frequency", "level", "amplitude", "decay", "damping ratio", "").flush(0, 1, 2, 3, 4, 5)
	for i := range c.Peaks {
		r := &c.Peaks[i]
		order := "-"
		if r.Number != nil {
			order = fmt.Sprint(*r.Number)
		}
		t.add(order, p.withBar(r.Frequency, doubt.TwoSided*r.Uncertainty, "Hz"), fmt.Sprintf("%.0f dB", r.Level), p.amplitude(c, r), p.decay(r), p.dampingOf(r), remark(r))
	}
	p.table(t)
	p.saySeries(c.Series)
	for _, n := range c.Notes {
		p.prose("  note: ", n)
	}
	if more && c.Spectrum != nil {
		p.saySpectrum(c.Spectrum)
	}
}

func (p *printer) amplitude(c *app.PeakChannel, r *app.RecordPeak) string {
	switch {
	case r.Amplitude == nil:
		return "-"
	case c.Unit == "uncalibrated":
		return trimNumber(*r.Amplitude, 3)
	}
	return p.show(*r.Amplitude, c.Unit, 3)
}

func (p *printer) decay(r *app.RecordPeak) string {
	if r.Decay == nil {
		return "-"
	}
	return barText(*r.Decay, doubt.TwoSided**r.DecayU) + " /s"
}

func (p *printer) dampingOf(r *app.RecordPeak) string {
	if r.DampingRatio == nil {
		return "-"
	}
	return barText(*r.DampingRatio*100, doubt.TwoSided**r.DecayU/(2*math.Pi*r.Frequency)*100) + " %"
}

// remark is what may not be what it looks like.
func remark(r *app.RecordPeak) string {
	var words []string
	if r.Why != "" {
		words = append(words, r.Why)
	}
	if r.NearLimit {
		words = append(words, "may be an alias")
	}
	if r.Mains {
		words = append(words, "mains hum?")
	}
	return strings.Join(words, "; ")
}

func (p *printer) saySeries(s *app.SeriesFacts) {
	if s == nil {
		p.line("  no series of a stiff string fits four or more of these peaks")
		return
	}
	p.line("\n  series n f0 sqrt(1 + B n²): f0 %s, B %s (%d peaks, %s rms off; ± of the fit alone)",
		p.withBar(s.F0, doubt.TwoSided*s.F0U, "Hz"), scientific(s.B, doubt.TwoSided*s.BU), s.Used, percent(round3(s.RMS)))
	if len(s.Missing) > 0 {
		p.prose("  ", "orders without a peak: "+join(s.Missing, 12, func(n int) string { return fmt.Sprint(n) }))
	}
	if len(s.Left) > 0 {
		p.prose("  ", "peaks outside the series: "+join(s.Left, 12, func(f float64) string { return trimNumber(f, 5) })+" Hz")
	}
}

// scientific writes a small number and its bar with one exponent.
func scientific(v, bar float64) string {
	if v == 0 {
		return "0 ± " + trimNumber(bar, 2)
	}
	e := math.Floor(math.Log10(math.Abs(v)))
	scale := math.Pow(10, e)
	return fmt.Sprintf("(%s)·1e%d", barText(v/scale, bar/scale), int(e))
}

func join[T any](list []T, most int, word func(T) string) string {
	var words []string
	for i, v := range list {
		if i == most {
			words = append(words, fmt.Sprintf("and %d more", len(list)-most))
			break
		}
		words = append(words, word(v))
	}
	return strings.Join(words, ", ")
}

// spectrumRows is the height of the picture, spectrumSpan what it spans in dB.
const (
	spectrumRows = 6
	spectrumSpan = 60
)

// saySpectrum draws the averaged spectrum, the highest 60 dB of it.
func (p *printer) saySpectrum(s *app.Thinned) {
	values := make([]float64, len(s.Level))
	for i, v := range s.Level {
		values[i] = math.Max(0, spectrumSpan+v)
	}
	width := max(20, min(p.width-14, 120))
	lines, _, _ := picture(values, width, spectrumRows)
	p.line("")
	for i, l := range lines {
		label := ""
		switch i {
		case 0:
			label = "0 dB"
		case len(lines) - 1:
			label = fmt.Sprintf("-%d dB", spectrumSpan)
		}
		p.line("  %7s  %s", label, strings.TrimRight(l, "\u2800"))
	}
	from, to := p.show(s.From, "Hz", 4), p.show(s.To, "Hz", 4)
	p.line("  %7s  %s%s%s", "", from, strings.Repeat(" ", max(1, width-len(from)-len(to))), to)
}
