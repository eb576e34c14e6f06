package band

import (
	"math"
	"math/rand/v2"

	"gonum.org/v1/gonum/mat"
	"gonum.org/v1/gonum/stat"
)

// Null is the strength of the band held against what it would be if the two
// sides knew nothing of each other.
type Null struct {
	Strength     float64   // of the measured map, in units of the pattern's own
	Shuffled     []float64 // of maps whose downstream windows belong to other shots
	Significance float64   // (Strength − mean)/standard deviation of Shuffled
	PValue       float64   // share of Shuffled at least as strong, (1+n)/(1+all)
}

// Spread returns the standard deviation of the strength by chance.
func (n *Null) Spread() float64 { return stat.StdDev(n.Shuffled, nil) }

// Template prepares a pattern over the window, row by row of Xu with Xd
// running fastest, such as the predicted band, for measuring how much of it is
// in a map: less its mean, so that a constant does not count, and scaled so
// that the strength of the pattern itself is 1.
func Template(s *Sides, pattern []float64) *mat.Dense {
	w := mat.NewDense(len(s.Xu), len(s.Xd), append([]float64(nil), pattern...))
	mean := mat.Sum(w) / float64(len(pattern))
	w.Apply(func(_, _ int, v float64) float64 { return v - mean }, w)
	w.Scale(1/math.Pow(mat.Norm(w, 2), 2), w)
	return w
}

// Sech2 returns sech²(y).
func Sech2(y float64) float64 {
	c := math.Cosh(y)
	return 1 / (c * c)
}

// Shuffle measures the strength, the least-squares amplitude of the template's
// pattern in the map, and its distribution when the downstream window of each shot is
// exchanged for that of another: every statistic of each side is kept and only
// what joins them is lost. The shuffles are drawn from seed; without any,
// significance and p-value are NaN.
func Shuffle(s *Sides, template *mat.Dense, shuffles int, seed uint64) *Null {
	var weighted mat.Dense // [shots×nd]
	weighted.Mul(s.U, template)
	m := s.Shots()
	strength := func(order []int) float64 {
		sum := 0.0
		for i := range m {
			j := i
			if order != nil {
				j = order[i]
			}
			d := s.D.RawRowView(j)
			for k, v := range weighted.RawRowView(i) {
				sum += v * d[k]
			}
		}
		return sum / float64(m-1)
	}
	n := &Null{Strength: strength(nil)}
	r := rand.New(rand.NewPCG(seed, 0x5eed))
	atLeast := 0
	for range shuffles {
		v := strength(r.Perm(m))
		n.Shuffled = append(n.Shuffled, v)
		if v >= n.Strength {
			atLeast++
		}
	}
	if shuffles == 0 {
		n.Significance, n.PValue = math.NaN(), math.NaN()
		return n
	}
	mean, sd := stat.MeanStdDev(n.Shuffled, nil)
	n.Significance = (n.Strength - mean) / sd
	n.PValue = float64(1+atLeast) / float64(1+shuffles)
	return n
}
