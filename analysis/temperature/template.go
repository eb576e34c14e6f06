package temperature

import (
	"fmt"
	"math"

	"tailrace/analysis/band"
	"tailrace/analysis/fit"
	"tailrace/gpe/bogoliubov"
	"tailrace/gpe/flow"
)

// Template is the fit of the bands of a family of flows to the cut: the flow
// that theory gives, drawn out or compressed by a factor, with its exact
// pairing. Factor, delay and offset are free; the temperature is that of the
// scattering at low frequency in the flow fitted. Unlike the dispersive band it
// does not take the spectrum for thermal.
type Template struct {
	T, Factor, Delay, Offset float64
	Samples                  []float64 // of T
	Failed                   int
	family                   *bogoliubov.Family
	profile                  *bogoliubov.Profile
}

// Range of the factors of a family, and how many are scattered at: between
// them the logarithm of the temperature is smooth.
const (
	sharpest, smoothest = 1. / 16, 8
	factors             = 15
)

// TemplateProfile returns the band over the bins of the cut c of s, made along
// geometry g, for the family of a flow with the given horizon.
func TemplateProfile(c *band.Cut, s *band.Sides, g band.Geometry, theory *bogoliubov.Band, h flow.Horizon) *bogoliubov.Profile {
	span := math.Max(math.Abs(c.S[0]), math.Abs(c.S[len(c.S)-1]))
	return theory.Over(s.Xu, s.Xd, h.Temperature/smoothest, span).Profile(len(c.S), groups(c, s, g))
}

// NewFamily returns the family of the flow p, at the frequencies of a profile,
// for a cloud at temperature cloud.
func NewFamily(p flow.Profile, omega []float64, cloud float64) (*bogoliubov.Family, error) {
	at := make([]float64, factors)
	for i := range at {
		at[i] = sharpest * math.Pow(smoothest/sharpest, float64(i)/(factors-1))
	}
	return bogoliubov.NewFamily(p, omega, at, cloud)
}

// FitTemplate fits the family to the cut and finds the interval as how says.
func FitTemplate(c *band.Cut, family *bogoliubov.Family, profile *bogoliubov.Profile, how Sampling) (*Template, error) {
	f := &Template{family: family, profile: profile}
	span := math.Max(math.Abs(c.S[0]), math.Abs(c.S[len(c.S)-1]))
	unit := largest(c.Mean)
	model, pairing := make([]float64, len(c.S)), make([]complex128, len(family.Omega))
	rate := family.Temperature(math.Min(math.Max(0, family.Low), family.High))
	solve := func(mean, start []float64, height float64) (fit.Result, error) {
		return fit.Solve(fit.Problem{
			Count: len(c.S),
			Start: start,
			Scale: []float64{1, 1 / rate, 1},
			Lower: []float64{family.Low, -span / 2, -1e3},
			Upper: []float64{family.High, span / 2, 1e3},
			Residuals: func(dst, p []float64) {
				f.profile.Paired(model, family.Pairing(pairing, p[0]), p[1])
				for b, v := range model {
					dst[b] = (height*v + p[2]*unit - mean[b]) / c.Error[b]
				}
			},
		}, options)
	}
	best, err := solve(c.Mean, []float64{0, 0, 0}, 1)
	switch {
	case err != nil:
		return nil, fmt.Errorf("the templates could not be fitted: %w", err)
	case best.AtBound[1]:
		return nil, fmt.Errorf("the templates could not be fitted: the delay runs out of the window, to %.3g", best.Params[1])
	case best.AtBound[0] && best.Params[0] > 0:
		return nil, fmt.Errorf("the templates could not be fitted: the band is that of a horizon more than %d times as smooth as the predicted one, colder than %.3g", smoothest, family.Temperature(family.High))
	}
	// At the sharp end the temperature no longer depends on the factor, so that
	// a fit that stops there still has one.
	f.T, f.Factor, f.Delay, f.Offset = family.Temperature(best.Params[0]), math.Exp(best.Params[0]), best.Params[1], best.Params[2]*unit
	r := how.source(0x7e3)
	mean := make([]float64, len(c.S))
	for range how.Resamples {
		c.Resample(mean, r)
		p, err := solve(mean, best.Params, how.height(r))
		if err != nil || p.AtBound[1] {
			f.Failed++
			continue
		}
		f.Samples = append(f.Samples, family.Temperature(p.Params[0]))
	}
	return f, nil
}

// Temperature returns T with its bootstrap interval.
func (f *Template) Temperature() (value, low, high float64) {
	low, high = interval(f.Samples)
	return f.T, low, high
}

// Background returns what lies under the band (bogoliubov.Scatterer.Background)
// in the flow that was fitted: p, from which the family was made, drawn out.
func (f *Template) Background(p flow.Profile, s *band.Sides, atomsPerLength, cloud float64, response bogoliubov.Response) ([]float64, error) {
	scatterer, err := bogoliubov.NewScatterer(flow.Stretched{Profile: p, Factor: f.Factor})
	if err != nil {
		return nil, err
	}
	return scatterer.Background(s.Xu, s.Xd, atomsPerLength, cloud, response)
}

// Saturated reports that the fit lies where sharper horizons are no hotter: the
// temperature is then that of the sharpest horizon that these ends allow.
func (f *Template) Saturated() bool {
	at := math.Log(f.Factor)
	return f.family.Temperature(math.Max(f.family.Low, at-math.Ln2))/f.T < 1.02
}

// Model returns the fitted profile in the cut's bins.
func (f *Template) Model() []float64 {
	m := f.profile.Paired(nil, f.family.Pairing(nil, math.Log(f.Factor)), f.Delay)
	for b := range m {
		m[b] += f.Offset
	}
	return m
}
