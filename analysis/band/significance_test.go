package band

import (
	"math"
	"slices"
	"testing"

	"gonum.org/v1/gonum/mat"
	"gonum.org/v1/gonum/stat"
)

func TestTemplate(t *testing.T) {
	s := strong.source(t).sides(t, 10, 1)
	pattern := strong.pattern(s)
	kept := slices.Clone(pattern)
	w := Template(s, pattern)
	if !slices.Equal(pattern, kept) {
		t.Error("the pattern was changed")
	}
	if sum := mat.Sum(w); math.Abs(sum) > 1e-9 { // rounding; the template's own size is some 1,000
		t.Errorf("a constant map has strength %v", sum)
	}
	strength := 0.0
	for i, v := range pattern {
		strength += w.RawMatrix().Data[i] * v
	}
	if math.Abs(strength-1) > 1e-12 {
		t.Errorf("the pattern has strength %v, want 1", strength)
	}
}

// The strength is that of the planted band in units of the pattern, and its
// significance grows as the root of the number of shots.
func TestSignificance(t *testing.T) {
	const seeds = 8
	src := strong.source(t)
	mean := map[int]float64{}
	for _, shots := range []int{500, 2000} {
		var strength, significance []float64
		for k := range seeds {
			s := src.sides(t, shots, uint64(1000+k))
			n := Shuffle(s, Template(s, strong.pattern(s)), 200, uint64(k))
			if len(n.Shuffled) != 200 {
				t.Fatalf("%d shuffles", len(n.Shuffled))
			}
			if n.PValue != 1.0/201 {
				t.Errorf("p = %v with %v standard deviations", n.PValue, n.Significance)
			}
			strength = append(strength, n.Strength)
			significance = append(significance, n.Significance)
		}
		m, sd := stat.MeanStdDev(strength, nil)
		if math.Abs(m-1) > 4*sd/math.Sqrt(seeds) {
			t.Errorf("of %d shots the strength is %.3f ± %.3f, want 1", shots, m, sd/math.Sqrt(seeds))
		}
		mean[shots] = stat.Mean(significance, nil)
		t.Logf("%d shots: %.1f standard deviations", shots, mean[shots])
	}
	// Each mean is known to 1/√8 = 0.35 standard deviations, and the shuffles'
	// own scatter to 5 %/√8: 4 of those.
	if r := mean[2000] / mean[500]; math.Abs(r-2) > 0.35 {
		t.Errorf("four times the shots multiply the significance by %.2f, want 2", r)
	}
}

// Without a band the significance is a standard Gaussian number and the
// p-value is uniform: the claim of a find is worth what it says.
func TestNoBand(t *testing.T) {
	none := strong
	none.amplitude = 0
	src := none.source(t)
	const seeds = 40
	var significance, p []float64
	for k := range seeds {
		s := src.sides(t, 300, uint64(2000+k))
		n := Shuffle(s, Template(s, strong.pattern(s)), 250, uint64(k))
		significance = append(significance, n.Significance)
		p = append(p, n.PValue)
	}
	mean, sd := stat.MeanStdDev(significance, nil)
	t.Logf("significance %.2f ± %.2f", mean, sd)
	if math.Abs(mean) > 0.5 || sd < 0.7 || sd > 1.3 { // 3 of 1/√40, and of 1/√80
		t.Errorf("significance is %.2f ± %.2f, want 0 ± 1", mean, sd)
	}
	slices.Sort(p)
	far := 0.0
	for i, v := range p {
		far = math.Max(far, math.Max(math.Abs(v-float64(i)/seeds), math.Abs(v-float64(i+1)/seeds)))
	}
	// Kolmogorov and Smirnov: 1.63/√40 is exceeded by 1 % of uniform samples.
	if far > 1.63/math.Sqrt(seeds) {
		t.Errorf("p-values depart from uniform by %.3f: %.2f", far, p)
	}
}

// What each side does by itself is in the shuffles too: noise that is common
// to a side makes no find.
func TestOneSidedNoise(t *testing.T) {
	none := strong
	none.amplitude = 0
	src := none.source(t)
	var significance []float64
	for k := range 20 {
		s := src.sides(t, 300, uint64(3000+k))
		for i := range s.Shots() { // a noise that all points of a side share
			u, d := s.U.RawRowView(i), s.D.RawRowView(i)
			a, b := u[0]*3, d[0]*3
			for j := range u {
				u[j] += a
			}
			for j := range d {
				d[j] += b
			}
		}
		n := Shuffle(s, Template(s, strong.pattern(s)), 100, uint64(k))
		significance = append(significance, n.Significance)
	}
	mean, sd := stat.MeanStdDev(significance, nil)
	if math.Abs(mean) > 0.9 || sd > 1.6 { // 4 of 1/√20, and of 1/√40
		t.Errorf("significance is %.2f ± %.2f, want 0 ± 1", mean, sd)
	}
}

// The same seed gives the same shuffles, another one others.
func TestShuffleSeed(t *testing.T) {
	s := strong.source(t).sides(t, 100, 1)
	w := Template(s, strong.pattern(s))
	a, b, c := Shuffle(s, w, 20, 1), Shuffle(s, w, 20, 1), Shuffle(s, w, 20, 2)
	if !slices.Equal(a.Shuffled, b.Shuffled) || slices.Equal(a.Shuffled, c.Shuffled) {
		t.Error("shuffles do not follow their seed")
	}
}

// The line that is fitted without being told the angle has the planted one,
// within errors that are the scatter over sets of shots.
func TestFitLine(t *testing.T) {
	const seeds = 16
	src := strong.source(t)
	var pulls, slopes, widths []float64
	for k := range seeds {
		s := src.sides(t, 2000, uint64(4000+k))
		l, err := FitLine(s, strong.Geometry, strong.kappa, 30, uint64(k))
		if err != nil {
			t.Fatal(err)
		}
		pulls = append(pulls, (l.Slope-strong.Slope())/l.SlopeError)
		slopes = append(slopes, l.Slope)
		widths = append(widths, l.Kappa/strong.kappa)
		if l.Resamples != 30 || math.Abs(l.Slope-strong.Slope()/l.Ratio) > 1e-12 {
			t.Errorf("%+v", l)
		}
	}
	mean, sd := stat.MeanStdDev(slopes, nil)
	t.Logf("slopes %.3f ± %.3f, want %.3f; pulls %.2f; κ %.2f", mean, sd, strong.Slope(), pulls, stat.Mean(widths, nil))
	for _, v := range pulls {
		if math.Abs(v) > 3.5 {
			t.Errorf("the slope is %.1f standard errors off", v)
		}
	}
	if m, s := stat.MeanStdDev(pulls, nil); math.Abs(m) > 1 || s < 0.5 || s > 1.6 { // 4 of 1/√16; 3 of 1/√32
		t.Errorf("pulls are %.2f ± %.2f, want 0 ± 1", m, s)
	}
	if m := stat.Mean(widths, nil); math.Abs(m-1) > 0.15 { // 4 of what 16 fits scatter by
		t.Errorf("κ is %.2f of the planted one", m)
	}
}

// The fit is not held to the angle it is told: a band at another one is found.
func TestFitLineTurned(t *testing.T) {
	s := strong.source(t).sides(t, 8000, 5)
	told := Geometry{Up: strong.Up, Down: strong.Down * 0.8}
	l, err := FitLine(s, told, strong.kappa, 30, 1)
	if err != nil {
		t.Fatal(err)
	}
	if math.Abs(l.Slope-strong.Slope()) > 4*l.SlopeError || l.SlopeError > 0.2*math.Abs(strong.Slope()) {
		t.Errorf("slope %.3f ± %.3f, want %.3f", l.Slope, l.SlopeError, strong.Slope())
	}
}
