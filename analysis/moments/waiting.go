package moments

import (
	"fmt"

	"tailrace/analysis/npz"
	"tailrace/gpe"
)

// SaveTangent writes where the directions of t wait to path, as numpy's .npz:
// problem (its fingerprint), leg, step and fields [arrays, points·lanes].
func SaveTangent(path string, t *gpe.Tangent) error {
	leg, step, fields := t.State()
	size := len(fields[0])
	all := make([]float64, 0, len(fields)*size)
	for _, f := range fields {
		all = append(all, f...)
	}
	return npz.WriteFile(path,
		npz.Scalar("problem", float64(t.Problem.Fingerprint())), npz.Scalar("leg", float64(leg)), npz.Scalar("step", float64(step)),
		npz.Array{Name: "fields", Shape: []int{len(fields), size}, Data: all})
}

// LoadTangent puts t where SaveTangent was called. It returns ErrOtherRun,
// wrapped, when that was of another problem, and npz's errors when the file is
// not whole.
func LoadTangent(path string, t *gpe.Tangent) error {
	f, err := npz.ReadFile(path)
	if err != nil {
		return err
	}
	var place [3]int
	for i, name := range []string{"problem", "leg", "step"} {
		v, _, err := f.Float64(name)
		if err != nil {
			return err
		}
		if len(v) != 1 {
			return fmt.Errorf("%w: %s has %d numbers, 1 is wanted", ErrOtherRun, name, len(v))
		}
		place[i] = int(v[0])
	}
	if int64(place[0]) != t.Problem.Fingerprint() {
		return fmt.Errorf("%w: its cloud, sweep or grid is another", ErrOtherRun)
	}
	all, shape, err := f.Float64("fields")
	if err != nil {
		return err
	}
	var fields [][]float64
	if len(shape) == 2 && shape[1] > 0 {
		for i := range shape[0] {
			fields = append(fields, all[i*shape[1]:(i+1)*shape[1]])
		}
	}
	if !t.Restore(place[1], place[2], fields) {
		return fmt.Errorf("%w: it holds fields of shape %v at step %d", ErrOtherRun, shape, place[2])
	}
	return nil
}
