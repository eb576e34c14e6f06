package lanes

import "math"

// Kinetic is the table exp(−i·angle_k)/N of one sub-step in the scrambled
// order of the plan that made it. It serves that plan only.
type Kinetic struct {
	plan   *Plan
	re, im []float64
}

// Kinetic returns the table for the phase angle[k] in radians of each wave
// index k = 0, …, N−1 in the usual order of discrete Fourier transforms. For
// kinetic energy ½k² and a sub-step dt, angle = ½k²·dt with k the signed wave
// number. The factor 1/N that Backward leaves out is part of the table.
func (p *Plan) Kinetic(angle []float64) *Kinetic {
	checkLength("kinetic angle", len(angle), p.n)
	kin := &Kinetic{plan: p, re: aligned(p.n), im: aligned(p.n)}
	norm := 1 / float64(p.n)
	for place, k := range p.order {
		s, c := math.Sincos(angle[k])
		kin.re[place], kin.im[place] = norm*c, -norm*s
	}
	return kin
}

// Propagate does one kinetic sub-step on every lane: forward transform,
// multiplication by the table, backward transform, natural order in and out.
// The last forward pass, the multiplication and the first backward pass are
// one sweep. It panics if the table comes from another plan.
func (p *Plan) Propagate(b *Batch, kin *Kinetic) {
	p.check(b)
	if kin.plan != p {
		panic("lanes: kinetic table of another plan")
	}
	last := len(p.passes) - 1
	for i := 0; i < last; i++ {
		q := &p.passes[i]
		p.kernel.forward[q.radix](b.Re, b.Im, q)
	}
	p.kernel.middle[p.passes[last].radix](b.Re, b.Im, kin.re, kin.im)
	for i := last - 1; i >= 0; i-- {
		q := &p.passes[i]
		p.kernel.backward[q.radix](b.Re, b.Im, q)
	}
}
