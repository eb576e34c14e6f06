// Package horizon draws up the account of a run: what flow the ensemble made,
// what band its correlation map shows, which temperature that is, and how all
// of it compares with the theory of the flow.
//
// Positions are measured from the horizon and velocities in the step's frame,
// everything in condensate units.
package horizon

import (
	"fmt"
	"math"

	"gonum.org/v1/gonum/dsp/fourier"

	"tailrace/gpe"
	"tailrace/gpe/flow"
)

// Frame is where the step is at the recorded time and how fast it moves; for a
// flow that is given at rest it is at 0 and does not move.
type Frame struct {
	Position float64 // in the grid's coordinates
	Speed    float64 // of the step, to the left
	Age      float64 // how long the horizon has emitted
}

// NoHorizonError says that the mean flow nowhere passes from below to above
// the speed of sound near the step.
type NoHorizonError struct {
	Mach float64 // the largest found within reach
}

func (e *NoHorizonError) Error() string {
	return fmt.Sprintf("the flow near the step reaches Mach %.3g but does not pass from below to above 1: a deeper or a faster step makes a horizon", e.Mach)
}

// near is how far from the step the horizon is looked for, in ξ.
const near = 15

// Profile is a mean flow in the step's frame, on the grid of the run.
type Profile struct {
	X                             []float64 // from the step
	Density, Velocity, SoundSpeed []float64
	Horizon                       flow.Horizon // position from the step
}

// NewProfile makes the flow's profile from density and current in the grid's
// frame and finds the horizon: the crossing v = c nearest to the step at which
// v − c rises. κ = d(v−c)/dx there, from the field's Fourier series. It returns
// *NoHorizonError when there is none within 15 ξ.
func NewProfile(p *gpe.Problem, f Frame, density, current []float64, time float64) (*Profile, error) {
	g := p.Grid
	pr := &Profile{X: g.Positions(), Density: density, Velocity: make([]float64, g.N), SoundSpeed: make([]float64, g.N)}
	coupling := make([]float64, g.N)
	p.Landscape.Coupling(coupling, time, 1)
	for j := range pr.X {
		pr.X[j] -= f.Position
		pr.Velocity[j], pr.SoundSpeed[j] = math.NaN(), math.NaN()
		if density[j] > 1e-3 {
			pr.Velocity[j] = current[j]/density[j] + f.Speed
			pr.SoundSpeed[j] = math.Sqrt(coupling[j]) * p.Law.SoundSpeed(density[j])
		}
	}
	best, mach := -1, 0.0
	for j := 1; j < g.N; j++ {
		if math.Abs(pr.X[j]) > near {
			continue
		}
		mach = math.Max(mach, pr.Velocity[j]/pr.SoundSpeed[j])
		if pr.excess(j-1) < 0 && pr.excess(j) >= 0 && (best < 0 || math.Abs(pr.X[j]) < math.Abs(pr.X[best])) {
			best = j
		}
	}
	if best < 0 {
		return nil, &NoHorizonError{Mach: mach}
	}
	n, flux, g2 := newSeries(g, density), newSeries(g, current), newSeries(g, coupling)
	// excess is v − c and its slope between points, where all is analytic.
	excess := func(x float64) (value, slope float64) {
		n, dn := n.at(x)
		j, dj := flux.at(x)
		k, dk := g2.at(x)
		c := math.Sqrt(k) * p.Law.SoundSpeed(n)
		dc := math.Sqrt(k)*p.Law.SoundSlope(n)*dn + c*dk/(2*k)
		return j/n + f.Speed - c, dj/n - j*dn/(n*n) - dc
	}
	lo, hi := pr.X[best-1]+f.Position, pr.X[best]+f.Position
	for range 60 {
		middle := (lo + hi) / 2
		if v, _ := excess(middle); v < 0 {
			lo = middle
		} else {
			hi = middle
		}
	}
	_, kappa := excess(lo)
	pr.Horizon = flow.Horizon{Position: lo - f.Position, SurfaceGravity: kappa, Temperature: kappa / (2 * math.Pi)}
	return pr, nil
}

func (p *Profile) excess(j int) float64 { return p.Velocity[j] - p.SoundSpeed[j] }

// series is a real field as the Fourier series of its grid.
type series struct {
	origin float64
	k      []float64
	c      []complex128
}

func newSeries(g gpe.Grid, f []float64) series {
	s := series{origin: g.Origin, c: fourier.NewFFT(g.N).Coefficients(nil, f), k: make([]float64, g.N/2+1)}
	for q := range s.c {
		s.k[q] = 2 * math.Pi * float64(q) / g.Length()
		s.c[q] *= complex(2/float64(g.N), 0) // both signs of k
		if q == 0 || 2*q == g.N {
			s.c[q] /= 2
		}
	}
	return s
}

// at returns the field and its slope at any x.
func (s series) at(x float64) (value, slope float64) {
	for q, c := range s.c {
		sin, cos := math.Sincos(s.k[q] * (x - s.origin))
		value += real(c)*cos - imag(c)*sin
		slope -= s.k[q] * (real(c)*sin + imag(c)*cos)
	}
	return value, slope
}

// state is the mean of the profile over lo < x < hi, from the step.
func (p *Profile) state(lo, hi float64) flow.State {
	var s flow.State
	n := 0.0
	for j, x := range p.X {
		if lo < x && x < hi && !math.IsNaN(p.Velocity[j]) {
			s.Density += p.Density[j]
			s.Velocity += p.Density[j] * p.Velocity[j]
			s.SoundSpeed += p.SoundSpeed[j]
			n++
		}
	}
	s.Velocity /= s.Density // mean current over mean density
	s.Density /= n
	s.SoundSpeed /= n
	return s
}
