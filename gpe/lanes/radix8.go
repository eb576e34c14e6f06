package lanes

import "math"

// A radix-8 butterfly is two of radix 4, on the sums and on the differences of
// opposite legs, the latter first turned by multiples of an eighth of a turn.

const half = math.Sqrt2 / 2

// forward8 does one forward pass of radix 8.
func forward8[T Float](re, im []T, p *pass[T]) {
	rs, ms, n := rows(re), rows(im), p.span
	for block := 0; block < len(rs); block += 8 * n {
		rs0, ms0 := rs[block:][:n], ms[block:][:n]
		rs1, ms1 := rs[block+n:][:n], ms[block+n:][:n]
		rs2, ms2 := rs[block+2*n:][:n], ms[block+2*n:][:n]
		rs3, ms3 := rs[block+3*n:][:n], ms[block+3*n:][:n]
		rs4, ms4 := rs[block+4*n:][:n], ms[block+4*n:][:n]
		rs5, ms5 := rs[block+5*n:][:n], ms[block+5*n:][:n]
		rs6, ms6 := rs[block+6*n:][:n], ms[block+6*n:][:n]
		rs7, ms7 := rs[block+7*n:][:n], ms[block+7*n:][:n]
		tw := p.twiddle
		for j := range n {
			w := (*[14]T)(tw)
			tw = tw[14:]
			r0, m0 := &rs0[j], &ms0[j]
			r1, m1 := &rs1[j], &ms1[j]
			r2, m2 := &rs2[j], &ms2[j]
			r3, m3 := &rs3[j], &ms3[j]
			r4, m4 := &rs4[j], &ms4[j]
			r5, m5 := &rs5[j], &ms5[j]
			r6, m6 := &rs6[j], &ms6[j]
			r7, m7 := &rs7[j], &ms7[j]
			for l := range Width {
				s0r, d0r := r0[l]+r4[l], r0[l]-r4[l]
				s0i, d0i := m0[l]+m4[l], m0[l]-m4[l]
				s2r, d2r := r2[l]+r6[l], r2[l]-r6[l]
				s2i, d2i := m2[l]+m6[l], m2[l]-m6[l]
				s1r, d1r := r1[l]+r5[l], r1[l]-r5[l]
				s1i, d1i := m1[l]+m5[l], m1[l]-m5[l]
				s3r, d3r := r3[l]+r7[l], r3[l]-r7[l]
				s3i, d3i := m3[l]+m7[l], m3[l]-m7[l]

				ar, br, ai, bi := s0r+s2r, s0r-s2r, s0i+s2i, s0i-s2i
				cr, dr, ci, di := s1r+s3r, s1r-s3r, s1i+s3i, s1i-s3i
				r0[l], m0[l] = ar+cr, ai+ci
				xr, xi := ar-cr, ai-ci
				r4[l], m4[l] = xr*w[6]-xi*w[7], xr*w[7]+xi*w[6]
				xr, xi = br+di, bi-dr
				r2[l], m2[l] = xr*w[2]-xi*w[3], xr*w[3]+xi*w[2]
				xr, xi = br-di, bi+dr
				r6[l], m6[l] = xr*w[10]-xi*w[11], xr*w[11]+xi*w[10]

				// Leg 1 turns by (1−i)/√2, leg 2 by −i, leg 3 by −(1+i)/√2.
				d1r, d1i = half*(d1r+d1i), half*(d1i-d1r)
				d3r, d3i = half*(d3i-d3r), -half*(d3r+d3i)
				ar, br, ai, bi = d0r+d2i, d0r-d2i, d0i-d2r, d0i+d2r
				cr, dr, ci, di = d1r+d3r, d1r-d3r, d1i+d3i, d1i-d3i
				xr, xi = ar+cr, ai+ci
				r1[l], m1[l] = xr*w[0]-xi*w[1], xr*w[1]+xi*w[0]
				xr, xi = ar-cr, ai-ci
				r5[l], m5[l] = xr*w[8]-xi*w[9], xr*w[9]+xi*w[8]
				xr, xi = br+di, bi-dr
				r3[l], m3[l] = xr*w[4]-xi*w[5], xr*w[5]+xi*w[4]
				xr, xi = br-di, bi+dr
				r7[l], m7[l] = xr*w[12]-xi*w[13], xr*w[13]+xi*w[12]
			}
		}
	}
}

// backward8 undoes forward8, up to the factor 8.
func backward8[T Float](re, im []T, p *pass[T]) {
	rs, ms, n := rows(re), rows(im), p.span
	for block := 0; block < len(rs); block += 8 * n {
		rs0, ms0 := rs[block:][:n], ms[block:][:n]
		rs1, ms1 := rs[block+n:][:n], ms[block+n:][:n]
		rs2, ms2 := rs[block+2*n:][:n], ms[block+2*n:][:n]
		rs3, ms3 := rs[block+3*n:][:n], ms[block+3*n:][:n]
		rs4, ms4 := rs[block+4*n:][:n], ms[block+4*n:][:n]
		rs5, ms5 := rs[block+5*n:][:n], ms[block+5*n:][:n]
		rs6, ms6 := rs[block+6*n:][:n], ms[block+6*n:][:n]
		rs7, ms7 := rs[block+7*n:][:n], ms[block+7*n:][:n]
		tw := p.twiddle
		for j := range n {
			w := (*[14]T)(tw)
			tw = tw[14:]
			r0, m0 := &rs0[j], &ms0[j]
			r1, m1 := &rs1[j], &ms1[j]
			r2, m2 := &rs2[j], &ms2[j]
			r3, m3 := &rs3[j], &ms3[j]
			r4, m4 := &rs4[j], &ms4[j]
			r5, m5 := &rs5[j], &ms5[j]
			r6, m6 := &rs6[j], &ms6[j]
			r7, m7 := &rs7[j], &ms7[j]
			for l := range Width {
				// Odd legs.
				xr, xi := r1[l]*w[0]+m1[l]*w[1], m1[l]*w[0]-r1[l]*w[1]
				yr, yi := r5[l]*w[8]+m5[l]*w[9], m5[l]*w[8]-r5[l]*w[9]
				ar, br, ai, bi := xr+yr, xr-yr, xi+yi, xi-yi
				xr, xi = r3[l]*w[4]+m3[l]*w[5], m3[l]*w[4]-r3[l]*w[5]
				yr, yi = r7[l]*w[12]+m7[l]*w[13], m7[l]*w[12]-r7[l]*w[13]
				cr, dr, ci, di := xr+yr, xr-yr, xi+yi, xi-yi
				d0r, d0i := ar+cr, ai+ci
				d2r, d2i := ci-ai, ar-cr // turned by i
				d1r, d1i := br-di, bi+dr
				d3r, d3i := br+di, bi-dr
				// Turned by (1+i)/√2 and (i−1)/√2.
				d1r, d1i = half*(d1r-d1i), half*(d1r+d1i)
				d3r, d3i = -half*(d3r+d3i), half*(d3r-d3i)

				// Even legs.
				xr, xi = r0[l], m0[l]
				yr, yi = r4[l]*w[6]+m4[l]*w[7], m4[l]*w[6]-r4[l]*w[7]
				ar, br, ai, bi = xr+yr, xr-yr, xi+yi, xi-yi
				xr, xi = r2[l]*w[2]+m2[l]*w[3], m2[l]*w[2]-r2[l]*w[3]
				yr, yi = r6[l]*w[10]+m6[l]*w[11], m6[l]*w[10]-r6[l]*w[11]
				cr, dr, ci, di = xr+yr, xr-yr, xi+yi, xi-yi

				xr, xi = ar+cr, ai+ci
				r0[l], m0[l] = xr+d0r, xi+d0i
				r4[l], m4[l] = xr-d0r, xi-d0i
				xr, xi = ar-cr, ai-ci
				r2[l], m2[l] = xr+d2r, xi+d2i
				r6[l], m6[l] = xr-d2r, xi-d2i
				xr, xi = br-di, bi+dr
				r1[l], m1[l] = xr+d1r, xi+d1i
				r5[l], m5[l] = xr-d1r, xi-d1i
				xr, xi = br+di, bi-dr
				r3[l], m3[l] = xr+d3r, xi+d3i
				r7[l], m7[l] = xr-d3r, xi-d3i
			}
		}
	}
}

// middle8 does the last forward pass, in which all twiddles are 1, the kinetic
// factor and the first backward pass on groups of eight neighbouring places.
func middle8(re, im, kinRe, kinIm []float64) {
	for at := 0; at < len(re); at += 8 * Width {
		r, m := (*[8 * Width]float64)(re[at:]), (*[8 * Width]float64)(im[at:])
		kr, ki := (*[8]float64)(kinRe[at/Width:]), (*[8]float64)(kinIm[at/Width:])
		for l := range Width {
			s0r, d0r := r[l]+r[4*Width+l], r[l]-r[4*Width+l]
			s0i, d0i := m[l]+m[4*Width+l], m[l]-m[4*Width+l]
			s2r, d2r := r[2*Width+l]+r[6*Width+l], r[2*Width+l]-r[6*Width+l]
			s2i, d2i := m[2*Width+l]+m[6*Width+l], m[2*Width+l]-m[6*Width+l]
			s1r, d1r := r[Width+l]+r[5*Width+l], r[Width+l]-r[5*Width+l]
			s1i, d1i := m[Width+l]+m[5*Width+l], m[Width+l]-m[5*Width+l]
			s3r, d3r := r[3*Width+l]+r[7*Width+l], r[3*Width+l]-r[7*Width+l]
			s3i, d3i := m[3*Width+l]+m[7*Width+l], m[3*Width+l]-m[7*Width+l]

			// Even places, there and back.
			ar, br, ai, bi := s0r+s2r, s0r-s2r, s0i+s2i, s0i-s2i
			cr, dr, ci, di := s1r+s3r, s1r-s3r, s1i+s3i, s1i-s3i
			xr, xi := ar+cr, ai+ci
			yr, yi := xr*kr[0]-xi*ki[0], xr*ki[0]+xi*kr[0]
			xr, xi = ar-cr, ai-ci
			zr, zi := xr*kr[4]-xi*ki[4], xr*ki[4]+xi*kr[4]
			ar, ai = br+di, bi-dr
			cr, ci = br-di, bi+dr
			s0r, s2r, s0i, s2i = yr+zr, yr-zr, yi+zi, yi-zi
			yr, yi = ar*kr[2]-ai*ki[2], ar*ki[2]+ai*kr[2]
			zr, zi = cr*kr[6]-ci*ki[6], cr*ki[6]+ci*kr[6]
			s1r, s3r, s1i, s3i = yr+zr, yr-zr, yi+zi, yi-zi

			// Odd places.
			d1r, d1i = half*(d1r+d1i), half*(d1i-d1r)
			d3r, d3i = half*(d3i-d3r), -half*(d3r+d3i)
			ar, br, ai, bi = d0r+d2i, d0r-d2i, d0i-d2r, d0i+d2r
			cr, dr, ci, di = d1r+d3r, d1r-d3r, d1i+d3i, d1i-d3i
			xr, xi = ar+cr, ai+ci
			yr, yi = xr*kr[1]-xi*ki[1], xr*ki[1]+xi*kr[1]
			xr, xi = ar-cr, ai-ci
			zr, zi = xr*kr[5]-xi*ki[5], xr*ki[5]+xi*kr[5]
			ar, ai = br+di, bi-dr
			cr, ci = br-di, bi+dr
			br, bi = yr-zr, yi-zi
			d0r, d0i = yr+zr, yi+zi
			yr, yi = ar*kr[3]-ai*ki[3], ar*ki[3]+ai*kr[3]
			zr, zi = cr*kr[7]-ci*ki[7], cr*ki[7]+ci*kr[7]
			cr, dr, ci, di = yr+zr, yr-zr, yi+zi, yi-zi
			d2r, d2i = ci-d0i, d0r-cr // turned by i
			d0r, d0i = d0r+cr, d0i+ci
			d1r, d1i = br-di, bi+dr
			d3r, d3i = br+di, bi-dr
			d1r, d1i = half*(d1r-d1i), half*(d1r+d1i)
			d3r, d3i = -half*(d3r+d3i), half*(d3r-d3i)

			xr, xi = s0r+s1r, s0i+s1i
			r[l], m[l] = xr+d0r, xi+d0i
			r[4*Width+l], m[4*Width+l] = xr-d0r, xi-d0i
			xr, xi = s0r-s1r, s0i-s1i
			r[2*Width+l], m[2*Width+l] = xr+d2r, xi+d2i
			r[6*Width+l], m[6*Width+l] = xr-d2r, xi-d2i
			xr, xi = s2r-s3i, s2i+s3r
			r[Width+l], m[Width+l] = xr+d1r, xi+d1i
			r[5*Width+l], m[5*Width+l] = xr-d1r, xi-d1i
			xr, xi = s2r+s3i, s2i-s3r
			r[3*Width+l], m[3*Width+l] = xr+d3r, xi+d3i
			r[7*Width+l], m[7*Width+l] = xr-d3r, xi-d3i
		}
	}
}
