package bogoliubov

import (
	"math"

	"gonum.org/v1/gonum/integrate/quad"
)

// Background returns what waves other than the partners bring into g₂ − 1 over
// the points x × xp, row by row of x: with D_i(x) the density wave of the whole
// mode that comes in through channel i,
//
//	g₂ − 1 = (1/2π) ∫₀^∞ dω Σ_i (1 + 2n_i) Re[D_i(x) D_i*(x')],  x < 0 < x',
//
// less the pairs (u out, d2 out), which are the band. The rest is above all the
// vacuum's own correlation across the horizon, of waves that are still ingoing
// at x and already through at x': it falls as the square of the distance and is
// a few per cent of the band near the horizon. Positions are counted from the
// horizon, which waves have left far enough for evanescent ones to have died.
// A response, unless nil, is that of pictures. The error is ErrNotIntegrated.
func (s *Scatterer) Background(x, xp []float64, atomsPerLength, T float64, response Response) ([]float64, error) {
	if response == nil {
		response = func(ku, kd float64) float64 { return 1 }
	}
	omega, weight := s.backgroundRule(x, xp)
	rows, err := s.All(omega)
	if err != nil {
		return nil, err
	}
	pairs := newPairs(x, xp)
	nearest := math.Inf(1)
	for _, v := range xp {
		nearest = math.Min(nearest, v)
	}
	for q, r := range rows {
		inU, outU, _ := upstreamWaves(r.Omega, s.up)
		in1, in2, out1, out2 := downstreamWaves(r.Omega, s.down)
		// A wave that dies out fast is not known at places far short of where
		// integration began, and matters little there.
		slow := out2.norm == 0 && imag(out2.k)*(s.right-s.origin-nearest) < 16
		for i, comoving := range r.Comoving {
			if comoving <= 0 {
				continue
			}
			factor := weight[q] / (2 * math.Pi * atomsPerLength)
			if T > 0 {
				factor /= math.Tanh(comoving / (2 * T))
			}
			// The mode's waves on either side, each with its amplitude.
			up := []part{{outU, r.S[U][i]}}
			if i == U {
				up = append(up, part{inU, 1})
			}
			down := []part{{out1, r.S[D1][i]}}
			switch {
			case out2.norm != 0:
				down = append(down, part{out2, r.S[D2][i]})
			case slow:
				down = append(down, part{out2, r.Dying[i]})
			}
			switch i {
			case D1:
				down = append(down, part{in1, 1})
			case D2:
				down = append(down, part{in2, 1})
			}
			for nu, u := range up {
				for nd, d := range down {
					if nu == 0 && nd == 1 && out2.norm != 0 {
						continue // the partners
					}
					pairs.add(u, d, factor*response(real(u.wave.k), real(d.wave.k)))
				}
			}
		}
	}
	return pairs.sum, nil
}

// part is a wave with the amplitude that it has in a mode.
type part struct {
	wave      wave
	amplitude complex128
}

// pairs sums products of waves over a window.
type pairs struct {
	x, xp    []float64
	up, down []complex128
	sum      []float64
}

func newPairs(x, xp []float64) *pairs {
	return &pairs{x, xp, make([]complex128, len(x)), make([]complex128, len(xp)), make([]float64, len(x)*len(xp))}
}

// add adds factor·Re[u(x) d*(x′)].
func (p *pairs) add(u, d part, factor float64) {
	for a, v := range p.x {
		p.up[a] = complex(factor, 0) * u.amplitude * u.wave.density(v)
	}
	for b, v := range p.xp {
		p.down[b] = d.amplitude * d.wave.density(v)
	}
	for a, z := range p.up {
		row := p.sum[a*len(p.xp):][:len(p.xp)]
		re, im := real(z), imag(z)
		for b, w := range p.down {
			row[b] += re*real(w) + im*imag(w)
		}
	}
}

// density returns the relative density wave (U+V) exp(ikx).
func (w wave) density(x float64) complex128 {
	sin, cos := math.Sincos(real(w.k) * x)
	if k := imag(w.k); k != 0 {
		fall := math.Exp(-k * x)
		return w.sum * complex(fall*cos, fall*sin)
	}
	return w.sum * complex(cos, sin)
}

// backgroundRule returns frequencies and weights: below ω_max dense at both
// ends, where amplitudes have their singularities, beyond it up to where a
// smooth cut-off has taken away what oscillates over less than the distances.
func (s *Scatterer) backgroundRule(x, xp []float64) (omega, weight []float64) {
	near, far := math.Inf(1), 0.0
	for _, side := range [][]float64{x, xp} {
		least := math.Inf(1)
		for _, v := range side {
			least = math.Min(least, math.Abs(v))
			far = math.Max(far, math.Abs(v))
		}
		near = math.Min(near, least)
	}
	// exp(−(ω/Ω)²) leaves the correlation as it is smoothed over 1/Ω in time.
	cut := 6 * s.down.Velocity / near
	nodes := func(n int) (y, w []float64) {
		y, w = make([]float64, n), make([]float64, n)
		quad.Legendre{}.FixedLocations(y, w, 0, 1)
		return y, w
	}
	least := math.Min(s.up.SoundSpeed-s.up.Velocity, s.down.Velocity-s.down.SoundSpeed)
	add := func(w, dw float64) {
		omega = append(omega, w)
		weight = append(weight, dw*math.Exp(-w*w/(cut*cut)))
	}
	top := s.omegaMax
	y, w := nodes(int(60 + 0.8*top*far/least + 0.8*far))
	for i, v := range y {
		// ω = ω_max sin²(πv/2) in shape: crowded at both ends.
		add(top*v*v*(3-2*v), top*6*v*(1-v)*w[i])
	}
	if last := 3 * cut; last > top {
		y, w = nodes(int(40 + 0.8*(last-top)*far/s.up.SoundSpeed))
		for i, v := range y {
			add(top+(last-top)*v*v, (last-top)*2*v*w[i])
		}
	}
	return omega, weight
}
