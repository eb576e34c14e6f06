package lanes

// Mix multiplies the real and the imaginary part of each point of every lane
// by a real matrix that the lanes share,
//
//	Re ← m₀ Re + m₁ Im,  Im ← m₂ Re + m₃ Im,
//
// with matrix[4j : 4j+4] that of point j. It carries small departures from a
// field through a local phase that depends on the field. It does not allocate.
func Mix(b *Batch, matrix []float64) {
	b.check()
	checkLength("matrix", len(matrix), 4*b.N)
	active.mix(b.Re, b.Im, matrix)
}

func mix(re, im, matrix []float64) {
	rs, ms := rows(re), rows(im)[:len(re)/Width]
	for j := range rs {
		m := (*[4]float64)(matrix[4*j:])
		a, b, c, d := m[0], m[1], m[2], m[3]
		r, i := &rs[j], &ms[j]
		for l := range Width {
			x, y := r[l], i[l]
			r[l], i[l] = a*x+b*y, c*x+d*y
		}
	}
}
