package shots

import (
	"math"
	"strings"
	"testing"

	"gonum.org/v1/gonum/stat"
)

// Odd shots are found and named, sound ones are not.
func TestOdd(t *testing.T) {
	s := sample(400, 60)
	if odd := s.Odd(); len(odd) != 0 {
		t.Errorf("sound shots rejected: %v", odd)
	}
	for k := range s.Shot(7) {
		s.Shot(7)[k] *= 1.5
	}
	for k := range s.Shot(9) {
		if k%4 == 0 {
			s.Shot(9)[k] = math.NaN()
		}
	}
	for k := range s.Shot(11) {
		s.Shot(11)[k] = 3e7 * (1 + 0.5*math.Sin(2*float64(k)))
	}
	s.Kept = make([]bool, s.Count)
	for i := range s.Kept {
		s.Kept[i] = i != 20
	}
	odd := s.Odd()
	want := map[int]string{7: "atom number", 9: "missing", 11: "noise", 20: "kept"}
	if len(odd) != len(want) {
		t.Fatalf("rejected %v", odd)
	}
	for _, r := range odd {
		if !strings.Contains(r.Why, want[r.Shot]) || want[r.Shot] == "" {
			t.Errorf("shot %d: %s", r.Shot, r.Why)
		}
	}
}

// A drift is seen, and its absence too; blocks are as long as it lasts.
func TestDrifts(t *testing.T) {
	s := sample(600, 40)
	for _, d := range s.Drifts() {
		if d.PValue < 1e-3 {
			t.Errorf("no drift, and %+v", d)
		}
	}
	if n := BlockLength(s.Drifts(), s.Count); n != 1 {
		t.Errorf("blocks of %d", n)
	}
	for i := range s.Count {
		for k := range s.Shot(i) {
			s.Shot(i)[k] *= 1 + 0.1*float64(i)/600 + 0.05*math.Sin(float64(i)/20)
		}
	}
	d := s.Drifts()
	if d[0].What != "atom number" || d[0].PValue > 1e-6 || d[0].Correlation < 0.3 {
		t.Errorf("%+v", d[0])
	}
	if n := BlockLength(d, s.Count); n < 4 || n > 12 {
		t.Errorf("blocks of %d", n)
	}
}

// A step that moves by whole pixels is laid on itself exactly, and each
// normalisation does to the number what it says.
func TestAlign(t *testing.T) {
	s := sample(100, 80)
	for i := range s.Count {
		move := i % 5
		s.StepPosition[i] = float64(40+move) * s.Pixel
		for k := range s.Shot(i) {
			s.Shot(i)[k] = 3e7 * (1 - 0.5/(1+math.Exp(-float64(k-40-move)))) * (1 + 0.01*float64(i%3-1))
		}
	}
	for _, n := range []Normalisation{Raw, Rescale, Project} {
		a, err := s.Align(nil, n, 3e7, 0, 0)
		if err != nil {
			t.Fatal(err)
		}
		if a.X[40] != 0 || a.Rest > 1e-20 || len(a.Index) != 100 || len(a.X) != 76 {
			t.Errorf("%v: zero at %v, rest %g, %d shots, %d pixels", n, a.X[40], a.Rest, len(a.Index), len(a.X))
		}
		var worst float64
		for k, x := range a.X {
			column := make([]float64, 100)
			for i := range column {
				column[i] = float64(a.Shots.Shot(i)[k])
			}
			mean, sd := stat.MeanStdDev(column, nil)
			worst = math.Max(worst, sd/mean)
			if want := 1 - 0.5/(1+math.Exp(-x/s.Pixel)); math.Abs(mean-want) > 2e-4*want {
				t.Errorf("%v: %.4g at %g, want %.4g", n, mean, x, want)
			}
		}
		if (n == Raw) != (worst > 0.005) {
			t.Errorf("%v: shots scatter by %.2g", n, worst)
		}
	}
	if _, err := s.Align(make([]Rejection, 0), Raw, 1, 0, 0); err != nil {
		t.Error(err)
	}
	var all []Rejection
	for i := range 98 {
		all = append(all, Rejection{Shot: i})
	}
	if _, err := s.Align(all, Raw, 1, 0, 0); err == nil {
		t.Error("two shots are aligned")
	}
}
