package scatter

import (
	"context"
	"fmt"
	"math"
	"math/cmplx"

	"github.com/tautspan/tautspan/engine/mesh"
	"github.com/tautspan/tautspan/engine/modal"
	"github.com/tautspan/tautspan/engine/scenario"
)

// Response is the steady motion of one watched quantity per unit of one drive,
// as complex amplitudes of e^{+i omega t}, one a frequency. NaN stands where it
// does not exist: at a resonance that nothing damps.
type Response struct {
	Watch    string
	Quantity scenario.Quantity
	Excite   string
	Unit     string // of Value: m/N for a displacement per force
	Value    []complex128

	channel *mesh.Channel
	drive   *Drive
}

// Network answers for the steady motion of a network.
type Network struct {
	m       *mesh.Mesh
	exact   *modal.Dynamic
	watched map[int][]float64 // watched places inside each piece, m
}

// NewNetwork prepares a mesh. It fails where the mesh has what the exact
// solution does not represent.
func NewNetwork(m *mesh.Mesh) (*Network, error) {
	exact, err := modal.NewDynamic(m)
	if err != nil {
		return nil, err
	}
	n := &Network{m: m, exact: exact, watched: map[int][]float64{}}
	for i := range m.Channels {
		for _, s := range m.Channels[i].Spots {
			if s.Node < 0 && !m.Channels[i].Along {
				n.watched[s.Piece] = append(n.watched[s.Piece], s.At)
			}
		}
	}
	return n, nil
}

// Responses gives every watched quantity per unit of every drive at the
// frequencies (Hz) asked for. Pictures along a line are left out, and tension,
// which small motion does not change; notes say so. The exact solution of every
// stretch is used, so there is no discretisation; a force along a stretch is
// spread over points (see points).
func (n *Network) Responses(ctx context.Context, drives []Drive, frequencies []float64) (list []Response, notes []string, err error) {
	if err := answers(n.m, frequencies); err != nil {
		return nil, nil, err
	}
	var channels []*mesh.Channel
	for i := range n.m.Channels {
		c := &n.m.Channels[i]
		switch {
		case c.Along:
			notes = append(notes, c.Watch+" watches a whole stretch: steady responses are given at places")
		case c.Quantity == scenario.Tension:
			notes = append(notes, c.Name()+" is left out: to first order small motion does not change the tension of a straight line")
		default:
			channels = append(channels, c)
		}
	}
	for d := range drives {
		first := len(list)
		for _, c := range channels {
			list = append(list, Response{Watch: c.Watch, Quantity: c.Quantity, Excite: drives[d].Name,
				Unit: dimsOf(c.Quantity).over(drives[d].unit).String(), Value: make([]complex128, len(frequencies)),
				channel: c, drive: &drives[d]})
		}
		for k, f := range frequencies {
			if ctx.Err() != nil {
				return nil, notes, ctx.Err()
			}
			field, err := n.field(&drives[d], f)
			for i, c := range channels {
				v := cmplx.NaN()
				if err == nil {
					v = quantity(field, c.Quantity, c.Spots[0], 2*math.Pi*f)
				}
				list[first+i].Value[k] = existing(v)
			}
		}
	}
	for i := range list {
		if ctx.Err() != nil {
			return nil, notes, ctx.Err()
		}
		n.strike(&list[i], frequencies)
	}
	return list, notes, nil
}

// strike takes out the amplitudes at resonances that nothing damps, among the
// values that are no smaller than their neighbours.
func (n *Network) strike(r *Response, frequencies []float64) {
	size := func(k int) float64 {
		if k < 0 || k >= len(r.Value) || cmplx.IsNaN(r.Value[k]) {
			return 0
		}
		return cmplx.Abs(r.Value[k])
	}
	for k, f := range frequencies {
		if v := size(k); v > 0 && v >= size(k-1) && v >= size(k+1) && n.unbounded(r.channel, r.drive, f, v) {
			r.Value[k] = cmplx.NaN()
		}
	}
}

// unbounded tells whether the amplitude at a frequency is that of a resonance
// without damping, where a computer finds a large number by rounding: a
// hundredth of it or less is left a millionth of the frequency to both sides.
// That takes a resonance within 1e-8 of the frequency, with a damping ratio
// below that.
func (n *Network) unbounded(c *mesh.Channel, d *Drive, frequency, amplitude float64) bool {
	for _, beside := range []float64{frequency * (1 - 1e-6), frequency * (1 + 1e-6)} {
		v, err := n.at(c, d, beside)
		if err != nil || cmplx.Abs(v) > amplitude/100 {
			return false
		}
	}
	return true
}

// at is the amplitude as it comes out.
func (n *Network) at(c *mesh.Channel, d *Drive, frequency float64) (complex128, error) {
	field, err := n.field(d, frequency)
	if err != nil {
		return cmplx.NaN(), err
	}
	return existing(quantity(field, c.Quantity, c.Spots[0], 2*math.Pi*frequency)), nil
}

// ResponseAt is one quantity of one channel per unit of one drive; it fails
// where that does not exist.
func (n *Network) ResponseAt(c *mesh.Channel, d *Drive, frequency float64) (complex128, error) {
	if c.Along || c.Quantity == scenario.Tension {
		return cmplx.NaN(), fmt.Errorf("%s has no steady response at one place", c.Name())
	}
	v, err := n.at(c, d, frequency)
	if err == nil && (cmplx.IsNaN(v) || n.unbounded(c, d, frequency, cmplx.Abs(v))) {
		err = fmt.Errorf("%s has no finite response to %s at %g Hz: nothing damps the resonance there", c.Name(), d.Name, frequency)
	}
	if err != nil {
		return cmplx.NaN(), err
	}
	return v, nil
}

// field is the steady motion of the whole network under one drive of unit size.
func (n *Network) field(d *Drive, frequency float64) (*modal.Field, error) {
	omega := 2 * math.Pi * frequency
	s := complex(0, omega)
	switch {
	case d.push != nil:
		return n.exact.Solve(s, []modal.Load{{Spot: *d.push, Force: 1}}, nil)
	case d.node >= 0:
		move := complex(1, 0)
		for k := 0; k < d.order; k++ {
			if omega == 0 {
				return nil, fmt.Errorf("%s gives no steady displacement at 0 Hz", d.Name)
			}
			move /= s
		}
		return n.exact.Solve(s, nil, map[int]complex128{d.node: move})
	}
	var loads []modal.Load
	for _, part := range d.press {
		at, weight := points(&n.m.Pieces[part.Piece], part, n.watched[part.Piece], omega)
		for i := range at {
			loads = append(loads, modal.Load{Spot: mesh.Spot{Node: -1, Piece: part.Piece, At: at[i]}, Force: complex(weight[i], 0)})
		}
	}
	return n.exact.Solve(s, loads, nil)
}

func quantity(f *modal.Field, q scenario.Quantity, at mesh.Spot, omega float64) complex128 {
	switch q {
	case scenario.Velocity:
		return complex(0, omega) * f.Displacement(at)
	case scenario.Acceleration:
		return complex(-omega*omega, 0) * f.Displacement(at)
	case scenario.Slope:
		return f.Slope(at)
	case scenario.Force:
		return f.Force(at)
	case scenario.Moment:
		return f.Moment(at)
	}
	return f.Displacement(at)
}

// existing turns an infinite amplitude into NaN.
func existing(z complex128) complex128 {
	if cmplx.IsInf(z) || cmplx.IsNaN(z) {
		return cmplx.NaN()
	}
	return z
}

// Phase is the argument of an amplitude in (-pi, pi]; 0 of 0.
func Phase(z complex128) float64 { return phase(z) }
