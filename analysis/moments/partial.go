package moments

import (
	"errors"
	"fmt"
	"time"

	"tailrace/analysis/npz"
	"tailrace/gpe/lanes"
)

// ErrOtherRun means that a saved part is of another grid, ensemble or times.
var ErrOtherRun = errors.New("the saved part belongs to another run")

// Save writes what is finished to path, as numpy's .npz: done [batches], and
// for each recorded time i density_i [trajectories, points] and current_i
// [points]; norm_drift and energy_drift [trajectories]; step_seconds. Load
// reads it back and the run goes on as if it had not stopped.
func (s *Store) Save(path string) error {
	s.mu.Lock()
	defer s.mu.Unlock()
	norm, energy := make([]float64, s.Count), make([]float64, s.Count)
	for i, k := range s.kept {
		norm[i], energy[i] = k.NormDrift, k.EnergyDrift
	}
	arrays := []npz.Array{
		{Name: "done", Shape: []int{len(s.done)}, Data: s.done},
		npz.Vector("norm_drift", norm), npz.Vector("energy_drift", energy),
		npz.Scalar("step_seconds", s.stepTime.Seconds()),
	}
	for i := range s.Times {
		arrays = append(arrays,
			npz.Array{Name: fmt.Sprintf("density_%d", i), Shape: []int{s.Count, s.Points}, Data: s.density[i]},
			npz.Vector(fmt.Sprintf("current_%d", i), s.current[i]))
	}
	return npz.WriteFile(path, arrays...)
}

// Load fills an empty store from path. It returns ErrOtherRun, wrapped, when
// the sizes differ, and npz's errors when the file is not whole.
func (s *Store) Load(path string) error {
	f, err := npz.ReadFile(path)
	if err != nil {
		return err
	}
	read := func(name string, size int) ([]float64, error) {
		v, _, err := f.Float64(name)
		if err == nil && len(v) != size {
			err = fmt.Errorf("%w: %s has %d numbers, %d are wanted", ErrOtherRun, name, len(v), size)
		}
		return v, err
	}
	done, err := read("done", len(s.done))
	if err != nil {
		return err
	}
	norm, err := read("norm_drift", s.Count)
	if err != nil {
		return err
	}
	energy, err := read("energy_drift", s.Count)
	if err != nil {
		return err
	}
	seconds, err := read("step_seconds", 1)
	if err != nil {
		return err
	}
	for i := range s.Times {
		rows, err := read(fmt.Sprintf("density_%d", i), s.Count*s.Points)
		if err != nil {
			return err
		}
		for k, v := range rows {
			s.density[i][k] = float32(v)
		}
		if s.current[i], err = read(fmt.Sprintf("current_%d", i), s.Points); err != nil {
			return err
		}
	}
	for i := range s.kept {
		s.kept[i].NormDrift, s.kept[i].EnergyDrift = norm[i], energy[i]
	}
	s.finished = 0
	for b, v := range done {
		s.done[b] = v != 0
		if s.done[b] {
			s.finished += min(lanes.Width, s.Count-b*lanes.Width)
		}
	}
	s.stepTime = time.Duration(seconds[0] * float64(time.Second))
	return nil
}
