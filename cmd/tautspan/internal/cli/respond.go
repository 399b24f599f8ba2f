package cli

import (
	"fmt"
	"strconv"
	"strings"

	"github.com/tautspan/tautspan/cmd/tautspan/internal/app"
)

// respondCmd gives steady vibration against frequency.
type respondCmd struct {
	File   string `arg:"" help:"Scenario file; - for standard input."`
	From   string `placeholder:"FREQUENCY" help:"Lowest frequency, such as '0.5 Hz' (a bare number is Hz); a fifth of the first natural frequency."`
	To     string `placeholder:"FREQUENCY" help:"Highest frequency; the eighth natural frequency."`
	Points int    `default:"201" help:"How many, in equal steps, both ends included."`
}

// Run answers.
func (c *respondCmd) Run(s *session) error {
	from, err := bound(c.From)
	if err != nil {
		return s.badFlag("respond", "--from", err)
	}
	to, err := bound(c.To)
	if err != nil {
		return s.badFlag("respond", "--to", err)
	}
	if c.Points < 1 {
		return s.badFlag("respond", "--points", fmt.Errorf("must be at least 1, and is %d", c.Points))
	}
	if from != nil && to != nil && *to < *from {
		return s.badFlag("respond", "--to", fmt.Errorf("must not lie below --from"))
	}
	doc, status, err := s.app.Respond(s.ctx, s.input(c.File), app.RespondWant{From: from, To: to, Points: c.Points})
	if err != nil {
		return err
	}
	return s.deliver(&doc.Head, doc, int(status), func(p *printer) { p.sayRespond(doc, !s.Quiet) })
}

// bound reads an end of a range of frequencies, which may be 0; nil where it was
// left out.
func bound(text string) (*float64, error) {
	text = strings.TrimSpace(text)
	if text == "" {
		return nil, nil
	}
	number := strings.TrimRight(text, " Hz")
	if zero, err := strconv.ParseFloat(number, 64); err == nil && zero == 0 {
		return &zero, nil
	}
	hz, err := frequency(text)
	if err != nil {
		return nil, err
	}
	return &hz, nil
}
