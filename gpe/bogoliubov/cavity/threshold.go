package cavity

import "math"

// Thresholds returns the lengths below limit at which another mode begins to
// grow, and the next one above, in rising order: SharpThreshold for sharp
// edges, and for smooth ones the lengths at which the cavity, its edges
// unchanged, has a mode that stands still. The number of them below the length
// of a cavity is the number of growing modes, both of a pair counted, those too
// slow for Modes included.
func (c Cavity) Thresholds(limit float64) []float64 {
	var found []float64
	if c.Width == 0 {
		for n := 0; len(found) == 0 || found[n-1] < limit; n++ {
			found = append(found, c.SharpThreshold(n))
		}
		return found
	}
	f := func(length float64) float64 { return newCondition(c.With(length)).standing() }
	// Far apart the edges know nothing of each other, and thresholds are half a
	// zero-frequency wave apart.
	stride := math.Pi / c.ZeroWave() / 4
	low := math.Max(stride/4, c.shortest())
	fLow := f(low)
	for len(found) == 0 || found[len(found)-1] < limit {
		high := low + stride
		fHigh := f(high)
		if (fLow < 0) != (fHigh < 0) {
			found = append(found, crossing(f, low, high, fLow, fHigh))
		}
		low, fLow = high, fHigh
	}
	return found
}

// shortest returns the length up to which smooth edges overlap so much that the
// flow is nowhere supersonic. Every disturbance then costs energy, and none
// grows.
func (c Cavity) shortest() float64 {
	// In the middle c² = c_u² − (c_u² − c_d²)tanh(D/2w).
	return 2 * c.Width * math.Atanh((c.Outside-c.Velocity)*(c.Outside+c.Velocity)/c.drop())
}

// crossing returns where f changes its sign between a and b, by false position
// with halved weights (M. Dowell, P. Jarratt, BIT 11, 168 (1971)).
func crossing(f func(float64) float64, a, b, fa, fb float64) float64 {
	last := b
	for range 60 {
		x := (a*fb - b*fa) / (fb - fa)
		fx := f(x)
		if fx == 0 || math.Abs(x-last) < 1e-10*x {
			return x
		}
		last = x
		if (fx < 0) != (fb < 0) {
			a, fa = b, fb
		} else {
			fa /= 2
		}
		b, fb = x, fx
	}
	return last
}
