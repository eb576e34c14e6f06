package flow

import "math"

// Uniform is a flow of constant density 1 and constant velocity in which only
// the speed of sound changes along the way,
//
//	c²(x) = c_u² + (c_d² − c_u²)(1 + tanh(x/w))/2,
//
// the coupling and the external potential being varied together so that the
// flow stays uniform. It is the textbook horizon without a density step:
// R. Balbinot, A. Fabbri, S. Fagnocchi, A. Recati, I. Carusotto,
// Phys. Rev. A 78, 021603(R) (2008); I. Carusotto et al., New J. Phys. 10,
// 103001 (2008).
type Uniform struct {
	Velocity float64
	Width    float64

	Upstream, Downstream State
	Horizon              Horizon
}

// UniformSwitch returns the uniform flow of the given velocity with sound
// speed soundUp far upstream and soundDown far downstream. It needs
// 0 < soundDown < velocity < soundUp and width > 0; anything else gives a
// *NoFlow.
func UniformSwitch(velocity, soundUp, soundDown, width float64) (*Uniform, error) {
	if err := positive(quantity{"velocity", velocity}, quantity{"upstream sound speed", soundUp},
		quantity{"downstream sound speed", soundDown}, quantity{"width", width}); err != nil {
		return nil, err
	}
	switch {
	case velocity >= soundUp:
		return nil, noFlow(NoSubsonicPlateau, "lower the velocity or raise the upstream sound speed",
			"velocity %.6g is not below the upstream sound speed %.6g", velocity, soundUp)
	case velocity <= soundDown:
		return nil, noFlow(SonicEverywhere, "raise the velocity or lower the downstream sound speed",
			"velocity %.6g does not exceed the downstream sound speed %.6g", velocity, soundDown)
	}
	// c² = v² where tanh(x/w) = t.
	drop := soundUp*soundUp - soundDown*soundDown
	t := 2*(soundUp-velocity)*(soundUp+velocity)/drop - 1
	// 1 − t² without cancellation near either end.
	above := 2 * (soundUp - velocity) * (soundUp + velocity) / drop
	below := 2 * (velocity - soundDown) * (velocity + soundDown) / drop
	kappa := drop * above * below / (4 * width * velocity)
	return &Uniform{
		Velocity:   velocity,
		Width:      width,
		Upstream:   State{1, velocity, soundUp},
		Downstream: State{1, velocity, soundDown},
		Horizon:    horizonAt(width*math.Atanh(t), kappa),
	}, nil
}

// At implements Profile.
func (u *Uniform) At(float64) (density, velocity float64) { return 1, u.Velocity }

// Gradient implements Profile; both derivatives are zero.
func (u *Uniform) Gradient(float64) (density, velocity float64) { return 0, 0 }

// SoundSpeed implements Profile.
func (u *Uniform) SoundSpeed(x float64) float64 {
	cu, cd := u.Upstream.SoundSpeed, u.Downstream.SoundSpeed
	return math.Sqrt(cu*cu + (cd*cd-cu*cu)*logistic(2*x/u.Width))
}

// Ends implements Profile.
func (u *Uniform) Ends() (upstream, downstream State, horizon Horizon) {
	return u.Upstream, u.Downstream, u.Horizon
}

// Local implements Localiser.
func (u *Uniform) Local(x float64) Local { return Local{1, 0, u.Velocity, u.SoundSpeed(x)} }

// Span implements Profile.
func (u *Uniform) Span() (left, right float64) {
	return -flatWidths * u.Width, flatWidths * u.Width
}

// flatWidths·w from its middle a tanh step is flat to e^{−2·20} = 4e-18.
const flatWidths = 20

// logistic returns 1/(1+e^{−z}), accurate relative to its own size at both
// ends.
func logistic(z float64) float64 {
	if z > 0 {
		return 1 / (1 + math.Exp(-z))
	}
	e := math.Exp(z)
	return e / (1 + e)
}
