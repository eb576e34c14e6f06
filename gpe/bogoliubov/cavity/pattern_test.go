package cavity

import (
	"fmt"
	"math"
	"math/cmplx"
	"testing"

	"gonum.org/v1/gonum/integrate/quad"
)

func span(from, to float64, n int) []float64 {
	x := make([]float64, n)
	for i := range x {
		x[i] = from + (to-from)*float64(i)/float64(n-1)
	}
	return x
}

var patternCases = []Cavity{
	{0.75, 1, 0.5, 3, 0}, {0.75, 1, 0.5, 12, 0}, {0.75, 1, 0.5, 3, 0.4}, {0.75, 1, 0.5, 12, 1}, {0.9, 1.2, 0.3, 6, 0.2},
}

// The pattern solves the equations, away from sharp edges to the error of the
// differences that stand for derivatives, and dies away on both sides.
func TestPatternSolves(t *testing.T) {
	for _, c := range patternCases {
		modes, err := c.Modes()
		if err != nil {
			t.Fatal(err)
		}
		for _, m := range modes {
			t.Run(fmt.Sprintf("%+v, %+v", c, m), func(t *testing.T) {
				const h = 0.004
				for _, middle := range append(span(-15, c.Length+15, 61), span(-0.5, 0.5, 5)...) {
					if c.Width == 0 && (math.Abs(middle) < 0.1 || math.Abs(middle-c.Length) < 0.1) {
						continue
					}
					p, err := c.Pattern(m, []float64{middle - 2*h, middle - h, middle, middle + h, middle + 2*h})
					if err != nil {
						t.Fatal(err)
					}
					first := func(f []complex128) complex128 { return (8*(f[3]-f[1]) - (f[4] - f[0])) / (12 * h) }
					second := func(f []complex128) complex128 {
						return (16*(f[3]+f[1]) - (f[4] + f[0]) - 30*f[2]) / (12 * h * h)
					}
					s := complex(c.SoundSpeed(middle), 0)
					v := complex(c.Velocity, 0)
					u := -second(p.U)/2 - 1i*v*first(p.U) + s*s*(p.U[2]+p.V[2]) - m.Omega()*p.U[2]
					w := -second(p.V)/2 + 1i*v*first(p.V) + s*s*(p.U[2]+p.V[2]) + m.Omega()*p.V[2]
					near(t, fmt.Sprintf("equations at %.2f", middle), size(u)+size(w), 0, 1e-8) // h⁴, and rounding over h²
				}
				far, err := c.Pattern(m, []float64{-20 / m.GrowthRate, c.Length + 20/m.GrowthRate})
				if err != nil {
					t.Fatal(err)
				}
				for i := range far.X {
					near(t, "far away", cmplx.Abs(far.U[i])+cmplx.Abs(far.V[i]), 0, 1e-4)
				}
			})
		}
	}
}

// At a sharp edge U, V and their derivatives go on.
func TestPatternIsSmoothAtSharpEdges(t *testing.T) {
	c := must(t, 0.75, 1, 0.5, 12, 0)
	modes, err := c.Modes()
	if err != nil {
		t.Fatal(err)
	}
	for _, m := range modes {
		for _, edge := range []float64{0, c.Length} {
			const h = 1e-4
			p, err := c.Pattern(m, []float64{edge - h, edge, edge + h})
			if err != nil {
				t.Fatal(err)
			}
			for _, f := range [][]complex128{p.U, p.V} {
				near(t, "derivative across the edge", size(f[2]-2*f[1]+f[0])/h, 0, 10*h) // h times the second derivative
			}
		}
	}
}

// What the doc comments claim of whole modes, by quadrature on a grid of points
// of the test's own: the norm of a mode is zero, that with its partner is 1,
// and its growth rate is what the energy balance of GrowthBound demands.
func TestPatternIntegrals(t *testing.T) {
	for _, c := range patternCases {
		modes, err := c.Modes()
		if err != nil {
			t.Fatal(err)
		}
		for _, m := range modes {
			t.Run(fmt.Sprintf("%+v, %+v", c, m), func(t *testing.T) {
				tr := c.trace(m.Omega())
				var own, pair complex128
				var energy, work float64
				reach := 30 / m.GrowthRate // sound fades as e^{−γx/(v+c)} at least
				for _, part := range [][3]float64{{-reach, -20, reach / 20}, {-20, 0, 40}, {0, c.Length / 2, 40}, {c.Length / 2, c.Length, 40}, {c.Length, c.Length + 20, 40}, {c.Length + 20, c.Length + reach, reach / 20}} {
					pieces := int(part[2])
					for i := range pieces {
						from := part[0] + (part[1]-part[0])*float64(i)/float64(pieces)
						to := part[0] + (part[1]-part[0])*float64(i+1)/float64(pieces)
						x, w := make([]float64, 24), make([]float64, 24)
						quad.Legendre{}.FixedLocations(x, w, from, to)
						for j := range x {
							a, b := tr.at(x[j]), tr.at(c.Length-x[j])
							dx := complex(w[j], 0)
							own += dx * (a[0]*cmplx.Conj(a[0]) - a[1]*cmplx.Conj(a[1]))
							pair += dx * (a[0]*b[0] - a[1]*b[1])
							s, s1, d1 := a[0]+a[1], a[2]+a[3], a[2]-a[3]
							cc := c.SoundSpeed(x[j])
							abs2 := func(z complex128) float64 { return real(z)*real(z) + imag(z)*imag(z) }
							energy += w[j] * (abs2(d1)/4 + abs2(s1)/4 + cc*cc*abs2(s))
							if c.Width > 0 {
								sech := func(y float64) float64 { return 1 / (math.Cosh(y) * math.Cosh(y)) }
								slope := -c.drop() / (2 * c.Width) * (sech(x[j]/c.Width) - sech((x[j]-c.Length)/c.Width))
								work += w[j] * c.Velocity / 2 * slope * abs2(s)
							}
						}
					}
				}
				if c.Width == 0 {
					a, b := tr.at(0), tr.at(c.Length)
					work = c.Velocity / 2 * c.drop() * (math.Pow(cmplx.Abs(b[0]+b[1]), 2) - math.Pow(cmplx.Abs(a[0]+a[1]), 2))
				}
				near(t, "∫|U|²−|V|² over ∫S²", cmplx.Abs(own)/energy, 0, 1e-9)
				near(t, "pair", size(pair/tr.norm()-1), 0, 1e-9)
				near(t, "growth rate by the energy", work/energy/m.GrowthRate, 1, 1e-9)
			})
		}
	}
}

func TestNoPattern(t *testing.T) {
	c := must(t, 0.75, 1, 0.5, 12, 0)
	if p, err := c.Pattern(Mode{0.03, 0.016}, []float64{1}); err == nil {
		t.Errorf("a pattern %v of no mode", p)
	}
}

func BenchmarkPattern(b *testing.B) {
	c := must(b, 0.75, 1, 0.5, 12, 1)
	modes, err := c.Modes()
	if err != nil {
		b.Fatal(err)
	}
	x := span(-30, 42, 600)
	for b.Loop() {
		if _, err := c.Pattern(modes[0], x); err != nil {
			b.Fatal(err)
		}
	}
}
