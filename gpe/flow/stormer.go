package flow

import "math"

// Extrapolation of Störmer's rule for y″ = F(x, y), which has no y′ on its
// right-hand side: the errors of the rule go in even powers of its step, so
// each row of the tableau raises the order by two.
// E. Hairer, S. P. Nørsett, G. Wanner, Solving Ordinary Differential
// Equations I, section II.14 (from memory).

const (
	extrapolationRows = 9 // rows use 1, 2, … 9 substeps: order 18
	stormerSteps      = 4000
)

// acceleration is the right-hand side F(x, y).
type acceleration interface{ force(x, y float64) float64 }

// stormerTry makes one step of length H with extrapolation until the last
// correction is below tolerance, relative to |y| and |Hy′|. It returns the
// new values, the number of rows used and whether they sufficed.
func stormerTry[F acceleration](f F, x, y, yp, H, tolerance float64) (y1, yp1 float64, rows int, ok bool) {
	var ty, tp [extrapolationRows]float64
	f0 := f.force(x, y)
	for row := range extrapolationRows {
		n := row + 1
		h := H / float64(n)
		dy := h * (yp + h/2*f0)
		yn := y + dy
		for k := 1; k < n; k++ {
			dy += h * h * f.force(x+float64(k)*h, yn)
			yn += dy
		}
		pn := dy/h + h/2*f.force(x+H, yn)
		// Aitken–Neville in h², one diagonal kept: ty[k] holds the value
		// from rows row−k..row.
		var ey, ep float64
		prevY, prevP := ty[0], tp[0]
		ty[0], tp[0] = yn, pn
		for k := 1; k <= row; k++ {
			ratio := float64(n) / float64(n-k)
			c := 1 / (ratio*ratio - 1)
			ey = (ty[k-1] - prevY) * c
			ep = (tp[k-1] - prevP) * c
			prevY, ty[k] = ty[k], ty[k-1]+ey
			prevP, tp[k] = tp[k], tp[k-1]+ep
		}
		if row >= 3 {
			scale := math.Abs(ty[row]) + math.Abs(H*tp[row])
			if math.Abs(ey)+math.Abs(H*ep) <= tolerance*scale {
				return ty[row], tp[row], n, true
			}
			if math.IsNaN(scale) {
				return ty[row], tp[row], n, false
			}
		}
	}
	return ty[extrapolationRows-1], tp[extrapolationRows-1], extrapolationRows, false
}

// stormer carries (y, y′) from x to end in steps of its own choosing, the
// first one at most |first| long. ok is false if the solution ran away.
func stormer[F acceleration](f F, x, y, yp, end, first, tolerance float64) (y1, yp1 float64, ok bool) {
	H := math.Copysign(first, end-x)
	for range stormerSteps {
		if x == end {
			return y, yp, true
		}
		last := math.Abs(H) >= math.Abs(end-x)
		step := H
		if last {
			step = end - x
		}
		ny, np, rows, done := stormerTry(f, x, y, yp, step, tolerance)
		if !done {
			H = step / 2
			if x+H == x {
				return y, yp, false
			}
			continue
		}
		y, yp = ny, np
		if last {
			return y, yp, true
		}
		x += step
		switch {
		case rows <= 6:
			H *= 1.5
		case rows == extrapolationRows:
			H *= 0.8
		}
	}
	return y, yp, false
}
