package gpe

import (
	"math"
	"testing"

	"tailrace/gpe/fluid"
	"tailrace/gpe/lanes"
)

// still is a landscape at rest, for tests: a potential and one coupling.
type still struct {
	v []float64
	g float64
}

func (s still) Potential(dst []float64, _, scale float64) {
	for j, v := range s.v {
		dst[j] = scale * v
	}
}
func (s still) Coupling(dst []float64, _, scale float64)     { fill(dst, scale*s.g) }
func (s still) Steady(float64) (potential, coupling bool)    { return true, true }
func (s still) Power(_, _ []float64, _ float64) (lo, hi int) { return 0, 0 }
func (s still) Drift() float64                               { return 0 }

// trapOn returns a trap's potential on a grid.
func trapOn(g Grid, trap Confinement) []float64 {
	v := make([]float64, g.N)
	for j := range v {
		v[j] = trap.At(g.X(j))
	}
	return v
}

// harmonicOn returns ω²x²/2 on a grid.
func harmonicOn(g Grid, omega float64) []float64 { return trapOn(g, Harmonic{Frequency: omega}) }

// follow carries one field through equal intervals and returns what look makes
// of its density at each, the start included.
func follow(t testing.TB, g Grid, law fluid.Law, land Landscape, psi []complex128, scheme Scheme, dt, end float64, samples int, look func(rho []float64) float64) (times, seen []float64) {
	t.Helper()
	for i := range samples {
		times = append(times, end*float64(i+1)/float64(samples))
	}
	p, err := NewPropagator(g, law, land, nil, scheme, dt, times)
	if err != nil {
		t.Fatal(err)
	}
	b := lanes.NewBatch(g.N)
	for l := range lanes.Width {
		b.SetLane(l, psi)
	}
	w := p.NewWalker(false)
	rho := make([]float64, g.N)
	record := func() {
		for j := range rho {
			re, im := b.Re[j*lanes.Width], b.Im[j*lanes.Width]
			rho[j] = re*re + im*im
		}
		seen = append(seen, look(rho))
	}
	record()
	for i := range times {
		w.Leg(b, i)
		record()
	}
	return append([]float64{0}, times...), seen
}

// frequencyOf returns ω of a + b cos ωt + c sin ωt, the best fit near a guess:
// the residual of the linear fit is minimised over ω.
func frequencyOf(times, y []float64, guess float64) float64 {
	residual := func(omega float64) float64 {
		// Normal equations of 1, cos, sin.
		var m [3][4]float64
		for i, t := range times {
			f := [3]float64{1, math.Cos(omega * t), math.Sin(omega * t)}
			for a := range 3 {
				for b := range 3 {
					m[a][b] += f[a] * f[b]
				}
				m[a][3] += f[a] * y[i]
			}
		}
		for a := range 3 {
			for b := range 3 {
				if b != a {
					r := m[b][a] / m[a][a]
					for c := range 4 {
						m[b][c] -= r * m[a][c]
					}
				}
			}
		}
		sum := 0.0
		for i, t := range times {
			d := y[i] - m[0][3]/m[0][0] - m[1][3]/m[1][1]*math.Cos(omega*t) - m[2][3]/m[2][2]*math.Sin(omega*t)
			sum += d * d
		}
		return sum
	}
	// Golden section.
	const golden = 0.6180339887498949
	lo, hi := 0.93*guess, 1.07*guess
	for hi-lo > 1e-10*guess {
		a, b := hi-golden*(hi-lo), lo+golden*(hi-lo)
		if residual(a) < residual(b) {
			hi = b
		} else {
			lo = a
		}
	}
	return (lo + hi) / 2
}

func meanX(g Grid) func([]float64) float64 {
	return func(rho []float64) float64 {
		sum, norm := 0.0, 0.0
		for j, r := range rho {
			sum += r * g.X(j)
			norm += r
		}
		return sum / norm
	}
}

func meanX2(g Grid) func([]float64) float64 {
	return func(rho []float64) float64 {
		sum, norm := 0.0, 0.0
		for j, r := range rho {
			sum += r * g.X(j) * g.X(j)
			norm += r
		}
		return sum / norm
	}
}

func complexOf(f []float64) []complex128 {
	c := make([]complex128, len(f))
	for j, v := range f {
		c[j] = complex(v, 0)
	}
	return c
}
