package fluid

import (
	"math"

	"gonum.org/v1/gonum/integrate/quad"
)

// riemannOrder Gauss–Legendre points on a panel no longer than 1 leave an
// error below 1e-30 relative to the integrand: its singularities in the
// variable used lie at a distance of π/2 or more from the real axis.
const riemannOrder = 16

var riemannNodes, riemannWeights = func() (x, w []float64) {
	x, w = make([]float64, riemannOrder), make([]float64, riemannOrder)
	quad.Legendre{}.FixedLocations(x, w, 0, 1)
	return x, w
}()

// Riemann returns ∫₀ⁿ c dn/n, the part of the Riemann invariant v ± ∫c dn/n
// that the density carries through a simple wave; for the cubic law it is 2c.
// L. D. Landau, E. M. Lifshitz, Fluid Mechanics, §105 (from memory). It panics
// on a negative density.
func (l Law) Riemann(n float64) float64 {
	if !(n >= 0) {
		panic("fluid: density must not be negative")
	}
	if l.swelling == 0 {
		return 2 * math.Sqrt(n)
	}
	// With ηn = ½ sinh²t the integrand is smooth down to empty space:
	// c dn/n = √(K/η) √(2 + (3/2)sinh²t) · √2/√cosh t dt, K = Scale()·η.
	end := math.Asinh(math.Sqrt(2 * l.swelling * n))
	panels := math.Ceil(end)
	var sum float64
	for p := 0.0; p < panels; p++ {
		for i, u := range riemannNodes {
			t := end * (p + u) / panels
			sh, ch := math.Sinh(t), math.Cosh(t)
			sum += riemannWeights[i] * math.Sqrt((4+3*sh*sh)/ch)
		}
	}
	if panels == 0 {
		return 0
	}
	return math.Sqrt(l.stiffness()/l.swelling) * sum * end / panels
}
