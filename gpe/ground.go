package gpe

import (
	"errors"
	"fmt"
	"math"

	"gonum.org/v1/gonum/dsp/fourier"
	"gonum.org/v1/gonum/floats"

	"tailrace/gpe/fluid"
)

// ErrNoGroundState means that the search for the ground state did not reach
// its residual.
var ErrNoGroundState = errors.New("gpe: no ground state found")

// Ground is the real, positive, stationary field φ₀ of a trap:
// −½φ″ + Vφ + f(φ²)φ = μφ.
type Ground struct {
	Grid     Grid
	Law      fluid.Law
	V        []float64 // the potential, [N]
	Field    []float64 // φ₀, [N], in units of √n₀
	Mu       float64   // chemical potential, in m c₀²
	Atoms    float64   // ∫φ₀² dx, in n₀ξ
	Residual float64   // largest |−½φ″ + (V + f − μ)φ|
}

// residualGoal is the residual that FindGround demands, relative to max φ₀.
const residualGoal = 1e-10

// hessian is the linear operator T + D on the periodic grid, with T = −½∂²
// applied spectrally and D a diagonal.
type hessian struct {
	fft  *fourier.FFT
	t    []float64 // k²/2 of the N/2+1 real-transform coefficients
	c    []complex128
	diag []float64
}

func newHessian(g Grid) *hessian {
	h := &hessian{fft: fourier.NewFFT(g.N), diag: make([]float64, g.N)}
	h.t = make([]float64, g.N/2+1)
	h.c = make([]complex128, g.N/2+1)
	for q := range h.t {
		k := 2 * math.Pi * float64(q) / g.Length()
		h.t[q] = k * k / 2
	}
	return h
}

// filter sets dst = w(T) x, where w maps k²/2 to a factor.
func (h *hessian) filter(dst, x []float64, w func(t float64) float64) {
	h.fft.Coefficients(h.c, x)
	n := 1 / float64(len(x))
	for q, t := range h.t {
		h.c[q] *= complex(w(t)*n, 0)
	}
	h.fft.Sequence(dst, h.c)
}

// kinetic sets dst = T x.
func (h *hessian) kinetic(dst, x []float64) {
	h.filter(dst, x, func(t float64) float64 { return t })
}

// apply sets dst = (T + D) x.
func (h *hessian) apply(dst, x []float64) {
	h.kinetic(dst, x)
	for j, d := range h.diag {
		dst[j] += d * x[j]
	}
}

// solve finds (T + D) y = b by conjugate gradients with (T + shift)⁻¹ as the
// preconditioner, to a relative residual tol; T + D must be positive.
func (h *hessian) solve(y, b []float64, shift, tol float64, r, z, p, q []float64) error {
	fill(y, 0)
	copy(r, b)
	precondition := func(dst, x []float64) {
		h.filter(dst, x, func(t float64) float64 { return 1 / (t + shift) })
	}
	precondition(z, r)
	copy(p, z)
	rz := floats.Dot(r, z)
	goal := tol * floats.Norm(b, 2)
	for range 4000 {
		if floats.Norm(r, 2) <= goal {
			return nil
		}
		h.apply(q, p)
		pq := floats.Dot(p, q)
		if !(pq > 0) {
			return fmt.Errorf("%w: the second variation of the energy is not positive", ErrNoGroundState)
		}
		a := rz / pq
		floats.AddScaled(y, a, p)
		floats.AddScaled(r, -a, q)
		precondition(z, r)
		next := floats.Dot(r, z)
		floats.AddScaledTo(p, z, next/rz, p)
		rz = next
	}
	// Rounding may keep the last digits out of reach; Newton's own residual
	// decides whether the step was good enough.
	return nil
}

// FindGround returns the ground state in potential v at chemical potential mu.
//
// It starts from the Thomas–Fermi density, lets imaginary time smooth it and
// then takes Newton steps, each solved by preconditioned conjugate gradients,
// until the largest residual is below 1e-10 of the largest φ₀ or as small as
// rounding allows, which is checked. It returns an error that wraps
// ErrNoGroundState when that fails, for example when mu is below the lowest
// level of the trap, so that there is no cloud.
func FindGround(g Grid, law fluid.Law, v []float64, mu float64) (*Ground, error) {
	n := g.N
	if len(v) != n {
		panic("gpe: potential and grid differ in length")
	}
	h := newHessian(g)
	phi, next, res := make([]float64, n), make([]float64, n), make([]float64, n)
	work := [4][]float64{}
	for i := range work {
		work[i] = make([]float64, n)
	}
	for j, u := range v {
		phi[j] = math.Sqrt(math.Max(mu-u, 1e-8))
	}
	relax(h, law, v, mu, phi, next)

	residual := func(phi []float64) float64 {
		h.kinetic(res, phi)
		worst := 0.0
		for j, p := range phi {
			res[j] += (v[j] - mu + law.Mu(p*p)) * p
			worst = math.Max(worst, math.Abs(res[j]))
		}
		return worst
	}
	size := floats.Norm(phi, math.Inf(1))
	worst := residual(phi)
	for iteration := 0; worst > 1e-13*size && iteration < 60; iteration++ {
		for j, p := range phi {
			rho := p * p
			h.diag[j] = v[j] - mu + law.Mu(rho) + 2*rho*law.Slope(rho)
		}
		if err := h.solve(next, res, math.Max(1, mu), 1e-12, work[0], work[1], work[2], work[3]); err != nil {
			return nil, err
		}
		// Damped step: halve until the residual falls.
		before, step := worst, 1.0
		for ; step > 1e-4; step /= 2 {
			floats.AddScaledTo(work[0], phi, -step, next)
			if worst = residual(work[0]); worst < before {
				break
			}
		}
		if worst >= before {
			worst = residual(phi)
			break // rounding: no further gain to be had
		}
		copy(phi, work[0])
	}
	size = floats.Norm(phi, math.Inf(1))
	gr := &Ground{Grid: g, Law: law, V: v, Field: phi, Mu: mu, Residual: worst}
	for j, p := range phi {
		if p < 0 {
			if p < -1e-6*size {
				return nil, fmt.Errorf("%w: the field changes sign at x = %.4g", ErrNoGroundState, g.X(j))
			}
		}
		gr.Atoms += p * p * g.Dx
	}
	if !(size > 1e-3) {
		return nil, fmt.Errorf("%w: the chemical potential %.4g m c² is below the lowest level of the trap", ErrNoGroundState, mu)
	}
	if !(worst <= residualGoal*size) {
		return nil, fmt.Errorf("%w: residual %.2g after Newton's steps, %.0g is wanted; use a finer grid or smoother walls", ErrNoGroundState, worst, residualGoal)
	}
	return gr, nil
}

// relax takes imaginary-time steps at fixed chemical potential.
func relax(h *hessian, law fluid.Law, v []float64, mu float64, phi, work []float64) {
	const dt, steps = 0.05, 400
	half := func() {
		for j, p := range phi {
			phi[j] *= math.Exp(-dt / 2 * (v[j] - mu + law.Mu(p*p)))
		}
	}
	for range steps {
		half()
		h.filter(work, phi, func(t float64) float64 { return math.Exp(-dt * t) })
		copy(phi, work)
		half()
	}
}

// UniformGround returns the uniform field of density 1, the state of a ring.
func UniformGround(g Grid, law fluid.Law) *Ground {
	gr := &Ground{Grid: g, Law: law, V: make([]float64, g.N), Field: make([]float64, g.N), Mu: law.Mu(1), Atoms: g.Length()}
	fill(gr.Field, 1)
	return gr
}
