package resolve

import (
	"errors"
	"fmt"
	"io"
	"io/fs"
	"path"
	"strings"
	"unicode/utf8"

	"github.com/tautspan/tautspan/dsl/diag"
	"github.com/tautspan/tautspan/dsl/syntax"
)

// Sizes that are checked before anything is read. Chosen: a scenario of a
// hundred thousand lines has about 4 MB; a record of a million rows about 40 MB.
const (
	maxScenarioBytes = syntax.MaxBytes
	maxTableBytes    = 128 << 20
	maxUses          = 1000
)

// unread says why a file was not read: the code of a diagnostic and a reason
// for people.
type unread struct{ code, why string }

// readFile reads a file of at most limit bytes, whose size is checked before
// anything is read.
func readFile(fsys fs.FS, name string, limit int64) (string, *unread) {
	if !fs.ValidPath(name) {
		return "", &unread{"unreadable-file", "this is no path inside the scenario's folder"}
	}
	f, err := fsys.Open(name)
	if err != nil {
		return "", openProblem(err)
	}
	defer f.Close()
	info, err := f.Stat()
	switch {
	case err != nil:
		return "", openProblem(err)
	case info.IsDir():
		return "", &unread{"unreadable-file", "this is a folder"}
	case info.Size() > limit:
		return "", &unread{"file-too-large", fmt.Sprintf("the file has %s, and %s is the most", bytes(info.Size()), bytes(limit))}
	}
	data, err := io.ReadAll(io.LimitReader(f, limit+1))
	switch {
	case err != nil:
		return "", openProblem(err)
	case int64(len(data)) > limit:
		return "", &unread{"file-too-large", fmt.Sprintf("the file has more than %s, which is the most", bytes(limit))}
	}
	return string(data), nil
}

func bytes(n int64) string {
	if n < 1<<20 {
		return fmt.Sprintf("%d B", n)
	}
	return fmt.Sprintf("%.0f MiB", float64(n)/(1<<20))
}

func openProblem(err error) *unread {
	why := "this file cannot be read: " + err.Error()
	var p *fs.PathError
	switch {
	case errors.Is(err, fs.ErrNotExist):
		why = "there is no such file"
	case errors.Is(err, fs.ErrPermission):
		why = "this file may not be read"
	case errors.As(err, &p):
		why = "this file cannot be read: " + p.Err.Error()
	}
	return &unread{"unreadable-file", why}
}

// load reads the scenario and, from there, every used file once.
func (r *resolver) load(name string) {
	text, problem := readFile(r.fsys, name, maxScenarioBytes)
	if problem != nil {
		file := diag.NewFile(name, "")
		r.sources = append(r.sources, Source{Path: name, File: file, Tree: &syntax.Tree{File: file}})
		r.errorAt(diag.Span{File: file}, problem.code, problem.why, "", "")
		r.incomplete = true
		return
	}
	r.take(name, text, nil)
}

// take parses one file and adds its statements. The chain holds the files that
// led here, for circles.
func (r *resolver) take(name, text string, chain []string) {
	file := diag.NewFile(name, text)
	tree, diags := syntax.Parse(file)
	r.diags = append(r.diags, diags...)
	r.incomplete = r.incomplete || diags.HasErrors()
	r.sources = append(r.sources, Source{Path: name, File: file, Tree: tree})
	chain = append(chain, name)
	used := len(chain) > 1
	for _, s := range tree.Statements {
		switch s := s.(type) {
		case *syntax.Use:
			r.use(s, name, chain)
		case *syntax.Version:
		case *syntax.Let, *syntax.Stock, *syntax.Law, *syntax.Broken:
			r.statements = append(r.statements, s)
		case *syntax.Each:
			if !used {
				r.each(s)
				continue
			}
			r.warnAt(firstWord(s.Place()), "not-taken", "`use` takes only let, stock and law statements from a file", "this statement is left out", "")
		case *syntax.Title, *syntax.Note, *syntax.About:
			if !used {
				r.statements = append(r.statements, s)
			}
		default:
			if used {
				r.warnAt(firstWord(s.Place()), "not-taken", "`use` takes only let, stock and law statements from a file", "this statement is left out", "")
				continue
			}
			r.statements = append(r.statements, s)
		}
	}
}

// invalidUTF8 is the offset of the first byte that is no UTF-8, or -1.
func invalidUTF8(text string) int {
	if utf8.ValidString(text) {
		return -1
	}
	for i := 0; i < len(text); {
		r, n := utf8.DecodeRuneInString(text[i:])
		if r == utf8.RuneError && n == 1 {
			return i
		}
		i += n
	}
	return -1
}

// use takes in another file.
func (r *resolver) use(u *syntax.Use, from string, chain []string) {
	p := u.Path.Text
	switch {
	case p == "":
		r.errorAt(u.Path.Span, "unreadable-file", "`use` wants a file", "this text is empty", "")
		return
	case strings.Contains(p, `\`):
		r.errorAt(u.Path.Span, "use-outside", "a path is written with / between folders", "", quoted(strings.ReplaceAll(p, `\`, "/")))
		return
	case strings.HasPrefix(p, "/") || strings.Contains(p, ":"):
		r.errorAt(u.Path.Span, "use-outside", "`use` wants a path relative to this file", "this one is absolute", quoted(path.Base(p)))
		return
	}
	name := path.Join(path.Dir(from), p)
	if name == ".." || strings.HasPrefix(name, "../") {
		r.errorAt(u.Path.Span, "use-outside", "a used file lies in the scenario's folder or below it", "this path leads above it", "")
		return
	}
	for i, c := range chain {
		if c == name {
			r.errorAt(u.Path.Span, "circular-use", "these files use one another in a circle", strings.Join(append(append([]string{}, chain[i:]...), name), " -> "), "")
			return
		}
	}
	for _, s := range r.sources {
		if s.Path == name {
			return // taken already
		}
	}
	if len(r.sources) > maxUses {
		r.errorAt(u.Path.Span, "too-many", fmt.Sprintf("a scenario uses at most %d files", maxUses), "", "")
		return
	}
	text, problem := readFile(r.fsys, name, maxScenarioBytes)
	if problem != nil {
		r.errorAt(u.Path.Span, problem.code, "the used file cannot be taken in", problem.why, "")
		r.incomplete = true
		return
	}
	r.take(name, text, chain)
}

// firstWord is the span of the first word of a statement.
func firstWord(s diag.Span) diag.Span {
	text := s.Text()
	if i := strings.IndexAny(text, " \t\r\n{"); i > 0 {
		s.End = s.Start + i
	}
	return s
}

func quoted(s string) string { return `"` + s + `"` }
