package compare

import (
	"math"

	"github.com/tautspan/tautspan/engine/mesh"
	"github.com/tautspan/tautspan/engine/scenario"
	"github.com/tautspan/tautspan/engine/solver"
)

// Kind is an observable of a record.
type Kind uint8

// The observables. Record is the record as a whole, in the root mean square;
// Final of a picture over x and t is the root mean square of its last row.
const (
	Record Kind = iota
	Peak
	RMS
	Final
	Highest
	Lowest
	kindCount
)

var kindNames = [kindCount]string{"record", "peak", "rms", "final", "highest", "lowest"}

// String is the observable's word.
func (k Kind) String() string { return kindNames[k] }

// governed tells whether `agree` governs the observable of every watch.
func (k Kind) governed() bool { return k == Peak || k == RMS || k == Final }

// figures are the observables of one record, and what goes with them.
type figures struct {
	of   [kindCount]float64 // Record: its root mean square
	at   [kindCount]int     // row of the peak, of the final, highest and lowest value
	spot [kindCount]int     // and their spot
}

// peakNoise is the share by which a later row must be larger to be the peak, so
// that rounding on a plateau (a line held aside) does not choose the time.
const peakNoise = 1e-6

// newFigures reads a channel's records, one a spot. All rows count alike.
func newFigures(spots [][]float64) figures {
	var f figures
	sum, n := 0.0, 0
	f.of[Highest], f.of[Lowest] = math.Inf(-1), math.Inf(1)
	for k, record := range spots {
		squares := 0.0
		for i, v := range record {
			squares += v * v
			if a := math.Abs(v); a > f.of[Peak]*(1+peakNoise) || a > 0 && f.of[Peak] == 0 {
				f.of[Peak], f.at[Peak], f.spot[Peak] = a, i, k
			}
			if v > f.of[Highest] {
				f.of[Highest], f.at[Highest], f.spot[Highest] = v, i, k
			}
			if v < f.of[Lowest] {
				f.of[Lowest], f.at[Lowest], f.spot[Lowest] = v, i, k
			}
		}
		sum += squares
		n += len(record)
	}
	if n == 0 {
		return figures{}
	}
	f.of[Record] = math.Sqrt(sum / float64(n))
	f.of[RMS] = f.of[Record]
	f.of[Final] = final(spots)
	return f
}

// Figures are the single figures of a channel's records.
type Figures struct {
	Peak, RMS, Final, Highest, Lowest float64
	PeakRow, HighestRow, LowestRow    int
	PeakSpot, HighestSpot, LowestSpot int
}

// FiguresOf reads the figures of a channel's records, one a spot, as the
// comparison does.
func FiguresOf(spots [][]float64) Figures {
	f := newFigures(spots)
	return Figures{
		Peak: f.of[Peak], RMS: f.of[RMS], Final: f.of[Final], Highest: f.of[Highest], Lowest: f.of[Lowest],
		PeakRow: f.at[Peak], HighestRow: f.at[Highest], LowestRow: f.at[Lowest],
		PeakSpot: f.spot[Peak], HighestSpot: f.spot[Highest], LowestSpot: f.spot[Lowest],
	}
}

func final(spots [][]float64) float64 {
	if len(spots) == 1 {
		return spots[0][len(spots[0])-1]
	}
	sum := 0.0
	for _, record := range spots {
		v := record[len(record)-1]
		sum += v * v
	}
	return math.Sqrt(sum / float64(len(spots)))
}

// distance is the root mean square of a - b over all spots and rows.
func distance(a, b [][]float64) float64 {
	sum, n := 0.0, 0
	for k := range a {
		x, y := a[k], b[k]
		squares := 0.0
		for i := range x {
			d := x[i] - y[i]
			squares += d * d
		}
		sum += squares
		n += len(x)
	}
	if n == 0 {
		return 0
	}
	return math.Sqrt(sum / float64(n))
}

// scales gives for every channel the scale that errors are told against: the
// channel's own size, but at least 1 % of the peak of the same quantity on the
// same line, since a stiff spring end hardly moves and would be held to an
// accuracy that nothing needs; and at least a ten-thousandth of what the energy
// held could do if it were all in one place, so that a watch at a node of
// vibration, where the truth is 0, is not judged on rounding.
//
// own is the observable's own size: root mean square for Record and RMS, peak
// for the others (a value that may cross zero, such as the final one, has no
// scale of its own).
type scales struct {
	floor []float64 // of each channel, in its unit
}

const (
	shareOfLine   = 0.01
	shareOfEnergy = 1e-4
)

func newScales(m *mesh.Mesh, voices []*voice) scales {
	s := scales{floor: make([]float64, len(m.Channels))}
	type key struct {
		line     int
		quantity scenario.Quantity
	}
	peaks := map[key]float64{}
	energy := 0.0
	for _, v := range voices {
		if !v.usable() {
			continue
		}
		top := v.top()
		energy = math.Max(energy, math.Max(top.energy.Most, 0))
		for c := range m.Channels {
			k := key{m.Channels[c].Line, m.Channels[c].Quantity}
			peaks[k] = math.Max(peaks[k], top.figures[c].of[Peak])
		}
	}
	for c := range m.Channels {
		ch := &m.Channels[c]
		s.floor[c] = math.Max(shareOfLine*peaks[key{ch.Line, ch.Quantity}], shareOfEnergy*energyScale(m, ch, energy))
	}
	return s
}

// energyScale is what energy E would do to a quantity if all of it were in the
// slowest shape of the channel's line: with tension T, mass m per length and
// length L, slope sqrt(2E/TL), displacement L/pi times that, velocity
// sqrt(2E/mL), acceleration pi c/L times that, force T times the slope.
func energyScale(m *mesh.Mesh, ch *mesh.Channel, energy float64) float64 {
	if ch.Line < 0 || ch.Line >= len(m.Lines) || energy <= 0 {
		return 0
	}
	line := &m.Lines[ch.Line]
	mass, give := 0.0, 0.0
	for _, p := range line.Pieces {
		mass += m.Pieces[p].MassPerLength * m.Pieces[p].Length
		give += m.Pieces[p].Length / m.Pieces[p].Tension
	}
	tension := line.Length / give
	slope := math.Sqrt(2 * energy / (tension * line.Length))
	velocity := math.Sqrt(2 * energy / mass)
	switch ch.Quantity {
	case scenario.Displacement:
		return slope * line.Length / math.Pi
	case scenario.Velocity:
		return velocity
	case scenario.Acceleration:
		return velocity * math.Pi * math.Sqrt(tension/(mass/line.Length)) / line.Length
	case scenario.Slope:
		return slope
	case scenario.Force:
		return tension * slope
	}
	return 0
}

// of is the scale of an observable of channel c, from the largest of the
// voices' own sizes.
func (s scales) of(c int, k Kind, voices []*voice) float64 {
	scale := s.floor[c]
	for _, v := range voices {
		if !v.usable() {
			continue
		}
		own := v.top().figures[c].of[Peak]
		if k == Record || k == RMS {
			own = v.top().figures[c].of[Record]
		}
		scale = math.Max(scale, own)
	}
	return scale
}

// finite tells whether every value of a result is a number, and whether it has
// the shape that the mesh asks for.
func checkResult(m *mesh.Mesh, r *solver.Result) string {
	if r == nil || len(r.Series) != len(m.Channels) {
		return "gave a wrong number of channels"
	}
	if !(r.Ratio > 1) && len(m.Channels) > 0 {
		return "does not say by what ratio its levels refine"
	}
	fieldRows, _ := m.FieldRows()
	for c := range m.Channels {
		rows := m.Timing.Rows
		if m.Channels[c].Along {
			rows = fieldRows
		}
		if len(r.Series[c]) != len(m.Channels[c].Spots) {
			return "gave a wrong number of places for " + m.Channels[c].Name()
		}
		for _, record := range r.Series[c] {
			if len(record) != rows {
				return "gave a wrong number of rows for " + m.Channels[c].Name()
			}
			for _, v := range record {
				if math.IsNaN(v) || math.IsInf(v, 0) {
					return "gave values that are not numbers for " + m.Channels[c].Name()
				}
			}
		}
	}
	e := r.Energy
	for _, v := range []float64{e.Start, e.End, e.Work, e.Lost, e.Most} {
		if math.IsNaN(v) || math.IsInf(v, 0) {
			return "gave an energy account that is not a number"
		}
	}
	return ""
}
