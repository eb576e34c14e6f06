package lanes

import "math"

// KineticOf is the table exp(−i·angle_k)/N of one sub-step in the scrambled
// order of the plan that made it. It serves that plan only.
type KineticOf[T Float] struct {
	plan   *PlanOf[T]
	re, im []T
}

// Kinetic is a table in double precision, SingleKinetic one in single.
type (
	Kinetic       = KineticOf[float64]
	SingleKinetic = KineticOf[float32]
)

// Kinetic returns the table for the phase angle[k] in radians of each wave
// index k = 0, …, N−1 in the usual order of discrete Fourier transforms. For
// kinetic energy ½k² and a sub-step dt, angle = ½k²·dt with k the signed wave
// number. The factor 1/N that Backward leaves out is part of the table.
func (p *PlanOf[T]) Kinetic(angle []float64) *KineticOf[T] {
	checkLength("kinetic angle", len(angle), p.n)
	kin := &KineticOf[T]{plan: p, re: aligned[T](p.n), im: aligned[T](p.n)}
	norm := 1 / float64(p.n)
	for place, k := range p.order {
		s, c := math.Sincos(angle[k])
		kin.re[place], kin.im[place] = T(norm*c), T(-norm*s)
	}
	return kin
}

// Propagate does one kinetic sub-step on every lane: forward transform,
// multiplication by the table, backward transform, natural order in and out.
// The last forward pass, the multiplication and the first backward pass are
// one sweep. It panics if the table comes from another plan.
func (p *PlanOf[T]) Propagate(b *BatchOf[T], kin *KineticOf[T]) {
	p.check(b)
	if kin.plan != p {
		panic("lanes: kinetic table of another plan")
	}
	last := len(p.passes) - 1
	for i := 0; i < last; i++ {
		q := &p.passes[i]
		p.sweeps.forward[q.radix](b.Re, b.Im, q)
	}
	p.sweeps.middle[p.passes[last].radix](b.Re, b.Im, kin.re, kin.im)
	for i := last - 1; i >= 0; i-- {
		q := &p.passes[i]
		p.sweeps.backward[q.radix](b.Re, b.Im, q)
	}
}
