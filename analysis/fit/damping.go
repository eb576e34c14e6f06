package fit

import (
	"math"

	"gonum.org/v1/gonum/floats"
)

// damped finds steps x that minimise ‖A x − b‖² + λ‖D x‖² for a factorised A.
type damped struct {
	r       [][]float64 // R with λ folded in, by columns
	rDiag   []float64
	y, w, v []float64
}

func newDamped(n int) *damped {
	d := &damped{r: make([][]float64, n), rDiag: make([]float64, n), y: make([]float64, n), w: make([]float64, n), v: make([]float64, n)}
	for j := range d.r {
		d.r[j] = make([]float64, n)
	}
	return d
}

// solve puts the minimiser for damping λ = lambda into x. qtb is Qᵀb. The
// rows √λ D are folded into R by Givens rotations, so that nothing is squared.
// Afterwards d.r, d.rDiag hold S with Pᵀ(AᵀA + λD²)P = SᵀS.
func (d *damped) solve(x []float64, f *factor, scale, qtb []float64, lambda float64) {
	n := len(f.columns)
	root := math.Sqrt(lambda)
	y, row := d.y[:n], d.w[:n]
	copy(y, qtb[:n])
	for j := range n {
		copy(d.r[j][:j], f.columns[j][:j])
		d.rDiag[j] = f.diag[j]
	}
	for j := range n {
		clear(row)
		row[j] = root * scale[f.pivot[j]]
		if row[j] == 0 {
			continue
		}
		extra := 0.0 // right side of the row that is folded in
		for k := j; k < n; k++ {
			if row[k] == 0 {
				continue
			}
			h := math.Hypot(d.rDiag[k], row[k])
			c, s := d.rDiag[k]/h, row[k]/h
			d.rDiag[k] = h
			y[k], extra = c*y[k]+s*extra, c*extra-s*y[k]
			for i := k + 1; i < n; i++ {
				d.r[i][k], row[i] = c*d.r[i][k]+s*row[i], c*row[i]-s*d.r[i][k]
			}
		}
	}
	rank := n
	for k := range n {
		if d.rDiag[k] == 0 {
			rank = k
			break
		}
	}
	clear(y[rank:])
	for k := rank - 1; k >= 0; k-- {
		y[k] /= d.rDiag[k]
		floats.AddScaled(y[:k], -y[k], d.r[k][:k])
	}
	for k, j := range f.pivot {
		x[j] = y[k]
	}
}

// within puts into x the minimiser of ‖A x − b‖ with ‖D x‖ ≤ radius, to a tenth
// of the radius, and returns its λ, zero if the free minimiser lies inside.
// guess is λ of the step before. Moré 1978, section 5: Newton's method on
// 1/‖Dx(λ)‖ between bounds that tighten.
func (d *damped) within(x []float64, f *factor, scale, qtb []float64, radius, guess float64) (lambda float64) {
	const slack = 0.1
	const tiny = 0x1p-1022
	n := len(f.columns)
	v := d.v[:n]
	length := func() float64 {
		for j := range v {
			v[j] = scale[j] * x[j]
		}
		return floats.Norm(v, 2)
	}
	f.gaussNewton(x, qtb, d.y[:n])
	size := length()
	excess := size - radius
	if excess <= slack*radius {
		return 0
	}
	full := true
	for k := range n {
		full = full && f.diag[k] != 0
	}
	low := 0.0
	if full {
		for j := range n {
			d.rDiag[j] = f.diag[j]
			copy(d.r[j][:j], f.columns[j][:j])
		}
		low = excess / radius / d.slope(f, scale, size)
	}
	// ‖D⁻¹Aᵀb‖/radius is above λ.
	for k := range n {
		s := f.diag[k] * qtb[k]
		for i := range k {
			s += f.columns[k][i] * qtb[i]
		}
		v[k] = s / scale[f.pivot[k]]
	}
	gradient := floats.Norm(v, 2)
	high := gradient / radius
	if high == 0 {
		high = tiny / min(radius, slack)
	}
	lambda = min(max(guess, low), high)
	if lambda == 0 {
		lambda = gradient / size
	}
	for iteration := 1; ; iteration++ {
		if lambda == 0 {
			lambda = max(tiny, 1e-3*high)
		}
		d.solve(x, f, scale, qtb, lambda)
		before := excess
		size = length()
		excess = size - radius
		if math.Abs(excess) <= slack*radius || low == 0 && excess <= before && before < 0 || iteration == 10 {
			return lambda
		}
		correction := excess / radius / d.slope(f, scale, size)
		if excess > 0 {
			low = max(low, lambda)
		} else {
			high = min(high, lambda)
		}
		lambda = max(low, lambda+correction)
	}
}

// slope is ‖S⁻ᵀPᵀD²x‖²/‖Dx‖², Newton's derivative; d.v holds Dx, size its length.
func (d *damped) slope(f *factor, scale []float64, size float64) float64 {
	n := len(f.columns)
	w := d.w[:n]
	for k, j := range f.pivot {
		w[k] = scale[j] * (d.v[j] / size)
	}
	for k := range n {
		s := w[k]
		for i := range k {
			s -= d.r[k][i] * w[i]
		}
		w[k] = s / d.rDiag[k]
	}
	norm := floats.Norm(w, 2)
	return norm * norm
}
