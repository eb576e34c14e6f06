package report

import (
	"encoding/json"
	"math"
	"strings"
	"testing"

	"tailrace/gpe/bogoliubov/cavity"
	"tailrace/gpe/lab"
)

func cavityReport(t *testing.T, length float64) *Cavity {
	t.Helper()
	c, err := cavity.New(0.75, 1, 0.5, length, 0)
	if err != nil {
		t.Fatal(err)
	}
	modes, err := c.Modes()
	if err != nil {
		t.Fatal(err)
	}
	return &Cavity{Title: "a stretch", Config: "lock", Version: "0", Cavity: c, Modes: modes, Thresholds: c.Thresholds(length)}
}

// In lab units every number with a dimension is that in condensate units times
// its unit, under a key that names it.
func TestCavityUnits(t *testing.T) {
	r := cavityReport(t, 12)
	read := func() (v struct {
		Thresholds   []float64
		ThresholdsUm []float64 `json:"thresholds_um"`
		Length       float64
		LengthUm     float64 `json:"length_um"`
		Unstable     int     `json:"unstable_modes"`
		Modes        []struct {
			Frequency  float64
			PerS       float64 `json:"frequency_per_s"`
			Growth     float64 `json:"growth_rate"`
			GrowthPerS float64 `json:"growth_rate_per_s"`
			Time       float64 `json:"e_folding_time"`
			TimeMs     float64 `json:"e_folding_time_ms"`
		}
	}) {
		b, err := r.JSON()
		if err != nil {
			t.Fatal(err)
		}
		if err := json.Unmarshal(b, &v); err != nil {
			t.Fatal(err)
		}
		return v
	}
	plain := read()
	// rubidium at 0.7 mm/s, about
	scale, err := lab.NewScale(1.443e-25, 1, 0.7e-3)
	if err != nil {
		t.Fatal(err)
	}
	r.Units = Units{Lab: true, Scale: scale}
	inLab := read()
	ratio := func(what string, got, want, unit float64) {
		t.Helper()
		if !(math.Abs(got/(want*unit)-1) < 1e-12) {
			t.Errorf("%s: %g and %g", what, got, want)
		}
	}
	if plain.Unstable != 4 || len(plain.Modes) != 2 || len(inLab.Modes) != 2 {
		t.Fatalf("%+v", plain)
	}
	ratio("length", inLab.LengthUm, plain.Length, scale.HealingLength*1e6)
	ratio("threshold", inLab.ThresholdsUm[3], plain.Thresholds[3], scale.HealingLength*1e6)
	ratio("frequency", inLab.Modes[1].PerS, plain.Modes[1].Frequency, 1/scale.Time)
	ratio("growth rate", inLab.Modes[1].GrowthPerS, plain.Modes[1].Growth, 1/scale.Time)
	ratio("e-folding time", inLab.Modes[1].TimeMs, plain.Modes[1].Time, scale.Time*1e3)
	ratio("time and rate", plain.Modes[0].Time, 1/plain.Modes[0].Growth, 1)
}

func TestCavitySummary(t *testing.T) {
	for _, row := range []struct {
		length float64
		says   []string
		not    []string
	}{
		{1, []string{"no mode grows: the cavity is shorter than the first threshold", "1.5547"}, []string{"[2]", "e-folding"}},
		{3, []string{"     1                  0              0.04184"}, []string{"slower ones", "almost alike"}},
		{12, []string{"±0.02438", "290.5"}, []string{"slower ones"}},
		{100, []string{"and 6 slower ones, which --json lists", "… ", "grow almost alike"}, nil},
	} {
		var b strings.Builder
		if err := cavityReport(t, row.length).Summary(&b); err != nil {
			t.Fatal(err)
		}
		for _, s := range row.says {
			if !strings.Contains(b.String(), s) {
				t.Errorf("D = %g does not say %q:\n%s", row.length, s, b.String())
			}
		}
		for _, s := range row.not {
			if strings.Contains(b.String(), s) {
				t.Errorf("D = %g says %q:\n%s", row.length, s, b.String())
			}
		}
	}
}

// Modes are followed through lengths: a branch begins at each even threshold
// and passes through rest at the next.
func TestBranches(t *testing.T) {
	r := cavityReport(t, 12)
	var points []cavity.Point
	for d := 14.0; d > 1; d -= 0.1 { // in any order
		modes, err := r.Cavity.With(d).Modes()
		if err != nil {
			t.Fatal(err)
		}
		points = append(points, cavity.Point{Length: d, Modes: modes})
	}
	thresholds := r.Cavity.Thresholds(12)
	all := branches(points, thresholds, r.omegaMax())
	if len(all) != 3 {
		t.Fatalf("%d branches", len(all))
	}
	for i, b := range all {
		if b.Length[0] != thresholds[2*i] || b.GrowthRate[0] != 0 || b.Frequency[0] != 0 {
			t.Errorf("branch %d begins at D = %g with %g + %gi", i, b.Length[0], b.Frequency[0], b.GrowthRate[0])
		}
		rests := 0
		for j := range b.Length {
			if j > 0 && b.Length[j] <= b.Length[j-1] {
				t.Errorf("branch %d goes back at D = %g", i, b.Length[j])
			}
			if j > 0 && b.GrowthRate[j] == 0 {
				rests++
				if b.Length[j] != thresholds[2*i+1] {
					t.Errorf("branch %d rests at D = %g", i, b.Length[j])
				}
			}
		}
		if want := map[bool]int{true: 1, false: 0}[2*i+1 < 4]; rests != want {
			t.Errorf("branch %d rests %d times", i, rests)
		}
		if end := b.Length[len(b.Length)-1]; end != 14 {
			t.Errorf("branch %d ends at D = %g", i, end)
		}
	}
}
