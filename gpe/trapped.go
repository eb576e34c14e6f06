package gpe

import (
	"fmt"
	"math"

	"gonum.org/v1/gonum/mat"

	"tailrace/gpe/lanes"
)

// TrappedModes is the Bogoliubov modes of a real ground state. With
// f± = u ± v they obey
//
//	A f₋ = ε f₊,  B f₊ = ε f₋,  A = T + V + f − μ,  B = A + 2 n f′,
//
// normalised to ∫ f₊ f₋ dx = 1. f₊ is orthogonal to φ₀ by itself, f₋ has been
// made so, which keeps the condensate's phase and number out of the noise
// (Y. Castin, R. Dum, Phys. Rev. A 57, 3008 (1998)).
type TrappedModes struct {
	Points, Count int
	Energies      []float64 // ε, [Count], rising
	Plus, Minus   []float64 // f₊ and f₋, [Points·Count], point by point
}

// FindModes solves for the modes of a ground state within the plane waves up
// to |k| = cutoff, 0 for all that the grid holds.
//
// The basis is cosines and sines about x = 0. When the cloud is symmetric
// about it they do not mix and the problem falls into two of half the size,
// which is four times less work. Each is brought to an ordinary symmetric
// eigenproblem: B = LLᵀ, (LᵀAL)y = ε²y, f₊ = √ε L⁻ᵀy, f₋ = Ly/√ε. The work
// grows as the cube of the number of modes.
func FindModes(ground *Ground, cutoff float64) (*TrappedModes, error) {
	g := ground.Grid
	var found []parity
	for _, basis := range bases(g, cutoff, isSymmetric(ground)) {
		p, err := solveParity(ground, basis)
		if err != nil {
			return nil, err
		}
		found = append(found, p)
	}
	return merge(ground, found)
}

// isSymmetric reports whether V(−x) = V(x) to rounding and x = 0 is a point.
func isSymmetric(ground *Ground) bool {
	g := ground.Grid
	zero := -g.Origin / g.Dx
	centre := int(math.Round(zero))
	if math.Abs(zero-math.Round(zero)) > 1e-9 {
		return false
	}
	for j := range g.N {
		a := ground.V[(centre+j)%g.N]
		b := ground.V[((centre-j)%g.N+g.N)%g.N]
		if math.Abs(a-b) > 1e-12*(1+math.Abs(a)) {
			return false
		}
	}
	return true
}

// wave is one function of the basis: cos(kx) or sin(kx).
type wave struct {
	k    float64
	sine bool
}

// bases lists the waves, as one set or, split, as cosines and sines.
func bases(g Grid, cutoff float64, split bool) [][]wave {
	limit := cutoffOf(g, cutoff)
	var cosines, sines []wave
	for q := 0; q <= g.N/2; q++ {
		k := 2 * math.Pi * float64(q) / g.Length()
		if k > limit*(1+1e-12) {
			break
		}
		cosines = append(cosines, wave{k: k})
		if q > 0 && 2*q < g.N {
			sines = append(sines, wave{k: k, sine: true})
		}
	}
	if split {
		return [][]wave{cosines, sines}
	}
	return [][]wave{append(cosines, sines...)}
}

// synthesis returns the matrix [points × waves] of the basis functions,
// orthonormal under Σ_j.
func synthesis(g Grid, waves []wave) *mat.Dense {
	e := mat.NewDense(g.N, len(waves), nil)
	for a, w := range waves {
		norm := math.Sqrt(2 / float64(g.N))
		if w.k == 0 || math.Abs(w.k-g.MaxWavenumber()) < 1e-9 {
			norm = math.Sqrt(1 / float64(g.N))
		}
		for j := range g.N {
			if w.sine {
				e.Set(j, a, norm*math.Sin(w.k*g.X(j)))
			} else {
				e.Set(j, a, norm*math.Cos(w.k*g.X(j)))
			}
		}
	}
	return e
}

// parity is the modes of one set of waves.
type parity struct {
	energies    []float64
	plus, minus *mat.Dense // [points × modes]
}

// operator returns the symmetric matrix of T + diag in the basis e.
func operator(e *mat.Dense, waves []wave, diag []float64) *mat.SymDense {
	points, m := e.Dims()
	scaled := mat.NewDense(points, m, nil)
	scaled.Apply(func(j, _ int, v float64) float64 { return diag[j] * v }, e)
	var full mat.Dense
	full.Mul(e.T(), scaled)
	s := mat.NewSymDense(m, nil)
	for a := range m {
		for b := a; b < m; b++ {
			s.SetSym(a, b, full.At(a, b))
		}
		s.SetSym(a, a, s.At(a, a)+waves[a].k*waves[a].k/2)
	}
	return s
}

func solveParity(ground *Ground, waves []wave) (parity, error) {
	g := ground.Grid
	e := synthesis(g, waves)
	diagA, diagB := make([]float64, g.N), make([]float64, g.N)
	for j, p := range ground.Field {
		rho := p * p
		diagA[j] = ground.V[j] - ground.Mu + ground.Law.Mu(rho)
		diagB[j] = diagA[j] + 2*rho*ground.Law.Slope(rho)
	}
	a, b := operator(e, waves, diagA), operator(e, waves, diagB)
	var chol mat.Cholesky
	if !chol.Factorize(b) {
		return parity{}, fmt.Errorf("%w: its modes are not stable", ErrNoGroundState)
	}
	var low mat.TriDense
	chol.LTo(&low)
	var al, lal mat.Dense
	al.Mul(a, &low)
	lal.Mul(low.T(), &al)
	m := len(waves)
	c := mat.NewSymDense(m, nil)
	for i := range m {
		for j := i; j < m; j++ {
			c.SetSym(i, j, (lal.At(i, j)+lal.At(j, i))/2)
		}
	}
	var eig mat.EigenSym
	if !eig.Factorize(c, true) {
		return parity{}, fmt.Errorf("%w: the eigenproblem of its modes did not converge", ErrNoGroundState)
	}
	var y mat.Dense
	eig.VectorsTo(&y)
	values := eig.Values(nil)
	// The condensate itself is the one mode of energy zero, among the cosines.
	skip := 0
	if floor := 1e-9 * values[m-1]; values[0] < floor {
		skip = 1
		if m > 1 && values[1] < floor {
			return parity{}, fmt.Errorf("%w: more than one mode has no energy", ErrNoGroundState)
		}
	}
	var plus, minus mat.Dense
	if err := plus.Solve(low.T(), &y); err != nil {
		return parity{}, fmt.Errorf("%w: %w", ErrNoGroundState, err)
	}
	minus.Mul(&low, &y)
	p := parity{plus: new(mat.Dense), minus: new(mat.Dense)}
	for i := range m {
		energy := math.Sqrt(math.Max(values[i], 0))
		if i >= skip {
			p.energies = append(p.energies, energy)
		} else {
			energy = 1
		}
		// Σ_j f₊f₋ dx = 1 takes 1/√dx each.
		up, down := math.Sqrt(energy/g.Dx), 1/math.Sqrt(energy*g.Dx)
		for r := range m {
			plus.Set(r, i, plus.At(r, i)*up)
			minus.Set(r, i, minus.At(r, i)*down)
		}
	}
	p.plus.Mul(e, plus.Slice(0, m, skip, m))
	p.minus.Mul(e, minus.Slice(0, m, skip, m))
	return p, nil
}

// merge puts the modes of all parities in order of energy and takes the
// condensate out of f₋.
func merge(ground *Ground, found []parity) (*TrappedModes, error) {
	n := ground.Grid.N
	t := &TrappedModes{Points: n}
	type source struct{ set, column int }
	var order []source
	next := make([]int, len(found))
	for {
		best := -1
		for s, p := range found {
			if next[s] < len(p.energies) && (best < 0 || p.energies[next[s]] < found[best].energies[next[best]]) {
				best = s
			}
		}
		if best < 0 {
			break
		}
		order = append(order, source{best, next[best]})
		t.Energies = append(t.Energies, found[best].energies[next[best]])
		next[best]++
	}
	t.Count = len(order)
	if t.Count == 0 {
		return nil, fmt.Errorf("%w: no modes below the cut-off", ErrNoGroundState)
	}
	t.Plus, t.Minus = make([]float64, n*t.Count), make([]float64, n*t.Count)
	norm := 0.0
	for _, f := range ground.Field {
		norm += f * f
	}
	overlap := make([]float64, t.Count)
	for j, f := range ground.Field {
		for m, s := range order {
			t.Plus[j*t.Count+m] = found[s.set].plus.At(j, s.column)
			v := found[s.set].minus.At(j, s.column)
			t.Minus[j*t.Count+m] = v
			overlap[m] += f * v / norm
		}
	}
	for j, f := range ground.Field {
		row := t.Minus[j*t.Count : (j+1)*t.Count]
		for m := range row {
			row[m] -= overlap[m] * f
		}
	}
	return t, nil
}

// TrappedNoise is the noise of a trapped cloud.
type TrappedNoise struct {
	ground *Ground
	modes  *TrappedModes
	sd     []float64
	perXi  float64
	cutoff float64
}

// NewTrappedNoise prepares the noise at temperature T for a cloud of
// atomsPerLength = n₀ξ. The cutoff is that with which modes were found.
func NewTrappedNoise(ground *Ground, modes *TrappedModes, temperature, atomsPerLength, cutoff float64) *TrappedNoise {
	t := &TrappedNoise{ground: ground, modes: modes, perXi: atomsPerLength, cutoff: cutoff, sd: make([]float64, modes.Count)}
	for m, e := range modes.Energies {
		t.sd[m] = occupation(e, temperature) / math.Sqrt(atomsPerLength)
	}
	return t
}

// Modes implements Noise.
func (t *TrappedNoise) Modes() int { return t.modes.Count }

// Describe implements Noise.
func (t *TrappedNoise) Describe() string {
	return fmt.Sprintf("%d Bogoliubov modes of the trapped cloud up to k = %.3g", t.modes.Count, cutoffOf(t.ground.Grid, t.cutoff))
}

// Sample implements Noise. Modes are drawn in the order of their energy.
func (t *TrappedNoise) Sample(b *lanes.Batch, seed uint64, first int) error {
	const w = lanes.Width
	count := t.modes.Count
	re, im := make([]float64, count*w), make([]float64, count*w)
	for l := range w {
		s := NewStream(seed, first+l)
		for m, sd := range t.sd {
			re[m*w+l], im[m*w+l] = sd*s.Normal(), sd*s.Normal()
		}
	}
	lanes.Combine(b.Re, t.modes.Plus, re)
	lanes.Combine(b.Im, t.modes.Minus, im)
	return fixNumber(b, t.ground.Field, t.ground.Grid.Dx, t.ground.Atoms, float64(count)/(2*t.perXi))
}
