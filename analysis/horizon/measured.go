package horizon

import (
	"math"

	"tailrace/analysis/band"
	"tailrace/analysis/correlation"
	"tailrace/analysis/moments"
	"tailrace/gpe/bogoliubov"
	"tailrace/gpe/flow"
)

// Pictures is measured shots laid on top of each other by the step, in units of
// n₀: X are the pixels' positions from it, rising.
type Pictures struct {
	X     []float64
	Shots moments.Shots
	// Granularity is the variance that a pixel has over its mean density from
	// the atoms and the photons alone, in n₀, and Overlap how much of it
	// pixels i apart share (1 at 0): what is taken off the map near its
	// diagonal.
	Granularity float64
	Overlap     []float64
}

// Mean returns the mean density of each pixel and its standard error.
func (p Pictures) Mean() (mean, err []float64) {
	n, count := p.Shots.Pixels, float64(p.Shots.Count())
	mean, err = make([]float64, n), make([]float64, n)
	square := make([]float64, n)
	for i := range p.Shots.Count() {
		for k, v := range p.Shots.Shot(i) {
			mean[k] += float64(v)
			square[k] += float64(v) * float64(v)
		}
	}
	for k := range mean {
		mean[k] /= count
		err[k] = math.Sqrt(math.Max(square[k]/count-mean[k]*mean[k], 0) / (count - 1))
	}
	return mean, err
}

// Interpret draws up the account of measured shots, against the flow that in
// predicts. Of in it needs Predicted, Problem with AtomsPerLength, Temperature
// and Law, Frame.Age or Window, Settings and, for pictures, Response. Errors are
// *band.ErrWindow, *bogoliubov.NoHorizonError and those of fits that cannot be
// set up; a fit that fails is a warning.
func Interpret(in Input, p Pictures) (*Account, error) {
	a, x, err := measured(in, p)
	if err != nil {
		return nil, err
	}
	mean, _ := p.Mean()
	sides, err := band.NewSides(p.Shots, x, mean, a.Window)
	if err != nil {
		return nil, err
	}
	a.Map = correlation.Measured(p.Shots, x, mean, p.Granularity, p.Overlap)
	return a, a.read(sides, in)
}

// HeightError returns how far the density of the windows is from the predicted
// one, with the error of its mean: the relative standard error of the band's
// predicted height.
func HeightError(in Input, p Pictures) (float64, error) {
	a, _, err := measured(in, p)
	if err != nil {
		return 0, err
	}
	height := func(f Flow) float64 { return math.Sqrt(f.Upstream.Density * f.Downstream.Density) }
	return math.Hypot(math.Abs(height(a.Measured)/height(a.Predicted)-1),
		math.Hypot(a.DensityError[0]/a.Measured.Upstream.Density, a.DensityError[1]/a.Measured.Downstream.Density)/2), nil
}

// measured is the part of an account that needs no correlation.
func measured(in Input, p Pictures) (*Account, []float64, error) {
	a := &Account{Time: in.Time, Trajectories: p.Shots.Count()}
	if err := a.predict(in); err != nil {
		return nil, nil, err
	}
	a.OmegaMax = a.scatterer.MaxFrequency()
	a.SechHeight = bogoliubov.SechAmplitude(a.Predicted.Horizon.SurfaceGravity, a.Predicted.Upstream, a.Predicted.Downstream, in.Problem.AtomsPerLength)
	if a.Window = in.Window; a.Window == (band.Window{}) {
		a.Window = band.AgedWindow(a.Predicted.Geometry(), in.Frame.Age, in.Settings.Near, in.Settings.Fraction)
	}
	x := make([]float64, len(p.X))
	for j := range x {
		x[j] = p.X[j] - a.Predicted.Horizon.Position
	}
	a.fit(x)
	mean, meanError := p.Mean()
	if err := a.Window.Check(x, mean); err != nil {
		return nil, nil, err
	}
	a.measureFlow(in, x, mean, meanError)
	return a, x, nil
}

// fit cuts the window down to the picture.
func (a *Account) fit(x []float64) {
	w := &a.Window
	if lo := x[0]; w.UpFar < lo {
		a.warn("the upstream window ends at %.3g ξ with the picture; the band reaches %.3g", lo, w.UpFar)
		w.UpFar = lo
	}
	if hi := x[len(x)-1]; w.DownFar > hi {
		a.warn("the downstream window ends at %.3g ξ with the picture; the band reaches %.3g", hi, w.DownFar)
		w.DownFar = hi
	}
}

// measureFlow takes densities from the windows, the velocity upstream from the
// prediction and that downstream from the conservation of current.
func (a *Account) measureFlow(in Input, x, mean, meanError []float64) {
	w := a.Window
	average := func(lo, hi float64) (n, err float64) {
		count := 0.0
		for j, at := range x {
			if at >= lo && at <= hi {
				n += mean[j]
				err += meanError[j] * meanError[j]
				count++
			}
		}
		return n / count, math.Sqrt(err) / count
	}
	up, upError := average(w.UpFar, w.UpNear)
	down, downError := average(w.DownNear, w.DownFar)
	a.DensityError = [2]float64{upError, downError}
	v := a.Predicted.Upstream.Velocity
	law := in.Problem.Law
	a.Measured = Flow{
		flow.State{Density: up, Velocity: v, SoundSpeed: law.SoundSpeed(up)},
		flow.State{Density: down, Velocity: v * up / down, SoundSpeed: law.SoundSpeed(down)},
		a.Predicted.Horizon,
	}
}
