package main

import (
	"bytes"
	"os"
	"os/exec"
	"path/filepath"
	"strings"
	"testing"

	"github.com/tautspan/tautspan/cmd/tautspan/internal/cli"
)

// The example law in Python, added, tried and used: the run's records are those of
// the same law from Go, byte for byte. It needs python3 with grpc as Debian
// packages it; where CI runs it must be there.
func TestPythonPlugin(t *testing.T) {
	const python = "/usr/bin/python3"
	if err := exec.Command(python, "-c", "import grpc, google.protobuf").Run(); err != nil {
		if os.Getenv("CI") != "" {
			t.Fatalf("python3-grpcio is missing: %v", err)
		}
		t.Skip("skipped: needs Debian's python3-grpcio and python3-protobuf")
	}
	dir := t.TempDir()
	t.Setenv("TAUTSPAN_PLUGINS", dir)
	t.Setenv("PYTHONDONTWRITEBYTECODE", "1")
	run := func(args ...string) string {
		t.Helper()
		var out, errs bytes.Buffer
		if code := cli.Main(args, cli.Streams{In: strings.NewReader(""), Out: &out, Err: &errs}); code != 0 {
			t.Fatalf("%v: exit %d\n%s%s", args, code, out.String(), errs.String())
		}
		return out.String()
	}
	native := filepath.Join(dir, "law")
	if out, err := exec.Command("go", "build", "-o", native, "../../plugins/examples/law").CombinedOutput(); err != nil {
		t.Fatalf("%v\n%s", err, out)
	}
	run("plugins", "add", native)
	run("plugins", "add", filepath.Join("..", "..", "plugins", "examples", "python", "grip.py"))
	if out := run("plugins", "try", "grip-py"); !strings.Contains(out, "7 hold, 0 refused, 0 fail") {
		t.Errorf("%s", out)
	}
	var records [][]byte
	for _, law := range []string{"grip", "grip-py"} {
		file, result := filepath.Join(dir, law+".taut"), filepath.Join(dir, law+".result")
		text := "tautspan 1\nstock w {\n    mass 0.5 kg/m\n}\nline l {\n    tension 800 N\n    support a fixed\n    segment s w 2 m\n    joint j law \"" + law +
			"\"(hold = 2 N, soft = 20 mm/s)\n    segment u w 1 m\n    support b fixed\n}\nexcite off pluck at s 0.5 m by 10 mm\nwatch mid at s 1 m displacement\nrun {\n    for 0.1 s\n    every 1 ms\n    solvers spectral\n}\n"
		if err := os.WriteFile(file, []byte(text), 0o600); err != nil {
			t.Fatal(err)
		}
		run("run", "--quiet", "--out", result, file)
		series, err := os.ReadFile(filepath.Join(result, "series.csv"))
		if err != nil {
			t.Fatal(err)
		}
		records = append(records, series)
	}
	if len(records[0]) < 1000 || !bytes.Equal(records[0], records[1]) {
		t.Error("the law from Python gives other records than the one from Go")
	}
}
