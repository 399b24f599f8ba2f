package cli

import (
	"fmt"
	"math"
	"strings"

	"github.com/tautspan/tautspan/cmd/tautspan/internal/app"
	"github.com/tautspan/tautspan/dsl/unit"
)

// peaksCmd tells what a record holds.
type peaksCmd struct {
	File       string   `arg:"" name:"record" help:"A logger's table (CSV) or a WAV file."`
	Channel    []string `sep:"none" placeholder:"NAME" help:"Only this channel, by name or number (a WAV file counts from 1; a table's channels are counted without the time); repeatable."`
	Time       string   `placeholder:"COLUMN" help:"The time column of a table, by name or number, where it is not found by itself."`
	Rate       string   `placeholder:"FREQUENCY" help:"Sampling rate of a table without a time column, such as '400 Hz'."`
	From       string   `placeholder:"TIME" help:"Leave out what comes before, such as '2 s' after the record's start."`
	To         string   `placeholder:"TIME" help:"Leave out what comes after."`
	Lowest     string   `placeholder:"FREQUENCY" help:"Lowest frequency looked for."`
	Highest    string   `placeholder:"FREQUENCY" help:"Highest frequency looked for; half the sampling rate."`
	Count      int      `default:"40" help:"At most so many peaks of a channel, the strongest."`
	Above      float64  `default:"20" help:"How far a peak must stand above the noise around it, in dB."`
	Unit       string   `placeholder:"UNIT" help:"Unit of the samples where the file does not say it, or what 1 in the file stands for: 'm/s^2', '20 m/s^2'."`
	WithStrike bool     `help:"Analyse from the first sample on. Otherwise the analysis starts 0.15 s after a strike, where one is found."`
}

// Run analyses.
func (c *peaksCmd) Run(s *session) error {
	want := app.PeaksWant{Channels: c.Channel, Time: c.Time, Count: c.Count, Above: c.Above, Unit: c.Unit, WholeStart: c.WithStrike, Pictures: true}
	for _, f := range []struct {
		flag, text string
		to         *float64
		read       func(string) (float64, error)
	}{
		{"--rate", c.Rate, &want.Rate, frequency}, {"--lowest", c.Lowest, &want.Low, frequency}, {"--highest", c.Highest, &want.High, frequency},
		{"--from", c.From, &want.From, duration}, {"--to", c.To, &want.To, duration},
	} {
		v, err := f.read(f.text)
		if err != nil {
			return s.badFlag("peaks", f.flag, err)
		}
		*f.to = v
	}
	switch {
	case c.Count < 1 || c.Count > 1000:
		return s.badFlag("peaks", "--count", fmt.Errorf("must lie between 1 and 1000, and is %d", c.Count))
	case !(c.Above >= 10 && c.Above <= 100):
		return s.badFlag("peaks", "--above", fmt.Errorf("must lie between 10 and 100 dB, and is %g: below 10 dB noise passes for peaks", c.Above))
	case want.High > 0 && want.High <= want.Low:
		return s.badFlag("peaks", "--highest", fmt.Errorf("must lie above --lowest"))
	case want.To > 0 && want.To <= want.From:
		return s.badFlag("peaks", "--to", fmt.Errorf("must lie after --from"))
	}
	doc, status, err := s.app.Peaks(s.ctx, c.File, want)
	if err != nil {
		return s.failed("peaks", status, err)
	}
	return s.deliver(&doc.Head, doc, int(status), func(p *printer) { p.sayRecord(doc, !s.Quiet) })
}

// duration reads a time flag in seconds; 0 where it is empty.
func duration(text string) (float64, error) {
	text = strings.TrimSpace(text)
	if text == "" {
		return 0, nil
	}
	var v float64
	var rest string
	if n, _ := fmt.Sscanf(text, "%g%s", &v, &rest); n < 1 || !(v >= 0) || math.IsInf(v, 0) {
		return 0, fmt.Errorf("wants a time such as '2 s', and is %q", text)
	}
	if rest == "" {
		return v, nil
	}
	u, err := unit.Parse(rest)
	if err != nil || u.Dim != unit.Time.Dim {
		return 0, fmt.Errorf("wants a time such as '2 s', and is %q", text)
	}
	return u.SI(v), nil
}
