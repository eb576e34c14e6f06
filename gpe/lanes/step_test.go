package lanes

import (
	"fmt"
	"math"
	"math/big"
	"testing"

	"tailrace/gpe/fluid"
)

func TestHundredStepsAgainstReference(t *testing.T) {
	const (
		n     = 64
		dx    = 0.25
		dt    = 0.02
		steps = 100
	)
	angle := make([]float64, n)
	v, g, s := make([]float64, n), make([]float64, n), make([]float64, n)
	psi := make([]complex128, n)
	for j := range n {
		wave := 2 * math.Pi * float64(min(j, n-j)) / (n * dx)
		angle[j] = wave * wave / 2 * dt
		x := (float64(j) - n/2) * dx
		v[j], g[j], s[j] = dt/math.Pi*math.Tanh(x), dt/math.Pi, 0.02
		psi[j] = complex(1+0.3*math.Sin(2*math.Pi*float64(j)/n), 0.2*math.Cos(6*math.Pi*float64(j)/n))
	}
	for _, law := range []fluid.Law{fluid.Cubic(), fluid.Swollen(0.5)} {
		ref := newBigField(psi)
		c, sn := make([]*big.Float, n), make([]*big.Float, n)
		for i := range n {
			cos, sin := bigCosSin(number(-angle[i]))
			c[i], sn[i] = quo(cos, number(n)), quo(sin, number(n))
		}
		for range steps {
			ref = ref.dft(-1)
			for i := range n {
				ref.turn(i, c[i], sn[i])
			}
			ref = ref.dft(+1)
			for j := range n {
				rho := add(mul(ref.re[j], ref.re[j]), mul(ref.im[j], ref.im[j]))
				phase := add(number(v[j]), mul(number(g[j]), bigMu(law, sub(rho, number(s[j])))))
				cos, sin := bigCosSinPi(phase)
				ref.turn(j, cos, new(big.Float).Neg(sin))
			}
		}
		for _, k := range available {
			t.Run(fmt.Sprintf("%s/swelling %g", k.name, law.Swelling()), func(t *testing.T) {
				defer use(k)()
				p, err := newPlan[float64](n, k)
				if err != nil {
					t.Fatal(err)
				}
				b := NewBatch(n)
				b.SetLane(3, psi)
				kin := p.Kinetic(angle)
				for range steps {
					p.Propagate(b, kin)
					PhaseLaw(b, v, g, s, law)
				}
				d := ref.relative(b.Lane(nil, 3))
				t.Logf("relative error %.2g", d)
				if d > 3e-14 { // rounding of 200 transforms
					t.Errorf("after %d steps the relative error is %.2g", steps, d)
				}
			})
		}
	}
}

func TestNormDrift(t *testing.T) {
	each(t, func(t *testing.T) {
		for _, law := range []fluid.Law{fluid.Cubic(), fluid.Swollen(0.5)} {
			t.Run(fmt.Sprintf("swelling %g", law.Swelling()), func(t *testing.T) {
				p := newSplitStep(t, 512)
				p.step.Fill(p.v, nil, 1, 0, 0.02/math.Pi)
				before := norm(p.batch.Lane(nil, 2))
				for range 1000 {
					p.plan.Propagate(p.batch, p.kinetic)
					PhaseLaw(p.batch, p.v, p.g, p.s, law)
				}
				drift := norm(p.batch.Lane(nil, 2))/before - 1
				t.Logf("drift %.2g", drift)
				if math.Abs(drift) > 1e-12 { // rounding only: every factor is unitary
					t.Errorf("norm drifts by %.2g in 1000 steps", drift)
				}
			})
		}
	})
}

// everything puts a batch through all that the package does to one.
func everything(p *Plan, kin *Kinetic, b *Batch) {
	n := p.Len()
	v, g, s := make([]float64, n), make([]float64, n), make([]float64, n)
	for j := range v {
		v[j], g[j], s[j] = 0.01*float64(j), 0.1, 0.05
	}
	p.Propagate(b, kin)
	Phase(b, v, g)
	PhaseLaw(b, v, g, s, fluid.Cubic())
	PhaseLaw(b, v, g, s, fluid.Swollen(0.5))
	Damp(b, v)
	p.Forward(b)
	p.Backward(b)
}

func TestLanesAreIndependent(t *testing.T) {
	eachPlan(t, []int{48, 64, 80, 128}, func(t *testing.T, p *Plan) {
		kin := p.Kinetic(make([]float64, p.Len()))
		a, x := randomBatch(p.Len(), 11)
		b, _ := randomBatch(p.Len(), 11)
		b.SetLane(3, random(p.Len(), 99))
		b.Re[3] = math.NaN()
		b.SetLane(7, x[0])
		everything(p, kin, a)
		everything(p, kin, b)
		for l := range Width {
			if l == 3 || l == 7 {
				continue
			}
			if relative(b.Lane(nil, l), a.Lane(nil, l)) != 0 {
				t.Errorf("lane %d depends on lanes 3 and 7", l)
			}
		}
		if relative(b.Lane(nil, 7), b.Lane(nil, 0)) != 0 {
			t.Error("the same field comes out different from lanes 0 and 7")
		}
	})
}

func TestNoAllocation(t *testing.T) {
	each(t, func(t *testing.T) {
		p := newSplitStep(t, 128)
		d := make([]float64, 128)
		psi := make([]complex128, 128)
		for _, c := range []struct {
			name string
			do   func()
		}{
			{"split step", p.do},
			{"transforms", func() { p.plan.Forward(p.batch); p.plan.Backward(p.batch) }},
			{"shifted law", func() { PhaseLaw(p.batch, p.v, p.g, p.s, fluid.Cubic()) }},
			{"swollen law", func() { PhaseLaw(p.batch, p.v, p.g, p.s, fluid.Swollen(0.5)) }},
			{"damp", func() { Damp(p.batch, d) }},
			{"lanes", func() { p.batch.Lane(psi, 1); p.batch.SetLane(2, psi) }},
		} {
			t.Run(c.name, func(t *testing.T) {
				if n := testing.AllocsPerRun(10, c.do); n != 0 {
					t.Errorf("%g allocations", n)
				}
			})
		}
	})
}
