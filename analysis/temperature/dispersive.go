package temperature

import (
	"fmt"
	"math"

	"tailrace/analysis/band"
	"tailrace/analysis/fit"
	"tailrace/gpe/bogoliubov"
)

// Dispersive is the fit of the band that keeps the dispersion of the waves
// (bogoliubov.Band) to the cut, with temperature, delay and offset free. Its
// height is given by theory, so the density must be known: in a simulation it
// is, in a measurement its error goes into the interval (Sampling).
type Dispersive struct {
	T, Delay, Offset float64
	Samples          []float64 // of T
	Failed           int
	profile          *bogoliubov.Profile
}

// FitDispersive fits the cut of s, made along geometry g, starting from
// temperature t, and finds the interval as how says.
func FitDispersive(c *band.Cut, s *band.Sides, g band.Geometry, theory *bogoliubov.Band, t float64, how Sampling) (*Dispersive, error) {
	span := math.Max(math.Abs(c.S[0]), math.Abs(c.S[len(c.S)-1]))
	coldest, hottest := t/8, t*8
	d := &Dispersive{profile: theory.Over(s.Xu, s.Xd, coldest, span).Profile(len(c.S), groups(c, s, g))}
	unit := largest(c.Mean)
	model := make([]float64, len(c.S))
	solve := func(mean, start []float64, height float64) (fit.Result, error) {
		r, err := fit.Solve(fit.Problem{
			Count: len(c.S),
			Start: start,
			Scale: []float64{1, 1 / t, 1},
			Lower: []float64{math.Log(coldest), -span / 2, -1e3},
			Upper: []float64{math.Log(hottest), span / 2, 1e3},
			Residuals: func(dst, p []float64) {
				d.profile.At(model, math.Exp(p[0]), p[1])
				for b, v := range model {
					dst[b] = (height*v + p[2]*unit - mean[b]) / c.Error[b]
				}
			},
		}, options)
		if err == nil && (r.AtBound[0] || r.AtBound[1]) {
			err = fmt.Errorf("the fit left the range of temperatures or delays: T = %.3g, delay %.3g", math.Exp(r.Params[0]), r.Params[1])
		}
		return r, err
	}
	best, err := solve(c.Mean, []float64{math.Log(t), 0, 0}, 1)
	if err != nil {
		return nil, fmt.Errorf("the dispersive band could not be fitted: %w", err)
	}
	d.T, d.Delay, d.Offset = math.Exp(best.Params[0]), best.Params[1], best.Params[2]*unit
	r := how.source(0xd15)
	mean := make([]float64, len(c.S))
	for range how.Resamples {
		c.Resample(mean, r)
		p, err := solve(mean, best.Params, how.height(r))
		if err != nil {
			d.Failed++
			continue
		}
		d.Samples = append(d.Samples, math.Exp(p.Params[0]))
	}
	return d, nil
}

var options = fit.Options{FunctionTolerance: 1e-10, StepTolerance: 1e-8, MaxIterations: 200}

// Temperature returns T with its bootstrap interval.
func (d *Dispersive) Temperature() (value, low, high float64) {
	low, high = interval(d.Samples)
	return d.T, low, high
}

// Model returns the fitted profile in the cut's bins.
func (d *Dispersive) Model() []float64 {
	m := d.profile.At(nil, d.T, d.Delay)
	for b := range m {
		m[b] += d.Offset
	}
	return m
}

// Predicted returns the band's profile in the cut's bins at temperature t,
// with the fitted delay and no offset.
func (d *Dispersive) Predicted(t float64) []float64 { return d.profile.At(nil, t, d.Delay) }
