package cli

import (
	"fmt"
	"os"
	"path/filepath"
	"strings"

	"github.com/tautspan/tautspan/cmd/tautspan/internal/app"
	"github.com/tautspan/tautspan/dsl/unit"
)

// input is the scenario that a command names.
func (s *session) input(file string) app.Input {
	return app.Input{File: file, Stdin: s.In, Set: s.Set}
}

// checkCmd reads and judges scenarios.
type checkCmd struct {
	Files []string `arg:"" name:"file" help:"Scenario files; - for standard input."`
}

// Run checks each file; the gravest outcome is the command's.
func (c *checkCmd) Run(s *session) error {
	worst := exitDone
	var documents []any
	for i, file := range c.Files {
		doc, status, err := s.app.Check(s.input(file))
		if err != nil {
			return err
		}
		worst = max(worst, int(status))
		if s.JSON && len(c.Files) > 1 {
			documents = append(documents, doc)
			continue
		}
		if i > 0 && !s.JSON {
			fmt.Fprintln(s.Out)
		}
		say := func(p *printer) {
			p.sayCheck(doc)
			if !s.Quiet {
				p.sayCautions(doc.Cautions)
			}
		}
		if err := s.deliver(&doc.Head, doc, int(status), say); err != nil && len(c.Files) == 1 {
			return err
		}
	}
	return s.finish("check", documents, worst)
}

// finish ends a command that took several files: as JSON their documents stand
// in one.
func (s *session) finish(command string, documents []any, worst int) error {
	if len(documents) > 0 {
		if err := writeJSON(s.Out, app.Several(command, documents)); err != nil {
			return err
		}
	}
	if worst != exitDone {
		return exitError(worst)
	}
	return nil
}

// tidyCmd prints the canonical layout.
type tidyCmd struct {
	Write bool     `help:"Rewrite the files in place."`
	Diff  bool     `help:"Show what would change; exit 1 where anything would."`
	Files []string `arg:"" name:"file" help:"Scenario files; - for standard input."`
}

// Run tidies each file.
func (c *tidyCmd) Run(s *session) error {
	worst := exitDone
	var documents []any
	for _, file := range c.Files {
		doc, status, err := s.app.Tidy(s.input(file))
		if err != nil {
			return err
		}
		switch {
		case status == app.BadInput:
		case c.Write && doc.Changed && file != "-":
			if err := replaceFile(file, doc.Text); err != nil {
				return err
			}
		case c.Diff && doc.Changed:
			status = app.NotAsAsked
		}
		worst = max(worst, int(status))
		if s.JSON && len(c.Files) > 1 {
			documents = append(documents, doc)
			continue
		}
		say := func(p *printer) {
			switch {
			case c.Diff:
				fmt.Fprint(s.Out, doc.Diff)
			case !c.Write || file == "-":
				fmt.Fprint(s.Out, doc.Text)
			}
		}
		if err := s.deliver(&doc.Head, doc, int(status), say); err != nil && len(c.Files) == 1 {
			return err
		}
	}
	return s.finish("tidy", documents, worst)
}

// replaceFile writes beside the file and renames, so that nothing is half written.
func replaceFile(name, text string) error {
	mode := os.FileMode(0o644)
	if info, err := os.Stat(name); err == nil {
		mode = info.Mode().Perm()
	}
	tmp, err := os.CreateTemp(filepath.Dir(name), ".tidy-*")
	if err != nil {
		return err
	}
	defer os.Remove(tmp.Name())
	if _, err = tmp.WriteString(text); err == nil {
		err = tmp.Chmod(mode)
	}
	if cerr := tmp.Close(); err == nil {
		err = cerr
	}
	if err != nil {
		return err
	}
	return os.Rename(tmp.Name(), name)
}

// modesCmd lists natural vibrations.
type modesCmd struct {
	File   string `arg:"" help:"Scenario file; - for standard input."`
	Count  int    `default:"10" help:"How many of each line."`
	Below  string `placeholder:"FREQUENCY" help:"Only those below a frequency, such as '50 Hz' (a bare number is Hz)."`
	Shapes bool   `help:"Shapes as well."`
}

// Run lists them.
func (c *modesCmd) Run(s *session) error {
	below, err := frequency(c.Below)
	if err != nil {
		return s.badFlag("modes", "--below", err)
	}
	if c.Count < 1 || c.Count > 5000 {
		return s.badFlag("modes", "--count", fmt.Errorf("must lie between 1 and 5000, and is %d", c.Count))
	}
	doc, status, err := s.app.Modes(s.ctx, s.input(c.File), app.ModesWant{Count: c.Count, Below: below, Shapes: c.Shapes})
	if err != nil {
		return err
	}
	return s.deliver(&doc.Head, doc, int(status), func(p *printer) { p.sayModes(doc) })
}

// frequency reads a frequency flag in Hz; 0 where it is empty.
func frequency(text string) (float64, error) {
	text = strings.TrimSpace(text)
	if text == "" {
		return 0, nil
	}
	var v float64
	var rest string
	if n, _ := fmt.Sscanf(text, "%g%s", &v, &rest); n < 1 || !(v > 0) || v > 1e12 {
		return 0, fmt.Errorf("wants a frequency such as '50 Hz', and is %q", text)
	}
	if rest == "" {
		return v, nil
	}
	u, err := unit.Parse(rest)
	hz, _ := unit.Parse("Hz")
	if err != nil || u.Dim != hz.Dim {
		return 0, fmt.Errorf("wants a frequency such as '50 Hz', and is %q", text)
	}
	return u.SI(v), nil
}

// badFlag reports a flag's value that cannot be.
func (s *session) badFlag(command, flag string, err error) error {
	message := flag + " " + err.Error()
	if s.JSON {
		if werr := writeJSON(s.Out, app.UsageHead(command, message)); werr != nil {
			return werr
		}
	}
	fmt.Fprintf(s.Err, "tautspan: %s  [usage]\n", message)
	return exitError(exitInput)
}

// arrivalsCmd prints the pulse ledger.
type arrivalsCmd struct {
	File string `arg:"" help:"Scenario file; - for standard input."`
}

// Run traces the fronts.
func (c *arrivalsCmd) Run(s *session) error {
	doc, status, err := s.app.Arrivals(s.input(c.File))
	if err != nil {
		return err
	}
	return s.deliver(&doc.Head, doc, int(status), func(p *printer) { p.sayArrivals(doc) })
}

// whyCmd explains a diagnostic.
type whyCmd struct {
	Code string `arg:"" optional:"" help:"The code in square brackets behind a diagnostic, or 'scope'; without it all codes are listed."`
}

// Run prints the explanation.
func (c *whyCmd) Run(s *session) error {
	doc, status := s.app.Why(c.Code)
	return s.deliver(&doc.Head, doc, int(status), func(p *printer) {
		for i, para := range strings.Split(doc.Text, "\n\n") {
			if i > 0 {
				p.line("")
			}
			for _, l := range strings.Split(para, "\n") {
				p.prose("", l)
			}
		}
	})
}

// scenariosCmd lists the shipped scenarios.
type scenariosCmd struct {
	Name  string `arg:"" optional:"" help:"Write this one out to start from, into the working folder or --out."`
	Out   string `placeholder:"DIR" help:"Folder to write to."`
	Force bool   `help:"Replace a file that stands there."`
}

// Run lists or writes.
func (c *scenariosCmd) Run(s *session) error {
	doc, status, err := s.app.Scenarios(c.Name, c.Out, c.Force)
	if err != nil {
		return err
	}
	return s.deliver(&doc.Head, doc, int(status), func(p *printer) {
		if doc.Written != "" {
			p.line("%s is written; try: tautspan run %s", doc.Written, doc.Written)
			return
		}
		t := newTable()
		for _, e := range doc.Scenarios {
			t.add(e.Name, e.Title)
		}
		p.table(t)
		p.line("\nWrite one out with 'tautspan scenarios NAME'.")
	})
}
