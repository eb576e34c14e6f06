// Package temperature reads the horizon's temperature off the band that it
// draws across a correlation map, in more than one way, and says of each how
// far it is to be trusted.
package temperature

import (
	"math"
	"slices"

	"gonum.org/v1/gonum/stat"
)

// Reading is what one thermometer says, in m c₀²/k_B.
type Reading struct {
	Method    string
	Value     float64
	Low, High float64 // the central 68 % of the bootstrap over shots
	Trusted   bool
	Why       string
}

// interval returns the central 68.27 % of samples; both NaN when there are
// fewer than 20.
func interval(samples []float64) (low, high float64) {
	if len(samples) < 20 {
		return math.NaN(), math.NaN()
	}
	s := slices.Clone(samples)
	slices.Sort(s)
	return stat.Quantile(0.1587, stat.Empirical, s, nil), stat.Quantile(0.8413, stat.Empirical, s, nil)
}
