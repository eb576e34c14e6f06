package gpe

import (
	"math"
	"testing"

	"tailrace/gpe/fluid"
)

// Kohn's theorem: the centre of mass of a cloud in a harmonic trap oscillates
// at exactly the trap frequency, whatever the interaction. W. Kohn, Phys. Rev.
// 123, 1242 (1961).
func TestKohnMode(t *testing.T) {
	const omega = 0.2
	for _, c := range []struct {
		name string
		law  fluid.Law
	}{{"cubic", fluid.Cubic()}, {"swollen", fluid.Swollen(1)}} {
		t.Run(c.name, func(t *testing.T) {
			g := NewGrid(128, 40, -20)
			// The ground state of a trap displaced by 8 points, shifted back by
			// nothing: it starts off the middle of the trap that it moves in.
			v := make([]float64, g.N)
			for j := range v {
				x := g.X(j) - 4*g.Dx
				v[j] = omega * omega * x * x / 2
			}
			ground, err := FindGround(g, c.law, v, c.law.Mu(1))
			if err != nil {
				t.Fatal(err)
			}
			times, x := follow(t, g, c.law, still{harmonicOn(g, omega), 1}, complexOf(ground.Field), Quartic(), 0.02, 4*math.Pi/omega, 200, meanX(g))
			got := frequencyOf(times, x, omega)
			if math.Abs(got/omega-1) > 1e-6 { // asked for
				t.Errorf("centre of mass oscillates at %.9f ω", got/omega)
			}
		})
	}
}

// The breathing mode of a Thomas–Fermi cloud whose chemical potential goes as
// n^γ is at √(2+γ) ω: √3 for the cubic law, √(5/2) for the fully swollen cloud;
// that of an ideal gas at 2ω. S. Stringari, Phys. Rev. Lett. 77, 2360 (1996);
// C. Menotti, S. Stringari, Phys. Rev. A 66, 043610 (2002).
func TestBreathingModes(t *testing.T) {
	for _, c := range []struct {
		name      string
		law       fluid.Law
		omega, mu float64
		want      float64
		tolerance float64
	}{
		// The quantum pressure raises it by a share of (ω/μ)².
		{"cubic, Thomas–Fermi", fluid.Cubic(), 0.05, 1, math.Sqrt(3), 2e-3},
		// η = 2000 is within 1/η of the limit; μ there is 3.3 m c².
		{"fully swollen", fluid.Swollen(2000), 0.05, fluid.Swollen(2000).Mu(1), math.Sqrt(2.5), 5e-3},
		// A cloud so thin that its interaction is 10⁻⁴ of ω.
		{"nearly ideal", fluid.Cubic(), 0.5, 0.25005, 2, 2e-4},
	} {
		t.Run(c.name, func(t *testing.T) {
			edge := math.Sqrt(2*c.mu) / c.omega
			g := NewGrid(256, 3*edge+12, -(3*edge+12)/2)
			if c.name == "nearly ideal" {
				g = NewGrid(128, 24, -12)
			}
			ground, err := FindGround(g, c.law, harmonicOn(g, c.omega), c.mu)
			if err != nil {
				t.Fatal(err)
			}
			// A trap stiffer by 1 % starts it.
			stiff := c.omega * 1.005
			dt := math.Min(0.05, 0.8*g.MaxTimeStep())
			times, x2 := follow(t, g, c.law, still{harmonicOn(g, stiff), 1}, complexOf(ground.Field), Strang(), dt, 4*math.Pi/c.omega, 160, meanX2(g))
			got := frequencyOf(times, x2, c.want*stiff) / stiff
			if math.Abs(got/c.want-1) > c.tolerance {
				t.Errorf("breathes at %.5f ω, want %.5f within %.0e", got, c.want, c.tolerance)
			}
			t.Logf("%.5f ω, want %.5f", got, c.want)
		})
	}
}
