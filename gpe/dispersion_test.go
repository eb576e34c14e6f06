package gpe

import (
	"math"
	"math/cmplx"
	"testing"

	"tailrace/gpe/fluid"
	"tailrace/gpe/lanes"
)

// The waves of a noisy uniform flow oscillate at Bogoliubov's frequencies,
// Doppler shifted: ω = vk ± ε(k), with and against the flow. For every wave the
// spectrum in time of δn_k, averaged over trajectories, peaks at both.
func TestBogoliubovDispersion(t *testing.T) {
	const perXi, velocity, dt, samples = 5000, 0.4, 0.2, 512
	g := NewGrid(64, 50, -25)
	ground := UniformGround(g, fluid.Cubic())
	noise, err := NewPlaneWaves(ground, 1, 0, perXi, 0)
	if err != nil {
		t.Fatal(err)
	}
	s := make([]float64, g.N)
	fill(s, (&Problem{Grid: g, AtomsPerLength: perXi}).Commutator())
	times := make([]float64, samples)
	for i := range times {
		times[i] = dt * float64(i+1)
	}
	land := NewSwitch(g, Switch{Velocity: velocity, SoundUp: 1, SoundDown: 1, Width: 1})
	prop, err := NewPropagator(g, fluid.Cubic(), land, s, Quartic(), 0.1, times)
	if err != nil {
		t.Fatal(err)
	}
	w, b := prop.NewWalker(false), lanes.NewBatch(g.N)
	if err := noise.Sample(b, 5, 0); err != nil {
		t.Fatal(err)
	}
	waves := []int{1, 3, 6, 10, 15}
	series := make([][lanes.Width][]complex128, len(waves))
	for i := range times {
		w.Leg(b, i)
		for a, q := range waves {
			k := g.Wavenumber(q)
			for l := range lanes.Width {
				var sum complex128
				for j := range g.N {
					re, im := b.Re[j*lanes.Width+l], b.Im[j*lanes.Width+l]
					sum += complex(re*re+im*im, 0) * cmplx.Exp(complex(0, -k*g.X(j)))
				}
				series[a][l] = append(series[a][l], sum)
			}
		}
	}
	power := func(a int, omega float64) float64 {
		total := 0.0
		for l := range lanes.Width {
			var sum complex128
			for i, v := range series[a][l] {
				hann := math.Pow(math.Sin(math.Pi*(float64(i)+0.5)/samples), 2)
				sum += v * complex(hann, 0) * cmplx.Exp(complex(0, omega*times[i]))
			}
			total += real(sum)*real(sum) + imag(sum)*imag(sum)
		}
		return total
	}
	for a, q := range waves {
		k := g.Wavenumber(q)
		e := k * k / 2
		energy := math.Sqrt(e * (e + 2))
		for _, want := range []float64{velocity*k + energy, velocity*k - energy} {
			best, most := 0.0, 0.0
			for d := -0.15; d <= 0.15; d += 0.002 {
				if p := power(a, want+d); p > most {
					best, most = want+d, p
				}
			}
			// A tenth of the resolution 2π/102 of the record.
			if math.Abs(best-want) > 0.01 {
				t.Errorf("k = %.3f: peak at ω = %.4f, want %.4f", k, best, want)
			}
		}
	}
}
