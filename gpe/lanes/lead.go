package lanes

// Passes of radix 3 and 5. They lead the plans of lengths 3·2^a and 5·2^a and
// occur nowhere else.

const (
	sin3  = 0.86602540378443864676372317075293618347140262690519 // sin(2π/3)
	cos51 = 0.30901699437494742410229341718281905886015458990288 // cos(2π/5)
	cos52 = -0.8090169943749474241022934171828190588601545899029 // cos(4π/5)
	sin51 = 0.95105651629515357211643933337938214340569863412575 // sin(2π/5)
	sin52 = 0.58778525229247312916870595463907276859765243764315 // sin(4π/5)
)

// turn multiplies (xr, xi) by (wr, wi).
func turn[T Float](xr, xi, wr, wi T) (T, T) {
	return xr*wr - xi*wi, xr*wi + xi*wr
}

// unturn multiplies (xr, xi) by the conjugate of (wr, wi).
func unturn[T Float](xr, xi, wr, wi T) (T, T) {
	return xr*wr + xi*wi, xi*wr - xr*wi
}

// forward3 does one forward pass of radix 3.
func forward3[T Float](re, im []T, p *pass[T]) {
	rs, ms, n := rows(re), rows(im), p.span
	for block := 0; block < len(rs); block += 3 * n {
		rs0, ms0 := rs[block:][:n], ms[block:][:n]
		rs1, ms1 := rs[block+n:][:n], ms[block+n:][:n]
		rs2, ms2 := rs[block+2*n:][:n], ms[block+2*n:][:n]
		tw := p.twiddle
		for j := range n {
			w := (*[4]T)(tw)
			tw = tw[4:]
			r0, m0 := &rs0[j], &ms0[j]
			r1, m1 := &rs1[j], &ms1[j]
			r2, m2 := &rs2[j], &ms2[j]
			for l := range Width {
				ar, ai := r0[l], m0[l]
				sr, si := r1[l]+r2[l], m1[l]+m2[l]
				dr, di := sin3*(r1[l]-r2[l]), sin3*(m1[l]-m2[l])
				r0[l], m0[l] = ar+sr, ai+si
				ar, ai = ar-sr/2, ai-si/2
				r1[l], m1[l] = turn(ar+di, ai-dr, w[0], w[1])
				r2[l], m2[l] = turn(ar-di, ai+dr, w[2], w[3])
			}
		}
	}
}

// backward3 undoes forward3, up to the factor 3.
func backward3[T Float](re, im []T, p *pass[T]) {
	rs, ms, n := rows(re), rows(im), p.span
	for block := 0; block < len(rs); block += 3 * n {
		rs0, ms0 := rs[block:][:n], ms[block:][:n]
		rs1, ms1 := rs[block+n:][:n], ms[block+n:][:n]
		rs2, ms2 := rs[block+2*n:][:n], ms[block+2*n:][:n]
		tw := p.twiddle
		for j := range n {
			w := (*[4]T)(tw)
			tw = tw[4:]
			r0, m0 := &rs0[j], &ms0[j]
			r1, m1 := &rs1[j], &ms1[j]
			r2, m2 := &rs2[j], &ms2[j]
			for l := range Width {
				ar, ai := r0[l], m0[l]
				br, bi := unturn(r1[l], m1[l], w[0], w[1])
				cr, ci := unturn(r2[l], m2[l], w[2], w[3])
				sr, si := br+cr, bi+ci
				dr, di := sin3*(br-cr), sin3*(bi-ci)
				r0[l], m0[l] = ar+sr, ai+si
				ar, ai = ar-sr/2, ai-si/2
				r1[l], m1[l] = ar-di, ai+dr
				r2[l], m2[l] = ar+di, ai-dr
			}
		}
	}
}

// forward5 does one forward pass of radix 5.
func forward5[T Float](re, im []T, p *pass[T]) {
	rs, ms, n := rows(re), rows(im), p.span
	for block := 0; block < len(rs); block += 5 * n {
		rs0, ms0 := rs[block:][:n], ms[block:][:n]
		rs1, ms1 := rs[block+n:][:n], ms[block+n:][:n]
		rs2, ms2 := rs[block+2*n:][:n], ms[block+2*n:][:n]
		rs3, ms3 := rs[block+3*n:][:n], ms[block+3*n:][:n]
		rs4, ms4 := rs[block+4*n:][:n], ms[block+4*n:][:n]
		tw := p.twiddle
		for j := range n {
			w := (*[8]T)(tw)
			tw = tw[8:]
			r0, m0 := &rs0[j], &ms0[j]
			r1, m1 := &rs1[j], &ms1[j]
			r2, m2 := &rs2[j], &ms2[j]
			r3, m3 := &rs3[j], &ms3[j]
			r4, m4 := &rs4[j], &ms4[j]
			for l := range Width {
				ar, ai, br, bi, cr, ci := r0[l], m0[l], r1[l], m1[l], r2[l], m2[l]
				gr, gi, er, ei := r3[l], m3[l], r4[l], m4[l]
				sr, si, dr, di := br+er, bi+ei, br-er, bi-ei
				tr, ti, fr, fi := cr+gr, ci+gi, cr-gr, ci-gi
				r0[l], m0[l] = ar+sr+tr, ai+si+ti
				ur, ui := ar+cos51*sr+cos52*tr, ai+cos51*si+cos52*ti
				vr, vi := ar+cos52*sr+cos51*tr, ai+cos52*si+cos51*ti
				pr, pi := sin51*dr+sin52*fr, sin51*di+sin52*fi
				qr, qi := sin52*dr-sin51*fr, sin52*di-sin51*fi
				r1[l], m1[l] = turn(ur+pi, ui-pr, w[0], w[1])
				r4[l], m4[l] = turn(ur-pi, ui+pr, w[6], w[7])
				r2[l], m2[l] = turn(vr+qi, vi-qr, w[2], w[3])
				r3[l], m3[l] = turn(vr-qi, vi+qr, w[4], w[5])
			}
		}
	}
}

// backward5 undoes forward5, up to the factor 5.
func backward5[T Float](re, im []T, p *pass[T]) {
	rs, ms, n := rows(re), rows(im), p.span
	for block := 0; block < len(rs); block += 5 * n {
		rs0, ms0 := rs[block:][:n], ms[block:][:n]
		rs1, ms1 := rs[block+n:][:n], ms[block+n:][:n]
		rs2, ms2 := rs[block+2*n:][:n], ms[block+2*n:][:n]
		rs3, ms3 := rs[block+3*n:][:n], ms[block+3*n:][:n]
		rs4, ms4 := rs[block+4*n:][:n], ms[block+4*n:][:n]
		tw := p.twiddle
		for j := range n {
			w := (*[8]T)(tw)
			tw = tw[8:]
			r0, m0 := &rs0[j], &ms0[j]
			r1, m1 := &rs1[j], &ms1[j]
			r2, m2 := &rs2[j], &ms2[j]
			r3, m3 := &rs3[j], &ms3[j]
			r4, m4 := &rs4[j], &ms4[j]
			for l := range Width {
				ar, ai := r0[l], m0[l]
				br, bi := unturn(r1[l], m1[l], w[0], w[1])
				cr, ci := unturn(r2[l], m2[l], w[2], w[3])
				gr, gi := unturn(r3[l], m3[l], w[4], w[5])
				er, ei := unturn(r4[l], m4[l], w[6], w[7])
				sr, si, dr, di := br+er, bi+ei, br-er, bi-ei
				tr, ti, fr, fi := cr+gr, ci+gi, cr-gr, ci-gi
				r0[l], m0[l] = ar+sr+tr, ai+si+ti
				ur, ui := ar+cos51*sr+cos52*tr, ai+cos51*si+cos52*ti
				vr, vi := ar+cos52*sr+cos51*tr, ai+cos52*si+cos51*ti
				pr, pi := sin51*dr+sin52*fr, sin51*di+sin52*fi
				qr, qi := sin52*dr-sin51*fr, sin52*di-sin51*fi
				r1[l], m1[l] = ur-pi, ui+pr
				r4[l], m4[l] = ur+pi, ui-pr
				r2[l], m2[l] = vr-qi, vi+qr
				r3[l], m3[l] = vr+qi, vi-qr
			}
		}
	}
}
