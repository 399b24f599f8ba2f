package host

import (
	"bufio"
	"context"
	"fmt"
	"os"
	"os/exec"
	"strconv"
	"strings"
	"syscall"
	"testing"
	"time"

	"github.com/tautspan/tautspan/engine/solver"
	"github.com/tautspan/tautspan/plugins/differences"
)

// hostUntilKilled is another host: it starts a plugin, says its process id, and
// waits.
func hostUntilKilled() {
	exe, err := os.Executable()
	if err != nil {
		os.Exit(1)
	}
	p, err := Start(context.Background(), Spec{Name: "orphan", Path: exe, Args: []string{"serve", "ok"}})
	if err != nil {
		fmt.Println(err)
		os.Exit(1)
	}
	fmt.Println(p.cmd.Process.Pid)
	time.Sleep(time.Hour)
}

// A host that is killed leaves no plugin behind.
func TestKilledHost(t *testing.T) {
	exe, err := os.Executable()
	if err != nil {
		t.Fatal(err)
	}
	cmd := exec.Command(exe, "serve", "a host")
	out, err := cmd.StdoutPipe()
	if err != nil {
		t.Fatal(err)
	}
	if err := cmd.Start(); err != nil {
		t.Fatal(err)
	}
	line, err := bufio.NewReader(out).ReadString('\n')
	if err != nil {
		t.Fatal(err)
	}
	pid, err := strconv.Atoi(strings.TrimSpace(line))
	if err != nil {
		t.Fatalf("%q: %v", line, err)
	}
	if err := syscall.Kill(pid, 0); err != nil {
		t.Fatalf("the plugin is not there: %v", err)
	}
	_ = cmd.Process.Kill()
	_ = cmd.Wait()
	if alive(pid) {
		t.Error("the plugin outlives its killed host")
	}
}

// BenchmarkStart is from nothing to an answered question and a clean end.
func BenchmarkStart(b *testing.B) {
	exe, err := os.Executable()
	if err != nil {
		b.Fatal(err)
	}
	for b.Loop() {
		p, err := Start(context.Background(), Spec{Name: "b", Path: exe, Args: []string{"serve", "ok"}})
		if err != nil {
			b.Fatal(err)
		}
		p.Close()
	}
}

func benchProcess(b *testing.B, what string) *Process {
	b.Helper()
	exe, err := os.Executable()
	if err != nil {
		b.Fatal(err)
	}
	p, err := Start(context.Background(), Spec{Name: "b", Path: exe, Args: []string{"serve", what}})
	if err != nil {
		b.Fatal(err)
	}
	b.Cleanup(p.Close)
	return p
}

// BenchmarkFollow is one step of a law: in process, and followed in another.
func BenchmarkFollow(b *testing.B) {
	here, err := lawOf{}.Follow(map[string]float64{"c": 5})
	if err != nil {
		b.Fatal(err)
	}
	law, err := NewLaw(benchProcess(b, "law"))
	if err != nil {
		b.Fatal(err)
	}
	there, err := law.Follow(map[string]float64{"c": 5})
	if err != nil {
		b.Fatal(err)
	}
	b.Run("in process", func(b *testing.B) {
		for b.Loop() {
			if _, err := here.Force(0, 0, 1, true); err != nil {
				b.Fatal(err)
			}
		}
	})
	b.Run("apart", func(b *testing.B) {
		for b.Loop() {
			if _, err := there.Force(0, 0, 1, true); err != nil {
				b.Fatal(err)
			}
		}
	})
}

// BenchmarkRecords is the way of a record of a million rows.
func BenchmarkRecords(b *testing.B) {
	s, err := NewSolver(benchProcess(b, "ok"), false)
	if err != nil {
		b.Fatal(err)
	}
	m := pluckedMesh(b)
	m.Timing.Rows = 1_000_000
	b.SetBytes(8_000_000)
	for b.Loop() {
		if _, err := s.Solve(context.Background(), m, solver.Request{}, nil); err != nil {
			b.Fatal(err)
		}
	}
}

// BenchmarkApart is a built-in solver in process and in one of its own.
func BenchmarkApart(b *testing.B) {
	apart, err := NewSolver(benchProcess(b, "differences"), true)
	if err != nil {
		b.Fatal(err)
	}
	m := pluckedMesh(b)
	m.Timing.Rows = 20_001
	for _, s := range []struct {
		name string
		solver.Solver
	}{{"in process", differences.New()}, {"apart", apart}} {
		b.Run(s.name, func(b *testing.B) {
			for b.Loop() {
				if _, err := s.Solve(context.Background(), m, solver.Request{Level: 1, Effort: 1}, nil); err != nil {
					b.Fatal(err)
				}
			}
		})
	}
}
