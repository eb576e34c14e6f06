package interpretation

import (
	"math"
	"testing"

	"tailrace/analysis/band"
	"tailrace/analysis/horizon"
	"tailrace/analysis/shots"
	"tailrace/analysis/temperature"
)

// at is an interpretation of one time that reads T with an error.
func at(age, T, sd, front float64) *Interpretation {
	return &Interpretation{
		Input:   &Input{Set: &shots.Set{Time: age}, Age: age},
		Account: &horizon.Account{Null: &band.Null{Strength: 1, Significance: 9, Shuffled: []float64{-0.1, 0.1}}, Readings: []temperature.Reading{{Method: "template", Value: T, Low: T - sd, High: T + sd, Trusted: true}}},
		Search:  &band.Search{PValue: 0.001},
		Along:   &Along{Age: age, Front: front},
	}
}

// A temperature that stays is steady, one that moves is not; a band that grows
// with its horizon's age is told from one that does not.
func TestTogether(t *testing.T) {
	steady := Together([]*Interpretation{at(50, 0.070, 0.004, 40), at(80, 0.073, 0.004, 70), at(110, 0.069, 0.004, 100)})
	if steady.PValue < 0.3 || math.Abs(steady.Mean-0.0707) > 1e-4 || math.Abs(steady.MeanError-0.004/math.Sqrt(3)) > 1e-6 || math.Abs(steady.Growth-1) > 1e-9 {
		t.Errorf("%+v", steady)
	}
	moving := Together([]*Interpretation{at(50, 0.05, 0.004, math.NaN()), at(80, 0.07, 0.004, 30), at(110, 0.09, 0.004, 30)})
	if moving.PValue > 1e-6 || math.Abs(moving.Growth) > 1e-9 {
		t.Errorf("%+v", moving)
	}
	one := Together([]*Interpretation{at(50, 0.05, 0.004, 40)})
	if !math.IsNaN(one.PValue) || !math.IsNaN(one.Growth) {
		t.Errorf("%+v", one)
	}
}
