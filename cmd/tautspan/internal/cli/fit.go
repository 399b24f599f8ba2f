package cli

import (
	"fmt"

	"github.com/tautspan/tautspan/cmd/tautspan/internal/app"
)

// fitCmd seeks the lets that explain readings.
type fitCmd struct {
	File  string `arg:"" help:"Scenario file; - for standard input."`
	Write bool   `help:"Put the lets found, with their uncertainty, into the scenario; comments stay."`
	Out   string `placeholder:"DIR" help:"Write a result folder, for 'tautspan change'."`
	Force bool   `help:"Replace whatever stands at the result folder's place."`
}

// Run fits.
func (c *fitCmd) Run(s *session) error {
	if c.Write && c.File == "-" {
		return s.badFlag("fit", "--write", fmt.Errorf("wants a file to write to, not standard input"))
	}
	doc, status, err := s.app.Fit(s.ctx, s.input(c.File), app.FitWant{Out: c.Out, Force: c.Force, Write: c.Write})
	if err != nil {
		return s.failed("fit", status, err)
	}
	if text := doc.Text(); text != "" && (status == app.Done || status == app.NotAsAsked) {
		if err := replaceFile(c.File, text); err != nil {
			return err
		}
	}
	return s.deliver(&doc.Head, doc, int(status), func(p *printer) { p.sayFit(doc, !s.Quiet) })
}
