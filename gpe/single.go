package gpe

import "tailrace/gpe/lanes"

// Precision is that of the numbers in which time steps are made. Everything
// else, noise, records, energies and currents, is always double.
type Precision string

// The precisions; the zero value stands for Double.
const (
	Double Precision = "double"
	Single Precision = "single"
)

// SinglePropagator makes a Propagator's time steps in single precision. Like
// it, it may be shared; each goroutine needs a SingleWalker. Kinetic tables and
// potentials are made in double precision and rounded once.
type SinglePropagator struct {
	p        *Propagator
	plan     *lanes.SinglePlan
	ordering []float32
	legs     []kinetics[float32]
}

// Single prepares the steps of p in single precision.
func (p *Propagator) Single() *SinglePropagator {
	plan, err := lanes.NewSinglePlan(p.Grid.N)
	if err != nil {
		panic("gpe: a length with a plan in double precision only: " + err.Error())
	}
	s := &SinglePropagator{p: p, plan: plan, ordering: make([]float32, p.Grid.N)}
	lanes.Round(s.ordering, p.Ordering)
	for _, l := range p.legs {
		s.legs = append(s.legs, newKinetics(p, plan, l.dt))
	}
	return s
}

// SingleWalker is one goroutine's workspace for a SinglePropagator. It carries
// two batches at a time.
type SingleWalker struct {
	s *SinglePropagator
	local
	pair     *lanes.Single
	vSingle  []float32
	gSingle  []float32
	Work     [lanes.SingleWidth]float64 // as in Walker, of the first batch and of the second
	heedWork bool
}

// NewWalker returns a workspace; heedWork is as for Propagator.NewWalker.
func (s *SinglePropagator) NewWalker(heedWork bool) *SingleWalker {
	n := s.p.Grid.N
	return &SingleWalker{s: s, local: newLocal(s.p), pair: lanes.NewSingle(n), heedWork: heedWork,
		vSingle: make([]float32, n), gSingle: make([]float32, n)}
}

// Reset forgets the work done so far.
func (w *SingleWalker) Reset() { w.Work = [lanes.SingleWidth]float64{} }

// Leg carries one or two batches over leg i: it rounds them, makes the leg's
// steps in single precision and writes them back. What becomes of a batch does
// not depend on the other. It allocates nothing.
func (w *SingleWalker) Leg(batches []*lanes.Batch, i int) {
	if n := len(batches); n < 1 || n > lanes.SingleWidth/lanes.Width {
		panic("gpe: a single-precision walker carries one batch or two")
	}
	for h, b := range batches {
		lanes.Load(w.pair, h, b)
	}
	if len(batches) == 1 {
		lanes.Clear(w.pair, 1)
	}
	w.forget()
	walk(w.p, w.s.plan, &w.p.legs[i], &w.s.legs[i], w.pair, w.turn)
	for h, b := range batches {
		lanes.Store(b, w.pair, h)
	}
}

// turn is Walker's, with tables rounded once a step.
func (w *SingleWalker) turn(b *lanes.Single, t, dt float64) {
	potential, coupling := w.fill(t, dt)
	if potential {
		lanes.Round(w.vSingle, w.v)
	}
	if coupling {
		lanes.Round(w.gSingle, w.g)
	}
	if law := w.p.Law; law.Swelling() == 0 {
		lanes.Phase(b, w.vSingle, w.gSingle)
	} else {
		lanes.PhaseLaw(b, w.vSingle, w.gSingle, w.s.ordering, law)
	}
	if w.heedWork {
		addWork(&w.local, w.Work[:], b, t, dt)
	}
}
