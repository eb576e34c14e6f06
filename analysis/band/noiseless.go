package band

import (
	"math"

	"gonum.org/v1/gonum/mat"

	"tailrace/gpe"
)

// NoiselessSides cuts the windows out of fluctuations whose covariance is
// known: each direction of gpe.Moments stands for a shot, so scaled that
// Correlation and the Mean of a Cut are what infinitely many shots would give.
// Positions are as for NewSides. All bins of a Cut made from them have the same
// Error, one hundredth of the largest, so that fits weigh them alike. It
// returns the errors of NewSides.
func NoiselessSides(m *gpe.Moments, x []float64, w Window) (*Sides, error) {
	up, err := columns("upstream", x, m.Density, w.UpFar, w.UpNear)
	if err != nil {
		return nil, err
	}
	down, err := columns("downstream", x, m.Density, w.DownNear, w.DownFar)
	if err != nil {
		return nil, err
	}
	s := &Sides{Noiseless: true}
	s.Xu, s.U, s.Nu = direct(m, x, up)
	s.Xd, s.D, s.Nd = direct(m, x, down)
	return s, nil
}

func direct(m *gpe.Moments, x []float64, c []int) (pos []float64, f *mat.Dense, density float64) {
	n, count := len(m.Density), m.Count()
	scale := math.Sqrt(float64(count - 1))
	f = mat.NewDense(count, len(c), nil)
	for k, j := range c {
		pos = append(pos, x[j])
		density += m.Density[j] / float64(len(c))
		for i := range count {
			f.Set(i, k, m.Directions[i*n+j]/m.Density[j]*scale)
		}
	}
	return pos, f, density
}
