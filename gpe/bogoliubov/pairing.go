package bogoliubov

import (
	"math"
	"math/cmplx"
)

// The band of an actual flow has the pairing that scattering gives in place of
// the thermal factor and its fixed phase,
//
//	g₂ − 1 = (1/(π√(n_u n_d))) ∫₀^{ω_max} dω √(S₀(k_u)S₀(k_d)/(w_u w_d))
//	         · Re[⟨b_u b_d2⟩ exp(i(k_u x − k_d x' + ωt₀))],
//
// and nothing in it is free when t₀ = 0. The thermal band is the one with
// ⟨b_u b_d2⟩ = −1/(2 sinh(ω/2T)).

// Pairing returns ⟨b_u b_d2⟩ = Σ_i S_ui S*_d2i (n_i + ½) for ingoing waves with
// the populations n_i of temperature T, each in the frame of the fluid that it
// comes in. At T = 0 it is S_ud2 S*_d2d2.
func (s *Scattering) Pairing(T float64) complex128 {
	var sum complex128
	for i, energy := range s.Comoving {
		if energy <= 0 {
			continue
		}
		half := 0.5
		if T > 0 {
			half = 0.5 / math.Tanh(energy/(2*T))
		}
		sum += complex(half, 0) * s.S[U][i] * cmplx.Conj(s.S[D2][i])
	}
	return sum
}

// Pairing returns ⟨b_u b_d2⟩ at each of the window's frequencies for the flow
// of s and ingoing waves at temperature T. The error is ErrNotIntegrated.
func (w *Window) Pairing(s *Scatterer, T float64) ([]complex128, error) {
	rows, err := s.All(w.rule.omega)
	if err != nil {
		return nil, err
	}
	pairing := make([]complex128, len(rows))
	for i, r := range rows {
		pairing[i] = r.Pairing(T)
	}
	return pairing, nil
}

// Frequencies returns the window's frequencies, at which a pairing is given.
func (w *Window) Frequencies() []float64 { return w.rule.omega }

// Frequencies returns the frequencies at which a pairing is given.
func (p *Profile) Frequencies() []float64 { return p.omega }

// thermalPairing returns −1/(2 sinh(ω/2T)) at the given frequencies.
func thermalPairing(omega []float64, T float64) []complex128 {
	mustBeWarm(T)
	p := make([]complex128, len(omega))
	for i, w := range omega {
		p[i] = complex(-thermal(w, T), 0)
	}
	return p
}
