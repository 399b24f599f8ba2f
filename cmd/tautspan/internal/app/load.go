package app

import (
	"bytes"
	"crypto/sha256"
	"encoding/hex"
	"fmt"
	"io"
	"io/fs"
	"os"
	"path/filepath"
	"time"

	"github.com/tautspan/tautspan/dsl"
	"github.com/tautspan/tautspan/dsl/diag"
	"github.com/tautspan/tautspan/engine/mesh"
	"github.com/tautspan/tautspan/engine/scenario"
)

// App carries out the use cases. It holds no state between them.
type App struct{}

// New makes an App.
func New() *App { return &App{} }

// Input is one scenario with what the command line changes in it.
type Input struct {
	File  string            // "-" for Stdin
	Stdin io.Reader         // read where File is "-"
	Set   map[string]string // lets given other values: NAME to QUANTITY
}

// loaded is a scenario that was read, and perhaps bound and meshed.
type loaded struct {
	head     Head
	compiled *dsl.Compiled
	values   []float64
	net      *scenario.Network
	mesh     *mesh.Mesh
}

// Several is the one document of a command that took several files.
func Several(command string, documents []any) any {
	return struct {
		Format    int    `json:"format"`
		Version   string `json:"tautspan"`
		Command   string `json:"command"`
		Documents []any  `json:"documents"`
	}{Format, Version, command, documents}
}

// UsageHead is the document of a command line that cannot be read.
func UsageHead(command, message string) any {
	return Head{
		Format: Format, Version: Version, Command: command, Engine: engineOf(), Warnings: diag.List{},
		Errors: diag.List{{Code: "usage", Severity: diag.Error, Span: diag.Span{File: diag.NewFile("command line", "")}, Summary: message}},
	}
}

// FailedHead is the document of a command that failed on something outside.
func FailedHead(command string, err error) any {
	return Head{
		Format: Format, Version: Version, Command: command, Engine: engineOf(), Warnings: diag.List{},
		Errors: diag.List{{Code: "failed", Span: diag.Span{File: diag.NewFile(command, "")}, Summary: err.Error()}},
	}
}

// stdinName is what standard input is called in messages and results.
const stdinName = "stdin.taut"

// load reads and resolves a scenario. Faults of the input are in the head.
func (a *App) load(command string, in Input) (*loaded, error) {
	fsys, name, err := open(in)
	if err != nil {
		return nil, err
	}
	l := &loaded{head: Head{Format: Format, Version: Version, Command: command, Engine: engineOf(), Scenario: Source{File: in.File}}}
	if in.File == "-" {
		l.head.Scenario.File = stdinName
	}
	l.compiled = dsl.Compile(fsys, name, dsl.Options{Set: in.Set, Plugins: installed()})
	l.note(l.compiled.Diagnostics)
	if len(l.compiled.Sources) > 0 {
		sum := sha256.Sum256([]byte(l.compiled.Sources[0].File.Text()))
		l.head.Scenario.SHA256 = hex.EncodeToString(sum[:])
	}
	l.head.Scenario.Title = l.compiled.Template.Title
	return l, nil
}

func (l *loaded) note(list diag.List) {
	l.head.Errors = append(diag.List{}, append(l.head.Errors, list.Errors()...)...)
	l.head.Warnings = append(diag.List{}, append(l.head.Warnings, list.Warnings()...)...)
}

// warn adds a warning about the scenario as a whole.
func (l *loaded) warn(code, summary string) {
	l.note(diag.List{{Code: code, Severity: diag.Warning, Span: diag.Span{File: l.compiled.Sources[0].File}, Summary: summary}})
}

func (l *loaded) failed() bool { return len(l.head.Errors) > 0 }

// bind evaluates the lets and builds the network and the mesh; what cannot
// stand becomes a diagnostic at the place that said it.
func (l *loaded) bind() {
	if l.failed() {
		return
	}
	t := l.compiled.Template
	var err error
	if l.values, err = t.Values(nil); err == nil {
		if l.net, err = t.Bind(l.values); err == nil && len(l.net.Lines) > 0 {
			l.mesh, err = mesh.Build(l.net)
		}
	}
	if err != nil {
		l.refuse(err)
		return
	}
	eachWritten(l.net, func(name string, w *scenario.WrittenOf[float64]) {
		for _, size := range []float64{1e-4, 1e-2, 1} {
			if taken, gross := lawTakes(w, size); taken < -givesBack*gross {
				l.warn("law-gives-energy", fmt.Sprintf("the law %s gives energy to the line: a swing of %g m at 1 Hz gains %.3g J a cycle", name, size, -taken/3))
				return
			}
		}
	})
}

// refuse turns an error of the engine into a diagnostic.
func (l *loaded) refuse(err error) {
	l.note(diag.List{l.compiled.Diagnose(err)})
}

// needLine refuses a scenario that has no line to answer for.
func (l *loaded) needLine() {
	if !l.failed() && (l.net == nil || len(l.net.Lines) == 0) {
		l.note(diag.List{{Code: "no-line", Severity: diag.Error, Span: diag.Span{File: l.compiled.Sources[0].File}, Summary: "there is no line in this scenario", Hint: "line NAME { tension …; support …; segment …; support … }"}})
	}
}

// open gives the folder of a scenario as a file system, and its name in it. A
// scenario from standard input sees the working folder.
func open(in Input) (fs.FS, string, error) {
	if in.File != "-" {
		dir, name := filepath.Split(in.File)
		if dir == "" {
			dir = "."
		}
		return os.DirFS(dir), name, nil
	}
	text, err := io.ReadAll(io.LimitReader(in.Stdin, maxStdin+1))
	if err != nil {
		return nil, "", fmt.Errorf("standard input: %w", err)
	}
	return stdinFS{FS: os.DirFS("."), text: text}, stdinName, nil
}

// readText is the text of one scenario, for uses that need no more.
func readText(in Input) (string, error) {
	fsys, name, err := open(in)
	if err != nil {
		return "", err
	}
	f, err := fsys.Open(name)
	if err != nil {
		return "", err
	}
	defer func() { _ = f.Close() }() // only read
	text, err := io.ReadAll(io.LimitReader(f, maxStdin))
	return string(text), err
}

// maxStdin bounds what is read from standard input; the language's own limit
// is lower and gives the message.
const maxStdin = 32 << 20

// stdinFS adds one file to a file system.
type stdinFS struct {
	fs.FS
	text []byte
}

// Open opens the added file or one of the folder.
func (s stdinFS) Open(name string) (fs.File, error) {
	if name == stdinName {
		return &stdinFile{Reader: bytes.NewReader(s.text), size: int64(len(s.text))}, nil
	}
	return s.FS.Open(name)
}

type stdinFile struct {
	*bytes.Reader
	size int64
}

func (f *stdinFile) Stat() (fs.FileInfo, error) { return stdinInfo{f.size}, nil }
func (f *stdinFile) Close() error               { return nil }

type stdinInfo struct{ size int64 }

func (stdinInfo) Name() string       { return stdinName }
func (i stdinInfo) Size() int64      { return i.size }
func (stdinInfo) Mode() fs.FileMode  { return 0o444 }
func (stdinInfo) ModTime() time.Time { return time.Time{} }
func (stdinInfo) IsDir() bool        { return false }
func (stdinInfo) Sys() any           { return nil }
