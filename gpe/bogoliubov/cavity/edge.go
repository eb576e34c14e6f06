package cavity

import "math"

// order is that of the Taylor series in x. Steps are at most a quarter of the
// distance to the poles of the tanh and at most stride over the fastest rate of
// the solutions, so that what is left out is below 4⁻²⁴ and stride²⁴/24!, both
// about 5e-15.
const (
	order  = 24
	stride = 2.5
	// reach·w from its middle an edge is flat to e^{−2·reach} = 1e-14.
	reach = 16.0
)

// step is one step through the cavity.
type step struct {
	length float64
	// series is 2c² as a power series about the beginning of the step, as far
	// as it counts; a single coefficient where c is constant.
	series []float64
	// share of the way that belongs to the inside, by which the rate is taken
	// out.
	share float64
}

// walk returns the steps from far left to the middle of the cavity, D/2. Seen
// from the other side the second half is the same. Where c is constant a step
// is as long as the stretch.
func (c Cavity) walk() []step {
	inner := []float64{2 * c.Inside * c.Inside}
	if c.Width == 0 {
		return []step{{c.Length / 2, inner, 1}}
	}
	flat := c.Length/2 - reach*c.Width
	steps := c.climb(nil, -reach*c.Width, math.Min(c.Length/2, reach*c.Width))
	if flat > 0 {
		steps = append(steps, step{flat, inner, 1})
	}
	return steps
}

// climb appends the steps from x = from to x = to, which must be at most D/2
// or from at least D/2.
func (c Cavity) climb(steps []step, from, to float64) []step {
	for x := from; x < to; {
		// The poles of the tanh are at 0, D ± iπw/2.
		near := math.Min(math.Abs(x), math.Abs(x-c.Length))
		h := math.Min(math.Hypot(near, math.Pi*c.Width/2)/4, c.stride())
		if x+1.01*h >= to {
			h = to - x
		}
		steps = append(steps, c.stepAt(x, h))
		x += h
	}
	return steps
}

// stride is the longest step, by the rates of the waves at any frequency that
// matters.
func (c Cavity) stride() float64 {
	return stride / (2*(c.Velocity+c.Outside) + 2*math.Sqrt(2*c.widest()))
}

// stepAt returns the step of length h from x.
func (c Cavity) stepAt(x, h float64) step {
	var up, down, z [order]float64
	tanhSeries(up[:], x, c.Width)
	tanhSeries(down[:], x-c.Length, c.Width)
	for k := range z {
		z[k] = -c.drop() * (up[k] - down[k])
	}
	z[0] += 2 * c.Outside * c.Outside
	n := order
	for power := math.Pow(h, order-1); n > 1 && math.Abs(z[n-1])*power < 1e-17*z[0]; power /= h {
		n--
	}
	return step{h, append([]float64(nil), z[:n]...), (up[0] - down[0]) / 2}
}

// tanhSeries sets a to the Taylor coefficients of tanh(x/w), by t′ = (1 − t²)/w.
func tanhSeries(a []float64, x, w float64) {
	a[0] = math.Tanh(x / w)
	for k := range len(a) - 1 {
		sum := 0.0
		for j := range k + 1 {
			sum -= a[j] * a[k-j]
		}
		if k == 0 {
			sum = 1 / (math.Cosh(x/w) * math.Cosh(x/w)) // 1 − t² without cancellation
		}
		a[k+1] = sum / (w * float64(k+1))
	}
}

// taylor carries a plane over a step, with the rate ρ taken out.
func (s *step) taylor(p plane, e equation) plane {
	var head, both [order]complex128 // of UV, and of UV′ + VV′ − VU′ − UU′
	w2 := 2 * e.omega
	sum := p
	power := s.length
	for k := range order {
		head[k], both[k] = p[0], p[2]+p[4]-p[3]-p[1]
		var a, b complex128
		for j, z := range s.series[:min(k+1, len(s.series))] {
			a += complex(z*real(head[k-j]), z*imag(head[k-j]))
			b += complex(z*real(both[k-j]), z*imag(both[k-j]))
		}
		inverse := complex(1/float64(k+1), 0)
		p = plane{
			(p[2] - p[3] - e.rate*p[0]) * inverse,
			(a - (e.turn+e.rate)*p[1]) * inverse,
			(p[5] + w2*p[0] + a + (e.turn-e.rate)*p[2]) * inverse,
			(-p[5] + w2*p[0] - a - (e.turn+e.rate)*p[3]) * inverse,
			((e.turn-e.rate)*p[4] - a) * inverse,
			(b - w2*(p[2]+p[3]) - e.rate*p[5]) * inverse,
		}
		t := complex(power, 0)
		for i := range sum {
			sum[i] += p[i] * t
		}
		power *= s.length
	}
	return sum
}

// flat carries a plane over a stretch of constant c: the exponential of the
// equation's matrix by scaling and squaring.
func flat(p plane, e equation, length float64) plane {
	rate := 2*math.Sqrt(size(e.omega)*2) + size(e.turn) + size(e.rate) + 2*math.Sqrt(real(e.z)) + 1
	doublings := 0
	h := length
	for ; h*rate > 1; h /= 2 {
		doublings++
	}
	if doublings <= 2 {
		for range 1 << doublings {
			p = series(p, e, h)
		}
		return p
	}
	var m [6]plane // columns
	for i := range m {
		var unit plane
		unit[i] = 1
		m[i] = series(unit, e, h)
	}
	for range doublings {
		var square [6]plane
		for i := range m {
			square[i] = times(&m, m[i])
		}
		m = square
	}
	return times(&m, p)
}

// times returns the matrix of columns m times p.
func times(m *[6]plane, p plane) (q plane) {
	for j, a := range p {
		for i := range q {
			q[i] += m[j][i] * a
		}
	}
	return q
}

// series returns e^{Mh}p for a short h.
func series(p plane, e equation, h float64) plane {
	sum := p
	for k := 1; k <= 24; k++ {
		p = e.apply(p)
		t := complex(h/float64(k), 0)
		for i := range p {
			p[i] *= t
			sum[i] += p[i]
		}
	}
	return sum
}
