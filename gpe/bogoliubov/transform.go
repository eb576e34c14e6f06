package bogoliubov

import (
	"math"
	"math/cmplx"
)

// Transform is the double Fourier transform of a window of the map on the
// branches of the partners,
//
//	G(ω) = Σ_x Σ_x' [(g₂ − 1)(x, x') − mean] exp(−i(k_u(ω) x − k_d(ω) x')),
//
// less the mean over the window, so that a constant in the map does not count.
// The band is in the window only for a while, and G resolves frequencies no
// finer than 2π over the window's length in time: a model must go through the
// same window before the two are compared. There is no taper, as it would make
// the window shorter still, and what leaks leaks in the model too.
type Transform struct {
	Omega []float64

	up, down       [][]complex128 // exp(−ik_u x), exp(+ik_d x'), [frequency][point]
	upSum, downSum []complex128   // sums over points

	rule  *bandRule
	plus  [][]complex128 // of exp(+i(k_u x − k_d x')), for each frequency and rule frequency, with its weight
	minus [][]complex128 // of its conjugate
}

// Transform returns the transform at the given frequencies, above 0 and below
// ω_max, of the window over the points x × xp, for temperatures down to coldest.
func (b *Band) Transform(omega, x, xp []float64, coldest float64) *Transform {
	w := b.Over(x, xp, coldest, 0)
	t := &Transform{Omega: omega, rule: w.rule}
	for _, f := range omega {
		ku, _ := OutgoingUp(f, b.up.Velocity, b.up.SoundSpeed)
		kd, _ := OutgoingDown(f, b.down.Velocity, b.down.SoundSpeed)
		up, down := phasors(x, -ku), phasors(xp, kd)
		t.up, t.down = append(t.up, up), append(t.down, down)
		t.upSum, t.downSum = append(t.upSum, total(up)), append(t.downSum, total(down))
	}
	n := len(w.rule.omega)
	for range omega {
		t.plus, t.minus = append(t.plus, make([]complex128, n)), append(t.minus, make([]complex128, n))
	}
	for q, weight := range w.rule.weight {
		half := complex(weight/2, 0)
		u, d := phasors(x, w.rule.up[q]), phasors(xp, -w.rule.down[q])
		mean := total(u) * total(d) / complex(float64(len(x)*len(xp)), 0)
		for f := range omega {
			t.plus[f][q] = half * (dot(t.up[f], u)*dot(t.down[f], d) - mean*t.upSum[f]*t.downSum[f])
			t.minus[f][q] = half * (dotConj(t.up[f], u)*dotConj(t.down[f], d) - cmplx.Conj(mean)*t.upSum[f]*t.downSum[f])
		}
	}
	return t
}

// phasors returns exp(ikx) at each point.
func phasors(x []float64, k float64) []complex128 {
	z := make([]complex128, len(x))
	for i, v := range x {
		sin, cos := math.Sincos(k * v)
		z[i] = complex(cos, sin)
	}
	return z
}

func total(z []complex128) (sum complex128) {
	for _, v := range z {
		sum += v
	}
	return sum
}

func dot(a, b []complex128) (sum complex128) {
	for i, v := range a {
		sum += v * b[i]
	}
	return sum
}

func dotConj(a, b []complex128) (sum complex128) {
	for i, v := range a {
		sum += v * cmplx.Conj(b[i])
	}
	return sum
}

// Shot sets dst to the transform of the product u(x) d(x′) of one shot's
// relative density fluctuations on both sides, and returns it; nil allocates.
func (t *Transform) Shot(dst []complex128, u, d []float64) []complex128 {
	if dst == nil {
		dst = make([]complex128, len(t.Omega))
	}
	project := func(v []float64, wave []complex128) complex128 {
		var re, im float64
		for k, f := range v {
			re += f * real(wave[k])
			im += f * imag(wave[k])
		}
		return complex(re, im)
	}
	var uSum, dSum float64
	for _, v := range u {
		uSum += v
	}
	for _, v := range d {
		dSum += v
	}
	mean := complex(uSum*dSum/float64(len(u)*len(d)), 0)
	for f := range dst {
		dst[f] = project(u, t.up[f])*project(d, t.down[f]) - mean*t.upSum[f]*t.downSum[f]
	}
	return dst
}

// Frequencies returns the frequencies at which a pairing is given.
func (t *Transform) Frequencies() []float64 { return t.rule.omega }

// Paired sets dst to the transform of the band with pairing ⟨b_u b_d2⟩ at the
// rule's frequencies and delay t0, and returns it; nil allocates.
func (t *Transform) Paired(dst, pairing []complex128, t0 float64) []complex128 {
	if dst == nil {
		dst = make([]complex128, len(t.Omega))
	}
	clear(dst)
	for q, omega := range t.rule.omega {
		sin, cos := math.Sincos(omega * t0)
		z := pairing[q] * complex(cos, sin)
		c := cmplx.Conj(z)
		for f := range dst {
			dst[f] += z*t.plus[f][q] + c*t.minus[f][q]
		}
	}
	return dst
}

// Thermal is Paired for the thermal pairing of temperature T.
func (t *Transform) Thermal(dst []complex128, T, t0 float64) []complex128 {
	return t.Paired(dst, thermalPairing(t.rule.omega, T), t0)
}

// Unit returns the transform of a band whose pairing is 1 at every frequency:
// what a transform is divided by to read as a coherence.
func (t *Transform) Unit() []complex128 {
	one := make([]complex128, len(t.rule.omega))
	for i := range one {
		one[i] = 1
	}
	return t.Paired(nil, one, 0)
}
