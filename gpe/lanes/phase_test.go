package lanes

import (
	"math"
	"math/big"
	"math/cmplx"
	"math/rand/v2"
	"testing"

	"tailrace/gpe/fluid"
)

func TestPhaseFactorAccuracy(t *testing.T) {
	each(t, func(t *testing.T) {
		// With ψ = 1 and g = 0 the result is exp(−iπv) for v as given.
		for _, c := range []struct {
			name  string
			phase func(i int, r *rand.Rand) float64
		}{
			{"small", func(_ int, r *rand.Rand) float64 { return 1e-3 * r.NormFloat64() }},
			{"one turn", func(i int, _ *rand.Rand) float64 { return -1 + float64(i)/1000 }},
			{"near half-integers", func(i int, r *rand.Rand) float64 { return float64(i%41) - 20.5 + 1e-6*r.NormFloat64() }},
			{"near integers", func(i int, r *rand.Rand) float64 { return float64(i%41) - 20 + 1e-6*r.NormFloat64() }},
			{"up to 1e4", func(_ int, r *rand.Rand) float64 { return 2e4 * (r.Float64() - 0.5) }},
			{"up to 1e12", func(_ int, r *rand.Rand) float64 { return 2e12 * (r.Float64() - 0.5) }},
		} {
			t.Run(c.name, func(t *testing.T) {
				const n = 2000
				r := rand.New(rand.NewPCG(1, 2))
				b, v, g := NewBatch(n), make([]float64, n), make([]float64, n)
				for j := range v {
					v[j] = c.phase(j, r)
					for l := range Width {
						b.Re[j*Width+l] = 1
					}
				}
				Phase(b, v, g)
				worst := 0.0
				for j, z := range b.Lane(nil, 4) {
					cos, sin := bigCosSinPi(number(v[j]))
					worst = max(worst, math.Abs(float(sub(number(real(z)), cos))), math.Abs(float(add(number(imag(z)), sin))))
				}
				t.Logf("largest error %.2g", worst)
				if worst > 5e-16 { // the accuracy promised
					t.Errorf("largest error %.2g", worst)
				}
			})
		}
	})
}

func TestPhaseExactTurns(t *testing.T) {
	each(t, func(t *testing.T) {
		// Whole numbers of half turns are exact; quarter turns to the rounding of 1.
		for _, c := range []struct {
			name  string
			phase float64
			want  complex128
			limit float64
		}{
			{"none", 0, 1, 0},
			{"half", 1, -1, 0},
			{"minus half", -1, -1, 0},
			{"full", 2, 1, 0},
			{"1e6 and one half turns", 1e6 + 1, -1, 0},
			{"2^50 half turns", 1 << 50, 1, 0},
			{"quarter", 0.5, -1i, 3e-16},
			{"three quarters", 1.5, 1i, 3e-16},
		} {
			t.Run(c.name, func(t *testing.T) {
				b := NewBatch(1)
				b.SetLane(6, []complex128{1})
				Phase(b, []float64{c.phase}, []float64{0})
				if got := b.Lane(nil, 6)[0]; cmplx.Abs(got-c.want) > c.limit {
					t.Errorf("exp(−iπ·%g) = %g; want %g", c.phase, got, c.want)
				}
			})
		}
	})
}

func TestPhaseLaws(t *testing.T) {
	each(t, func(t *testing.T) {
		const n = 64
		zero := make([]float64, n)
		r := rand.New(rand.NewPCG(3, 4))
		v, g, s := make([]float64, n), make([]float64, n), make([]float64, n)
		for j := range v {
			v[j], g[j], s[j] = r.NormFloat64(), 0.3*r.NormFloat64(), 0.2*r.Float64()
		}
		for _, c := range []struct {
			name string
			do   func(b *Batch)
			law  fluid.Law
			s    []float64
		}{
			{"cubic", func(b *Batch) { Phase(b, v, g) }, fluid.Cubic(), zero},
			{"cubic, shifted", func(b *Batch) { PhaseLaw(b, v, g, s, fluid.Cubic()) }, fluid.Cubic(), s},
			{"hardly swollen", func(b *Batch) { PhaseLaw(b, v, g, s, fluid.Swollen(1e-9)) }, fluid.Swollen(1e-9), s},
			{"swollen", func(b *Batch) { PhaseLaw(b, v, g, s, fluid.Swollen(0.5)) }, fluid.Swollen(0.5), s},
			{"much swollen", func(b *Batch) { PhaseLaw(b, v, g, zero, fluid.Swollen(50)) }, fluid.Swollen(50), zero},
		} {
			t.Run(c.name, func(t *testing.T) {
				b, x := randomBatch(n, 9)
				c.do(b)
				for l := range Width {
					for j, got := range b.Lane(nil, l) {
						z := x[l][j]
						phase := v[j] + g[j]*c.law.Mu(real(z)*real(z)+imag(z)*imag(z)-c.s[j])
						sin, cos := math.Sincos(math.Pi * phase)
						// Phases of order 10 are rounded to 2e-15.
						if want := z * complex(cos, -sin); cmplx.Abs(got-want) > 2e-14*cmplx.Abs(z) {
							t.Fatalf("lane %d, point %d: %g; want %g", l, j, got, want)
						}
					}
				}
			})
		}
	})
}

func TestPhaseOutsideLaw(t *testing.T) {
	each(t, func(t *testing.T) {
		// 1 + 2η(ρ − s) < 0: the law has no value, and the result must show it.
		b := NewBatch(1)
		b.SetLane(0, []complex128{0.1})
		PhaseLaw(b, []float64{0}, []float64{1}, []float64{2}, fluid.Swollen(1))
		if z := b.Lane(nil, 0)[0]; !cmplx.IsNaN(z) {
			t.Errorf("outside the law: %g; want NaN", z)
		}
	})
}

func TestDamp(t *testing.T) {
	each(t, func(t *testing.T) {
		const n = 33
		b, x := randomBatch(n, 10)
		d := make([]float64, n)
		for j := range d {
			d[j] = 1 / float64(j+1)
		}
		Damp(b, d)
		for l := range Width {
			for j, got := range b.Lane(nil, l) {
				if want := complex(real(x[l][j])*d[j], imag(x[l][j])*d[j]); got != want {
					t.Fatalf("lane %d, point %d: %g; want %g", l, j, got, want)
				}
			}
		}
	})
}

// bigMu is fluid.Law.Mu by its definition.
func bigMu(law fluid.Law, n *big.Float) *big.Float {
	eta := number(law.Swelling())
	if eta.Sign() == 0 {
		return n
	}
	y := mul(eta, n)
	root := func(x *big.Float) *big.Float { return new(big.Float).SetPrec(precision).Sqrt(x) }
	f := sub(quo(add(number(1), mul(number(3), y)), root(add(number(1), mul(number(2), y)))), number(1))
	r := root(add(number(1), mul(number(2), eta)))
	scale := quo(mul(r, mul(r, r)), mul(eta, add(number(2), mul(number(3), eta))))
	return mul(scale, f)
}
