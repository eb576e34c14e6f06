package correlation

import (
	"math"

	"gonum.org/v1/gonum/mat"

	"tailrace/analysis/moments"
	"tailrace/gpe/lanes"
)

// Measured makes the map of measured shots with the given mean density. What
// atoms and photons alone make, granularity·n on the diagonal and its share
// overlap[|i−j|] beside it, is taken off; overlap may be shorter than the
// picture. The error of a pixel is the standard error of the mean of δn δn′ over
// shots.
func Measured(shots moments.Shots, x, mean []float64, granularity float64, overlap []float64) *Map {
	n, count := len(x), float64(shots.Count())
	m := &Map{X: x, MeanDensity: mean, G2: mat.NewDense(n, n, nil), Error: mat.NewDense(n, n, nil), Shots: shots.Count()}
	products := mat.NewSymDense(n, nil)
	const block = 128
	update, rows := lanes.NewUpdater(n), make([]float64, block*n)
	for first := 0; first < shots.Count(); first += block {
		size := min(block, shots.Count()-first)
		for i, v := range shots.Data[first*n : (first+size)*n] {
			rows[i] = float64(v) - mean[i%n]
		}
		update.Add(products.RawSymmetric().Data, n, rows[:size*n])
	}
	fourth := fourthMoments(shots, mean)
	peak := 0.0
	for _, v := range mean {
		peak = math.Max(peak, v)
	}
	for i, ni := range mean {
		for j := i; j < n; j++ {
			nj := mean[j]
			g, e := math.NaN(), math.NaN()
			if ni > Thin*peak && nj > Thin*peak {
				cov := products.At(i, j) / (count - 1)
				spread := math.Max(fourth.At(i, j)/count-cov*cov, 0)
				if j-i < len(overlap) {
					cov -= granularity * overlap[j-i] * math.Sqrt(ni*nj)
				}
				g, e = cov/(ni*nj), math.Sqrt(spread/count)/(ni*nj)
			}
			m.G2.Set(i, j, g)
			m.G2.Set(j, i, g)
			m.Error.Set(i, j, e)
			m.Error.Set(j, i, e)
		}
	}
	return m
}
