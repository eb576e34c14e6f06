package interpretation

import (
	"math"
	"math/rand/v2"

	"gonum.org/v1/gonum/stat"

	"tailrace/analysis/band"
	"tailrace/gpe/bogoliubov"
)

// Separability is the question whether the partners are entangled, frequency by
// frequency: they are where |⟨b_u b_d2⟩|² > n_u n_d2. X. Busch, R. Parentani,
// Phys. Rev. D 89, 105024 (2014); S. Finazzi, I. Carusotto, Phys. Rev. A 90,
// 033607 (2014).
//
// A density map alone does not give the populations: the density wave k of a side
// is made of the modes k and −k, of which one leaves the horizon and the other
// comes in. It gives their sum, and as no population is negative that is a bound:
//
//	n_u ≤ S_u/S₀ − 1,  n_d2 ≤ S_d/S₀ − 1,
//	Δ = n_u n_d2 − |⟨b_u b_d2⟩|² ≤ (S_u/S₀ − 1)(S_d/S₀ − 1) − |⟨b_u b_d2⟩|².
//
// All three are of one pair of modes: a wave of that frequency on each side, under
// a taper that ends with the window. A window shorter than a wave's own length
// mixes frequencies; the inequality holds for the mixture all the same.
//
// Where the bound is below zero the partners are entangled whatever the ingoing
// waves are; where it is not, nothing is said without an independent measurement
// of those.
type Separability struct {
	Omega            []float64
	Up, Down         []float64 // S/S₀ − 1 of each side, in the window
	Pairing          []float64 // |⟨b_u b_d2⟩|², of the same modes
	Bound, Low, High []float64 // of Δ, with the central 68 % of the bootstrap
	Found            bool      // the bound is below zero, with its interval, at two frequencies or more
	MostSignificant  float64   // standard deviations below zero at the best frequency
	Assumptions      []Assumption
	samples          [][]float64
}

// Assumption is one on which the bound rests, and whether the data support it.
type Assumption struct {
	What string
	OK   bool
	Why  string
}

// frequencies is at how many frequencies below ω_max the bound is worked out.
const frequencies = 6

// separate works out the bound.
func (r *Interpretation) separate(s *band.Sides) *Separability {
	up, down := r.Account.Predicted.Upstream, r.Account.Predicted.Downstream
	q := &Separability{}
	for f := range frequencies {
		q.Omega = append(q.Omega, math.Min(0.95*r.Account.OmegaMax, 6*r.Account.Scattered)*float64(f+1)/frequencies)
	}
	const n = frequencies
	type side struct {
		x       []float64
		rows    func(i int) []float64
		k       func(omega float64) float64
		density float64
		sound   float64
	}
	sides := []side{
		{s.Xu, s.U.RawRowView, func(w float64) float64 {
			k, _ := bogoliubov.OutgoingUp(w, up.Velocity, up.SoundSpeed)
			return k
		}, up.Density, up.SoundSpeed},
		{s.Xd, s.D.RawRowView, func(w float64) float64 {
			k, _ := bogoliubov.OutgoingDown(w, down.Velocity, down.SoundSpeed)
			return k
		}, down.Density, down.SoundSpeed},
	}
	shots := s.Shots()
	// Each shot's amplitude in each window mode, in units of the vacuum's: through
	// the same taper and pixels, less the photons.
	amplitude := [2][][]complex128{}
	noise := [2][]float64{}
	for a, d := range sides {
		ks := make([]float64, n)
		for f, w := range q.Omega {
			ks[f] = d.k(w)
		}
		vacuum, photons := r.vacuum(d.x, d.density, d.sound, ks)
		amplitude[a], noise[a] = make([][]complex128, n), make([]float64, n)
		for f, k := range ks {
			if a == 1 {
				k = -k // the partner's conjugate
			}
			amplitude[a][f] = amplitudes(d.x, k, shots, d.rows, vacuum[f])
			noise[a][f] = photons / vacuum[f]
		}
	}
	estimate := func(weight []float64) (u, d, g, bound []float64) {
		u, d, g, bound = make([]float64, n), make([]float64, n), make([]float64, n), make([]float64, n)
		for f := range n {
			var pair complex128
			var up, down, scatter, total float64
			for i := range shots {
				w := 1.0
				if weight != nil {
					w = weight[i]
				}
				x, y := amplitude[0][f][i], amplitude[1][f][i]
				z := x * y
				up, down = up+w*square(x), down+w*square(y)
				pair += complex(w, 0) * z
				scatter += w * square(z)
				total += w
			}
			pair /= complex(total, 0)
			u[f], d[f] = up/total-noise[0][f]-1, down/total-noise[1][f]-1
			// Chance adds its variance to a square; a resample has it twice.
			chance := (scatter/total - square(pair)) / (total - 1)
			if weight != nil {
				chance *= 2
			}
			g[f] = square(pair) - chance
			bound[f] = math.Max(u[f], 0)*math.Max(d[f], 0) - g[f]
		}
		return u, d, g, bound
	}
	q.Up, q.Down, q.Pairing, q.Bound = estimate(nil)
	rng := rand.New(rand.NewPCG(r.Input.Settings.Seed, 0x5e9))
	weight := make([]float64, shots)
	for range r.Input.Settings.Resamples {
		clear(weight)
		for drawn := 0; drawn < shots; {
			first := rng.IntN(shots)
			for i := 0; i < max(1, r.Block) && drawn < shots; i++ {
				weight[(first+i)%shots]++
				drawn++
			}
		}
		_, _, _, b := estimate(weight)
		q.samples = append(q.samples, b)
	}
	q.Low, q.High = make([]float64, n), make([]float64, n)
	below := 0
	for f := range n {
		column := make([]float64, len(q.samples))
		for i, b := range q.samples {
			column[i] = b[f]
		}
		sd := 0.0
		if len(column) > 1 {
			sd = stat.StdDev(column, nil)
		}
		q.Low[f], q.High[f] = q.Bound[f]-sd, q.Bound[f]+sd
		if sd > 0 {
			q.MostSignificant = math.Max(q.MostSignificant, -q.Bound[f]/sd)
			if q.Bound[f]+2*sd < 0 {
				below++
			}
		}
	}
	q.Found = below >= 2
	q.Assumptions = r.assumptions()
	return q
}

// assumptions lists what the bound rests on.
func (r *Interpretation) assumptions() []Assumption {
	a := r.Account
	off := math.Max(math.Abs(a.Measured.Upstream.Density/a.Predicted.Upstream.Density-1), math.Abs(a.Measured.Downstream.Density/a.Predicted.Downstream.Density-1))
	found := func(name string) bool {
		for _, e := range r.Explanations {
			if e.Name == name {
				return e.Found
			}
		}
		return false
	}
	return []Assumption{
		{"the flow is the predicted one, so that k and S₀ are known", off < 0.03, "densities are within three per cent of the prediction"},
		{"the response of the imaging and the photon noise are known", r.Input.Camera.Points || r.Input.Camera.Resolution > 0, "they are taken from the config; an error of a tenth in the resolution shows among the systematics"},
		{"nothing but waves correlates the two sides", !found("cross-talk in the pictures") && !found("spread of the atom number"), "no constant correlation is left before normalising, and none across the upstream window"},
		{"the windows are uniform", !found("a ripple in the mean density"), "no standing wave in the mean density"},
	}
}

func square(z complex128) float64 { return real(z)*real(z) + imag(z)*imag(z) }

// amplitudes returns Σ_x h(x) row(x) exp(−ikx) of each shot over the square root
// of the vacuum's power.
func amplitudes(x []float64, k float64, shots int, rows func(i int) []float64, vacuum float64) []complex128 {
	re, im := tapered(x, k)
	out := make([]complex128, shots)
	scale := 1 / math.Sqrt(vacuum)
	for i := range out {
		var a, b float64
		for j, v := range rows(i) {
			a += v * re[j]
			b += v * im[j]
		}
		out[i] = complex(a*scale, b*scale)
	}
	return out
}

// tapered returns h(x) exp(−ikx) with Hann's window.
func tapered(x []float64, k float64) (re, im []float64) {
	re, im = make([]float64, len(x)), make([]float64, len(x))
	for j, v := range x {
		s := math.Sin(math.Pi * (float64(j) + 0.5) / float64(len(x)))
		sin, cos := math.Sincos(k * v)
		re[j], im[j] = s*s*cos, -s*s*sin
	}
	return re, im
}

// vacuum returns the mean power at each wave number that the vacuum's own density
// fluctuations have in the window, and that of the photons, both relative to the
// squared density.
func (r *Interpretation) vacuum(x []float64, density, sound float64, ks []float64) (power []float64, photons float64) {
	in := r.Input
	c := in.Camera
	atoms := density * in.AtomsPerLength
	if c.PhotonsPerAtom > 0 {
		re, im := tapered(x, 0)
		for j := range re {
			photons += (re[j]*re[j] + im[j]*im[j]) / (c.PhotonsPerAtom * atoms * c.Pixel)
		}
	}
	// ⟨δn δn′⟩/n² = (1/atoms) ∫dk/2π S₀(k) |response|² e^{ik(x−x′)}, to where the
	// pixels see nothing.
	top := 30 / c.Pixel
	switch {
	case c.Points: // of a grid, which holds no shorter waves
		top = math.Pi / c.Pixel
	case c.Resolution > 0:
		top = math.Min(top, 6/c.Resolution)
	}
	step := math.Pi / (4 * math.Abs(x[len(x)-1]-x[0]))
	power = make([]float64, len(ks))
	response := c.Response(0)
	for q := -top; q < top; q += step {
		weight := bogoliubov.StructureFactor(q, sound, 0) * response(q, q) * step / (2 * math.Pi * atoms)
		for f, k := range ks {
			re, im := tapered(x, k-q)
			var a, b float64
			for j := range re {
				a += re[j]
				b += im[j]
			}
			power[f] += weight * (a*a + b*b)
		}
	}
	return power, photons
}
