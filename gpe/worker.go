package gpe

import (
	"time"

	"tailrace/gpe/lanes"
)

// worker is one goroutine's workspace for an Ensemble. It carries as many
// batches side by side as the precision has room for.
type worker struct {
	e                *Ensemble
	walker           *Walker
	single           *SingleWalker // nil in double precision
	fields           []*lanes.Batch
	density, current []float64
}

func newWorker(e *Ensemble) *worker {
	n := e.Problem.Grid.N
	w := &worker{e: e, walker: e.propagator.NewWalker(true), density: make([]float64, n*lanes.Width), current: make([]float64, n*lanes.Width)}
	if e.single != nil {
		w.single = e.single.NewWalker(true)
	}
	for range e.together() {
		w.fields = append(w.fields, lanes.NewBatch(n))
	}
	return w
}

// leg carries the fields over leg i.
func (w *worker) leg(fields []*lanes.Batch, i int) {
	if w.single != nil {
		w.single.Leg(fields, i)
		return
	}
	w.walker.Leg(fields[0], i)
}

// reset forgets the work done so far; work returns what was done since on lane
// l of field h.
func (w *worker) reset() {
	w.walker.Reset()
	if w.single != nil {
		w.single.Reset()
	}
}

func (w *worker) work(h, l int) float64 {
	if w.single != nil {
		return w.single.Work[h*lanes.Width+l]
	}
	return w.walker.Work[l]
}

// carry carries a lot of batches through all recorded times.
func (w *worker) carry(lot []int, count int, sink Sink) error {
	p, fields := w.e.Problem, w.fields[:len(lot)]
	var norm, energy [lanes.SingleWidth / lanes.Width][lanes.Width]float64
	for h, b := range fields {
		if err := p.Noise.Sample(b, p.Seed, lot[h]*lanes.Width); err != nil {
			return err
		}
		norm[h], energy[h] = w.walker.Norms(b), w.walker.Energies(b, 0)
	}
	w.reset()
	var steps time.Duration
	for i := range p.Times {
		start := time.Now()
		w.leg(fields, i)
		steps += time.Since(start)
		for h, b := range fields {
			if err := w.record(b, i, lot[h]*lanes.Width, count, sink); err != nil {
				return err
			}
		}
	}
	for h, b := range fields {
		normAfter, energyAfter := w.walker.Norms(b), w.walker.Energies(b, p.Times[len(p.Times)-1])
		kept := make([]Conserved, counting(lot[h]*lanes.Width, count))
		for l := range kept {
			kept[l] = Conserved{
				NormDrift:   normAfter[l]/norm[h][l] - 1,
				EnergyDrift: (energyAfter[l] - energy[h][l] - w.work(h, l)) / p.Ground.Atoms,
			}
		}
		sink.Finish(lot[h]*lanes.Width, kept, steps/time.Duration(len(lot)))
	}
	return nil
}

// counting returns how many lanes count of a batch that begins at first.
func counting(first, count int) int { return min(lanes.Width, count-first) }

// record hands b, at recorded time i, to sink.
func (w *worker) record(b *lanes.Batch, i, first, count int, sink Sink) error {
	w.walker.Currents(w.current, b)
	for j := range w.density {
		re, im := b.Re[j], b.Im[j]
		rho := re*re + im*im
		if !(rho < MaxDensity) {
			return &DensityError{Trajectory: first + j%lanes.Width, Time: w.e.Problem.Times[i], Density: rho}
		}
		w.density[j] = Quantise(rho)
		w.current[j] = Quantise(w.current[j])
	}
	return sink.Accept(Record{Time: i, First: first, Count: counting(first, count), Density: w.density, Current: w.current})
}
