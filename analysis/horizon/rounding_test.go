package horizon

import (
	"math"
	"math/rand/v2"
	"testing"

	"tailrace/analysis/band"
	"tailrace/analysis/moments"
)

// roundingAccount is an account of a uniform cloud of density 1 on 64 points,
// of which 16 on either side are the windows.
func roundingAccount() *Account {
	a := &Account{MeanField: &Profile{}, Window: band.Window{UpFar: -20, UpNear: -4, DownNear: 4, DownFar: 20}}
	for j := range 64 {
		a.MeanField.X = append(a.MeanField.X, float64(j)-31.5)
		a.MeanField.Density = append(a.MeanField.Density, 1)
	}
	return a
}

// shotsOf returns shots with independent Gaussian fluctuations of 0.1 at every
// point, or the same one at all when twins are wanted, and what alter makes of
// them.
func shotsOf(count int, twins bool, alter func(j int, fluctuation float64, r *rand.Rand) float64) (before, after moments.Shots) {
	r := rand.New(rand.NewPCG(1, 2))
	before, after = moments.Shots{Pixels: 64}, moments.Shots{Pixels: 64}
	for range count {
		row := make([]float64, 64)
		for j := range row {
			row[j] = 0.1 * r.NormFloat64()
			if twins {
				row[j] = row[0]
			}
		}
		for j, v := range row {
			before.Data = append(before.Data, float32(1+v))
			after.Data = append(after.Data, float32(1+alter(j, v, r)))
		}
	}
	return before, after
}

// What is known of the shift in simple cases.
func TestRounding(t *testing.T) {
	const m, trajectories = 4000, 40000
	for _, c := range []struct {
		name          string
		twins         bool
		alter         func(j int, v float64, r *rand.Rand) float64
		shift, chance float64
	}{
		{"none", false, func(_ int, v float64, _ *rand.Rand) float64 { return v }, 0, 0},
		{"a constant does not count", false, func(_ int, v float64, _ *rand.Rand) float64 { return v + 0.25 }, 0, 0},
		// Both sides the same: p = 0.01 χ²₁ with mean 0.01 and deviation 0.01 √2; a
		// factor 1+ε upstream makes d = ε p.
		{"a factor on one side of twins", true, func(j int, v float64, _ *rand.Rand) float64 {
			if j < 32 {
				return 1.01 * v
			}
			return v
		}, 0.01 * math.Sqrt(1+2.0/m) * math.Sqrt(trajectories/2.0), 0.01 * math.Sqrt(float64(trajectories)/m)},
		// Independent sides with an error of 0.01 of the fluctuations on either:
		// sd(d) = 0.01 √2 sd(p), and all of it is chance.
		{"dice", false, func(_ int, v float64, r *rand.Rand) float64 { return v + 0.001*r.NormFloat64() },
			0.01 * math.Sqrt(2*float64(trajectories)/m), 0.01 * math.Sqrt(2*float64(trajectories)/m)},
	} {
		t.Run(c.name, func(t *testing.T) {
			before, after := shotsOf(m, c.twins, c.alter)
			r, err := roundingAccount().NewRounding(before, after, trajectories)
			if err != nil {
				t.Fatal(err)
			}
			t.Logf("shift %.4g, want %.4g; chance %.4g, want %.4g", r.Shift, c.shift, r.Chance, c.chance)
			// Twins are one number a shot, whose variance 4000 shots give to some
			// per cent; otherwise 256 pixels; float32 shots.
			if !(math.Abs(r.Shift-c.shift) < 0.08*c.shift+1e-4) || !(math.Abs(r.Chance-c.chance) < 0.08*c.chance+1e-4) {
				t.Errorf("shift %.4g, want %.4g; chance %.4g, want %.4g", r.Shift, c.shift, r.Chance, c.chance)
			}
			if got := r.Check(); got.OK != (c.shift <= 0.2) || got.Value != r.Shift || got.Limit != 0.2 {
				t.Errorf("check %+v", got)
			}
		})
	}
}

func TestRoundingTrial(t *testing.T) {
	for _, c := range [][2]int{{2, 2}, {31, 31}, {60, 32}, {4096, 32}, {8192, 64}, {65536, 512}} {
		if got := RoundingTrial(c[0]); got != c[1] {
			t.Errorf("%d of %d trajectories are tried, want %d", got, c[0], c[1])
		}
	}
}

func TestRoundingWithoutCloud(t *testing.T) {
	a := roundingAccount()
	a.Window.DownFar = 200
	before, after := shotsOf(4, false, func(_ int, v float64, _ *rand.Rand) float64 { return v })
	if _, err := a.NewRounding(before, after, 100); err == nil {
		t.Error("a window beyond the grid is accepted")
	}
}
