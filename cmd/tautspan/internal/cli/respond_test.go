package cli

import (
	"bytes"
	"context"
	"encoding/json"
	"strings"
	"testing"

	"github.com/tautspan/tautspan/cmd/tautspan/internal/app"
)

const respondLine = `tautspan 1
stock s {
    mass 1 kg/m
}
line l {
    tension 10 kN
    support a fixed
    segment z s 4 m
    joint knob mass 1 kg, dashpot 100 N*s/m
    segment y s 6 m
    support b fixed
}
excite p push at z 3 m with sine(1 N, 1 Hz)
watch q at y 2 m displacement, moment
`

func respondWith(t *testing.T, c respondCmd, asJSON bool) (out, errs string, code error) {
	t.Helper()
	var o, e bytes.Buffer
	s := &session{ctx: context.Background(), Streams: Streams{In: strings.NewReader(respondLine), Out: &o, Err: &e}, width: 90, app: app.New()}
	s.JSON, s.Units = asJSON, "si"
	c.File = "-"
	code = c.Run(s)
	return o.String(), e.String(), code
}

func TestRespondText(t *testing.T) {
	out, errs, err := respondWith(t, respondCmd{From: "0 Hz", To: "20", Points: 81}, false)
	if err != nil {
		t.Fatal(err, errs)
	}
	for _, want := range []string{"81 frequencies from 0 Hz to 20 Hz", "each joint alone", "knob", "each end", "q.displacement per unit of p [m/N]", "peak at", "zero at every frequency"} {
		if !strings.Contains(out, want) {
			t.Errorf("no %q in\n%s", want, out)
		}
	}
	for _, bad := range []string{"NaN", "Inf", "%!"} {
		if strings.Contains(out, bad) {
			t.Errorf("%s in\n%s", bad, out)
		}
	}
}

func TestRespondJSONStandsAlone(t *testing.T) {
	out, _, err := respondWith(t, respondCmd{From: "3.5", To: "3.5", Points: 1}, true)
	if err != nil || !json.Valid([]byte(out)) {
		t.Errorf("%v\n%s", err, out)
	}
}

func TestRespondRefusesFlags(t *testing.T) {
	for _, c := range []respondCmd{{From: "-1", Points: 5}, {To: "3 kg", Points: 5}, {Points: 0}, {From: "3", To: "2", Points: 5}} {
		if _, errs, err := respondWith(t, c, false); err != exitError(exitInput) || !strings.Contains(errs, "[usage]") {
			t.Errorf("%+v: %v %s", c, err, errs)
		}
	}
}

func TestBoundReadsZero(t *testing.T) {
	for text, want := range map[string]float64{"0": 0, "0 Hz": 0, "0.0Hz": 0, "2.5": 2.5, "2 kHz": 2000} {
		if v, err := bound(text); err != nil || v == nil || *v != want {
			t.Errorf("%q: %v, %v", text, v, err)
		}
	}
	if v, err := bound(" "); v != nil || err != nil {
		t.Errorf("left out: %v, %v", v, err)
	}
}
