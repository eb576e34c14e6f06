package gpe

import (
	"context"
	"crypto/sha256"
	"encoding/binary"
	"errors"
	"fmt"
	"io"
	"math"
	"slices"
	"sync"
	"time"

	"tailrace/gpe/fluid"
	"tailrace/gpe/lanes"
)

// Problem is one scenario in condensate units: all that an ensemble depends
// on. NewEnsemble does the work that its trajectories share.
type Problem struct {
	Grid           Grid
	Law            fluid.Law
	Landscape      Landscape
	Ground         *Ground
	Noise          Noise
	AtomsPerLength float64 // n₀ξ
	Temperature    float64 // of the cloud, m c₀²/k_B
	Cutoff         float64 // of the noise, 0 for the whole grid
	Scheme         Scheme
	TimeStep       float64
	Precision      Precision // of the time steps
	Times          []float64 // recorded, rising, from 0
	Seed           uint64
}

// Commutator returns s = [ψ(x),ψ†(x)] in units of n₀: the number of modes
// that carry noise per length over n₀ξ.
func (p *Problem) Commutator() float64 {
	if p.Cutoff <= 0 || p.Cutoff >= p.Grid.MaxWavenumber() {
		return 1 / (p.AtomsPerLength * p.Grid.Dx)
	}
	waves := 2*math.Floor(p.Cutoff*p.Grid.Length()/(2*math.Pi)) + 1
	return waves / (p.AtomsPerLength * p.Grid.Length())
}

// Atoms returns the number of atoms in the cloud.
func (p *Problem) Atoms() float64 { return p.Ground.Atoms * p.AtomsPerLength }

// Quantum is the grain to which recorded densities (in n₀) and currents (in
// n₀c₀) are rounded. Products of two densities are then multiples of
// Quantum², and sums of them are exact in float64 as long as they stay below
// 2⁵³·Quantum² = 131,072: so moments do not depend on the order of adding,
// on how many workers there were, or on how a run was cut into parts. The
// rounding, 10⁻⁶ of n₀, is far below the quantum noise of one grid point.
const Quantum = 0x1p-18

// MaxDensity is the largest density that a record can hold, 2²⁴ Quantum: up
// to it densities are exact in float32.
const MaxDensity = 0x1p24 * Quantum

// MaxTrajectories bounds an ensemble so that sums of products of densities of
// order one stay exact.
const MaxTrajectories = 65536

// Record is one batch of trajectories at one recorded time.
type Record struct {
	Time    int // index into Problem.Times
	First   int // index of the trajectory in lane 0
	Count   int // lanes that count
	Density []float64
	Current []float64
}

// Conserved is what a trajectory kept.
type Conserved struct {
	NormDrift   float64 // relative change of ∫|ψ|²
	EnergyDrift float64 // (change of energy − work done by the landscape) per atom, in m c₀²
}

// Sink takes what an ensemble produces. Its methods are called from several
// goroutines at once, in no fixed order; slices are only valid during a call.
type Sink interface {
	// Accept takes a record: Density[j*lanes.Width+l] = |ψ|² and Current alike,
	// both rounded to Quantum, symmetrically ordered.
	Accept(r Record) error
	// Finish takes the end of a batch, after its records.
	Finish(first int, conserved []Conserved, steps time.Duration)
}

// Ensemble runs the trajectories of a Problem.
type Ensemble struct {
	Problem    *Problem
	propagator *Propagator
	single     *SinglePropagator // nil in double precision
}

// NewEnsemble prepares the trajectories of p. It returns the errors of
// NewPropagator.
func NewEnsemble(p *Problem) (*Ensemble, error) {
	ordering := make([]float64, p.Grid.N)
	fill(ordering, p.Commutator())
	prop, err := NewPropagator(p.Grid, p.Law, p.Landscape, ordering, p.Scheme, p.TimeStep, p.Times)
	if err != nil {
		return nil, err
	}
	e := &Ensemble{Problem: p, propagator: prop}
	if p.Precision == Single {
		e.single = prop.Single()
	}
	return e, nil
}

// Steps returns the time steps of one trajectory.
func (e *Ensemble) Steps() int { return e.propagator.Steps() }

// DensityError reports a density that no record can hold: the equation has
// become unstable or the cloud has collapsed.
type DensityError struct {
	Trajectory int
	Time       float64
	Density    float64
}

func (e *DensityError) Error() string {
	return fmt.Sprintf("trajectory %d has density %.3g n₀ at time %.4g ħ/mc²: the time step is too long for this grid, or the potential too deep", e.Trajectory, e.Density, e.Time)
}

// together returns how many batches a worker carries side by side.
func (e *Ensemble) together() int {
	if e.single != nil {
		return lanes.SingleWidth / lanes.Width
	}
	return 1
}

// Run carries the given batches (batch i is trajectories 8i to 8i+7) through
// all recorded times on the given number of workers, and hands them to sink;
// of the last batch only trajectories below count do count. A trajectory
// depends on the seed and its index alone. Run stops early, with ctx's error,
// after the batches in hand when ctx is cancelled.
func (e *Ensemble) Run(ctx context.Context, batches []int, count, workers int, sink Sink) error {
	ctx, cancel := context.WithCancelCause(ctx)
	defer cancel(nil)
	queue := make(chan []int)
	go func() {
		defer close(queue)
		for lot := range slices.Chunk(batches, e.together()) {
			select {
			case queue <- lot:
			case <-ctx.Done():
				return
			}
		}
	}()
	var wg sync.WaitGroup
	for range max(1, workers) {
		wg.Go(func() {
			w := newWorker(e)
			for lot := range queue {
				if ctx.Err() != nil {
					return
				}
				if err := w.carry(lot, count, sink); err != nil {
					cancel(err)
					return
				}
			}
		})
	}
	wg.Wait()
	if err := context.Cause(ctx); err != nil && !errors.Is(err, context.Canceled) {
		return err
	}
	return ctx.Err()
}

// Quantise rounds to a multiple of Quantum.
func Quantise(x float64) float64 { return math.RoundToEven(x/Quantum) * Quantum }

// MeanField carries the ground state itself, without noise, and returns its
// density and current at each of the given times, each [N].
func MeanField(p *Problem, times []float64) (density, current [][]float64, err error) {
	prop, err := NewPropagator(p.Grid, p.Law, p.Landscape, nil, p.Scheme, p.TimeStep, times)
	if err != nil {
		return nil, nil, err
	}
	w, b := prop.NewWalker(false), lanes.NewBatch(p.Grid.N)
	for l := range lanes.Width {
		for j, f := range p.Ground.Field {
			b.Re[j*lanes.Width+l] = f
		}
	}
	flow := make([]float64, p.Grid.N*lanes.Width)
	for i := range times {
		w.Leg(b, i)
		w.Currents(flow, b)
		rho, j := make([]float64, p.Grid.N), make([]float64, p.Grid.N)
		for x := range rho {
			re, im := b.Re[x*lanes.Width], b.Im[x*lanes.Width]
			rho[x], j[x] = re*re+im*im, flow[x*lanes.Width]
		}
		density, current = append(density, rho), append(current, j)
	}
	return density, current, nil
}

// Fingerprint is a hash of all that a trajectory of p depends on but the seed
// and its index, in 52 bits so that it passes through a float64. It is the same
// on every machine as long as the ground state is, to rounding: that enters
// through what it was found from.
func (p *Problem) Fingerprint() int64 {
	h := sha256.New()
	put := func(v ...float64) {
		for _, f := range v {
			var b [8]byte
			binary.LittleEndian.PutUint64(b[:], math.Float64bits(f))
			h.Write(b[:])
		}
	}
	put(float64(p.Grid.N), p.Grid.Dx, p.Grid.Origin, p.Law.Swelling(), p.AtomsPerLength, p.Temperature, p.Cutoff, p.TimeStep, p.Ground.Mu, p.Landscape.Drift())
	put(p.Times...)
	put(p.Ground.V...)
	table := make([]float64, p.Grid.N)
	for _, t := range append([]float64{0}, p.Times...) {
		p.Landscape.Potential(table, t, 1)
		put(table...)
		p.Landscape.Coupling(table, t, 1)
		put(table...)
	}
	io.WriteString(h, p.Scheme.Name)
	if p.Precision == Single { // what was said of problems in double precision stays
		io.WriteString(h, string(p.Precision))
	}
	return int64(binary.LittleEndian.Uint64(h.Sum(nil)) >> 12)
}
