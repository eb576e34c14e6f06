package moments

import (
	"fmt"
	"math"

	"gonum.org/v1/gonum/mat"

	"tailrace/analysis/npz"
)

// Archive is the contents of moments.npz: the sums at every recorded time, for
// merging runs of different trajectories of one config.
type Archive struct {
	Times   []float64 // ħ/(m c₀²)
	Sums    []*Sums   // of each time
	Current [][]float64
	// Problem is the fingerprint of what the trajectories are of (gpe's
	// Problem.Fingerprint): only those of one problem add.
	Problem int64
	// Seed, First and Count are the ranges of trajectories that are in, so that
	// none is counted twice.
	Seed         []uint64
	First, Count []int64
}

// Arrays returns the archive as numpy arrays: times; problem;
// seed (upper and lower 32 bits), first and count; and for
// each time i density_sum_i [N], product_sum_i [N, N] and current_sum_i [N], in
// units of n₀, n₀² and n₀c₀, symmetrically ordered.
func (a *Archive) Arrays() []npz.Array {
	var halves []int64 // numpy's readers pass through float64, which 64 bits do not
	for _, seed := range a.Seed {
		halves = append(halves, int64(seed>>32), int64(seed&math.MaxUint32))
	}
	arrays := []npz.Array{
		npz.Vector("times", a.Times),
		{Name: "problem", Shape: []int{1}, Data: []int64{a.Problem}},
		{Name: "seed", Shape: []int{len(a.Seed), 2}, Data: halves},
		{Name: "first", Shape: []int{len(a.First)}, Data: a.First},
		{Name: "count", Shape: []int{len(a.Count)}, Data: a.Count},
	}
	for i, s := range a.Sums {
		n := len(s.Density)
		full := make([]float64, n*n)
		for j := range n {
			for k := range n {
				full[j*n+k] = s.Products.At(j, k)
			}
		}
		arrays = append(arrays,
			npz.Vector(fmt.Sprintf("density_sum_%d", i), s.Density),
			npz.Array{Name: fmt.Sprintf("product_sum_%d", i), Shape: []int{n, n}, Data: full},
			npz.Vector(fmt.Sprintf("current_sum_%d", i), a.Current[i]))
	}
	return arrays
}

// Write writes moments.npz, whole or not at all.
func (a *Archive) Write(path string) error { return npz.WriteFile(path, a.Arrays()...) }

// ReadArchive reads moments.npz.
func ReadArchive(path string) (*Archive, error) {
	f, err := npz.ReadFile(path)
	if err != nil {
		return nil, err
	}
	a := &Archive{}
	if a.Times, _, err = f.Float64("times"); err != nil {
		return nil, err
	}
	for _, part := range []struct {
		name string
		to   *[]int64
	}{{"first", &a.First}, {"count", &a.Count}} {
		v, _, err := f.Float64(part.name)
		if err != nil {
			return nil, err
		}
		for _, x := range v {
			*part.to = append(*part.to, int64(x))
		}
	}
	problem, _, err := f.Float64("problem")
	if err != nil {
		return nil, err
	}
	halves, _, err := f.Float64("seed")
	if err != nil {
		return nil, err
	}
	if len(a.First) != len(a.Count) || len(halves) != 2*len(a.Count) || len(problem) != 1 {
		return nil, fmt.Errorf("%s: %w: %d first trajectories, %d counts and %d seeds", path, ErrMismatch, len(a.First), len(a.Count), len(halves)/2)
	}
	a.Problem = int64(problem[0])
	for i := range a.Count {
		a.Seed = append(a.Seed, uint64(halves[2*i])<<32|uint64(halves[2*i+1]))
	}
	total := 0
	for _, c := range a.Count {
		total += int(c)
	}
	for i := range a.Times {
		density, _, err := f.Float64(fmt.Sprintf("density_sum_%d", i))
		if err != nil {
			return nil, err
		}
		product, shape, err := f.Float64(fmt.Sprintf("product_sum_%d", i))
		if err != nil {
			return nil, err
		}
		current, _, err := f.Float64(fmt.Sprintf("current_sum_%d", i))
		if err != nil {
			return nil, err
		}
		n := len(density)
		if len(shape) != 2 || shape[0] != n || shape[1] != n || len(current) != n {
			return nil, fmt.Errorf("%s: %w: product_sum_%d has shape %v, %d points are wanted", path, ErrMismatch, i, shape, n)
		}
		a.Sums = append(a.Sums, &Sums{Count: total, Density: density, Products: mat.NewSymDense(n, product)})
		a.Current = append(a.Current, current)
	}
	return a, nil
}

// Merge adds o to a. It returns ErrMismatch when the two are not of one
// problem, grid and times, or have trajectories in common; a is then as it was.
func (a *Archive) Merge(o *Archive) error {
	if a.Problem != o.Problem {
		return fmt.Errorf("%w: they are of different scenarios", ErrMismatch)
	}
	if len(a.Times) != len(o.Times) {
		return fmt.Errorf("%w: %d recorded times and %d", ErrMismatch, len(a.Times), len(o.Times))
	}
	for i, t := range a.Times {
		if t != o.Times[i] || len(a.Sums[i].Density) != len(o.Sums[i].Density) {
			return fmt.Errorf("%w: recorded at %g with %d points and at %g with %d", ErrMismatch, t, len(a.Sums[i].Density), o.Times[i], len(o.Sums[i].Density))
		}
	}
	for i, f := range a.First {
		for k, g := range o.First {
			if a.Seed[i] == o.Seed[k] && f < g+o.Count[k] && g < f+a.Count[i] {
				return fmt.Errorf("%w: both hold trajectory %d", ErrMismatch, max(f, g))
			}
		}
	}
	for i := range a.Sums {
		if err := a.Sums[i].Merge(o.Sums[i]); err != nil {
			return err
		}
		for j, v := range o.Current[i] {
			a.Current[i][j] += v
		}
	}
	a.Seed, a.First, a.Count = append(a.Seed, o.Seed...), append(a.First, o.First...), append(a.Count, o.Count...)
	return nil
}
