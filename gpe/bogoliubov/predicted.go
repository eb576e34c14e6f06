package bogoliubov

import (
	"math"
	"math/cmplx"

	"tailrace/gpe/flow"
)

// Predicted is the band of an actual flow: the pairing that scattering gives
// in place of the thermal factor and its fixed phase,
//
//	g₂ − 1 = (1/(π√(n_u n_d))) ∫₀^{ω_max} dω √(S₀(k_u)S₀(k_d)/(w_u w_d))
//	         · Re[⟨b_u b_d2⟩ exp(i(k_u x − k_d x'))],
//
// with ⟨b_u b_d2⟩ = S_ud2 S*_d2d2 for empty ingoing waves, and in general
// Σ_i S_ui S*_d2i (n_i + ½) with the populations of the ingoing waves. Nothing
// in it is free.
type Predicted struct {
	band      *Band
	scatterer *Scatterer
	T         float64
	rules     [bandLevels]*predictedRule
}

// predictedRule is a quadrature with the pairing at its frequencies.
type predictedRule struct {
	*bandRule
	pairing []complex128
}

// NewPredicted returns the band of the flow p at atomsPerLength atoms per
// healing length at density 1, for a cloud of the given temperature. Errors are
// those of NewScatterer.
func NewPredicted(p flow.Profile, atomsPerLength, temperature float64) (*Predicted, error) {
	s, err := NewScatterer(p)
	if err != nil {
		return nil, err
	}
	return &Predicted{band: NewBand(s.up, s.down, atomsPerLength), scatterer: s, T: temperature}, nil
}

// Pairing returns ⟨b_u b_d2⟩ for ingoing waves at temperature T, each in the
// frame of the fluid that it comes in.
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

// Over returns the band over the points x × xp, where x < 0 and xp > 0 are
// counted from the horizon: row by row of x with xp running fastest. The error
// is ErrNotIntegrated.
func (p *Predicted) Over(x, xp []float64) ([]float64, error) {
	var reachX, reachXp float64
	for _, v := range x {
		reachX = math.Max(reachX, math.Abs(v))
	}
	for _, v := range xp {
		reachXp = math.Max(reachXp, math.Abs(v))
	}
	// The sharpest feature of the pairing is its fall at low frequency, ω ~ T.
	_, _, h := p.scatterer.profile.Ends()
	n := p.band.points(p.band.phase(reachX, reachXp, 0), math.Max(h.Temperature, 1e-3*p.band.limit))
	rule, err := p.rule(n)
	if err != nil {
		return nil, err
	}
	waves := func(at, k []float64) [][]complex128 {
		w := make([][]complex128, len(at))
		for i, v := range at {
			w[i] = make([]complex128, len(k))
			for q, kq := range k {
				sin, cos := math.Sincos(kq * v)
				w[i][q] = complex(cos, sin)
			}
		}
		return w
	}
	up, down := waves(x, rule.up), waves(xp, rule.down)
	dst := make([]float64, len(x)*len(xp))
	weighted := make([]complex128, len(rule.omega))
	for i := range x {
		for q := range weighted {
			weighted[q] = complex(rule.weight[q], 0) * rule.pairing[q] * up[i][q]
		}
		for j := range xp {
			var sum float64
			for q, z := range down[j] {
				// Re[weighted · conj(z)]
				sum += real(weighted[q])*real(z) + imag(weighted[q])*imag(z)
			}
			dst[i*len(xp)+j] = sum
		}
	}
	return dst, nil
}

func (p *Predicted) rule(n int) (*predictedRule, error) {
	level := 0
	for level < bandLevels-1 && bandShortest<<level < n {
		level++
	}
	if r := p.rules[level]; r != nil {
		return r, nil
	}
	rule := p.band.makeRule(bandShortest << level)
	r := &predictedRule{bandRule: &rule, pairing: make([]complex128, len(rule.omega))}
	rows, err := p.scatterer.All(rule.omega)
	if err != nil {
		return nil, err
	}
	for i, row := range rows {
		r.pairing[i] = row.Pairing(p.T)
	}
	p.rules[level] = r
	return r, nil
}
