package bogoliubov

import (
	"fmt"
	"math"
	"runtime"
	"sync"

	"tailrace/gpe/flow"
)

// Spectrum is what a horizon emits, frequency by frequency.
type Spectrum struct {
	Up, Down flow.State
	Horizon  flow.Horizon
	OmegaMax float64

	// Temperature is that of the emission at low frequency, the limit of
	// ω/ln(1+1/emission) as ω → 0, and TemperatureError how far it is known.
	Temperature, TemperatureError float64

	Rows []*Scattering
}

// Frequencies returns count frequencies, logarithmic from 10⁻³ of top to just
// below it. It panics unless count ≥ 2 and top > 0.
func Frequencies(top float64, count int) []float64 {
	if count < 2 || !(top > 0) {
		panic(fmt.Sprintf("bogoliubov: %d frequencies up to %g", count, top))
	}
	const first, last = 1e-3, 0.999
	omega := make([]float64, count)
	for i := range omega {
		omega[i] = top * first * math.Pow(last/first, float64(i)/float64(count-1))
	}
	return omega
}

// NewSpectrum scatters waves of all given frequencies (nil for the 200 of
// Frequencies below ω_max) at the horizon of p. Errors are those of
// NewScatterer and Scatterer.At.
func NewSpectrum(p flow.Profile, omega []float64) (*Spectrum, error) {
	s, err := NewScatterer(p)
	if err != nil {
		return nil, err
	}
	if omega == nil {
		omega = Frequencies(s.omegaMax, 200)
	}
	_, _, h := p.Ends()
	r := &Spectrum{Up: s.up, Down: s.down, Horizon: h, OmegaMax: s.omegaMax}
	if r.Temperature, r.TemperatureError, err = s.LowFrequencyTemperature(); err != nil {
		return nil, err
	}
	r.Rows, err = s.All(omega)
	return r, err
}

// All scatters waves of every given frequency, on all processors.
func (s *Scatterer) All(omega []float64) ([]*Scattering, error) {
	rows := make([]*Scattering, len(omega))
	errs := make([]error, len(omega))
	var wg sync.WaitGroup
	workers := min(runtime.NumCPU(), len(omega))
	for w := range workers {
		wg.Go(func() {
			for i := w; i < len(omega); i += workers {
				rows[i], errs[i] = s.At(omega[i])
			}
		})
	}
	wg.Wait()
	for _, err := range errs {
		if err != nil {
			return nil, err
		}
	}
	return rows, nil
}

// LowFrequencyTemperature returns the limit of ω/ln(1+1/emission) as ω → 0. It
// is even in ω near 0 but for terms that dispersion brings; a parabola through
// three low frequencies gives it, and the line through the lower two how far it
// can be trusted.
func (s *Scatterer) LowFrequencyTemperature() (value, uncertainty float64, err error) {
	first, err := s.At(1e-3 * s.omegaMax)
	if err != nil {
		return 0, 0, err
	}
	unit := math.Min(s.omegaMax, first.Temperature())
	x := [3]float64{0.02 * unit, 0.04 * unit, 0.08 * unit}
	rows, err := s.All(x[:])
	if err != nil {
		return 0, 0, err
	}
	var T [3]float64
	for i, r := range rows {
		T[i] = r.Temperature()
	}
	// Extrapolated to ω = 0 from equally doubled frequencies.
	line := 2*T[0] - T[1]
	value = (8*T[0] - 6*T[1] + T[2]) / 3
	return value, math.Abs(value - line), nil
}
