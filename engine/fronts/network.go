package fronts

import (
	"fmt"
	"math"
	"strings"

	"github.com/tautspan/tautspan/engine/mesh"
)

// network is the mesh as the ledger needs it: pieces with travel times, and the
// joints that their ends belong to.
type network struct {
	m           *mesh.Mesh
	pieces      []piece
	joints      []joint
	jointOf     []int     // node -> joint, -1 for a node that nothing reaches
	short, long float64   // s, travel times of the pieces
	grid        []float64 // s, times of the shapes; nil where nothing smears
	watches     []watch
	atNode      map[int][]int // node -> watches there
	notes       []string
}

// piece is a uniform stretch; ports[0] is its start's port in its joint.
type piece struct {
	*mesh.Piece
	c, z, tau, gamma float64
	ends             [2]end
	watched          []int // watches strictly inside
}

type end struct{ joint, port int }

// joint is one node, or several that links join, seen as one scatterer.
type joint struct {
	nodes    []int    // of the mesh
	name     []string // of each node, for paths; "" for one that leaves fronts as they are
	held     bool     // nothing moves but by prescription
	ports    []port
	instant  [][]float64 // velocity of node i per force on node j at once, m/s per N
	smear    *response   // nil: instant is all
	dashpots []damper
}

type port struct {
	piece int
	end   int // 0: the piece starts here
	node  int // index into joint.nodes
}

// damper takes c (v_a - v_b)^2; b is -1 for the ground.
type damper struct {
	a, b int
	c    float64
}

type watch struct {
	name string
	spot mesh.Spot
	z    float64 // N s/m, largest impedance at a held place; unused elsewhere
}

func newNetwork(m *mesh.Mesh, end float64) (*network, error) {
	n := &network{m: m, atNode: map[int][]int{}, short: math.Inf(1)}
	if len(m.Pieces) == 0 {
		return nil, fmt.Errorf("fronts: the mesh has no pieces")
	}
	for i := range m.Pieces {
		p := piece{Piece: &m.Pieces[i]}
		p.c, p.z, p.tau = p.WaveSpeed(), p.Impedance(), p.TravelTime()
		p.gamma = p.Viscous / (2 * p.MassPerLength)
		if !(p.tau > 0) || math.IsInf(p.tau, 0) || !(p.z > 0) {
			return nil, fmt.Errorf("fronts: a piece of line %s has no travel time", m.Lines[p.Line].Name)
		}
		n.short, n.long = math.Min(n.short, p.tau), math.Max(n.long, p.tau)
		n.pieces = append(n.pieces, p)
	}
	if end/n.short > 1e9 {
		return nil, fmt.Errorf("fronts: %g s is more than 1e9 times the shortest travel time, %g s", end, n.short)
	}
	if err := n.findJoints(end); err != nil {
		return nil, err
	}
	n.findWatches()
	return n, nil
}

// findWatches takes every watch at a place once, whatever its quantities.
func (n *network) findWatches() {
	seen := map[string]bool{}
	for i := range n.m.Channels {
		ch := &n.m.Channels[i]
		if ch.Along || len(ch.Spots) != 1 || seen[ch.Watch] {
			continue
		}
		seen[ch.Watch] = true
		w := len(n.watches)
		spot := ch.Spots[0]
		if spot.Node < 0 { // at a piece's very end is at its node
			switch p := &n.pieces[spot.Piece]; {
			case spot.At <= 0:
				spot = mesh.Spot{Node: p.From, Piece: -1}
			case spot.At >= p.Length:
				spot = mesh.Spot{Node: p.To, Piece: -1}
			}
		}
		n.watches = append(n.watches, watch{name: ch.Watch, spot: spot})
		if spot.Node >= 0 {
			for _, p := range n.joints[n.jointOf[spot.Node]].ports {
				n.watches[w].z = math.Max(n.watches[w].z, n.pieces[p.piece].z)
			}
			n.atNode[spot.Node] = append(n.atNode[spot.Node], w)
		} else {
			n.pieces[spot.Piece].watched = append(n.pieces[spot.Piece].watched, w)
		}
	}
}

// findJoints joins nodes by their links. A held node stays alone: a link to it
// is a spring and a dashpot to ground.
func (n *network) findJoints(end float64) error {
	nodes := n.m.Nodes
	root := make([]int, len(nodes))
	for i := range root {
		root[i] = i
	}
	find := func(i int) int {
		for root[i] != i {
			root[i] = root[root[i]]
			i = root[i]
		}
		return i
	}
	held := func(i int) bool { return nodes[i].Fixed || nodes[i].Motion != nil }
	for _, l := range n.m.Links {
		if !held(l.A) && !held(l.B) {
			root[find(l.A)] = find(l.B)
			continue
		}
		for _, i := range []int{l.A, l.B} {
			if nodes[i].Motion != nil {
				n.note("%s reaches a support that moves: what it passes on of that motion starts no front here", l.Name)
			}
		}
	}
	n.jointOf = make([]int, len(nodes))
	byRoot := map[int]int{}
	inJoint := make([]int, len(nodes))
	for i := range nodes {
		j, ok := byRoot[find(i)]
		if !ok {
			j = len(n.joints)
			byRoot[find(i)] = j
			n.joints = append(n.joints, joint{held: held(i)})
		}
		n.jointOf[i], inJoint[i] = j, len(n.joints[j].nodes)
		n.joints[j].nodes = append(n.joints[j].nodes, i)
	}
	for i := range n.pieces {
		p := &n.pieces[i]
		for e, node := range [2]int{p.From, p.To} {
			j := &n.joints[n.jointOf[node]]
			p.ends[e] = struct{ joint, port int }{n.jointOf[node], len(j.ports)}
			j.ports = append(j.ports, port{i, e, inJoint[node]})
		}
	}
	return n.findResponses(inJoint, end)
}

// findResponses gives every joint that can move its admittances.
func (n *network) findResponses(inJoint []int, end float64) error {
	laws := make([]*law, len(n.joints))
	var quick, slow float64
	for i := range n.joints {
		j := &n.joints[i]
		if j.held {
			continue
		}
		l := n.lawOf(j, inJoint)
		if err := l.solve(); err != nil {
			names := make([]string, len(j.nodes))
			for k, node := range j.nodes {
				names[k] = n.m.Nodes[node].Name
			}
			return fmt.Errorf("fronts: %s: %w", strings.Join(names, ", "), err)
		}
		j.instant = l.instant
		laws[i] = l
		if l.smears() {
			q, s := l.rates()
			if quick == 0 || q < quick {
				quick = q
			}
			slow = math.Max(slow, s)
		}
	}
	for i := range n.joints {
		n.joints[i].name = n.namesOf(&n.joints[i], laws[i])
	}
	if slow == 0 {
		return nil
	}
	n.grid = shapeGrid(quick, slow, math.Min(n.long, math.Max(end, n.short)))
	known := map[string]*response{}
	for i, l := range laws {
		if l == nil || !l.smears() {
			continue
		}
		key := fmt.Sprint(l.mass, l.resistance, l.spring, l.brackets)
		if known[key] == nil {
			known[key] = newResponse(l, n.grid)
		}
		n.joints[i].smear = known[key]
	}
	return nil
}

// lawOf assembles M v' + R v + K u + brackets = forces of a joint's nodes.
func (n *network) lawOf(j *joint, inJoint []int) *law {
	l := newLaw(len(j.nodes))
	damp := func(a, b int, c float64) {
		if c == 0 {
			return
		}
		j.dashpots = append(j.dashpots, damper{a, b, c})
		couple(l.resistance, a, b, c)
	}
	for k, node := range j.nodes {
		nd := &n.m.Nodes[node]
		l.mass[k] = nd.Mass
		couple(l.spring, k, -1, nd.Spring)
		damp(k, -1, nd.Dashpot)
		for _, b := range nd.Brackets {
			if b.K > 0 && b.C > 0 {
				l.brackets = append(l.brackets, bracket{k, b.K, b.C})
			}
		}
	}
	for _, p := range j.ports {
		couple(l.resistance, p.node, -1, n.pieces[p.piece].z)
	}
	for _, link := range n.m.Links {
		a, b := -1, -1
		if &n.joints[n.jointOf[link.A]] == j {
			a = inJoint[link.A]
		}
		if &n.joints[n.jointOf[link.B]] == j {
			b = inJoint[link.B]
		}
		if a < 0 {
			a, b = b, -1
		}
		if a >= 0 && a != b {
			couple(l.spring, a, b, link.Spring)
			damp(a, b, link.Dashpot)
		}
	}
	return l
}

// couple adds the two-point matrix of k between a and b (-1: the ground).
func couple(m [][]float64, a, b int, k float64) {
	m[a][a] += k
	if b >= 0 {
		m[b][b] += k
		m[a][b] -= k
		m[b][a] -= k
	}
}

// namesOf gives the words that paths use for a joint's nodes: the node's own
// name, with its line's before it where there are several lines. A node at
// which two equal pieces meet and that carries nothing is not met by anybody.
func (n *network) namesOf(j *joint, l *law) []string {
	names := make([]string, len(j.nodes))
	for k, node := range j.nodes {
		nd := &n.m.Nodes[node]
		names[k] = shortName(nd.Name, len(n.m.Lines) > 1)
		if l == nil || len(j.nodes) > 1 || l.smears() || len(j.dashpots) > 0 || len(j.ports) != 2 {
			continue
		}
		z0, z1 := n.pieces[j.ports[0].piece].z, n.pieces[j.ports[1].piece].z
		if math.Abs(z0-z1) <= 1e-12*z0 {
			names[k] = ""
		}
	}
	return names
}

// shortName takes line.LINE.NODE apart.
func shortName(path string, several bool) string {
	parts := strings.SplitN(path, ".", 3)
	if len(parts) < 3 || parts[0] != "line" {
		return path
	}
	if several {
		return parts[1] + "." + parts[2]
	}
	return parts[2]
}

func (n *network) note(format string, args ...any) {
	text := fmt.Sprintf(format, args...)
	for _, old := range n.notes {
		if old == text {
			return
		}
	}
	if len(n.notes) < 50 {
		n.notes = append(n.notes, text)
	}
}
