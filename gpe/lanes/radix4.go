package lanes

// forward4 does one forward pass of radix 4. Legs come in natural order; leg q
// leaves as sum over the legs with weights (−i)^{pq}, times its twiddle.
func forward4[T Float](re, im []T, p *pass[T]) {
	rs, ms, n := rows(re), rows(im), p.span
	for block := 0; block < len(rs); block += 4 * n {
		rs0, ms0 := rs[block:][:n], ms[block:][:n]
		rs1, ms1 := rs[block+n:][:n], ms[block+n:][:n]
		rs2, ms2 := rs[block+2*n:][:n], ms[block+2*n:][:n]
		rs3, ms3 := rs[block+3*n:][:n], ms[block+3*n:][:n]
		tw := p.twiddle
		for j := range n {
			w := (*[6]T)(tw)
			tw = tw[6:]
			w1r, w1i, w2r, w2i, w3r, w3i := w[0], w[1], w[2], w[3], w[4], w[5]
			r0, m0 := &rs0[j], &ms0[j]
			r1, m1 := &rs1[j], &ms1[j]
			r2, m2 := &rs2[j], &ms2[j]
			r3, m3 := &rs3[j], &ms3[j]
			for l := range Width {
				ar, br := r0[l]+r2[l], r0[l]-r2[l]
				cr, dr := r1[l]+r3[l], r1[l]-r3[l]
				ai, bi := m0[l]+m2[l], m0[l]-m2[l]
				ci, di := m1[l]+m3[l], m1[l]-m3[l]
				r0[l], m0[l] = ar+cr, ai+ci
				xr, xi := ar-cr, ai-ci
				r2[l], m2[l] = xr*w2r-xi*w2i, xr*w2i+xi*w2r
				xr, xi = br+di, bi-dr
				r1[l], m1[l] = xr*w1r-xi*w1i, xr*w1i+xi*w1r
				xr, xi = br-di, bi+dr
				r3[l], m3[l] = xr*w3r-xi*w3i, xr*w3i+xi*w3r
			}
		}
	}
}

// backward4 undoes forward4, up to the factor 4.
func backward4[T Float](re, im []T, p *pass[T]) {
	rs, ms, n := rows(re), rows(im), p.span
	for block := 0; block < len(rs); block += 4 * n {
		rs0, ms0 := rs[block:][:n], ms[block:][:n]
		rs1, ms1 := rs[block+n:][:n], ms[block+n:][:n]
		rs2, ms2 := rs[block+2*n:][:n], ms[block+2*n:][:n]
		rs3, ms3 := rs[block+3*n:][:n], ms[block+3*n:][:n]
		tw := p.twiddle
		for j := range n {
			w := (*[6]T)(tw)
			tw = tw[6:]
			w1r, w1i, w2r, w2i, w3r, w3i := w[0], w[1], w[2], w[3], w[4], w[5]
			r0, m0 := &rs0[j], &ms0[j]
			r1, m1 := &rs1[j], &ms1[j]
			r2, m2 := &rs2[j], &ms2[j]
			r3, m3 := &rs3[j], &ms3[j]
			for l := range Width {
				xr, xi := r2[l]*w2r+m2[l]*w2i, m2[l]*w2r-r2[l]*w2i
				ar, br := r0[l]+xr, r0[l]-xr
				ai, bi := m0[l]+xi, m0[l]-xi
				yr, yi := r1[l]*w1r+m1[l]*w1i, m1[l]*w1r-r1[l]*w1i
				zr, zi := r3[l]*w3r+m3[l]*w3i, m3[l]*w3r-r3[l]*w3i
				cr, dr := yr+zr, yr-zr
				ci, di := yi+zi, yi-zi
				r0[l], m0[l] = ar+cr, ai+ci
				r1[l], m1[l] = br-di, bi+dr
				r2[l], m2[l] = ar-cr, ai-ci
				r3[l], m3[l] = br+di, bi-dr
			}
		}
	}
}

// middle4 does the last forward pass, in which all twiddles are 1, the kinetic
// factor and the first backward pass on groups of four neighbouring places.
func middle4(re, im, kinRe, kinIm []float64) {
	for at := 0; at < len(re); at += 4 * Width {
		r, m := (*[4 * Width]float64)(re[at:]), (*[4 * Width]float64)(im[at:])
		kr, ki := (*[4]float64)(kinRe[at/Width:]), (*[4]float64)(kinIm[at/Width:])
		k0r, k1r, k2r, k3r := kr[0], kr[1], kr[2], kr[3]
		k0i, k1i, k2i, k3i := ki[0], ki[1], ki[2], ki[3]
		for l := range Width {
			ar, br := r[l]+r[2*Width+l], r[l]-r[2*Width+l]
			cr, dr := r[Width+l]+r[3*Width+l], r[Width+l]-r[3*Width+l]
			ai, bi := m[l]+m[2*Width+l], m[l]-m[2*Width+l]
			ci, di := m[Width+l]+m[3*Width+l], m[Width+l]-m[3*Width+l]

			xr, xi := ar+cr, ai+ci
			y0r, y0i := xr*k0r-xi*k0i, xr*k0i+xi*k0r
			xr, xi = ar-cr, ai-ci
			y2r, y2i := xr*k2r-xi*k2i, xr*k2i+xi*k2r
			ar, br, ai, bi, cr, dr, ci, di = y0r+y2r, y0r-y2r, y0i+y2i, y0i-y2i, br+di, br-di, bi-dr, bi+dr
			y1r, y1i := cr*k1r-ci*k1i, cr*k1i+ci*k1r
			y3r, y3i := dr*k3r-di*k3i, dr*k3i+di*k3r
			cr, dr, ci, di = y1r+y3r, y1r-y3r, y1i+y3i, y1i-y3i

			r[l], m[l] = ar+cr, ai+ci
			r[Width+l], m[Width+l] = br-di, bi+dr
			r[2*Width+l], m[2*Width+l] = ar-cr, ai-ci
			r[3*Width+l], m[3*Width+l] = br+di, bi-dr
		}
	}
}
