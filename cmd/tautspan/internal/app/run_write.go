package app

import (
	"bytes"
	"encoding/json"
	"path/filepath"
	"runtime"
	"strconv"
	"strings"
	"time"

	"github.com/rs/zerolog"

	"github.com/tautspan/tautspan/cmd/tautspan/internal/store"
	"github.com/tautspan/tautspan/engine/measure"
)

type requirement = measure.Requirement

// noFolder as RunWant.Out keeps a run from writing one.
const noFolder = "none"

// now is the wall clock, for timing.json alone.
func now() time.Time { return time.Now() }

func workers() int { return runtime.GOMAXPROCS(0) }

// defaultDir is the result folder's place: <file>.result beside the scenario.
func defaultDir(file string) string { return file + ".result" }

func permitted(dir, file string, force bool) error { return store.Permitted(dir, file, force) }

// logBook collects the log of a run for its folder; it has no times, so that
// the same run gives the same bytes.
type logBook struct{ buf bytes.Buffer }

func (l *logBook) event(message string, fields map[string]any) {
	logger := zerolog.New(&l.buf)
	logger.Info().Fields(fields).Msg(message)
}

// write puts the result folder in its place.
func (r *runner) write() error {
	folded := r.compiled.Fold()
	doc := *r.doc
	doc.ResultDir = "."
	doc.Scenario.File = filepath.Base(doc.Scenario.File)
	result, err := encode(&doc)
	if err != nil {
		return err
	}
	timing, err := encode(map[string]any{
		"started": r.started.UTC().Format(time.RFC3339Nano), "solving_s": r.solved.Seconds(), "total_s": now().Sub(r.started).Seconds(), "processors": workers(),
	})
	if err != nil {
		return err
	}
	r.record()
	folder := &store.Folder{Result: result, Timing: timing, Scenario: []byte(folded), Log: r.log.buf.Bytes(), Series: r.series(), Pictures: r.pictures()}
	return store.Write(r.dir, r.file, folder, r.want.Force)
}

func encode(doc any) ([]byte, error) {
	var b bytes.Buffer
	enc := json.NewEncoder(&b)
	enc.SetIndent("", "  ")
	enc.SetEscapeHTML(false)
	err := enc.Encode(doc)
	return b.Bytes(), err
}

// record writes what happened into the log.
func (r *runner) record() {
	r.log.event("scenario", map[string]any{"file": filepath.Base(r.file), "sha256": r.head.Scenario.SHA256, "tautspan": Version})
	if r.outcome == nil {
		return
	}
	for i := range r.outcome.Voices {
		v := &r.outcome.Voices[i]
		r.log.event("solver", map[string]any{"name": v.Name, "version": v.Version, "levels": v.Levels, "cells": v.Cells, "steps": v.Steps, "reason": v.Reason(), "exhausted": v.Exhausted, "notes": v.Notes})
	}
	for c := range r.outcome.Channels {
		ch := &r.outcome.Channels[c]
		r.log.event("comparison", map[string]any{"channel": ch.Name, "verdict": ch.Verdict.String(), "resolving_power": finite(ch.ResolvingPower), "difference": finite(ch.Difference)})
	}
	r.log.event("verdict", map[string]any{"verdict": r.doc.Verdict, "work": r.outcome.Work})
}

// series is every record at a place: of each solver, and the pointwise error band.
func (r *runner) series() store.Table {
	m := r.session.Centre().Mesh
	times := make([]float64, m.Timing.Rows)
	for i := range times {
		times[i] = clean(float64(i) * m.Timing.Every)
	}
	t := store.Table{Columns: []store.Column{{Name: "time [s]", Values: times}}}
	if r.outcome == nil {
		return t
	}
	for c := range r.outcome.Channels {
		ch, mc := &r.outcome.Channels[c], &m.Channels[c]
		if mc.Along {
			continue
		}
		for i := range r.outcome.Voices {
			if v := &r.outcome.Voices[i]; v.Usable() {
				t.Columns = append(t.Columns, store.Column{Name: ch.Name + "." + v.Name + " [" + ch.Unit + "]", Values: v.Finest.Series[c][0]})
			}
		}
		if len(ch.Band) > 0 {
			t.Columns = append(t.Columns, store.Column{Name: ch.Name + ".band [" + ch.Unit + "]", Values: ch.Band[0]})
		}
	}
	return t
}

// pictures are the quantities over place and time, of the best solver.
func (r *runner) pictures() []store.Picture {
	if r.outcome == nil {
		return nil
	}
	m := r.session.Centre().Mesh
	rows, stride := m.FieldRows()
	var out []store.Picture
	for c := range r.outcome.Channels {
		ch, mc := &r.outcome.Channels[c], &m.Channels[c]
		if !mc.Along || len(ch.Series) == 0 {
			continue
		}
		p := store.Picture{Watch: mc.Watch, Name: mc.Quantity.String() + " [" + ch.Unit + "]", X: mc.X}
		if others := sameWatch(out, mc.Watch); others > 0 {
			p.Watch += "." + strings.ReplaceAll(mc.Quantity.String(), " ", "-")
		}
		for row := range rows {
			values := make([]float64, len(mc.Spots))
			for k := range values {
				values[k] = ch.Series[k][row]
			}
			p.Time = append(p.Time, clean(float64(row*stride)*m.Timing.Every))
			p.Values = append(p.Values, values)
		}
		out = append(out, p)
	}
	return out
}

// clean takes the rounding out of a multiple of the output interval, so that a
// table says 0.3 and not 0.30000000000000004.
func clean(t float64) float64 {
	v, err := strconv.ParseFloat(strconv.FormatFloat(t, 'g', 14, 64), 64)
	if err != nil {
		return t
	}
	return v
}

func sameWatch(list []store.Picture, watch string) int {
	n := 0
	for _, p := range list {
		if p.Watch == watch || strings.HasPrefix(p.Watch, watch+".") {
			n++
		}
	}
	return n
}
