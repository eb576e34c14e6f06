package horizon

import (
	"math"
	"testing"
)

// made is a profile of a given density.
func made(density func(x float64) float64) *Profile {
	p := &Profile{}
	for x := -60.0; x <= 60; x += 0.3 {
		n := density(x)
		p.X, p.Density, p.Velocity, p.SoundSpeed = append(p.X, x), append(p.Density, n), append(p.Velocity, 0.5), append(p.SoundSpeed, math.Sqrt(n))
	}
	return p
}

// grey is a grey soliton of a given depth in a density n₀ at x₀:
// n = n₀(1 − depth sech²(√(depth n₀)(x − x₀))).
func grey(n0, depth, x0, x float64) float64 {
	c := math.Cosh(math.Sqrt(depth*n0) * (x - x0))
	return -n0 * depth / (c * c)
}

func TestRipple(t *testing.T) {
	const cure = "start at the edge"
	for _, c := range []struct {
		name    string
		density func(x float64) float64
		dips    int
		want    string
	}{
		{"clean", func(float64) float64 { return 0.9 }, 0, ""},
		{"a slope", func(x float64) float64 { return 0.9 + 0.004*x }, 0, ""},
		{"what a good start leaves, 0.5 %", func(x float64) float64 { return 0.9 * (1 + 0.005*math.Sqrt2*math.Sin(x)) }, 0, ""},
		{"one grey soliton", func(x float64) float64 { return 0.9 + grey(0.9, 0.5, -18, x) }, 1,
			"1 dark solitons in the upstream window (dips deeper than 20 %): start at the edge"},
		{"one black soliton", func(x float64) float64 { return 0.9 + grey(0.9, 1, -18.2, x) }, 1,
			"1 dark solitons in the upstream window (dips deeper than 20 %): start at the edge"},
		{"a train of three", func(x float64) float64 {
			return 0.9 + grey(0.9, 0.5, -28, x) + grey(0.9, 0.6, -20, x) + grey(0.9, 0.7, -12, x)
		}, 3, "3 dark solitons in the upstream window (dips deeper than 20 %): start at the edge"},
		{"a shallow one is a ripple", func(x float64) float64 { return 0.9 + grey(0.9, 0.12, -18, x) }, 0,
			"the mean density in the upstream window ripples by 2.9 % rms (at most 2 % is clean): start at the edge"},
		{"a sinusoid of 5 %", func(x float64) float64 { return 0.9 * (1 + 0.05*math.Sin(2*math.Pi*x/4)) }, 0,
			"the mean density in the upstream window ripples by 3.5 % rms (at most 2 % is clean): start at the edge"},
		{"a soliton outside the window", func(x float64) float64 { return 0.9 + grey(0.9, 0.6, -50, x) + grey(0.9, 0.6, 10, x) }, 0, ""},
	} {
		t.Run(c.name, func(t *testing.T) {
			r := made(c.density).ripple("upstream", -34, -4)
			if r.Dips != c.dips {
				t.Errorf("%d dips, want %d", r.Dips, c.dips)
			}
			if got := r.Warning(cure); got != c.want {
				t.Errorf("it warns %q, want %q", got, c.want)
			}
		})
	}
	// rms of a sinusoid is its amplitude over √2, on a window of many waves.
	r := made(func(x float64) float64 { return 1 + 0.03*math.Sin(2*math.Pi*x/3) }).ripple("downstream", 4, 34)
	if math.Abs(r.Relative-0.03/math.Sqrt2) > 3e-4 {
		t.Errorf("rms %.4f, want %.4f", r.Relative, 0.03/math.Sqrt2)
	}
	if r := made(func(float64) float64 { return 1 }).ripple("upstream", -4.5, -4); r.Warning(cure) != "" {
		t.Errorf("a window of two points warns %q", r.Warning(cure))
	}
}
