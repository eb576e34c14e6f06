package gpe

import (
	"errors"
	"fmt"
	"math"

	"tailrace/gpe/lanes"
)

// Noise is the initial state's fluctuations: its Bogoliubov modes with their
// thermal populations. Sample writes a trajectory's initial field.
//
//	ψ = √(N₀/N) φ₀ + (n₀ξ)^{−1/2} Σ_k (u_k β_k + v_k* β_k*),
//
// with complex Gaussian β_k, ⟨|β_k|²⟩ = ½ coth(ε_k/2T), and u, v orthogonal to
// φ₀. Every trajectory has the same number of atoms N: N₀ makes up for what
// is out of the condensate, Σ(|δψ|² − ½) over the modes.
type Noise interface {
	// Sample fills all lanes of b with trajectories first, first+1, …. It
	// returns ErrNoCondensate when the fluctuations have more atoms than the
	// cloud.
	Sample(b *lanes.Batch, seed uint64, first int) error
	// Modes returns how many modes carry noise.
	Modes() int
	// Directions returns how many independent directions the noise has, two to
	// a mode, and Direct fills the lanes of b with those from first on, each
	// times its standard deviation, and zeros beyond the last.
	Directions() int
	Direct(b *lanes.Batch, first int)
	// Describe says what the modes are.
	Describe() string
}

// ErrNoCondensate means that the drawn fluctuations leave no atoms in the
// condensate, so that an expansion about it makes no sense.
var ErrNoCondensate = errors.New("the fluctuations hold more atoms than the cloud: it is too hot, too thin or the grid too fine")

// occupation returns √(½ coth(ε/2T) / 2): the standard deviation of the real
// and of the imaginary part of β.
func occupation(energy, temperature float64) float64 {
	if temperature <= 0 {
		return 0.5
	}
	return 0.5 / math.Sqrt(math.Tanh(energy/(2*temperature)))
}

// fixNumber adds field phi, scaled so that each lane has the given number of
// atoms, to the fluctuations in b, which must be orthogonal to phi. All in
// units of n₀ξ; halfQuanta is ½ per mode.
func fixNumber(b *lanes.Batch, phi []float64, dx, atoms, halfQuanta float64) error {
	var out [lanes.Width]float64
	for i, re := range b.Re {
		out[i%lanes.Width] += re*re + b.Im[i]*b.Im[i]
	}
	for l := range out {
		left := atoms - (out[l]*dx - halfQuanta)
		if !(left > 0) {
			return ErrNoCondensate
		}
		out[l] = math.Sqrt(left / atoms)
	}
	for j, f := range phi {
		for l := range lanes.Width {
			b.Re[j*lanes.Width+l] += f * out[l]
		}
	}
	return nil
}

// PlaneWaves is the noise of a uniform cloud on a ring, in which modes are
// plane waves in the fluid's own frame: u+v = √(E/ε), u−v = √(ε/E), E = k²/2,
// ε = √(E(E+2c²)).
type PlaneWaves struct {
	ground  *Ground
	plan    *lanes.Plan
	perXi   float64
	plus    []float64 // (u+v)·scale·deviation at each scrambled place, 0 where there is none
	minus   []float64
	partner []int // place of −k
	place   []int // of each Fourier index
	modes   int
	cutoff  float64
	// carriers lists the places of the waves that carry noise.
	carriers []int
}

// NewPlaneWaves prepares the noise of density 1 with sound speed c, at
// temperature T, for waves up to |k| = cutoff, 0 for all the grid holds.
func NewPlaneWaves(ground *Ground, c, temperature, atomsPerLength, cutoff float64) (*PlaneWaves, error) {
	g := ground.Grid
	plan, err := lanes.NewPlan(g.N)
	if err != nil {
		return nil, err
	}
	w := &PlaneWaves{ground: ground, plan: plan, perXi: atomsPerLength, cutoff: cutoff, place: make([]int, g.N),
		plus: make([]float64, g.N), minus: make([]float64, g.N), partner: make([]int, g.N)}
	order := plan.Order()
	for p, q := range order {
		w.place[q] = p
	}
	scale := 1 / math.Sqrt(atomsPerLength*g.Length())
	for p, q := range order {
		w.partner[p] = w.place[(g.N-q)%g.N]
		k := math.Abs(g.Wavenumber(q))
		if q == 0 || cutoff > 0 && k > cutoff {
			continue
		}
		e := k * k / 2
		energy := math.Sqrt(e * (e + 2*c*c))
		sd := occupation(energy, temperature) * scale
		w.plus[p], w.minus[p] = math.Sqrt(e/energy)*sd, math.Sqrt(energy/e)*sd
		w.modes++
		w.carriers = append(w.carriers, p)
	}
	return w, nil
}

// Modes implements Noise.
func (w *PlaneWaves) Modes() int { return w.modes }

// Describe implements Noise.
func (w *PlaneWaves) Describe() string {
	return fmt.Sprintf("%d plane waves up to k = %.3g", w.modes, cutoffOf(w.ground.Grid, w.cutoff))
}

func cutoffOf(g Grid, cutoff float64) float64 {
	if cutoff <= 0 || cutoff > g.MaxWavenumber() {
		return g.MaxWavenumber()
	}
	return cutoff
}

// Sample implements Noise. The waves are drawn in the order of |k|, positive
// first, so that a different cut-off or grid keeps the long ones.
func (w *PlaneWaves) Sample(b *lanes.Batch, seed uint64, first int) error {
	n := w.ground.Grid.N
	re, im := make([]float64, n), make([]float64, n)
	for l := range lanes.Width {
		s := NewStream(seed, first+l)
		for q := 1; q <= n/2; q++ {
			p := w.place[q]
			re[p], im[p] = s.Normal(), s.Normal()
			if 2*q < n {
				p = w.place[n-q]
				re[p], im[p] = s.Normal(), s.Normal()
			}
		}
		for p := range n {
			m := w.partner[p]
			// u β_k + v β*_{−k}, with u, v from their sum and difference.
			u, v := (w.plus[p]+w.minus[p])/2, (w.plus[p]-w.minus[p])/2
			b.Re[p*lanes.Width+l] = u*re[p] + v*re[m]
			b.Im[p*lanes.Width+l] = u*im[p] - v*im[m]
		}
	}
	w.plan.Backward(b)
	return fixNumber(b, w.ground.Field, w.ground.Grid.Dx, w.ground.Atoms, float64(w.modes)/(2*w.perXi))
}
