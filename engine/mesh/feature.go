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
)

var featureWords = []struct {
	feature Features
	words   string
}{
	{Bending, "bending stiffness (say `bending 0 N*m^2` to treat the line knowingly as an ideal string)"},
	{VaryingTension, "tension that varies along an inclined line"},
	{Sagging, "the sag term (leave `sag included` out: all but the odd modes in the vertical plane stay right)"},
	{InternalLoss, "internal loss"},
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
	}
	for i := range m.Lines {
		if m.Lines[i].Sag != nil {
			f |= Sagging
		}
	}
	return f
}

// Unknown says in the user's terms which features of the mesh are not among
// those known, a reason each.
func (m *Mesh) Unknown(known Features) []string {
	var out []string
	for _, w := range featureWords {
		if m.Features()&w.feature&^known != 0 {
			out = append(out, "does not represent "+w.words)
		}
	}
	return out
}
