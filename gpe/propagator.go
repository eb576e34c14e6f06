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
	from, to, dt float64
	steps        int
	kinetics[float64]
}

// kinetics are the tables of a leg's kinetic flows: the first and the last of
// the leg, those that join two steps, and those within a step.
type kinetics[T lanes.Float] struct {
	first, joint, last *lanes.KineticOf[T]
	inner              []*lanes.KineticOf[T]
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
	l.kinetics = newKinetics(p, p.plan, l.dt)
	return l
}

func newKinetics[T lanes.Float](p *Propagator, plan *lanes.PlanOf[T], dt float64) (k kinetics[T]) {
	table := func(share float64) *lanes.KineticOf[T] { return plan.Kinetic(p.kineticAngles(share * dt)) }
	a := p.Scheme.kinetic
	k.first, k.last, k.joint = table(a[0]), table(a[len(a)-1]), table(a[0]+a[len(a)-1])
	for _, c := range a[1 : len(a)-1] {
		k.inner = append(k.inner, table(c))
	}
	return k
}

// kineticAngles returns dt (k²/2 + vk) of each wave. At the Nyquist wave, which
// stands for both signs of k, the drift term is left out.
func (p *Propagator) kineticAngles(dt float64) []float64 {
	angle := make([]float64, p.Grid.N)
	for q := range angle {
		angle[q] = dt * p.kineticEnergy(q)
	}
	return angle
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
