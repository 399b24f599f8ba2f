package app

import (
	"errors"
	"fmt"
	"io"
	"io/fs"
	"math"
	"path"
	"strconv"
	"strings"

	"github.com/tautspan/tautspan/dsl/diag"
	"github.com/tautspan/tautspan/dsl/unit"
	"github.com/tautspan/tautspan/engine/fit"
	"github.com/tautspan/tautspan/engine/record"
	"github.com/tautspan/tautspan/engine/scenario"
	"github.com/tautspan/tautspan/engine/spectrum"
)

// records are the peaks of the records that the fit names, or of all where it has
// no fit statement. What cannot be read becomes a diagnostic at the record.
func (l *loaded) records(in Input, doc *FitDoc) ([]fit.Peaks, error) {
	t := l.compiled.Template
	var chosen []int
	if t.Fit != nil {
		chosen = t.Fit.Records
	} else {
		for i := range t.Records {
			chosen = append(chosen, i)
		}
	}
	if len(chosen) == 0 {
		return nil, nil
	}
	fsys, _, err := open(in)
	if err != nil {
		return nil, err
	}
	doc.Notes = append(doc.Notes, fmt.Sprintf("to the doubt of each peak of a record %.1g %% of it is added, for what a model leaves unexplained of a real line", 100*modelShare))
	var out []fit.Peaks
	for _, i := range chosen {
		r := &t.Records[i]
		rec, err := readRecord(fsys, r)
		if err != nil {
			l.refuseRecord(r, err)
			continue
		}
		for _, f := range rec.Findings {
			where := r.Name
			if f.Channel != "" {
				where += ", channel " + f.Channel
			}
			doc.Notes = append(doc.Notes, "record "+where+": "+f.What)
		}
		for c := range r.Channels {
			peaks, err := l.peaksOf(r, &r.Channels[c], rec.Channels[c].Samples, rec.Rate)
			if err != nil {
				l.refuseRecord(r, err)
				continue
			}
			out = append(out, peaks)
		}
	}
	return out, nil
}

func (l *loaded) refuseRecord(r *scenario.Record, err error) {
	span, _ := l.compiled.PathSpans.Find("record." + r.Name)
	d := diag.Diagnostic{Code: "unreadable-record", Severity: diag.Error, Span: span, Summary: "the record " + r.Path + " cannot be used", Found: err.Error()}
	var fault *record.Error
	if errors.As(err, &fault) {
		d.Hint = fault.Hint
	}
	l.note(diag.List{d})
}

// readRecord reads the channels of a record in the order of its statement.
func readRecord(fsys fs.FS, r *scenario.Record) (*record.Record, error) {
	f, err := fsys.Open(path.Join(path.Dir(r.From), r.Path))
	if err != nil {
		return nil, err
	}
	defer func() { _ = f.Close() }() // only read
	seeker, ok := f.(io.ReadSeeker)
	if !ok {
		return nil, errors.New("this file cannot be read from")
	}
	if len(r.Channels) == 0 {
		return nil, errors.New("no channel of it is said to see anything: channel COLUMN uncalibrated for WATCH.QUANTITY")
	}
	opt := record.Options{Time: r.Time, TimeNumber: r.TimeNumber}
	for i := range r.Channels {
		c := &r.Channels[i]
		switch {
		case c.Number == 0:
			opt.Only = append(opt.Only, c.Column)
		case r.Time != "":
			return nil, errors.New("its time is told by name and a channel by number: tell both in one way")
		case c.Number == r.TimeNumber:
			return nil, fmt.Errorf("column %d is its time", c.Number)
		case r.TimeNumber > 0 && c.Number > r.TimeNumber:
			opt.Only = append(opt.Only, strconv.Itoa(c.Number-1)) // channels are counted without the time
		default:
			opt.Only = append(opt.Only, strconv.Itoa(c.Number))
		}
	}
	if strings.EqualFold(path.Ext(r.Path), ".wav") {
		return record.ReadWAV(seeker, opt)
	}
	said := false
	var contradiction error
	opt.Scale = func(text string) (float64, bool) {
		u, err := unit.Parse(text)
		if err != nil || u.Dim != unit.Time.Dim {
			return 0, false
		}
		said = true
		if u.Factor() != r.TimeFactor {
			contradiction = fmt.Errorf("its heading says that the time is in %s, and the scenario says otherwise", text)
		}
		return u.Factor(), true
	}
	rec, err := record.ReadCSV(seeker, opt)
	if err == nil && contradiction != nil {
		return nil, contradiction
	}
	if err == nil && !said {
		rec.Rate /= r.TimeFactor
	}
	return rec, err
}

// modelShare is what a model leaves unexplained of a real line's frequencies, as a
// share: a record of a clear tone tells its frequency a hundred times better than
// any support is as firm, any wire as even as said. It is added to what the record
// says of each peak. Common practice, no source; four real strings scatter about
// the series of a stiff one by 0.01 to 0.08 % (testdata/records).
const modelShare = 0.001

// peaksOf finds the peaks of a channel. Those close to half the sampling rate may
// be aliases and are left out; a decay counts where it is straight.
func (l *loaded) peaksOf(r *scenario.Record, c *scenario.RecordChannel, samples []float64, rate float64) (fit.Peaks, error) {
	line := l.compiled.Template.Model.Watches[c.Watch].At.Line
	out := fit.Peaks{Reading: r.Name, Line: line, Sideways: l.net.Lines[line].Sideways, Sag: l.net.Lines[line].Sag}
	found, err := spectrum.Find(samples, rate, spectrum.Want{})
	if err != nil {
		return out, err
	}
	for i := range found.Peaks {
		p := &found.Peaks[i]
		if p.NearLimit {
			continue
		}
		out.Frequency, out.U = append(out.Frequency, p.Frequency), append(out.U, math.Hypot(p.FrequencyU, modelShare*p.Frequency))
		ratio, u := 0.0, 0.0
		if p.Straight && finite(p.Decay) != nil && p.Decay > 0 {
			ratio = p.DampingRatio()
			u = ratio * p.DecayU / p.Decay
		}
		out.Damping, out.DampingU = append(out.Damping, ratio), append(out.DampingU, u)
	}
	if len(out.Frequency) == 0 {
		return out, errors.New("no peak stands out of the noise")
	}
	return out, nil
}
