package author

import (
	"context"
	"fmt"
	"os"
	"runtime/debug"
	"time"

	"github.com/hashicorp/go-plugin"
	"google.golang.org/grpc"

	"github.com/tautspan/tautspan/plugins/wire"
)

// Handshake is how a plugin and tautspan know one another. Whoever starts a
// plugin by hand is told so.
var Handshake = plugin.HandshakeConfig{
	ProtocolVersion:  Protocol,
	MagicCookieKey:   "TAUTSPAN_PLUGIN",
	MagicCookieValue: "taut lines carry waves",
}

// Protocol is the version of the protocol that this package speaks.
const Protocol = 1

// ServedName is the one name under which a process serves its plugin.
const ServedName = "plugin"

// MessageMost bounds a message either way, bytes.
const MessageMost = 64 << 20

// Serve serves one Solver, Load or Law until tautspan lets go; it does not
// return. Nothing may be read from standard input; what is written to standard
// error reaches tautspan's log.
func Serve(served any) {
	p, err := newServer(served)
	if err != nil {
		fmt.Fprintln(os.Stderr, err)
		os.Exit(1)
	}
	ServeWire(p)
}

// ServeWire serves a plugin that speaks the protocol itself.
func ServeWire(p plugin.Plugin) {
	go leaveWithParent()
	plugin.Serve(&plugin.ServeConfig{
		HandshakeConfig: Handshake,
		Plugins:         plugin.PluginSet{ServedName: p},
		GRPCServer: func(options []grpc.ServerOption) *grpc.Server {
			return grpc.NewServer(append(options, grpc.MaxRecvMsgSize(MessageMost), grpc.MaxSendMsgSize(MessageMost))...)
		},
	})
}

// leaveWithParent ends the process when the one that started it is gone: a host
// that was killed cannot say goodbye.
func leaveWithParent() {
	parent := os.Getppid()
	for range time.Tick(250 * time.Millisecond) {
		if os.Getppid() != parent {
			os.Exit(0)
		}
	}
}

// server is a plugin of one of the three kinds.
type server struct {
	plugin.NetRPCUnsupportedPlugin
	wire.UnimplementedPluginServer
	about  About
	kind   string
	served any
}

func newServer(served any) (*server, error) {
	s := &server{served: served}
	switch p := served.(type) {
	case Solver:
		s.kind, s.about = "solver", p.About()
	case Load:
		s.kind, s.about = "load", p.About()
	case Law:
		s.kind, s.about = "law", p.About()
	default:
		return nil, fmt.Errorf("a plugin is an author.Solver, a Load or a Law, and this is a %T", served)
	}
	return s, s.about.Check()
}

// GRPCServer registers the services.
func (s *server) GRPCServer(_ *plugin.GRPCBroker, g *grpc.Server) error {
	wire.RegisterPluginServer(g, s)
	switch p := s.served.(type) {
	case Solver:
		wire.RegisterSolverServer(g, &solverServer{solver: p})
	case Load:
		wire.RegisterLoadServer(g, &loadServer{load: p})
	case Law:
		wire.RegisterLawServer(g, &lawServer{law: p})
	}
	return nil
}

// GRPCClient is the host's business.
func (s *server) GRPCClient(context.Context, *plugin.GRPCBroker, *grpc.ClientConn) (any, error) {
	return nil, fmt.Errorf("a plugin does not call plugins")
}

// Describe answers with the description.
func (s *server) Describe(context.Context, *wire.DescribeRequest) (*wire.Description, error) {
	return s.about.toWire(s.kind), nil
}

func (a *About) toWire(kind string) *wire.Description {
	d := &wire.Description{
		Name: a.Name, Version: a.Version, Kind: kind, Says: a.Says, Formula: a.Formula, Source: a.Source,
		Cannot: a.Cannot, Dissipates: a.Dissipates,
	}
	for _, p := range a.Parameters {
		d.Parameters = append(d.Parameters, &wire.Parameter{
			Name: p.Name, Unit: p.Unit, Says: p.Says, Least: p.Least, Most: p.Most, HasPreset: p.HasPreset, Preset: p.Preset,
		})
	}
	return d
}

// AboutFromWire is the inverse.
func AboutFromWire(d *wire.Description) About {
	a := About{
		Name: d.Name, Version: d.Version, Says: d.Says, Formula: d.Formula, Source: d.Source, Cannot: d.Cannot, Dissipates: d.Dissipates,
	}
	for _, p := range d.Parameters {
		a.Parameters = append(a.Parameters, Parameter{
			Name: p.Name, Unit: p.Unit, Says: p.Says, Least: p.Least, Most: p.Most, HasPreset: p.HasPreset, Preset: p.Preset,
		})
	}
	return a
}

// caught turns a panic of the author's code into a fault that says where. State
// may be broken after it, but every call starts from its own.
func caught(fault *error) {
	if r := recover(); r != nil {
		*fault = fmt.Errorf("panic: %v\n%s", r, debug.Stack())
	}
}
