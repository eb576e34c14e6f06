package gpe

import (
	"fmt"
	"math"

	"tailrace/gpe/fluid"
	"tailrace/gpe/lanes"
)

// TimeStepError reports a time step too long for the grid.
type TimeStepError struct {
	Step, Limit float64
}

func (e *TimeStepError) Error() string {
	return fmt.Sprintf("time step %.4g is unstable on this grid: dt k_max²/2 must stay below π, so at most %.4g; use a shorter step or fewer grid points", e.Step, e.Limit)
}

// Propagator carries batches of fields from time to time. It holds tables
// that do not change and may be shared; each goroutine needs a Walker.
type Propagator struct {
	Grid      Grid
	Law       fluid.Law
	Landscape Landscape
	Scheme    Scheme
	TimeStep  float64
	Ordering  []float64 // s(x_j), the commutator's density in units of n₀

	plan  *lanes.Plan
	order []int
	k     []float64
	legs  []leg
}

// leg is the stretch between two recorded times, in equal steps.
type leg struct {
	from, to, dt       float64
	steps              int
	first, joint, last *lanes.Kinetic
	inner              []*lanes.Kinetic
}

// NewPropagator prepares the way from time 0 through the given times, which
// must increase. A nil ordering is zero. The step is the longest that divides each leg evenly and is
// not longer than dt. It returns a *TimeStepError when dt is beyond the
// grid's limit, and the error of lanes.NewPlan when the number of points is
// none that it can transform.
func NewPropagator(g Grid, law fluid.Law, land Landscape, ordering []float64, scheme Scheme, dt float64, times []float64) (*Propagator, error) {
	if !(dt > 0) || dt > g.MaxTimeStep() {
		return nil, &TimeStepError{Step: dt, Limit: g.MaxTimeStep()}
	}
	plan, err := lanes.NewPlan(g.N)
	if err != nil {
		return nil, err
	}
	if ordering == nil {
		ordering = make([]float64, g.N)
	}
	p := &Propagator{Grid: g, Law: law, Landscape: land, Scheme: scheme, TimeStep: dt, Ordering: ordering,
		plan: plan, order: plan.Order(), k: g.Wavenumbers()}
	from := 0.0
	for _, to := range times {
		if !(to > from) {
			panic("gpe: recorded times must increase from zero")
		}
		steps := int(math.Ceil((to - from) / dt * (1 - 1e-12)))
		p.legs = append(p.legs, p.newLeg(from, to, steps))
		from = to
	}
	return p, nil
}

func (p *Propagator) newLeg(from, to float64, steps int) leg {
	l := leg{from: from, to: to, steps: steps, dt: (to - from) / float64(steps)}
	a := p.Scheme.kinetic
	l.first, l.last = p.kinetic(a[0]*l.dt), p.kinetic(a[len(a)-1]*l.dt)
	l.joint = p.kinetic((a[0] + a[len(a)-1]) * l.dt)
	for _, c := range a[1 : len(a)-1] {
		l.inner = append(l.inner, p.kinetic(c*l.dt))
	}
	return l
}

// kinetic makes the table of exp(−i dt (k²/2 + vk)).
func (p *Propagator) kinetic(dt float64) *lanes.Kinetic {
	angle := make([]float64, p.Grid.N)
	for q := range angle {
		angle[q] = dt * p.kineticEnergy(q)
	}
	return p.plan.Kinetic(angle)
}

// kineticEnergy returns the energy of Fourier index q in the landscape's frame.
func (p *Propagator) kineticEnergy(q int) float64 {
	return kineticEnergy(p.Grid, q, p.Landscape.Drift())
}

// Steps returns the number of time steps to the last recorded time.
func (p *Propagator) Steps() int {
	n := 0
	for _, l := range p.legs {
		n += l.steps
	}
	return n
}

// Walker is one goroutine's workspace for a Propagator.
type Walker struct {
	p        *Propagator
	v, g     []float64
	dv, dg   []float64
	scratch  *lanes.Batch
	vScale   float64 // scale of the kept potential table, 0 when there is none
	gScale   float64
	Work     [lanes.Width]float64 // energy that the landscape has put into each lane, in n₀ξ m c₀²
	heedWork bool
}

// NewWalker returns a workspace. With heedWork it integrates the work that
// the moving landscape does on each lane, against which energy is checked.
func (p *Propagator) NewWalker(heedWork bool) *Walker {
	n := p.Grid.N
	w := &Walker{p: p, heedWork: heedWork, scratch: lanes.NewBatch(n)}
	w.v, w.g = make([]float64, n), make([]float64, n)
	w.dv, w.dg = make([]float64, n), make([]float64, n)
	return w
}

// Reset forgets the work done so far.
func (w *Walker) Reset() { w.Work = [lanes.Width]float64{} }

// Leg carries b over leg i, from the recorded time before to recorded time i.
// It allocates nothing.
func (w *Walker) Leg(b *lanes.Batch, i int) {
	p, l := w.p, w.p.legs[i]
	w.vScale, w.gScale = 0, 0
	p.plan.Propagate(b, l.first)
	last := len(p.Scheme.local) - 1
	for step := range l.steps {
		reached := p.Scheme.kinetic[0]
		for stage, c := range p.Scheme.local {
			w.local(b, l.from+(float64(step)+reached)*l.dt, c*l.dt)
			if stage < last {
				p.plan.Propagate(b, l.inner[stage])
				reached += p.Scheme.kinetic[stage+1]
			}
		}
		if step < l.steps-1 {
			p.plan.Propagate(b, l.joint)
		} else {
			p.plan.Propagate(b, l.last)
		}
	}
}

// local applies exp(−i dt (V + g f(|ψ|²−s))) at time t.
func (w *Walker) local(b *lanes.Batch, t, dt float64) {
	p := w.p
	w.tables(t, dt)
	if p.Law.Swelling() == 0 {
		lanes.Phase(b, w.v, w.g)
	} else {
		lanes.PhaseLaw(b, w.v, w.g, p.Ordering, p.Law)
	}
	if w.heedWork {
		w.addWork(b, t, dt)
	}
}

// tables brings v and g, in units of π for a flow over dt, to time t; for the
// cubic law v takes in the ordering.
func (w *Walker) tables(t, dt float64) {
	p := w.p
	scale := dt / math.Pi
	vSteady, gSteady := p.Landscape.Steady(t)
	refill := false
	if w.gScale != scale || !gSteady {
		p.Landscape.Coupling(w.g, t, scale)
		w.gScale = 0
		if gSteady {
			w.gScale = scale
		}
		refill = true
	}
	if !refill && w.vScale == scale && vSteady {
		return
	}
	p.Landscape.Potential(w.v, t, scale)
	w.vScale = 0
	if vSteady {
		w.vScale = scale
	}
	if p.Law.Swelling() == 0 {
		for j, s := range p.Ordering {
			w.v[j] -= w.g[j] * s
		}
	}
}

// addWork adds dt ∫ (∂V/∂t ρ + ∂g/∂t e(ρ−s)) dx, the power of the landscape,
// by the splitting's own quadrature in time.
func (w *Walker) addWork(b *lanes.Batch, t, dt float64) {
	p := w.p
	lo, hi := p.Landscape.Power(w.dv, w.dg, t)
	for j := lo; j < hi; j++ {
		dv, dg := w.dv[j]*dt*p.Grid.Dx, w.dg[j]*dt*p.Grid.Dx
		s := p.Ordering[j]
		for l := range lanes.Width {
			re, im := b.Re[j*lanes.Width+l], b.Im[j*lanes.Width+l]
			rho := re*re + im*im
			w.Work[l] += dv * rho
			if dg != 0 {
				w.Work[l] += dg * p.Law.Energy(rho-s)
			}
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
	w.vScale, w.gScale = 0, 0
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
