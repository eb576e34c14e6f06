package cavity

import "math/cmplx"

// vector is a disturbance at one place: U, V, U′, V′.
type vector [4]complex128

// plane is two solutions side by side, a∧b: the six minors of the 4×2 matrix
// [a b], over the rows UV, UU′, UV′, VU′, VV′, U′V′. It obeys a linear equation
// of its own, in which the faster of two growing solutions cannot drown the
// slower: the compound-matrix method, B. S. Ng, W. H. Reid, J. Comput. Phys.
// 30, 125 (1979).
type plane [6]complex128

// spanned returns the plane of a pair of waves at x = 0, divided by the
// difference k₂ − k₁ of their wave numbers. With the polarisation
// U = c², V = ω − vk − ½k² − c² the entries of a wave's vector are polynomials
// in k that no value of ω makes dependent; so the quotient is a polynomial in
// sum and product, regular where the two coincide, and zero nowhere.
func spanned(w pair, omega complex128, v, c float64) plane {
	c2, vc := complex(c*c, 0), complex(v, 0)
	s, m := w.sum, w.product
	a := omega - c2
	slope := -vc - s/2 // (V₂ − V₁)/(k₂ − k₁)
	return plane{
		c2 * slope,
		1i * c2 * c2,
		1i * c2 * (a - vc*s - (s*s-m)/2),
		1i * c2 * (a + m/2),
		1i * (a*a - a*(vc*s+(s*s-2*m)/2) + m*(vc*vc+vc*s/2+m/4)),
		-m * c2 * slope,
	}
}

// meet returns a∧b∧a'∧b' for two planes: zero where they share a solution.
func meet(p, q plane) complex128 {
	return p[0]*q[5] - p[1]*q[4] + p[2]*q[3] + p[3]*q[2] - p[4]*q[1] + p[5]*q[0]
}

// mirrored returns the plane seen in the coordinate −x, in which derivatives
// change their sign.
func (p plane) mirrored() plane { return plane{p[0], -p[1], -p[2], -p[3], -p[4], p[5]} }

// shared returns the solution in which two planes meet, of size 1. It is any
// vector of p on which a form that vanishes on q vanishes; the form is taken
// that tells best.
func shared(p, q plane) vector {
	// dual[i][j] is ε_ijkl q_kl/2.
	dual := [4][4]complex128{
		{0, q[5], -q[4], q[3]},
		{-q[5], 0, q[2], -q[1]},
		{q[4], -q[2], 0, q[0]},
		{-q[3], q[1], -q[0], 0},
	}
	minor := [4][4]complex128{
		{0, p[0], p[1], p[2]},
		{-p[0], 0, p[3], p[4]},
		{-p[1], -p[3], 0, p[5]},
		{-p[2], -p[4], -p[5], 0},
	}
	var best vector
	most := 0.0
	for g := range 4 {
		var e vector
		sum := 0.0
		for i := range 4 {
			for j := range 4 {
				e[i] += minor[i][j] * dual[j][g]
			}
			sum += real(e[i])*real(e[i]) + imag(e[i])*imag(e[i])
		}
		if sum > most {
			best, most = e, sum
		}
	}
	scale := cmplx.Sqrt(complex(most, 0))
	if scale == 0 {
		return best
	}
	for i := range best {
		best[i] /= scale
	}
	return best
}

// equation is the equation of planes where c is constant, p′ = Mp, less a
// constant rate, e^{−ρx}p: it multiplies everything by the same number, which
// is zero nowhere.
type equation struct {
	omega, turn, rate complex128 // ω, 2iv, ρ
	z                 complex128 // 2c²
}

// apply returns M p.
func (e equation) apply(p plane) plane {
	w2 := 2 * e.omega
	mixed := e.z * p[0]
	both := p[2] + p[3]
	return plane{
		p[2] - p[3] - e.rate*p[0],
		mixed - (e.turn+e.rate)*p[1],
		p[5] + w2*p[0] + mixed + (e.turn-e.rate)*p[2],
		-p[5] + w2*p[0] - mixed - (e.turn+e.rate)*p[3],
		-mixed + (e.turn-e.rate)*p[4],
		e.z*(p[2]+p[4]-p[3]-p[1]) - w2*both - e.rate*p[5],
	}
}
