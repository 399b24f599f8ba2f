package resolve

import (
	"io/fs"
	"sort"
	"strings"

	"github.com/tautspan/tautspan/dsl/diag"
	"github.com/tautspan/tautspan/dsl/syntax"
	"github.com/tautspan/tautspan/dsl/unit"
	"github.com/tautspan/tautspan/engine/formula"
	"github.com/tautspan/tautspan/engine/scenario"
)

// Options say what comes from outside the scenario.
type Options struct {
	// Set overrides lets: the text of a quantity, with its doubt if it has one,
	// by the name of the let.
	Set map[string]string
	// Solvers are the names that `solvers` may list; nil means the built-in ones.
	Solvers []string
	// Plugins are what the user has installed: solvers, loads and laws that a
	// scenario may name in quotes.
	Plugins []Plugin
}

// builtinSolvers are the solvers that a run may name without quotes.
var builtinSolvers = []string{"differences", "spectral", "characteristic", "transform"}

// Source is one file that was read.
type Source struct {
	Path string // in the file system given, slash-separated
	File *diag.File
	Tree *syntax.Tree
}

// LetInfo is what is known of a let, for people and editors.
type LetInfo struct {
	Name  string
	Kind  string // what it measures: "a force"
	Dim   unit.Dim
	Value float64 // SI, nominal; 0 where it has none
	StdU  float64 // SI, 0 where it is exact
	Span  diag.Span
	Given bool // its value came from Options.Set
}

// Result is a resolved scenario. Template is never nil; it is fit for use only
// where Diags holds no error.
type Result struct {
	Template *scenario.Template
	Diags    diag.List // in order of place, at most one error a line
	Paths    Paths
	Sources  []Source // the scenario first, then used files in the order of their first use
	Lets     []LetInfo
	Stocks   []StockInfo // of the text in its order, then built-in ones by name
}

// StockInfo is what is known of a stock's bending stiffness at the nominal
// values, SI. The bounds follow from matter: wires that slide on one another,
// and a solid bar of the same metal area; 0 where not known.
type StockInfo struct {
	Name        string
	Builtin     bool
	Bending     float64 // N m^2, as taken; 0: an ideal string
	BendingLow  float64 // N m^2
	BendingHigh float64 // N m^2
	Span        diag.Span
}

// Paths maps a path of the template, such as line.stay.lower.length, to the
// text that said it.
type Paths map[string]diag.Span

// Find is the place of a path, or of the nearest thing above it that has one.
func (p Paths) Find(path string) (diag.Span, bool) {
	for path != "" {
		if s, ok := p[path]; ok {
			return s, true
		}
		i := strings.LastIndexByte(path, '.')
		if i < 0 {
			break
		}
		path = path[:i]
	}
	return diag.Span{}, false
}

// Resolve reads the scenario at name in fsys with everything it uses. The name
// is a slash-separated path; fsys is the folder above which nothing is read.
func Resolve(fsys fs.FS, name string, opts Options) Result {
	if opts.Solvers == nil {
		opts.Solvers = builtinSolvers
	}
	r := &resolver{
		fsys: fsys, opts: opts, tmpl: &scenario.Template{}, paths: Paths{},
		top: map[string]symbol{}, lets: map[string]*letEntry{}, stocks: map[string]*stockEntry{}, laws: map[string]*lawEntry{}, builtin: map[string]*stockEntry{}, lines: map[string]*lineEntry{},
		elements: map[string][]element{}, watches: map[string]int{}, units: map[string]unitRead{}, tables: map[string]*csvFile{}, typed: map[*diag.File]*diag.File{}, mades: map[*diag.File]*made{}, broken: map[string]bool{}, parts: map[string]string{},
	}
	r.load(name)
	r.declare()
	r.resolveLets()
	r.resolveModel()
	r.resolveAsked()
	return r.finish()
}

// finish orders what was found.
func (r *resolver) finish() Result {
	for i := range r.diags {
		d := &r.diags[i]
		d.Span = r.asTyped(d.Span)
		for j := range d.Related {
			d.Related[j].Span = r.asTyped(d.Related[j].Span)
		}
	}
	for p, s := range r.paths {
		r.paths[p] = r.asTyped(s)
	}
	r.diags.Sort()
	r.diags = r.diags.OnePerLine()
	return Result{Template: r.tmpl, Diags: r.diags, Paths: r.paths, Sources: r.sources, Lets: r.letInfo(), Stocks: r.stockInfo()}
}

// resolver holds the state of one call of Resolve.
type resolver struct {
	fsys    fs.FS
	opts    Options
	diags   diag.List
	tmpl    *scenario.Template
	paths   Paths
	sources []Source

	statements []syntax.Statement // of the scenario, then those taken from used files
	top        map[string]symbol
	broken     map[string]bool   // names of statements that could not be read
	parts      map[string]string // kinds of the parts of lines, by bare name

	lets     map[string]*letEntry
	letOrder []*letEntry // in the order of the text
	letStack []*letEntry // being read
	values   []float64   // nominal, in the template's order

	stocks     map[string]*stockEntry
	builtin    map[string]*stockEntry // built-in ones that were used
	stockOrder []*stockEntry
	laws       map[string]*lawEntry
	lines      map[string]*lineEntry
	lineOrder  []*lineEntry
	elements   map[string][]element // by bare name, over all lines
	watches    map[string]int       // index into the template's watches, -1 where it is faulty

	units      map[string]unitRead
	tables     map[string]*csvFile
	typed      map[*diag.File]*diag.File // files made of values from outside, and what was typed
	pluginLaws map[string]*lawEntry      // laws of plugins, read once
	mades      map[*diag.File]*made      // texts made of each blocks, and where they come from
	made       int                       // bytes of them
	depth      int                       // of the expression being compiled
	wanted     *unit.Dim                 // of the number that is being read, nil where nothing is known
	// partsUnsure: a line could not be read whole, so that a part may exist unseen.
	partsUnsure bool
	joints      int  // made by `every`
	weighed     int  // instructions in the tensions of inclined lines
	searched    int  // words looked through for hints
	incomplete  bool // some statement could not be read: absences prove nothing
}

// symbol is one name at the top of a file.
type symbol struct {
	kind string // let, stock, line, ...
	span diag.Span
}

// errorAt adds an error and returns it for more to be said.
func (r *resolver) errorAt(span diag.Span, code, summary, found, hint string, related ...diag.Related) {
	r.diags.Add(diag.Diagnostic{Code: code, Span: span, Summary: summary, Found: found, Hint: hint, Related: related})
}

// warnAt adds a warning.
func (r *resolver) warnAt(span diag.Span, code, summary, found, hint string) {
	r.diags.Add(diag.Diagnostic{Code: code, Severity: diag.Warning, Span: span, Summary: summary, Found: found, Hint: hint})
}

// notYet refuses what the language can say and this version cannot do.
func (r *resolver) notYet(span diag.Span, what, hint string) {
	r.errorAt(span, "not-yet", what+" cannot be computed by this version yet", "", hint)
}

// path records where a path of the template is said.
func (r *resolver) path(path string, span diag.Span) {
	if _, ok := r.paths[path]; !ok && !span.IsZero() {
		r.paths[path] = span
	}
}

// num is the nominal value of a program that is known to be sound.
func (r *resolver) num(p formula.Program) float64 { return p.Eval(r.values, nil) }

// maxSearched bounds the words that are looked through for hints, so that a text
// full of mistakes is not slow to refuse.
const maxSearched = 1_000_000

// nearest is the name in m that was probably meant, or "".
func nearest[V any](r *resolver, word string, m map[string]V) string {
	if r.searched += len(m); r.searched > maxSearched {
		return ""
	}
	return diag.Nearest(word, known(m))
}

// known lists names in a fixed order.
func known[V any](m map[string]V) []string {
	out := make([]string, 0, len(m))
	for k := range m {
		out = append(out, k)
	}
	sort.Strings(out)
	return out
}
