package app

import (
	"bufio"
	"context"
	"crypto/sha256"
	"encoding/hex"
	"errors"
	"fmt"
	"io"
	"io/fs"
	"os"
	"path/filepath"
	"strconv"
	"strings"

	"github.com/tautspan/tautspan/dsl/diag"
	"github.com/tautspan/tautspan/dsl/unit"
	"github.com/tautspan/tautspan/engine/record"
	"github.com/tautspan/tautspan/engine/spectrum"
)

// PeaksWant says what is looked for in a record.
type PeaksWant struct {
	Channels   []string // by name or number; none: all
	Time       string   // time column by name or number; "": found by itself
	Rate       float64  // Hz; 0: by the time column or the WAV file's head
	From, To   float64  // s from the record's start; To 0: to its end
	Low, High  float64  // Hz
	Count      int
	Above      float64 // dB
	WholeStart bool
	Unit       string // of the samples, as the file does not say it
	Pictures   bool   // the thinned spectrum as well
}

// Peaks tells what a record holds.
func (a *App) Peaks(ctx context.Context, file string, want PeaksWant) (*PeaksDoc, Status, error) {
	sum, err := hashOf(file)
	if err != nil {
		return nil, Outside, err
	}
	doc := &PeaksDoc{Channels: []PeakChannel{}, Notes: []string{}, Cautions: []CautionNote{}}
	doc.Head = Head{Format: Format, Version: Version, Command: "peaks", Engine: engineOf(), Scenario: Source{File: file, SHA256: sum}, Errors: diag.List{}, Warnings: diag.List{}}
	scale, name, err := givenUnit(want.Unit)
	if err != nil {
		return doc.refuse("usage", diag.Span{File: diag.NewFile("command line", "")}, "--unit "+err.Error(), "--unit 'm/s^2'"), BadInput, nil
	}
	rec, err := openRecord(file, want)
	if err != nil {
		var bad *record.Error
		if !errors.As(err, &bad) {
			return nil, Outside, err
		}
		return doc.refuse(bad.Code, place(file, bad), bad.What, bad.Hint), BadInput, nil
	}
	doc.Rate, doc.Duration, doc.Start = &rec.Rate, finite(rec.Duration()), finite(rec.Start)
	for _, f := range rec.Findings {
		doc.warn(f.Code, f.Channel, f.What)
	}
	found := false
	for i := range rec.Channels {
		if ctx.Err() != nil {
			return doc, Interrupted, nil
		}
		c := &rec.Channels[i]
		out, bad := channelOf(c, scale, name)
		if bad != "" {
			return doc.refuse("unit-mismatch", diag.Span{File: diag.NewFile(file, "")}, bad, "leave --unit out, or name the channel that it is meant for: --channel"), BadInput, nil
		}
		doc.analyse(&out, c.Samples, rec.Rate, want)
		found = found || len(out.Peaks) > 0
		doc.Channels = append(doc.Channels, out)
		c.Samples = nil // an hour of one channel is 0.3 GB
	}
	doc.Cautions = recordCautions()
	if !found {
		return doc, NotAsAsked, nil
	}
	return doc, Done, nil
}

// refuse puts an error into the document.
func (d *PeaksDoc) refuse(code string, at diag.Span, what, hint string) *PeaksDoc {
	d.Errors = append(d.Errors, diag.Diagnostic{Code: code, Span: at, Summary: what, Hint: hint})
	return d
}

// warn puts a finding into the document.
func (d *PeaksDoc) warn(code, channel, what string) {
	if channel != "" {
		what = "channel " + channel + ": " + what
	}
	d.Warnings = append(d.Warnings, diag.Diagnostic{Code: code, Severity: diag.Warning, Summary: what})
}

// openRecord opens the file; units of time are those of the language.
func openRecord(file string, want PeaksWant) (*record.Record, error) {
	opt := record.Options{Rate: want.Rate, Only: want.Channels, From: want.From, To: want.To, Scale: secondsOf}
	if n, err := strconv.Atoi(want.Time); err == nil {
		opt.TimeNumber = n
	} else {
		opt.Time = want.Time
	}
	dir, name := filepath.Split(file)
	if dir == "" {
		dir = "."
	}
	return record.Open(os.DirFS(dir), name, opt)
}

// secondsOf is the factor of a unit of time.
func secondsOf(text string) (float64, bool) {
	u, err := unit.Parse(text)
	return u.Factor(), err == nil && u.Dim == unit.Time.Dim
}

// givenUnit reads --unit: a unit, or a quantity that 1 in the file stands for.
func givenUnit(text string) (scale float64, name string, err error) {
	text = strings.TrimSpace(text)
	if text == "" {
		return 0, "", nil
	}
	scale, word := 1.0, text
	if number, rest, ok := strings.Cut(text, " "); ok {
		v, nerr := strconv.ParseFloat(number, 64)
		if nerr != nil || !(v > 0) || v > 1e300 {
			return 0, "", fmt.Errorf("wants a unit, or what 1 in the file stands for, such as '20 m/s^2', and is %q", text)
		}
		scale, word = v, strings.TrimSpace(rest)
	}
	if _, err := unit.Parse(word); err != nil {
		return 0, "", fmt.Errorf("wants a unit such as m/s^2, and is %q: %w", text, err)
	}
	return scale, word, nil
}

// channelOf settles a channel's unit: that of the file, else the one given, else
// none. Two that are of different kinds do not go together.
func channelOf(c *record.Channel, scale float64, given string) (out PeakChannel, bad string) {
	out = PeakChannel{Name: c.Name, Unit: uncalibrated, Written: c.Unit, Peaks: []RecordPeak{}, Notes: []string{}, factor: 1}
	own, err := unit.Parse(c.Unit)
	known := err == nil && c.Unit != "" && c.Unit != "1"
	if given == "" {
		if known {
			out.Unit, out.factor = own.Dim.SI(), own.Factor()
		}
		return out, ""
	}
	u, _ := unit.Parse(given) // read before
	if known && own.Dim != u.Dim {
		return out, fmt.Sprintf("the file says that %s is in %s, %s, and --unit %s is %s", c.Name, c.Unit, own.Dim.Name(), given, u.Dim.Name())
	}
	out.Unit, out.factor = u.Dim.SI(), scale*u.Factor()
	return out, ""
}

// analyse fills a channel in.
func (d *PeaksDoc) analyse(out *PeakChannel, x []float64, rate float64, want PeaksWant) {
	found, err := spectrum.Find(x, rate, spectrum.Want{Low: want.Low, High: want.High, Count: want.Count, Above: want.Above, WholeStart: want.WholeStart})
	if err != nil {
		d.warn("no-peak", out.Name, err.Error())
		return
	}
	out.From, out.To, out.Struck, out.Step = finite(found.From), finite(found.To), found.Struck, finite(found.Step)
	out.Notes = append(out.Notes, found.Notes...)
	var orders []int
	if s, ok := spectrum.FitSeries(found.Peaks); ok {
		out.Series, orders = seriesOf(&s, found.Peaks), s.Order
	}
	for i := range found.Peaks {
		out.Peaks = append(out.Peaks, rowOf(&found.Peaks[i], rate, out.factor))
		if orders != nil && orders[i] > 0 {
			n := orders[i]
			out.Peaks[i].Number = &n
		}
	}
	d.warnOfPeaks(out, rate)
	if want.Pictures {
		out.Spectrum = thinned(x, rate, found, want)
	}
}

// warnOfPeaks says once a channel what may not be what it looks like.
func (d *PeaksDoc) warnOfPeaks(out *PeakChannel, rate float64) {
	var alias, mains, crooked []string
	for i := range out.Peaks {
		p := &out.Peaks[i]
		hz := unit.Digits(p.Frequency, 5)
		if p.NearLimit {
			alias = append(alias, hz)
		}
		if p.Mains {
			mains = append(mains, hz)
		}
		if p.Straight != nil && !*p.Straight {
			crooked = append(crooked, hz)
		}
	}
	say := func(code string, list []string, what string) {
		if len(list) > 0 {
			d.warn(code, out.Name, fmt.Sprintf(what, few(list)))
		}
	}
	say("possible-alias", alias, fmt.Sprintf("peaks at %%s Hz lie close to half the sampling rate (%s Hz): each may be the mirror of a faster vibration", unit.Digits(rate/2, 5)))
	say("mains-hum", mains, "peaks at %s Hz lie where mains hum shows: switch the supply off, or move the cable, and see whether they stay")
	say("decay-not-straight", crooked, "decays at %s Hz bend or beat: no single damping describes them")
}

// few names the first of a list.
func few(list []string) string {
	if len(list) > 6 {
		return strings.Join(list[:6], ", ") + fmt.Sprintf(" and %d more", len(list)-6)
	}
	return strings.Join(list, ", ")
}

// recordCautions go with every record that is read.
func recordCautions() []CautionNote {
	return []CautionNote{
		{"not-a-tension", "A frequency picked here is not a tension. Bending, ends that give, sag, fittings and a wrong order number all move it: 'tautspan fit' takes them into account, with intervals. A peak may also belong to a deck, mast or drive."},
		{"striking", "Before a line is struck: lock out any drive and secure the load; a soft mallet and small taps, away from sockets, insulators, sheathing and fibre; never hit brittle cast iron or corroded wires. Treat conductors as live until authorised people have grounded them."},
		{"authority", "Results are an aid. A licensed engineer has to check them; local codes, owner rules and the certificate of the rope govern."},
	}
}

// hashOf is the SHA-256 of a file, read as a stream.
func hashOf(file string) (string, error) {
	f, err := os.Open(file)
	if err != nil {
		return "", err
	}
	defer func() { _ = f.Close() }() // only read
	if info, err := f.Stat(); err == nil && info.IsDir() {
		return "", &fs.PathError{Op: "read", Path: file, Err: errors.New("is a folder, not a record")}
	}
	h := sha256.New()
	if _, err := io.Copy(h, f); err != nil {
		return "", err
	}
	return hex.EncodeToString(h.Sum(nil)), nil
}

// place is where in a record an error lies, with the line's text.
func place(file string, e *record.Error) diag.Span {
	if e.Line <= 0 {
		return diag.Span{File: diag.NewFile(file, "")}
	}
	text := lineOf(file, e.Line)
	at := min(max(e.Column-1, 0), len(text))
	end := at
	for end < len(text) && !strings.ContainsRune(",;\t", rune(text[end])) {
		end++
	}
	return diag.Span{File: diag.NewExcerpt(file, text, e.Line), Start: at, End: end}
}

// lineOf is one line of a file, cut short where it is very long.
func lineOf(file string, line int) string {
	f, err := os.Open(file)
	if err != nil {
		return ""
	}
	defer func() { _ = f.Close() }() // only read
	r := bufio.NewReaderSize(f, 1<<16)
	for n := 1; ; {
		part, more, err := r.ReadLine()
		if err != nil {
			return ""
		}
		if n == line {
			return strings.TrimPrefix(string(part[:min(len(part), 4096)]), "\ufeff")
		}
		if !more {
			n++
		}
	}
}
