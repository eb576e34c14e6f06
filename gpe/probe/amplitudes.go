package probe

import (
	"math"
	"math/cmplx"

	"tailrace/gpe/bogoliubov"
	"tailrace/gpe/flow"
)

// Small departures from a uniform flow are χ = δψ/ψ₀ with
//
//	χ(x) = ∫ dk/2π e^{ikx} (u_k b_k + v_k b*_{−k}),
//
// u and v those of bogoliubov.Amplitudes, and b_k turns as
// exp(−i(vk + ε(k))t). Where vk + ε is negative, b*_k is the amplitude of a wave
// of negative norm and positive frequency.

// fresh is after how many points e^{ikx} is computed anew instead of from the
// point before.
const fresh = 64

// side returns the uniform flow in which channel c lives.
func (l *layout) side(c int) flow.State {
	if c == bogoliubov.U {
		return l.up
	}
	return l.down
}

// amplitude returns the amplitude in units of flux, as bogoliubov.Scattering
// counts it, of the wave w of frequency omega and channel c in the part of the
// departure chi that lies under the window, at time t.
func (l *layout) amplitude(chi []complex128, window []float64, c int, w bogoliubov.PlaneWave, omega, t float64) complex128 {
	s := l.side(c)
	k := w.K * float64(w.Norm)
	k -= l.shift(k, s.SoundSpeed) / w.Speed // where the stepped equation has this frequency
	var plus, minus complex128              // χ at k, and the conjugate of χ at −k
	turn := cmplx.Rect(1, -k*l.grid.Dx)
	var e complex128
	for j, z := range chi {
		if j%fresh == 0 {
			e = cmplx.Rect(1, -k*(l.grid.X(j)-l.horizon))
		}
		if h := window[j]; h != 0 {
			z *= complex(h, 0)
			plus += z * e
			minus += cmplx.Conj(z) * e
		}
		e *= turn
	}
	u, v := bogoliubov.Amplitudes(k, s.SoundSpeed)
	b := (complex(u, 0)*plus - complex(v, 0)*minus) * complex(l.grid.Dx*math.Sqrt(s.Density/math.Abs(w.Speed)), 0)
	if w.Norm < 0 {
		b = cmplx.Conj(b)
	}
	return b * cmplx.Rect(1, omega*t)
}

// before returns the window over the ingoing packet of channel c at time 0.
func (l *layout) before(c int) []float64 {
	return l.window(c, l.start[c], l.start[c].least/2)
}

// after returns the window over the outgoing waves of channel c when they are
// read. Its inner edge is clear of the horizon, where the flow is not uniform.
func (l *layout) after(c int) []float64 {
	uniform := l.right
	if c == bogoliubov.U {
		uniform = -l.left
	}
	return l.window(c, l.end[c], l.end[c].least-uniform)
}

// window returns a smooth window that is 1 at the given distances from the
// horizon on the side of channel c. Its edges are as wide as the gap, or as
// inner where there is less room towards the horizon.
func (l *layout) window(c int, over extent, inner float64) []float64 {
	outer := l.gap()
	inner = math.Min(inner, outer)
	h := make([]float64, l.grid.N)
	sign := 1.0
	if c == bogoliubov.U {
		sign = -1
	}
	for j := range h {
		d := sign * (l.grid.X(j) - l.horizon)
		h[j] = edge((d-over.least)/inner+1) * edge((over.most-d)/outer+1)
	}
	return h
}

// edge rises from 0 at y = 0 to 1 at y = 1, with all its derivatives.
func edge(y float64) float64 {
	switch {
	case y <= 0:
		return 0
	case y >= 1:
		return 1
	}
	return 1 / (1 + math.Exp(1/y-1/(1-y)))
}

// packet returns χ at time 0 of the packet of channel c, of largest size 1: all
// of its waves meet at the horizon at the arrival.
func (l *layout) packet(c int) []complex128 {
	n := l.grid.N
	s := l.side(c)
	chi := make([]complex128, n)
	for _, m := range l.branch(c) {
		u, v := bogoliubov.Amplitudes(m.k, s.SoundSpeed)
		turn := cmplx.Rect(1, m.k*l.grid.Dx)
		e := m.b
		for j := range chi {
			if j%fresh == 0 {
				e = m.b * cmplx.Rect(1, m.k*(l.grid.X(j)-l.horizon))
			}
			chi[j] += complex(u, 0)*e + complex(v, 0)*cmplx.Conj(e)
			e *= turn
		}
	}
	// On its own side only.
	peak := 0.0
	for j, h := range l.before(c) {
		chi[j] *= complex(h, 0)
		peak = math.Max(peak, cmplx.Abs(chi[j]))
	}
	for j := range chi {
		chi[j] /= complex(peak, 0)
	}
	return chi
}

// mode is a wave b exp(ikx) of a packet.
type mode struct {
	k float64
	b complex128
}

// branch returns the ring's waves that make up the packet of channel c, with
// their phases at time 0.
func (l *layout) branch(c int) []mode {
	s := l.side(c)
	var modes []mode
	step := 2 * math.Pi / l.grid.Length()
	low, _ := bogoliubov.Channels(1e-9*l.top, l.up, l.down)
	high, _ := bogoliubov.Channels((1-1e-12)*l.top, l.up, l.down)
	from, to := low[c].K*float64(low[c].Norm), high[c].K*float64(high[c].Norm)
	for q := math.Ceil(math.Min(from, to) / step); q*step <= math.Max(from, to); q++ {
		k := q * step
		omega := s.Velocity*k + bogoliubov.Energy(k, s.SoundSpeed)
		if k == 0 {
			continue
		}
		// The amplitude of unit flux per frequency has √|v_g| more per k.
		a, _ := bogoliubov.Channels(math.Abs(omega), l.up, l.down)
		size := l.spectrum(math.Abs(omega)) * math.Sqrt(math.Abs(a[c].Speed))
		modes = append(modes, mode{k, cmplx.Rect(size, omega*l.arrival)})
	}
	return modes
}
