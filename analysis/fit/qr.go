package fit

import (
	"math"

	"gonum.org/v1/gonum/floats"
)

// factor is the factorisation A·P = Q·R of a matrix with no fewer rows than
// columns, by Householder reflections with column pivoting: at each step the
// column with the longest rest comes next, so that |R_kk| does not rise and
// shows the rank. P. Businger, G. H. Golub, Numer. Math. 7, 269 (1965).
type factor struct {
	columns [][]float64 // in: the columns of A; afterwards R above the diagonal, reflections below
	diag    []float64   // R_kk
	norm    []float64   // lengths of A's columns, in their first order
	pivot   []int       // column k of R is column pivot[k] of A
}

func newFactor(rows, columns int) *factor {
	f := &factor{
		columns: make([][]float64, columns),
		diag:    make([]float64, columns),
		norm:    make([]float64, columns),
		pivot:   make([]int, columns),
	}
	for j := range f.columns {
		f.columns[j] = make([]float64, rows)
	}
	return f
}

// resize keeps the first n columns' room.
func (f *factor) resize(n int) {
	f.columns, f.diag, f.norm, f.pivot = f.columns[:n], f.diag[:n], f.norm[:n], f.pivot[:n]
}

// factorise works in place on f.columns and turns b into Qᵀb.
func (f *factor) factorise(b []float64) {
	for j, c := range f.columns {
		f.norm[j] = floats.Norm(c, 2)
		f.pivot[j] = j
	}
	for k := range f.columns {
		longest, most := k, -1.0
		for j := k; j < len(f.columns); j++ {
			if rest := floats.Norm(f.columns[j][k:], 2); rest > most {
				longest, most = j, rest
			}
		}
		f.columns[k], f.columns[longest] = f.columns[longest], f.columns[k]
		f.pivot[k], f.pivot[longest] = f.pivot[longest], f.pivot[k]
		c := f.columns[k]
		if most == 0 {
			f.diag[k] = 0
			continue
		}
		// Reflect c[k:] onto the axis, away from its own sign: nothing cancels.
		if c[k] < 0 {
			most = -most
		}
		v := c[k:]
		floats.Scale(1/most, v)
		v[0]++ // v = c/‖c‖ + e, and ‖v‖² = 2 v₀
		f.diag[k] = -most
		for j := k + 1; j < len(f.columns); j++ {
			reflect(f.columns[j][k:], v)
		}
		reflect(b[k:], v)
	}
}

// reflect applies 1 − v vᵀ/v₀ to x.
func reflect(x, v []float64) {
	floats.AddScaled(x, -floats.Dot(x, v)/v[0], v)
}

// at is R_ij for i ≤ j.
func (f *factor) at(i, j int) float64 {
	if i == j {
		return f.diag[i]
	}
	return f.columns[j][i]
}

// rank counts the columns that are independent to the relative tolerance, and
// estimates the condition, both with columns scaled to unit length, so that
// the units of the parameters do not matter. The estimate, largest over
// smallest diagonal of the scaled R, can be somewhat low.
func (f *factor) rank(tolerance float64) (rank int, condition float64) {
	scaled := newFactor(len(f.columns), len(f.columns))
	for j := range f.columns {
		if f.norm[f.pivot[j]] == 0 {
			continue
		}
		for i := range j + 1 {
			scaled.columns[j][i] = f.at(i, j) / f.norm[f.pivot[j]]
		}
	}
	scaled.factorise(make([]float64, len(f.columns)))
	for _, d := range scaled.diag {
		if math.Abs(d) > tolerance*math.Abs(scaled.diag[0]) {
			rank++
		}
	}
	n := len(scaled.diag)
	if n == 0 {
		return 0, 1
	}
	return rank, math.Abs(scaled.diag[0] / scaled.diag[n-1])
}

// gaussNewton solves R·(Pᵀx) = y in the least-squares sense, with zero for what
// follows the first zero on the diagonal; x is in the columns' first order.
func (f *factor) gaussNewton(x, y, work []float64) {
	n := len(f.columns)
	rank := n
	for k, d := range f.diag {
		if d == 0 {
			rank = k
			break
		}
	}
	copy(work, y[:rank])
	clear(work[rank:n])
	for k := rank - 1; k >= 0; k-- {
		work[k] /= f.diag[k]
		floats.AddScaled(work[:k], -work[k], f.columns[k][:k])
	}
	for k, j := range f.pivot {
		x[j] = work[k]
	}
}

// inverse returns (AᵀA)⁻¹ = P R⁻¹ R⁻ᵀ Pᵀ through set(i, j, value), i ≤ j in no
// particular order. R must have full rank.
func (f *factor) inverse(set func(i, j int, v float64)) {
	n := len(f.columns)
	inv := make([][]float64, n) // inv[j] is column j of R⁻¹
	for j := range inv {
		col := make([]float64, n)
		col[j] = 1 / f.diag[j]
		for i := j - 1; i >= 0; i-- {
			s := 0.0
			for k := i + 1; k <= j; k++ {
				s += f.at(i, k) * col[k]
			}
			col[i] = -s / f.diag[i]
		}
		inv[j] = col
	}
	for a := range n {
		for b := a; b < n; b++ {
			s := 0.0
			for k := b; k < n; k++ {
				s += inv[k][a] * inv[k][b]
			}
			set(f.pivot[a], f.pivot[b], s)
		}
	}
}
