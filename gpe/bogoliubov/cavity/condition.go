package cavity

import (
	"math/cmplx"

	"tailrace/gpe/bogoliubov"
)

// condition is the function of ω whose zeros in the upper half-plane are the
// modes. With P_L the plane of solutions that die away to the left, P_R that to
// the right, both followed to the middle of the cavity, it is
//
//	E(ω) = P_L ∧ P_R / (its value without a cavity) · e^{−i(s_in − s_out)D},
//
// s the sum of the two wave numbers, inside and outside, whose waves grow with
// x. The divisor is zero nowhere, the last factor takes out how the
// waves grow on the way; what is left is analytic, tends to 1 where |ω| is
// large, and stays of order 1 for cavities of any length. Because the flow at
// −ω* is the mirror image of that at ω, E(−ω*) = E(ω)*, and E is real on the
// imaginary axis.
type condition struct {
	cavity Cavity
	steps  []step
}

func newCondition(c Cavity) *condition { return &condition{c, c.walk()} }

// at returns E(ω), Im ω > 0.
func (f *condition) at(omega complex128) complex128 {
	c := f.cavity
	outside, inside := growing(omega, c.Velocity, c.Outside), growing(omega, c.Velocity, c.Inside)
	left := spanned(outside, omega, c.Velocity, c.Outside)
	// The other pair; its mirror image grows to the right.
	other := pair{-outside.sum, -4 * omega * omega / outside.product}
	right := spanned(pair{-other.sum, other.product}, omega, -c.Velocity, c.Outside)
	free := meet(left, right.mirrored())
	// The mirror image of the inside has sum s again, because all four sum to
	// zero.
	p := f.follow(left, omega, c.Velocity, outside.sum, inside.sum)
	q := f.follow(right, omega, -c.Velocity, outside.sum, inside.sum)
	return meet(p, q.mirrored()) / free
}

// follow carries a plane through half the cavity.
func (f *condition) follow(p plane, omega complex128, v float64, outer, inner complex128) plane {
	for i := range f.steps {
		s := &f.steps[i]
		e := equation{omega: omega, turn: complex(0, 2*v), z: complex(s.series[0], 0),
			rate: 1i * (outer + (inner-outer)*complex(s.share, 0))}
		if len(s.series) == 1 {
			p = flat(p, e, s.length)
		} else {
			p = s.taylor(p, e)
		}
	}
	return p
}

// still is the frequency, over ω_max, that stands for zero: below it growth is
// not told from none.
const still = 1e-6

// standing returns E at ω → 0, a real number that changes its sign where
// another mode begins to grow.
func (f *condition) standing() float64 {
	return real(f.at(complex(0, still*f.cavity.topFrequency())))
}

// widest is the largest frequency at which modes are looked for. Waves of
// negative norm inside have frequencies up to ω_max, the top of their branch;
// a mode, which has norm zero, is made with their help.
func (c Cavity) widest() float64 {
	return 1.5*c.topFrequency() + c.GrowthBound()
}

// topFrequency is ω_max inside.
func (c Cavity) topFrequency() float64 { return bogoliubov.MaxFrequency(c.Velocity, c.Inside) }

func finite(z complex128) bool { return !cmplx.IsNaN(z) && !cmplx.IsInf(z) }
