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
	if n < 5 || len(omega) < 2 {
		panic(fmt.Sprintf("bogoliubov: a family of %d factors at %d frequencies", n, len(omega)))
	}
	f := &Family{Omega: omega, size: make([]interp.AkimaSpline, len(omega)), phase: make([]interp.AkimaSpline, len(omega))}
	at, warmth := make([]float64, n), make([]float64, n)
	size, phase := make([][]float64, len(omega)), make([][]float64, len(omega))
	for i := range omega {
		size[i], phase[i] = make([]float64, n), make([]float64, n)
	}
	some := sparse(len(omega))
	few := make([]float64, len(some))
	for j, i := range some {
		few[j] = omega[int(i)]
	}
	logs, phases := make([]float64, len(some)), make([]float64, len(some))
	var between interp.AkimaSpline
	for k, factor := range factors {
		s, err := NewScatterer(flow.Stretched{Profile: p, Factor: factor})
		if err != nil {
			return nil, err
		}
		rows, err := s.All(few)
		if err != nil {
			return nil, err
		}
		value, _, err := s.LowFrequencyTemperature()
		if err != nil {
			return nil, err
		}
		at[k], warmth[k] = math.Log(factor), math.Log(value)
		for j, r := range rows {
			z := r.Pairing(T)
			// The pairing goes as 1/ω at low frequency.
			logs[j], phases[j] = math.Log(math.Max(cmplx.Abs(z)*r.Omega, 1e-300)), cmplx.Phase(z)
			if j > 0 {
				phases[j] -= 2 * math.Pi * math.Round((phases[j]-phases[j-1])/(2*math.Pi))
			}
		}
		// From the lowest frequency on phases turn slowly: there all factors
		// are on the same branch.
		lowest := 0
		if few[len(few)-1] < few[0] {
			lowest = len(few) - 1
		}
		if k > 0 {
			turn := 2 * math.Pi * math.Round((phases[lowest]-phase[int(some[lowest])][k-1])/(2*math.Pi))
			for j := range phases {
				phases[j] -= turn
			}
		}
		for _, c := range []struct {
			from []float64
			to   [][]float64
		}{{logs, size}, {phases, phase}} {
			if err := between.Fit(some, c.from); err != nil {
				return nil, err
			}
			for i := range omega {
				c.to[i][k] = between.Predict(float64(i))
			}
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

// sparse returns some of the indices of n frequencies, evenly spread, first and
// last among them: the pairing is smooth in the index of a band's rule.
func sparse(n int) []float64 {
	const most = 80
	count := min(n, most)
	at := make([]float64, count)
	for j := range at {
		at[j] = math.Round(float64(j) * float64(n-1) / float64(count-1))
	}
	return at
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
		dst[i] = cmplx.Rect(math.Exp(f.size[i].Predict(logFactor))/f.Omega[i], f.phase[i].Predict(logFactor))
	}
	return dst
}
