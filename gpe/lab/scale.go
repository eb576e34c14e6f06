package lab

import "math"

// Scale is the dictionary between SI units and condensate units. In condensate
// units ħ = m = 1, the reference density is 1 and the sound speed there is 1,
// so the unit of energy is m c₀²: g₁n₀ for the frozen radial profile.
//
// All fields are in SI units.
type Scale struct {
	Mass                  float64 // m, kg
	LineDensity           float64 // n₀, atoms per m
	SoundSpeed            float64 // c₀, m/s
	HealingLength         float64 // ξ = ħ/(m c₀), m
	Time                  float64 // ħ/(m c₀²), s
	Energy                float64 // m c₀², J
	Temperature           float64 // m c₀²/k_B, K
	AtomsPerHealingLength float64 // n₀ξ, the density unit of a field in condensate units
}

// NewScale returns the scale of atoms of mass m (kg) at line density n0 (1/m)
// with sound speed c0 (m/s) there. It returns a *RangeError unless all three
// are positive and finite.
func NewScale(m, n0, c0 float64) (Scale, error) {
	if err := positive("mass", m, "kg"); err != nil {
		return Scale{}, err
	}
	if err := positive("line density", n0, "1/m"); err != nil {
		return Scale{}, err
	}
	if err := positive("sound speed", c0, "m/s"); err != nil {
		return Scale{}, err
	}
	energy := m * c0 * c0
	xi := HBar / (m * c0)
	s := Scale{
		Mass:                  m,
		LineDensity:           n0,
		SoundSpeed:            c0,
		HealingLength:         xi,
		Time:                  HBar / energy,
		Energy:                energy,
		Temperature:           energy / Boltzmann,
		AtomsPerHealingLength: n0 * xi,
	}
	// Extreme numbers can leave the range of float64 in a product.
	for _, v := range []float64{s.HealingLength, s.Time, s.Energy, s.Temperature, s.AtomsPerHealingLength} {
		if !(v > 0) || math.IsInf(v, 0) {
			return Scale{}, &RangeError{Quantity: "sound speed", Value: c0, Unit: "m/s",
				Allowed: "mass, density and sound speed must lead to healing length, time and energy within the range of floating-point numbers"}
		}
	}
	return s, nil
}

// Metres turns a length in ξ into metres.
func (s Scale) Metres(x float64) float64 { return x * s.HealingLength }

// FromMetres turns a length in metres into ξ.
func (s Scale) FromMetres(x float64) float64 { return x / s.HealingLength }

// Seconds turns a time in ħ/(m c₀²) into seconds.
func (s Scale) Seconds(t float64) float64 { return t * s.Time }

// FromSeconds turns a time in seconds into ħ/(m c₀²).
func (s Scale) FromSeconds(t float64) float64 { return t / s.Time }

// MetresPerSecond turns a speed in c₀ into m/s.
func (s Scale) MetresPerSecond(v float64) float64 { return v * s.SoundSpeed }

// FromMetresPerSecond turns a speed in m/s into c₀.
func (s Scale) FromMetresPerSecond(v float64) float64 { return v / s.SoundSpeed }

// Joules turns an energy in m c₀² into joules.
func (s Scale) Joules(e float64) float64 { return e * s.Energy }

// FromJoules turns an energy in joules into m c₀².
func (s Scale) FromJoules(e float64) float64 { return e / s.Energy }

// Kelvin turns a temperature in m c₀²/k_B into kelvin.
func (s Scale) Kelvin(t float64) float64 { return t * s.Temperature }

// FromKelvin turns a temperature in kelvin into m c₀²/k_B.
func (s Scale) FromKelvin(t float64) float64 { return t / s.Temperature }

// Hertz turns an angular frequency ω in m c₀²/ħ into the ordinary frequency
// ω/2π in Hz.
func (s Scale) Hertz(omega float64) float64 { return omega / (2 * math.Pi * s.Time) }

// FromHertz turns an ordinary frequency ω/2π in Hz into the angular frequency
// ω in m c₀²/ħ.
func (s Scale) FromHertz(f float64) float64 { return 2 * math.Pi * f * s.Time }

// PerSecond turns a rate, such as a surface gravity or a growth rate, in
// m c₀²/ħ into 1/s. No 2π enters.
func (s Scale) PerSecond(rate float64) float64 { return rate / s.Time }

// FromPerSecond turns a rate in 1/s into m c₀²/ħ.
func (s Scale) FromPerSecond(rate float64) float64 { return rate * s.Time }

// AtomsPerMetre turns a line density in n₀ into atoms per metre.
func (s Scale) AtomsPerMetre(n float64) float64 { return n * s.LineDensity }

// FromAtomsPerMetre turns a line density in atoms per metre into n₀.
func (s Scale) FromAtomsPerMetre(n float64) float64 { return n / s.LineDensity }

// positive returns a *RangeError unless v is positive and finite.
func positive(quantity string, v float64, unit string) error {
	if !(v > 0) || math.IsInf(v, 0) {
		return &RangeError{Quantity: quantity, Value: v, Unit: unit, Allowed: "it must be positive and finite"}
	}
	return nil
}
