package dsl

import (
	"regexp"
	"strings"
	"testing"
	"testing/fstest"
)

// samples is the file of grammar samples; its own head says how it is written.
type samples struct {
	files  fstest.MapFS
	frames map[string]string
	list   []sample
}

// sample is one right or wrong sample in its frame.
type sample struct {
	production, frame, text string
	wrong                   string // the code that it raises, "" for a right one
}

var hole = regexp.MustCompile(`(?m)^\s*%%$`)

func readSamples(text string) samples {
	out := samples{files: fstest.MapFS{}, frames: map[string]string{}}
	for _, section := range strings.Split(text, "\n== ")[1:] {
		head, body, _ := strings.Cut(section, "\n")
		kind, name, _ := strings.Cut(head, " ")
		switch kind {
		case "file":
			out.files[name] = &fstest.MapFile{Data: []byte(body)}
		case "frame":
			out.frames[name] = body
		case "production":
			out.list = append(out.list, productionSamples(name, body)...)
		}
	}
	return out
}

func productionSamples(name, body string) []sample {
	var list []sample
	frame, open := "bare", false
	for _, line := range strings.Split(body, "\n") {
		line = strings.TrimSpace(line)
		if text, ok := strings.CutPrefix(line, "|"); ok {
			if open {
				list[len(list)-1].text += strings.TrimPrefix(text, " ") + "\n"
			}
			continue
		}
		f := strings.Fields(line)
		if len(f) == 0 {
			continue
		}
		open = false
		switch {
		case f[0] == "frame" && len(f) > 1:
			frame = f[1]
		case f[0] == "right":
			list, open = append(list, sample{production: name, frame: frame}), true
		case f[0] == "wrong" && len(f) > 1:
			list, open = append(list, sample{production: name, frame: frame, wrong: f[1]}), true
		}
	}
	return list
}

// Every right sample of the grammar compiles, but for what the engine cannot do
// yet, and every wrong one raises its code.
func TestGrammarSamples(t *testing.T) {
	all := readSamples(read(t, "grammar-samples.txt"))
	if len(all.list) < 50 || len(all.frames) < 5 {
		t.Fatalf("%d samples in %d frames", len(all.list), len(all.frames))
	}
	installed := Options{Plugins: []Plugin{{Name: "gusty wind", Kind: "load", Parameters: []Parameter{{Name: "speed", Unit: "m/s"}}}}}
	for _, s := range all.list {
		all.files["case.taut"] = &fstest.MapFile{Data: []byte(hole.ReplaceAllLiteralString(all.frames[s.frame], strings.TrimSuffix(s.text, "\n")))}
		found := false
		for _, d := range Compile(all.files, "case.taut", installed).Diagnostics.Errors() {
			found = found || d.Code == s.wrong
			if s.wrong == "" && d.Code != "not-yet" {
				t.Errorf("%s: a right sample raises\n%s", s.production, d.Text())
			}
		}
		if s.wrong != "" && !found {
			t.Errorf("%s: the sample %q does not raise %s", s.production, s.text, s.wrong)
		}
	}
}
