package host

import (
	"context"
	"encoding/json"
	"errors"
	"fmt"
	"strconv"
	"sync"

	"github.com/hashicorp/go-plugin"
	"google.golang.org/grpc"

	"github.com/tautspan/tautspan/engine/mesh"
	"github.com/tautspan/tautspan/engine/scenario"
	"github.com/tautspan/tautspan/engine/solver"
	"github.com/tautspan/tautspan/plugins/author"
	"github.com/tautspan/tautspan/plugins/wire"
)

// packed is a network with what a caller may have set on its mesh.
type packed struct {
	Network *scenario.Network
	Timing  mesh.Timing
	Means   []int
}

// packNetwork writes what a mesh was built from. Floating-point numbers keep
// every bit.
func packNetwork(m *mesh.Mesh) ([]byte, error) {
	if m.Source == nil {
		return nil, errors.New("a mesh that was not built from a network cannot be solved apart")
	}
	p := packed{Network: m.Source, Timing: m.Timing}
	for i := range m.Channels {
		p.Means = append(p.Means, m.Channels[i].Means)
	}
	return json.Marshal(p)
}

func unpackNetwork(data []byte) (*mesh.Mesh, error) {
	var p packed
	if err := json.Unmarshal(data, &p); err != nil {
		return nil, err
	}
	if p.Network == nil {
		return nil, errors.New("no network")
	}
	m, err := mesh.Build(p.Network)
	if err != nil {
		return nil, err
	}
	if len(p.Means) != len(m.Channels) {
		return nil, fmt.Errorf("%d channels, %d told", len(m.Channels), len(p.Means))
	}
	m.Timing = p.Timing
	for i := range m.Channels {
		m.Channels[i].Means = p.Means[i]
	}
	return m, nil
}

// ServeSolver serves one of this program's own solvers until the host lets go.
func ServeSolver(s solver.Solver) { author.ServeWire(&nativePlugin{solver: s}) }

type nativePlugin struct {
	plugin.NetRPCUnsupportedPlugin
	solver solver.Solver
}

// GRPCServer registers the services.
func (p *nativePlugin) GRPCServer(_ *plugin.GRPCBroker, g *grpc.Server) error {
	wire.RegisterPluginServer(g, &nativeServer{solver: p.solver})
	wire.RegisterSolverServer(g, &nativeServer{solver: p.solver, layouts: map[string]any{}})
	return nil
}

// GRPCClient is the host's business.
func (p *nativePlugin) GRPCClient(context.Context, *plugin.GRPCBroker, *grpc.ClientConn) (any, error) {
	return nil, errors.New("a plugin does not call plugins")
}

type nativeServer struct {
	wire.UnimplementedPluginServer
	wire.UnimplementedSolverServer
	solver solver.Solver

	lock    sync.Mutex
	layouts map[string]any
	made    int
}

// Describe names the solver.
func (s *nativeServer) Describe(context.Context, *wire.DescribeRequest) (*wire.Description, error) {
	return &wire.Description{Name: s.solver.Name(), Version: s.solver.Version(), Kind: "solver", Says: "one of tautspan's own solvers"}, nil
}

func (s *nativeServer) request(t *wire.Task) solver.Request {
	req := solver.Request{Level: int(t.Level), Effort: int(t.Effort)}
	s.lock.Lock()
	defer s.lock.Unlock()
	if l, ok := s.layouts[t.Freeze]; ok {
		req.Freeze = l
	}
	return req
}

// keep stores a layout under a name. A run freezes one or two; the bound is there
// for a host gone wild.
func (s *nativeServer) keep(layout any) string {
	if layout == nil {
		return ""
	}
	s.lock.Lock()
	defer s.lock.Unlock()
	const most = 256
	if len(s.layouts) >= most {
		return ""
	}
	s.made++
	name := strconv.Itoa(s.made)
	s.layouts[name] = layout
	return name
}

// Judge says what cannot be and what a level costs.
func (s *nativeServer) Judge(_ context.Context, t *wire.Task) (*wire.Judgement, error) {
	m, err := unpackNetwork(t.Native)
	if err != nil {
		return nil, err
	}
	out := &wire.Judgement{Refuses: s.solver.Refuses(m)}
	if len(out.Refuses) > 0 {
		return out, nil
	}
	plan, err := s.solver.Plan(m, s.request(t))
	out.Plan = planToWire(plan)
	if err != nil {
		out.Fault, out.OverBudget = err.Error(), errors.Is(err, solver.ErrBudget)
	}
	return out, nil
}

func planToWire(p solver.Plan) *wire.Plan {
	return &wire.Plan{Cells: int64(p.Cells), Steps: int64(p.Steps), Work: p.Work, Bytes: p.Bytes}
}

// Solve runs the solver and streams its records.
func (s *nativeServer) Solve(stream wire.Solver_SolveServer) error {
	first, err := stream.Recv()
	if err != nil {
		return err
	}
	task := first.GetTask()
	if task == nil {
		return errors.New("the first message is a task")
	}
	m, err := unpackNetwork(task.Native)
	if err != nil {
		return err
	}
	told := 0.0
	progress := func(share float64) {
		if share >= told+0.01 || share >= 1 {
			told = share
			// A host that is gone ends the context.
			_ = stream.Send(&wire.FromSolver{Of: &wire.FromSolver_Progress{Progress: share}})
		}
	}
	r, err := s.solver.Solve(stream.Context(), m, s.request(task), progress)
	if err != nil {
		var fault *solver.FaultError
		text := err.Error()
		if errors.As(err, &fault) {
			text = fault.What
		}
		return stream.Send(&wire.FromSolver{Of: &wire.FromSolver_Fault{Fault: text}})
	}
	for c := range r.Series {
		for k, row := range r.Series[c] {
			if err := author.SendRow(stream.Send, c, k, row); err != nil {
				return err
			}
		}
	}
	e := r.Energy
	return stream.Send(&wire.FromSolver{Of: &wire.FromSolver_Outcome{Outcome: &wire.Outcome{
		Plan: planToWire(r.Plan), Order: r.Order, Ratio: r.Ratio, Layout: s.keep(r.Layout), Frozen: r.Frozen, Notes: r.Notes,
		EnergyStart: e.Start, EnergyEnd: e.End, EnergyWork: e.Work, EnergyLost: e.Lost, EnergyMost: e.Most,
	}}})
}
