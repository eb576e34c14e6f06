// Package correlation makes the density–density correlation map
//
//	g₂(x,x′) − 1 = ⟨:δn(x) δn(x′):⟩ / (n(x) n(x′))
//
// of an ensemble, in normal order: what is left is not the atoms' own
// granularity but correlations between them.
package correlation

import (
	"fmt"
	"math"

	"gonum.org/v1/gonum/mat"

	"tailrace/analysis/moments"
	"tailrace/gpe/lanes"
)

// Map is a correlation map on a grid of N points.
type Map struct {
	X           []float64  // positions, [N]
	MeanDensity []float64  // normally ordered, in n₀, [N]
	G2          *mat.Dense // g₂ − 1, [N×N]; NaN where there is no cloud
	Error       *mat.Dense // its standard error, [N×N]
	Shots       int
	Commutator  float64 // that was subtracted, in n₀
}

// Variance returns the relative variance of the density at point i in symmetric
// order, as single trajectories have it: the map's diagonal with the atoms' own
// granularity on the grid.
func (m *Map) Variance(i int) float64 { return m.G2.At(i, i) + m.Commutator/m.MeanDensity[i] }

// Ordering is what turns symmetrically ordered moments on a grid into normally
// ordered ones. With the commutator [ψ_i, ψ_j†] = D_ij (in n₀),
//
//	n_i   = ⟨|ψ_i|²⟩ − ½D_ii,
//	cov_N = cov_W − Re(D_ij G_ji) − ¼|D_ij|²,  G_ji = ⟨ψ_j†ψ_i⟩ normally ordered.
//
// On a grid all of whose modes carry noise D is diagonal, s δ_ij, for ever: the
// correction is exact and touches only the diagonal. With a cut-off D is the
// kernel of the waves that carry noise, and G is taken from the mean field: at
// unequal points that is exact in a uniform flow only.
type Ordering struct {
	Commutator float64 // s = D_ii in n₀
	// Kernel returns D_ij for i ≠ j; nil for none.
	Kernel func(i, j int) float64
	// Coherence returns Re G_ji for i ≠ j; needed with Kernel.
	Coherence func(i, j int) float64
}

// Thin is the density, in units of the largest mean density, below which a
// point counts as outside the cloud and its map is NaN.
const Thin = 0.02

// New makes the map of shots |ψ|², whose sums are given, at positions x. The
// error of a pixel is the standard error of the mean of δn δn′ over shots,
// √[(⟨δn²δn′²⟩ − cov²)/M]/(n n′), which is what deleting one shot at a time
// gives to order 1/M.
func New(sums *moments.Sums, shots moments.Shots, x []float64, o Ordering) (*Map, error) {
	n := len(x)
	if len(sums.Density) != n || shots.Pixels != n || shots.Count() != sums.Count {
		panic("correlation: sums, shots and positions differ in size")
	}
	if sums.Count < 2 {
		return nil, fmt.Errorf("a correlation map needs at least 2 trajectories, there are %d", sums.Count)
	}
	m := &Map{X: x, Commutator: o.Commutator, Shots: sums.Count, MeanDensity: sums.Mean(), G2: mat.NewDense(n, n, nil), Error: mat.NewDense(n, n, nil)}
	fourth := fourthMoments(shots, m.MeanDensity)
	peak := 0.0
	for j := range m.MeanDensity {
		m.MeanDensity[j] -= o.Commutator / 2
		peak = math.Max(peak, m.MeanDensity[j])
	}
	count := float64(sums.Count)
	for i := range n {
		ni := m.MeanDensity[i]
		for j := i; j < n; j++ {
			nj := m.MeanDensity[j]
			g, e := math.NaN(), math.NaN()
			if ni > Thin*peak && nj > Thin*peak {
				cov := sums.Covariance(i, j)
				spread := math.Max(fourth.At(i, j)/count-cov*cov, 0)
				switch {
				case i == j:
					cov -= o.Commutator*ni + o.Commutator*o.Commutator/4
				case o.Kernel != nil:
					d := o.Kernel(i, j)
					cov -= d*o.Coherence(i, j) + d*d/4
				}
				g, e = cov/(ni*nj), math.Sqrt(spread/count)/(ni*nj)
			}
			m.G2.Set(i, j, g)
			m.G2.Set(j, i, g)
			m.Error.Set(i, j, e)
			m.Error.Set(j, i, e)
		}
	}
	return m, nil
}

// fourthMoments returns Σ δn_i² δn_j² over shots.
func fourthMoments(shots moments.Shots, mean []float64) *mat.SymDense {
	const block = 128
	n := shots.Pixels
	sum := mat.NewSymDense(n, nil)
	squares := make([]float64, block*n)
	update := lanes.NewUpdater(n)
	for first := 0; first < shots.Count(); first += block {
		rows := min(block, shots.Count()-first)
		for i, v := range shots.Data[first*n : (first+rows)*n] {
			d := float64(v) - mean[i%n]
			squares[i] = d * d
		}
		update.Add(sum.RawSymmetric().Data, n, squares[:rows*n])
	}
	return sum
}
