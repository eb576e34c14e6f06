package gpe

import (
	"fmt"
	"math"
	"math/cmplx"

	"gonum.org/v1/gonum/dsp/fourier"

	"tailrace/gpe/flow"
	"tailrace/gpe/fluid"
	"tailrace/gpe/lanes"
)

// Stationary is a flow at rest in its own frame: the field of a flow.Profile on
// a ring, with the potential and the coupling that keep it as it is. With
// A = √n, j = nv and a coupling g that gives the profile's own speed of sound,
// c² = g n f′(n),
//
//	V = A″/2A − v²/2 + d²/2 − g f(n),
//
// so that the field's energy in the frame of drift d is zero and its phase
// stands still too. V is taken from the kinetic energy as the propagator itself
// computes it, by Fourier's series on the grid.
//
// A ring needs a way back from the downstream to the upstream state. It lies at
// Seam, where density and coupling go back over a Gaussian's integral of
// deviation SeamWidth at constant current, wide enough for waves to follow. There the
// flow becomes subsonic again: a second horizon, which in the long run is
// unstable, and with the first one the more so (S. Finazzi, R. Parentani, New
// J. Phys. 12, 095015 (2010)). A run must be over before anything comes back
// from it: waves leave it upstream, towards the horizon, at up to the speed of
// the shortest ingoing waves.
//
// What a profile has beyond the grid's shortest waves is left out smoothly,
// which rounds sharp edges over about a grid point.
type Stationary struct {
	Grid    Grid
	Law     fluid.Law
	Profile flow.Profile

	Field           []complex128 // ψ₀ without the factor exp(idx), [N]
	Seam, SeamWidth float64      // in ξ
	// Residual is the largest |Im(Hψ₀/ψ₀)|, the rate at which ψ₀ departs from
	// itself because the grid does not resolve it; the real part vanishes.
	Residual float64
	// Rounding is how far density and coupling are from the profile's on the
	// grid, relative to themselves, because its shortest waves are left out.
	Rounding float64

	v, g  []float64
	drift float64
}

const (
	// SeamReach is how many deviations from its middle the seam is flat to 1e-16.
	SeamReach = 8.3
	// refinement is how many times finer than the grid a profile is sampled.
	refinement = 16
)

// NewStationary returns the flow p on grid g in a fluid of the given law, with a
// seam of the given width as far right as it fits. The law and the profile
// together give the coupling; for flows over a step in their own law it is 1.
// The error says so when the flow and its seam do not fit the grid; the
// conditions on the number of points are those of NewPropagator.
func NewStationary(g Grid, law fluid.Law, p flow.Profile, seamWidth float64) (*Stationary, error) {
	if !(seamWidth > 0) {
		panic("gpe: the seam's width must be positive")
	}
	left, right := p.Span()
	end := g.Origin + g.Length()
	s := &Stationary{Grid: g, Law: law, Profile: p, Seam: end - SeamReach*seamWidth, SeamWidth: seamWidth}
	if left < g.Origin || right > s.Seam-SeamReach*seamWidth {
		return nil, fmt.Errorf("a flow that changes from x = %.4g to %.4g, and its way back over %.4g, do not fit a grid from %.4g to %.4g; lengthen the grid or narrow the seam",
			left, right, 2*SeamReach*seamWidth, g.Origin, end)
	}
	amplitude, coupling := s.sample()
	s.wind(amplitude)
	s.balance(amplitude, coupling)
	return s, nil
}

// sample returns A and g on the grid, without what it does not resolve.
func (s *Stationary) sample() (amplitude, coupling []float64) {
	fine := Grid{N: refinement * s.Grid.N, Dx: s.Grid.Dx / refinement, Origin: s.Grid.Origin}
	amplitude, coupling = make([]float64, fine.N), make([]float64, fine.N)
	up, _, _ := s.Profile.Ends()
	stiffness := func(n, c float64) float64 { return c * c / (n * s.Law.Slope(n)) }
	gUp := stiffness(up.Density, up.SoundSpeed)
	for j := range fine.N {
		x := fine.X(j)
		n, _ := s.Profile.At(x)
		g := stiffness(n, s.Profile.SoundSpeed(x))
		back := math.Erfc(-(x-s.Seam)/(math.Sqrt2*s.SeamWidth)) / 2
		amplitude[j] = math.Sqrt(n + (up.Density-n)*back)
		coupling[j] = g + (gUp-g)*back
	}
	exactA, exactG := amplitude, coupling
	amplitude, coupling = s.resolve(amplitude), s.resolve(coupling)
	for j, a := range amplitude {
		a /= exactA[refinement*j]
		s.Rounding = math.Max(s.Rounding, math.Max(math.Abs(a*a-1), math.Abs(coupling[j]/exactG[refinement*j]-1)))
	}
	return amplitude, coupling
}

// resolve brings a function from the finer grid to the grid, with its waves
// damped by exp(−36 (k/0.7k_max)¹⁶): to rounding at 0.7k_max, beyond which
// products of two would come back as longer ones, and not at all below half of
// that.
func (s *Stationary) resolve(fine []float64) []float64 {
	n := s.Grid.N
	edge := 0.7 * float64(n) / 2
	c := fourier.NewFFT(len(fine)).Coefficients(nil, fine)[:n/2+1]
	for q := range c {
		c[q] *= complex(math.Exp(-36*math.Pow(float64(q)/edge, 16))/float64(len(fine)), 0)
	}
	return fourier.NewFFT(n).Sequence(nil, c)
}

// wind chooses the drift and sets the field to A exp(i∫(v−d)dx). The phase must
// close around the ring; of the drifts for which it does the nearest to the
// downstream velocity is taken, where waves are shortest.
func (s *Stationary) wind(amplitude []float64) {
	n := s.Grid.N
	up, down, _ := s.Profile.Ends()
	current := up.Density * up.Velocity
	phase := make([]float64, n)
	for j, a := range amplitude {
		phase[j] = current / (a * a)
	}
	fft := fourier.NewFFT(n)
	c := fft.Coefficients(nil, phase)
	mean := real(c[0]) / float64(n)
	turn := 2 * math.Pi / s.Grid.Length()
	turns := math.Round((mean - down.Velocity) / turn)
	s.drift = mean - turns*turn
	// ∫(v − mean) by its series; the turns are added to it.
	for q := range c {
		if q == 0 || 2*q == n {
			c[q] = 0
			continue
		}
		c[q] /= complex(0, turn*float64(q)*float64(n))
	}
	fft.Sequence(phase, c)
	s.Field = make([]complex128, n)
	for j, a := range amplitude {
		s.Field[j] = cmplx.Rect(a, phase[j]+2*math.Pi*turns*float64(j)/float64(n))
	}
}

// balance sets the potential that makes the field stationary, and the residual.
func (s *Stationary) balance(amplitude, coupling []float64) {
	n := s.Grid.N
	fft := fourier.NewCmplxFFT(n)
	c := fft.Coefficients(nil, s.Field)
	for q := range c {
		c[q] *= complex(kineticEnergy(s.Grid, q, s.drift)/float64(n), 0)
	}
	c = fft.Sequence(c, c)
	s.v, s.g = make([]float64, n), coupling
	for j, a := range amplitude {
		local := c[j] / s.Field[j]
		s.v[j] = -real(local) - coupling[j]*s.Law.Mu(a*a)
		s.Residual = math.Max(s.Residual, math.Abs(imag(local)))
	}
}

// kineticEnergy returns k²/2 + dk of Fourier index q. At the Nyquist wave, which
// stands for both signs of k, the drift term is left out.
func kineticEnergy(g Grid, q int, drift float64) float64 {
	k := g.Wavenumber(q)
	if 2*q == g.N {
		return k * k / 2
	}
	return k*k/2 + drift*k
}

// Departure returns the largest difference of the density in a lane of b from
// that of the flow, as a share of the flow's largest.
func (s *Stationary) Departure(b *lanes.Batch, lane int) float64 {
	worst, most := 0.0, 0.0
	for j, z := range s.Field {
		re, im := b.Re[j*lanes.Width+lane], b.Im[j*lanes.Width+lane]
		n := real(z)*real(z) + imag(z)*imag(z)
		worst, most = math.Max(worst, math.Abs(re*re+im*im-n)), math.Max(most, n)
	}
	return worst / most
}

// Potential implements Landscape.
func (s *Stationary) Potential(dst []float64, _, scale float64) {
	for j, v := range s.v {
		dst[j] = scale * v
	}
}

// Coupling implements Landscape.
func (s *Stationary) Coupling(dst []float64, _, scale float64) {
	for j, g := range s.g {
		dst[j] = scale * g
	}
}

// Steady implements Landscape: nothing ever changes.
func (s *Stationary) Steady(float64) (potential, coupling bool) { return true, true }

// Power implements Landscape: none.
func (s *Stationary) Power(_, _ []float64, _ float64) (lo, hi int) { return 0, 0 }

// Drift implements Landscape.
func (s *Stationary) Drift() float64 { return s.drift }

var _ Landscape = (*Stationary)(nil)
