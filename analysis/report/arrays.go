package report

import (
	"path/filepath"

	"tailrace/analysis/correlation"
	"tailrace/analysis/moments"
	"tailrace/analysis/npz"
)

// WriteMap writes a map as name into folder: x [N] from the horizon,
// mean_density [N], g2_minus_1 and g2_error [N, N], NaN where there is no
// cloud. In lab units lengths are in m and densities in atoms per m; else in ξ
// and atoms per ξ.
func (u Units) WriteMap(folder, name string, m *correlation.Map) error {
	length, density := 1.0, u.PerXi
	if u.Lab {
		length, density = u.Scale.Metres(1), u.Scale.AtomsPerMetre(1)
	}
	n := len(m.X)
	return npz.WriteFile(filepath.Join(folder, name),
		npz.Vector("x", scaled(m.X, length)),
		npz.Vector("mean_density", scaled(m.MeanDensity, density)),
		npz.Array{Name: "g2_minus_1", Shape: []int{n, n}, Data: m.G2.RawMatrix().Data},
		npz.Array{Name: "g2_error", Shape: []int{n, n}, Data: m.Error.RawMatrix().Data})
}

func scaled(v []float64, by float64) []float64 {
	out := make([]float64, len(v))
	for i, x := range v {
		out[i] = x * by
	}
	return out
}

// WriteShots writes shots.npz into folder: density [shots, N] of each
// trajectory, |ψ|² less half the commutator, so that its mean is the density
// while single values scatter as the symmetric order has them; pixel,
// step_position [shots] from the first pixel's centre, time. Units are those of
// WriteMap.
func (r *Run) WriteShots(folder string, shots moments.Shots) error {
	a := r.Account
	length, density, time := 1.0, r.Units.PerXi, 1.0
	if r.Units.Lab {
		length, density, time = r.Units.Scale.Metres(1), r.Units.Scale.AtomsPerMetre(1), r.Units.Scale.Seconds(1)
	}
	values := make([]float64, len(shots.Data))
	half := r.Problem.Commutator() / 2
	for i, v := range shots.Data {
		values[i] = (float64(v) - half) * density
	}
	step := make([]float64, shots.Count())
	for i := range step {
		step[i] = -a.MeanField.X[0] * length
	}
	return npz.WriteFile(filepath.Join(folder, "shots.npz"),
		npz.Array{Name: "density", Shape: []int{shots.Count(), shots.Pixels}, Data: values},
		npz.Scalar("pixel", r.Problem.Grid.Dx*length),
		npz.Vector("step_position", step),
		npz.Scalar("time", a.Time*time))
}
