package host

import (
	"context"
	"crypto/sha256"
	"encoding/hex"
	"errors"
	"fmt"
	"io"
	"os"
	"os/exec"
	"strings"
	"sync"
	"time"

	"github.com/hashicorp/go-hclog"
	"github.com/hashicorp/go-plugin"
	"google.golang.org/grpc"
	"google.golang.org/grpc/codes"
	"google.golang.org/grpc/status"

	"github.com/tautspan/tautspan/plugins/author"
	"github.com/tautspan/tautspan/plugins/wire"
)

// Limits bound what one plugin may take. Zero values stand for the defaults.
type Limits struct {
	Start  time.Duration // to its first answer; 10 s
	Stall  time.Duration // between two messages while it works; 2 min
	Memory int64         // bytes resident; 4 GiB. Watched on Linux only
	Output int64         // bytes written to its standard output and error; 4 MiB
}

func (l Limits) filled() Limits {
	if l.Start <= 0 {
		l.Start = 10 * time.Second
	}
	if l.Stall <= 0 {
		l.Stall = 2 * time.Minute
	}
	if l.Memory <= 0 {
		l.Memory = 4 << 30
	}
	if l.Output <= 0 {
		l.Output = 4 << 20
	}
	return l
}

// stopGrace is what a plugin is given to end by itself; a stopped or hanging one
// would otherwise never end.
const stopGrace = 2 * time.Second

// Spec says which program is a plugin.
type Spec struct {
	Name     string // for messages, before it has described itself
	Path     string
	Args     []string
	Checksum string // SHA-256 of the file, hexadecimal; "": not checked (this program itself)
	Limits   Limits
	Log      io.Writer // its standard error, line by line; nil: dropped
}

// Process is a running plugin.
type Process struct {
	About author.About
	Kind  string // solver, load or law

	spec   Spec
	client *plugin.Client
	conn   *grpc.ClientConn
	cmd    *exec.Cmd
	dir    string
	done   chan struct{}

	lock   sync.Mutex
	reason string // why the host ended it
	closed bool
}

// Start starts a plugin and asks what it is. The error says in one sentence what
// went wrong.
func Start(ctx context.Context, spec Spec) (*Process, error) {
	spec.Limits = spec.Limits.filled()
	p := &Process{spec: spec, done: make(chan struct{})}
	if err := p.begin(ctx); err != nil {
		p.Close()
		return nil, fmt.Errorf("plugin %s: %w", spec.Name, p.because(err))
	}
	return p, nil
}

func (p *Process) begin(ctx context.Context) error {
	var secure *plugin.SecureConfig
	if p.spec.Checksum != "" {
		sum, err := hex.DecodeString(p.spec.Checksum)
		if err != nil || len(sum) != sha256.Size {
			return errors.New("its recorded checksum is no SHA-256")
		}
		secure = &plugin.SecureConfig{Checksum: sum, Hash: sha256.New()}
	}
	dir, err := os.MkdirTemp("", "tautspan-plugin-")
	if err != nil {
		return err
	}
	p.dir = dir
	p.cmd = exec.Command(p.spec.Path, p.spec.Args...)
	p.cmd.Env = environment(dir)
	contain(p.cmd)
	out := &bounded{left: p.spec.Limits.Output, to: p.spec.Log, full: func() { p.end("wrote more than its limit of output") }}
	p.client = plugin.NewClient(&plugin.ClientConfig{
		HandshakeConfig:  author.Handshake,
		Plugins:          plugin.PluginSet{author.ServedName: &peer{}},
		Cmd:              p.cmd,
		SecureConfig:     secure,
		AllowedProtocols: []plugin.Protocol{plugin.ProtocolGRPC},
		StartTimeout:     p.spec.Limits.Start,
		SkipHostEnv:      true,
		UnixSocketConfig: &plugin.UnixSocketConfig{TempDir: dir},
		Stderr:           out, SyncStdout: out, SyncStderr: out,
		Logger:          hclog.NewNullLogger(),
		GRPCDialOptions: []grpc.DialOption{grpc.WithDefaultCallOptions(grpc.MaxCallRecvMsgSize(author.MessageMost), grpc.MaxCallSendMsgSize(author.MessageMost))},
	})
	started := make(chan error, 1)
	var protocol plugin.ClientProtocol
	go func() {
		var err error
		protocol, err = p.client.Client()
		started <- err
	}()
	select {
	case err := <-started:
		if err != nil {
			return plain(err)
		}
	case <-ctx.Done():
		// The start cannot be called off; the process is killed and the start fails.
		p.kill()
		<-started
		return ctx.Err()
	}
	served, err := protocol.Dispense(author.ServedName)
	if err != nil {
		return err
	}
	p.conn = served.(*grpc.ClientConn)
	go p.watch()
	return p.describe(ctx)
}

func (p *Process) describe(ctx context.Context) error {
	ctx, cancel := context.WithTimeout(ctx, p.spec.Limits.Start)
	defer cancel()
	d, err := wire.NewPluginClient(p.conn).Describe(ctx, &wire.DescribeRequest{})
	if err != nil {
		return err
	}
	p.About, p.Kind = author.AboutFromWire(d), d.Kind
	switch p.Kind {
	case "solver", "load", "law":
	default:
		return fmt.Errorf("says it is a %q, and is to be a solver, a load or a law", p.Kind)
	}
	return p.About.Check()
}

// peer hands out the connection itself.
type peer struct{ plugin.NetRPCUnsupportedPlugin }

// GRPCServer is the plugin's business.
func (*peer) GRPCServer(*plugin.GRPCBroker, *grpc.Server) error {
	return errors.New("the host serves no plugin")
}

// GRPCClient is the connection.
func (*peer) GRPCClient(_ context.Context, _ *plugin.GRPCBroker, c *grpc.ClientConn) (any, error) {
	return c, nil
}

// environment is what a plugin gets to see of the host's: paths and the
// language, no secrets.
func environment(dir string) []string {
	out := []string{"TMPDIR=" + dir}
	for _, name := range []string{"PATH", "HOME", "LANG", "LC_ALL", "TZ", "GOMAXPROCS", "GOMEMLIMIT"} {
		if v, ok := os.LookupEnv(name); ok {
			out = append(out, name+"="+v)
		}
	}
	return out
}

// watch ends a plugin that takes too much memory.
func (p *Process) watch() {
	tick := time.NewTicker(100 * time.Millisecond)
	defer tick.Stop()
	for {
		select {
		case <-p.done:
			return
		case <-tick.C:
			if used := resident(p.cmd.Process.Pid); used > p.spec.Limits.Memory {
				p.end(fmt.Sprintf("took %.1f GB of memory, and %.1f GB is the limit", float64(used)/1e9, float64(p.spec.Limits.Memory)/1e9))
				return
			}
		}
	}
}

// end kills the plugin for a reason that calls then report.
func (p *Process) end(reason string) {
	p.lock.Lock()
	if p.reason == "" {
		p.reason = reason
	}
	p.lock.Unlock()
	p.kill()
}

func (p *Process) kill() {
	if p.cmd != nil && p.cmd.Process != nil {
		killGroup(p.cmd)
	}
}

// because puts the host's own reason before what a broken connection says.
func (p *Process) because(err error) error {
	p.lock.Lock()
	reason := p.reason
	p.lock.Unlock()
	if reason != "" {
		return errors.New(reason)
	}
	switch status.Code(err) {
	case codes.Unavailable:
		return errors.New("ended in the middle of its work")
	case codes.Unimplemented:
		return errors.New("does not answer what its kind must answer")
	case codes.DeadlineExceeded:
		return errors.New("did not answer in time")
	case codes.ResourceExhausted:
		return errors.New("sent a message larger than 64 MiB")
	case codes.OK, codes.Unknown, codes.Canceled:
	}
	if s, ok := status.FromError(err); ok && s.Code() != codes.OK {
		return errors.New(s.Message())
	}
	return err
}

// Close ends the plugin: kindly, and after two seconds for good.
func (p *Process) Close() {
	p.lock.Lock()
	if p.closed {
		p.lock.Unlock()
		return
	}
	p.closed = true
	p.lock.Unlock()
	if p.client != nil {
		timer := time.AfterFunc(stopGrace, p.kill)
		p.client.Kill()
		timer.Stop()
		p.kill() // what it may have started itself
	}
	close(p.done)
	if p.dir != "" {
		// What is left of a killed plugin's socket; a folder that stays does no harm.
		_ = os.RemoveAll(p.dir)
	}
}

// plain puts the long texts of a failed start into words of ours.
func plain(err error) error {
	text := err.Error()
	switch {
	case errors.Is(err, plugin.ErrChecksumsDoNotMatch):
		return errors.New("its file is not the one that was trusted; look at it, then `tautspan plugins add` it again")
	case strings.Contains(text, "timeout while waiting for plugin to start"):
		return errors.New("did not start in time")
	case strings.Contains(text, "incompatible API version"):
		return fmt.Errorf("speaks another version of the protocol than %d", author.Protocol)
	case strings.Contains(text, "Unrecognized remote plugin message"), strings.Contains(text, "plugin exited before we could connect"):
		return errors.New("is not a tautspan plugin, or ended before it said so")
	case errors.Is(err, os.ErrNotExist):
		return errors.New("its file is gone")
	case errors.Is(err, os.ErrPermission):
		return errors.New("its file may not be executed")
	}
	return err
}

// bounded passes on so many bytes, then calls full once and drops the rest.
type bounded struct {
	lock sync.Mutex
	left int64
	to   io.Writer
	full func()
}

// Write never fails: a plugin's chatter is no reason to stop it reading.
func (b *bounded) Write(data []byte) (int, error) {
	b.lock.Lock()
	defer b.lock.Unlock()
	if b.left <= 0 {
		return len(data), nil
	}
	if b.left -= int64(len(data)); b.left <= 0 {
		go b.full()
	}
	if b.to != nil {
		// A log that cannot be written is not the plugin's fault.
		_, _ = b.to.Write(data)
	}
	return len(data), nil
}
