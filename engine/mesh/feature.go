package mesh

// Features are what a mesh has beyond the ideal taut string. A solver refuses
// those that it does not know.
type Features uint

// The features.
const (
	Bending Features = 1 << iota
	VaryingTension
	Sagging
	InternalLoss
	Stretching    // tension that grows with amplitude
	Hysteretic    // loss factors of tension, bending or springs
	BenchDamper   // a damper known by frequency
	JointLaw      // friction, stop or written law at a node
	SpreadLaw     // the same along a piece
	SlackTie      // a tie that pulls, never pushes
	TurningJoint  // a hinge or an inertia against turning
	RollingSprung // a rolling load with a mass of its own
	TieBracket    // a dashpot of a tie behind a bracket that gives
)

// NonLinear are the features with which answers do not grow in proportion.
const NonLinear = Stretching | JointLaw | SpreadLaw | SlackTie

var featureWords = []struct {
	feature Features
	words   string
}{
	{Bending, "bending stiffness (say `bending 0 N*m^2` to treat the line knowingly as an ideal string)"},
	{VaryingTension, "tension that varies along an inclined line"},
	{Sagging, "the sag term (leave `sag included` out: all but the odd modes in the vertical plane stay right)"},
	{InternalLoss, "internal loss"},
	{Stretching, "tension that grows with amplitude"},
	{Hysteretic, "a hysteretic loss factor, which is defined by frequency: in a run only transform takes it"},
	{BenchDamper, "a damper known only by its bench record, which answers by frequency"},
	{JointLaw, "friction, a stop or a law at a joint"},
	{SpreadLaw, "a law along a segment"},
	{SlackTie, "a tie that goes slack"},
	{TurningJoint, "a hinge or an inertia against turning"},
	{RollingSprung, "a load that rolls with a mass of its own"},
	{TieBracket, "a bracket that gives at the dashpot of a tie"},
}

// Features lists what the mesh has.
func (m *Mesh) Features() Features {
	var f Features
	for i := range m.Pieces {
		p := &m.Pieces[i]
		if p.Bending > 0 {
			f |= Bending
			if p.Internal > 0 {
				f |= InternalLoss
			}
		}
		if p.TensionRise != 0 {
			f |= VaryingTension
		}
		if p.TensionLoss > 0 || p.BendingLoss > 0 {
			f |= Hysteretic
		}
		if p.Law != nil {
			f |= SpreadLaw
		}
	}
	for i := range m.Nodes {
		f |= m.Nodes[i].features()
	}
	for _, l := range m.Links {
		if l.SpringLoss > 0 {
			f |= Hysteretic
		}
		if l.Slack {
			f |= SlackTie
		}
		if l.Through > 0 {
			f |= TieBracket
		}
	}
	for i := range m.Lines {
		if m.Lines[i].Sag != nil {
			f |= Sagging
		}
		if m.Lines[i].Stretch != nil {
			f |= Stretching
		}
	}
	for _, r := range m.Rolls {
		if r.Mass > 0 {
			f |= RollingSprung
		}
	}
	return f
}

func (n *Node) features() Features {
	var f Features
	if n.SpringLoss > 0 {
		f |= Hysteretic
	}
	if len(n.Benches) > 0 {
		f |= BenchDamper
	}
	if len(n.Laws) > 0 {
		f |= JointLaw
	}
	if n.Hinge || n.Inertia > 0 {
		f |= TurningJoint
	}
	return f
}

// Words names the features among those given that the mesh has, in the user's
// terms.
func (m *Mesh) Words(of Features) []string {
	var out []string
	has := m.Features() & of
	for _, w := range featureWords {
		if has&w.feature != 0 {
			out = append(out, w.words)
		}
	}
	return out
}

// Where is the path of the first thing that has one of the features of joints,
// pieces, ties and lines, "" where none has.
func (m *Mesh) Where(of Features) string {
	for i := range m.Nodes {
		if m.Nodes[i].features()&of != 0 {
			return m.Nodes[i].Name
		}
	}
	for i := range m.Pieces {
		if p := &m.Pieces[i]; p.Law != nil && of&SpreadLaw != 0 && m.Source != nil {
			l := &m.Source.Lines[p.Line]
			return "line." + l.Name + "." + l.Segments[p.Segment].Name + ".loss"
		}
	}
	for i := range m.Links {
		if m.Links[i].Slack && of&SlackTie != 0 {
			return m.Links[i].Name
		}
	}
	for i := range m.Lines {
		if m.Lines[i].Stretch != nil && of&Stretching != 0 {
			return "line." + m.Lines[i].Name
		}
	}
	return ""
}

// Unknown says in the user's terms which features of the mesh are not among
// those known, a reason each.
func (m *Mesh) Unknown(known Features) []string {
	var out []string
	for i := range m.Nodes {
		for k := range m.Nodes[i].Laws {
			if l := &m.Nodes[i].Laws[k]; !l.Open() {
				out = append(out, "cannot follow the law "+l.Name+" step by step: its plugin answers in `run` only, and not to solvers in processes of their own")
			}
		}
	}
	for i := range m.Pieces {
		if l := m.Pieces[i].Law; l != nil && !l.Open() {
			out = append(out, "cannot follow the law "+l.Name+" step by step: its plugin answers in `run` only, and not to solvers in processes of their own")
		}
	}
	for _, words := range m.Words(^known) {
		out = append(out, "does not represent "+words)
	}
	return out
}
