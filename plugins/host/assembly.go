package host

import (
	"fmt"
	"math"

	"github.com/tautspan/tautspan/engine/mesh"
	"github.com/tautspan/tautspan/engine/solver"
	"github.com/tautspan/tautspan/plugins/wire"
)

// assembly puts the records of a solution together from blocks, and lets nothing
// through that is not what was asked for.
type assembly struct {
	mesh   *mesh.Mesh
	result *solver.Result
	filled int64 // numbers taken
}

// row takes a whole record.
func (a *assembly) row(channel, spot int, values []float64) error {
	return a.take(&wire.Block{Channel: uint32(channel), Spot: uint32(spot), Values: values})
}

// take places one block. Blocks of a record come in order, each number once.
func (a *assembly) take(b *wire.Block) error {
	if int(b.Channel) >= len(a.result.Series) || int(b.Spot) >= len(a.result.Series[b.Channel]) {
		return fmt.Errorf("answered for watch %d, place %d, which nobody asked for", b.Channel, b.Spot)
	}
	row := a.result.Series[b.Channel][b.Spot]
	if b.First > uint64(len(row)) || uint64(len(b.Values)) > uint64(len(row))-b.First {
		return fmt.Errorf("answered %d rows from row %d of a record of %d", len(b.Values), b.First, len(row))
	}
	if a.filled += int64(len(b.Values)); a.filled > a.asked() {
		return fmt.Errorf("answered more rows than were asked for")
	}
	for i, v := range b.Values {
		if math.IsNaN(v) || math.IsInf(v, 0) {
			return fmt.Errorf("answered %v for %s at row %d", v, a.mesh.Channels[b.Channel].Name(), b.First+uint64(i))
		}
	}
	copy(row[b.First:], b.Values)
	return nil
}

func (a *assembly) asked() int64 {
	n := int64(0)
	for _, c := range a.result.Series {
		for _, row := range c {
			n += int64(len(row))
		}
	}
	return n
}

// finish checks that all came and takes over what goes with it.
func (a *assembly) finish(o *wire.Outcome) (*solver.Result, error) {
	if want := a.asked(); a.filled != want {
		return nil, fmt.Errorf("answered %d of %d rows", a.filled, want)
	}
	for _, v := range []float64{o.Order, o.Ratio, o.EnergyStart, o.EnergyEnd, o.EnergyWork, o.EnergyLost, o.EnergyMost} {
		if math.IsNaN(v) || math.IsInf(v, 0) {
			return nil, fmt.Errorf("answered %v in its account", v)
		}
	}
	if !(o.Ratio > 1) || o.Ratio > 100 || o.Order < 0 || o.Order > 20 {
		return nil, fmt.Errorf("claims order %g at a step ratio of %g", o.Order, o.Ratio)
	}
	r := a.result
	r.Plan, r.Order, r.Ratio, r.Frozen, r.Notes = planFromWire(o.Plan), o.Order, o.Ratio, o.Frozen, o.Notes
	r.Energy = solver.Energy{Start: o.EnergyStart, End: o.EnergyEnd, Work: o.EnergyWork, Lost: o.EnergyLost, Most: o.EnergyMost}
	return r, nil
}
