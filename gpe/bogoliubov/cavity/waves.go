package cavity

import (
	"math"
	"math/cmplx"
)

// pair is two of the four waves of a uniform flow at one frequency: the sum and
// the product of their wave numbers. Everything that is built from a pair
// depends on these alone, which are analytic in ω where the single wave numbers
// have branch points.
type pair struct{ sum, product complex128 }

// growing returns the two waves whose e^{ikx} grows with x, Im k < 0, of
//
//	k⁴ + 4(c² − v²)k² + 8ωvk − 4ω² = 0,  Im ω > 0:
//
// those that die away to the left. There are always two, because a real k
// belongs to a real ω and so none crosses over in the upper half-plane. The
// other two sum to −sum and multiply to −4ω²/product.
func growing(omega complex128, v, c float64) pair {
	p := complex(4*(c-v)*(c+v), 0)
	q := complex(8*v, 0) * omega
	r := -4 * omega * omega
	k := quartic(p, q, r)
	// The two with the least imaginary part.
	for i := 1; i < 4; i++ {
		for j := i; j > 0 && imag(k[j]) < imag(k[j-1]); j-- {
			k[j], k[j-1] = k[j-1], k[j]
		}
	}
	// k⁴ + pk² + qk + r = (k² − sk + b)(k² + sk + d), polished as a whole: the
	// two pairs never meet, so Newton's method converges where roots of one
	// pair coincide, and where all are small against p.
	s, b, d := k[0]+k[1], k[0]*k[1], k[2]*k[3]
	for range 6 {
		f1, f2, f3 := b+d-s*s-p, s*(b-d)-q, b*d-r
		// Solve for ds, db, dd by elimination: db + dd = 2s ds − f1.
		//   (b−d)ds + s(db − dd) = −f2,  d db + b dd = −f3.
		// With m = db + dd and n = db − dd: d db + b dd = ½(b+d)m − ½(b−d)n.
		a11, a12 := b-d, s
		a21, a22 := (b+d)*s, -(b-d)/2
		g1, g2 := -f2, -f3+(b+d)*f1/2
		det := a11*a22 - a12*a21
		if det == 0 {
			break
		}
		ds := (g1*a22 - g2*a12) / det
		n := (a11*g2 - a21*g1) / det
		m := 2*s*ds - f1
		s, b, d = s+ds, b+(m+n)/2, d+(m-n)/2
		if size(ds) <= 1e-15*size(s) && size(m+n) <= 2e-15*size(b) {
			break
		}
	}
	return pair{s, b}
}

// size is |Re| + |Im|, a norm that needs no root.
func size(z complex128) float64 { return math.Abs(real(z)) + math.Abs(imag(z)) }

// quartic returns the roots of k⁴ + pk² + qk + r to about the square root of
// the machine's precision (L. Ferrari's method: the resolvent cubic
// z³ + 2pz² + (p² − 4r)z − q² = 0 in the square of the sum of two roots).
func quartic(p, q, r complex128) (k [4]complex128) {
	z := largestOfCubic(2*p, p*p-4*r, -q*q)
	a := cmplx.Sqrt(z)
	if a == 0 { // biquadratic
		root := cmplx.Sqrt(p*p/4 - r)
		x, y := cmplx.Sqrt(-p/2+root), cmplx.Sqrt(-p/2-root)
		return [4]complex128{x, -x, y, -y}
	}
	// (k² + ak + b)(k² − ak + d)
	b, d := (p+z-q/a)/2, (p+z+q/a)/2
	k[0], k[1] = quadratic(a, b)
	k[2], k[3] = quadratic(-a, d)
	return k
}

// quadratic returns the roots of k² + bk + c without cancellation.
func quadratic(b, c complex128) (x, y complex128) {
	root := cmplx.Sqrt(b*b/4 - c)
	half := -b / 2
	if real(half)*real(root)+imag(half)*imag(root) < 0 {
		root = -root
	}
	x = half + root
	if x == 0 {
		return 0, 0
	}
	return x, c / x
}

// largestOfCubic returns the root of largest modulus of z³ + az² + bz + c, by
// G. Cardano's formula.
func largestOfCubic(a, b, c complex128) complex128 {
	shift := -a / 3
	p := b - a*a/3
	q := a*(2*a*a/27-b/3) + c
	root := cmplx.Sqrt(q*q/4 + p*p*p/27)
	u := -q/2 + root
	if w := -q/2 - root; size(w) > size(u) {
		u = w
	}
	if u == 0 {
		return shift
	}
	u = cmplx.Pow(u, 1./3)
	best := complex128(0)
	for range 3 {
		if z := shift + u - p/(3*u); size(z) >= size(best) {
			best = z
		}
		u *= complex(-0.5, math.Sqrt(3)/2)
	}
	return best
}
