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
// Where the bound is below zero the partners are entangled whatever the ingoing
// waves are; where it is not, nothing is said without an independent measurement
// of those.
type Separability struct {
	Omega               []float64
	Up, Down            []float64 // S/S₀ − 1 of each side, in the window
	Pairing             []float64 // |⟨b_u b_d2⟩|², likewise
	Bound, Low, High    []float64 // of Δ, with the central 68 % of the bootstrap
	Found               bool      // the bound is below zero, with its interval, at two frequencies or more
	MostSignificant     float64   // standard deviations below zero at the best frequency
	Assumptions         []Assumption
	samples             [][]float64
	resamples, failures int
}

// Assumption is one on which the bound rests, and whether the data support it.
type Assumption struct {
	What string
	OK   bool
	Why  string
}

// separate works out the bound, or returns nil where there is no coherence
// spectrum to hold against it.
func (r *Interpretation) separate(s *band.Sides) *Separability {
	c := r.Account.Coherence
	if c == nil {
		return nil
	}
	up, down := r.Account.Predicted.Upstream, r.Account.Predicted.Downstream
	q := &Separability{Omega: c.Omega}
	n := len(c.Omega)
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
	// Each shot's power at each frequency over that of the vacuum, through the
	// same taper, pixels and photons.
	power := [2][][]float64{}
	for a, d := range sides {
		vacuum, photons := r.vacuum(d.x, d.density, d.sound, c.Omega, d.k)
		power[a] = make([][]float64, n)
		for f, w := range c.Omega {
			power[a][f] = make([]float64, shots)
			k := d.k(w)
			re, im := tapered(d.x, k)
			for i := range shots {
				var x, y float64
				for j, v := range d.rows(i) {
					x += v * re[j]
					y += v * im[j]
				}
				power[a][f][i] = (x*x+y*y-photons)/vacuum[f] - 1
			}
		}
	}
	pairs := c.Shots()
	unit := c.Unit()
	estimate := func(weight []float64) (u, d, g, bound []float64) {
		u, d, g, bound = make([]float64, n), make([]float64, n), make([]float64, n), make([]float64, n)
		for f := range n {
			u[f], d[f] = stat.Mean(power[0][f], weight), stat.Mean(power[1][f], weight)
			var sum complex128
			var total float64
			for i, z := range pairs[f] {
				w := 1.0
				if weight != nil {
					w = weight[i]
				}
				sum += complex(w, 0) * z
				total += w
			}
			sum /= complex(total, 0)
			g[f] = (real(sum)*real(sum) + imag(sum)*imag(sum) - c.Chance(f)) / (unit[f] * unit[f])
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

// vacuum returns the mean power at each frequency that the vacuum's own density
// fluctuations have in the window, and that of the photons, both relative to the
// squared density.
func (r *Interpretation) vacuum(x []float64, density, sound float64, omega []float64, k func(float64) float64) (power []float64, photons float64) {
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
	if c.Resolution > 0 {
		top = math.Min(top, 6/c.Resolution)
	}
	step := math.Pi / (4 * math.Abs(x[len(x)-1]-x[0]))
	power = make([]float64, len(omega))
	response := c.Response(0)
	for q := -top; q < top; q += step {
		weight := bogoliubov.StructureFactor(q, sound, 0) * response(q, q) * step / (2 * math.Pi * atoms)
		for f, w := range omega {
			re, im := tapered(x, k(w)-q)
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
