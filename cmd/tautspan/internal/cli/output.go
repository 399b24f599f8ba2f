package cli

import (
	"encoding/json"
	"fmt"
	"io"
	"os"

	"golang.org/x/term"

	"github.com/tautspan/tautspan/cmd/tautspan/internal/app"
	"github.com/tautspan/tautspan/dsl/diag"
	"github.com/tautspan/tautspan/dsl/unit"
)

// defaultWidth is used where standard output is no terminal.
const defaultWidth = 100

// terminal is the width for text on standard output, and whether standard error
// is a terminal to show progress on.
func terminal(s Streams) (width int, progress bool) {
	width = defaultWidth
	if f, ok := s.Out.(*os.File); ok && term.IsTerminal(int(f.Fd())) {
		if w, _, err := term.GetSize(int(f.Fd())); err == nil && w >= 40 {
			width = w
		}
	}
	f, ok := s.Err.(*os.File)
	return width, ok && term.IsTerminal(int(f.Fd()))
}

// writeJSON writes one document.
func writeJSON(w io.Writer, doc any) error {
	enc := json.NewEncoder(w)
	enc.SetIndent("", "  ")
	enc.SetEscapeHTML(false)
	return enc.Encode(doc)
}

// shownErrors is how many errors a terminal is given at once.
const shownErrors = 10

// complain prints diagnostics on standard error.
func (s *session) complain(list diag.List) {
	if len(list) > 0 {
		fmt.Fprint(s.Err, list.Text(shownErrors))
	}
}

func (s *session) printer() *printer {
	system, _ := unit.SystemNamed(s.Units)
	return &printer{out: s.Out, width: s.width, reader: reader{system}}
}

// deliver prints a document as JSON or through say, with the diagnostics on
// standard error, and turns the outcome into an exit code.
func (s *session) deliver(head *app.Head, doc any, code int, say func(*printer)) error {
	if s.JSON {
		if err := writeJSON(s.Out, doc); err != nil {
			return err
		}
	} else {
		s.complain(append(append(diag.List(nil), head.Errors...), head.Warnings...))
		if code != exitInput && say != nil {
			say(s.printer())
		}
	}
	if code != exitDone {
		return exitError(code)
	}
	return nil
}
