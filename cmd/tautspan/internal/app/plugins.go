package app

import (
	"context"
	"errors"
	"fmt"
	"io"
	"os"
	"path/filepath"

	"github.com/tautspan/tautspan/dsl"
	"github.com/tautspan/tautspan/dsl/diag"
	"github.com/tautspan/tautspan/plugins/author"
	"github.com/tautspan/tautspan/plugins/host"
	"github.com/tautspan/tautspan/plugins/laws"
	"github.com/tautspan/tautspan/plugins/loads"
	"github.com/tautspan/tautspan/plugins/tryout"
)

// PluginsDoc is the answer of the plugins commands.
type PluginsDoc struct {
	Head
	Action  string         `json:"action"` // list, add, remove, show or try
	Store   string         `json:"store"`  // the file that lists what is trusted
	Plugins []PluginRow    `json:"plugins"`
	Checks  []tryout.Check `json:"checks"`
}

// PluginRow is one plugin.
type PluginRow struct {
	Name       string         `json:"name"`
	Kind       string         `json:"kind"`
	Version    string         `json:"version"`
	BuiltIn    bool           `json:"built_in"`
	Path       *string        `json:"path"`   // null: built in
	SHA256     *string        `json:"sha256"` // likewise
	Added      *string        `json:"added"`
	Refused    *string        `json:"refused"` // why it will not run; null: it will
	Says       string         `json:"says"`
	Formula    string         `json:"formula"`
	Source     string         `json:"source"`
	Cannot     []string       `json:"cannot"`
	Dissipates bool           `json:"dissipates"`
	Parameters []PluginNumber `json:"parameters"`
}

// PluginNumber is a parameter; its bounds and preset are in its own unit.
type PluginNumber struct {
	Name   string   `json:"name"`
	Unit   string   `json:"unit"`
	Says   string   `json:"says"`
	Least  *float64 `json:"least"`
	Most   *float64 `json:"most"`
	Preset *float64 `json:"preset"`
}

// storeVariable names another folder for the list of trusted plugins.
const storeVariable = "TAUTSPAN_PLUGINS"

// pluginStore is the user's list of trusted plugins.
func pluginStore() (host.Store, error) {
	if dir := os.Getenv(storeVariable); dir != "" {
		return host.OpenStore(dir), nil
	}
	dir, err := os.UserConfigDir()
	if err != nil {
		return host.Store{}, fmt.Errorf("there is no folder for the list of plugins: %w (set %s)", err, storeVariable)
	}
	return host.OpenStore(filepath.Join(dir, "tautspan")), nil
}

// installed is what the language needs to know of the plugins. A list that
// cannot be read is as good as none here: a scenario that names a plugin is then
// refused, and `plugins list` says why.
func installed() []dsl.Plugin {
	var out []dsl.Plugin
	for _, l := range loads.BuiltIn() {
		about := l.About()
		out = append(out, languageOf(&about, "load"))
	}
	for _, l := range laws.BuiltIn() {
		p := languageOf(&l.Is, "law")
		p.Body = l.Text
		out = append(out, p)
	}
	store, err := pluginStore()
	if err != nil {
		return out
	}
	all, err := store.List()
	if err != nil {
		return out
	}
	for i := range all {
		p := languageOf(&all[i].About, all[i].Kind)
		p.Body = all[i].Body
		out = append(out, p)
	}
	return out
}

func languageOf(a *author.About, kind string) dsl.Plugin {
	p := dsl.Plugin{Name: a.Name, Kind: kind}
	for _, q := range a.Parameters {
		p.Parameters = append(p.Parameters, dsl.Parameter{Name: q.Name, Unit: q.Unit, Least: q.Least, Most: q.Most, Preset: q.Preset, HasPreset: q.HasPreset})
	}
	return p
}

// builtInName tells whether a name is taken by something built in.
func builtInName(name string) bool {
	for _, r := range builtInRows() {
		if r.Name == name {
			return true
		}
	}
	return false
}

// builtInRows describes the solvers, loads and laws that the program carries.
func builtInRows() []PluginRow {
	var out []PluginRow
	for _, s := range builtin() {
		out = append(out, PluginRow{Name: s.Name(), Kind: "solver", Version: s.Version(), BuiltIn: true, Says: "built in", Cannot: []string{}, Parameters: []PluginNumber{}})
	}
	for _, l := range loads.BuiltIn() {
		about := l.About()
		out = append(out, aboutRow(&about, "load"))
	}
	for _, l := range laws.BuiltIn() {
		out = append(out, aboutRow(&l.Is, "law"))
	}
	for i := range out {
		out[i].BuiltIn = true
	}
	return out
}

// startTrusted starts a trusted plugin, if its file is still the one that was
// trusted.
func startTrusted(ctx context.Context, t *host.Trusted, log io.Writer) (*host.Process, error) {
	if why := t.Changed(); why != "" {
		return nil, fmt.Errorf("plugin %s: %s; look at it, then `tautspan plugins add %s` again", t.About.Name, why, t.Path)
	}
	p, err := host.Start(ctx, host.Spec{Name: t.About.Name, Path: t.Path, Checksum: t.SHA256, Log: log})
	if err != nil {
		return nil, err
	}
	if p.About.Name != t.About.Name || p.Kind != t.Kind {
		p.Close()
		return nil, fmt.Errorf("plugin %s: now says it is the %s %s", t.About.Name, p.Kind, p.About.Name)
	}
	return p, nil
}

func (a *App) pluginsDoc(action string) (*PluginsDoc, host.Store, error) {
	store, err := pluginStore()
	doc := &PluginsDoc{
		Head:   Head{Format: Format, Version: Version, Command: "plugins", Engine: engineOf(), Errors: diag.List{}, Warnings: diag.List{}},
		Action: action, Store: store.File(), Plugins: []PluginRow{}, Checks: []tryout.Check{},
	}
	return doc, store, err
}

func trustedRow(t *host.Trusted) PluginRow {
	r := aboutRow(&t.About, t.Kind)
	r.Path, r.SHA256, r.Added = &t.Path, &t.SHA256, &t.Added
	if why := t.Changed(); why != "" {
		r.Refused = &why
	}
	return r
}

func aboutRow(a *author.About, kind string) PluginRow {
	r := PluginRow{
		Name: a.Name, Kind: kind, Version: a.Version, Says: a.Says, Formula: a.Formula, Source: a.Source,
		Cannot: append([]string{}, a.Cannot...), Dissipates: a.Dissipates, Parameters: []PluginNumber{},
	}
	for _, p := range a.Parameters {
		n := PluginNumber{Name: p.Name, Unit: p.Unit, Says: p.Says}
		if p.Least != 0 || p.Most != 0 {
			least, most := p.Least, p.Most
			n.Least, n.Most = &least, &most
		}
		if p.HasPreset {
			preset := p.Preset
			n.Preset = &preset
		}
		r.Parameters = append(r.Parameters, n)
	}
	return r
}

// PluginsList lists what is built in and what is trusted.
func (a *App) PluginsList() (*PluginsDoc, Status, error) {
	doc, store, err := a.pluginsDoc("list")
	if err != nil {
		return nil, Outside, err
	}
	doc.Plugins = append(doc.Plugins, builtInRows()...)
	all, err := store.List()
	if err != nil {
		return nil, Outside, err
	}
	for i := range all {
		doc.Plugins = append(doc.Plugins, trustedRow(&all[i]))
	}
	return doc, Done, nil
}

// PluginsAdd starts a program once, asks what it is and trusts its file as it is now.
func (a *App) PluginsAdd(ctx context.Context, path string) (*PluginsDoc, Status, error) {
	doc, store, err := a.pluginsDoc("add")
	if err != nil {
		return nil, Outside, err
	}
	if path, err = filepath.Abs(path); err != nil {
		return nil, Outside, err
	}
	sum, err := host.Checksum(path)
	if err != nil {
		return nil, Outside, err
	}
	p, err := host.Start(ctx, host.Spec{Name: filepath.Base(path), Path: path, Checksum: sum})
	if err != nil {
		return nil, Outside, err
	}
	defer p.Close()
	if builtInName(p.About.Name) {
		return nil, Outside, fmt.Errorf("the plugin calls itself %s, which is a built-in one's name", p.About.Name)
	}
	t := host.Trusted{Kind: p.Kind, Path: path, SHA256: sum, Added: host.Now(), About: p.About}
	if p.Kind == "law" {
		l, err := host.NewLaw(p)
		if err != nil {
			return nil, Outside, err
		}
		if t.Body, err = l.Written(tryout.Presets(&p.About)); err != nil {
			return nil, Outside, err
		}
	}
	if err := store.Put(t); err != nil {
		return nil, Outside, err
	}
	doc.Plugins = append(doc.Plugins, trustedRow(&t))
	return doc, Done, nil
}

// errNoPlugin says that a name is not on the list.
func errNoPlugin(name string) error {
	return fmt.Errorf("no plugin called %s is installed; `tautspan plugins list` shows what is", name)
}

// PluginsRemove takes a plugin off the list; its file stays.
func (a *App) PluginsRemove(name string) (*PluginsDoc, Status, error) {
	doc, store, err := a.pluginsDoc("remove")
	if err != nil {
		return nil, Outside, err
	}
	t, found, err := store.Find(name)
	if err != nil {
		return nil, Outside, err
	}
	if !found {
		return nil, Outside, errNoPlugin(name)
	}
	if _, err := store.Remove(name); err != nil {
		return nil, Outside, err
	}
	doc.Plugins = append(doc.Plugins, trustedRow(&t))
	return doc, Done, nil
}

// PluginsShow says what a plugin said of itself when it was added.
func (a *App) PluginsShow(name string) (*PluginsDoc, Status, error) {
	doc, store, err := a.pluginsDoc("show")
	if err != nil {
		return nil, Outside, err
	}
	for _, r := range builtInRows() {
		if r.Name == name {
			doc.Plugins = append(doc.Plugins, r)
			return doc, Done, nil
		}
	}
	t, found, err := store.Find(name)
	switch {
	case err != nil:
		return nil, Outside, err
	case !found:
		return nil, Outside, errNoPlugin(name)
	}
	doc.Plugins = append(doc.Plugins, trustedRow(&t))
	return doc, Done, nil
}

// PluginsTry runs the conformance kit against an installed plugin or a built-in
// solver.
func (a *App) PluginsTry(ctx context.Context, name string, log io.Writer) (*PluginsDoc, Status, error) {
	doc, store, err := a.pluginsDoc("try")
	if err != nil {
		return nil, Outside, err
	}
	for _, s := range builtin() {
		if s.Name() == name {
			doc.Checks = tryout.Solver(ctx, s)
			return doc, tried(doc.Checks), ctx.Err()
		}
	}
	for _, l := range loads.BuiltIn() {
		if l.About().Name == name {
			doc.Checks = tryout.Load(ctx, l)
			return doc, tried(doc.Checks), ctx.Err()
		}
	}
	for _, l := range laws.BuiltIn() {
		if l.Is.Name == name {
			doc.Checks = append(tryout.Law(ctx, l), tryWritten(&l.Is)...)
			return doc, tried(doc.Checks), ctx.Err()
		}
	}
	t, found, err := store.Find(name)
	switch {
	case err != nil:
		return nil, Outside, err
	case !found:
		return nil, Outside, errNoPlugin(name)
	}
	doc.Plugins = append(doc.Plugins, trustedRow(&t))
	p, err := startTrusted(ctx, &t, log)
	if err != nil {
		return nil, Outside, err
	}
	defer p.Close()
	if doc.Checks, err = tryProcess(ctx, p); err != nil {
		return nil, Outside, err
	}
	if ctx.Err() != nil {
		return nil, Interrupted, errors.New("stopped before the last check")
	}
	return doc, tried(doc.Checks), nil
}

func tryProcess(ctx context.Context, p *host.Process) ([]tryout.Check, error) {
	switch p.Kind {
	case "solver":
		s, err := host.NewSolver(p, false)
		if err != nil {
			return nil, err
		}
		return tryout.Solver(ctx, s), nil
	case "load":
		l, err := host.NewLoad(p)
		if err != nil {
			return nil, err
		}
		return tryout.Load(ctx, l), nil
	}
	l, err := host.NewLaw(p)
	if err != nil {
		return nil, err
	}
	checks := tryout.Law(ctx, l)
	if text, err := l.Written(tryout.Presets(&p.About)); err == nil && text != "" {
		checks = append(checks, tryWritten(&p.About)...)
	}
	return checks, nil
}

func tried(checks []tryout.Check) Status {
	for _, c := range checks {
		if c.Failed() {
			return NotAsAsked
		}
	}
	return Done
}
