package lanes

import (
	"math"
	"testing"
)

func TestStepTable(t *testing.T) {
	for _, c := range []struct {
		name           string
		x0, dx, width  float64
		n              int
		xs, depth, mul float64
		base           bool
	}{
		{"in the middle", -100, 0.25, 0.5, 800, 0.123, 1, 1, false},
		{"scaled, with a base", -100, 0.25, 0.5, 800, -31.7, 1.3, 0.02 / math.Pi, true},
		{"thousands of widths from the origin", 3000, 0.1, 0.3, 500, 3021.234567, 2, 1, false},
		{"spacing beyond the width", -400, 1, 0.01, 800, 12.003, 1, 1, false},
		{"width beyond the box", -1, 0.01, 50, 200, 0.3, 1, 1, true},
		{"step left of the grid", 0, 0.2, 0.5, 300, -5000, 1, 1, false},
		{"step right of the grid", 0, 0.2, 0.5, 300, 5000, 1, 1, false},
		{"negative depth", -10, 0.1, 0.7, 200, 1.5, -0.4, 2, false},
		{"one point", 0.1, 1, 1, 1, 0, 1, 1, false},
	} {
		t.Run(c.name, func(t *testing.T) {
			var base []float64
			if c.base {
				base = make([]float64, c.n)
				for j := range base {
					base[j] = math.Sin(float64(j))
				}
			}
			v := make([]float64, c.n)
			for j := range v {
				v[j] = math.NaN() // whatever was there must go
			}
			table := NewStepTable(c.x0, c.dx, c.n, c.width)
			table.Fill(v, base, c.depth, c.xs, c.mul)
			worst := 0.0
			for j, got := range v {
				b := 0.0
				if base != nil {
					b = base[j]
				}
				// x_j − xs without rounding, and (1+tanh u)/2 = 1/(1+exp(−2u)).
				x := sub(add(number(c.x0), mul(number(float64(j)), number(c.dx))), number(c.xs))
				u := quo(mul(number(-2), x), number(c.width))
				var step float64
				switch f := float(u); {
				case f > 700:
				case f < -700:
					step = 1
				default:
					step = float(quo(number(1), add(number(1), bigExp(u))))
				}
				want := c.mul * (b - c.depth*step)
				// In units of depth; the sum with the base rounds as well.
				worst = max(worst, math.Abs(got-want)/math.Abs(c.mul)/(math.Abs(c.depth)+math.Abs(b)))

				// The plain formula, good to the rounding of x_j/w.
				plain := c.mul * (b - c.depth*(1+math.Tanh((c.x0+float64(j)*c.dx-c.xs)/c.width))/2)
				limit := 1e-15 + 3e-16*(math.Abs(c.x0)+float64(j)*c.dx+math.Abs(c.xs))/c.width
				if !(math.Abs(got-plain) <= limit*math.Abs(c.mul)*(math.Abs(c.depth)+math.Abs(b))) {
					t.Fatalf("point %d: %g; math.Tanh gives %g", j, got, plain)
				}
			}
			t.Logf("largest error %.2g of the depth", worst)
			if !(worst < 1e-15) { // a few roundings of numbers below 1
				t.Errorf("largest error %.2g of the depth", worst)
			}
			if n := testing.AllocsPerRun(5, func() { table.Fill(v, base, c.depth, c.xs, c.mul) }); n != 0 {
				t.Errorf("%g allocations", n)
			}
		})
	}
}

func TestStepTableNaN(t *testing.T) {
	v := make([]float64, 64)
	NewStepTable(0, 0.1, 64, 1).Fill(v, nil, 1, math.NaN(), 1)
	for j, x := range v {
		if !math.IsNaN(x) {
			t.Fatalf("point %d: a step at NaN gives %g", j, x)
		}
	}
}
