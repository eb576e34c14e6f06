package bogoliubov

import (
	"math"
	"testing"

	"tailrace/gpe/flow"
	"tailrace/gpe/fluid"
)

// Between the factors and the frequencies at which scattering was done the
// family gives what scattering would.
func TestFamily(t *testing.T) {
	p, err := flow.Sweep(fluid.Cubic(), 0.5, 1, 0.5)
	if err != nil {
		t.Fatal(err)
	}
	up, down, _ := p.Ends()
	var x, xp []float64
	for v := 4.; v < 20; v++ {
		x, xp = append(x, v-24), append(xp, 4*v)
	}
	omega := NewBand(up, down, 1).Over(x, xp, 0.01, 20).Frequencies()
	factors := make([]float64, 15)
	for i := range factors {
		factors[i] = math.Pow(2, float64(i)/2-4)
	}
	f, err := NewFamily(p, omega, factors, 0.03)
	if err != nil {
		t.Fatal(err)
	}
	for _, factor := range []float64{0.3, 0.8, 1.2, 3} {
		s, err := NewScatterer(flow.Stretched{Profile: p, Factor: factor})
		if err != nil {
			t.Fatal(err)
		}
		T, _, err := s.LowFrequencyTemperature()
		if err != nil {
			t.Fatal(err)
		}
		near(t, "T over scattering", f.Temperature(math.Log(factor))/T, 1, 3e-3)
		rows, err := s.All(omega)
		if err != nil {
			t.Fatal(err)
		}
		got := f.Pairing(nil, math.Log(factor))
		var off, size float64
		for i, r := range rows {
			// Weighted as the band does, by √(S₀S₀) ∝ ω at low frequency.
			want := r.Pairing(0.03)
			off, size = off+omega[i]*omega[i]*square(got[i]-want), size+omega[i]*omega[i]*square(want)
		}
		if e := math.Sqrt(off / size); e > 0.01 {
			t.Errorf("factor %g: the pairing is off by %.2g of itself", factor, e)
		}
	}
}
