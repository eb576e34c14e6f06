package lanes

import "math"

// The phase t in units of π is reduced by its nearest whole number n to
// f = t − n, |f| ≤ ½, which is exact, and
//
//	exp(−iπt) = (−1)^n (cos πf − i sin πf).
//
// With z = f², sin πf = f·(s0 + s1 z + … + s8 z⁸) and
// cos πf = 1 + c1 z + … + c8 z⁸. The coefficients are minimax: the exchange
// algorithm in 60-digit arithmetic for the absolute error of sin and cos on
// 0 < z ≤ ¼; the lowest coefficient is rounded to double precision, the rest
// fitted anew, and so on upwards. That leaves 4e-18 for the sine and 3e-17 for
// the cosine; what is seen above that is rounding.
const (
	// magic added to t leaves n in the lowest bits of the mantissa;
	// subtracted again it leaves n. Go never reorders floating-point
	// operations, so that the pair survives the compiler.
	magic = 3 << 51
	one   = 0x3ff0000000000000 // the bits of 1.0

	s0 = 3.141592653589793
	s1 = -5.167712780049946
	s2 = 2.550164039875999
	s3 = -0.5992645292863936
	s4 = 0.08214588614216695
	s5 = -0.0073704272753377644
	s6 = 0.00046628604345404966
	s7 = -2.1872378330766814e-05
	s8 = 7.408584124510002e-07

	c1 = -4.934802200544677
	c2 = 4.058712126416504
	c3 = -1.3352627688431513
	c4 = 0.2353306301195154
	c5 = -0.02580688861695975
	c6 = 0.0019295555721679475
	c7 = -0.00010456453928528452
	c8 = 4.147269028728277e-06
)

// reduce returns f and (−1)^n of the phase t.
func reduce(t float64) (f, sign float64) {
	n := t + magic
	return t - (n - magic), math.Float64frombits(math.Float64bits(n)<<63 | one)
}

// rotate multiplies one point of all lanes by sign·exp(−iπf). Two lanes go in
// lock-step and the polynomials by pairs of terms: the chains of dependent
// operations are then short enough for the processor to overlap them.
func rotate(r, m, frac, sign *[Width]float64) {
	for l := 0; l < Width-1; l += 2 {
		af, bf := frac[l], frac[l+1]
		az, bz := af*af, bf*bf
		aw, bw := az*az, bz*bz
		as, bs := s7+az*s8, s7+bz*s8
		ac, bc := c7+az*c8, c7+bz*c8
		as, bs = (s5+az*s6)+aw*as, (s5+bz*s6)+bw*bs
		ac, bc = (c5+az*c6)+aw*ac, (c5+bz*c6)+bw*bc
		as, bs = (s3+az*s4)+aw*as, (s3+bz*s4)+bw*bs
		ac, bc = (c3+az*c4)+aw*ac, (c3+bz*c4)+bw*bc
		as, bs = (s1+az*s2)+aw*as, (s1+bz*s2)+bw*bs
		ac, bc = (c1+az*c2)+aw*ac, (c1+bz*c2)+bw*bc
		as, bs = (s0+az*as)*(af*sign[l]), (s0+bz*bs)*(bf*sign[l+1])
		ac, bc = (1+az*ac)*sign[l], (1+bz*bc)*sign[l+1]
		ar, ai, br, bi := r[l], m[l], r[l+1], m[l+1]
		r[l], m[l] = ar*ac+ai*as, ai*ac-ar*as
		r[l+1], m[l+1] = br*bc+bi*bs, bi*bc-br*bs
	}
}

// phaseCubic is Phase. It and its siblings below first find and reduce the
// phases of a point in all lanes, then rotate them: one loop for both takes a
// quarter longer, since its chain is too long to overlap with the next.
func phaseCubic(re, im, v, g []float64) {
	rs, ms := rows(re)[:len(v)], rows(im)[:len(v)]
	g = g[:len(v)]
	var frac, sign [Width]float64
	for j, vj := range v {
		r, m, gj := &rs[j], &ms[j], g[j]
		for l := range Width {
			frac[l], sign[l] = reduce(vj + gj*(r[l]*r[l]+m[l]*m[l]))
		}
		rotate(r, m, &frac, &sign)
	}
}

// phaseShifted is PhaseLaw for the cubic law.
func phaseShifted(re, im, v, g, s []float64) {
	rs, ms := rows(re)[:len(v)], rows(im)[:len(v)]
	g, s = g[:len(v)], s[:len(v)]
	var frac, sign [Width]float64
	for j, vj := range v {
		r, m, gj, sj := &rs[j], &ms[j], g[j], s[j]
		for l := range Width {
			frac[l], sign[l] = reduce(vj + gj*(r[l]*r[l]+m[l]*m[l]-sj))
		}
		rotate(r, m, &frac, &sign)
	}
}

// phaseSwollen is PhaseLaw for the swollen law. With y = ηn it is
// scale·((1+3y)/√(1+2y) − 1), here without the cancellation at small y.
func phaseSwollen(re, im, v, g, s []float64, swelling, scale float64) {
	rs, ms := rows(re)[:len(v)], rows(im)[:len(v)]
	g, s = g[:len(v)], s[:len(v)]
	var frac, sign [Width]float64
	for j, vj := range v {
		r, m, gj, sj := &rs[j], &ms[j], scale*g[j], s[j]
		for l := range Width {
			y := swelling * (r[l]*r[l] + m[l]*m[l] - sj)
			root := math.Sqrt(1 + 2*y)
			frac[l], sign[l] = reduce(vj + gj*(y*(4+9*y)/(root*(1+3*y+root))))
		}
		rotate(r, m, &frac, &sign)
	}
}

func damp(re, im, d []float64) {
	rs, ms := rows(re)[:len(d)], rows(im)[:len(d)]
	for j, dj := range d {
		r, m := &rs[j], &ms[j]
		for l := range Width {
			r[l] *= dj
			m[l] *= dj
		}
	}
}
