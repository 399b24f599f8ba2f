package cli

import (
	"bytes"
	"fmt"
	"strings"

	"github.com/rs/zerolog"

	"github.com/tautspan/tautspan/cmd/tautspan/internal/app"
	"github.com/tautspan/tautspan/dsl/unit"
)

// pluginsCmd is what is installed and trusted.
type pluginsCmd struct {
	List   pluginsListCmd   `cmd:"" help:"What is built in and what is installed."`
	Add    pluginsAddCmd    `cmd:"" help:"Start a program once, ask what it is, and trust its file as it is now."`
	Remove pluginsRemoveCmd `cmd:"" help:"Trust it no longer; its file stays."`
	Show   pluginsShowCmd   `cmd:"" help:"What a plugin is, takes and cannot do."`
	Try    pluginsTryCmd    `cmd:"" help:"Run the conformance kit against it."`
}

type pluginsListCmd struct{}

// Run lists the plugins.
func (c *pluginsListCmd) Run(s *session) error {
	doc, status, err := s.app.PluginsList()
	if err != nil {
		return err
	}
	return s.deliver(&doc.Head, doc, int(status), func(p *printer) {
		t := newTable("name", "kind", "version", "", "what it is")
		for _, r := range doc.Plugins {
			state := "built in"
			if !r.BuiltIn {
				state = "trusted"
			}
			if r.Refused != nil {
				state = "will not run: " + *r.Refused
			}
			says := r.Says
			if r.BuiltIn {
				says = ""
			}
			t.add(r.Name, r.Kind, r.Version, state, says)
		}
		p.table(t)
		p.line("\nThe list of what is trusted: %s", doc.Store)
	})
}

type pluginsAddCmd struct {
	Path string `arg:"" help:"The program's file."`
}

// Run adds a plugin.
func (c *pluginsAddCmd) Run(s *session) error {
	doc, status, err := s.app.PluginsAdd(s.ctx, c.Path)
	if err != nil {
		return err
	}
	return s.deliver(&doc.Head, doc, int(status), func(p *printer) {
		r := &doc.Plugins[0]
		p.line("%s, a %s, is trusted from now on as its file is now.", r.Name, r.Kind)
		p.prose("", "It runs as you, with all that you may do: a checksum tells that the file is the one you added, not that it means well. Try it: tautspan plugins try "+r.Name)
	})
}

type pluginsRemoveCmd struct {
	Name string `arg:""`
}

// Run removes a plugin.
func (c *pluginsRemoveCmd) Run(s *session) error {
	doc, status, err := s.app.PluginsRemove(c.Name)
	if err != nil {
		return err
	}
	return s.deliver(&doc.Head, doc, int(status), func(p *printer) {
		p.line("%s is trusted no longer; %s is left as it is.", c.Name, *doc.Plugins[0].Path)
	})
}

type pluginsShowCmd struct {
	Name string `arg:""`
}

// Run shows a plugin.
func (c *pluginsShowCmd) Run(s *session) error {
	doc, status, err := s.app.PluginsShow(c.Name)
	if err != nil {
		return err
	}
	return s.deliver(&doc.Head, doc, int(status), func(p *printer) { p.sayPlugin(&doc.Plugins[0]) })
}

type pluginsTryCmd struct {
	Name string `arg:""`
}

// Run tries a plugin.
func (c *pluginsTryCmd) Run(s *session) error {
	doc, status, err := s.app.PluginsTry(s.ctx, c.Name, pluginLog{s.logger()})
	if err != nil {
		return err
	}
	return s.deliver(&doc.Head, doc, int(status), func(p *printer) {
		count := map[string]int{}
		for _, k := range doc.Checks {
			count[string(k.Outcome)]++
			p.prose("  ", fmt.Sprintf("%-8s %s: %s", k.Outcome, k.Name, k.Detail))
		}
		p.line("\n%d hold, %d refused, %d fail.", count["holds"], count["refused"], count["fails"])
	})
}

func (p *printer) sayPlugin(r *app.PluginRow) {
	p.line("%s %s, a %s", r.Name, r.Version, r.Kind)
	p.prose("  ", r.Says)
	if r.Refused != nil {
		p.line("  will not run: %s", *r.Refused)
	}
	for _, row := range [][2]string{{"formula", r.Formula}, {"source", r.Source}} {
		if row[1] != "" {
			p.prose("  ", row[0]+": "+row[1])
		}
	}
	if len(r.Cannot) > 0 {
		p.prose("  ", "cannot: "+strings.Join(r.Cannot, "; "))
	}
	if r.Dissipates {
		p.line("  promises never to give back more energy than it took")
	}
	if len(r.Parameters) > 0 {
		p.line("")
		t := newTable("takes", "", "from", "to", "else", "")
		for _, q := range r.Parameters {
			u := q.Unit
			if u == "1" {
				u = ""
			}
			t.add(q.Name, u, plainNumber(q.Least), plainNumber(q.Most), plainNumber(q.Preset), q.Says)
		}
		p.table(t)
	}
	if r.Path != nil {
		p.line("\n  file    %s\n  SHA-256 %s\n  added   %s", *r.Path, *r.SHA256, *r.Added)
	}
}

func plainNumber(v *float64) string {
	if v == nil {
		return ""
	}
	return unit.Digits(*v, 6)
}

// serveCmd serves a built-in solver; this program starts it itself.
type serveCmd struct {
	Name string `arg:""`
}

// Run serves until the host lets go.
func (c *serveCmd) Run(*session) error { return app.ServeBuiltin(c.Name) }

// pluginLog puts what plugins write into the log, a line each.
type pluginLog struct{ log zerolog.Logger }

// Write never fails.
func (w pluginLog) Write(data []byte) (int, error) {
	for _, line := range bytes.Split(bytes.TrimRight(data, "\n"), []byte("\n")) {
		w.log.Info().Str("from", "plugin").Msg(string(line))
	}
	return len(data), nil
}
