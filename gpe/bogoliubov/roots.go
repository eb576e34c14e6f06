package bogoliubov

import (
	"math"
	"math/cmplx"

	"tailrace/gpe/flow"
)

// wave is a solution exp(ikx − iωt) of Bogoliubov's equations in a uniform
// flow, as the sum and the difference of the relative amplitudes U and V of
// δψ = ψ₀ (U e^{−iωt} + V* e^{iωt}).
type wave struct {
	k         complex128
	sum, diff complex128 // U+V and U−V
	norm      int        // the sign of |U|²−|V|², 0 for evanescent waves
	comoving  float64    // |ω − vk|, the energy in the frame of the fluid
}

// newWave returns the wave k, real waves normalised to unit flux
// n(|U|²−|V|²)|dω/dk| = 1.
func newWave(omega float64, k complex128, s flow.State) wave {
	v, c := s.Velocity, s.SoundSpeed
	// From ω(U+V) = (k²/2)(U−V) + vk(U+V): the difference is (ω−vk)/(k²/2)
	// times the sum.
	ratio := (complex(omega, 0) - complex(v, 0)*k) * 2 / (k * k)
	w := wave{k: k, sum: 1, diff: ratio}
	if imag(k) != 0 {
		return w
	}
	q := real(k)
	w.comoving = Energy(q, c)
	w.norm = 1
	if omega-v*q < 0 {
		w.norm = -1
	}
	// U+V and U−V have product |U|²−|V|² and ratio E/ε, E = k²/2.
	e := math.Sqrt(math.Abs(q) / (2 * phaseSpeed(q, c)))
	group := v + math.Copysign(groupSpeed(math.Abs(q), c), q)*float64(w.norm)
	// At ω_max, to rounding, the group speed is none.
	flux := 1 / math.Sqrt(s.Density*math.Max(math.Abs(group), 1e-10))
	w.sum, w.diff = complex(e*flux, 0), complex(float64(w.norm)/e*flux, 0)
	return w
}

// rightward returns the wave k > 0 on the branch ω = vk + ε(k), which runs
// with the flow.
func rightward(omega, v, c float64) float64 {
	// vk + ε is convex and rising; Newton comes down from an upper bound.
	k := math.Min(omega/(v+c), math.Sqrt(v*v+2*omega)-v)
	for range 100 {
		step := (k*(v+phaseSpeed(k, c)) - omega) / (v + groupSpeed(k, c))
		if !(step > 4e-16*k) {
			break
		}
		k -= step
	}
	return k
}

// leftwardShort returns |k| of the wave k < 0 on the branch ω = vk + ε(k) of a
// supersonic flow: short enough to run against it.
func leftwardShort(omega, v, c float64) float64 {
	// ε(q) ≥ q²/2 bounds the root from above, and ε − vq is convex.
	q := v + math.Sqrt(v*v+2*omega)
	for range 100 {
		step := (q*(phaseSpeed(q, c)-v) - omega) / (groupSpeed(q, c) - v)
		if !(step > 4e-16*q) {
			break
		}
		q -= step
	}
	return q
}

// The dispersion relation (ω−vk)² = c²k² + k⁴/4 is a quartic without cubic
// term: its four roots sum to 0 and multiply to −4ω². Two roots that are safely
// found give the other two.

// upstreamWaves returns the waves of a subsonic flow: the ingoing and the
// outgoing one and the one that dies out upstream.
func upstreamWaves(omega float64, s flow.State) (in, out, evanescent wave) {
	v, c := s.Velocity, s.SoundSpeed
	kin := rightward(omega, v, c)
	kout, _ := OutgoingUp(omega, v, c)
	half, product := -(kin+kout)/2, -4*omega*omega/(kin*kout)
	k := complex(half, -math.Sqrt(product-half*half))
	return newWave(omega, complex(kin, 0), s), newWave(omega, complex(kout, 0), s), newWave(omega, k, s)
}

// downstreamWaves returns the waves of a supersonic flow. The first pair has
// positive norm. The second has negative norm below ω_max; above it there is
// no such wave, and out2 is the one that dies out downstream.
func downstreamWaves(omega float64, s flow.State) (in1, in2, out1, out2 wave) {
	v, c := s.Velocity, s.SoundSpeed
	k1 := rightward(omega, v, c)
	k1in := -leftwardShort(omega, v, c)
	in1, out1 = newWave(omega, complex(k1in, 0), s), newWave(omega, complex(k1, 0), s)
	half, product := -(k1+k1in)/2, -4*omega*omega/(k1*k1in)
	if omega < MaxFrequency(v, c) {
		k2, _ := OutgoingDown(omega, v, c)
		return in1, newWave(omega, complex(product/k2, 0), s), out1, newWave(omega, complex(k2, 0), s)
	}
	// Rounding may still see two real waves there.
	decay := math.Max(math.Sqrt(math.Max(product-half*half, 0)), 1e-9)
	return in1, wave{}, out1, newWave(omega, complex(half, decay), s)
}

// solution is the state (D, D′, P, P′) of the equations at a place, with
// D = U+V and P = U−V.
type solution [4]complex128

// at returns the wave at x.
func (w wave) at(x float64) solution {
	e := cmplx.Exp(1i * w.k * complex(x, 0))
	d, p := w.sum*e, w.diff*e
	return solution{d, 1i * w.k * d, p, 1i * w.k * p}
}
