package bogoliubov

import (
	"fmt"
	"math"
	"math/cmplx"

	"gonum.org/v1/gonum/interp"

	"tailrace/gpe/flow"
)

// Family is the pairing and the low-frequency temperature of a flow as
// functions of its sharpness: of the flow drawn out by a factor (see
// flow.Stretched). Between the factors at which scattering was done, logarithm
// and phase of the pairing are splines in the logarithm of the factor.
type Family struct {
	Omega       []float64 // frequencies of the pairing
	Low, High   float64   // logarithms of the smallest and largest factor
	temperature interp.AkimaSpline
	size, phase []interp.AkimaSpline // of each frequency
}

// NewFamily scatters waves of the given frequencies, rising, at p drawn out by
// each of the factors, rising, at least 5 of them, for ingoing waves at
// temperature T. Errors are those of NewScatterer and Scatterer.At.
func NewFamily(p flow.Profile, omega, factors []float64, T float64) (*Family, error) {
	n := len(factors)
	if n < 5 || len(omega) == 0 {
		panic(fmt.Sprintf("bogoliubov: a family of %d factors at %d frequencies", n, len(omega)))
	}
	f := &Family{Omega: omega, size: make([]interp.AkimaSpline, len(omega)), phase: make([]interp.AkimaSpline, len(omega))}
	at, warmth := make([]float64, n), make([]float64, n)
	size, phase := make([][]float64, len(omega)), make([][]float64, len(omega))
	for i := range omega {
		size[i], phase[i] = make([]float64, n), make([]float64, n)
	}
	for k, factor := range factors {
		s, err := NewScatterer(flow.Stretched{Profile: p, Factor: factor})
		if err != nil {
			return nil, err
		}
		rows, err := s.All(omega)
		if err != nil {
			return nil, err
		}
		value, _, err := s.LowFrequencyTemperature()
		if err != nil {
			return nil, err
		}
		at[k], warmth[k] = math.Log(factor), math.Log(value)
		for i, r := range rows {
			z := r.Pairing(T)
			size[i][k], phase[i][k] = math.Log(math.Max(cmplx.Abs(z), 1e-300)), cmplx.Phase(z)
		}
		// Phases turn slowly from one frequency to the next near ω = 0 and from
		// one factor to the next.
		for i := range omega {
			before := phase[i][k]
			switch {
			case k > 0:
				before = phase[i][k-1]
			case i > 0:
				before = phase[i-1][k]
			}
			phase[i][k] -= 2 * math.Pi * math.Round((phase[i][k]-before)/(2*math.Pi))
		}
	}
	f.Low, f.High = at[0], at[n-1]
	if err := f.temperature.Fit(at, warmth); err != nil {
		return nil, err
	}
	for i := range omega {
		if err := f.size[i].Fit(at, size[i]); err != nil {
			return nil, err
		}
		if err := f.phase[i].Fit(at, phase[i]); err != nil {
			return nil, err
		}
	}
	return f, nil
}

// Temperature returns the low-frequency temperature of the flow drawn out by
// e^logFactor, which must lie in the family's range.
func (f *Family) Temperature(logFactor float64) float64 {
	return math.Exp(f.temperature.Predict(logFactor))
}

// Pairing sets dst to the pairing at each frequency and returns it; nil
// allocates.
func (f *Family) Pairing(dst []complex128, logFactor float64) []complex128 {
	if dst == nil {
		dst = make([]complex128, len(f.Omega))
	}
	for i := range dst {
		dst[i] = cmplx.Rect(math.Exp(f.size[i].Predict(logFactor)), f.phase[i].Predict(logFactor))
	}
	return dst
}
