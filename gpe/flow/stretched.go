package flow

// Stretched is a flow drawn out along its direction by a factor: the same ends,
// the same densities, velocities and sound speeds on the way, but a horizon that
// is Factor times as smooth. Some potential makes every such flow stationary, so
// that waves scatter at it as at any other: it is a family of flows with which
// a measured sharpness can be compared.
type Stretched struct {
	Profile Profile
	Factor  float64 // above zero; 1 leaves the flow as it is
}

// At implements Profile.
func (s Stretched) At(x float64) (density, velocity float64) { return s.Profile.At(x / s.Factor) }

// Gradient implements Profile.
func (s Stretched) Gradient(x float64) (density, velocity float64) {
	density, velocity = s.Profile.Gradient(x / s.Factor)
	return density / s.Factor, velocity / s.Factor
}

// SoundSpeed implements Profile.
func (s Stretched) SoundSpeed(x float64) float64 { return s.Profile.SoundSpeed(x / s.Factor) }

// Local implements Localiser.
func (s Stretched) Local(x float64) Local {
	if l, ok := s.Profile.(Localiser); ok {
		f := l.Local(x / s.Factor)
		f.Gradient /= s.Factor
		return f
	}
	n, v := s.At(x)
	dn, _ := s.Gradient(x)
	return Local{n, dn, v, s.SoundSpeed(x)}
}

// Ends implements Profile. The middle of the step stays where it is.
func (s Stretched) Ends() (upstream, downstream State, horizon Horizon) {
	upstream, downstream, horizon = s.Profile.Ends()
	return upstream, downstream, horizonAt(horizon.Position*s.Factor, horizon.SurfaceGravity/s.Factor)
}

// Span implements Profile.
func (s Stretched) Span() (left, right float64) {
	left, right = s.Profile.Span()
	return left * s.Factor, right * s.Factor
}

var _ Profile = Stretched{}
