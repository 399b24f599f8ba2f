package main

import (
	"os"
	"os/exec"
	"path/filepath"
	"strings"
	"testing"

	"github.com/rogpeppe/go-internal/testscript"

	"github.com/tautspan/tautspan/cmd/tautspan/internal/cli"
)

func TestMain(m *testing.M) {
	testscript.Main(m, map[string]func(){
		"tautspan": func() {
			os.Exit(cli.Main(os.Args[1:], cli.Streams{In: os.Stdin, Out: os.Stdout, Err: os.Stderr}))
		},
	})
}

// Each script runs the program in a fresh folder and looks at exit code,
// standard output and standard error.
func TestScripts(t *testing.T) {
	testscript.Run(t, testscript.Params{Dir: "testdata/script", RequireExplicitExec: false, Setup: func(e *testscript.Env) error {
		root, err := filepath.Abs(filepath.Join("..", ".."))
		if err != nil {
			return err
		}
		e.Setenv("REPO", root)
		return goEnv(e)
	}})
}

// goEnv lets scripts build plugins from this module, with the caches of whoever
// runs the test.
func goEnv(e *testscript.Env) error {
	names := []string{"GOCACHE", "GOMODCACHE", "GOPROXY", "GOFLAGS"}
	out, err := exec.Command("go", append([]string{"env"}, names...)...).Output()
	if err != nil {
		return err
	}
	for i, line := range strings.Split(strings.TrimRight(string(out), "\n"), "\n") {
		e.Setenv(names[i], line)
	}
	return nil
}
