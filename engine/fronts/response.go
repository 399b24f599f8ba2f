package fronts

import (
	"errors"
	"math"
	"math/cmplx"

	"gonum.org/v1/gonum/mat"
)

// law is the motion of a joint's nodes under forces f,
//
//	M v' + R v + K u + (brackets) = f,   u' = v,
//
// where R holds the impedances of the pieces that leave and all dashpots. A
// bracket with extension w pulls by -k w, w' = v - (k/c) w.
type law struct {
	mass       []float64   // kg; 0: the node has no inertia
	resistance [][]float64 // N s/m
	spring     [][]float64 // N/m
	brackets   []bracket

	instant [][]float64 // m/s per N at once: the inverse of R over massless nodes
	state   *mat.Dense  // x' = state x + input f, x = (u of all, v of those with mass, w)
	input   *mat.Dense
	output  *mat.Dense // v = output x + instant f
	modes   *modes     // of state; nil: not yet asked
}

type bracket struct {
	node int
	k, c float64 // N/m, N s/m
}

func newLaw(n int) *law {
	l := &law{mass: make([]float64, n)}
	for i := 0; i < n; i++ {
		l.resistance = append(l.resistance, make([]float64, n))
		l.spring = append(l.spring, make([]float64, n))
	}
	return l
}

// smears tells whether the answer takes time.
func (l *law) smears() bool {
	if len(l.brackets) > 0 {
		return true
	}
	for i := range l.mass {
		if l.mass[i] > 0 {
			return true
		}
		for _, k := range l.spring[i] {
			if k != 0 {
				return true
			}
		}
	}
	return false
}

// errLoose says that a node has nothing that resists a force at once.
var errLoose = errors.New("a hung node without mass and dashpot has no motion of its own")

// solve eliminates the massless nodes, whose velocities follow at once:
// R00 v0 = f0 - R01 v1 - (K u)0 - brackets. The rows of full give v as a linear
// function of (x, f).
func (l *law) solve() error {
	n := len(l.mass)
	var light, heavy []int
	for i, m := range l.mass {
		if m > 0 {
			heavy = append(heavy, i)
		} else {
			light = append(light, i)
		}
	}
	nx := n + len(heavy) + len(l.brackets)
	// pull: forces on the nodes other than R v0, as rows over (x, f).
	pull := mat.NewDense(n, nx+n, nil)
	for i := 0; i < n; i++ {
		for j := 0; j < n; j++ {
			pull.Set(i, j, -l.spring[i][j])
		}
		for h, j := range heavy {
			pull.Set(i, n+h, -l.resistance[i][j])
		}
		pull.Set(i, nx+i, 1)
	}
	for b, br := range l.brackets {
		pull.Set(br.node, n+len(heavy)+b, pull.At(br.node, n+len(heavy)+b)-br.k)
	}
	full := mat.NewDense(n, nx+n, nil) // v over (x, f)
	if len(light) > 0 {
		r, rhs := mat.NewDense(len(light), len(light), nil), mat.NewDense(len(light), nx+n, nil)
		for a, i := range light {
			for b, j := range light {
				r.Set(a, b, l.resistance[i][j])
			}
			rhs.SetRow(a, pull.RawRowView(i))
		}
		var v mat.Dense
		if err := v.Solve(r, rhs); err != nil {
			return errLoose
		}
		for a, i := range light {
			full.SetRow(i, v.RawRowView(a))
		}
	}
	rates := mat.NewDense(nx, nx+n, nil)
	for h, i := range heavy {
		full.Set(i, n+h, 1)
	}
	for i := 0; i < n; i++ {
		rates.SetRow(i, full.RawRowView(i))
	}
	for h, i := range heavy {
		row := rates.RawRowView(n + h)
		copy(row, pull.RawRowView(i))
		for _, j := range light {
			for k := range row {
				row[k] -= l.resistance[i][j] * full.At(j, k)
			}
		}
		for k := range row {
			row[k] /= l.mass[i]
		}
	}
	for b, br := range l.brackets {
		row := rates.RawRowView(n + len(heavy) + b)
		copy(row, full.RawRowView(br.node))
		row[n+len(heavy)+b] -= br.k / br.c
	}
	l.state = mat.DenseCopyOf(rates.Slice(0, nx, 0, nx))
	l.input = mat.DenseCopyOf(rates.Slice(0, nx, nx, nx+n))
	l.output = mat.DenseCopyOf(full.Slice(0, n, 0, nx))
	for i := 0; i < n; i++ {
		l.instant = append(l.instant, append([]float64(nil), full.RawRowView(i)[nx:]...))
	}
	return nil
}

// rates gives the shortest and the longest time constant of the law, s: 1/|s|
// and 1/|Re s| over its roots s; roots at rest are left out.
func (l *law) rates() (quick, slow float64) {
	var eig mat.Eigen
	n, _ := l.state.Dims()
	top := mat.Norm(l.state, math.Inf(1))
	quick = 1 / top
	slow = quick
	if !eig.Factorize(l.state, mat.EigenNone) {
		return quick, 100 * quick
	}
	values := eig.Values(make([]complex128, n))
	largest := 0.0
	for _, s := range values {
		largest = math.Max(largest, math.Hypot(real(s), imag(s)))
	}
	for _, s := range values {
		if size := math.Hypot(real(s), imag(s)); size > 1e-10*largest {
			slow = math.Max(slow, 1/math.Max(math.Abs(real(s)), 1e-10*largest))
		}
	}
	return 1 / largest, slow
}

// after is the response to unit steps of force at time t after them: velocities
// v[i][j] (m/s per N) of node i to a step on node j, and displacements u[i][j]
// (m per N), the time integrals of v. Exact: by the law's modes, or where these
// fail (double roots) by the exponential of its matrix with the steps as further,
// constant states (Van Loan 1978), which loses digits as the product of t and
// the fastest rate grows, about 1e-16 times that.
func (l *law) after(t float64) (v, u [][]float64) {
	x := l.byModes(t)
	if x == nil {
		x = l.byExponential(t)
	}
	n := len(l.mass)
	nx, _ := l.state.Dims()
	for i := 0; i < n; i++ {
		vi, ui := make([]float64, n), make([]float64, n)
		for j := 0; j < n; j++ {
			vi[j] = l.instant[i][j]
			for k := 0; k < nx; k++ {
				vi[j] += l.output.At(i, k) * x[k][j]
			}
			ui[j] = x[i][j]
		}
		v, u = append(v, vi), append(u, ui)
	}
	return v, u
}

// byExponential is the state x at t after unit steps, x[k][j] for a step on node j.
func (l *law) byExponential(t float64) [][]float64 {
	n := len(l.mass)
	nx, _ := l.state.Dims()
	big := mat.NewDense(nx+n, nx+n, nil)
	for i := 0; i < nx; i++ {
		for j := 0; j < nx; j++ {
			big.Set(i, j, t*l.state.At(i, j))
		}
		for j := 0; j < n; j++ {
			big.Set(i, nx+j, t*l.input.At(i, j))
		}
	}
	var e mat.Dense
	e.Exp(big)
	x := make([][]float64, nx)
	for k := range x {
		x[k] = append([]float64(nil), e.RawRowView(k)[nx:]...)
	}
	return x
}

// byModes is byExponential through roots s and modes p, q (right and left),
//
//	x = sum over s of p (q* input) / (q* p) (e^{s t} - 1)/s,
//
// nil where the modes do not hold (see agree).
func (l *law) byModes(t float64) [][]float64 {
	if l.modes == nil {
		l.modes = newModes(l.state, l.input)
		l.modes.whole = l.modes.whole && l.agree()
	}
	if !l.modes.whole {
		return nil
	}
	nx, n := l.input.Dims()
	x := make([][]float64, nx)
	for k := range x {
		x[k] = make([]float64, n)
	}
	for m, s := range l.modes.roots {
		st := s * complex(t, 0)
		var grown complex128 // (e^{st} - 1)/s
		if cmplx.Abs(st) < 1e-3 {
			grown = complex(t, 0) * (1 + st/2*(1+st/3*(1+st/4*(1+st/5))))
		} else {
			grown = (cmplx.Exp(st) - 1) / s
		}
		for k := range x {
			for j := range x[k] {
				x[k][j] += real(l.modes.share[m][k][j] * grown)
			}
		}
	}
	return x
}

// modes are the roots of a law and the state that a unit input feeds into each.
type modes struct {
	whole bool
	roots []complex128
	share [][][]complex128 // of root, state, input
}

func newModes(state, input *mat.Dense) *modes {
	var eig mat.Eigen
	if !eig.Factorize(state, mat.EigenBoth) {
		return &modes{}
	}
	nx, n := input.Dims()
	var right, left mat.CDense
	eig.VectorsTo(&right)
	eig.LeftVectorsTo(&left)
	out := &modes{whole: true, roots: eig.Values(nil)}
	for m := range out.roots {
		var overlap complex128
		for k := 0; k < nx; k++ {
			overlap += cmplx.Conj(left.At(k, m)) * right.At(k, m)
		}
		share := make([][]complex128, nx)
		for k := range share {
			share[k] = make([]complex128, n)
			for i := 0; i < nx; i++ {
				part := right.At(k, m) * cmplx.Conj(left.At(i, m)) / overlap
				for j := 0; j < n; j++ {
					share[k][j] += part * complex(input.At(i, j), 0)
				}
			}
		}
		out.share = append(out.share, share)
	}
	return out
}

// agree tells whether modes and exponential give the same state, to 1e-9 of each
// quantity's largest, at a time at which the exponential is exact to rounding.
// Of double roots the modes fall together and it fails.
func (l *law) agree() bool {
	t := 1 / mat.Norm(l.state, math.Inf(1))
	a, b := l.byModes(t), l.byExponential(t)
	for k := range b {
		for j := range b[k] {
			if !(math.Abs(a[k][j]-b[k][j]) <= 1e-9*largest(b[k])) {
				return false
			}
		}
	}
	return true
}

// samples is the number of times at which the shape of a smeared front is held.
const samples = 64

// shapeGrid spaces the times of shapes geometrically, from 0 and a twentieth of
// the quickest time constant to 24 times the slowest, but not beyond most: a
// front that met n like nodes needs about n + 3 sqrt(n) time constants to settle.
func shapeGrid(quick, slow, most float64) []float64 {
	first, last := quick/20, math.Min(24*slow, most)
	if last < 8*first {
		first = last / 8
	}
	if last > 1e6*first { // spacing of at most 1.6 from one time to the next
		first = last / 1e6
	}
	grid := make([]float64, samples)
	for k := 1; k < samples; k++ {
		grid[k] = first * math.Pow(last/first, float64(k-1)/float64(samples-2))
	}
	return grid
}

// response turns shapes of forces into shapes of velocities. step[i][j][k] is
// the velocity of node i at grid time k after a unit step on node j; for other
// shapes, straight between the grid times,
//
//	v(t_k) = f_0 step(t_k) + sum_{m<k} (f_{m+1}-f_m)/(t_{m+1}-t_m) [U(t_k-t_m) - U(t_k-t_{m+1})],
//
// U the integral of step; op[i][j][k*samples+m] multiplies f_m.
type response struct {
	step [][][]float64
	op   [][][]float64
}

func newResponse(l *law, grid []float64) *response {
	n := len(l.mass)
	r := &response{}
	for i := 0; i < n; i++ {
		step, op := make([][]float64, n), make([][]float64, n)
		for j := 0; j < n; j++ {
			step[j], op[j] = make([]float64, samples), make([]float64, samples*samples)
		}
		r.step, r.op = append(r.step, step), append(r.op, op)
	}
	for k, t := range grid {
		v, last := l.after(t)
		for i := 0; i < n; i++ {
			for j := 0; j < n; j++ {
				r.step[i][j][k] = v[i][j]
				r.op[i][j][k*samples] += v[i][j]
			}
		}
		for m := 0; m < k; m++ {
			_, next := l.after(t - grid[m+1])
			for i := 0; i < n; i++ {
				for j := 0; j < n; j++ {
					w := (last[i][j] - next[i][j]) / (grid[m+1] - grid[m])
					r.op[i][j][k*samples+m+1] += w
					r.op[i][j][k*samples+m] -= w
				}
			}
			last = next
		}
	}
	return r
}
