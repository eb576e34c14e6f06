package gpe

import "tailrace/gpe/lanes"

// Walker is one goroutine's workspace for a Propagator.
type Walker struct {
	local
	scratch  *lanes.Batch
	Work     [lanes.Width]float64 // energy that the landscape has put into each lane, in n₀ξ m c₀²
	heedWork bool
}

// NewWalker returns a workspace. With heedWork it integrates the work that
// the moving landscape does on each lane, against which energy is checked.
func (p *Propagator) NewWalker(heedWork bool) *Walker {
	return &Walker{local: newLocal(p), heedWork: heedWork, scratch: lanes.NewBatch(p.Grid.N)}
}

// Reset forgets the work done so far.
func (w *Walker) Reset() { w.Work = [lanes.Width]float64{} }

// Leg carries b over leg i, from the recorded time before to recorded time i.
// It allocates nothing.
func (w *Walker) Leg(b *lanes.Batch, i int) {
	l := &w.p.legs[i]
	w.forget()
	walk(w.p, w.p.plan, l, &l.kinetics, b, w.turn)
}

// turn applies exp(−i dt (V + g f(|ψ|²−s))) at time t.
func (w *Walker) turn(b *lanes.Batch, t, dt float64) {
	w.fill(t, dt)
	if w.p.Law.Swelling() == 0 {
		lanes.Phase(b, w.v, w.g)
	} else {
		lanes.PhaseLaw(b, w.v, w.g, w.p.Ordering, w.p.Law)
	}
	if w.heedWork {
		addWork(&w.local, w.Work[:], b, t, dt)
	}
}

// walk carries b through the steps of a leg. Turn applies the local flow.
func walk[T lanes.Float](p *Propagator, plan *lanes.PlanOf[T], l *leg, k *kinetics[T], b *lanes.BatchOf[T], turn func(b *lanes.BatchOf[T], t, dt float64)) {
	plan.Propagate(b, k.first)
	last := len(p.Scheme.local) - 1
	for step := range l.steps {
		reached := p.Scheme.kinetic[0]
		for stage, c := range p.Scheme.local {
			turn(b, l.from+(float64(step)+reached)*l.dt, c*l.dt)
			if stage < last {
				plan.Propagate(b, k.inner[stage])
				reached += p.Scheme.kinetic[stage+1]
			}
		}
		if step < l.steps-1 {
			plan.Propagate(b, k.joint)
		} else {
			plan.Propagate(b, k.last)
		}
	}
}

// Norms returns ∫|ψ|² dx of each lane, in n₀ξ.
func (w *Walker) Norms(b *lanes.Batch) (norm [lanes.Width]float64) {
	for j := range b.N {
		for l := range lanes.Width {
			re, im := b.Re[j*lanes.Width+l], b.Im[j*lanes.Width+l]
			norm[l] += re*re + im*im
		}
	}
	for l := range norm {
		norm[l] *= w.p.Grid.Dx
	}
	return norm
}

// Energies returns the energy of each lane at time t, in n₀ξ m c₀²:
// ∫ [½|∂ψ|² + v Im ψ*∂ψ + V ρ + g e(ρ−s)] dx with e′ = f.
func (w *Walker) Energies(b *lanes.Batch, t float64) (energy [lanes.Width]float64) {
	p := w.p
	p.Landscape.Potential(w.v, t, 1)
	p.Landscape.Coupling(w.g, t, 1)
	w.forget()
	for j := range b.N {
		s := p.Ordering[j]
		for l := range lanes.Width {
			re, im := b.Re[j*lanes.Width+l], b.Im[j*lanes.Width+l]
			rho := re*re + im*im
			energy[l] += w.v[j]*rho + w.g[j]*p.Law.Energy(rho-s)
		}
	}
	copy(w.scratch.Re, b.Re)
	copy(w.scratch.Im, b.Im)
	p.plan.Forward(w.scratch)
	for place, q := range p.order {
		e := p.kineticEnergy(q) / float64(b.N)
		for l := range lanes.Width {
			re, im := w.scratch.Re[place*lanes.Width+l], w.scratch.Im[place*lanes.Width+l]
			energy[l] += e * (re*re + im*im)
		}
	}
	for l := range energy {
		energy[l] *= p.Grid.Dx
	}
	return energy
}

// Currents sets dst[j*Width+l] to the current Im ψ*∂ψ + v|ψ|² of lane l at
// point j, in n₀c₀, v the frame's drift. Its symmetric ordering needs no
// correction: the vacuum carries no current.
func (w *Walker) Currents(dst []float64, b *lanes.Batch) {
	p := w.p
	copy(w.scratch.Re, b.Re)
	copy(w.scratch.Im, b.Im)
	p.plan.Forward(w.scratch)
	for place, q := range p.order {
		k := p.k[q] / float64(b.N)
		if 2*q == p.Grid.N {
			k = 0
		}
		for i := place * lanes.Width; i < (place+1)*lanes.Width; i++ {
			w.scratch.Re[i], w.scratch.Im[i] = -k*w.scratch.Im[i], k*w.scratch.Re[i]
		}
	}
	p.plan.Backward(w.scratch)
	drift := p.Landscape.Drift()
	for i := range dst {
		re, im := b.Re[i], b.Im[i]
		dst[i] = re*w.scratch.Im[i] - im*w.scratch.Re[i] + drift*(re*re+im*im)
	}
}
