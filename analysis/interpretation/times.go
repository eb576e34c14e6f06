package interpretation

import (
	"math"

	"gonum.org/v1/gonum/stat/distuv"
)

// Moment is one of several interpretations of the same sweep.
type Moment struct {
	Time, Age                float64
	Strength, StrengthError  float64
	Method                   string // of the trusted temperature; empty if there is none
	Temperature, Low, High   float64
	Front                    float64 // age at which the band ends, NaN if it is not seen
	Significance, SearchedBy float64 // standard deviations, and the search's p-value
}

// Times is what several times of a sweep say together.
type Times struct {
	Moments []Moment
	// PValue is the probability that a steady temperature scatters as much:
	// χ² of the trusted readings about their mean. NaN with fewer than two.
	PValue, Mean, MeanError float64
	// Growth is the slope of the front against the age, which is 1 for a band
	// that its horizon makes; NaN with fewer than two fronts.
	Growth float64
}

// Together puts several interpretations, in the order of time, into one account.
func Together(all []*Interpretation) *Times {
	t := &Times{PValue: math.NaN(), Mean: math.NaN(), MeanError: math.NaN(), Growth: math.NaN()}
	var weight, sum float64
	for _, r := range all {
		m := Moment{Time: r.Input.Set.Time, Age: r.Input.Age, Strength: r.Account.Null.Strength, StrengthError: r.Account.Null.Spread(),
			Significance: r.Account.Null.Significance, SearchedBy: r.Search.PValue, Front: math.NaN(), Temperature: math.NaN(), Low: math.NaN(), High: math.NaN()}
		if method, v, lo, hi, ok := r.trusted(); ok {
			m.Method, m.Temperature, m.Low, m.High = method, v, lo, hi
			w := math.Pow(2/(hi-lo), 2)
			weight, sum = weight+w, sum+w*v
		}
		if r.Along != nil {
			m.Front = r.Along.Front
		}
		t.Moments = append(t.Moments, m)
	}
	var chi, n float64
	t.Mean, t.MeanError = sum/weight, 1/math.Sqrt(weight)
	for _, m := range t.Moments {
		if m.Method != "" {
			chi += math.Pow((m.Temperature-t.Mean)*2/(m.High-m.Low), 2)
			n++
		}
	}
	if n >= 2 {
		t.PValue = distuv.ChiSquared{K: n - 1}.Survival(chi)
	}
	var x, y, xx, xy, fronts float64
	for _, m := range t.Moments {
		if !math.IsNaN(m.Front) && !math.IsNaN(m.Age) {
			fronts++
			x, y, xx, xy = x+m.Age, y+m.Front, xx+m.Age*m.Age, xy+m.Age*m.Front
		}
	}
	if d := fronts*xx - x*x; fronts >= 2 && d > 0 {
		t.Growth = (fronts*xy - x*y) / d
	}
	return t
}
