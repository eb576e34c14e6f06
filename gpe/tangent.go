package gpe

import (
	"context"
	"math"
	"sync"

	"tailrace/gpe/lanes"
)

// Tangent is the ensemble in the limit of weak noise, and without sampling
// error: instead of drawing trajectories it carries every direction of the
// initial noise (see Noise) under the equation linearised about the mean field,
// and the covariance of the density at a later time is the sum over directions
// of δn(x) δn(x′), δn = 2 Re ψ₀* δψ.
//
// It is the tangent map of the propagator itself, splitting included: the
// kinetic flows are the same, and a local flow exp(−iθ(|ψ|²)) takes δψ to
//
//	exp(−iθ)(δψ − 2iθ′ Re(ψ₀*δψ) ψ₀),
//
// which mixes real and imaginary part by a real 2×2 matrix of determinant 1,
// the same for all directions. For a uniform flow in its own frame that matrix
// is 1 but for a nilpotent part. The field's symmetric-order part is left out
// of the nonlinear term, as it vanishes in the limit.
//
// All directions wait at the same time: their fields are kept, 16 bytes a point
// and direction (34 MB for 1,024 points).
type Tangent struct {
	Problem *Problem

	propagator *Propagator
	mean       *Walker
	field      *lanes.Batch   // ψ₀, in every lane
	batches    []*lanes.Batch // the directions
	leg, step  int            // where they wait: before this step of this leg
}

// Moments are the mean field and the fluctuations about it at one time.
type Moments struct {
	Density []float64 // |ψ₀|² in n₀, [N]
	Current []float64 // in n₀c₀, [N]
	// Directions holds δn of each direction in n₀, [directions·N]: the
	// covariance of |ψ|² is the sum of their products.
	Directions []float64
}

// Count returns the number of directions.
func (m *Moments) Count() int { return len(m.Directions) / len(m.Density) }

// NewTangent prepares the directions of p's noise. Errors are those of
// NewPropagator.
func NewTangent(p *Problem) (*Tangent, error) {
	prop, err := NewPropagator(p.Grid, p.Law, p.Landscape, nil, p.Scheme, p.TimeStep, p.Times)
	if err != nil {
		return nil, err
	}
	t := &Tangent{Problem: p, propagator: prop, mean: prop.NewWalker(false), field: lanes.NewBatch(p.Grid.N)}
	for j, f := range p.Ground.Field {
		for l := range lanes.Width {
			t.field.Re[j*lanes.Width+l] = f
		}
	}
	for first := 0; first < p.Noise.Directions(); first += lanes.Width {
		b := lanes.NewBatch(p.Grid.N)
		p.Noise.Direct(b, first)
		t.batches = append(t.batches, b)
	}
	return t, nil
}

// Steps returns the number of time steps to the last recorded time.
func (t *Tangent) Steps() int { return t.propagator.Steps() }

// Done returns the number of time steps that lie behind.
func (t *Tangent) Done() int {
	n := t.step
	for _, l := range t.propagator.legs[:t.leg] {
		n += l.steps
	}
	return n
}

// stretch is how many time steps the directions are carried at a time.
const stretch = 64

// Run carries all directions to the next recorded time, from wherever they
// wait, and returns the moments there; after the last it returns nil. It stops
// early with ctx's error, at a place from which another call goes on. After each
// stretch it calls progress, unless that is nil, with the steps done.
func (t *Tangent) Run(ctx context.Context, workers int, progress func(done int)) (*Moments, error) {
	if t.leg == len(t.propagator.legs) {
		return nil, nil
	}
	l := &t.propagator.legs[t.leg]
	var program []operation
	for t.step < l.steps {
		if err := ctx.Err(); err != nil {
			return nil, err
		}
		to := min(t.step+stretch, l.steps)
		program = t.compile(program, l, to)
		t.each(workers, func(b *lanes.Batch) {
			for i := range program {
				program[i].apply(t.propagator.plan, b)
			}
		})
		t.step = to
		if progress != nil {
			progress(t.Done())
		}
	}
	t.leg, t.step = t.leg+1, 0
	return t.moments(), nil
}

// operation is a kinetic flow, or a local one as a matrix at each point.
type operation struct {
	kinetic *lanes.Kinetic
	matrix  []float64
}

func (o *operation) apply(plan *lanes.Plan, b *lanes.Batch) {
	if o.kinetic != nil {
		plan.Propagate(b, o.kinetic)
	} else {
		lanes.Mix(b, o.matrix)
	}
}

// compile carries the mean field from t.step to the given step of leg l and
// notes what its directions have to go through. It uses the memory of into.
func (t *Tangent) compile(into []operation, l *leg, to int) []operation {
	p := t.propagator
	spare := into[:cap(into)]
	out := into[:0]
	kinetic := func(k *lanes.Kinetic) {
		p.plan.Propagate(t.field, k)
		out = append(out, operation{kinetic: k})
	}
	if t.step == 0 {
		kinetic(l.kinetics.first)
	}
	last := len(p.Scheme.local) - 1
	t.mean.forget()
	for step := t.step; step < to; step++ {
		reached := p.Scheme.kinetic[0]
		for stage, c := range p.Scheme.local {
			var matrix []float64
			if i := len(out); i < len(spare) {
				matrix = spare[i].matrix
			}
			if matrix == nil {
				matrix = make([]float64, 4*p.Grid.N)
			}
			at, dt := l.from+(float64(step)+reached)*l.dt, c*l.dt
			t.mean.fill(at, dt)
			t.mean.tangent(matrix, t.field)
			t.mean.turn(t.field, at, dt)
			out = append(out, operation{matrix: matrix})
			if stage < last {
				kinetic(l.kinetics.inner[stage])
				reached += p.Scheme.kinetic[stage+1]
			}
		}
		if step < l.steps-1 {
			kinetic(l.kinetics.joint)
		} else {
			kinetic(l.kinetics.last)
		}
	}
	return out
}

// tangent sets matrix to the tangent map of the local flow of w's tables at
// the field in lane 0 of b.
func (w *Walker) tangent(matrix []float64, b *lanes.Batch) {
	law := w.p.Law
	for j := range b.N {
		re, im := b.Re[j*lanes.Width], b.Im[j*lanes.Width]
		rho := re*re + im*im
		slope := 2 * math.Pi * w.g[j] * law.Slope(rho)
		sin, cos := math.Sincos(math.Pi * (w.v[j] + w.g[j]*law.Mu(rho)))
		// δ − 2iθ′Re(ψ₀*δ)ψ₀, then turned by −θ.
		a, b := 1+slope*re*im, slope*im*im
		c, d := -slope*re*re, 1-slope*re*im
		m := matrix[4*j : 4*j+4]
		m[0], m[1] = cos*a+sin*c, cos*b+sin*d
		m[2], m[3] = cos*c-sin*a, cos*d-sin*b
	}
}

// each calls do on every batch of directions.
func (t *Tangent) each(workers int, do func(b *lanes.Batch)) {
	var wg sync.WaitGroup
	workers = max(1, min(workers, len(t.batches)))
	for w := range workers {
		wg.Go(func() {
			for i := w; i < len(t.batches); i += workers {
				do(t.batches[i])
			}
		})
	}
	wg.Wait()
}

// moments returns the moments where the directions wait.
func (t *Tangent) moments() *Moments {
	n, count := t.Problem.Grid.N, t.Problem.Noise.Directions()
	m := &Moments{Density: make([]float64, n), Current: make([]float64, n), Directions: make([]float64, count*n)}
	flow := make([]float64, n*lanes.Width)
	t.mean.Currents(flow, t.field)
	for j := range n {
		re, im := t.field.Re[j*lanes.Width], t.field.Im[j*lanes.Width]
		m.Density[j], m.Current[j] = re*re+im*im, flow[j*lanes.Width]
		for i := range count {
			b, at := t.batches[i/lanes.Width], j*lanes.Width+i%lanes.Width
			m.Directions[i*n+j] = 2 * (re*b.Re[at] + im*b.Im[at])
		}
	}
	return m
}

// State returns what a later Restore needs to go on from here: the counters
// and all fields, the mean field first, real parts before imaginary ones.
func (t *Tangent) State() (leg, step int, fields [][]float64) {
	for _, b := range append([]*lanes.Batch{t.field}, t.batches...) {
		fields = append(fields, b.Re, b.Im)
	}
	return t.leg, t.step, fields
}

// Restore puts t where State was called. It reports whether the state is of
// the same size and place.
func (t *Tangent) Restore(leg, step int, fields [][]float64) bool {
	_, _, own := t.State()
	if len(fields) != len(own) || leg < 0 || leg > len(t.propagator.legs) || step < 0 ||
		step > 0 && (leg == len(t.propagator.legs) || step >= t.propagator.legs[leg].steps) {
		return false
	}
	for i, f := range fields {
		if len(f) != len(own[i]) {
			return false
		}
	}
	for i, f := range fields {
		copy(own[i], f)
	}
	t.leg, t.step = leg, step
	return true
}
