package statics

// skyline is a symmetric positive definite matrix stored by rows from the first
// entry that is not zero up to the diagonal. A line is a narrow band and a tie
// one long row, so a network of ten thousand places takes little more than ten
// thousand numbers.
type skyline struct {
	low  []int // first stored column of each row
	rows [][]float64
}

// newSkyline makes a zero matrix whose row i is stored from column low[i] on.
func newSkyline(low []int) *skyline {
	s := &skyline{low: low, rows: make([][]float64, len(low))}
	for i, l := range low {
		s.rows[i] = make([]float64, i-l+1)
	}
	return s
}

func (s *skyline) add(i, j int, v float64) {
	if j > i {
		i, j = j, i
	}
	s.rows[i][j-s.low[i]] += v
}

// spring adds a spring between two unknowns.
func (s *skyline) spring(i, j int, k float64) {
	s.add(i, i, k)
	s.add(j, j, k)
	s.add(i, j, -k)
}

// hold makes unknown i zero: its row and column become those of the unit matrix.
func (s *skyline) hold(i int) {
	clear(s.rows[i])
	s.rows[i][i-s.low[i]] = 1
	for r := i + 1; r < len(s.rows); r++ {
		if s.low[r] <= i {
			s.rows[r][i-s.low[r]] = 0
		}
	}
}

// singularShare is the pivot, as a share of its diagonal before elimination,
// below which the matrix counts as singular: the pivot of a floating line is
// rounding, some 1e-16 times the number of its places.
const singularShare = 1e-11

// factor replaces the matrix by L of L D L^T with D on the diagonal and reports
// whether it is positive definite.
func (s *skyline) factor() bool {
	for i, row := range s.rows {
		diag := row[len(row)-1]
		for j := s.low[i]; j < i; j++ {
			sum := row[j-s.low[i]]
			for k := max(s.low[i], s.low[j]); k < j; k++ {
				sum -= row[k-s.low[i]] * s.rows[j][k-s.low[j]]
			}
			row[j-s.low[i]] = sum // L_ij D_j for now
		}
		pivot := diag
		for j := s.low[i]; j < i; j++ {
			ld := row[j-s.low[i]]
			d := s.rows[j][j-s.low[j]]
			row[j-s.low[i]] = ld / d
			pivot -= ld * ld / d
		}
		if !(pivot > singularShare*diag) {
			return false
		}
		row[len(row)-1] = pivot
	}
	return true
}

// solve replaces b by the solution.
func (s *skyline) solve(b []float64) {
	for i, row := range s.rows {
		for j := s.low[i]; j < i; j++ {
			b[i] -= row[j-s.low[i]] * b[j]
		}
	}
	for i, row := range s.rows {
		b[i] /= row[len(row)-1]
	}
	for i := len(s.rows) - 1; i >= 0; i-- {
		row := s.rows[i]
		for j := s.low[i]; j < i; j++ {
			b[j] -= row[j-s.low[i]] * b[i]
		}
	}
}
