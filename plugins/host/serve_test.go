package host

import (
	"context"
	"errors"
	"fmt"
	"math"
	"os"
	"strings"
	"testing"
	"time"

	"github.com/tautspan/tautspan/plugins/author"
	"github.com/tautspan/tautspan/plugins/characteristic"
	"github.com/tautspan/tautspan/plugins/differences"
	"github.com/tautspan/tautspan/plugins/spectral"
)

// The test program is its own plugin: started with the word "serve" it serves
// what the next word names.
func TestMain(m *testing.M) {
	if len(os.Args) == 3 && os.Args[1] == "serve" {
		serve(os.Args[2])
		return
	}
	os.Exit(m.Run())
}

func serve(what string) {
	switch what {
	case "differences":
		ServeSolver(differences.New())
	case "spectral":
		ServeSolver(spectral.New())
	case "characteristic":
		ServeSolver(characteristic.New())
	case "a host":
		hostUntilKilled()
	case "not a plugin":
		fmt.Println("good morning")
	case "never starts":
		time.Sleep(time.Hour)
	case "dies at once":
		os.Exit(7)
	case "load":
		author.Serve(ramp{})
	case "law":
		author.Serve(lawOf{})
	case "bad name":
		author.Serve(&still{bad: "name"})
	default:
		author.Serve(&still{bad: what})
	}
}

// still answers zeros: the right answer for a line at rest. bad names the way in
// which it goes wrong.
type still struct{ bad string }

func (s *still) About() author.About {
	a := author.About{Name: "still", Version: "1", Says: "a line at rest"}
	if s.bad == "name" {
		a.Name = "no good name"
	}
	return a
}

func (s *still) Refuses(p *author.Problem) []string {
	if s.bad == "refuses" {
		return []string{"does not feel like it"}
	}
	return p.Beyond("bending")
}

func (s *still) Plan(p *author.Problem, w author.Want) (author.Plan, error) {
	switch s.bad {
	case "budget":
		return author.Plan{}, fmt.Errorf("too fine: %w", author.ErrBudget)
	case "negative plan":
		return author.Plan{Cells: -1}, nil
	}
	return author.Plan{Cells: 1, Steps: p.Rows, Work: int64(p.Rows), Bytes: 8}, nil
}

var hoard [][]byte

func (s *still) Solve(ctx context.Context, p *author.Problem, w author.Want, out *author.Records, progress func(float64)) (author.Outcome, error) {
	o := author.Outcome{Order: 2, Ratio: 2, Energy: author.Energy{Most: 1}}
	switch s.bad {
	case "crash":
		os.Exit(3)
	case "panic":
		panic("a wrong turn")
	case "panic elsewhere":
		go func() { panic("in another goroutine") }()
		time.Sleep(time.Hour)
	case "hang":
		time.Sleep(time.Hour)
	case "slow":
		select {
		case <-ctx.Done():
			return o, ctx.Err()
		case <-time.After(time.Hour):
		}
	case "nan":
		out.Row(0, 0)[3] = math.NaN()
	case "order":
		o.Order = 99
	case "ratio":
		o.Ratio = 1
	case "error":
		return o, errors.New("the line is too long for me")
	case "flood":
		for {
			fmt.Fprintln(os.Stderr, strings.Repeat("noise ", 1000))
		}
	case "hoard":
		for {
			b := make([]byte, 1<<24)
			for i := range b {
				b[i] = 1
			}
			hoard = append(hoard, b)
			time.Sleep(time.Millisecond)
		}
	case "wrong question":
		if _, err := p.Start(99, []float64{0}); err != nil {
			return o, err
		}
	case "start":
		u, err := p.Start(0, []float64{0.5, 1})
		if err != nil {
			return o, err
		}
		for i := range out.Row(0, 0) {
			out.Row(0, 0)[i] = u[i%2]
		}
	case "work":
		// A mode sum of the start shape and the push: every question, real numbers.
		at, times := make([]float64, 401), make([]float64, p.Rows)
		for i := range at {
			at[i] = p.Pieces[0].Length * float64(i) / 400
		}
		for i := range times {
			times[i] = p.Every * float64(i)
		}
		u, err := p.Start(0, at)
		if err != nil {
			return o, err
		}
		f, err := p.PushForce(0, times)
		if err != nil {
			return o, err
		}
		row := out.Row(0, 0)
		for i, t := range times {
			for j, v := range u {
				row[i] += v * math.Sin(float64(j)*t) / 401
			}
			row[i] += 1e-5 * f[i]
		}
	}
	progress(1)
	return o, nil
}

// ramp is a load that grows with time and place.
type ramp struct{}

func (ramp) About() author.About {
	return author.About{Name: "ramp", Version: "2", Says: "grows with time and place", Parameters: []author.Parameter{{Name: "rate", Unit: "N/s", Least: 0, Most: 100}}}
}

func (ramp) Prepare(q author.LoadWant) (step, spacing float64, err error) {
	if q.Parameters["rate"] == 13 {
		return 0, 0, errors.New("a rate of 13 N/s is unlucky")
	}
	return 0.01, 1, nil
}

func (ramp) Evaluate(_ context.Context, q author.LoadWant, t []float64, force [][]float64) error {
	for k, x := range q.Places {
		for i := range t {
			force[k][i] = q.Parameters["rate"]*t[i] + x
			if q.Parameters["rate"] == 66 {
				force[k][i] = math.Inf(1)
			}
		}
	}
	return nil
}

// lawOf is a dashpot that keeps the largest speed it has seen.
type lawOf struct{}

func (lawOf) About() author.About {
	return author.About{Name: "dash", Version: "1", Says: "a dashpot", Dissipates: true, Parameters: []author.Parameter{{Name: "c", Unit: "N*s/m", Least: 0, Most: 1e9}}}
}

func (lawOf) Written(p map[string]float64) (string, error) {
	if p["c"] > 1e6 {
		return "", nil
	}
	return "force = -c * v", nil
}

func (lawOf) Follow(p map[string]float64) (author.Follower, error) { return &dash{c: p["c"]}, nil }

type dash struct{ c float64 }

func (d *dash) Force(_, _, v float64, _ bool) (float64, error) {
	if v > 1e3 {
		return 0, errors.New("too fast")
	}
	return -d.c * v, nil
}
