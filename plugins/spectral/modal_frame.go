package spectral

import (
	"math"

	"gonum.org/v1/gonum/mat"
)

// framed diagonalises a frame, K phi = omega^2 M phi, from the factor L L' of
// K + sigma M,
//
//	(L^-1 M L^-T) z = mu z,  omega^2 = 1/mu - sigma,  phi = L^-T z/sqrt mu,
//
// which leaves the rounding with the highest vibrations: those of elements that bend
// lie so high that it would drown the lowest ones. The shift, about the lowest one's
// square, is for networks that can move as a whole. It reports false when that fails.
func (m *modal) framed(s *system) bool {
	n, in := s.size(), s.inner
	m.frame = s
	sigma := s.lowest * s.lowest
	mass, stiff := mat.NewSymDense(n, nil), mat.NewSymDense(n, nil)
	for i, v := range m.mass {
		mass.SetSym(i, i, v)
	}
	for e := range s.elements {
		el := &s.elements[e]
		for c, w2 := range el.body.omega2 {
			stiff.SetSym(el.first+c, el.first+c, w2)
			for a, end := range el.out {
				if end >= 0 {
					mass.SetSym(el.first+c, in+end, mass.At(el.first+c, in+end)+el.body.drag[a][c])
				}
			}
		}
	}
	for i, row := range s.rows {
		for _, t := range row {
			if t.col <= i {
				stiff.SetSym(in+i, in+t.col, t.k)
			}
			if t.m != 0 {
				mass.SetSym(in+i, in+t.col, t.m)
			}
		}
	}
	for _, sg := range s.sags {
		for i, v := range sg.w {
			for j := 0; j <= i && v != 0; j++ {
				stiff.SetSym(i, j, stiff.At(i, j)+sg.g*v*sg.w[j])
			}
		}
	}
	stiff.AddSym(stiff, scaledSym(sigma, mass))
	var chol mat.Cholesky
	if !chol.Factorize(stiff) {
		return false
	}
	mu, phi, ok := againstFactor(&chol, mass)
	if !ok {
		return false
	}
	m.omega2, m.phi = make([]float64, n), make([]float64, n*n)
	for j := 0; j < n; j++ {
		at := n - 1 - j
		u := math.Max(mu[at], 1e-17*mu[n-1])
		m.omega2[j] = math.Max(0, 1/u-sigma)
		for i := 0; i < n; i++ {
			m.phi[j*n+i] = phi.At(i, at) / math.Sqrt(u)
		}
	}
	return true
}

func scaledSym(c float64, a *mat.SymDense) *mat.SymDense {
	var out mat.SymDense
	out.ScaleSym(c, a)
	return &out
}

// againstFactor solves (L^-1 M L^-T) z = mu z; the columns of phi are L^-T z, and mu
// ascends.
func againstFactor(chol *mat.Cholesky, mass mat.Matrix) (mu []float64, phi *mat.Dense, ok bool) {
	var l mat.TriDense
	chol.LTo(&l)
	var half, full mat.Dense
	if half.Solve(&l, mass) != nil || full.Solve(&l, half.T()) != nil {
		return nil, nil, false
	}
	n, _ := full.Dims()
	a := mat.NewSymDense(n, nil)
	for i := 0; i < n; i++ {
		for j := i; j < n; j++ {
			a.SetSym(i, j, (full.At(i, j)+full.At(j, i))/2)
		}
	}
	var eig mat.EigenSym
	if !eig.Factorize(a, true) {
		return nil, nil, false
	}
	var z mat.Dense
	eig.VectorsTo(&z)
	phi = &mat.Dense{}
	if phi.Solve(l.T(), &z) != nil {
		return nil, nil, false
	}
	return eig.Values(nil), phi, true
}
