package fluid

import "math"

// Expansion is a law seen from a reference density, so that differences from
// that density keep their relative accuracy however small they are. Solutions
// that leave a plateau exponentially slowly need that.
type Expansion struct {
	density  float64
	swelling float64
	slope    float64 // Scale()·η, finite for the cubic law
	root     float64 // √(1+2ηn) at the reference
}

// About returns the law expanded about density n ≥ 0; it panics on any other.
func (l Law) About(n float64) Expansion {
	if !(n >= 0) {
		panic("fluid: reference density must not be negative")
	}
	return Expansion{
		density:  n,
		swelling: l.swelling,
		slope:    l.stiffness(),
		root:     math.Sqrt(1 + 2*l.swelling*n),
	}
}

// stiffness is Scale()·η = (1+2η)^{3/2}/(2+3η), which is ½ for the cubic law.
func (l Law) stiffness() float64 {
	r := math.Sqrt(1 + 2*l.swelling)
	return r * r * r / (2 + 3*l.swelling)
}

// Rise returns f(n+dn) − f(n).
//
// With r = √(1+2ηn) the swollen law is f ∝ (3r − 1/r)/2, so a difference of f
// is a difference of r times a smooth factor.
func (e *Expansion) Rise(dn float64) float64 {
	if e.swelling == 0 {
		return dn
	}
	r := math.Sqrt(1 + 2*e.swelling*(e.density+dn))
	return e.slope * dn * (3*r*e.root + 1) / (r * e.root * (r + e.root))
}

// Excess returns e(n+dn) − e(n) − f(n)·dn, the energy per length beyond the
// linear part, e′ = f. It is of second order in dn.
func (e *Expansion) Excess(dn float64) float64 {
	if e.swelling == 0 {
		return dn * dn / 2
	}
	// ∫(1+3y)/√(1+2y) dy = (r³ − r)/2; with δ = r − r₀ the remainder after
	// the linear part is δ²(3r₀/4 + δ/2 + 1/(4r₀)) without approximation.
	r := math.Sqrt(1 + 2*e.swelling*(e.density+dn))
	sum := r + e.root
	delta := 2 * e.swelling * dn / sum
	return e.slope * dn * dn / (sum * sum) * (3*e.root + 2*delta + 1/e.root)
}

// Curvature returns f″(n), zero for the cubic law.
func (l Law) Curvature(n float64) float64 {
	if l.swelling == 0 {
		return 0
	}
	y := l.swelling * n
	r2 := 1 + 2*y
	return -3 * l.stiffness() * l.swelling * (1 + y) / (r2 * r2 * math.Sqrt(r2))
}

// SoundSlope returns dc/dn = (f′ + n f″)/(2c).
func (l Law) SoundSlope(n float64) float64 {
	return (l.Slope(n) + n*l.Curvature(n)) / (2 * l.SoundSpeed(n))
}
