package temperature

import (
	"fmt"
	"math"
	"math/rand/v2"

	"gonum.org/v1/gonum/mat"

	"tailrace/analysis/band"
	"tailrace/analysis/fit"
)

// Width is the fit of the dispersionless band to the cut,
//
//	g₂ − 1 = −A sech²(κ(s − s₀)/2) + offset,  T = κ/2π
//
// (R. Balbinot et al., Phys. Rev. A 78, 021603(R) (2008)), averaged over each
// bin. The delay s₀ is where the partners leave the horizon.
type Width struct {
	Amplitude, Kappa, Delay, Offset float64
	Covariance                      *mat.SymDense // of the four, from the scatter of the shots
	ChiSquare                       float64       // with the bins' own errors
	DegreesOfFreedom                int
	Samples                         [][4]float64 // bootstrap
	Failed                          int          // resamples that could not be fitted
}

// sechBin is sech²(κ(s−s₀)/2) averaged over a bin by Simpson's rule.
func sechBin(s, half, kappa, s0 float64) float64 {
	f := func(s float64) float64 { return band.Sech2(kappa / 2 * (s - s0)) }
	return (f(s-half) + 4*f(s) + f(s+half)) / 6
}

// profileFit fits −A sech² + offset to mean with errors err at s.
func profileFit(c *band.Cut, mean []float64, start [4]float64) (fit.Result, error) {
	half := c.Bins.Width / 2
	span := c.S[len(c.S)-1] - c.S[0]
	// In units of the start, so that all parameters are of order one.
	unit := math.Max(math.Abs(start[0]), 1e-300)
	problem := fit.Problem{
		Count: len(c.S),
		Start: []float64{start[0] / unit, start[1], start[2], start[3] / unit},
		Scale: []float64{1, start[1], 1 / start[1], 1},
		Lower: []float64{-1e3, 1 / span, c.S[0], -1e3},
		Upper: []float64{1e3, 4 / c.Bins.Width, c.S[len(c.S)-1], 1e3},
		Residuals: func(dst, p []float64) {
			for b, s := range c.S {
				dst[b] = ((-p[0]*sechBin(s, half, p[1], p[2])+p[3])*unit - mean[b]) / c.Error[b]
			}
		},
	}
	r, err := fit.Solve(problem, fit.Options{FunctionTolerance: 1e-10, StepTolerance: 1e-8, MaxIterations: 200})
	if err != nil {
		return r, err
	}
	if r.AtBound[1] || r.AtBound[2] {
		return r, fmt.Errorf("the band's width runs out of the window: κ = %.3g, s₀ = %.3g", r.Params[1], r.Params[2])
	}
	r.Params[0] *= unit
	r.Params[3] *= unit
	return r, nil
}

// FitWidth fits the cut, starting from the predicted κ, and resamples shots.
func FitWidth(c *band.Cut, kappa float64, resamples int, seed uint64) (*Width, error) {
	lowest, at := 0.0, 0.0
	for b, v := range c.Mean {
		if v < lowest {
			lowest, at = v, c.S[b]
		}
	}
	best, err := fit.Result{}, error(nil)
	for _, start := range [][4]float64{{-lowest, kappa, 0, 0}, {-lowest, kappa, at, 0}, {-lowest, kappa / 2, at, 0}} {
		r, e := profileFit(c, c.Mean, start)
		if e == nil && (best.Params == nil || r.ChiSquare < best.ChiSquare) {
			best, err = r, nil
		} else if e != nil && best.Params == nil {
			err = e
		}
	}
	if best.Params == nil {
		return nil, fmt.Errorf("the width of the band could not be fitted: %w", err)
	}
	w := &Width{ChiSquare: best.ChiSquare, DegreesOfFreedom: best.DegreesOfFreedom}
	w.Amplitude, w.Kappa, w.Delay, w.Offset = best.Params[0], best.Params[1], best.Params[2], best.Params[3]
	w.Covariance = w.sandwich(c)
	r := rand.New(rand.NewPCG(seed, 0x3ec4))
	mean := make([]float64, len(c.S))
	start := [4]float64(best.Params)
	for range resamples {
		c.Resample(mean, r)
		p, err := profileFit(c, mean, start)
		if err != nil {
			w.Failed++
			continue
		}
		w.Samples = append(w.Samples, [4]float64(p.Params))
	}
	return w, nil
}

// sandwich returns (JᵀWJ)⁻¹ JᵀWCWJ (JᵀWJ)⁻¹ with C the covariance of the bins,
// which share shots and so are not independent, and W the weights of the fit.
func (w *Width) sandwich(c *band.Cut) *mat.SymDense {
	p := []float64{w.Amplitude, w.Kappa, w.Delay, w.Offset}
	n, half := len(c.S), c.Bins.Width/2
	jac := mat.NewDense(n, 4, nil)
	for b, s := range c.S {
		f := func(q []float64) float64 { return -q[0]*sechBin(s, half, q[1], q[2]) + q[3] }
		for k := range p {
			h := 1e-5 * math.Max(math.Abs(p[k]), []float64{1e-8, 1e-3, 1e-3, 1e-8}[k])
			up, down := append([]float64(nil), p...), append([]float64(nil), p...)
			up[k] += h
			down[k] -= h
			jac.Set(b, k, (f(up)-f(down))/(2*h))
		}
	}
	weighted := mat.DenseCopyOf(jac)
	weighted.Apply(func(b, _ int, v float64) float64 { return v / (c.Error[b] * c.Error[b]) }, weighted)
	var normal, inverse, middle, left, full mat.Dense
	normal.Mul(jac.T(), weighted)
	if inverse.Inverse(&normal) != nil {
		return nil
	}
	left.Mul(&inverse, weighted.T())
	middle.Mul(&left, c.Covariance())
	full.Mul(&middle, left.T())
	s := mat.NewSymDense(4, nil)
	for i := range 4 {
		for j := i; j < 4; j++ {
			s.SetSym(i, j, (full.At(i, j)+full.At(j, i))/2)
		}
	}
	return s
}

// Model returns the fitted profile at s, not averaged over a bin.
func (w *Width) Model(s float64) float64 {
	return -w.Amplitude*band.Sech2(w.Kappa/2*(s-w.Delay)) + w.Offset
}

// Limits returns the central 68 % of the bootstrapped profiles at s.
func (w *Width) Limits(s float64) (low, high float64) {
	v := make([]float64, len(w.Samples))
	for i, p := range w.Samples {
		v[i] = -p[0]*band.Sech2(p[1]/2*(s-p[2])) + p[3]
	}
	return interval(v)
}

// Temperature returns κ/2π with its bootstrap interval.
func (w *Width) Temperature() (value, low, high float64) {
	t := make([]float64, len(w.Samples))
	for i, p := range w.Samples {
		t[i] = p[1] / (2 * math.Pi)
	}
	low, high = interval(t)
	return w.Kappa / (2 * math.Pi), low, high
}

// WidthBias returns the temperature that a width fit makes of a given profile
// across the bins of c, weighted as c is: the systematic error of the width as
// a thermometer. It is NaN when that cannot be fitted.
func WidthBias(c *band.Cut, profile []float64, kappa float64) float64 {
	lowest, at := 0.0, 0.0
	for b, v := range profile {
		if v < lowest {
			lowest, at = v, c.S[b]
		}
	}
	r, err := profileFit(c, profile, [4]float64{-lowest, kappa / 2, at, 0})
	if err != nil {
		return math.NaN()
	}
	return r.Params[1] / (2 * math.Pi)
}
