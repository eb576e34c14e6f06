package gpe

import (
	"math"
	"math/cmplx"
	"testing"

	"tailrace/gpe/fluid"
)

// solitonAt is a dark soliton of speed v on density 1, ψ = iv + γ tanh γ(x−x₀)
// with γ = √(1−v²): L. Pitaevskii, S. Stringari, Bose–Einstein Condensation and
// Superfluidity, OUP 2016, chapter 5.
func solitonAt(x, x0, v float64) complex128 {
	gamma := math.Sqrt(1 - v*v)
	return complex(gamma*math.Tanh(gamma*(x-x0)), v)
}

// A pair of opposite solitons on a ring: far apart each keeps its shape and
// moves at its own speed.
func TestDarkSolitonKeepsShapeAndSpeed(t *testing.T) {
	const v, end = 0.5, 20.0
	g := NewGrid(512, 160, -80)
	psi := make([]complex128, g.N)
	for j := range psi {
		x := g.X(j)
		// The second undoes the first one's phase, so that the ring closes.
		psi[j] = solitonAt(x, -40, v) * cmplx.Conj(solitonAt(x, 40, v))
	}
	lowest := func(rho []float64) float64 {
		// The left dip's place, by a parabola through its three lowest points.
		best := 1
		for j := 1; j < g.N/2; j++ {
			if rho[j] < rho[best] {
				best = j
			}
		}
		a, b, c := rho[best-1], rho[best], rho[best+1]
		return g.X(best) + g.Dx*(a-c)/(2*(a-2*b+c))
	}
	_, at := follow(t, g, fluid.Cubic(), still{make([]float64, g.N), 1}, psi, Quartic(), 0.02, end, 1, lowest)
	if moved := math.Abs(at[1]-at[0]) / end; math.Abs(moved-v) > 1e-3 { // parabola on a grid of 0.3 ξ
		t.Errorf("moves at %.5f, want %.5f", moved, v)
	}
	_, depth := follow(t, g, fluid.Cubic(), still{make([]float64, g.N), 1}, psi, Quartic(), 0.02, end, 1, func(rho []float64) float64 {
		x0, worst := lowest(rho), 0.0
		for j := range rho {
			if x := g.X(j); math.Abs(x-x0) < 6 {
				worst = math.Max(worst, math.Abs(rho[j]-math.Pow(cmplx.Abs(solitonAt(x, x0, v)), 2)))
			}
		}
		return worst
	})
	if depth[1] > 3e-3 { // the same parabola places the comparison
		t.Errorf("profile is off by %.2g after t = %g", depth[1], end)
	}
}

// In a Thomas–Fermi cloud a dark soliton oscillates at ω/√2: T. Busch,
// J. R. Anglin, Phys. Rev. Lett. 84, 2298 (2000); within 2 %, asked for.
func TestDarkSolitonOscillatesInATrap(t *testing.T) {
	const omega = 0.03
	edge := math.Sqrt2 / omega
	g := NewGrid(512, 2.6*edge, -1.3*edge)
	ground, err := FindGround(g, fluid.Cubic(), harmonicOn(g, omega), 1)
	if err != nil {
		t.Fatal(err)
	}
	const x0 = 6.0
	psi := complexOf(ground.Field)
	local := 1 - omega*omega*x0*x0/2
	for j := range psi {
		psi[j] *= complex(math.Tanh(math.Sqrt(local)*(g.X(j)-x0)), 0)
	}
	place := func(rho []float64) float64 {
		best := -1
		for j := range rho {
			if math.Abs(g.X(j)) < 12 && (best < 0 || rho[j] < rho[best]) {
				best = j
			}
		}
		a, b, c := rho[best-1], rho[best], rho[best+1]
		return g.X(best) + g.Dx*(a-c)/(2*(a-2*b+c))
	}
	want := omega / math.Sqrt2
	times, x := follow(t, g, fluid.Cubic(), still{harmonicOn(g, omega), 1}, psi, Strang(), 0.03, 2*math.Pi/want, 120, place)
	if got := frequencyOf(times, x, want); math.Abs(got/want-1) > 0.02 {
		t.Errorf("oscillates at %.4f ω/√2", got/want)
	}
}
