package correlation

import (
	"math"

	"gonum.org/v1/gonum/mat"

	"tailrace/gpe"
	"tailrace/gpe/lanes"
)

// NewNoiseless makes the map that infinitely many trajectories would give in
// the limit of weak noise. Its Error is zero and it has no shots.
func NewNoiseless(m *gpe.Moments, x []float64, o Ordering) *Map {
	n := len(x)
	if len(m.Density) != n {
		panic("correlation: moments and positions differ in size")
	}
	cov := make([]float64, n*n)
	lanes.NewUpdater(n).Add(cov, n, m.Directions)
	r := &Map{X: x, Commutator: o.Commutator, MeanDensity: append([]float64(nil), m.Density...), G2: mat.NewDense(n, n, nil), Error: mat.NewDense(n, n, nil)}
	peak := 0.0
	for _, v := range m.Density {
		peak = math.Max(peak, v)
	}
	for i, ni := range m.Density {
		for j := i; j < n; j++ {
			nj := m.Density[j]
			g := math.NaN()
			if ni > Thin*peak && nj > Thin*peak {
				c := cov[i*n+j]
				switch {
				case i == j:
					c -= o.Commutator * ni
				case o.Kernel != nil:
					c -= o.Kernel(i, j) * o.Coherence(i, j)
				}
				g = c / (ni * nj)
			}
			r.G2.Set(i, j, g)
			r.G2.Set(j, i, g)
			if math.IsNaN(g) {
				r.Error.Set(i, j, g)
				r.Error.Set(j, i, g)
			}
		}
	}
	return r
}
