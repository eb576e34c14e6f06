package gpe

import (
	"math"

	"tailrace/gpe/lanes"
)

// local is the tables of a local flow exp(−i dt (V + g f(|ψ|²−s))).
type local struct {
	p      *Propagator
	v, g   []float64 // in units of π; for the cubic law v holds −g s too
	dv, dg []float64
	vScale float64 // scale of the kept potential table, 0 when there is none
	gScale float64
}

func newLocal(p *Propagator) local {
	n := p.Grid.N
	return local{p: p, v: make([]float64, n), g: make([]float64, n), dv: make([]float64, n), dg: make([]float64, n)}
}

// forget makes the next fill make both tables anew.
func (w *local) forget() { w.vScale, w.gScale = 0, 0 }

// fill makes the tables of a flow of length dt at time t, where they are not
// those of the last call, and says which it made.
func (w *local) fill(t, dt float64) (potential, coupling bool) {
	p := w.p
	scale := dt / math.Pi
	vSteady, gSteady := p.Landscape.Steady(t)
	if w.gScale != scale || !gSteady {
		p.Landscape.Coupling(w.g, t, scale)
		w.gScale = 0
		if gSteady {
			w.gScale = scale
		}
		coupling = true
	}
	if coupling || w.vScale != scale || !vSteady {
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
		potential = true
	}
	return potential, coupling
}

// addWork adds dt ∫ (∂V/∂t ρ + ∂g/∂t e(ρ−s)) dx, the power of the landscape, to
// the work on each lane, by the splitting's own quadrature in time.
func addWork[T lanes.Float](w *local, work []float64, b *lanes.BatchOf[T], t, dt float64) {
	p := w.p
	lo, hi := p.Landscape.Power(w.dv, w.dg, t)
	for j := lo; j < hi; j++ {
		dv, dg := w.dv[j]*dt*p.Grid.Dx, w.dg[j]*dt*p.Grid.Dx
		s := p.Ordering[j]
		res, ims := b.Re[j*len(work):][:len(work)], b.Im[j*len(work):][:len(work)]
		for l := range work {
			re, im := float64(res[l]), float64(ims[l])
			rho := re*re + im*im
			work[l] += dv * rho
			if dg != 0 {
				work[l] += dg * p.Law.Energy(rho-s)
			}
		}
	}
}
