package horizon

import (
	"fmt"

	"gonum.org/v1/gonum/mat"
	"gonum.org/v1/gonum/stat"
)

// Ripple is how far the noise-free mean field departs from a smooth plateau in
// one window: what a bad start of the sweep leaves behind, and what can pass
// for a correlation when the step's position jitters.
type Ripple struct {
	Side     string
	Relative float64 // rms about a parabola, over the mean density
	Dips     int     // dark solitons: narrow minima more than a fifth deep
}

// rippleLimit is the rms beyond which a ripple is reported: below it the
// plateau of a well-started sweep settles (0.05 % upstream, 0.5 % downstream
// by measurement). dipDepth is what counts as a soliton.
const (
	rippleLimit = 0.02
	dipDepth    = 0.2
)

func (p *Profile) ripple(side string, lo, hi float64) Ripple {
	var x, n []float64
	for j, v := range p.X {
		if lo < v && v < hi {
			x, n = append(x, v), append(n, p.Density[j])
		}
	}
	r := Ripple{Side: side}
	if len(x) < 4 {
		return r
	}
	rest := aboutParabola(x, n)
	mean := stat.Mean(n, nil)
	r.Relative = stat.StdDev(rest, nil) / mean
	for i := 1; i+1 < len(rest); i++ {
		if rest[i] < -dipDepth*mean && rest[i] <= rest[i-1] && rest[i] < rest[i+1] {
			r.Dips++
		}
	}
	return r
}

// Warning returns what is to be said of r, or nothing. The cure depends on how
// the sweep was started.
func (r Ripple) Warning(cure string) string {
	switch {
	case r.Dips > 0:
		return fmt.Sprintf("%d dark solitons in the %s window (dips deeper than %.0f %%): %s", r.Dips, r.Side, 100*dipDepth, cure)
	case r.Relative > rippleLimit:
		return fmt.Sprintf("the mean density in the %s window ripples by %.1f %% rms (at most %.0f %% is clean): %s", r.Side, 100*r.Relative, 100*rippleLimit, cure)
	}
	return ""
}

// aboutParabola returns what is left of n(x) when its least-squares parabola,
// the slow change along a trap, is taken out.
func aboutParabola(x, n []float64) []float64 {
	middle, half := (x[0]+x[len(x)-1])/2, (x[len(x)-1]-x[0])/2
	design := mat.NewDense(len(x), 3, nil)
	for i, v := range x {
		u := (v - middle) / half
		design.SetRow(i, []float64{1, u, u * u})
	}
	data := mat.NewVecDense(len(n), n)
	var p, fitted mat.VecDense
	if err := p.SolveVec(design, data); err != nil {
		panic("horizon: a parabola through distinct points: " + err.Error())
	}
	fitted.MulVec(design, &p)
	rest := make([]float64, len(n))
	for i := range rest {
		rest[i] = n[i] - fitted.AtVec(i)
	}
	return rest
}
