package horizon

import (
	"fmt"
	"math"

	"tailrace/analysis/correlation"
)

// Beside is an ensemble's map held against the one without sampling error, in
// the cross-horizon window.
type Beside struct {
	Pixels    int
	ChiSquare float64 // mean of (ensemble − exact)²/error² over the pixels
	// Spread is by how much ChiSquare would scatter about 1 if the two differed
	// by chance alone: pixels of one window share shots and points.
	Spread   float64
	Strength float64 // of the exact map's band over its prediction
	// Lost is by how many standard deviations of chance the ensemble's band is
	// weaker than the exact one.
	Lost  float64
	Exact *Account
	// Difference is (ensemble − exact)/error at every pair of points, NaN where
	// there is no cloud, [N×N].
	Difference []float64
}

// NewBeside compares the account of an ensemble with the exact one of the same
// problem.
func NewBeside(ensemble, exact *Account) *Beside {
	b := &Beside{Exact: exact, Strength: exact.Null.Strength}
	b.Lost = (exact.Null.Strength - ensemble.Null.Strength) / ensemble.Null.Spread()
	n := len(ensemble.Map.X)
	b.Difference = make([]float64, n*n)
	for i := range n {
		for j := range n {
			b.Difference[i*n+j] = (ensemble.Map.G2.At(i, j) - exact.Map.G2.At(i, j)) / ensemble.Map.Error.At(i, j)
		}
	}
	up, down := inside(ensemble.Map, ensemble.Window.UpFar, ensemble.Window.UpNear), inside(ensemble.Map, ensemble.Window.DownNear, ensemble.Window.DownFar)
	for _, i := range up {
		for _, j := range down {
			d := b.Difference[i*n+j]
			b.ChiSquare += d * d
			b.Pixels++
		}
	}
	b.ChiSquare /= float64(b.Pixels)
	b.Spread = math.Sqrt(2 / math.Max(1, independent(ensemble.Map, up)*independent(ensemble.Map, down)))
	return b
}

// Warning says that the ensemble departs from weak noise, or nothing.
func (b *Beside) Warning() string {
	const far = 3 // standard deviations; common practice, no source
	chi, lost := b.ChiSquare-1 > far*b.Spread, math.Abs(b.Lost) > far
	if !chi && !lost {
		return ""
	}
	return fmt.Sprintf("the ensemble departs from the exact map, which is for weak noise: its band is %.1f standard deviations weaker, and χ² is %.3f a pixel where chance makes 1 ± %.3f; with so few atoms in a healing length the noise acts back on the flow and on itself",
		b.Lost, b.ChiSquare, b.Spread)
}

func inside(m *correlation.Map, lo, hi float64) (points []int) {
	for j, x := range m.X {
		if x >= lo && x <= hi {
			points = append(points, j)
		}
	}
	return points
}

// independent returns how many independent values the fluctuations at some
// points amount to: (Σλ)²/Σλ² of their correlation matrix, which has 1 on its
// diagonal.
func independent(m *correlation.Map, points []int) float64 {
	var square float64
	for _, i := range points {
		for _, j := range points {
			// In symmetric order: what is left of it off the diagonal is the
			// normally ordered map.
			r := 1.0
			if i != j {
				r = m.G2.At(i, j) / math.Sqrt(m.Variance(i)*m.Variance(j))
			}
			square += r * r
		}
	}
	n := float64(len(points))
	return n * n / square
}
