// Package moments gathers what an ensemble records: the density of every
// trajectory at every recorded time, and the sums of densities and of their
// products that correlation maps are made of.
//
// Densities arrive rounded to gpe.Quantum, so that all sums here are exact:
// whatever the order of the trajectories, the number of workers or the parts a
// run was made in, the moments are the same to the last bit.
package moments

import (
	"fmt"
	"slices"
	"sync"
	"time"

	"tailrace/gpe"
	"tailrace/gpe/lanes"
)

// Shots is a set of density profiles: shot i is Data[i·Pixels : (i+1)·Pixels].
type Shots struct {
	Pixels int
	Data   []float32
}

// Count returns the number of shots.
func (s Shots) Count() int {
	if s.Pixels == 0 {
		return 0
	}
	return len(s.Data) / s.Pixels
}

// Shot returns shot i.
func (s Shots) Shot(i int) []float32 { return s.Data[i*s.Pixels : (i+1)*s.Pixels] }

// Store is a gpe.Sink that keeps every trajectory's density at every recorded
// time, 4 bytes a point, and what was conserved.
type Store struct {
	Count, Points, Times int

	mu       sync.Mutex
	density  [][]float32 // of each time, [Count·Points], |ψ|²
	current  [][]float64 // of each time, the sum over trajectories, [Points]
	kept     []gpe.Conserved
	done     []bool // of each batch
	finished int
	stepTime time.Duration
	onBatch  func(finished int)
}

// NewStore makes room for count trajectories of points at times. OnBatch, if
// not nil, is called with the number of finished trajectories as each batch
// ends, one call at a time.
func NewStore(count, points, times int, onBatch func(finished int)) *Store {
	s := &Store{Count: count, Points: points, Times: times, onBatch: onBatch,
		kept: make([]gpe.Conserved, count), done: make([]bool, (count+lanes.Width-1)/lanes.Width)}
	for range times {
		s.density = append(s.density, make([]float32, count*points))
		s.current = append(s.current, make([]float64, points))
	}
	return s
}

// Pending lists the batches that are not finished.
func (s *Store) Pending() []int {
	s.mu.Lock()
	defer s.mu.Unlock()
	var open []int
	for b, done := range s.done {
		if !done {
			open = append(open, b)
		}
	}
	return open
}

// Finished returns the number of finished trajectories.
func (s *Store) Finished() int {
	s.mu.Lock()
	defer s.mu.Unlock()
	return s.finished
}

// StepTime returns the time spent in time steps, summed over workers.
func (s *Store) StepTime() time.Duration {
	s.mu.Lock()
	defer s.mu.Unlock()
	return s.stepTime
}

// Accept implements gpe.Sink.
func (s *Store) Accept(r gpe.Record) error {
	if r.First+r.Count > s.Count || len(r.Density) != s.Points*lanes.Width {
		panic("moments: a record does not fit the store")
	}
	rows := s.density[r.Time]
	for j := range s.Points {
		for l := range r.Count {
			rows[(r.First+l)*s.Points+j] = float32(r.Density[j*lanes.Width+l])
		}
	}
	s.mu.Lock()
	defer s.mu.Unlock()
	sum := s.current[r.Time]
	for j := range sum {
		for l := range r.Count {
			sum[j] += r.Current[j*lanes.Width+l] // exact: multiples of gpe.Quantum
		}
	}
	return nil
}

// Finish implements gpe.Sink.
func (s *Store) Finish(first int, conserved []gpe.Conserved, steps time.Duration) {
	s.mu.Lock()
	defer s.mu.Unlock()
	copy(s.kept[first:], conserved)
	s.done[first/lanes.Width] = true
	s.finished += len(conserved)
	s.stepTime += steps
	if s.onBatch != nil {
		s.onBatch(s.finished)
	}
}

// Shots returns the finished trajectories' densities |ψ|² at a recorded time,
// in the order of their index, without copying when all are finished.
func (s *Store) Shots(time int) Shots {
	if s.finished == s.Count {
		return Shots{Pixels: s.Points, Data: s.density[time]}
	}
	out := Shots{Pixels: s.Points}
	for b, done := range s.done {
		if done {
			lo, hi := b*lanes.Width, min((b+1)*lanes.Width, s.Count)
			out.Data = append(out.Data, s.density[time][lo*s.Points:hi*s.Points]...)
		}
	}
	return out
}

// MeanCurrent returns the mean current at a recorded time, in n₀c₀.
func (s *Store) MeanCurrent(time int) []float64 {
	mean := slices.Clone(s.current[time])
	for j := range mean {
		mean[j] /= float64(s.finished)
	}
	return mean
}

// CurrentSum returns the sum over trajectories of the current at a recorded
// time, in n₀c₀.
func (s *Store) CurrentSum(time int) []float64 { return slices.Clone(s.current[time]) }

// Conserved returns the largest drift of the norm and of the energy in any
// finished trajectory.
func (s *Store) Conserved() (worst gpe.Conserved) {
	for b, done := range s.done {
		if !done {
			continue
		}
		for _, k := range s.kept[b*lanes.Width : min((b+1)*lanes.Width, s.Count)] {
			worst.NormDrift = max(worst.NormDrift, k.NormDrift, -k.NormDrift)
			worst.EnergyDrift = max(worst.EnergyDrift, k.EnergyDrift, -k.EnergyDrift)
		}
	}
	return worst
}

// String says how far the store is filled.
func (s *Store) String() string {
	return fmt.Sprintf("%d of %d trajectories", s.Finished(), s.Count)
}
