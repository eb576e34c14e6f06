package main

import "math"

// Butterflies of radix 3 and 5, which lead the plans of lengths 3·2^a and
// 5·2^a. Legs q and r−q come as sum and difference; what the roots of unity
// have for a real part acts on the sums, the imaginary part on the differences.

// dft3 returns the transform of three numbers.
func (m machine) dft3(x []z) []z {
	a := x[0]
	s, d := m.both(x[1], x[2])
	y0 := m.zadd(a, s)
	u := m.zplus(a, s, -0.5)
	p := m.ztimes(d, math.Sqrt(3)/2)
	return []z{y0, m.minusI(u, p), m.plusI(u, p)}
}

// dft5 returns the transform of five numbers.
func (m machine) dft5(x []z) []z {
	c1, c2 := (math.Sqrt(5)-1)/4, -(math.Sqrt(5)+1)/4                        // cos of 1/5 and 2/5 of a turn
	s1, s2 := math.Sqrt(10+2*math.Sqrt(5))/4, math.Sqrt(10-2*math.Sqrt(5))/4 // sin
	a := x[0]
	s, d := m.both(x[1], x[4])
	t, f := m.both(x[2], x[3])
	y0 := m.zadd(m.zadd(a, s), t)
	u := m.zplus(m.zplus(z{m.copy(a.re), m.copy(a.im)}, s, c1), t, c2)
	v := m.zplus(m.zplus(a, s, c2), t, c1)
	p := m.zplus(m.ztimes(d, s1), f, s2)
	q := m.zplus(m.ztimes(d, s2), f, -s1)
	return []z{y0, m.minusI(u, p), m.minusI(v, q), m.plusI(v, q), m.plusI(u, p)}
}

// ztimes returns a times a real number, zplus adds that to c in its registers.
func (m machine) ztimes(a z, by float64) z {
	f := m.real(by)
	return z{m.times(a.re, f.reAt, f.re), m.times(a.im, f.reAt, f.re)}
}

func (m machine) zplus(c, a z, by float64) z {
	f := m.real(by)
	return z{m.timesPlus(c.re, a.re, f.reAt, f.re), m.timesPlus(c.im, a.im, f.reAt, f.re)}
}

// real returns a constant without imaginary part.
func (m machine) real(v float64) factor {
	f := factor{reAt: m.number(v)}
	if !m.wide {
		f.re = m.spread(f.reAt)
	}
	return f
}
