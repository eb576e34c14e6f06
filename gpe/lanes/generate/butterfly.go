package main

// dft4 returns the transform of four numbers with weights (−i)^{pq}. The
// backward transform is the same on numbers with real and imaginary part
// exchanged.
func (m machine) dft4(x []z) []z {
	a, b := m.both(x[0], x[2])
	c, d := m.both(x[1], x[3])
	y0, y2 := m.both(a, c)
	return []z{y0, m.minusI(b, d), y2, m.plusI(b, d)}
}

// minusI returns b − i d, plusI b + i d.
func (m machine) minusI(b, d z) z { return z{m.add(b.re, d.im), m.sub(b.im, d.re)} }
func (m machine) plusI(b, d z) z  { return z{m.sub(b.re, d.im), m.add(b.im, d.re)} }

// dft2 returns the sum and the difference.
func (m machine) dft2(x []z) []z {
	a, b := m.both(x[0], x[1])
	return []z{a, b}
}

// dft8 returns the transform of eight numbers: two of four, on the sums and on
// the differences of opposite ones, of which the latter are turned by eighths
// of a turn first. The factor 1/√2 of two of those turns is taken along and
// multiplied in as the last sums are formed.
func (m machine) dft8(x []z, half vec) []z {
	s0, d0 := m.both(x[0], x[4])
	s1, d1 := m.both(x[1], x[5])
	s2, d2 := m.both(x[2], x[6])
	s3, d3 := m.both(x[3], x[7])
	even := m.dft4([]z{s0, s1, s2, s3})

	a, b := m.minusI(d0, d2), m.plusI(d0, d2)
	// √2 times d1 turned by (1−i)/√2 and d3 turned by −(1+i)/√2.
	e1 := z{m.add(d1.re, d1.im), m.sub(d1.im, d1.re)}
	e3 := z{m.sub(d3.im, d3.re), m.add(d3.re, d3.im)} // the imaginary part with the other sign
	u := z{m.add(e1.re, e3.re), m.sub(e1.im, e3.im)}
	w := z{m.sub(e1.re, e3.re), m.add(e1.im, e3.im)}
	y5 := z{m.minus(m.copy(a.re), u.re, half), m.minus(m.copy(a.im), u.im, half)}
	y1 := z{m.plus(a.re, u.re, half), m.plus(a.im, u.im, half)}
	y7 := z{m.minus(m.copy(b.re), w.im, half), m.plus(m.copy(b.im), w.re, half)}
	y3 := z{m.plus(b.re, w.im, half), m.minus(b.im, w.re, half)}
	return []z{even[0], y1, even[1], y3, even[2], y5, even[3], y7}
}

// dft returns the transform of 2, 3, 4, 5 or 8 numbers.
func (m machine) dft(x []z, half vec) []z {
	switch len(x) {
	case 2:
		return m.dft2(x)
	case 3:
		return m.dft3(x)
	case 4:
		return m.dft4(x)
	case 5:
		return m.dft5(x)
	}
	return m.dft8(x, half)
}

// backward returns the transform with the other sign.
func (m machine) backward(x []z, half vec) []z {
	swapped := make([]z, len(x))
	for i, v := range x {
		swapped[i] = v.swap()
	}
	y := m.dft(swapped, half)
	for i := range y {
		y[i] = y[i].swap()
	}
	return y
}
