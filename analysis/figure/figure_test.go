package figure

import (
	"fmt"
	"math"
	"math/rand/v2"
)

// A synthetic run in round numbers, with noise that is always the same.
func sech2(x float64) float64 { c := math.Cosh(x); return 1 / (c * c) }

func axis(from, to float64, n int) []float64 {
	x := make([]float64, n)
	for i := range x {
		x[i] = from + (to-from)*float64(i)/float64(n-1)
	}
	return x
}

func apply(x []float64, f func(float64) float64) []float64 {
	y := make([]float64, len(x))
	for i := range x {
		y[i] = f(x[i])
	}
	return y
}

func noisy(y []float64, sigma float64) (out, sigmas []float64) {
	r := rand.New(rand.NewPCG(5, 6))
	for _, v := range y {
		out = append(out, v+sigma*r.NormFloat64())
		sigmas = append(sigmas, sigma)
	}
	return out, sigmas
}

func exampleFlow(points int) Flow {
	density := func(x float64) float64 { return 45 - 12*(1+math.Tanh(x/1.2))/2 }
	mach := func(x float64) float64 { return 0.62 + 0.95*(1+math.Tanh((x+0.3)/1.2))/2 }
	x := axis(-22, 48, points)
	n, dn := noisy(apply(x, density), 0.6)
	m, dm := noisy(apply(x, mach), 0.03)
	fine := axis(-22, 48, 400)
	return Flow{
		Density:          Points{"mean of 2000 trajectories ± standard error", x, n, dn},
		Mach:             Points{"", x, m, dm},
		PredictedDensity: Curve{"stationary flow", fine, apply(fine, density)},
		PredictedMach:    Curve{"", fine, apply(fine, mach)},
		Horizon:          -0.3 + 1.2*math.Atanh(2*0.38/0.95-1), Upstream: Range{-18, -3}, Downstream: Range{4, 40},
		LengthUnit: "µm", DensityUnit: "atoms/µm",
	}
}

func exampleMap(n int) Map {
	x := axis(-25, 45, n)
	r := rand.New(rand.NewPCG(9, 9))
	value := make([]float64, n*n)
	for i := range n {
		for j := range i + 1 {
			a, b := x[j], x[i] // a ≤ b
			v := -0.02*sech2((b-a)/1.1) + 3e-4*r.NormFloat64()
			if a < 0 && b > 0 {
				v -= 2.4e-3 * sech2((a/0.4+b/0.7)/5)
			}
			if a > 0 && b > 0 {
				v += 8e-4 * sech2((b-2.2*a)/3)
			}
			value[i*n+j], value[j*n+i] = v, v
		}
	}
	line := axis(-25, 0, 2)
	return Map{
		Position: x, Value: value, Limit: OffDiagonalLimit(value, n, n/12, 0.995),
		Band:    Curve{"predicted band", line, apply(line, func(x float64) float64 { return -x * 0.7 / 0.4 })},
		WindowX: Range{-18, -3}, WindowXPrime: Range{5, 36}, LengthUnit: "µm",
	}
}

func exampleCut() Cut {
	x := axis(-30, 30, 61)
	shape := func(a, k float64) func(float64) float64 {
		return func(s float64) float64 { return -a*sech2(k*s/2) + 5e-5 }
	}
	y, dy := noisy(apply(x, shape(2.4e-3, 0.35)), 1.1e-4)
	fine := axis(-30, 30, 301)
	return Cut{
		Measured: Points{"measured", x, y, dy},
		Fit:      Curve{"fit", fine, apply(fine, shape(2.4e-3, 0.35))},
		Low:      apply(fine, shape(2.55e-3, 0.34)), High: apply(fine, shape(2.25e-3, 0.36)),
		Predicted: []Curve{
			{"predicted, thermal", fine, apply(fine, shape(2.2e-3, 0.4))},
			{"predicted, exact scattering", fine, apply(fine, shape(2.3e-3, 0.31))},
		},
		Across: "*s*, delay across the band", Unit: "ms",
	}
}

func exampleSpaceTime() SpaceTime {
	x, t := axis(0, 120, 480), axis(0, 160, 200)
	density := make([]float64, 0, len(x)*len(t))
	for _, t := range t {
		for _, x := range x {
			step, front := 15+0.31*t, 15+0.85*t
			v := 45 * (1 + math.Tanh((x-4)/1.5)) / 2
			if x < step {
				v *= 0.62
			} else if x < front {
				v *= 0.88
			}
			density = append(density, v*(1+0.02*math.Sin(x-t)))
		}
	}
	return SpaceTime{
		Position: x, Time: t, Density: density,
		Step:            Curve{"step", []float64{15, 15 + 0.31*160}, []float64{0, 160}},
		Characteristics: []Curve{{"characteristics *v* ± *c*", []float64{15, 15 + 0.85*160}, []float64{0, 160}}, {"", []float64{15, 20}, []float64{0, 160}}},
		LengthUnit:      "µm", TimeUnit: "ms", DensityUnit: "atoms/µm",
	}
}

func exampleNull() Null {
	shuffled, _ := noisy(make([]float64, 1000), 2.6e-4)
	return Null{Shuffled: shuffled, Measured: -1.62e-3, Strength: "mean of *g*_{2} − 1 along the band", Note: "6.2 standard deviations"}
}

func examples() map[string]*Page {
	return map[string]*Page{
		"flow": exampleFlow(600).Page(), "flow_dots": exampleFlow(71).Page(), "map": exampleMap(350).Page(),
		"cut": exampleCut().Page(), "spacetime": exampleSpaceTime().Page(), "null": exampleNull().Page(),
		"growth": exampleGrowth(3, "µm").Page(), "growth_many": exampleGrowth(7, "").Page(), "patterns": examplePatterns().Page(),
	}
}

func exampleGrowth(modes int, unit string) Growth {
	f := Growth{Length: 11, LengthUnit: unit, RateUnit: "s^{−1}"}
	for k := range modes {
		from := 2 + 2*float64(k)
		x := axis(from, 18, 200)
		f.Thresholds = append(f.Thresholds, from)
		f.Branches = append(f.Branches, Branch{Name: fmt.Sprintf("mode from %g", from), Length: x,
			GrowthRate: apply(x, func(x float64) float64 { return 30 * (x - from) / x * math.Pow(math.Sin(x-from), 2) }),
			Frequency:  apply(x, func(x float64) float64 { return 80 * math.Max(0, 1-(from+2)/x) })})
	}
	return f
}

func examplePatterns() Patterns {
	x := axis(-10, 22, 500)
	wave := func(phase float64) []float64 {
		return apply(x, func(x float64) float64 { return 3e-5 * math.Cos(1.1*x+phase) * math.Exp(-math.Abs(x-6)/6) })
	}
	level := apply(x, func(x float64) float64 { return 3e-5 * math.Exp(-math.Abs(x-6)/6) })
	return Patterns{Position: x, Inside: Range{0, 12}, LengthUnit: "µm", Shapes: []Shape{
		{"mode 1: frequency 18.2, growth rate 12.5 s^{−1}", wave(0), wave(-math.Pi / 2), level},
		{"mode 2: does not oscillate", wave(1), make([]float64, len(x)), level},
	}}
}
