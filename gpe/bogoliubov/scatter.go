package bogoliubov

import (
	"errors"
	"fmt"
	"math"
	"math/cmplx"

	"tailrace/gpe/flow"
)

// NoHorizonError reports a flow that does not cross the speed of sound.
type NoHorizonError struct{ Up, Down flow.State }

func (e *NoHorizonError) Error() string {
	return fmt.Sprintf("no horizon: the flow has Mach number %.4g upstream and %.4g downstream; it must be below 1 upstream and above 1 downstream",
		e.Up.Mach(), e.Down.Mach())
}

// NotUniformError reports a flow whose ends are not uniform, so that waves
// cannot be told apart there.
type NotUniformError struct {
	At        float64 // place
	Departure float64 // largest relative departure of density, velocity or sound speed from the end state
}

func (e *NotUniformError) Error() string {
	return fmt.Sprintf("the flow is not uniform at x = %.4g: it departs from its end state by %.2g of itself, at most %.0e is allowed; extend the profile until it is flat",
		e.At, e.Departure, uniformity)
}

// ErrNotIntegrated means that the wave equations could not be carried through
// the flow.
var ErrNotIntegrated = errors.New("bogoliubov: the wave equations could not be integrated through this flow")

// uniformity is how flat the ends of a flow must be.
const uniformity = 1e-6

// Scatterer scatters waves at the horizon of a stationary flow. It is
// read-only and may be used from any number of goroutines, if its profile may.
type Scatterer struct {
	profile     flow.Profile
	up, down    flow.State
	left, right float64
	origin      float64 // the horizon, where phases are counted from
	meet        float64
	omegaMax    float64
}

// NewScatterer returns the scatterer of a flow, or a *NoHorizonError or
// *NotUniformError.
func NewScatterer(p flow.Profile) (*Scatterer, error) {
	s := &Scatterer{profile: p}
	var horizon flow.Horizon
	s.up, s.down, horizon = p.Ends()
	if !(s.up.Velocity > 0 && s.up.Mach() < 1 && s.down.Mach() > 1) {
		return nil, &NoHorizonError{s.up, s.down}
	}
	s.left, s.right = p.Span()
	s.origin = horizon.Position
	// The halves meet at the middle of the step, where a sharp one has its kink.
	s.meet = math.Min(math.Max(0, s.left), s.right)
	s.omegaMax = MaxFrequency(s.down.Velocity, s.down.SoundSpeed)
	for _, end := range []struct {
		x     float64
		state flow.State
	}{{s.left, s.up}, {s.right, s.down}} {
		n, v := p.At(end.x)
		off := math.Max(math.Abs(n/end.state.Density-1), math.Abs(v/end.state.Velocity-1))
		off = math.Max(off, math.Abs(p.SoundSpeed(end.x)/end.state.SoundSpeed-1))
		if !(off <= uniformity) {
			return nil, &NotUniformError{end.x, off}
		}
	}
	return s, nil
}

// MaxFrequency returns ω_max, above which nothing is emitted.
func (s *Scatterer) MaxFrequency() float64 { return s.omegaMax }

// Scattering is the matrix of amplitudes at one frequency. S[o][i] is the
// amplitude of the outgoing wave o for an ingoing wave i of unit flux; waves
// are counted u, d1, d2, where u lives upstream, d1 downstream with positive
// norm and d2 downstream with negative norm. Phases are those of plane waves
// exp(ikx) with x counted from the horizon. Above ω_max there is no d2 and its
// row and column are zero. Flux is conserved:
//
//	S† η S = η, η = diag(1, 1, −1).
//
// J. Macher, R. Parentani, Phys. Rev. A 80, 043601 (2009); A. Recati,
// N. Pavloff, I. Carusotto, Phys. Rev. A 80, 043603 (2009).
type Scattering struct {
	Omega float64
	S     [3][3]complex128
	// Energy of the ingoing waves u, d1, d2 in the frame of the fluid they
	// come in: what their thermal population depends on.
	Comoving [3]float64
	// Dying is, above ω_max, the amplitude U+V of the wave exp(ikx) that dies out
	// downstream, for ingoing waves u and d1.
	Dying [3]complex128
	// UnitarityError is the largest element of S†ηS − η in size: 0 but for
	// errors of integration.
	UnitarityError float64
}

// Channels.
const (
	U  = iota // upstream
	D1        // downstream, positive norm
	D2        // downstream, negative norm
)

// Emission returns |S_ud2|², the number of quanta sent upstream per unit time
// and frequency (times 2π) when all ingoing waves are empty.
func (s *Scattering) Emission() float64 { return square(s.S[U][D2]) }

// Coherence returns ⟨b_u b_d2⟩ = S_ud2 S*_d2d2 when all ingoing waves are
// empty, phase included.
func (s *Scattering) Coherence() complex128 { return s.S[U][D2] * cmplx.Conj(s.S[D2][D2]) }

// Temperature returns the temperature at which a black body emits as much,
// ω/ln(1 + 1/emission); 0 above ω_max.
func (s *Scattering) Temperature() float64 {
	e := s.Emission()
	if e == 0 {
		return 0
	}
	return s.Omega / math.Log1p(1/e)
}

// GreyFactor returns Γ = 1 − |S_uu|² = |S_ud1|² − |S_ud2|², the part of a wave
// sent at the horizon from upstream that is not thrown back, and so the part of
// the horizon's emission that gets out.
func (s *Scattering) GreyFactor() float64 { return 1 - square(s.S[U][U]) }

// Transmission returns |S_d1u|², the part of a wave sent at the horizon from
// upstream that goes through with positive norm.
func (s *Scattering) Transmission() float64 { return square(s.S[D1][U]) }

// HorizonTemperature returns the temperature of which the emission is Γ times
// that of a black body: ω/ln(|S_ud1|²/|S_ud2|²); 0 above ω_max.
func (s *Scattering) HorizonTemperature() float64 {
	e := s.Emission()
	if e == 0 {
		return 0
	}
	return s.Omega / math.Log(square(s.S[U][D1])/e)
}

// ThermalEmission returns the population of the wave upstream when the
// ingoing waves have the population of temperature T, each in the frame of the
// fluid that it comes in:
//
//	|S_uu|² n_u + |S_ud1|² n_d1 + |S_ud2|² (1 + n_d2).
func (s *Scattering) ThermalEmission(T float64) float64 {
	sum := s.Emission()
	for i, energy := range s.Comoving {
		if energy > 0 && T > 0 {
			sum += square(s.S[U][i]) / math.Expm1(energy/T)
		}
	}
	return sum
}

func square(z complex128) float64 { return real(z)*real(z) + imag(z)*imag(z) }

// At scatters waves of frequency omega > 0. It panics if omega is not positive
// and returns ErrNotIntegrated where the flow defies integration.
func (s *Scatterer) At(omega float64) (*Scattering, error) {
	if !(omega > 0) || math.IsInf(omega, 0) {
		panic("bogoliubov: scattering needs a finite frequency above zero")
	}
	inU, outU, dying := upstreamWaves(omega, s.up)
	in1, in2, out1, out2 := downstreamWaves(omega, s.down)
	m := newMedium(s.profile, omega)

	// From upstream: the dying wave goes first. It grows on the way, and of
	// the others only what is not that wave is kept, which changes no
	// amplitude but its own.
	left := block{count: 3}
	left.y[0] = dying.at(0) // its own amplitude does not matter
	left.y[1], left.y[2] = inU.at(s.left-s.origin), outU.at(s.left-s.origin)
	if !m.carry(&left, s.left, s.meet, (&tamer{}).tame) {
		return nil, s.failure(omega, "coming from upstream")
	}
	// From downstream: four plane waves, or above ω_max two and a dying one.
	right := block{count: 4}
	x := s.right - s.origin
	below := out2.norm != 0
	dying2 := tamer{scale: 1}
	if below {
		right.y = [4]solution{out2.at(x), out1.at(x), in1.at(x), in2.at(x)}
		if !m.carry(&right, s.right, s.meet, nil) {
			return nil, s.failure(omega, "coming from downstream")
		}
	} else {
		right.count = 3
		right.y = [4]solution{out2.at(x), out1.at(x), in1.at(x)}
		if !m.carry(&right, s.right, s.meet, dying2.tame) {
			return nil, s.failure(omega, "coming from downstream")
		}
	}

	// dying·a + outU·S_u = −inU + … : out waves on the left of the equation,
	// in waves on its right.
	var a [4][4]complex128
	var b [4][3]complex128
	for row := range 4 {
		a[row] = [4]complex128{left.y[0][row], left.y[2][row], -right.y[1][row], -right.y[0][row]}
		b[row] = [3]complex128{-left.y[1][row], right.y[2][row], right.y[3][row]}
	}
	if !eliminate(&a, &b) {
		return nil, s.failure(omega, "solving for the amplitudes")
	}
	r := &Scattering{Omega: omega, Comoving: [3]float64{inU.comoving, in1.comoving, in2.comoving}}
	for in := range 3 {
		if in == D2 && !below {
			break
		}
		r.S[U][in], r.S[D1][in] = b[1][in], b[2][in]
		if below {
			r.S[D2][in] = b[3][in]
			continue
		}
		r.Dying[in] = b[3][in] - b[2][in]*dying2.along[1]
		if in == D1 {
			r.Dying[in] -= dying2.along[2]
		}
		r.Dying[in] *= complex(dying2.scale, 0)
	}
	r.UnitarityError = r.Unitarity()
	return r, nil
}

func (s *Scatterer) failure(omega float64, where string) error {
	return fmt.Errorf("%w, at ω = %.6g (ω_max is %.6g), %s", ErrNotIntegrated, omega, s.omegaMax, where)
}

// Unitarity returns the largest element of S†ηS − η in size, over the channels
// that there are.
func (s *Scattering) Unitarity() (worst float64) {
	channels := 3
	if s.S[D2][D2] == 0 {
		channels = 2
	}
	eta := [3]complex128{1, 1, -1}
	for i := range channels {
		for j := range channels {
			var sum complex128
			for o := range channels {
				sum += cmplx.Conj(s.S[o][i]) * eta[o] * s.S[o][j]
			}
			if i == j {
				sum -= eta[i]
			}
			worst = math.Max(worst, cmplx.Abs(sum))
		}
	}
	return worst
}

// tamer takes the first solution, which grows, out of the others, and keeps its
// size. It remembers how, so that amplitudes can be said in terms of the
// solutions as they were:
//
//	y₀ = scale·y₀(original),  y_i = y_i(original) − along_i·y₀.
type tamer struct {
	scale float64
	along [4]complex128
}

func (t *tamer) tame(b *block) {
	var norm float64
	for _, z := range b.y[0] {
		norm += square(z)
	}
	factor := complex(1/math.Sqrt(norm), 0)
	t.scale *= real(factor)
	for c := range b.y[0] {
		b.y[0][c] *= factor
	}
	for i := 1; i < b.count; i++ {
		var along complex128
		for c, z := range b.y[0] {
			along += cmplx.Conj(z) * b.y[i][c]
		}
		for c, z := range b.y[0] {
			b.y[i][c] -= along * z
		}
		t.along[i] = t.along[i]/factor + along
	}
}

// eliminate solves a·z = b in place of b, by Gauss's elimination with scaled
// columns and partial pivoting in rows scaled alike.
func eliminate(a *[4][4]complex128, b *[4][3]complex128) bool {
	var column [4]float64
	for j := range 4 {
		for i := range 4 {
			column[j] = math.Max(column[j], cmplx.Abs(a[i][j]))
		}
		if !(column[j] > 0) || math.IsInf(column[j], 0) {
			return false
		}
		for i := range 4 {
			a[i][j] /= complex(column[j], 0)
		}
	}
	for i := range 4 {
		var size float64
		for _, z := range a[i] {
			size = math.Max(size, cmplx.Abs(z))
		}
		if !(size > 0) {
			return false
		}
		for j := range a[i] {
			a[i][j] /= complex(size, 0)
		}
		for j := range b[i] {
			b[i][j] /= complex(size, 0)
		}
	}
	for k := range 4 {
		pivot := k
		for i := k + 1; i < 4; i++ {
			if cmplx.Abs(a[i][k]) > cmplx.Abs(a[pivot][k]) {
				pivot = i
			}
		}
		if a[pivot][k] == 0 {
			return false
		}
		a[k], a[pivot] = a[pivot], a[k]
		b[k], b[pivot] = b[pivot], b[k]
		for i := k + 1; i < 4; i++ {
			f := a[i][k] / a[k][k]
			for j := k; j < 4; j++ {
				a[i][j] -= f * a[k][j]
			}
			for j := range b[i] {
				b[i][j] -= f * b[k][j]
			}
		}
	}
	for k := 3; k >= 0; k-- {
		for j := range b[k] {
			sum := b[k][j]
			for i := k + 1; i < 4; i++ {
				sum -= a[k][i] * b[i][j]
			}
			b[k][j] = sum / a[k][k]
		}
	}
	for k := range 4 {
		for j := range b[k] {
			b[k][j] /= complex(column[k], 0)
		}
	}
	return true
}
